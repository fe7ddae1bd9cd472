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
    return "L-" + digest([sheet_pattern(table), headers])[:16]


def sheet_pattern(table: FoundTable) -> str:
    """Return the name of the sheet with runs of digits as ``#``; "" for a text file."""
    if table.grid.name == table.grid.file:
        return ""
    return re.sub(r"\d+", "#", table.grid.name.strip().casefold())
