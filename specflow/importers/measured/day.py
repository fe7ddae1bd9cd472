"""Calendar dates as people write them, where they have one meaning."""

from __future__ import annotations

import re
from datetime import date, datetime

_LAYOUTS = ("%Y-%m-%d", "%Y/%m/%d", "%Y%m%d", "%d %B %Y", "%d %b %Y", "%d-%b-%Y", "%B %d, %Y", "%b %d, %Y")


_DOTTED = re.compile(r"(?P<day>\d{1,2})\.\s?(?P<month>\d{1,2})\.\s?(?P<year>\d{4})")
_DAY_FIRST_KEYS = ("datum", "messdatum", "prüfdatum")


def day_first(key: str, text: str) -> str:
    """Spell 04.05.2026 under a German key as 2026-05-04, where the day stands first (DIN 5008); others as they are."""
    found = _DOTTED.fullmatch(text.strip()) if key.strip(" :").casefold() in _DAY_FIRST_KEYS else None
    return f"{found['year']}-{int(found['month']):02}-{int(found['day']):02}" if found else text


def read_day(text: str) -> date | None:
    """Read 2026-03-02, 2 March 2026, 2026-03-02T14:30; None for anything else, 02/03/2026 too."""
    plain = text.strip()
    if re.match(r"\d{4}-", plain):
        plain = re.split(r"[T ]", plain)[0]
    for layout in _LAYOUTS:
        try:
            return datetime.strptime(plain, layout).date()
        except ValueError:
            continue
    return None
