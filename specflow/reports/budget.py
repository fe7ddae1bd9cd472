"""A budget as tables: cumulative along the chain, margins, shares, slopes, and the ways of treating tolerances."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Sequence

import numpy as np

from specflow.limits import limit_words
from specflow.model.base import code_key
from specflow.model.budget_line import BudgetLine, Distribution, LineTolerance, Meaning
from specflow.model.budget_outcome import (
    BudgetOutcome,
    LineOutcome,
    QuantityOutcome,
    ServedOutcome,
    Way,
    WayOutcome,
)
from specflow.model.report import Align, CellTone, Report, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.parameters import Dictionary
from specflow.reports.chances import chances_table
from specflow.reports.figures import DASH, interval, margin, number, rounded, text, with_unit

FIGURE_TITLES = {
    "gain": ("Gain", "dB"),
    "noise_figure": ("NF", "dB"),
    "image_rejection": ("Image rejection", "dB"),
    "image_noise_figure": ("NF with image", "dB"),
    "iip3": ("IIP3", "dBm"),
    "iip2": ("IIP2", "dBm"),
    "ip1db": ("IP1dB", "dBm"),
    "antenna_gain": ("Antenna gain", "dBi"),
    "source_k": ("Source", "K"),
    "source_level": ("Source level", "dBm"),
    "snr": ("SNR needed", "dB"),
    "dc_w": ("DC power", "W"),
    "efficiency": ("Drain efficiency", "%"),
    "added_efficiency": ("PAE", "%"),
    "blocker": ("Blocker", "dBm"),
    "tones": ("Two tones, each", "dBm"),
    "phase_noise": ("Phase noise", "dBc/Hz"),
    "rejection": ("Rejection", "dB"),
    "leaked_noise": ("Transmitter noise", "dBm/Hz"),
    "isolation": ("Isolation", "dB"),
    "allowed_rise": ("Rise allowed", "dB"),
    "amount": ("Contribution", ""),
}
Named = Callable[[str], str]


def titles(dictionary: Dictionary) -> Named:
    """Return how parameters are called: their title in the dictionary, else their key."""

    def named(key: str) -> str:
        parameter = dictionary.get(key)
        return parameter.title if parameter is not None else key

    return named


def budget_tables(outcome: BudgetOutcome, place: int, named: Named) -> tuple[ReportTable, ...]:
    """Return all tables of a budget at one place of evaluation; ``named`` gives the title of a parameter."""
    return (
        cumulative_table(outcome, place, named),
        margins_table(outcome, named),
        ways_table(outcome, named),
        chances_table(outcome),
        shares_table(outcome, place, named),
        slopes_table(outcome, place, named),
    )


def budget_report(outcome: BudgetOutcome, place: int, named: Named) -> Report:
    """Return the tables with what the budget is, where it is worst and what was assumed."""
    budget = outcome.budget
    facts = [
        ("Worst point", worst_words(outcome)),
        *((("Probability that a specimen meets all", outcome.joint_words),) if outcome.joint_words else ()),
        *(("Assumed", note) for note in outcome.notes),
    ]
    return Report(
        title=budget_title(outcome),
        subtitle=f"{budget.law.value} of {len(outcome.positions)} positions, revision {budget.revision}, "
        f"{len(outcome.places)} condition points",
        facts=tuple(facts),
        tables=tuple(table for table in budget_tables(outcome, place, named) if table.rows),
    )


def budget_title(outcome: BudgetOutcome) -> str:
    """Return id and title of a budget."""
    budget = outcome.budget
    return f"{budget.id}: {budget.title}" if budget.title else budget.id


def worst_words(outcome: BudgetOutcome) -> str:
    """Say which requirement has the smallest margin, how much and where."""
    if outcome.worst is None:
        return "no limit is known at any point"
    code, place = outcome.worst
    one = next(one for one in outcome.served if code_key(one.requirement.id) == code_key(code))
    return f"{code} {margin(one.smallest_margin, one.margin_unit).text} at {outcome.places[place]}"


# Cumulative


def cumulative_table(outcome: BudgetOutcome, place: int, named: Named) -> ReportTable:
    """Return one row a position: its own figures, then every quantity up to and including it."""
    figures = [name for name in FIGURE_TITLES if name in outcome.figures and _is_told(outcome, name)]
    columns = [
        ReportColumn(key="position", title="#", align=Align.RIGHT, width=5),
        ReportColumn(key="block", title="Block", width=24),
        *(
            ReportColumn(key=f"own_{name}", title=FIGURE_TITLES[name][0], align=Align.RIGHT, width=13)
            for name in figures
        ),
        *(
            ReportColumn(key=one.parameter, title=f"∑ {named(one.parameter)}", align=Align.RIGHT, width=17)
            for one in outcome.quantities
        ),
    ]
    has_level = outcome.levels is not None and not _gives(outcome, "output_power")
    if has_level:
        columns.append(ReportColumn(key="level", title="Level", align=Align.RIGHT, width=13))
    if outcome.noise is not None:
        columns.append(ReportColumn(key="noise", title="Noise", align=Align.RIGHT, width=13))
    return ReportTable(
        key="cumulative",
        title=f"Along the chain at {outcome.places[place]}",
        intro="∑ is the quantity with the chain cut off behind the position. Figures of one position stand at its "
        "input and are those of all its elements together.",
        columns=tuple(columns),
        rows=tuple(
            _cumulative_row(outcome, row, place, figures, has_level=has_level)
            for row in range(len(outcome.positions))
        ),
    )


def _gives(outcome: BudgetOutcome, parameter: str) -> bool:
    return any(one.parameter == parameter for one in outcome.quantities)


def _is_told(outcome: BudgetOutcome, figure: str) -> bool:
    """Whether any line states a figure; what nobody states is not shown as a column of zeros."""
    return figure == "image_noise_figure" or any(line.figure == figure for line in outcome.lines)


def _cumulative_row(
    outcome: BudgetOutcome, row: int, place: int, figures: Sequence[str], *, has_level: bool
) -> ReportRow:
    position = outcome.positions[row]
    cells = [ReportCell(text=str(position.order), number=position.order), text(position_words(outcome, row))]
    cells.extend(_own(outcome, row, place, name) for name in figures)
    cells.extend(chain_figure(float(one.cumulative[row, place]), one.unit) for one in outcome.quantities)
    if has_level and outcome.levels is not None:
        cells.append(chain_figure(float(outcome.levels[row + 1, place]), "dBm"))
    if outcome.noise is not None:
        cells.append(chain_figure(float(outcome.noise[row + 1, place]), "dBm"))
    return ReportRow(id=f"{outcome.budget.id}/{position.order}", cells=tuple(cells))


def position_words(outcome: BudgetOutcome, row: int) -> str:
    """Return what a position is called, with the number of its elements."""
    position = outcome.positions[row]
    many = f" × {position.count}" if position.count > 1 else ""
    name = position.label if position.label == position.block else f"{position.block} {position.label}"
    return f"{name}{many}"


def _own(outcome: BudgetOutcome, row: int, place: int, figure: str) -> ReportCell:
    """Return one figure of one position; a dash where no line states it and none follows."""
    lines = [line for line in outcome.lines if line.row == row and line.figure == figure]
    makes_noise = figure == "noise_figure" and outcome.positions[row].passive
    makes_noise |= figure == "image_noise_figure" and outcome.turns[row] == "image"
    if not lines and not makes_noise:
        return ReportCell(text=DASH, tone=CellTone.QUIET)
    value = float(outcome.figures[figure][row, place])
    unit = FIGURE_TITLES[figure][1] or outcome.quantities[0].unit
    return chain_figure(value, unit)


def chain_figure(value: float, unit: str) -> ReportCell:
    """Return a figure of the chain as a cell, always with two decimals, so that columns are read at a glance."""
    if not math.isfinite(value):
        return number(value, unit)
    return ReportCell(text=f"{rounded(value, 2)} {unit}".strip(), number=value)


# Margins


MARGIN_COLUMNS = (
    ReportColumn(key="requirement", title="Requirement", width=18),
    ReportColumn(key="quantity", title="Quantity", width=24),
    ReportColumn(key="limit", title="Limit", width=30),
    ReportColumn(key="result", title="Result", align=Align.RIGHT, width=14),
    ReportColumn(key="margin", title="Smallest margin", align=Align.RIGHT, width=16),
    ReportColumn(key="worst", title="At", width=40),
    ReportColumn(key="reserve", title="Reserve", width=24),
)


def margins_table(outcome: BudgetOutcome, named: Named) -> ReportTable:
    """Return one row a served requirement: its limit, and result and margin at its worst place."""
    rows = [
        _margin_row(outcome, quantity, one, named)
        for quantity in outcome.quantities
        for one in quantity.served
    ]
    return ReportTable(
        key="margins",
        title="Margins to the limits, nominal",
        intro="The reserve is taken off before the margin is told.",
        columns=MARGIN_COLUMNS,
        rows=tuple(rows),
    )


def _margin_row(
    outcome: BudgetOutcome, quantity: QuantityOutcome, one: ServedOutcome, named: Named
) -> ReportRow:
    requirement = one.requirement
    reserve = f"{with_unit(one.reserve, one.margin_unit)} held by {one.reserve_holder}" if one.reserve else ""
    return ReportRow(
        id=requirement.id,
        cells=(
            ReportCell(text=requirement.id, link=f"matrix/{requirement.id}"),
            text(named(quantity.parameter)),
            text(limit_words(requirement.limit)),
            number(float(one.result[one.worst]) if one.worst >= 0 else math.nan, one.unit),
            margin(one.smallest_margin, one.margin_unit),
            text(outcome.places[one.worst] if one.worst >= 0 else one.why),
            text(reserve),
        ),
    )


# Ways of treating tolerances


WAY_COLUMNS = (
    ReportColumn(key="requirement", title="Requirement", width=18),
    ReportColumn(key="way", title="Tolerances", width=20),
    ReportColumn(key="range", title="Result", width=22),
    ReportColumn(key="margin", title="Margin", align=Align.RIGHT, width=14),
    ReportColumn(key="worst", title="At", width=36),
    ReportColumn(key="probability", title="Specimens that meet it everywhere", width=44),
)


def ways_table(outcome: BudgetOutcome, named: Named) -> ReportTable:
    """Return the ways side by side for every requirement, each with what it takes for granted."""
    order = [one.requirement.id for one in outcome.served]
    rows = sorted(outcome.ways, key=lambda one: order.index(one.requirement))
    return ReportTable(
        key="ways",
        title="Tolerances, way by way",
        intro=assumptions([outcome]),
        columns=WAY_COLUMNS,
        rows=tuple(_way_row(outcome, one) for one in rows),
    )


def assumptions(outcomes: Iterable[BudgetOutcome]) -> str:
    """Say what each way takes for granted."""
    told = dict.fromkeys(
        (one.way.value, one.assumes) for outcome in outcomes for one in outcome.ways if not one.refused
    )
    said = "; ".join(f"{way}: {assumes}" for way, assumes in sorted(told, key=_way_order))
    return f"The ways answer different questions, none replaces another. What each assumes: {said}."


def _way_order(told: tuple[str, str]) -> int:
    return list(Way).index(Way(told[0]))


def _way_row(outcome: BudgetOutcome, one: WayOutcome) -> ReportRow:
    if one.refused:
        cells = (
            ReportCell(text=one.requirement),
            ReportCell(text=one.way.value),
            ReportCell(text="not legitimate", tone=CellTone.DOUBTFUL),
            text(""),
            text(""),
            ReportCell(text=one.refused, tone=CellTone.DOUBTFUL),
        )
        return ReportRow(id=one.requirement, cells=cells)
    return ReportRow(
        id=one.requirement,
        cells=(
            ReportCell(text=one.requirement),
            ReportCell(text=f"{one.way.value}, {one.means}" if one.means else one.way.value),
            text(interval(one.low, one.high, one.unit) if one.unit else ""),
            margin(one.margin, one.margin_unit),
            text(outcome.places[one.worst] if one.worst >= 0 else ""),
            text(one.probability),
        ),
    )


# Shares and slopes


def shares_table(outcome: BudgetOutcome, place: int, named: Named) -> ReportTable:
    """Return how much of each quantity each position makes, in per cent, at one place."""
    shared = [one for one in outcome.quantities if one.shares is not None]
    columns = (
        ReportColumn(key="position", title="#", align=Align.RIGHT, width=5),
        ReportColumn(key="block", title="Block", width=24),
        *(
            ReportColumn(
                key=one.parameter,
                title=named(one.parameter),
                align=Align.RIGHT,
                width=20,
                explains=one.shared,
            )
            for one in shared
        ),
    )
    rows = [
        ReportRow(
            id=f"{outcome.budget.id}/{position.order}",
            cells=(
                ReportCell(text=str(position.order), number=position.order),
                text(position_words(outcome, row)),
                *(percent(one.shares[row, place]) for one in shared if one.shares is not None),
            ),
        )
        for row, position in enumerate(outcome.positions)
    ]
    rest = [1.0 - float(np.sum(one.shares[:, place])) for one in shared if one.shares is not None]
    if any(part > 1e-9 for part in rest):
        cells = (text(""), text("what feeds the chain"), *(percent(part) for part in rest))
        rows.append(ReportRow(id=f"{outcome.budget.id}/source", cells=cells))
    return ReportTable(
        key="shares",
        title=f"Who makes how much at {outcome.places[place]}",
        intro="; ".join(f"{named(one.parameter)}: parts of {one.shared}" for one in shared),
        columns=columns,
        rows=tuple(rows) if shared else (),
    )


def percent(part: float) -> ReportCell:
    """Return a share as a cell; the number behind it is in per cent."""
    value = 0.0 if abs(part) < 1e-12 else 100.0 * float(part)
    return number(value, "%")


def slopes_table(outcome: BudgetOutcome, place: int, named: Named) -> ReportTable:
    """Return how far each quantity moves with each line, per unit of the line's tolerance, at one place."""
    columns = (
        ReportColumn(key="position", title="#", align=Align.RIGHT, width=5),
        ReportColumn(key="block", title="Block", width=20),
        ReportColumn(key="parameter", title="Line", width=24),
        ReportColumn(key="value", title="Value", align=Align.RIGHT, width=14),
        ReportColumn(key="tolerance", title="Tolerance", width=34),
        ReportColumn(key="maturity", title="Maturity", width=18),
        ReportColumn(key="source", title="Source", width=30),
        *(
            ReportColumn(
                key=one.parameter, title=f"Slope of {named(one.parameter)}", align=Align.RIGHT, width=18
            )
            for one in outcome.quantities
        ),
    )
    return ReportTable(
        key="slopes",
        title=f"Lines and slopes at {outcome.places[place]}",
        intro="A slope is how far the quantity moves, in its unit, when the line moves by one unit of its tolerance "
        "(dB for a level).",
        columns=columns,
        rows=tuple(_slope_row(outcome, at, line, place, named) for at, line in enumerate(outcome.lines)),
    )


def _slope_row(outcome: BudgetOutcome, at: int, one: LineOutcome, place: int, named: Named) -> ReportRow:
    line = one.line
    return ReportRow(
        id=f"{outcome.budget.id}/{line.position}/{line.parameter}",
        cells=(
            ReportCell(text=str(line.position), number=line.position),
            text(line.block),
            text(named(line.parameter)),
            number(float(one.value[place]), line.unit),
            text(tolerance_words(line)),
            text(line.maturity.value),
            text(line.source),
            *(_slope(float(quantity.slopes[at, place])) for quantity in outcome.quantities),
        ),
    )


def _slope(value: float) -> ReportCell:
    if abs(value) < 1e-12:
        return ReportCell(text="0", number=0.0, tone=CellTone.QUIET)
    sign = "+" if value > 0 else ""
    return ReportCell(text=f"{sign}{rounded(value, 3)}", number=value)


def tolerance_words(line: BudgetLine) -> str:
    """Say how far a line may move and what that means."""
    tolerance = line.tolerance
    if tolerance is None:
        return ""
    unit = "dB" if line.unit.casefold().startswith("db") else line.unit
    amounts = (
        f"± {rounded(tolerance.plus)} {unit}"
        if tolerance.plus == tolerance.minus
        else f"+{rounded(tolerance.plus)}/-{rounded(tolerance.minus)} {unit}"
    )
    more = [_meaning_words(tolerance)]
    if line.shared == "per element":
        more.append("each element by itself")
    if line.correlation_group:
        more.append(f"moves with {line.correlation_group}")
    return ", ".join(filter(None, [amounts, *more]))


def _meaning_words(tolerance: LineTolerance) -> str:
    if tolerance.meaning is Meaning.SIGMA:
        return f"{tolerance.k:g} σ, normal"
    if tolerance.distribution is Distribution.TRUNCATED_NORMAL:
        return f"limits, normal cut at {tolerance.k:g} σ"
    if tolerance.distribution is not None:
        return f"limits, {tolerance.distribution.value}"
    return "limits" if tolerance.meaning is Meaning.LIMITS else "meaning not said"


def ways_of(outcome: BudgetOutcome, way: Way) -> tuple[WayOutcome, ...]:
    """Return what one way says, requirement by requirement."""
    return tuple(one for one in outcome.ways if one.way is way)
