"""What requirements on blocks allow the lines of a budget: the bounds of each line at every place.

A requirement speaks of a line where it is on the same figure of the same block, or on one that is the same in other
words: a gain is a loss with the other sign, a noise temperature is a noise figure, an intercept at one port is one at
the other through the gain. There each side is taken with the end of the gain that hurts (conservative: the corner may
not need that gain).
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.allowed import Ends
from specflow.budgets.chain import ReadLine
from specflow.budgets.margins import declared_values
from specflow.budgets.probe import Probe, line_name
from specflow.budgets.spread import bounds
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
_PORTS = {"iip3": "oip3", "iip2": "oip2", "ip1db": "op1db"}
_OTHER_PORT = _PORTS | {output: name for name, output in _PORTS.items()}


def equivalents(parameter: str) -> frozenset[str]:
    """Return the keys of the parameters that say the same as one, itself included."""
    key = code_key(parameter)
    if key == "gain":
        return _LOSSES | {key}
    if key in _LOSSES:
        return frozenset({key, "gain"})
    if key in _OTHER_PORT:
        return frozenset({key, _OTHER_PORT[key]})
    return _NOISE if key in _NOISE else frozenset({key})


def speaks_of(child: Requirement, read: ReadLine) -> bool:
    """Whether a requirement is on what a line states of its block."""
    is_block = code_key(child.block) == code_key(read.line.block)
    return is_block and code_key(child.quantity.parameter) in equivalents(read.line.parameter)


def ends_of_children(probe: Probe, children: Sequence[Requirement]) -> tuple[list[Ends | None], list[str]]:
    """Return what requirements on blocks allow every line (n,), in its unit, at the block's own conditions.

    Where line and requirement state different planes or statistics they are not compared, and it is said.
    """
    lines = probe.chain.lines
    ends: list[Ends | None] = [None] * len(lines)
    notes: list[str] = []
    # Gains first: what is stated at the other port goes through them.
    for number in sorted(range(len(lines)), key=lambda one: lines[one].role.figure != "gain"):
        for child in children:
            if speaks_of(child, lines[number]):
                found = _bound(probe, number, child, ends, notes)
                own = ends[number]
                if found is not None and own is not None:
                    found = np.maximum(own[0], found[0]), np.minimum(own[1], found[1])
                ends[number] = own if found is None else found
    return ends, notes


def _bound(
    probe: Probe, number: int, child: Requirement, ends: Sequence[Ends | None], notes: list[str]
) -> Ends | None:
    """Return what one requirement allows a line, None where the two are not compared, which is noted."""
    read = probe.chain.lines[number]
    unlike = _unlike(child, read)
    if unlike:
        notes.append(f"{child.id} holds at another {unlike} than {line_name(read)} and bounds it nowhere")
        return None
    try:
        if _OTHER_PORT.get(code_key(child.quantity.parameter)) == code_key(read.line.parameter):
            notes.append(
                f"{child.id} is taken to the port of {line_name(read)} with the gain that hurts on each side"
            )
            return _through_gain(probe, read, child, ends)
        return line_ends(probe, read, child)
    except UnitError as error:
        notes.append(f"{child.id} cannot be compared with {line_name(read)}: {error.message}")
        return None


def _through_gain(probe: Probe, read: ReadLine, child: Requirement, ends: Sequence[Ends | None]) -> Ends:
    """Return bounds at the other port of a block as bounds at the port of a line."""
    least, most = _gain_ends(probe, read.row, ends)
    dropped = 1.0 if read.role.figure == "ip1db" else 0.0
    low, high = child_ends(probe, read.row, child, "dBm")
    if code_key(read.line.parameter) in _PORTS:
        low, high = low - most + dropped, high - least + dropped
    else:
        low, high = low + least - dropped, high + most - dropped
    back = converter(parse_unit("dBm"), parse_unit(read.line.unit))
    return back(np.where(np.isnan(low), -np.inf, low)), back(np.where(np.isnan(high), np.inf, high))


def _gain_ends(probe: Probe, row: int, ends: Sequence[Ends | None]) -> Ends:
    """Return the lowest and the highest gain (n,) that a position is allowed, by tolerances where nothing says."""
    least, most = np.zeros(probe.size), np.zeros(probe.size)
    for number in probe.chain.at(row, "gain"):
        read = probe.chain.lines[number]
        own = ends[number] or bounds(read)
        sides = [np.broadcast_to(read.figure(side), (probe.size,)) for side in own]
        least, most = least + np.minimum(*sides), most + np.maximum(*sides)
    return least, most


def _unlike(child: Requirement, read: ReadLine) -> str:
    """Name what both state of plane and statistic, and differently; "" where they agree.

    At the other port the plane is another by itself.
    """
    is_same = code_key(child.quantity.parameter) == code_key(read.line.parameter)
    for part in ("plane", "statistic") if is_same else ("statistic",):
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
