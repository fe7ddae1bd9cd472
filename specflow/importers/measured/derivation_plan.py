"""A law that is to be applied to a table once it is stored: raw data come in with what is made of them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from specflow.model.parameter import QuantityIdentity


@dataclass(frozen=True, slots=True)
class DerivationPlan:
    """``values``: role of the law and value column of the table; ``over`` a range as a person says it; ``why`` it is
    planned (the requirements that speak of it). ``shown``: what it is made of, in words.
    """

    law: str
    values: tuple[tuple[str, str], ...]
    quantity: QuantityIdentity
    over: str
    why: str
    shown: str
    settings: Mapping[str, str] = field(default_factory=dict)
