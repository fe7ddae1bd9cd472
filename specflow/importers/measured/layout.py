"""The key of a layout: the same for every file whose tables have the same headers, units and order of columns.

The file name plays no part. The sheet name does, with its digits left out, because it may carry meaning ("Gain SN 7").
"""

from __future__ import annotations

import re

from specflow.exchange import digest
from specflow.importers.measured.header_text import header_key
from specflow.importers.measured.tables import FoundTable


def layout_key(table: FoundTable) -> str:
    """Return the key of a table's layout."""
    headers = [
        f"{header_key(header.text)}|{header_key(header.unit)}" + (f"|k={header.k:g}" if header.k else "")
        for header in table.headers
    ]
    told: list[object] = [sheet_pattern(table), headers]
    if table.grid.turned:
        told.append("turned")
    if table.words_above:
        told.append(list(table.words_above))
    return "L-" + digest(told)[:16]


def sheet_pattern(table: FoundTable) -> str:
    """Return the name of the sheet with runs of digits as ``#``; "" for a text file."""
    return "" if table.grid.name == table.grid.file else name_pattern(table.grid.name)


def name_pattern(name: str) -> str:
    """Return a name with runs of digits as ``#``."""
    return re.sub(r"\d+", "#", name.strip().casefold())
