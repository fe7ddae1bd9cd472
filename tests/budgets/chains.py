"""Invented chains for the tests of budgets, and published ones by name."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from specflow.model.base import Document
from specflow.model.budget import Budget, BudgetLine, BudgetPosition
from specflow.model.limit import Limit
from specflow.model.snapshot import Snapshot
from tests.builders import a_block, a_budget_line, a_quantity, a_requirement, a_snapshot, at_most


def a_position(order: int, block: str, **fields: Any) -> BudgetPosition:
    """Return a position."""
    return BudgetPosition(order=order, block=block, **fields)


def a_chain(*stages: dict[str, Any], parameter: str = "noise_figure", **fields: Any) -> Budget:
    """Return a cascade of stages: ``block`` and figures by parameter name; a figure may be a value or a whole line.

    ``passive``, ``count`` and ``condition_map`` go to the position; ``tolerances`` by parameter to the lines.
    """
    positions, lines = [], []
    for order, stage in enumerate(stages, 1):
        rest = dict(stage)
        block = rest.pop("block", f"S{order}")
        extra = rest.pop("more", {})
        own = {name: rest.pop(name) for name in ("passive", "count", "condition_map") if name in rest}
        positions.append(a_position(order, block, **own))
        for name, value in rest.items():
            more = {"unit": unit_of(name)} | extra.get(name, {})
            lines.append(a_budget_line(order, block, name, value, **more))
    return Budget(
        **{
            "id": "B-1",
            "requirements": ("R-1",),
            "quantity": a_quantity(parameter),
            "law": "cascade",
            "positions": tuple(positions),
            "lines": tuple(lines),
        }
        | fields
    )


def unit_of(parameter: str) -> str:
    """Return the unit in which the tests state a parameter."""
    units = {
        "dc_power": "W",
        "drain_efficiency": "%",
        "pae": "%",
        "phase_noise": "dBc/Hz",
        "noise_density": "dBm/Hz",
    }
    if parameter in units:
        return units[parameter]
    levels = ("iip3", "oip3", "iip2", "oip2", "ip1db", "op1db", "output_power")
    if parameter in levels or parameter in ("blocking_level", "receiver_intermodulation"):
        return "dBm"
    if parameter in ("noise_temperature", "antenna_noise_temperature"):
        return "K"
    return "dBi" if parameter == "antenna_gain" else "dB"


def project_of(
    budget: Budget,
    *documents: Document,
    limit: Limit | None = None,
    requirements: Sequence[Document] = (),
    **more: Any,
) -> Snapshot:
    """Return a project with the blocks of a budget, its requirement R-1 and what else is given.

    R-1 is on the budget's quantity, at most 100 of its unit unless ``limit`` says otherwise, without conditions.
    """
    named = {position.block for position in budget.chain}
    blocks = [a_block(name) for name in sorted(named)]
    own = a_requirement(
        "R-1",
        block="SYS",
        quantity=budget.quantity,
        limit=limit or at_most(100),
        conditions=budget.conditions,
    )
    return a_snapshot(a_block("SYS"), *blocks, *(requirements or [own]), budget, *documents, **more)


def line_at(budget: Budget, position: int, parameter: str) -> BudgetLine:
    """Return one line of a budget."""
    return next(one for one in budget.lines if one.position == position and one.parameter == parameter)


#: D. M. Pozar, Microwave Engineering, 4th ed., Example 10.2: amplifier, filter, mixer.
POZAR_10_2 = (
    {"block": "AMP", "gain": 10.0, "noise_figure": 2.0},
    {"block": "FIL", "insertion_loss": 1.0, "passive": True},
    {"block": "MIX", "conversion_loss": 3.0, "noise_figure": 4.0},
)
