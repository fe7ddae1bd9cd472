"""What a derivation gives, and the laws there are, as report tables: what every front end shows."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Any

from specflow.derive import LAWS, Law
from specflow.derive.law import Setting
from specflow.derive.request import covered_words
from specflow.model.report import CellTone, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.units import format_value
from specflow.workflows.derive import DerivePreview
from specflow.workflows.derive_again import Again
from specflow.workflows.derive_proposals import Proposal


def preview_table(preview: DerivePreview) -> ReportTable:
    """Return the derived values, one row a group of conditions and item."""
    column = preview.table.values[0]
    rows = [
        _row(
            one.group or "(all rows)",
            (
                one.group,
                _figure(one.value, one.high, column.unit),
                "" if one.u != one.u else format_value(one.u, decimals=4),
                one.at,
                str(one.readings),
            ),
        )
        for one in preview.derived.results
    ]
    rows += [
        _row(
            one.group or "(all rows)",
            (one.group, "refused", "", f"{one.why}; {one.remedy}", ""),
            CellTone.BAD,
        )
        for one in preview.derived.refused
    ]
    if len(preview.derived.results) < preview.table.rows:
        left = preview.table.rows - len(preview.derived.results)
        rows.append(_row("more", ("", f"... and {left} more", "", "", ""), CellTone.QUIET))
    title = f"{column.quantity.parameter}: {preview.derivation.words}"
    return _table(
        "derived", title, _intro(preview), ("Item and conditions", "Value", "u", "At", "Readings"), rows
    )


def _intro(preview: DerivePreview) -> str:
    quantity, derived = preview.derivation.gives, preview.derived
    identity = [quantity.parameter, quantity.plane, quantity.statistic, quantity.polarisation]
    lines = [
        f"from {', '.join(preview.derivation.inputs)}; gives {' · '.join(filter(None, identity))} "
        f"in {derived.unit or 'plain numbers'}",
        f"uncertainty: {_uncertainty(preview)}",
    ]
    lines += [f"speaks for {covered_words(derived.covers)}"] if derived.covers else []
    return "\n· ".join([*lines, *derived.notes])


def _uncertainty(preview: DerivePreview) -> str:
    if preview.derived.u_rule:
        return preview.derived.u_rule
    spreads = [role.columns.values[role.column].u for role in preview.request.roles]
    known = any(spread is not None and bool((spread == spread).any()) for spread in spreads)
    return "none; this law knows no rule for it" if known else "none; the readings have none"


def _figure(low: float, high: float, unit: str) -> str:
    value = format_value(low, decimals=4) if low == high else f"{format_value(low)} to {format_value(high)}"
    return value if unit in ("", "1") else f"{value} {unit}"


def preview_as_json(preview: DerivePreview) -> dict[str, Any]:
    """Return a preview as data for scripts."""
    derived = preview.derived
    return {
        "law": preview.derivation.law,
        "inputs": list(preview.derivation.inputs),
        "gives": preview.derivation.gives.model_dump(mode="json"),
        "unit": derived.unit,
        "settings": {one.name: one.text for one in preview.derivation.settings},
        "over": list(preview.derivation.over),
        "where": list(preview.derivation.where),
        "covers": [one.model_dump(mode="json") for one in derived.covers],
        "stored_as": preview.stored_as,
        "results": [
            {
                "conditions": one.group,
                "value": _finite(one.value),
                "high": _finite(one.high),
                "u": _finite(one.u),
                "at": one.at,
                "readings": one.readings,
            }
            for one in derived.results
        ],
        "refused": [
            {"conditions": one.group, "why": one.why, "remedy": one.remedy} for one in derived.refused
        ],
        "notes": list(derived.notes),
    }


def _finite(value: float) -> float | None:
    return value if abs(value) < float("inf") else None


def again_table(found: Sequence[Again]) -> ReportTable:
    """Return what is to be derived again, why, and what it gives now."""
    rows = []
    for one in found:
        if one.preview is not None:
            values = "; ".join(
                _figure(result.value, result.high, one.preview.derived.unit)
                for result in one.preview.derived.results[:4]
            )
            refused = len(one.preview.derived.refused)
            says = values + (f"; {refused} groups refused" if refused else "")
        else:
            says = "" if one.failure is None else f"{one.failure.message}; {one.failure.hint}"
        tone = CellTone.PLAIN if one.can_be_stored else CellTone.BAD
        rows.append(_row(one.table.id, (one.table.id, one.derivation.words, one.why, says), tone))
    return _table("again", "To derive again", "", ("Table", "Derivation", "Why", "Gives now"), rows)


def proposals_table(found: Sequence[Proposal]) -> ReportTable:
    """Return what laws would make of raw tables, with the command that does it."""
    rows = [
        _row(one.requirement.id, (one.requirement.id, one.requirement.limit.text, one.why, one.command))
        for one in found
    ]
    intro = "Requirements that lack evidence, raw tables from which a law would give it, and how to say it."
    return _table("proposed", "Proposed derivations", intro, ("Requirement", "Limit", "From", "Say"), rows)


def laws_table() -> ReportTable:
    """Return the laws there are, with what each needs."""
    rows = [
        _row(law.name, (law.name, law.title, law.needs, _settings_words(law)), CellTone.PLAIN) for law in LAWS
    ]
    return _table("laws", "Laws", "", ("Law", "Gives", "Needs", "Settings"), rows)


def _settings_words(law: Law) -> str:
    return "; ".join(_setting_words(setting) for setting in law.settings)


def _setting_words(setting: Setting) -> str:
    default = (
        "must be said" if setting.default is None else f"default {setting.default}" if setting.default else ""
    )
    return setting.name + (f" ({default})" if default else "")


def law_lines(law: Law) -> list[str]:
    """Return all that a law says of itself, line by line."""
    lines = [f"{law.name}: {law.title}", "", f"Needs: {law.needs}"]
    if len(law.roles) > 1:
        lines.append(f"Reads: {', '.join(law.roles)} (--value ROLE=NAME)")
    for setting in law.settings:
        choices = f"; one of: {', '.join(setting.choices)}" if setting.choices else ""
        unit = f" [{setting.unit}]" if setting.unit not in ("", "axis", "value", "difference") else ""
        lines.append(f"Setting {_setting_words(setting)}{unit}: {setting.what}{choices}")
    return [*lines, "", *law.text.splitlines()]


def _table(key: str, title: str, intro: str, titles: Sequence[str], rows: Iterable[ReportRow]) -> ReportTable:
    columns = tuple(ReportColumn(key=title.casefold().replace(" ", "_"), title=title) for title in titles)
    return ReportTable(key=key, title=title, intro=intro, columns=columns, rows=tuple(rows))


def _row(id: str, texts: Sequence[str], tone: CellTone = CellTone.PLAIN) -> ReportRow:
    return ReportRow(id=id, cells=tuple(ReportCell(text=text, tone=tone) for text in texts))
