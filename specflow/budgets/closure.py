"""The closure test: does the system hold when every block stands at the worst bound that it is allowed?

With one-sided limits on gain it often cannot be shown: less gain lets later noise through, more gain lets later
distortion through. Then the missing side is named.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.allotment import Allotment, BlockParameter, ends_of, sides_that_matter
from specflow.budgets.allowed import Corner, Ends, worst_corner
from specflow.budgets.children import ends_of_children
from specflow.budgets.probe import Probe, line_name
from specflow.budgets.spread import bounds, moves
from specflow.model.requirement import Requirement

Floats = NDArray[np.float64]
_CLOSE = 1e-7


@dataclass(frozen=True, slots=True, eq=False)
class ClosureOf:
    """One limit of the system with every block at its worst allowed bound.

    ``margin`` (n,) in ``unit``, the reserve taken off; ``worst`` its smallest place with ``words``. ``stands`` says
    which line stands at which bound there.
    """

    requirement: str
    unit: str
    margin: Floats
    worst: int
    words: str
    stands: tuple[str, ...]

    @property
    def smallest(self) -> float:
        """The smallest margin, NaN where nothing is required."""
        return float(self.margin[self.worst]) if self.worst >= 0 else float("nan")


@dataclass(frozen=True, slots=True, eq=False)
class Closure:
    """The result of a closure test: ``missing`` are bounds without which nothing is shown, in words."""

    budget: str
    limits: tuple[ClosureOf, ...]
    missing: tuple[str, ...]
    notes: tuple[str, ...] = ()

    @property
    def closes(self) -> bool | None:
        """True: every limit holds; False: one does not; None: not shown, because a bound is missing."""
        if any(one.worst >= 0 and one.smallest < -_CLOSE for one in self.limits):
            return False
        return None if self.missing or all(one.worst < 0 for one in self.limits) else True

    @property
    def sentence(self) -> str:
        """The result in words."""
        if self.closes is None:
            return f"closure is not shown: {'; '.join(self.missing) or 'no limit is known'}"
        worst = min((one for one in self.limits if one.worst >= 0), key=lambda one: one.smallest)
        at = f"{worst.requirement} at {worst.words} with every block at its worst allowed bound"
        if self.closes:
            return f"closes: {max(worst.smallest, 0.0):.3g} {worst.unit} are left of {at}"
        return f"does not close: {-worst.smallest:.3g} {worst.unit} are lacking to {at}"


def closure_test(probe: Probe, allotments: Mapping[BlockParameter, Allotment]) -> Closure:
    """Test whether the system closes with these allotments; a line without one moves within its tolerance."""
    return test_ends(probe, ends_of(probe, allotments))


def closure_of_children(probe: Probe, children: Sequence[Requirement]) -> Closure:
    """Test whether the system closes with the requirements on its blocks as they are."""
    ends, notes = ends_of_children(probe, children)
    return test_ends(probe, ends, notes)


def test_ends(probe: Probe, given: Sequence[Ends | None], notes: Sequence[str] = ()) -> Closure:
    """Test closure with the ends of every line; a line without ends moves within its tolerance, if it states one."""
    ends: list[Ends | None] = []
    missing: list[str] = []
    said = list(notes)
    matters = sides_that_matter(probe)
    for number, (read, own) in enumerate(zip(probe.chain.lines, given, strict=True)):
        if own is None and moves(read.line):
            own = tolerance_ends(probe, number)
            if matters[number].any():
                said.append(f"{line_name(read)} moves within its tolerance; no requirement holds it there")
        elif own is None and read.role.figure == "source_k":
            said.append(f"{line_name(read)} is what surrounds the system; it is taken as stated")
        elif own is None and matters[number].any():
            missing.append(f"{line_name(read)} has neither a limit nor a tolerance")
        ends.append(own)
    corners = [worst_corner(probe, target, ends) for target in probe.targets]
    missing += _open_sides(probe, corners)
    limits = tuple(_limit(probe, corner, ends) for corner in corners)
    return Closure(probe.budget.id, limits, tuple(dict.fromkeys(missing)), tuple(dict.fromkeys(said)))


def tolerance_ends(probe: Probe, number: int) -> Ends:
    """Return the ends (n,) of a line that moves within its tolerance."""
    low, high = bounds(probe.chain.lines[number])
    return np.broadcast_to(low, (probe.size,)), np.broadcast_to(high, (probe.size,))


def _limit(probe: Probe, corner: Corner, ends: Sequence[Ends | None]) -> ClosureOf:
    worst = corner.worst
    words = probe.words(worst) if worst >= 0 else ""
    stands = _stands(probe, corner, ends, worst) if worst >= 0 else ()
    return ClosureOf(corner.target.name, corner.target.bar.margin_unit, corner.margin, worst, words, stands)


def _stands(probe: Probe, corner: Corner, ends: Sequence[Ends | None], place: int) -> tuple[str, ...]:
    found = []
    for read, value, sign, own in zip(probe.chain.lines, corner.values, corner.signs, ends, strict=True):
        if own is not None and sign[place]:
            at = float(np.broadcast_to(value, (probe.size,))[place])
            found.append(f"{line_name(read)} {at:.4g} {read.line.unit}")
    return tuple(found)


def _open_sides(probe: Probe, corners: Sequence[Corner]) -> list[str]:
    found = []
    for corner in corners:
        for number, read in enumerate(probe.chain.lines):
            for is_open, side, way in (
                (corner.open_low[number], "lower", "lower"),
                (corner.open_high[number], "upper", "higher"),
            ):
                if is_open:
                    found.append(
                        f"{line_name(read)} has no {side} limit, and a {way} one worsens {corner.target.name}"
                    )
    return found
