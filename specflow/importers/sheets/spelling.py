"""The nearest spellings of a word that is not known."""

from __future__ import annotations

import difflib
from collections.abc import Iterable

from specflow.model.base import code_key


def near(word: str, known: Iterable[str]) -> str:
    """Return "; the nearest are A, B" for the spellings nearest to a word, "" when nothing is near."""
    spellings = {code_key(one): one for one in known}
    found = difflib.get_close_matches(code_key(word), spellings, n=3, cutoff=0.6)
    return "; nearest: " + ", ".join(spellings[one] for one in found) if found else ""
