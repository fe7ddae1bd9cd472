"""The names of what may be stated for a whole table, and how files spell them."""

from __future__ import annotations

import re
from collections.abc import Mapping
from functools import lru_cache

from specflow.conditions import find_dimension
from specflow.importers.measured.header_text import read_header

#: What may be stated, with the keys that files use for it. The name itself is for the person and for mappings, and is a
#: key of files only where it is listed.
NAMES: Mapping[str, tuple[str, ...]] = {
    "block": ("block", "assembly", "module", "unit type", "block under test"),
    "item": ("item", "dut", "uut", "device", "device under test", "unit under test", "serial", "serial number",
             "serial no", "s/n", "sn", "specimen", "sample", "item under test", "eut", "prüfling",
             "seriennummer"),
    "requirement": ("requirement", "requirement id", "req", "req id"),
    "method": ("method", "verification method"),
    "stage": ("stage", "verification stage"),
    "set_up": ("set-up", "setup", "set up", "test set-up", "test setup", "bench", "test bench", "test range"),
    "performer": ("lab", "laboratory", "test house", "test laboratory", "performer", "labor", "prüflabor"),
    "operator": ("operator", "tested by", "test engineer", "measured by", "performed by", "engineer", "prüfer",
                 "bearbeiter"),
    "date": ("date", "test date", "measured on", "performed on", "date of test", "measurement date", "datum",
             "messdatum", "prüfdatum"),
    "procedure": ("procedure", "test procedure", "procedure number"),
    "procedure_revision": ("procedure revision", "procedure rev", "procedure issue"),
    "model": ("simulation model",),
    "model_version": ("simulation version", "simulator version", "model version"),
    "validated": ("model validation", "simulation validated"),
    "hardware": ("hardware", "hardware note", "hw", "hardware revision", "build standard"),
    "bandwidth": ("rbw", "resolution bandwidth", "reference bandwidth", "measurement bandwidth", "res bw", "ref bw"),
    "spectrum": ("spectrum", "spectrum kind", "signal kind"),
    "plane": ("plane", "reference plane", "referred to", "measurement plane"),
    "statistic": ("statistic", "detector"),
    "unit": ("unit", "units", "y unit", "y units", "yunit", "yunits", "y axis unit", "y axis units", "amplitude unit",
             "amplitude units", "level unit", "vertical unit", "vertical units", "trace unit", "unit y"),
    "axis_unit": ("x unit", "x units", "xunit", "xunits", "x axis unit", "x axis units", "horizontal unit", "unit x",
                  "horizontal units", "frequency unit"),
    "measured": ("meas type", "measurement type", "trace parameter", "s parameter", "measured parameter"),
    "list": (),
    "scanned": ("scanned", "scanned range", "range scanned", "scanned frequency range", "search range"),
    "scan_start": ("scan start", "start of scan", "search start"),
    "scan_stop": ("scan stop", "end of scan", "scan end", "search stop"),
    "floor": ("floor", "noise floor", "measurement floor", "floor of the scan", "system noise floor"),
    "format": ("format", "trace format", "data format", "display format", "y format"),
    "uncertainty": ("uncertainty", "measurement uncertainty", "mu", "u", "expanded uncertainty",
                    "standard uncertainty"),
    "temperature": (),
    "corrected": (),
    "scaled": (),
    "directions": (),
    "corrections": ("correction", "corrections", "corrections applied"),
}  # fmt: skip

#: What is said above the first table of a sheet holds for those below it, too; conditions and uncertainties do not.
OF_THE_SHEET = frozenset(
    ("block", "item", "method", "stage", "set_up", "performer", "operator", "date", "procedure", "procedure_revision",
     "model", "model_version", "validated", "hardware")
)  # fmt: skip


def _plain(text: str) -> str:
    return re.sub(r"[\s_./-]+", "", text.casefold())


_SPELLINGS = {_plain(spelling): name for name, spellings in NAMES.items() for spelling in spellings}


@lru_cache(maxsize=4096)
def name_of(key: str) -> str:
    """Return which of ``NAMES`` a key of a file means, "" if none."""
    return _SPELLINGS.get(_plain(key)) or _SPELLINGS.get(_plain(read_header(key).name), "")


@lru_cache(maxsize=4096)
def canonical(key: str) -> str:
    """Return what a key of a file means: one of ``NAMES``, a dimension, or "" when it is neither."""
    name = name_of(key)
    if name:
        return name
    dimension = find_dimension(read_header(key).name) or find_dimension(key)
    return dimension.name if dimension else ""
