"""What a person writes for an allocation: reserves, weights, limits by hand."""

from __future__ import annotations

import re

from specflow.errors import DocumentError
from specflow.model.budget import Reserve
from specflow.workflows.allocate import ByHand

_RESERVE = re.compile(r"(?P<parameter>\S+)\s+(?P<amount>[+-]?[\d.,]+)\s*(?P<unit>\S+)\s+(?P<holder>.+)")
_HAND = re.compile(r"(?P<block>\S+)\s+(?P<parameter>[^\W\d]\w*)\s+(?P<limit>.+)")


def read_reserve(text: str) -> Reserve:
    """Read ``noise_figure 0.3 dB Systems``. DocumentError where amount, unit or holder is missing."""
    found = _RESERVE.fullmatch(text.strip())
    try:
        if found is None:
            raise ValueError(text)
        return Reserve(
            parameter=found["parameter"],
            amount=float(found["amount"].replace(",", ".")),
            unit=found["unit"],
            holder=found["holder"].strip(),
        )
    except ValueError:
        raise DocumentError(
            f"{text!r} is no reserve",
            hint="write parameter, a positive amount with its unit, and who holds it: 'noise_figure 0.3 dB Systems'",
        ) from None


def read_weight(text: str) -> tuple[str, float]:
    """Read ``LNA=3``. DocumentError for anything else."""
    block, _, weight = text.partition("=")
    try:
        value = float(weight)
    except ValueError:
        value = 0.0
    if not block.strip() or not value > 0:
        raise DocumentError(f"{text!r} is no weight", hint="write block and a positive number: 'LNA=3'")
    return block.strip(), value


def read_by_hand(text: str, reason: str) -> ByHand:
    """Read ``LNA noise_figure <= 1.4 dB``. DocumentError for anything else."""
    found = _HAND.fullmatch(text.strip())
    if found is None:
        raise DocumentError(
            f"{text!r} is no limit by hand",
            hint="write block, parameter and limit: 'LNA noise_figure <= 1.4 dB'",
        )
    return ByHand(found["block"], found["parameter"], found["limit"].strip(), reason)
