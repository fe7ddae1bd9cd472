"""The columns that a law reads, side by side: rows of other columns or tables that agree in item and conditions."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import DIRECTION_PAIRS, conditions_words
from specflow.conditions.dimensions import word_key
from specflow.conditions.recorded import recorded_numbers
from specflow.derive.request import Role
from specflow.derive.said import chosen
from specflow.derive.samples import Readings
from specflow.errors import DocumentError
from specflow.model.columns import Columns, TextColumn

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]


@dataclass(frozen=True)
class Joined:
    """Rows (n,) of the first role's table, with the readings of every role beside them.

    ``base_rows``: their positions in that table. ``told_apart``: dimensions by which roles choose their rows; they are
    no condition of the result. ``said_units``: units in which axes were asked for.
    """

    conditions: Columns
    items: TextColumn
    base_rows: Rows
    values: Mapping[str, Readings]
    told_apart: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    said_units: dict[str, str] = field(default_factory=dict)

    @property
    def size(self) -> int:
        """How many rows there are."""
        return len(self.base_rows)

    @property
    def has_value(self) -> NDArray[np.bool_]:
        """Which rows have a value in every role."""
        flags = np.ones(self.size, np.bool_)
        for one in self.values.values():
            flags &= ~np.isnan(one.low) & ~np.isnan(one.high)
        return flags

    def readings(self, role: str) -> Readings:
        """Return the readings of one role."""
        return self.values[role]

    def numbers(self, dimension: str, unit: str) -> Floats:
        """Return what the rows state of a dimension in ``unit``; DocumentError where none states it."""
        found = recorded_numbers(self.conditions, dimension, unit)
        if found is None:
            there = ", ".join(self.conditions.names) or "no conditions"
            raise DocumentError(
                f"the table states no {dimension} in {unit or 'plain numbers'}", hint=f"it states: {there}"
            )
        self.said_units[dimension] = unit
        return np.asarray(found, np.float64)

    def directions(self) -> dict[str, Floats]:
        """Return the two angles in degrees by which the rows state directions, polar one first."""
        for pair in DIRECTION_PAIRS:
            if pair.polar in self.conditions.numeric and pair.turn in self.conditions.numeric:
                return {
                    pair.polar: self.numbers(pair.polar, "deg"),
                    pair.turn: self.numbers(pair.turn, "deg"),
                }
        there = ", ".join(self.conditions.names) or "no conditions"
        raise DocumentError(
            "the table states no directions (theta and phi, or azimuth and elevation)",
            hint=f"it states: {there}",
        )

    def words(self, row: int, apart: set[str]) -> str:
        """Say item and conditions of a row, but for the dimensions told apart."""
        kept = Columns(
            self.size,
            {name: values for name, values in self.conditions.numeric.items() if name not in apart},
            {name: words for name, words in self.conditions.text.items() if name not in apart},
            self.conditions.units,
        )
        item = self.items.word(int(row))
        return ", ".join(filter(None, [f"item {item}" if item else "", conditions_words(kept, int(row))]))


def joined(roles: Sequence[Role], where: Sequence[str]) -> Joined:
    """Put the columns of all roles beside one another.

    Rows belong together when item and all conditions are the same, but for those by which the roles choose their rows.
    Raises DocumentError when none agree or when a row has several partners; rows without a partner are left out, and
    that is said.
    """
    base = roles[0]
    chosen_by_role = [chosen(role.columns.conditions, (*where, *role.where)) for role in roles]
    by_role = [chosen(role.columns.conditions, role.where)[1] for role in roles]
    apart = tuple(dict.fromkeys(name for names in by_role for name in names))
    rows = chosen_by_role[0][0]
    partners = [rows]
    notes: list[str] = []
    plain = all(role.table.id == base.table.id and not role.where for role in roles)
    for role, (others, _) in list(zip(roles, chosen_by_role, strict=True))[1:]:
        partners.append(rows if plain else _partners(base, rows, role, others, apart))
    if len(partners) > 1 and not plain:
        whole = np.all([one >= 0 for one in partners], axis=0)
        if not whole.any():
            raise DocumentError(
                f"no row of {roles[1].name} agrees with a row of {base.name} in item and conditions",
                where=", ".join(dict.fromkeys(role.table.id for role in roles)),
                hint="they must be taken at the same frequencies, directions and states",
            )
        if not whole.all():
            notes.append(
                f"{int((~whole).sum())} of {len(whole)} rows of {base.name} have no partner and are left out"
            )
        partners = [one[whole] for one in partners]
    values = {role.name: _readings(role, places) for role, places in zip(roles, partners, strict=True)}
    kept = partners[0]
    return Joined(
        base.columns.conditions.take(kept), base.columns.items.take(kept), kept, values, apart, tuple(notes)
    )


def _readings(role: Role, rows: Rows) -> Readings:
    arrays = role.columns.values[role.column]
    unit = next(one.unit for one in role.table.values if one.name == role.column)
    return Readings(arrays.low, arrays.high, unit, arrays.u).take(rows)


def _partners(base: Role, rows: Rows, other: Role, others: Rows, apart: Sequence[str]) -> Rows:
    """Return for each base row the row of the other role with the same item and conditions, -1 for none."""
    units = base.columns.conditions.units
    mine = _keys(base, rows, apart, units)
    theirs: dict[tuple[object, ...], int] = {}
    for key, row in zip(_keys(other, others, apart, units), others.tolist(), strict=True):
        if key in theirs:
            raise DocumentError(
                f"several rows of {other.name} agree in item and conditions ({other.table.id})",
                hint="choose among them with --where, or tell them apart by a condition",
            )
        theirs[key] = row
    return np.array([theirs.get(key, -1) for key in mine], np.intp)


def _keys(role: Role, rows: Rows, apart: Sequence[str], units: Mapping[str, str]) -> list[tuple[object, ...]]:
    """Return item and conditions of rows in a form that may be compared between tables."""
    conditions = role.columns.conditions
    parts: list[list[object]] = [[role.columns.items.word(int(row)).casefold() for row in rows]]
    for name in sorted({*conditions.names, *units}.difference(apart)):
        unit = units.get(name, conditions.units.get(name, ""))
        numbers = recorded_numbers(conditions, name, unit) if name in conditions.numeric else None
        if numbers is not None:
            parts.append(
                [(name, f"{value:.10g}") if value == value else None for value in numbers[rows].tolist()]
            )
        elif name in conditions.text:
            column = conditions.text[name]
            words = [column.word(int(row)) for row in rows]
            parts.append([(name, word_key(name, word)) if word else None for word in words])
        else:
            parts.append([None] * len(rows))
    return list(zip(*parts, strict=True))
