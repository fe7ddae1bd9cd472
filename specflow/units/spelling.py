"""Texts as they arrive from sheets, brought to one spelling before anything is read from them.

Minus signs, spaces, micro and ohm signs exist several times in Unicode, and each arrives damaged when a file was read
in the wrong encoding. What is repaired here cannot mean anything else.
"""

from __future__ import annotations

import re
import unicodedata
from functools import lru_cache

# UTF-8 read as Windows-1252: the damaged forms of the signs that units and numbers use.
_DAMAGED = {
    "\u00e2\u02c6\u2019": "-",
    "\u00e2\u20ac\u201c": "-",
    "\u00e2\u201e\u00a6": "Ω",
    "\u00ce\u00a9": "Ω",
    "\u00ce\u00bc": "µ",
    "\u00c2\u00b5": "µ",
    "\u00c2\u00b0": "°",
    "\u00c2\u00b2": "²",
    "\u00c2\u00b1": "±",
    "\u00c2\u00b7": "·",
    "\u00c2\u00a0": " ",
}
_INVISIBLE = dict.fromkeys(map(ord, "\u200b\u200c\u200d\u2060\ufeff\u00ad\u200e\u200f"))
_MINUS = dict.fromkeys(map(ord, "\u2212\u2010\u2011\u2013\ufe63\uff0d\u207b"), "-")
_SPACE = re.compile(r"\s+")


def repaired(text: str) -> str:
    """Undo damaged encodings, drop invisible characters, and make every minus and every space the plain one.

    The em dash is left alone: alone in a cell it means "nothing here", never minus.
    """
    for damaged, sign in _DAMAGED.items():
        if damaged in text:
            text = text.replace(damaged, sign)
    return _SPACE.sub(" ", text.translate(_INVISIBLE).translate(_MINUS)).strip()


@lru_cache(maxsize=4096)  # two hundred sheets have the same few headers
def unit_spelling(text: str) -> str:
    """Bring the text of a unit to plain signs: m² as m2, both micro signs as µ, every product sign as *."""
    text = unicodedata.normalize("NFKC", repaired(text).replace("º", "°")).translate(_MINUS)
    text = text.replace("\u03bc", "µ").replace("×", "*").replace("⋅", "*").replace("·", "*")
    return _SPACE.sub(" ", text.replace("•", "*").replace("**", "^")).strip()
