"""Words for whether a peak is a line or noise, bandwidths, and columns that say either row by row."""

from __future__ import annotations

import re
from collections.abc import Iterable

from specflow.errors import UnitError
from specflow.importers.readers import Value, is_blank
from specflow.model.evidence import SpectrumKind
from specflow.units import converter, parse_quantity, parse_unit

_WORDS = {
    SpectrumKind.DISCRETE: "discrete line cw spur spurious tone narrowband nb carrier",
    SpectrumKind.NOISE_LIKE: "noiselike noise broadband bb wideband modulated",
    SpectrumKind.UNKNOWN: "unknown ? unclear other",
}
_KINDS = {word: kind for kind, words in _WORDS.items() for word in words.split()}
_HEADS = frozenset(
    [
        "type",
        "kind",
        "nature",
        "spectrum",
        "spectrumkind",
        "signalkind",
        "signaltype",
        "emissiontype",
        "peaktype",
    ]
)


def spectrum_kind(word: str) -> SpectrumKind | None:
    """The kind that a word means, None where it means none; a blank is unknown."""
    plain = re.sub(r"[\s\-_]+", "", word.casefold())
    return _KINDS.get(plain) if plain not in ("", "—", "–") else SpectrumKind.UNKNOWN


def heads_kinds(header: str) -> bool:
    """Whether a header may stand over lines and noise."""
    return re.sub(r"[\s\-_./]+", "", header.casefold()) in _HEADS


def speaks_of_kinds(header: str, values: Iterable[Value]) -> bool:
    """Whether a column says line or noise of each row, by its header and by all that it holds."""
    if not heads_kinds(header):
        return False
    words = [str(value) for value in values if not is_blank(value)]
    return bool(words) and all(spectrum_kind(word) is not None for word in words)


def bandwidth_in(text: str, unit: str) -> float | None:
    """A bandwidth in Hz as a cell says it, in the unit of its header where it has none; None where it is none."""
    try:
        amount = parse_quantity(text if not unit or text.rstrip()[-1:].isalpha() else f"{text} {unit}")
    except UnitError:
        return None
    if amount.unit.dimension != "frequency":
        return None
    return float(converter(amount.unit, parse_unit("Hz"))(float(amount.value)))
