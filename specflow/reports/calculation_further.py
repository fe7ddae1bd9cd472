"""The columns of a worksheet for DC power and for interference in the channel, and the quantities made of them."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Protocol

from specflow.model.budget_outcome import BudgetOutcome
from specflow.reports.calculation_grid import Maker, Term, plain

_NOTHING = Term("0", 0.0)


class Cells(Protocol):
    """The chain that the columns are put in."""

    outcome: BudgetOutcome
    figures: dict[str, list[Term | None]]
    fixed: dict[str, Term]

    def own(self, key: str, row: int) -> Term:
        """Return the cell of a column at one position."""

    def whole(self, figure: str) -> Term:
        """Return the sum of the lines of a figure over the whole chain."""

    def start(self) -> Term:
        """Return the level at the input."""

    def sum_so_far(self, key: str, row: int) -> Term:
        """Return the sum of a column up to a position."""


def _ratio(term: Term) -> Term:
    return Term(f"10^(({term.text})/10)", 10.0 ** (term.value / 10.0))


def _times(first: Term, second: Term) -> Term:
    return Term(f"{first.text}*{second.text}", first.value * second.value)


def _stated(cells: Cells, figure: str) -> bool:
    return any(line.figure == figure for line in cells.outcome.lines)


def _at(cells: Cells, key: str, row: int) -> Term | None:
    return cells.figures[key][row] if key in cells.figures else None


def _before(cells: Cells, key: str, row: int) -> Term:
    return _NOTHING if row == 0 else cells.own(key, row - 1)


# DC power


def dc_columns(cells: Cells) -> Iterator[tuple[str, str, Maker]]:
    """Yield key, title and maker of each column."""
    yield "dc_part", "DC power drawn [W]", lambda row, _: _drawn(cells, row)
    yield "dc_sum", "∑ DC power [W]", lambda row, _: cells.sum_so_far("dc_part", row)


def _watts(level: Term) -> Term:
    return Term(f"10^(({level.text})/10)/1000", 10.0 ** (level.value / 10.0) / 1000.0)


def _drawn(cells: Cells, row: int) -> Term:
    output = _watts(cells.own("level_sum", row))
    for key in ("efficiency", "added_efficiency"):
        share = _at(cells, key, row)
        if share is None:
            continue
        power = output
        if key == "added_efficiency":
            front = _watts(cells.own("level_sum", row) - cells.own("gain", row))
            power = Term(f"({output.text}-{front.text})", output.value - front.value)
        return Term(f"{power.text}*100/{share.text}", power.value * 100.0 / share.value)
    return _at(cells, "dc_w", row) or _NOTHING


def efficiency_term(cells: Cells, row: int, *, is_added: bool) -> Term | None:
    """Return output power (less input power) over the DC power so far in %; None in front of all DC power."""
    whole = cells.own("dc_sum", row)
    if whole.value == 0:
        return None
    output = _watts(cells.own("level_sum", row))
    if is_added:
        front = _watts(cells.start())
        output = Term(f"({output.text}-{front.text})", output.value - front.value)
    return Term(f"100*{output.text}/{whole.text}", 100.0 * output.value / whole.value)


# Interference


def interference_columns(cells: Cells) -> Iterator[tuple[str, str, Maker]]:
    """Yield key, title and maker of each column; powers are those of the input of the chain."""
    yield "rejected", "∑ Rejection [dB]", lambda row, _: _rejected(cells, row)
    yield "mixed", "Mixed of 0 dBm [mW]", lambda row, _: _mixed(cells, row)
    if _stated(cells, "tones"):
        words = "√IM3 at input [√mW]" if _power(cells) == 0.5 else "IM3 at input [mW]"
        yield "product", words, lambda row, _: _product(cells, row)


def _power(cells: Cells) -> float:
    return 0.5 if cells.outcome.budget.intermodulation == "coherent" else 1.0


def _rejected(cells: Cells, row: int) -> Term:
    own, before = _at(cells, "rejection", row), _before(cells, "rejected", row)
    return before if own is None else before + own


def _width(cells: Cells) -> Term:
    width = cells.fixed["bandwidth"]
    return Term(f"10*LOG10({width.text})", 10.0 * math.log10(width.value))


def _mixed(cells: Cells, row: int) -> Term | None:
    noise = _at(cells, "phase_noise", row)
    return None if noise is None else _ratio(noise - _before(cells, "rejected", row) + _width(cells))


def _product(cells: Cells, row: int) -> Term | None:
    """3·(P - R) - 2·(IIP3 - G before) as a power, or as its root where products add in phase."""
    intercept = _at(cells, "iip3", row)
    if intercept is None:
        return None
    tone = cells.whole("tones") - _before(cells, "rejected", row)
    point = intercept - _before(cells, "gain_sum", row)
    level = 3.0 * tone.value - 2.0 * point.value
    text = f"10^((3*({tone.text})-2*({point.text}))/10*{plain(_power(cells))})"
    return Term(text, 10.0 ** (level / 10.0 * _power(cells)))


def _leaked(cells: Cells) -> Term:
    if not _stated(cells, "leaked_noise"):
        return _NOTHING
    density = cells.whole("leaked_noise")
    if _stated(cells, "isolation"):
        density = density - cells.whole("isolation")
    return _ratio(density + _width(cells))


def desense_term(cells: Cells, row: int, floor: Term) -> Term:
    """Return the rise of the noise in dB from the interference so far."""
    parts = [_leaked(cells)]
    if _stated(cells, "blocker"):
        parts.append(_times(_ratio(cells.whole("blocker")), cells.sum_so_far("mixed", row)))
    if _stated(cells, "tones"):
        products = cells.sum_so_far("product", row)
        power = 1.0 / _power(cells)
        parts.append(Term(f"{products.text}^{plain(power)}", products.value**power))
    interference = math.fsum(part.value for part in parts)
    text = f"10*LOG10(1+({'+'.join(part.text for part in parts)})/{_ratio(floor).text})"
    return Term(text, 10.0 * math.log10(1.0 + interference / _ratio(floor).value))


def blocking_term(cells: Cells, row: int, floor: Term) -> Term | None:
    """Return the level of a blocker with the rise that is allowed, dBm; None in front of all phase noise."""
    mixed, leaked, noise = cells.sum_so_far("mixed", row), _leaked(cells), _ratio(floor)
    rise = _ratio(cells.whole("allowed_rise"))
    left = noise.value * (rise.value - 1.0) - leaked.value
    if mixed.value == 0 or left <= 0:
        return None
    text = f"10*LOG10(({noise.text}*({rise.text}-1)-{leaked.text})/{mixed.text})"
    return Term(text, 10.0 * math.log10(left / mixed.value))
