"""Derive: traces and grids become derived evidence, by named laws.

What may live here:

- ``LAWS`` the one list of all laws, with what each needs, its settings, formula and source
- ``law`` an entry of the list and what a law gives; ``samples`` what it is handed
- ``said`` settings, ranges and choices of rows, read from what a person says; ``joining`` the columns it reads side
  by side; ``coverage`` whether they cover the range
- ``request`` what is asked and what was given; ``table`` a law applied to stored tables, ``assembling`` what its groups
  gave as one table
- every other module: the laws of one family (over a range, of a pattern, of a power sweep ...)

A law is a pure function on float64 arrays. It refuses what it cannot do: a range that is not covered is refused with
the range that is there, never clamped or extrapolated. Nothing here judges. To add one: write the function with
formula, validity and source in its docstring, and list it in the table of its family.
"""

from __future__ import annotations

from specflow.derive.cuts import CUT_LAWS
from specflow.derive.edges import EDGE_LAWS
from specflow.derive.law import Law, Outcome, Setting
from specflow.derive.masks import MASK_LAWS
from specflow.derive.phase_noise import PHASE_NOISE_LAWS
from specflow.derive.pointwise import POINTWISE_LAWS
from specflow.derive.power_sweep import SWEEP_LAWS
from specflow.derive.ranges import RANGE_LAWS
from specflow.derive.request import Derived, Refused, Request, Role
from specflow.derive.said import complete_settings
from specflow.derive.samples import Readings, Samples
from specflow.derive.scattering_laws import SCATTERING_LAWS
from specflow.derive.sphere import SPHERE_LAWS
from specflow.derive.table import derive_table

LAWS: tuple[Law, ...] = (
    *RANGE_LAWS,
    *EDGE_LAWS,
    *POINTWISE_LAWS,
    *SWEEP_LAWS,
    *PHASE_NOISE_LAWS,
    *MASK_LAWS,
    *CUT_LAWS,
    *SPHERE_LAWS,
    *SCATTERING_LAWS,
)

LAW_BY_NAME = {law.name: law for law in LAWS}

__all__ = [
    "LAWS",
    "LAW_BY_NAME",
    "Derived",
    "Law",
    "Outcome",
    "Readings",
    "Refused",
    "Request",
    "Role",
    "Samples",
    "Setting",
    "complete_settings",
    "derive_table",
]
