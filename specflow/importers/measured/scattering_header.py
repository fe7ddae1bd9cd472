"""Columns of raw scattering parameters, by headers that name an entry and its form: "S11 Log Mag(dB)", "Re(S21)",
"dB(S(2,1)) []".

They mean the same as in a network file: which port is the input nobody has said, so that they are no gain yet. Short
headers ("S21 (dB)", "S21 phase") are aliases of parameters and stay with the dictionary. The names of forms are those
that analysers and simulators share (common practice, no source).
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache

from specflow.importers.measured.header_text import known_unit

_ENTRY = r"S\s*[(\[]?\s*(?P<to>[0-9]{1,2}?)\s*[,_]?\s*(?P<of>[0-9]{1,2}?)\s*[)\]]?"
_FORM = r"(?P<form>[A-Za-z][A-Za-z_ ]*?)"
_UNIT = r"(?:\s*[(\[]\s*(?P<unit>[^()\[\]]*?)\s*[)\]])?"
_AROUND = re.compile(rf"{_FORM}\s*\(\s*(?P<entry>{_ENTRY})\s*\){_UNIT}", re.IGNORECASE)
_BEHIND = re.compile(rf"(?P<entry>{_ENTRY})[\s_:.]*{_FORM}{_UNIT}", re.IGNORECASE)
_WITH_COMMA = re.compile(r"\d\s*[,_]\s*\d")

_FORMS = {
    form: part
    for part, forms in {
        ("scattering_db", "dB"): ("db", "logmag", "logm", "logmagnitude", "dbmag", "mlog", "magdb"),
        ("scattering_magnitude", "1"): (
            "mag",
            "magnitude",
            "linmag",
            "lin",
            "linearmag",
            "linearmagnitude",
            "abs",
        ),
        ("scattering_angle", ""): (
            "ang",
            "angle",
            "phase",
            "phas",
            "arg",
            "uphase",
            "unwrappedphase",
            "cang",
        ),
        ("scattering_angle", "deg"): ("angdeg", "cangdeg", "phasedeg", "deg"),
        ("scattering_angle", "rad"): ("angrad", "cangrad", "phaserad", "rad"),
        ("scattering_real", "1"): ("re", "real", "realpart"),
        ("scattering_imaginary", "1"): ("im", "imag", "imaginary", "imaginarypart"),
    }.items()
    for form in forms
}
#: Forms in which an entry of two plain digits is an alias of the dictionary.
_ALIASES = frozenset(("db", "mag", "magnitude", "lin", "ang", "phase"))


@dataclass(frozen=True, slots=True)
class ScatteringHeader:
    """``parameter`` is the key of the raw quantity, ``plane`` the port, or the ports of the way; ``unit`` that of the
    form, or of the header, "" where neither says one."""

    parameter: str
    plane: str
    unit: str


@lru_cache(maxsize=1024)
def scattering_header(text: str) -> ScatteringHeader | None:
    """What a header says of an entry; None for any other header, and where form and unit contradict each other."""
    whole = " ".join(text.replace("|", "").split())
    found = _AROUND.fullmatch(whole) or _BEHIND.fullmatch(whole)
    if found is None:
        return None
    form = re.sub(r"[\s_]+", "", found["form"].casefold())
    part = _FORMS.get(form)
    if part is None or (form in _ALIASES and not _WITH_COMMA.search(found["entry"])):
        return None
    parameter, own = part
    written = found["unit"] or ""
    unit = own or written
    if written and own and known_unit(written) != known_unit(own):
        return None
    to, of = int(found["to"]), int(found["of"])
    return ScatteringHeader(parameter, f"port {to}" if to == of else f"port {of} to port {to}", unit)
