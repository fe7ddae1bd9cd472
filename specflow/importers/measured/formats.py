"""What a trace is, where its column is called "Formatted Data" and the head of the file says it: S21, Log Mag.

The names of formats are those that network analysers share (common practice, no source).
"""

from __future__ import annotations

import re
from dataclasses import dataclass

_PLAIN_HEADS = frozenset(
    [
        "formatteddata",
        "data",
        "value",
        "values",
        "trace",
        "tracedata",
        "amplitude",
        "magnitude",
        "level",
        "y",
        "yaxis",
        "ydata",
        "response",
        "measurement",
        "tracea",
        "traceb",
        "tracec",
        "traced",
        "trace1",
        "trace2",
        "trace3",
        "trace4",
        "ch1",
        "ch2",
    ]
)
_SCATTERING = re.compile(r"^S(\d)(\d)$", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Format:
    """A format of a trace: the header it stands for, ``{}`` being what was measured; its unit; what it is in words."""

    header: str
    unit: str
    words: str


_FORMATS: dict[str, Format] = {}
for _names, _format in (
    ("logmag logmagnitude mlog db dbmag logarithmic", Format("{} (dB)", "dB", "a magnitude in dB")),
    (
        "phase phas phasedeg uphase unwrappedphase expandedphase extphase",
        Format("{} phase (deg)", "deg", "a phase"),
    ),
    (
        "linmag linearmag linearmagnitude mlin linmagnitude lin",
        Format("{} mag (lin)", "1", "a linear magnitude"),
    ),
    ("swr vswr", Format("VSWR", "1", "a standing wave ratio")),
    ("delay groupdelay gdelay", Format("group delay (s)", "s", "a delay")),
):
    _FORMATS |= dict.fromkeys(_names.split(), _format)


def format_of(text: str) -> Format | None:
    """The format that a file names, None where it names none that is known."""
    return _FORMATS.get(re.sub(r"[\s_()\-/]+", "", text.casefold()))


def is_plain_head(name: str) -> bool:
    """Whether a header only says that there is data."""
    return re.sub(r"[\s_\-]+", "", name.casefold()) in _PLAIN_HEADS


def phase_header(name: str, unit: str) -> str:
    """The header of the phase of a scattering parameter: "S21 phase (deg)" for "S21" in degrees; "" for any other."""
    bare = re.sub(r"[()_,|\s]+", "", name)
    return f"{bare} phase ({unit})" if unit in ("deg", "rad") and _SCATTERING.match(bare) else ""


def is_formatted_data(name: str) -> bool:
    """Whether a header is that of a trace whose format stands above it, and of nothing else."""
    return re.sub(r"[\s_\-]+", "", name.casefold()) == "formatteddata"


def header_of(measured: str, text: str) -> str:
    """The header that a trace would have: "S21 (dB)" for S21 in the format Log Mag; "" where that is not known."""
    found, scattering = format_of(text), _SCATTERING.match(measured.strip())
    if found is None or ("{}" in found.header and not measured.strip()):
        return ""
    if found.unit == "s" and (scattering is None or scattering[1] == scattering[2]):
        return ""
    return found.header.format(measured.strip())
