"""Whether words name specimens: items that the project knows, or serial numbers as people write them."""

from __future__ import annotations

import re
from collections.abc import Sequence

from specflow.importers.measured.context import Context
from specflow.model.base import code_key

_WORD = (
    r"(?:s/?n|serial(?:\s+(?:no|number))?|dut|uut|eut|unit|sample|device|board|module|specimen|item|prüfling)"
)
_SERIAL = re.compile(rf"^{_WORD}[\s.:#_\-]*[A-Za-z]{{0,4}}[\-_]?\d[\w\-]*$", re.IGNORECASE)
_SERIAL_INSIDE = re.compile(rf"(?<![\w/]){_WORD}[\s.:#_\-]*\d[\w\-]*(?![\w.])", re.IGNORECASE)


def names_items(texts: Sequence[str], context: Context) -> bool:
    """Whether all of these words name specimens, each another one."""
    return bool(texts) and len(set(texts)) == len(texts) and all(is_item(text, context) for text in texts)


def is_item(text: str, context: Context) -> bool:
    """Whether a word names a specimen."""
    return code_key(text) in context.snapshot.items_by_name or _SERIAL.match(text.strip()) is not None


def item_in(text: str, context: Context) -> str:
    """The specimen that a longer text names, as written there; "" without one."""
    if is_item(text, context):
        return text.strip()
    for name in context.item_names:
        found = re.search(rf"(?<![\w\-]){re.escape(name)}(?![\w\-])", text, re.IGNORECASE)
        if found:
            return found[0]
    found = _SERIAL_INSIDE.search(text)
    return found[0] if found else ""
