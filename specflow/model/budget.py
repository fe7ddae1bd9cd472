"""Budgets and the allocations that come from them.

A budget is a chain (or a sum) of positions, each a block, with lines: one figure of one position, which may depend on
the block's own conditions and may move within a tolerance. What the lines come to is computed, never stored.
"""

from __future__ import annotations

from datetime import date
from enum import StrEnum
from typing import Literal, Self

from pydantic import Field, model_validator

from specflow.model.base import Code, Document, code_key
from specflow.model.budget_line import BudgetLine
from specflow.model.origin import Origin
from specflow.model.parameter import QuantityIdentity


class Law(StrEnum):
    """How the contributions of a budget combine.

    A cascade gives many quantities at once (gain, noise figure, intercepts, levels); a sum gives the one it is of.
    """

    CASCADE = "cascade"
    SUM = "sum"  # gains and losses in dB, or plain amounts, one after the other
    POWER_SUM = "power sum"  # levels of independent signals
    VOLTAGE_SUM = "voltage sum"  # levels of products in phase
    ROOT_SUM_OF_SQUARES = "root sum of squares"  # independent errors as amplitudes: %, degrees


class BudgetPosition(Document):
    """A place in the order of a budget, and the block that stands there.

    ``count`` identical elements work in parallel, fed by an equal share each and combined in phase without loss (losses
    of dividers and combiners are positions of their own). Neighbouring positions that name a ``path`` are parallel
    paths, one chain for each name, fed and combined in the same way. ``passive`` positions have no gain above 0 dB and
    make the noise of their loss at their physical temperature. ``condition_map`` serves where the block's own map
    does not fit this place.
    """

    order: int
    block: Code
    name: str = ""
    path: str = ""
    count: int = Field(default=1, ge=1)
    passive: bool = False
    condition_map: Code | None = None
    note: str = ""

    @property
    def label(self) -> str:
        """What the position is called in tables."""
        return self.name or self.block


class Correlation(Document):
    """The correlation coefficient between two correlation groups; within a group it is 1."""

    first: str
    second: str
    coefficient: float = Field(ge=-1, le=1)

    @model_validator(mode="after")
    def _joins_two(self) -> Self:
        if code_key(self.first) == code_key(self.second):
            raise ValueError(f"the lines of the group {self.first} are fully correlated; name two groups")
        return self


class Reserve(Document):
    """A part of the margin that is kept back, by whom: ``amount`` of the quantity, in its tolerance unit."""

    parameter: Code
    amount: float = Field(ge=0)
    unit: str
    holder: str = Field(min_length=1)


class Budget(Document):
    """An ordered chain or a sum of contributions and the law that combines them.

    ``quantity`` is what the budget is of; served requirements may be on other quantities that the law gives too.
    ``input_level`` drives the chain (a level at ``plane_in``); ``noise_source`` is the temperature in K of what feeds
    it. ``bandwidth_hz`` is the noise bandwidth, or the width of a noise-like signal whose adjacent channel lies
    ``channel_spacing_hz`` away. ``intermodulation`` chooses the sum of distortion products: coherent is
    the worst case of phase.
    """

    id: Code
    revision: int = 1
    title: str = ""
    requirements: tuple[Code, ...]
    quantity: QuantityIdentity
    law: Law
    intermodulation: Literal["coherent", "non-coherent"] = "coherent"
    plane_in: str = ""
    plane_out: str = ""
    conditions: Code | None = None
    input_level: float | None = None
    input_level_unit: str = "dBm"
    noise_source: float | None = Field(default=None, ge=0)
    bandwidth_hz: float | None = Field(default=None, gt=0)
    channel_spacing_hz: float | None = Field(default=None, gt=0)
    positions: tuple[BudgetPosition, ...] = ()
    lines: tuple[BudgetLine, ...] = ()
    correlations: tuple[Correlation, ...] = ()
    reserves: tuple[Reserve, ...] = ()
    note: str = ""
    origin: Origin | None = None

    @property
    def chain(self) -> tuple[BudgetPosition, ...]:
        """The positions in order; of a budget that lists none, those that its lines name."""
        if self.positions:
            return tuple(sorted(self.positions, key=lambda position: position.order))
        named = {line.position: line.block for line in self.lines}
        return tuple(BudgetPosition(order=order, block=named[order]) for order in sorted(named))

    @model_validator(mode="after")
    def _positions_are_single(self) -> Self:
        orders = [position.order for position in self.positions]
        for order in orders:
            if orders.count(order) > 1:
                raise ValueError(f"{self.id}: position {order} is there twice")
        return self

    @model_validator(mode="after")
    def _lines_stand_at_positions(self) -> Self:
        blocks = {position.order: position.block for position in self.chain}
        seen: set[tuple[int, str]] = set()
        for line in self.lines:
            block = blocks.get(line.position)
            if block is None:
                raise ValueError(
                    f"{self.id}: {line.place} stands at position {line.position}, which is not there"
                )
            if code_key(block) != code_key(line.block):
                raise ValueError(
                    f"{self.id}: position {line.position} is {block}, a line there names {line.block}"
                )
            key = (line.position, code_key(line.parameter))
            if key in seen:
                raise ValueError(f"{self.id}: {line.place} is given twice")
            seen.add(key)
        return self


class Sharing(Document):
    """The choices by which a budget was shared: what is needed to share it in the same way again."""

    way: Literal["equal", "proportional", "least effort"]
    fixed: tuple[Code, ...] = ()
    free_gains: tuple[Code, ...] = ()
    weights: tuple[tuple[Code, float], ...] = ()
    at_nominal: bool = False
    by_conditions: bool = False


class Allocation(Document):
    """The link from a parent requirement to the block requirement that carries its share.

    ``budget`` with its revision, or "manual" with a reason. ``proposed`` is the limit that the budget gave and ``way``
    how it was shared, with what choices (``sharing``); where the child carries another limit by hand, ``manual_reason``
    says why.
    """

    id: Code
    parent: Code
    parent_revision: int = 1
    child: Code
    budget: Code | None = None
    budget_revision: int | None = None
    manual_reason: str = ""
    proposed: str = ""
    way: str = ""
    sharing: Sharing | None = None
    state: Literal["proposed", "agreed", "baselined"] = "proposed"
    given_by: str = ""
    taken_by: str = ""
    agreed_on: date | None = None
    revision: int = 1
    origin: Origin | None = None


__all__ = ["Allocation", "Budget", "BudgetLine", "BudgetPosition", "Correlation", "Law", "Reserve", "Sharing"]
