"""What was found of a budget whose shares are allocated to blocks: computed, never stored."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class BudgetStanding:
    """Whether the system closes with every block at the worst bound its requirement allows.

    ``closes``: True, False, or None where it is not shown because a bound is missing; ``sentence`` says which, or how
    much is left or lacking and where.
    """

    budget: str
    closes: bool | None
    sentence: str
