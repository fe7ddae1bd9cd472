"""What a source says itself: limits and verdicts beside its readings, and the scan behind a list of peaks."""

from __future__ import annotations

from typing import Literal

from specflow.model.base import Document

#: The extra column of a peak list: ``PEAK``, or the number of the scan whose floor the row is.
LIST_COLUMN = "peak list"
PEAK = "peak"


class StatedColumn(Document):
    """A column of limits or verdicts as the source states them; its words stand in the extra column ``name``.

    ``side`` of a limit is "" where the header does not say it; ``unit`` is that of the limit; ``of`` names the value
    column it speaks of, "" where that is not known.
    """

    name: str
    kind: Literal["limit", "verdict"]
    side: Literal["lower", "upper", ""] = ""
    unit: str = ""
    of: str = ""


class PeakScan(Document):
    """A range scanned from ``low`` to ``high`` in ``unit``: nothing in it lies above ``floor`` but what is listed.

    The floor is in ``floor_unit`` and in ``bandwidth_hz`` (None: not stated). Without a floor the list can fail a limit
    and proves nothing.
    """

    low: float
    high: float
    unit: str
    floor: float | None = None
    floor_unit: str = ""
    bandwidth_hz: float | None = None


class PeakList(Document):
    """That a table is a list of peaks, with the scans they were found in (none: it proves nothing)."""

    scans: tuple[PeakScan, ...] = ()
