"""What to write instead: every refusal of a limit ends with a spelling that works, made of what was typed."""

from __future__ import annotations

import re
from collections.abc import Callable
from math import isinf

from specflow.errors import ExpressionError
from specflow.limits.conversion import conversion
from specflow.limits.reader import RESERVED, canonical_unit
from specflow.model.limit import Limit
from specflow.model.parameter import Better

_QUOTED = re.compile(r"'([^']+)'")
_VALUE = re.compile(r"([-−–+]?) ?(\d+(?:[.,]\d+)?(?:[eE][-+]?\d+)?) *([A-Za-zµμΩ°%]+(?:/[A-Za-z]+)?)?")
_UPPER = re.compile(r"<|≤|\bmax|most|exceed|less|below", re.IGNORECASE)
_LOWER = re.compile(r">|≥|\bmin|least|more|above", re.IGNORECASE)
_WORDS_ONLY = re.compile(r"[^\W\d_]+(?:[ ,.'\-]+[^\W\d_]+)*[.!?]?")
_NOTHING = frozenset("-–—?.*/_")
_REFERENCE = re.compile(
    r"(?:see|refer|as per|per|acc|according|table|note|cf|ref|tab|fig|clause)\b", re.IGNORECASE
)
_WITHOUT_NUMBER = frozenset({"tbd", "no limit", "n/a"})


def better_told(
    error: ExpressionError, text: str, unit: str, better: Better | None, reads: Callable[[str], Limit]
) -> ExpressionError:
    """Return the error with a hint that quotes a spelling which ``reads`` takes; unchanged where it has one already."""
    message, hint = error.message, error.hint
    if _says_nothing(text):
        message = f"{text.strip()!r} is no limit"
        hint = (
            "write the number, 'TBD' where it is not known yet, 'no limit' or 'n/a' where nothing is required"
        )
    quoted = [
        word for word in _QUOTED.findall(hint) if re.search(r"\d", word) or word.lower() in _WITHOUT_NUMBER
    ]
    if any(_is_read(spelling, reads) for spelling in quoted):
        return ExpressionError(message, where=error.where, hint=hint)
    example = example_of(text, unit, better)
    told = f"{hint}; for example '{example}'" if hint else f"write it as in '{example}'"
    return ExpressionError(message, where=error.where, hint=told)


def example_of(text: str, unit: str, better: Better | None) -> str:
    """Return a limit in the grammar's own words, with the first value of the text that has a unit."""
    found = list(_VALUE.finditer(text))
    named = [(match, own) for match in found if (own := _unit_of(match))]
    sign, number, own = "", "45", unit or "dB"
    if named:
        match, own = next((one for one in named if _converts(one[1], unit)), named[0])
        sign, number = match.group(1), match.group(2)
    elif found:
        sign, number = found[0].group(1), found[0].group(2)
    if isinf(float(number.replace(",", "."))):
        number = "45"
    value = f"{'-' if sign in ('-', '−', '–') and sign else ''}{number.replace(',', '.')}"
    return f"{_side(text, better)} {value} {'plain' if own == '1' else own}"


def _unit_of(match: re.Match[str]) -> str:
    written = match.group(3) or ""
    for ending in ("", "min", "max"):
        word = written.removesuffix(ending)
        if word and word.lower() not in RESERVED and (unit := canonical_unit(word)):
            return unit
    return ""


def _converts(unit: str, target: str) -> bool:
    return bool(target) and conversion(unit, target) is not None


def _side(text: str, better: Better | None) -> str:
    if "±" in text or "+/-" in text:
        return "±"
    upper, lower = _UPPER.search(text), _LOWER.search(text)
    if upper and not lower:
        return "<="
    if better is Better.NEARER_ZERO and not lower:
        return "±"
    return "<=" if better is Better.LOWER and not lower else ">="


def _says_nothing(text: str) -> bool:
    """Tell whether a text is a dash or plain words, so that no place in it is the fault."""
    bare = text.strip()
    if bare and set(bare) <= _NOTHING:
        return True
    if _REFERENCE.match(bare) and not any(_unit_of(match) for match in _VALUE.finditer(bare)):
        return True
    words = bare.replace(",", " ").split()
    return (
        bool(_WORDS_ONLY.fullmatch(bare))
        and not RESERVED & {word.lower() for word in words}
        and (len(words) > 1 or bare.endswith((".", "?", "!")))
    )


def _is_read(text: str, reads: Callable[[str], Limit]) -> bool:
    try:
        reads(text)
    except ExpressionError:
        return False
    return True
