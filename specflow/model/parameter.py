"""Parameters (named RF quantities) and the identity that decides which values may be compared."""

from __future__ import annotations

from enum import StrEnum
from typing import Literal

from specflow.model.base import Code, Document


class Better(StrEnum):
    """Which direction of a parameter is the better one."""

    HIGHER = "higher"
    LOWER = "lower"
    NEARER_ZERO = "nearer zero"
    NEITHER = "neither"


class Parameter(Document):
    """A named RF quantity: what kind of thing it is, in which unit it is kept and how its ratios are read.

    ``log_factor`` says whether ``%`` or a linear ratio of it becomes dB by 10·log (power) or 20·log (amplitude).
    ``needs_bandwidth`` marks densities, noise and emissions, whose value means nothing without one.
    """

    key: Code
    title: str
    group: str
    unit: str
    better: Better
    log_factor: Literal[10, 20] | None = None
    planes: tuple[str, ...] = ()
    statistics: tuple[str, ...] = ()
    aliases: tuple[str, ...] = ()
    needs_bandwidth: bool = False
    radiated: bool = False
    description: str = ""


class QuantityIdentity(Document):
    """What a value is a value *of*; only like compares with like.

    An empty plane, statistic or polarisation is "not stated"; ``bandwidth_hz`` is the reference bandwidth.
    """

    parameter: Code
    plane: str = ""
    statistic: str = ""
    bandwidth_hz: float | None = None
    polarisation: str = ""

    def differences(self, other: QuantityIdentity) -> tuple[str, ...]:
        """Name the parts in which the two differ; an unstated part on one side counts as a difference."""
        return tuple(
            name
            for name in type(self).model_fields
            if _plain(getattr(self, name)) != _plain(getattr(other, name))
        )


def _plain(part: object) -> object:
    return part.casefold() if isinstance(part, str) else part
