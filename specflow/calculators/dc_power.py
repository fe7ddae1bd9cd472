"""Efficiency and DC power of transmitters."""

from __future__ import annotations

import numpy as np

from specflow.calculators.arguments import Figures, Floats, above, at_least, chain, finite, within
from specflow.calculators.decibel import ratio, total
from specflow.errors import CalculationError


def drain_efficiency(output_dbm: Figures, dc_w: Figures) -> Floats:
    """Return the drain efficiency as a fraction.

    Formula: P_out/P_dc.
    Valid: output power at the transistor's plane, or say which loss is in it.
    Source: definition; computed: 10 W from 25 W.

    >>> print(f"{drain_efficiency(40.0, 25.0):.3f}")
    0.400
    """
    return ratio(finite(output_dbm, "output_dbm")) * 1e-3 / above(dc_w, 0.0, "dc_w")


def power_added_efficiency(output_dbm: Figures, input_dbm: Figures, dc_w: Figures) -> Floats:
    """Return the power-added efficiency as a fraction.

    Formula: (P_out - P_in)/P_dc.
    Valid: one bandwidth, average powers.
    Source: definition; computed: 10 W out, 1 W in, 25 W.

    >>> print(f"{power_added_efficiency(40.0, 30.0, 25.0):.3f}")
    0.360
    """
    added = ratio(finite(output_dbm, "output_dbm")) - ratio(finite(input_dbm, "input_dbm"))
    return added * 1e-3 / above(dc_w, 0.0, "dc_w")


def dc_power(output_dbm: Figures, efficiency: Figures) -> Floats:
    """Return the DC power in W for an output power at a drain efficiency (fraction above 0, at most 1).

    Formula: P_out/η.
    Valid: the efficiency holds at this output power; it falls with back-off.
    Source: definition; computed.

    >>> print(f"{dc_power(40.0, 0.4):.2f}")
    25.00
    """
    share = within(above(efficiency, 0.0, "efficiency"), 0.0, 1.0, "efficiency")
    return ratio(finite(output_dbm, "output_dbm")) * 1e-3 / share


def tracked_dc_power(output_dbm: Figures, table_dbm: Figures, table_w: Figures) -> Floats:
    """Return the DC power in W of an amplifier whose supply follows its output power, from a table.

    Formula: linear between the rows of (output power in dBm, DC power in W).
    Valid: inside the table only; a power outside it is refused, never taken from the end.
    Source: common practice, no source; computed.

    >>> print(tracked_dc_power([20.0, 25.0], [10.0, 20.0, 30.0], [1.0, 2.0, 4.0]))
    [2. 3.]
    """
    level, watts = chain(table_dbm=finite(table_dbm, "table_dbm"), table_w=at_least(table_w, 0.0, "table_w"))
    if level.ndim != 1 or np.any(np.diff(level) <= 0):
        raise CalculationError(
            "the output powers of the table do not rise", hint="sort its rows; each power once"
        )
    wanted = within(output_dbm, float(level[0]), float(level[-1]), "output_dbm")
    return np.interp(wanted, level, watts)


def total_dc_power(dc_w: Figures, elements: Figures = 1.0) -> Floats:
    """Return the DC power in W of all stages (first axis), each ``elements`` times.

    Formula: Σ N_i·P_i.
    Valid: powers of the same state of the transmitter.
    Source: definition; computed: 64 × 0.5 W and one of 3 W.

    >>> print(f"{total_dc_power([0.5, 3.0], [64, 1]):.1f}")
    35.0
    """
    return total(chain(parts=at_least(dc_w, 0.0, "dc_w") * at_least(elements, 0.0, "elements"))[0])


def chain_efficiency(output_dbm: Figures, dc_w: Figures) -> Floats:
    """Return the efficiency as a fraction of a whole chain: its output against the DC power of all stages (first axis).

    Formula: P_out/Σ P_i.
    Valid: output power behind all losses.
    Source: definition; computed: 10 W from 20, 4 and 1 W.

    >>> print(f"{chain_efficiency(40.0, [20.0, 4.0, 1.0]):.3f}")
    0.400
    """
    return drain_efficiency(output_dbm, total_dc_power(dc_w))
