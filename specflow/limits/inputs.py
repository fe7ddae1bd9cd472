"""The inputs of an evaluation: columns of conditions and declared values, looked up by name."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from specflow.limits.conversion import Floats
from specflow.model.columns import UNSTATED, Columns, TextColumn
from specflow.units import Quantity, format_unit, parse_unit

Flags = NDArray[np.bool_]
_MISSING = np.array([np.nan])
_NO_QUANTITIES: Mapping[str, Quantity] = {}


@dataclass(slots=True)
class Inputs:
    """Where names get their values. ``missing`` collects the names nobody supplies; ``unstated`` those with gaps."""

    columns: Columns
    declared: Mapping[str, Quantity] = field(default_factory=lambda: _NO_QUANTITIES)
    missing: set[str] = field(default_factory=set)
    unstated: set[str] = field(default_factory=set)
    remarks: list[str] = field(default_factory=list)

    def numbers(self, name: str) -> tuple[Floats, str]:
        """Return the values (size or 1) and unit of a numeric input; NaN where it is not stated."""
        column = self.columns.numeric.get(name)
        if column is not None:
            if np.isnan(column).any():
                self.unstated.add(name)
            return column, canonical(self.columns.units.get(name, ""))
        quantity = self.declared.get(name)
        if quantity is None:
            self.missing.add(name)
            return _MISSING, ""
        return np.atleast_1d(np.asarray(quantity.value, dtype=np.float64)), format_unit(quantity.unit)

    def words(self, name: str) -> TextColumn | None:
        """Return the column of words of that name, None when there is none."""
        column = self.columns.text.get(name)
        if column is not None and (column.codes == UNSTATED).any():
            self.unstated.add(name)
        return column

    def supplied(self, name: str) -> bool:
        """Tell whether anybody supplies that name."""
        return name in self.columns.numeric or name in self.columns.text or name in self.declared

    def why_unknown(self) -> str:
        """Say in one sentence which inputs were not there."""
        parts = [f"{', '.join(sorted(self.missing))} is not declared"] if len(self.missing) == 1 else []
        if len(self.missing) > 1:
            parts.append(f"{', '.join(sorted(self.missing))} are not declared")
        unstated = sorted(self.unstated - self.missing)
        if unstated:
            parts.append(
                f"{', '.join(unstated)} {'is' if len(unstated) == 1 else 'are'} not stated for some records"
            )
        return "; ".join([*parts, *self.remarks])


@lru_cache(maxsize=1024)
def canonical(unit: str) -> str:
    """Return the canonical spelling of a column's unit; "" is a plain number."""
    return format_unit(parse_unit(unit)) if unit.strip() else ""
