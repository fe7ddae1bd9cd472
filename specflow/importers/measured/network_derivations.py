"""Plans of a network with the columns of its table: what each law reads, over which range, with which settings."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from specflow.importers.measured.derivation_plan import DerivationPlan
from specflow.importers.measured.network_columns import NetworkTable
from specflow.importers.measured.network_doubts import Axis
from specflow.importers.measured.network_plans import WHOLE, Plan


def derivation_plans(
    plans: Sequence[Plan], table: NetworkTable, axis: Axis, reference_ohm: float
) -> tuple[list[DerivationPlan], list[str]]:
    """Return the plans with their columns, and notes on those that have no range to run over."""
    made: list[DerivationPlan] = []
    notes: list[str] = []
    for plan in plans:
        values = table.roles(plan.entries)
        over = _whole(table, axis, [name for _, name in values]) if plan.over == WHOLE else plan.over
        if plan.over and not over:
            notes.append(f"not derived: {plan.why}: {plan.quantity.parameter}: there is one row only")
            continue
        settings = dict(plan.settings) | ({"reference": _figure(reference_ohm)} if plan.noise else {})
        made.append(
            DerivationPlan(plan.law, values, plan.quantity, over, plan.why, _shown(table, plan), settings)
        )
    return made, notes


def _shown(table: NetworkTable, plan: Plan) -> str:
    names = table.entry_names(plan.entries)
    return ", ".join(names if len(names) < 4 else [names[0], "...", names[-1]]) or "the noise block"


def _whole(table: NetworkTable, axis: Axis, names: Sequence[str]) -> str:
    """The whole range of the rows that have all values, as a law takes it; with the largest gap where some lack."""
    has = np.ones(len(table.axis), np.bool_)
    for name in names:
        has &= ~np.isnan(table.arrays[name].low)
    along = np.unique(table.axis[has])
    if len(along) < 2:
        return ""
    gap = ""
    if not has.all():
        widest = float(f"{np.diff(along).max():.12g}")  # without the last digits of a difference
        gap = f" step {_figure(widest)} {_gap_unit(axis.unit)}".rstrip()
    return f"{axis.dimension}: {_figure(along[0])}..{_figure(along[-1])} {axis.unit}{gap}"


def _figure(value: float) -> str:
    """A number as a range takes it: no exponent, every digit."""
    return np.format_float_positional(float(value), trim="-")


def _gap_unit(unit: str) -> str:
    return {"°C": "K", "dBm": "dB", "dBW": "dB"}.get(unit, unit)
