"""Dates of workbooks, which are numbers of days: to what bulk reading makes of them, to the millisecond."""

from __future__ import annotations

import re
from datetime import date, datetime, time, timedelta

_DURATION = re.compile(r"\[(?:h+|m+|s+)\]", re.IGNORECASE)
_DAY = 86_400_000
_LAST_DAY = 2_958_465  # 9999-12-31
_START = datetime(1899, 12, 30)
_FROM_1904 = 1462  # days from 1900's day 0 to 1904's


def is_duration(code: str) -> bool:
    """Whether a date format shows elapsed time: ``[h]:mm``."""
    return _DURATION.search(code) is not None


def from_serial(serial: float, duration: bool, from_1904: bool) -> date | datetime | time | timedelta | float:
    """A day number as date, time of day, or both; as it is where no date has that number.

    Days before 1900-03-01 are one later than they are counted, since the count has a 29 February 1900 (ECMA-376
    part 1, 18.17.4.1).
    """
    if not -_LAST_DAY <= serial <= _LAST_DAY + 1:
        return serial
    if duration:
        return timedelta(milliseconds=_rounded(serial * _DAY))
    early = not from_1904 and serial < 60
    counted = serial + (_FROM_1904 if from_1904 else 0)
    try:
        moment = _START + timedelta(days=int(early), milliseconds=_rounded(counted * _DAY))
    except OverflowError:
        return serial
    if serial < 1:
        return moment.time()
    return moment.date() if moment.time() == time(0) and serial == int(serial) else moment


def _rounded(milliseconds: float) -> int:
    return int(milliseconds + 0.5) if milliseconds >= 0 else -int(0.5 - milliseconds)
