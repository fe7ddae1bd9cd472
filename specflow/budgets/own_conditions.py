"""The conditions that a block meets at its place in the chain: the system's, through its condition map."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import map_columns
from specflow.conditions.recorded import recorded_numbers
from specflow.errors import ConditionsError, DocumentError
from specflow.model.base import code_key
from specflow.model.block import Block
from specflow.model.budget import Budget, BudgetPosition
from specflow.model.columns import Columns
from specflow.model.conditions import ConditionMap
from specflow.model.snapshot import Snapshot

Floats = NDArray[np.float64]

#: Where the temperature of a passive position is looked for, nearest to the metal first.
TEMPERATURES = ("temperature_baseplate", "temperature_case", "temperature_board", "temperature_ambient")
DRIVE = "input_level"
DRIVEN = "power_level"


def position_maps(budget: Budget, snapshot: Snapshot) -> list[ConditionMap | None]:
    """Return the condition map of each position. DocumentError for a block or map that is not in the project."""
    of_block = {code_key(one.block): one for one in snapshot.all(ConditionMap) if one.block is not None}
    return [
        _map_of(position, budget, snapshot, of_block.get(code_key(position.block)))
        for position in budget.chain
    ]


def _map_of(
    position: BudgetPosition, budget: Budget, snapshot: Snapshot, own: ConditionMap | None
) -> ConditionMap | None:
    where = f"budget {budget.id}, position {position.order}"
    if snapshot.find(Block, position.block) is None:
        raise DocumentError(
            f"the block {position.block} is not in the project",
            where=where,
            hint="add the block, or correct its id",
        )
    if position.condition_map is None:
        return own
    found = snapshot.find(ConditionMap, position.condition_map)
    if found is None:
        raise DocumentError(
            f"the condition map {position.condition_map} is not in the project",
            where=where,
            hint="add the map, or correct its id",
        )
    return found


def own_conditions(condition_map: ConditionMap | None, system: Columns) -> Columns:
    """Return the block's own conditions.

    An entry whose sources the set does not state is left out where the set states its target: such a set speaks the
    block's own terms there.
    """
    if condition_map is None:
        return system
    entries = tuple(
        entry
        for entry in condition_map.entries
        if entry.target not in system.names or all(term.dimension in system.numeric for term in entry.terms)
    )
    return map_columns(condition_map.model_copy(update={"entries": entries}), system) if entries else system


def with_levels(columns: Columns, mapped: Sequence[str], **levels: Floats) -> Columns:
    """Return the conditions with the levels at the position in dBm; what the block's map states itself stays."""
    numeric = dict(columns.numeric)
    units = dict(columns.units)
    for name, level in levels.items():
        if name not in mapped:
            numeric[name] = np.broadcast_to(level, (columns.size,))
            units[name] = "dBm"
    text = {name: column for name, column in columns.text.items() if name not in levels}
    return Columns(columns.size, numeric, text, units)


def numbers(columns: Columns, name: str, unit: str, where: str, what: str) -> Floats:
    """Return a dimension of the block's own conditions in ``unit``; ConditionsError where it is not stated."""
    values = recorded_numbers(columns, name, unit)
    if values is not None and not np.isnan(values).any():
        return values
    stated = ", ".join(columns.names) or "nothing"
    if name in columns.numeric and values is None:
        raise ConditionsError(
            f"{what} is by {name} in {unit or 'plain numbers'}, the block's conditions have it in "
            f"{columns.units.get(name) or 'plain numbers'}",
            where=where,
            hint="use one unit of the same kind",
        )
    raise ConditionsError(
        f"{what} depends on {name}, which the block's conditions do not state (they state {stated})",
        where=where,
        hint=f"add {name} to the conditions set, or give the block a condition map: {_example(name)}",
    )


def _example(name: str) -> str:
    match name:
        case "temperature_baseplate" | "temperature_case" | "temperature_board" | "temperature_junction":
            return f"'{name} = temperature_ambient + 18 K'"
        case "if_frequency":
            return "'if_frequency = frequency - 24.5 GHz'"
        case "input_level" | "power_level":
            return f"give the budget an input level, or '{name} [dBm] = ...'"
    return f"'{name} = ...'"


def physical_temperature(columns: Columns) -> tuple[Floats | None, str]:
    """Return the temperature in K of a position and the dimension it was taken from; None where none is stated."""
    for name in TEMPERATURES:
        values = recorded_numbers(columns, name, "K") if name in columns.numeric else None
        if values is not None and not np.isnan(values).any():
            return values, name
    return None, ""
