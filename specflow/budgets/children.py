"""What requirements on blocks allow the lines of a budget: the bounds of each line at every place.

A requirement speaks of a line where it is on the same figure of the same block, or on one that is the same in other
words: a gain is a loss with the other sign, a noise temperature is a noise figure.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.allowed import Ends
from specflow.budgets.chain import ReadLine
from specflow.budgets.margins import declared_values
from specflow.budgets.probe import Probe, line_name
from specflow.calculators.noise import noise_figure_of_temperature, noise_temperature
from specflow.errors import UnitError
from specflow.limits import LimitContext, evaluate_limit
from specflow.model.base import code_key
from specflow.model.columns import Columns
from specflow.model.requirement import Requirement
from specflow.units import converter, parse_unit

Floats = NDArray[np.float64]
_LOSSES = frozenset({"insertion_loss", "conversion_loss", "attenuation"})
_NOISE = frozenset({"noise_figure", "noise_temperature"})


def equivalents(parameter: str) -> frozenset[str]:
    """Return the keys of the parameters that say the same as one, itself included."""
    key = code_key(parameter)
    if key == "gain":
        return _LOSSES | {key}
    if key in _LOSSES:
        return frozenset({key, "gain"})
    return _NOISE if key in _NOISE else frozenset({key})


def speaks_of(child: Requirement, read: ReadLine) -> bool:
    """Whether a requirement is on what a line states of its block."""
    is_block = code_key(child.block) == code_key(read.line.block)
    return is_block and code_key(child.quantity.parameter) in equivalents(read.line.parameter)


def ends_of_children(probe: Probe, children: Sequence[Requirement]) -> tuple[list[Ends | None], list[str]]:
    """Return what requirements on blocks allow every line (n,), in its unit, at the block's own conditions.

    Where line and requirement state different planes or statistics they are not compared, and it is said.
    """
    ends: list[Ends | None] = []
    notes: list[str] = []
    for read in probe.chain.lines:
        own: Ends | None = None
        for child in children:
            if not speaks_of(child, read):
                continue
            unlike = _unlike(child, read)
            if unlike:
                notes.append(
                    f"{child.id} holds at another {unlike} than {line_name(read)} and bounds it nowhere"
                )
                continue
            try:
                found = line_ends(probe, read, child)
            except UnitError as error:
                notes.append(f"{child.id} cannot be compared with {line_name(read)}: {error.message}")
                continue
            own = found if own is None else (np.maximum(own[0], found[0]), np.minimum(own[1], found[1]))
        ends.append(own)
    return ends, notes


def _unlike(child: Requirement, read: ReadLine) -> str:
    """Name what both state of plane and statistic, and differently; "" where they agree."""
    for part in ("plane", "statistic"):
        wanted, stated = getattr(read.line, part), getattr(child.quantity, part)
        if wanted and stated and code_key(wanted) != code_key(stated):
            return part
    return ""


def line_ends(probe: Probe, read: ReadLine, child: Requirement) -> Ends:
    """Return the bounds (n,) that a requirement sets on a line, in its unit, ±inf where open.

    UnitError where the units do not go together.
    """
    stated, wanted = code_key(child.quantity.parameter), code_key(read.line.parameter)
    if stated == wanted:
        return child_ends(probe, read.row, child, read.line.unit)
    if stated in _NOISE:
        return _as_noise(probe, read, child, to_kelvin=wanted == "noise_temperature")
    low, high = child_ends(probe, read.row, child, read.line.unit)
    if {stated, wanted} <= _LOSSES:
        return low, high
    return -high, -low


def _as_noise(probe: Probe, read: ReadLine, child: Requirement, *, to_kelvin: bool) -> Ends:
    """Return bounds on a noise figure as bounds on a noise temperature, or back; open sides stay open."""
    given, taken = ("dB", "K") if to_kelvin else ("K", "dB")
    turned = noise_temperature if to_kelvin else noise_figure_of_temperature
    step = converter(parse_unit(taken), parse_unit(read.line.unit))
    sides = []
    for side in child_ends(probe, read.row, child, given):
        known = np.isfinite(side)
        sides.append(np.where(known, step(turned(np.where(known, np.maximum(side, 0.0), 1.0))), side))
    return sides[0], sides[1]


def _terms_of(probe: Probe, row: int, child: Requirement) -> Columns:
    """Return the conditions in which a limit is read; names that these do not have are those of the other side."""
    own, system, points = probe.chain.own[row], probe.chain.required.columns, probe.chain.required.points
    is_shared = points is not None and code_key(child.conditions or "") == code_key(points.conditions.id)
    first, second = (system, own) if is_shared else (own, system)
    taken = set(first.names)
    return Columns(
        own.size,
        {**{name: one for name, one in second.numeric.items() if name not in taken}, **first.numeric},
        {**{name: one for name, one in second.text.items() if name not in taken}, **first.text},
        {**{name: unit for name, unit in second.units.items() if name not in taken}, **first.units},
    )


def child_ends(probe: Probe, row: int, child: Requirement, unit: str) -> Ends:
    """Return the bounds (n,) that a requirement sets on the block at one position, in ``unit``, ±inf where open.

    A child with the conditions set of the budget speaks in its terms, one with a set of its own in the block's own.
    Where the limit is not known or asks for nothing it bounds nothing.
    """
    columns = _terms_of(probe, row, child)
    context = LimitContext(columns, declared_values(probe.snapshot), columns.size)
    found = evaluate_limit(child.limit, context).spread(columns.size)
    parameter = probe.dictionary.get(child.quantity.parameter)
    step = converter(
        parse_unit(found.unit or unit),
        parse_unit(unit),
        log_factor=parameter.log_factor if parameter is not None else None,
    )
    sides = []
    for values, nothing in ((found.lower, -np.inf), (found.upper, np.inf)):
        known = np.full(columns.size, nothing) if values is None else np.array(values)
        held = found.applies & ~found.unknown & np.isfinite(known)
        sides.append(np.where(held, step(np.where(held, known, 1.0)), nothing))
    low, high = (np.broadcast_to(one, (probe.size,)) for one in sides)
    return low, high
