"""Uncertainty of quantities made from scattering parameters: the register has it by set-up and quantity.

A network file carries none, and the register speaks of gain and return loss, not of raw entries.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from specflow.derive import Derived, Request
from specflow.derive.scattering_laws import SCATTERING_LAWS
from specflow.importers.measured.uncertainty import Registered, from_register
from specflow.model.declared import UncertaintyEntry
from specflow.model.parameter import QuantityIdentity
from specflow.model.snapshot import Snapshot

_LAWS = frozenset(law.name for law in SCATTERING_LAWS)


def with_register(
    snapshot: Snapshot, request: Request, derived: Derived, quantity: QuantityIdentity
) -> Derived:
    """Return what a law of network files gave with the uncertainty of its set-up, where it has none of its own."""
    set_up = request.roles[0].table.set_up
    arrays = derived.columns.values[derived.name]
    if request.law.name not in _LAWS or not set_up or arrays.u is not None:
        return derived
    value = Registered(quantity.parameter, derived.unit or "1", request.gives.log_factor)
    level = np.where(np.isfinite(arrays.low), arrays.low, np.nan)
    spread = from_register(snapshot.all(UncertaintyEntry), set_up, value, level, derived.columns.conditions)
    notes = (*derived.notes, *spread.notes)
    if spread.u is None:
        return replace(derived, notes=notes)
    values = {**derived.columns.values, derived.name: replace(arrays, u=spread.u)}
    columns = replace(derived.columns, values=values)
    return replace(derived, columns=columns, u_rule=spread.source, notes=notes)
