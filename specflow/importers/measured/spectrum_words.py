"""Words for whether a peak is a line or noise, and columns that say it row by row."""

from __future__ import annotations

import re
from collections.abc import Iterable

from specflow.importers.readers import Value, is_blank
from specflow.model.evidence import SpectrumKind

_WORDS = {
    SpectrumKind.DISCRETE: "discrete line cw spur spurious tone narrowband nb carrier",
    SpectrumKind.NOISE_LIKE: "noiselike noise broadband bb wideband modulated",
    SpectrumKind.UNKNOWN: "unknown ? unclear other",
}
_KINDS = {word: kind for kind, words in _WORDS.items() for word in words.split()}
_HEADS = frozenset("type kind nature spectrum spectrumkind signalkind signaltype emissiontype peaktype".split())


def spectrum_kind(word: str) -> SpectrumKind | None:
    """The kind that a word means, None where it means none; a blank is unknown."""
    plain = re.sub(r"[\s\-_]+", "", word.casefold())
    return _KINDS.get(plain) if plain not in ("", "—", "–") else SpectrumKind.UNKNOWN


def speaks_of_kinds(header: str, values: Iterable[Value]) -> bool:
    """Whether a column says line or noise of each row, by its header and by all that it holds."""
    if re.sub(r"[\s\-_./]+", "", header.casefold()) not in _HEADS:
        return False
    words = [str(value) for value in values if not is_blank(value)]
    return bool(words) and all(spectrum_kind(word) is not None for word in words)
