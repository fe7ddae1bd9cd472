"""Reading the text of a unit."""

from __future__ import annotations

import re
from functools import lru_cache

from specflow.errors import UnitError
from specflow.units import compose, names
from specflow.units.factors import factorise
from specflow.units.spelling import unit_spelling
from specflow.units.table import AMBIGUOUS, PLANE_WORDS
from specflow.units.unit import Unit

_LONGEST = 80
_MEASURES = {"rms": "rms", "pp": "p-p", "pkpk": "p-p", "peaktopeak": "p-p", "peak": "peak", "pk": "peak"}
_MEASURE = re.compile(
    r"^(?P<unit>.*?[^\s_(\[,])[\s_,]*[(\[]?(?P<measure>rms|p-?p|pk-?pk|peak[- ]to[- ]peak|peak|pk)[)\]]?$",
    re.IGNORECASE,
)
_DEGREES = re.compile(r"(?:[Dd]eg(?:ree)?s?\.? ?|DEG ?|° )([CFK])\b")
_PER = re.compile(
    r" ?\b[Pp]er |(?<=[A-Za-z])Per(?=[A-Z])"
)  # "dBm per MHz"; dBuVPerMeter, as exports name enumerations
_SPLIT_DECIBEL = re.compile(
    r"^(d[Bb]) (?=[µu]?[mVAW](?:\b|/))"
)  # "dB uV": what follows cannot multiply decibels
_DIRECT = re.compile(r"(?<=[VA]) ?(?:DC|dc)$")  # a direct voltage is a voltage
_IN_BANDWIDTH = re.compile(r" in (?:an? )?(?=\d)")
_DECIMAL_COMMA = re.compile(r"(?<=\d),(?=\d{1,2}(?!\d))")
_BANDWIDTH_WORD = re.compile(r"(?<=Hz)\)? ?(?:BW|RBW|MBW|[Bb]andwidth)\)?$")
_REFERRED = re.compile(r"^dB ?\((?P<reference>.+)\)$", re.IGNORECASE)


def parse_unit(text: str) -> Unit:
    """Read a unit as it is written in practice: "dBm per MHz", "dBuV/m", "degC", "mW/(cm*cm)", "% rms".

    Raises UnitError that names what is unknown and the nearest spellings, or what has several meanings.
    """
    return _parsed(unit_spelling(text))


@lru_cache(maxsize=4096)
def _parsed(text: str) -> Unit:
    if not text:
        raise UnitError("no unit is given", hint="write 1 for a plain number")
    if len(text) > _LONGEST:
        raise UnitError(f"'{text[:40]}…' is too long to be a unit")
    bare = _without_brackets(text)
    if len(bare) > 1 and bare[-1] in ".:" and bare[-2].isalpha():  # "GHz.", "MHz:", "deg."
        bare = bare[:-1]
    try:
        return _read(bare)
    except UnitError as error:
        raise _explained(bare, error) from None


def _read(text: str) -> Unit:
    if text in AMBIGUOUS:
        raise UnitError(f"unit '{text}' has more than one meaning", hint=AMBIGUOUS[text])
    whole = compose.whole_word(text)
    if whole is not None:
        return whole
    measured = _MEASURE.match(text)
    if measured:
        measure = _MEASURES[re.sub(r"[- ]", "", measured["measure"].lower())]
        return compose.measured(_read(measured["unit"]), measure)
    plain = _DEGREES.sub(r"°\1", text).replace("°K", "K")
    plain = _DIRECT.sub("", _SPLIT_DECIBEL.sub(r"\1", _DECIMAL_COMMA.sub(".", plain)))
    plain = _BANDWIDTH_WORD.sub("", _IN_BANDWIDTH.sub("/", _PER.sub("/", plain)))
    referred = _REFERRED.match(plain)
    if referred:
        return compose.referred(factorise(referred["reference"]))
    return compose.composed(factorise(plain))


def _without_brackets(text: str) -> str:
    """[dBm] and (dBm) are how headers write a unit; the brackets are not part of it."""
    while len(text) > 2 and text[0] + text[-1] in ("[]", "()") and text[0] not in text[1:-1]:
        text = text[1:-1].strip()
    return text


def _explained(text: str, error: UnitError) -> UnitError:
    """The same refusal with the best hint we can give for this text."""
    if error.hint:
        return error
    for word in re.split(r"[\s(),]+", text.lower()):
        if word in PLANE_WORDS:
            hint = "the unit ends before it; the plane or convention is stated with the parameter"
            return UnitError(f"'{word.upper()}' is a plane, not part of the unit '{text}'", hint=hint)
    close = names.nearest(text)
    return UnitError(error.message, hint=f"nearest: {', '.join(close)}" if close else "")
