"""How numbers are shown: rounded once, here, for reading; verdicts are computed on unrounded values elsewhere."""

from __future__ import annotations

import math
from decimal import ROUND_HALF_UP, Decimal

from specflow.model.report import CellTone, ReportCell
from specflow.model.verdict import Compliance, Label, Verdict

CLOSENESS = 1e-9  # nearer to the limit than this is on the limit (see units): not worth a minus sign
DASH = "–"  # shown where there is nothing to show

LABEL_TONES = {
    Label.NOT_APPLICABLE: CellTone.QUIET,
    Label.WAIVER_EXCEEDED: CellTone.BAD,
    Label.FAILING: CellTone.BAD,
    Label.PARTIALLY_COMPLIANT: CellTone.BAD,
    Label.CONFLICTING: CellTone.BAD,
    Label.REVERIFY: CellTone.DOUBTFUL,
    Label.READY: CellTone.GOOD,
    Label.CLOSED_VERIFIED: CellTone.GOOD,
    Label.CLOSED_WAIVED: CellTone.QUIET,
    Label.PLANNED: CellTone.QUIET,
}
VERDICT_TONES = {
    Verdict.PASS: CellTone.GOOD,
    Verdict.NOT_TRIGGERED: CellTone.GOOD,
    Verdict.CONDITIONAL_PASS: CellTone.DOUBTFUL,
    Verdict.NONE: CellTone.QUIET,
    Verdict.CONDITIONAL_FAIL: CellTone.BAD,
    Verdict.FAIL: CellTone.BAD,
}
COMPLIANCE_TONES = {
    Compliance.COMPLIANT: CellTone.GOOD,
    Compliance.NON_COMPLIANT: CellTone.BAD,
    Compliance.PARTIALLY_COMPLIANT: CellTone.BAD,
    Compliance.NOT_APPLICABLE: CellTone.QUIET,
}


def label_tone(label: Label) -> CellTone:
    """Return how good or bad a label is."""
    return LABEL_TONES.get(label, CellTone.DOUBTFUL)


def verdict_tone(verdict: Verdict) -> CellTone:
    """Return how good or bad a verdict is."""
    return VERDICT_TONES.get(verdict, CellTone.DOUBTFUL)


def rounded(value: float, decimals: int | None = None) -> str:
    """Round a number for reading: two decimals near ordinary dB figures, four significant digits elsewhere.

    Halves go away from zero, as in spreadsheet programs, so that a cell that holds the number shows the same text.
    Trailing zeros are kept where something was rounded away, or where ``decimals`` asks for a number of them.
    """
    if not math.isfinite(value):
        return "no bound" if math.isinf(value) else DASH
    size = abs(value)
    if size and (size >= 1e7 or size < 0.001):
        return f"{value:.4g}"
    exact = Decimal(repr(value))
    fixed = decimals is not None and (size == 0 or size >= 0.01)
    places = decimals if decimals is not None and fixed else _places(size)
    shown = exact.quantize(Decimal(1).scaleb(-places), ROUND_HALF_UP)
    if not fixed and shown == exact:
        shown = shown.normalize()
    return f"{shown + 0:f}"


def _places(size: float) -> int:
    if size == 0 or size >= 10_000:
        return 0
    if size < 0.01:
        return 5
    return 2 if size < 1000 else 1


def with_unit(value: float, unit: str) -> str:
    """Return a rounded number with its unit, or a dash."""
    if math.isnan(value):
        return DASH
    shown = rounded(value)
    return shown if math.isinf(value) or unit in ("", "1") else f"{shown} {unit}"


def interval(low: float, high: float, unit: str) -> str:
    """Return a reading: a value, or ``at most`` / ``at least`` where it is a bound."""
    if math.isnan(low) and math.isnan(high):
        return DASH
    if low == high:
        return with_unit(low, unit)
    if math.isinf(low):
        return f"≤ {with_unit(high, unit)}"
    if math.isinf(high):
        return f"≥ {with_unit(low, unit)}"
    return f"{rounded(low)} to {with_unit(high, unit)}"


def margin(value: float, unit: str) -> ReportCell:
    """Return a margin with its sign: positive is good."""
    if math.isnan(value):
        return ReportCell(text=DASH, tone=CellTone.QUIET)
    if math.isinf(value):
        return ReportCell(text="unbounded", tone=CellTone.QUIET)
    if abs(value) < CLOSENESS:
        value = 0.0
    tone = CellTone.BAD if value < 0 else CellTone.PLAIN
    sign = "+" if value >= 0 else ""
    shown = rounded(value, 2)
    text = shown if unit in ("", "1") else f"{shown} {unit}"
    return ReportCell(text=f"{sign}{text}", number=value, tone=tone)


def number(value: float, unit: str) -> ReportCell:
    """Return a value as a cell; without one, a dash."""
    if not math.isfinite(value):
        return ReportCell(text=with_unit(value, unit) if math.isinf(value) else DASH, tone=CellTone.QUIET)
    return ReportCell(text=with_unit(value, unit), number=value)


def reading(low: float, high: float, unit: str) -> ReportCell:
    """Return a reading as a cell; only one that is a single value has a number."""
    shown = interval(low, high, unit)
    tone = CellTone.QUIET if shown == DASH else CellTone.PLAIN
    return ReportCell(text=shown, number=low if low == high and math.isfinite(low) else None, tone=tone)


def text(words: object, tone: CellTone = CellTone.PLAIN) -> ReportCell:
    """Return words as a cell; nothing becomes a dash."""
    shown = str(words) if words not in (None, "") else ""
    return ReportCell(text=shown or DASH, tone=tone if shown else CellTone.QUIET)


def share(k: int, n: int) -> str:
    """Return ``31 of 48``; a programme total always prints its denominator."""
    return f"{k} of {n}"
