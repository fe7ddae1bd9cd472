"""Calendar dates as people write them, where they have one meaning."""

from __future__ import annotations

import re
from datetime import date, datetime

_LAYOUTS = ("%Y-%m-%d", "%Y/%m/%d", "%Y%m%d", "%d %B %Y", "%d %b %Y", "%d-%b-%Y", "%B %d, %Y", "%b %d, %Y")


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
