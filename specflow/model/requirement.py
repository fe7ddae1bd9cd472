"""Requirements and their verification activities.

A requirement is a limit on one quantity of one block over one conditions set. An allocation to a block *is* a
requirement on that block.
"""

from __future__ import annotations

from datetime import date
from enum import StrEnum
from typing import Literal

from pydantic import Field

from specflow.model.base import Code, Document
from specflow.model.block import HardwareType, Tier
from specflow.model.limit import Limit
from specflow.model.origin import Origin
from specflow.model.parameter import QuantityIdentity


class Obligation(StrEnum):
    """How binding the statement is."""

    SHALL = "shall"
    SHOULD = "should"


class Source(Document):
    """The document a requirement was taken from."""

    document: str = ""
    issue: str = ""
    paragraph: str = ""


class OpenValue(Document):
    """What a TBD or TBR still needs: who settles it, until when, by which action."""

    owner: str = ""
    due: date | None = None
    action: str = ""


class RuleName(StrEnum):
    """Decision rules by name; see ``statistics.decision`` for formulas and sources."""

    SIMPLE = "simple"
    GUARDED = "guarded"
    FOUR_WAY = "four-way"


class DecisionRule(Document):
    """How a reading becomes a verdict.

    The guard band is ``w = guard_factor · U`` with U at k = 2. ``greatest_uncertainty`` is a ceiling on U (k = 2), in
    the tolerance unit of the limit (dB for one in dBm, % for one in %): above it evidence is not admissible, or, with
    ``excess_tightens``, the excess is taken off the limit. ``comparison`` chooses the absolute or the rounding method
    of ASTM E29. Under the four-way rule ``conditional_pass_counts`` says whether a reading inside the guard band
    proves its point.
    """

    name: RuleName = RuleName.SIMPLE
    guard_factor: float = Field(default=1.0, ge=0)
    greatest_uncertainty: float | None = Field(default=None, gt=0)
    excess_tightens: bool = False
    comparison: Literal["absolute", "rounded"] = "absolute"
    conditional_pass_counts: bool = True


class Provers(Document):
    """Who must prove a requirement: any one item (default), each of named items, or a number of them."""

    rule: Literal["any one", "each of", "number of"] = "any one"
    items: tuple[str, ...] = ()
    number: int = Field(default=1, ge=1)
    may_complete_each_other: bool = False


class Requirement(Document):
    """A limit on one quantity of one block over one conditions set, with source, method and owner."""

    id: Code
    revision: int = 1
    title: str
    statement: str = ""
    source: Source = Field(default_factory=Source)
    parents: tuple[Code, ...] = ()
    derived_reason: str = ""
    kind: str = "performance"
    tier: Tier = Tier.SYSTEM
    obligation: Obligation = Obligation.SHALL
    owner: str = ""
    block: Code
    quantity: QuantityIdentity
    limit: Limit
    open_value: OpenValue | None = None
    conditions: Code | None = None
    applicability: str = ""
    not_applicable_reason: str = ""
    not_applicable_approver: str = ""
    decision_rule: DecisionRule = Field(default_factory=DecisionRule)
    provers: Provers = Field(default_factory=Provers)
    met_by_lower_level: bool = False
    needs_allocation: bool | None = None
    rationale: str = ""
    assumptions: str = ""
    priority: str = ""
    note: str = ""
    origin: Origin | None = None


class Method(StrEnum):
    """Verification methods; similarity is a sub-kind of analysis."""

    TEST = "test"
    ANALYSIS = "analysis"
    SIMILARITY = "similarity"
    INSPECTION = "inspection"
    REVIEW_OF_DESIGN = "review of design"
    DEMONSTRATION = "demonstration"


class Stage(StrEnum):
    """Verification stages."""

    DEVELOPMENT = "development"
    QUALIFICATION = "qualification"
    ACCEPTANCE = "acceptance"


class Activity(Document):
    """A planned verification of one requirement: method × stage × tier, with criteria.

    ``planned`` is False for the default activity that every requirement has until somebody plans one.
    ``credit_from`` is the least representative hardware whose test may close the activity. ``shorthand``: planned by
    the row of its requirement itself, which it follows, not by a row of its own.
    """

    id: Code
    requirement: Code
    requirement_revision: int = 1
    method: Method = Method.TEST
    stage: Stage = Stage.QUALIFICATION
    tier: Tier = Tier.SYSTEM
    criteria: str = ""
    credit_from: HardwareType = HardwareType.ENGINEERING
    responsible: str = ""
    gate: str = ""
    procedure: str = ""
    procedure_revision: str = ""
    facility: str = ""
    planned: bool = True
    shorthand: bool = False
    note: str = ""
    revision: int = 1
    origin: Origin | None = None
