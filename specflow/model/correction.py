"""Corrections: what a cable, a probe or an antenna adds to every reading, by frequency, with its uncertainty."""

from __future__ import annotations

from datetime import date
from itertools import pairwise
from typing import Self

from pydantic import Field, model_validator

from specflow.model.base import Code, Document
from specflow.model.origin import Origin


class CorrectionPoint(Document):
    """What is added to a reading at one frequency, in the unit of its table; ``u``: its standard uncertainty, dB."""

    frequency_hz: float = Field(gt=0)
    added: float
    u: float | None = Field(default=None, gt=0)


class Correction(Document):
    """A correction table. Values are *added* to readings in dB, linearly between its points, never beyond them.

    ``unit`` is dB, or dB(1/m) for an antenna factor, which makes a field strength of a voltage. ``issue`` is the
    revision as its calibration says it, ``parameter`` the quantity it is for (None: any), ``set_up`` where it belongs
    ("" anywhere); it may be used from ``valid_from`` to ``valid_until``, both days included.
    """

    id: Code
    title: str = ""
    kind: str = ""
    unit: str = "dB"
    points: tuple[CorrectionPoint, ...] = Field(min_length=1)
    parameter: Code | None = None
    set_up: str = ""
    issue: str = ""
    valid_from: date | None = None
    valid_until: date | None = None
    source: str = ""
    note: str = ""
    revision: int = 1
    origin: Origin | None = None

    @model_validator(mode="after")
    def _frequencies_rise(self) -> Self:
        hertz = [point.frequency_hz for point in self.points]
        if any(low >= high for low, high in pairwise(hertz)):
            raise ValueError("the frequencies of a correction must rise, each once")
        return self


class AppliedCorrection(Document):
    """That a correction was added to a value column at import, and in which revision; its words for people."""

    correction: Code
    revision: int
    column: str
    words: str
