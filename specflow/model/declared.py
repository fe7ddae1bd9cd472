"""Declared values (what the maker states, and limits may refer to) and the uncertainty register."""

from __future__ import annotations

from datetime import date

from pydantic import Field

from specflow.model.base import Code, Document
from specflow.model.origin import Origin


class DeclaredValue(Document):
    """A value declared by the maker; ``name`` is how limits refer to it (``P_rated``)."""

    id: Code
    name: str
    value: float
    text: str = ""
    unit: str
    declared_on: date | None = None
    declared_by: str = ""
    applies_to: str = ""
    note: str = ""
    revision: int = 1
    origin: Origin | None = None


class UncertaintyEntry(Document):
    """One line of the uncertainty register: what a set-up is good for, by quantity, frequency and level.

    ``standard_uncertainty`` is u = U/k in the tolerance unit of the parameter (dB for levels). ``residual`` is what
    the instrument shows with nothing connected; readings near it are bounds. Open ends are None.
    """

    id: Code
    set_up: str
    parameter: Code
    standard_uncertainty: float = Field(gt=0)
    unit: str
    stated: str = ""
    frequency_from_hz: float | None = None
    frequency_to_hz: float | None = None
    level_from: float | None = None
    level_to: float | None = None
    level_unit: str = ""
    residual: float | None = None
    residual_unit: str = ""
    source: str = ""
    revision: int = 1
    origin: Origin | None = None
