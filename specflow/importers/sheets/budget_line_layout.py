"""The columns of the sheet of budget lines."""

from __future__ import annotations

from typing import get_args

from specflow.importers.sheets.sheet import MARK_COLUMN
from specflow.model.block import Maturity
from specflow.model.budget import BudgetLine
from specflow.model.budget_line import Distribution
from specflow.model.sheet import EXAMPLE, SheetColumn, SheetLayout

SHARED: tuple[str, ...] = get_args(BudgetLine.model_fields["shared"].annotation)
SIDEBANDS = ("SSB", "DSB", "both")

LAYOUT = SheetLayout(
    noun="budget",
    title="Budget lines",
    aliases=("Budget line", "Lines of budgets"),
    intro=(
        "What each block contributes: one row a figure. Positions count from the input. Every value is read at the "
        "block's own conditions; outside a table there is no value."
    ),
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="budget",
            title="Budget",
            aliases=("Budget ID",),
            field="id",
            required=True,
            guidance="ID of the budget. Empty below a row: the same.",
            example="B-TX",
        ),
        SheetColumn(
            key="position",
            title="Position",
            aliases=("Pos", "No.", "Order"),
            field="positions",
            required=True,
            guidance="Its place from the input: 1, 2 ... Empty below a row: the same.",
            example="1",
            width=10,
        ),
        SheetColumn(
            key="block",
            title="Block",
            aliases=("Block ID",),
            field="positions",
            required=True,
            guidance="ID of the block. Empty below a row: the same.",
            example="TX-PA",
        ),
        SheetColumn(
            key="name",
            title="Position name",
            field="positions",
            guidance="Where one block stands at several places. Once a position.",
        ),
        SheetColumn(
            key="path",
            title="Path",
            aliases=("Parallel path",),
            field="positions",
            guidance="Neighbouring positions that name paths are parallel, a chain for each name. Once a position.",
            width=10,
        ),
        SheetColumn(
            key="count",
            title="N in parallel",
            aliases=("Count", "N", "Elements"),
            field="positions",
            guidance="Identical elements in parallel; figures are those of one. Empty: 1. Once a position.",
            width=12,
        ),
        SheetColumn(
            key="passive",
            title="Passive",
            field="positions",
            guidance="yes: its noise is that of its loss at its physical temperature. Once a position.",
            choices=("yes", "no"),
            width=10,
        ),
        SheetColumn(
            key="condition_map",
            title="Condition map",
            field="positions",
            guidance="Empty: the block's own. Once a position.",
        ),
        SheetColumn(
            key="parameter",
            title="Parameter",
            aliases=("Quantity", "Figure"),
            field="lines",
            required=True,
            guidance=(
                "gain, insertion_loss, noise_figure, iip3, oip3, op1db, antenna_gain; intercepts name their port. Also "
                "snr (what a receiver needs, its implementation loss with it), image_rejection, rejection, dc_power, "
                "drain_efficiency, phase_noise, blocking_level."
            ),
            example="gain",
        ),
        SheetColumn(
            key="value",
            title="Value",
            field="lines",
            required=True,
            guidance=(
                "24 dB · 24 dB - 0.02 dB/K of temperature_baseplate from 23 °C · table frequency: 17.7 GHz 23.5; "
                "20.2 GHz 24.5 dB linear · table gain_state: high = 20 dB; low = 5 dB · trace T-1: Gain along "
                "frequency · touchstone filter.s2p S21"
            ),
            example="24 dB - 0.02 dB/K of temperature_baseplate from 23 °C",
            width=46,
        ),
        SheetColumn(
            key="unit",
            title="Unit",
            aliases=("Units",),
            field="lines",
            guidance="If not with the value.",
            width=9,
        ),
        SheetColumn(
            key="tolerance",
            title="Tolerance",
            aliases=("±",),
            field="lines",
            guidance="± 0.5 dB, or +0.3/-0.1 dB.",
            example="± 0.5 dB",
            width=14,
        ),
        SheetColumn(
            key="tolerance_meaning",
            title="Tolerance means",
            aliases=("Meaning",),
            field="lines",
            guidance="limits, or 2 sigma (k=2). A root sum of squares refuses lines that do not say.",
            example="limits",
            width=14,
        ),
        SheetColumn(
            key="distribution",
            title="Distribution",
            field="lines",
            guidance="Bounds are no distribution: Monte Carlo needs one. Truncated normal: limits, k=3.",
            choices=tuple(Distribution),
            example="uniform",
            width=16,
        ),
        SheetColumn(
            key="correlation_group",
            title="Correlation group",
            aliases=("Moves with",),
            field="lines",
            guidance="Lines of one group move together.",
        ),
        SheetColumn(
            key="shared",
            title="Elements move",
            field="lines",
            guidance="Of N in parallel: common (empty), or per element: independent, they average.",
            choices=SHARED,
            width=14,
        ),
        SheetColumn(
            key="growth",
            title="Growth allowance",
            field="lines",
            guidance="Taken off the figure, in its tolerance unit. Empty: none.",
            width=12,
        ),
        SheetColumn(
            key="sideband",
            title="Sideband",
            field="lines",
            guidance="Of a mixer's noise figure. With image_rejection lines the noise at its image counts; DSB needs "
            "them. both: a DSB figure, and the wanted signal is in both sidebands.",
            choices=SIDEBANDS,
            width=10,
        ),
        SheetColumn(
            key="plane",
            title="Plane",
            aliases=("Port", "Reference plane"),
            field="lines",
            guidance="Where the figure holds, as the block's requirements say it. Empty: not stated.",
            width=14,
        ),
        SheetColumn(
            key="statistic",
            title="Statistic",
            field="lines",
            guidance="Of what it is: worst, rms, mean of power ... Empty: not stated.",
            width=14,
        ),
        SheetColumn(
            key="maturity",
            title="Maturity",
            field="lines",
            guidance="Empty: estimated.",
            choices=tuple(Maturity),
            example="datasheet typical",
            width=18,
        ),
        SheetColumn(
            key="source",
            title="Source",
            aliases=("Reference",),
            field="lines",
            example="Data sheet (invented)",
            width=24,
        ),
    ),
    more_examples=(
        {
            "mark": EXAMPLE,
            "budget": "B-TX",
            "position": "2",
            "block": "TX",
            "passive": "yes",
            "parameter": "insertion_loss",
            "value": "table frequency: 27.5 GHz 1.1; 30 GHz 1.3 dB linear",
            "tolerance": "+0.3/-0.1 dB",
            "tolerance_meaning": "limits",
            "distribution": "triangular",
        },
        {
            "mark": EXAMPLE,
            "budget": "B-TX",
            "position": "3",
            "block": "UT",
            "parameter": "antenna_gain",
            "value": "28.5 dBi",
            "tolerance": "± 0.4 dB",
            "tolerance_meaning": "2 sigma",
            "maturity": "simulated",
        },
    ),
)
