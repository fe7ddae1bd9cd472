"""Calendar dates as people write them, where they have one meaning."""

from __future__ import annotations

import re
from datetime import date, datetime
from functools import lru_cache

_LAYOUTS = ("%Y-%m-%d", "%Y/%m/%d", "%Y%m%d", "%d %B %Y", "%d %b %Y", "%d-%b-%Y", "%B %d, %Y", "%b %d, %Y",
            "%b %d %Y", "%B %d %Y", "%Y.%m.%d", "%d.%b %Y", "%d. %b %Y", "%d. %B %Y", "%d.%b.%Y")  # fmt: skip

_TIME = re.compile(
    r"[ T,]+\d{1,2}:\d{2}(?::\d{2}(?:\.\d+)?)?(?: ?[AaPp]\.?[Mm]\.?)?(?: ?(?:Z|UTC|GMT|[+\-]\d{2}:?\d{2}))?"
    r"(?=$| \d{4}$)"
)
_WEEKDAY = re.compile(r"^(?:Mon|Tue|Wed|Thu|Fri|Sat|Sun)[a-z]*[ ,.]+")
_NUMBERS = re.compile(r"(?P<a>\d{1,2}|\d{4})(?P<sign>[/.\-])(?P<b>\d{1,2})(?P=sign)(?P<c>\d{4}|\d{2})")
_DOTTED = re.compile(r"(?P<day>\d{1,2})\.\s?(?P<month>\d{1,2})\.\s?(?P<year>\d{4})")
_DAY_FIRST_KEYS = ("datum", "messdatum", "prüfdatum")


def day_first(key: str, text: str) -> str:
    """Spell 04.05.2026 under a German key as 2026-05-04, where the day stands first (DIN 5008); others as they are."""
    found = _DOTTED.fullmatch(text.strip()) if key.strip(" :").casefold() in _DAY_FIRST_KEYS else None
    return f"{found['year']}-{int(found['month']):02}-{int(found['day']):02}" if found else text


@lru_cache(maxsize=4096)
def read_day(text: str) -> date | None:
    """Read 2026-03-02, 2 March 2026, 2026-03-02T14:30, 10/20/2023 3:27:51 PM; None for 02/03/2026 and anything else.

    Three numbers are a date where only one order of day, month and year makes one: there is no month 20.
    """
    plain = _TIME.sub("", _WEEKDAY.sub("", " ".join(text.split()))).strip(" ,")
    if re.match(r"\d{4}-", plain):
        plain = re.split(r"[T ]", plain)[0]
    for layout in _LAYOUTS:
        try:
            return datetime.strptime(plain, layout).date()
        except ValueError:
            continue
    return _of_one_order(plain)


def _of_one_order(text: str) -> date | None:
    """Read three numbers of which only one order is a date; years have two digits (20..) or four."""
    found = _NUMBERS.fullmatch(text)
    if found is None:
        return None
    first, second, third = found["a"], found["b"], found["c"]
    orders = [(third, first, second), (third, second, first)]  # month first, day first
    if len(first) != 4 and len(third) == 2:
        orders.append((first, second, third))
    days = {day for year, month, day_text in orders if (day := _valid(year, month, day_text)) is not None}
    return days.pop() if len(days) == 1 else None


def _valid(year: str, month: str, day: str) -> date | None:
    if len(year) not in (2, 4):
        return None
    try:
        return date(int(year) + (2000 if len(year) == 2 else 0), int(month), int(day))
    except ValueError:
        return None
