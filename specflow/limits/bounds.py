"""Bounds: what a limit comes to for each record."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from specflow.limits.conversion import Floats
from specflow.limits.inputs import Flags
from specflow.model.columns import Columns
from specflow.units import Quantity

NO_FLAG: Flags = np.zeros(1, dtype=np.bool_)
ALL_FLAG: Flags = np.ones(1, dtype=np.bool_)
NO_FLAG.setflags(write=False)
ALL_FLAG.setflags(write=False)


@dataclass(frozen=True, slots=True)
class LimitContext:
    """What a limit is evaluated against: the conditions and axes of ``size`` records, and the declared values."""

    columns: Columns
    declared: Mapping[str, Quantity] = field(default_factory=dict)
    size: int = -1

    @property
    def rows(self) -> int:
        """How many records there are."""
        return self.columns.size if self.size < 0 else self.size


@dataclass(frozen=True, slots=True)
class Bounds:
    """Lower and upper bounds in ``unit``; arrays have one value a record, or one for all where nothing varies.

    ``lower``/``upper`` None: that side has no bound at all; -inf/+inf: none for that record; NaN where ``unknown``.
    ``applies`` False: nothing is required of that record. There ``outside`` tells a place that the limit does not
    reach (outside a mask, no case of a table) from where nothing is asked for on purpose (a gate that is not open, an
    exclusion, "no limit"): *not triggered*.
    ``unknown``: an input was missing or there is no number yet; ``why`` says which.
    ``bandwidth_hz``: the measurement bandwidth the bound is stated in, NaN where it states none.
    """

    lower: Floats | None
    upper: Floats | None
    unit: str
    lower_strict: Flags = field(default_factory=lambda: NO_FLAG)
    upper_strict: Flags = field(default_factory=lambda: NO_FLAG)
    applies: Flags = field(default_factory=lambda: ALL_FLAG)
    outside: Flags = field(default_factory=lambda: NO_FLAG)
    unknown: Flags = field(default_factory=lambda: NO_FLAG)
    why: str = ""
    bandwidth_hz: Floats | None = None

    def spread(self, size: int) -> Bounds:
        """Return the same bounds with one value for each of ``size`` records."""

        def flags(values: Flags) -> Flags:
            return np.broadcast_to(values, (size,))

        def floats(values: Floats | None) -> Floats | None:
            return None if values is None else np.broadcast_to(values, (size,))

        return Bounds(
            floats(self.lower),
            floats(self.upper),
            self.unit,
            flags(self.lower_strict),
            flags(self.upper_strict),
            flags(self.applies),
            flags(self.outside),
            flags(self.unknown),
            self.why,
            floats(self.bandwidth_hz),
        )
