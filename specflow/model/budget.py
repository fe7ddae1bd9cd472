"""Budgets and the allocations that come from them."""

from __future__ import annotations

from datetime import date
from typing import Literal

from pydantic import Field

from specflow.model.base import Code, Document
from specflow.model.block import Maturity
from specflow.model.origin import Origin
from specflow.model.parameter import QuantityIdentity


class BudgetLine(Document):
    """One figure of one position: what the block contributes, how far it may move, and how well that is known.

    ``tolerance_meaning`` says whether the tolerance is limits or k·σ; RSS refuses lines that do not say.
    """

    position: int
    block: Code
    parameter: Code
    value: float
    unit: str
    tolerance_minus: float = Field(default=0.0, ge=0)
    tolerance_plus: float = Field(default=0.0, ge=0)
    tolerance_meaning: Literal["", "limits", "k sigma"] = ""
    tolerance_k: float | None = None
    distribution: Literal["", "normal", "uniform", "triangular", "u-shaped"] = ""
    correlation_group: str = ""
    maturity: Maturity = Maturity.ESTIMATED
    source: str = ""


class Budget(Document):
    """An ordered chain or a sum of contributions and the law that combines them."""

    id: Code
    revision: int = 1
    title: str = ""
    requirements: tuple[Code, ...]
    quantity: QuantityIdentity
    law: str
    stacking: str = ""
    plane_in: str = ""
    plane_out: str = ""
    conditions: Code | None = None
    lines: tuple[BudgetLine, ...] = ()
    reserve: float | None = None
    reserve_holder: str = ""
    growth_allowance: str = ""
    note: str = ""
    origin: Origin | None = None


class Allocation(Document):
    """The link from a parent requirement to the block requirement that carries its share.

    ``budget`` with its revision, or "manual" with a reason.
    """

    id: Code
    parent: Code
    parent_revision: int = 1
    child: Code
    budget: Code | None = None
    budget_revision: int | None = None
    manual_reason: str = ""
    state: Literal["proposed", "agreed", "baselined"] = "proposed"
    given_by: str = ""
    taken_by: str = ""
    agreed_on: date | None = None
    revision: int = 1
    origin: Origin | None = None
