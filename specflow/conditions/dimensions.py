"""Finding a dimension by what people write, and what is known of it."""

from __future__ import annotations

import re
import unicodedata
from functools import lru_cache

from specflow.conditions.dictionary import (
    DIRECTION_PAIRS,
    KNOWN_DIMENSIONS,
    Comparison,
    DirectionPair,
    KnownDimension,
)

#: Angles written as letters are spelled out: "Beam θ" is "beam theta". NFKC and casefold leave these two forms.
_GREEK = str.maketrans({"θ": "theta", "φ": "phi"})
_LOCATIONS_HINT = "ambient, baseplate, case, junction or board"


@lru_cache(maxsize=4096)
def spelling_key(text: str) -> str:
    """Return what two spellings of a dimension are compared by: no case, no unit in brackets, no punctuation,
    angles spelled out.
    """
    bare = re.sub(r"[\[(].*?[\])]", " ", unicodedata.normalize("NFKC", text)).casefold()
    return re.sub(r"[\s_.\-/]+", "", bare).translate(_GREEK)


@lru_cache(maxsize=1)
def _by_spelling() -> dict[str, KnownDimension]:
    found: dict[str, KnownDimension] = {}
    for known in KNOWN_DIMENSIONS:
        for spelling in (known.name, known.title, *known.aliases):
            found.setdefault(spelling_key(spelling), known)
    return found


@lru_cache(maxsize=1)
def _by_name() -> dict[str, KnownDimension]:
    return {known.name: known for known in KNOWN_DIMENSIONS}


def known_dimension(name: str) -> KnownDimension | None:
    """Return the dictionary's entry for a canonical name."""
    return _by_name().get(name)


def find_dimension(text: str) -> KnownDimension | None:
    """Return the dimension that a sheet's heading or a person's spelling means, or None.

    A bare "temperature" is not found on purpose: it does not say whose (see ``is_unlocated_temperature``).
    """
    return _by_spelling().get(spelling_key(text))


def is_unlocated_temperature(text: str) -> bool:
    """Whether the text says temperature without saying where: such a column must be settled by the person."""
    return spelling_key(text) in {"temp", "temperature", "t°c", "temperatur", "tempdegc", "tempc"}


def unlocated_temperature_hint() -> str:
    """Say what resolves a temperature without a location."""
    return f"say whose temperature it is: {_LOCATIONS_HINT}"


@lru_cache(maxsize=65536)
def word_key(name: str, word: str) -> str:
    """Return what two words of a text dimension are compared by: no case, single blanks, one spelling a
    meaning.
    """
    bare = " ".join(unicodedata.normalize("NFKC", word).casefold().split())
    known = known_dimension(name)
    for spellings in known.words if known else ():
        if bare in {spelling.casefold() for spelling in spellings}:
            return spellings[0].casefold()
    return bare


def direction_pair(name: str) -> DirectionPair | None:
    """Return the pair that a dimension is half of."""
    return next((pair for pair in DIRECTION_PAIRS if name in (pair.polar, pair.turn)), None)


def is_periodic(name: str) -> bool:
    """Whether a dimension that stands alone goes round: 359° is next to 1°."""
    known = known_dimension(name)
    turns = {pair.turn for pair in DIRECTION_PAIRS}
    return name in turns or (known is not None and known.comparison is Comparison.PERIODIC)
