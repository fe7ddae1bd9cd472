"""May values of one recorded quantity be held against a limit on another? Only like compares with like.

Plane, statistic, bandwidth and polarisation must be the same. Three differences can be bridged, and it is said: another
parameter that tells the same by a formula (``relations``), a declared path between planes, and another reference
bandwidth where the spectrum is noise-like (it scales) or a
discrete line (it does not); of an unknown spectrum the reading is only known to lie between the two.
"""

from __future__ import annotations

import math
from collections import deque
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.limits.conversion import unit_of
from specflow.model.block import Block
from specflow.model.evidence import EvidenceTable, SpectrumKind, ValueArrays, ValueColumn
from specflow.model.parameter import Parameter, QuantityIdentity
from specflow.model.verdict import Mismatch
from specflow.parameters.relations import KEPT, Relation, relation_between
from specflow.units import Converter, Kind, Unit, converter, missing_between_planes
from specflow.verification.spectrum import WITHOUT_BANDWIDTH, recorded_bandwidth, scales, shares

Floats = NDArray[np.float64]

#: Kinds of mismatch that say the value is one of another quantity, not that it cannot be read.
IDENTITY = frozenset({"plane", "statistic", "bandwidth", "polarisation"})
_MOVES_WITH_GAIN = frozenset({Kind.LEVEL, Kind.LEVEL_DENSITY})


@dataclass(frozen=True, slots=True)
class Fit:
    """How recorded values become values of the required quantity, in the unit of the limit.

    ``least_db`` and ``most_db`` are added to the low and the high end (dB); they differ where the spectrum is unknown.
    ``u_db`` is the standard uncertainty of a path between planes. ``exact`` means compared as written. ``through`` is
    what is done first where another parameter was recorded.
    """

    convert: Converter
    least_db: float = 0.0
    most_db: float = 0.0
    u_db: float = 0.0
    notes: tuple[str, ...] = ()
    through: Through | None = None

    @property
    def exact(self) -> bool:
        """Whether nothing at all was done to the values."""
        return self.convert.is_identity and self.through is None and not (self.least_db or self.most_db)

    @property
    def words(self) -> str:
        """What the values were converted by."""
        return self.convert.words if self.through is None else self.through.relation.words

    def apply(self, arrays: ValueArrays) -> ValueArrays:
        """Return the values in the unit of the limit; UnitError for a value that has none (log of a negative)."""
        if self.exact and not self.u_db:
            return arrays
        if self.through is not None:
            arrays = self.through.apply(arrays)
        low = self._ends(arrays.low)
        high = low if arrays.high is arrays.low else self._ends(arrays.high)
        u = None if arrays.u is None else self._spread(arrays)
        if self.u_db:
            u = np.full(low.shape, self.u_db) if u is None else np.hypot(u, self.u_db)
        if self.least_db == self.most_db:
            moved = low + self.least_db
            return ValueArrays(moved, moved if high is low else high + self.most_db, u)
        return ValueArrays(low + self.least_db, high + self.most_db, u)

    def _ends(self, values: Floats) -> Floats:
        """Return the values converted; "less than" stays open downwards in dB (down to nothing is -inf dB).

        A negative value has no level: NaN, while the others are judged.
        """
        if self.convert.source.is_log or not self.convert.target.is_log:
            return self.convert(values)
        below = values < 0
        if not below.any():
            return self.convert(values)
        return np.where(np.isneginf(values), -np.inf, self.convert(np.where(below, np.nan, values)))

    def _spread(self, arrays: ValueArrays) -> Floats:
        """Return u in the unit of the limit: how far the value moves when it moves by u, the larger side."""
        assert arrays.u is not None
        if self.convert.is_identity:
            return arrays.u
        middle = np.where(np.isfinite(arrays.high), arrays.high, arrays.low)
        centre = self.convert(middle)
        if self.convert.source.is_log == self.convert.target.is_log:
            return np.abs(self.convert(middle + arrays.u) - centre)
        up = np.abs(self.convert(middle + arrays.u) - centre)
        below = middle - arrays.u
        down = (
            np.abs(centre - self.convert(np.where(below > 0, below, middle)))
            if self.convert.target.is_log
            else 0.0
        )
        return np.maximum(up, down)


@dataclass(frozen=True, slots=True)
class Through:
    """The way over a relation: recorded values in the unit that its formula takes, and the formula."""

    convert: Converter
    relation: Relation

    def apply(self, arrays: ValueArrays) -> ValueArrays:
        """Return readings of the parameter that is wanted, in the unit of the dictionary."""
        return self.relation.apply(Fit(self.convert).apply(arrays))


@dataclass(frozen=True, slots=True)
class Wanted:
    """The quantity a limit is on, and its unit.

    ``any_bandwidth``: the limit itself states its bandwidths, record by record. ``by_name``: a limit on another
    parameter than that of the requirement; the rest of ``quantity`` is the requirement's, and holds for the other
    parameter as far as it means anything there.
    """

    quantity: QuantityIdentity
    unit: str
    any_bandwidth: bool = False
    by_name: bool = False

    @property
    def key(self) -> tuple[object, ...]:
        """What makes two of them the same, quick to compare."""
        one = self.quantity
        identity = one.parameter, one.plane, one.statistic, one.bandwidth_hz, one.polarisation
        return (*identity, self.unit, self.any_bandwidth, self.by_name)


def fit(
    table: EvidenceTable, column: ValueColumn, want: Wanted, block: Block | None, parameter: Parameter | None
) -> Fit | Mismatch:
    """Return how the values of a column are compared with a limit on what is wanted, or why they may not be."""
    if want.by_name:
        want = replace(want, quantity=_inherited(want.quantity, column.quantity, parameter))
    found, wanted, unit = column.quantity, want.quantity, want.unit
    if not _same(found.statistic, wanted.statistic):
        return _differs(table, column, "statistic", found.statistic, wanted.statistic)
    if not _same(found.polarisation, wanted.polarisation):
        return _differs(table, column, "polarisation", found.polarisation, wanted.polarisation)
    relation = relation_between(found.parameter, wanted.parameter)
    if relation is not None and _plain(found.statistic) not in KEPT:
        what = f"recorded as {relation.recorded.title}, and a {found.statistic} of it is none of {wanted.parameter}"
        return _mismatch(table, column, "statistic", what, "record single values, the worst or the median")
    try:
        target = unit_of(unit or "1")
        through = None if relation is None else _through(column, relation)
        source = column.unit or "1" if relation is None else relation.wanted.unit
        convert = _conversion(source, unit or "1", parameter and parameter.log_factor)
    except UnitError as error:
        what = f"recorded in {column.unit or 'no unit'}, the limit is in {unit}: {error.message}"
        return _mismatch(
            table, column, "unit", what, error.hint or "correct the unit in the mapping of the table"
        )
    moved = _between_planes(table, column, wanted, block, target)
    if isinstance(moved, Mismatch):
        return moved
    scaled = _NO_SHIFT if want.any_bandwidth else _between_bandwidths(table, column, wanted, target)
    if isinstance(scaled, Mismatch):
        return scaled
    notes = () if convert.is_identity else (convert.words,)
    if through is not None:
        notes = (through.relation.words, *notes)
    if moved is scaled is _NO_SHIFT:
        return Fit(convert, notes=notes, through=through)
    return Fit(
        convert,
        moved.least_db + scaled.least_db,
        moved.most_db + scaled.most_db,
        moved.u_db,
        (*notes, *moved.notes, *scaled.notes),
        through,
    )


def _through(column: ValueColumn, relation: Relation) -> Through:
    scale = relation.recorded
    return Through(_conversion(column.unit or "1", scale.unit, scale.log_factor), relation)


def _inherited(
    wanted: QuantityIdentity, found: QuantityIdentity, parameter: Parameter | None
) -> QuantityIdentity:
    """Return what is wanted of another parameter: plane, statistic and polarisation of the requirement.

    A plane or statistic that the other parameter does not know (an output of an EIRP) is answered by any that it does
    know; where the requirement states no plane, any will do, as an EIRP has its own. The reference bandwidth is that of
    the record: a ratio of powers has none.
    """
    plane, statistic = wanted.plane, wanted.statistic
    planes, statistics = ((), ()) if parameter is None else (parameter.planes, parameter.statistics)
    if not plane or (not _knows(planes, plane) and _knows(planes, found.plane or plane)):
        plane = found.plane
    if statistic and not _knows(statistics, statistic):
        statistic = found.statistic
    return wanted.model_copy(
        update={"plane": plane, "statistic": statistic, "bandwidth_hz": found.bandwidth_hz}
    )


def _knows(known: Sequence[str], part: str) -> bool:
    return not known or _plain(part) in map(_plain, known)


@dataclass(frozen=True, slots=True)
class Shift:
    """A number of dB between two planes or bandwidths, known or bounded."""

    least_db: float = 0.0
    most_db: float = 0.0
    u_db: float = 0.0
    notes: tuple[str, ...] = ()


_NO_SHIFT = Shift()


@lru_cache(maxsize=4096)
def _conversion(source: str, target: str, log_factor: int | None) -> Converter:
    """Return the conversion of the bare level: reference bandwidths are dealt with apart."""
    return converter(_bare(unit_of(source)), _bare(unit_of(target)), log_factor=log_factor)


def _bare(unit: Unit) -> Unit:
    kind = WITHOUT_BANDWIDTH.get(unit.kind)
    return unit if kind is None else replace(unit, kind=kind, bandwidth_hz=None)


@lru_cache(maxsize=4096)
def _plain(part: str) -> str:
    return part.strip().casefold()


def _same(one: str, other: str) -> bool:
    return one == other or _plain(one) == _plain(other)


def _between_planes(
    table: EvidenceTable, column: ValueColumn, wanted: QuantityIdentity, block: Block | None, target: Unit
) -> Shift | Mismatch:
    here, there = column.quantity.plane, wanted.plane
    if _same(here, there):
        return _NO_SHIFT
    if not here or not there:
        return _differs(table, column, "plane", here, there)
    path = _path(block, here, there) if block is not None else None
    if path is None:
        what = f"referred to {here}, required at {there}"
        return _mismatch(table, column, "plane", what, missing_between_planes(here, there))
    if target.kind not in _MOVES_WITH_GAIN or not target.is_log:
        what = f"referred to {here}, required at {there}; a value in {target} does not move with a gain"
        return _mismatch(table, column, "plane", what, f"measure it at {there}")
    gain, u = path
    note = f"{here} to {there}: {gain:+g} dB by declared path, u = {u:g} dB"
    return Shift(gain, gain, u, (note,))


def _path(block: Block, here: str, there: str) -> tuple[float, float] | None:
    """Return gain and u of the shortest chain of declared paths; against its direction a path has the opposite gain."""
    steps: dict[str, list[tuple[str, float, float]]] = {}
    for path in block.paths:
        start, end = _plain(path.start), _plain(path.end)
        steps.setdefault(start, []).append((end, path.gain_db, path.standard_uncertainty_db))
        steps.setdefault(end, []).append((start, -path.gain_db, path.standard_uncertainty_db))
    reached = {_plain(here): (0.0, 0.0)}
    queue = deque(reached)
    while queue:
        plane = queue.popleft()
        gain, u = reached[plane]
        for end, step, step_u in steps.get(plane, ()):
            if end not in reached:
                reached[end] = (gain + step, math.hypot(u, step_u))
                queue.append(end)
    return reached.get(_plain(there))


def _between_bandwidths(
    table: EvidenceTable, column: ValueColumn, wanted: QuantityIdentity, target: Unit
) -> Shift | Mismatch:
    here = recorded_bandwidth(column)
    there = target.bandwidth_hz or wanted.bandwidth_hz
    if here == there:
        return _NO_SHIFT
    if here is None or there is None:
        return _differs(table, column, "reference bandwidth", _hertz(here), _hertz(there))
    if not scales(target):
        return _differs(table, column, "reference bandwidth", _hertz(here), _hertz(there))
    if not target.is_log and column.spectrum is not SpectrumKind.DISCRETE:
        what = f"measured in {_hertz(here)}, required in {_hertz(there)}, and the limit is not in dB"
        return _mismatch(
            table, column, "bandwidth", what, "write the limit in dB, or measure in its bandwidth"
        )
    return _scaled(column.spectrum, here, there)


def _scaled(spectrum: SpectrumKind, here: float, there: float) -> Shift:
    step = 10 * math.log10(there / here)
    low, high = sorted(share * step for share in shares(spectrum))
    words = f"{_hertz(here)} to {_hertz(there)}"
    if spectrum is SpectrumKind.DISCRETE:
        return Shift(notes=(f"a discrete line does not scale with bandwidth ({words})",))
    note = f"noise-like, {words}: {step:+.4g} dB"
    if low != high:
        note = f"{words}: noise-like or discrete is not said, so only {low:+.4g} to {high:+.4g} dB is known"
    return Shift(low, high, notes=(note,))


def _hertz(value: float | None) -> str:
    if value is None:
        return ""
    for size, symbol in ((1e9, "GHz"), (1e6, "MHz"), (1e3, "kHz")):
        if value >= size:
            return f"{value / size:g} {symbol}"
    return f"{value:g} Hz"


def _differs(table: EvidenceTable, column: ValueColumn, part: str, found: str, wanted: str) -> Mismatch:
    kind = part.split()[-1]
    if not found:
        what = f"the {part} is not stated, required is {wanted}"
        return _mismatch(table, column, kind, what, f"state the {part} in the mapping of the table")
    if not wanted:
        what = f"the {part} is {found}, the requirement states none"
        return _mismatch(table, column, kind, what, f"state the {part} in the requirement")
    what = f"the {part} is {found}, required is {wanted}"
    return _mismatch(table, column, kind, what, f"record the quantity with {part} {wanted}")


def _mismatch(table: EvidenceTable, column: ValueColumn, kind: str, what: str, remedy: str) -> Mismatch:
    return Mismatch(table.id, column.name, table.rows, what, remedy, kind)
