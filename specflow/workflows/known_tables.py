"""A budget as known as report tables and as data."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from specflow.budgets.as_known import KnownServed
from specflow.budgets.knowledge import KnownLine
from specflow.budgets.reallocation import Miss
from specflow.budgets.required import Required
from specflow.model.report import CellTone, ReportCell, ReportRow, ReportTable
from specflow.reports.figures import margin, number, text
from specflow.units import format_unit, parse_unit, tolerance_unit
from specflow.workflows.allocate_tables import closure_as_json, closure_table, plain_row, table
from specflow.workflows.allocated_limit import limit_text_of
from specflow.workflows.as_known import KnownBudget


def known_tables(found: KnownBudget) -> list[ReportTable]:
    """Return margins as planned and as known, the source of every line, and what misses its allocation."""
    tables = [_margins(found), _sources(found)]
    if found.reallocation.misses:
        tables += [_misses(found), closure_table(found.reallocation.with_misses)]
    if found.reallocation.proposal:
        tables.append(_proposal(found))
    return tables


def _margins(found: KnownBudget) -> ReportTable:
    known = found.known
    planned = {one.requirement.id: one for one in known.planned.served}
    rows = []
    for one in known.served:
        unit = one.served.margin_unit
        worst = one.worst
        cells = (
            text(one.served.requirement.id),
            margin(planned[one.served.requirement.id].smallest_margin, unit),
            margin(one.served.smallest_margin, unit),
            margin(_at(one, worst, "predicted"), unit),
            text(f"{_at(one, worst, 'probability'):.3f}" if worst >= 0 else ""),
            text(known.result.required.words(worst) if worst >= 0 else ""),
        )
        rows.append(ReportRow(id=one.served.requirement.id, cells=cells))
    whom = f"{known.serial}, as built" if known.serial else "the type: the next system is predicted"
    at_confidence = f"With {known.confidence:.0%}"
    intro = (
        f"as of {found.as_of}, {whom}\n"
        "The probability is that of one place; those of several places may not be multiplied."
    )
    titles = ("Requirement", "As planned", "As known", at_confidence, "Probability", "Worst at")
    return table("margins", f"Margins of the budget {known.budget.id}", intro, titles, rows)


def _at(one: KnownServed, place: int, name: str) -> float:
    return float(getattr(one, name)[place]) if place >= 0 else math.nan


def _sources(found: KnownBudget) -> ReportTable:
    rows = [row for line in found.known.lines for row in _source_rows(found, line)]
    titles = ("Line", "Value", "Source", "Spread", "Shared u", "At")
    return table("sources", "What is known of each line", "", titles, rows)


def _source_rows(found: KnownBudget, line: KnownLine) -> list[ReportRow]:
    """Return one row for each source of a line, with the places it was used at."""
    words = [line.source_words(place) for place in range(len(line.value))]
    rows = []
    unit = line.read.line.unit
    for source in dict.fromkeys(words):
        places = [place for place, one in enumerate(words) if one == source]
        values = line.value[places]
        shown = number(float(values[0]), unit)
        if np.ptp(values) > 0:
            shown = text(
                f"{number(float(values.min()), unit).text} to {number(float(values.max()), unit).text}"
            )
        at = "all points" if len(places) == len(words) else "; ".join(
            found.known.result.required.words(place) for place in places[:4]
        ) + ("; ..." if len(places) > 4 else "")  # fmt: skip
        rows.append(
            ReportRow(
                id=line.read.line.place,
                cells=(
                    text(line.read.line.place),
                    shown,
                    text(source, CellTone.PLAIN if line.is_known[places[0]] else CellTone.QUIET),
                    _amount(float(line.spread[places].max()), unit),
                    _amount(float(line.common[places].max()), unit),
                    text(at),
                ),
            )
        )
    return rows


def _amount(value: float, unit: str) -> ReportCell:

    return number(value, format_unit(tolerance_unit(parse_unit(unit)))) if value > 0 else text("")


def _misses(found: KnownBudget) -> ReportTable:
    rows = []
    for one in found.reallocation.misses:
        costs = ", ".join(
            f"{cost.requirement} {cost.before - cost.after:.2g} {cost.unit} ({cost.before:+.3g} → {cost.after:+.3g})"
            for cost in one.costs
        )
        rows.append(
            plain_row(
                one.line,
                one.line,
                f"{one.value:.4g} {one.unit}",
                f"{one.allowed:.4g} {one.unit}",
                f"{one.short:.3g}",
                one.words,
                one.source,
                costs or "nothing",
            )
        )
    titles = ("Line", "Known", "Allowed", "Short by", "At", "Source", "Costs the system")
    return table("misses", "Blocks that miss their allocation", found.reallocation.sentence, titles, rows)


def _proposal(found: KnownBudget) -> ReportTable:
    rows = [
        plain_row(
            f"{one.block} {one.parameter}",
            one.block,
            one.parameter,
            limit_text_of(one, found.known.result.required),
            one.words,
        )
        for one in found.reallocation.proposal
    ]
    intro = found.reallocation.closure.sentence
    return table("proposal", "Proposed re-allocation", intro, ("Block", "Parameter", "Limit", "Why"), rows)


def known_as_json(found: KnownBudget) -> dict[str, Any]:
    """Return a budget as known as data for scripts."""
    known, changes = found.known, found.reallocation
    required = known.result.required
    planned = {one.requirement.id: one.smallest_margin for one in known.planned.served}
    return {
        "budget": known.budget.id,
        "budget_revision": known.budget.revision,
        "serial": known.serial,
        "as_of": found.as_of.isoformat(),
        "confidence": known.confidence,
        "tables": list(found.tables),
        "limits": [_limit_as_json(one, planned[one.served.requirement.id]) for one in known.served],
        "lines": [_line_as_json(line, required) for line in known.lines],
        "misses": [_miss_as_json(one) for one in changes.misses],
        "slack": [
            {"line": one.line, "amount": one.amount, "unit": one.unit, "source": one.source}
            for one in changes.slack
        ],
        "still_closes": closure_as_json(changes.with_misses),
        "proposal": [
            {"block": one.block, "parameter": one.parameter, "limit": limit_text_of(one, required)}
            for one in changes.proposal
        ],
        "sentence": changes.sentence,
        "notes": list(found.notes),
    }


def _limit_as_json(one: KnownServed, planned: float) -> dict[str, Any]:
    return {
        "requirement": one.served.requirement.id,
        "unit": one.served.margin_unit,
        "planned": _plain(planned),
        "known": _plain(one.served.smallest_margin),
        "predicted": _plain(_at(one, one.worst, "predicted")),
        "probability": _plain(_at(one, one.worst, "probability")),
        "closes": one.served.closes,
    }


def _line_as_json(line: KnownLine, required: Required) -> dict[str, Any]:
    own = line.read.line
    places = [
        {
            "at": required.words(place),
            "value": float(line.value[place]),
            "source": line.source_words(place),
            "spread": float(line.spread[place]),
            "common": float(line.common[place]),
        }
        for place in range(required.size)
    ]
    return {
        "position": own.position,
        "block": own.block,
        "parameter": own.parameter,
        "unit": own.unit,
        "places": places,
    }


def _miss_as_json(one: Miss) -> dict[str, Any]:
    costs = [
        {"requirement": cost.requirement, "before": cost.before, "after": cost.after, "unit": cost.unit}
        for cost in one.costs
    ]
    return {
        "line": one.line,
        "value": one.value,
        "allowed": one.allowed,
        "short": one.short,
        "unit": one.unit,
        "at": one.words,
        "source": one.source,
        "costs": costs,
    }


def _plain(value: float) -> float | None:
    return value if math.isfinite(value) else None
