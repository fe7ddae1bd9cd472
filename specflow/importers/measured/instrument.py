"""What the head of an instrument's export says: that it is one, which instrument, and that something was corrected.

An analyser's own attenuator is no setting of the item, and its serial number is not that of the item under test.
"""

from __future__ import annotations

import re
from collections.abc import Iterable

from specflow.importers.measured.facts import Fact

_SETTINGS = frozenset(
    [
        "rbw",
        "vbw",
        "resbw",
        "resolutionbandwidth",
        "videobandwidth",
        "vbw/rbw",
        "ifbw",
        "ifbandwidth",
        "referencelevel",
        "reflevel",
        "ref",
        "refoffset",
        "span",
        "spanfreq",
        "sweeptime",
        "sweeppoints",
        "numpoints",
        "numberofpoints",
        "numberpoints",
        "startfreq",
        "startfrequency",
        "stopfreq",
        "stopfrequency",
        "centerfreq",
        "centerfrequency",
        "centrefrequency",
        "preamp",
        "scalediv",
        "scaletype",
        "tracename",
        "meastype",
        "averaging",
        "sweepmode",
        "xstart",
        "xstop",
    ]
)
_LEAST = 2
_OF_INSTRUMENT = frozenset(
    [
        "attenuation",
        "att",
        "attenuationsetting",
        "inputattenuation",
        "rfattenuation",
        "actualrfattenuation",
        "mode",
    ]
)
_SERIAL = frozenset(["serial", "serialnumber", "serialno", "sn", "s/n", "seriennummer"])
_NAMES = frozenset(
    [
        "instrument",
        "analyzer",
        "analyser",
        "spectrumanalyzer",
        "spectrumanalyser",
        "networkanalyzer",
        "networkanalyser",
        "powermeter",
        "powersensor",
        "signalgenerator",
        "generator",
        "receiver",
        "testreceiver",
        "emireceiver",
        "noisefigureanalyser",
        "noisefigureanalyzer",
        "noisesource",
        "vna",
        "oscilloscope",
        "testequipment",
        "equipment",
        "equipmentused",
        "instrumentmodel",
        "instrumentused",
    ]
)
_SERIAL_OF = re.compile(r"^(?:instrument|analy[sz]er|equipment)(?:serial|serialnumber|serialno|sn|s/n)$")
_CORRECTED = re.compile(
    r"correct(?:ed|ion)|offset applied|path ?loss|cable loss|antenna factor|probe factor|transducer|de-?embed|"
    r"^(?:level |power |amplitude )?offset$|loss comp\w*|ref(?:erence)?(?: level)? offset|external (?:gain|att\w*)",
    re.IGNORECASE,
)
_NORMALISED = re.compile(r"\bnormali[sz]", re.IGNORECASE)
_SCALED = re.compile(
    r"\bscale factor|\bscaling|\bmultiplier|^scale$|^factor$|\b[xy] ?(?:scale|mult(?:iplier)?|factor)$|\bnormali[sz]",
    re.IGNORECASE,
)
_NOT_DONE = frozenset(
    [
        "no",
        "off",
        "none",
        "false",
        "not",
        "applied",
        "0",
        "0.0",
        "uncorrected",
        "n/a",
        "-",
        "disabled",
        "inactive",
    ]
) | {"not applied"}


def _plain(key: str) -> str:
    return re.sub(r"[\s_.:\-]+", "", key.casefold())


def is_export(facts: Iterable[Fact]) -> bool:
    """Whether the facts above a table are the settings of an instrument."""
    return len({_plain(fact.key) for fact in facts} & _SETTINGS) >= _LEAST


def is_own_setting(key: str) -> bool:
    """Whether a key of such an export speaks of the instrument, although tables of readings use it for the item."""
    return _plain(key) in _OF_INSTRUMENT


def is_bare_serial(key: str) -> bool:
    """Whether a key is a serial number that does not say of what."""
    return _plain(key) in _SERIAL


def is_serial_of_instrument(key: str) -> bool:
    """Whether a key is the serial number of an instrument: "Instrument serial"."""
    return _SERIAL_OF.match(_plain(key)) is not None


def names_instrument(key: str) -> bool:
    """Whether a key names the instrument that was used, or its serial number."""
    return _plain(key) in _NAMES or is_serial_of_instrument(key)


def names_model(key: str) -> bool:
    """Whether a key of an export names the model of the instrument."""
    return _plain(key) in ("model", "machinemodule", "modelnumber", "instrumentmodel")


def says_scaled(key: str, text: str) -> bool:
    """Whether a fact speaks of a factor of all readings: "Scale factor: 0.1", "Normalised to peak: 32 dBi"."""
    if not _SCALED.search(key) or text.strip().casefold() in ("1", "1.0", "1.000", *_NOT_DONE):
        return False
    if "/" in text:
        return False  # 10 dB/div is how a screen was set
    return bool(_NORMALISED.search(key)) or bool(re.search(r"[0-9]", text))


def says_corrected(key: str, text: str) -> bool:
    """Whether a fact says that readings hold a correction already: "Path loss corrected: yes", "Ref Offset: 10 dB"."""
    value = text.strip().casefold()
    if key.strip(" :").casefold() == "offset" and "db" not in value:
        return False  # an offset in Hz is a condition
    if not _CORRECTED.search(key) or value in _NOT_DONE:
        return False
    number = re.fullmatch(r"([+\-]?[0-9.]+)\s*(?:db)?", value)
    return number is None or float(number[1]) != 0
