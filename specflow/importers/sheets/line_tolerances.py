"""The tolerance of a budget line: how far, what that means, by which distribution."""

from __future__ import annotations

import re

from specflow.importers.sheets.row import SheetRow
from specflow.model.budget_line import Distribution, LineTolerance, Meaning
from specflow.units import convert, format_value, parse_number, parse_unit, to_tolerance, tolerance_unit

_NUMBER = r"(?:\d+(?:[.,]\d+)?|[.,]\d+)"
_BOTH = re.compile(rf"^(?:±|\+/-|\+-)?\s*(?P<plus>{_NUMBER})\s*(?P<unit>.*)$")
_SIDES = re.compile(
    rf"^\+\s*(?P<plus>{_NUMBER})\s*(?P<first>[^/\d\s]*)\s*[/,;]?\s*-\s*(?P<minus>{_NUMBER})\s*(?P<unit>.*)$"
)
_K = re.compile(rf"(?P<k>{_NUMBER})\s*(?:σ|sigma)|k\s*=\s*(?P<k2>{_NUMBER})", re.IGNORECASE)
_SIGMA = re.compile(r"σ|sigma|^\s*k\s*=", re.IGNORECASE)


def line_tolerance(row: SheetRow, unit: str, notes: list[str]) -> LineTolerance | None:
    """Return the tolerance that a row states, None where it states none (or a cell is refused)."""
    text = row.text("tolerance").replace("−", "-")
    meaning, k = _meaning(row)
    shape = (
        row.choose("distribution", row.text("distribution"), Distribution)
        if row.text("distribution")
        else None
    )
    if not text:
        for column in ("tolerance_meaning", "distribution"):
            if row.text(column):
                row.fault(
                    column,
                    "there is no tolerance that it could be of",
                    "write the tolerance, or empty this cell",
                )
        return None
    sides = _amounts(row, text, unit, notes)
    if sides is None or not row.sound:
        return None
    if shape is Distribution.NORMAL and meaning is None:
        row.fault(
            "tolerance_meaning",
            "a normal distribution needs to know how many σ the tolerance is",
            "write 2 sigma, or whatever it is",
        )
        return None
    return row.attempt(
        "tolerance",
        lambda: LineTolerance(minus=sides[0], plus=sides[1], meaning=meaning, k=k, distribution=shape),
    )


def _amounts(row: SheetRow, text: str, unit: str, notes: list[str]) -> tuple[float, float] | None:
    found = _SIDES.match(text) or _BOTH.match(text)
    if found is None:
        row.fault("tolerance", f"{text!r} is no tolerance", "write ± 0.5 dB, or +0.3/-0.1 dB")
        return None
    parts = found.groupdict()
    plus = parse_number(parts["plus"])
    minus = parse_number(parts.get("minus") or parts["plus"])
    written = (parts["unit"] or parts.get("first") or "").strip()
    wanted = tolerance_unit(parse_unit(unit))
    if not written:
        notes.append(f"the tolerance {text} is taken in {wanted}")
        return minus, plus

    def in_unit(amount: float) -> float:
        own, note = to_tolerance(parse_unit(written), parse_unit(unit))
        if note:
            notes.append(note)
        return float(convert(amount, own, wanted, difference=True))

    return row.attempt("tolerance", lambda: (in_unit(minus), in_unit(plus)))


def _meaning(row: SheetRow) -> tuple[Meaning | None, float | None]:
    text = row.text("tolerance_meaning")
    found = _K.search(text)
    k = parse_number(found["k"] or found["k2"]) if found else None
    if not text:
        return None, None
    if "limit" in text.casefold():
        return Meaning.LIMITS, k
    if _SIGMA.search(text):
        if k is None:
            row.fault("tolerance_meaning", f"{text!r} does not say how many σ", "write 2 sigma, or k=2")
        return Meaning.SIGMA, k
    row.fault("tolerance_meaning", f"{text!r} is neither limits nor k·σ", "write limits, or 2 sigma")
    return None, None


def tolerance_words(tolerance: LineTolerance, unit: str) -> str:
    """Say a tolerance back in words."""
    step = tolerance_unit(parse_unit(unit)).symbol
    plus, minus = format_value(tolerance.plus), format_value(tolerance.minus)
    amount = f"± {plus} {step}" if plus == minus else f"+{plus}/-{minus} {step}"
    if tolerance.meaning is Meaning.SIGMA and tolerance.k is not None:
        return f"{amount} ({format_value(tolerance.k)} σ, normal)"
    shape = str(tolerance.distribution) if tolerance.distribution else "no distribution"
    if tolerance.meaning is None:
        return f"{amount} (it is not said whether limits or k·σ)"
    cut = f", limits at {format_value(tolerance.k)} σ" if tolerance.k is not None else ""
    return f"{amount} (limits, {shape}{cut})"
