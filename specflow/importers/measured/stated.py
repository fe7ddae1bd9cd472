"""What is said for all rows of a table: by the person, by its mapping, or by the key–value rows above it.

The person has the last word. Where the mapping and the file disagree nobody is believed: that is a question.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from datetime import date

from specflow.conditions import (
    Comparison,
    find_dimension,
    is_unlocated_temperature,
    known_dimension,
    unlocated_temperature_hint,
)
from specflow.errors import UnitError
from specflow.importers.measured.facts import Fact
from specflow.importers.measured.header_text import read_header
from specflow.importers.measured.result import ColumnReading, Question, Role
from specflow.model.evidence import Equipment
from specflow.units import compatible, format_unit, parse_quantity, parse_unit

PERSON = "stated by the person"
MAPPING = "stated by the mapping"

#: What may be stated for a table, with the keys that files use for it.
NAMES: Mapping[str, tuple[str, ...]] = {
    "block": ("assembly", "module", "unit type", "block under test"),
    "item": ("dut", "uut", "device", "device under test", "unit under test", "serial", "serial number", "serial no",
             "s/n", "sn", "specimen", "sample", "item under test", "eut"),
    "requirement": ("requirement id", "req", "req id"),
    "method": ("verification method",),
    "stage": ("verification stage",),
    "set_up": ("set-up", "setup", "test set-up", "test setup", "bench", "test bench", "range"),
    "performer": ("operator", "tested by", "test engineer", "lab", "laboratory", "test house", "measured by",
                  "performed by", "engineer"),
    "date": ("test date", "measured on", "performed on", "date of test", "measurement date"),
    "procedure": ("test procedure", "procedure number"),
    "procedure_revision": ("procedure rev", "procedure issue"),
    "model": ("simulation model", "simulator"),
    "model_version": ("simulation version", "simulator version"),
    "validated": ("model validation", "simulation validated", "validated by"),
    "hardware": ("hardware", "hardware note", "hw", "hardware revision", "build standard"),
    "bandwidth": ("rbw", "resolution bandwidth", "reference bandwidth", "measurement bandwidth", "res bw", "ref bw"),
    "spectrum": ("spectrum kind", "signal kind"),
    "plane": ("reference plane", "referred to", "measurement plane"),
    "statistic": ("detector", "averaging"),
    "unit": ("units",),
    "uncertainty": ("measurement uncertainty", "mu", "u", "expanded uncertainty", "standard uncertainty"),
    "temperature": (),
    "corrections": ("correction", "corrections applied"),
}  # fmt: skip

#: What is said above the first table of a sheet holds for those below it, too; conditions and uncertainties do not.
_OF_THE_SHEET = frozenset(
    ("block", "item", "method", "stage", "set_up", "performer", "date", "procedure", "procedure_revision", "model",
     "model_version", "validated", "hardware")
)  # fmt: skip

_SPELLINGS = {
    re.sub(r"[\s_./-]+", "", spelling): name
    for name, spellings in NAMES.items()
    for spelling in (name, *spellings)
}
_CALIBRATION = re.compile(
    r"^(?P<asset>.*?)\s*\bcal(?:ibration|\.)?\s*(?:due|expir\w*|valid until|until)\b.*$", re.I
)
_REVISION = re.compile(r"^(?P<name>.*\S)[\s,]+(?:rev(?:ision)?|issue|iss)\.?\s*(?P<revision>\S+)$", re.I)
_NOT_ONE_VALUE = re.compile(r"±|\+/-|\.\.|\bto\b|…", re.I)


@dataclass(frozen=True, slots=True)
class Said:
    """One thing said: the text, who said it, and the key as written."""

    text: str
    by: str
    key: str = ""


@dataclass(frozen=True, slots=True)
class StatedCondition:
    """A condition that holds for all rows: a number in ``unit``, or a word."""

    dimension: str
    value: float | str
    unit: str
    by: str


@dataclass
class Stated:
    """All that is said for a table. ``said`` is by the names of ``NAMES``, ``conditions`` by dimension."""

    said: dict[str, Said] = field(default_factory=dict)
    conditions: dict[str, StatedCondition] = field(default_factory=dict)
    equipment: list[Equipment] = field(default_factory=list)
    columns: dict[str, str] = field(default_factory=dict)
    uncertainty_keys: dict[str, Said] = field(default_factory=dict)
    readings: list[ColumnReading] = field(default_factory=list)
    questions: list[Question] = field(default_factory=list)
    unused: list[str] = field(default_factory=list)

    def text(self, name: str) -> str:
        """What is said under a name, "" if nothing."""
        found = self.said.get(name)
        return found.text if found else ""

    def by(self, name: str) -> str:
        """Who said it."""
        found = self.said.get(name)
        return found.by if found else ""

    def day(self, name: str) -> date | None:
        """What is said under a name as a date."""
        return read_day(self.text(name))


def collect(facts: Iterable[Fact], mapping: Mapping[str, str], person: Mapping[str, str]) -> Stated:
    """Bring the three sources together; what the person says stands."""
    stated = Stated()
    for key, text in person.items():
        _take(stated, key, text, PERSON, "")
    for key, text in mapping.items():
        _take(stated, key, text, MAPPING, "")
    for fact in facts:
        _take(stated, fact.key, fact.value, f"stated in {fact.cell}", fact.cell)
    procedure = _REVISION.match(stated.text("procedure"))
    if procedure and "procedure_revision" not in stated.said:
        by = stated.by("procedure")
        stated.said["procedure"] = Said(procedure["name"], by)
        stated.said["procedure_revision"] = Said(procedure["revision"], by)
    return stated


def holds_below(fact: Fact) -> bool:
    """Whether a fact above the first table of a sheet speaks of the tables below it as well."""
    return canonical(fact.key) in _OF_THE_SHEET or _CALIBRATION.match(fact.key) is not None


def canonical(key: str) -> str:
    """Return the name that a key means: one of ``NAMES``, a dimension, or "" when it is neither."""
    name = _SPELLINGS.get(re.sub(r"[\s_./-]+", "", key.casefold()), "")
    if name:
        return name
    dimension = find_dimension(read_header(key).name) or find_dimension(key)
    return dimension.name if dimension else ""


def read_day(text: str) -> date | None:
    """Read a calendar date that has one meaning: 2026-03-02, 2 March 2026; None for anything else, 02/03/2026 too."""
    from datetime import datetime

    plain = (
        text.strip().replace("T", " ").split(" ")[0] if re.match(r"\d{4}-", text.strip()) else text.strip()
    )
    for layout in (
        "%Y-%m-%d",
        "%Y/%m/%d",
        "%Y%m%d",
        "%d %B %Y",
        "%d %b %Y",
        "%d-%b-%Y",
        "%B %d, %Y",
        "%b %d, %Y",
    ):
        try:
            return datetime.strptime(plain, layout).date()
        except ValueError:
            continue
    return None


def _take(stated: Stated, key: str, text: str, by: str, cell: str) -> None:
    text = text.strip()
    if not text or text in ("-", "—"):
        return
    if key.casefold().startswith("column "):
        stated.columns[key[7:].strip()] = text
        return
    calibration = _CALIBRATION.match(key)
    if calibration:
        _take_calibration(stated, calibration["asset"] or "instrument", text, by, cell, key)
        return
    name = canonical(key)
    if name == "temperature" and re.match(r"[+\-−]?[0-9]", text):
        _take_temperature(stated, key, text, by, cell)
    elif name in NAMES:
        _take_name(stated, name, key, text, by, cell)
    elif name:
        _take_condition(stated, name, key, text, by, cell)
    elif "uncertainty" in key.casefold():
        stated.uncertainty_keys[key] = Said(text, by, key)
    elif is_unlocated_temperature(read_header(key).name):
        _take_temperature(stated, key, text, by, cell)
    elif by in (PERSON, MAPPING):
        stated.conditions.setdefault(key, StatedCondition(key, text, "", by))
        stated.readings.append(ColumnReading(key, cell, Role.CONDITION, f"{key} = {text}", by))
    else:
        stated.unused.append(f"{cell}: {key} = {text[:60]}")


def _take_name(stated: Stated, name: str, key: str, text: str, by: str, cell: str) -> None:
    if name == "date" and read_day(text) is None:
        stated.questions.append(
            Question(key, cell, f"{text!r} is no date with one meaning", "say --state date=YYYY-MM-DD")
        )
        return
    if not _is_new(stated, stated.said.get(name), key, text, by, cell):
        return
    stated.said[name] = Said(text, by, key)
    stated.readings.append(ColumnReading(key, cell, Role.STATED, f"{name.replace('_', ' ')}: {text}", by))


def _is_new(stated: Stated, known: Said | None, key: str, text: str, by: str, cell: str) -> bool:
    """Whether a fact says something new; a mapping and a file that disagree are asked about."""
    if known is None:
        return True
    if known.by == MAPPING and by != PERSON and known.text.casefold() != text.casefold():
        stated.questions.append(
            Question(
                key,
                cell,
                f"the mapping says {known.text}, the file says {text}",
                f"say which holds for this file: --state {known.key or key}=...",
            )
        )
    return False


def _take_condition(stated: Stated, name: str, key: str, text: str, by: str, cell: str) -> None:
    known = known_dimension(name)
    numeric = known is not None and known.comparison is not Comparison.TEXT
    found: StatedCondition | str = StatedCondition(name, text, "", by)
    if numeric:
        found = _number(name, known.unit if known else "", text, read_header(key).unit, by)
    if isinstance(found, str):
        stated.questions.append(Question(key, cell, found, f"say --state {name}=VALUE with its unit"))
        return
    before = stated.conditions.get(name)
    if before is not None:
        _is_new(stated, Said(_words(before), before.by, name), key, _words(found), by, cell)
        return
    stated.conditions[name] = found
    meaning = f"{name.replace('_', ' ')} = {_words(found)} for all rows"
    stated.readings.append(ColumnReading(key, cell, Role.CONDITION, meaning, by))


def _number(name: str, wanted: str, text: str, unit: str, by: str) -> StatedCondition | str:
    """The condition, or the sentence that says why the text is none."""
    if _NOT_ONE_VALUE.search(text):
        return f"{text!r} is a range, not the {name.replace('_', ' ')} that was set"
    try:
        quantity = parse_quantity(text if not unit or text.endswith(unit) else f"{text} {unit}")
    except UnitError as error:
        if not wanted:
            try:
                quantity = parse_quantity(f"{text} 1")
            except UnitError:
                return error.message
        else:
            return error.message
    if not compatible(quantity.unit, parse_unit(wanted or "1")):
        return f"{name.replace('_', ' ')} in {quantity.unit}: expected is a unit like {wanted or 'none'}"
    written = format_unit(quantity.unit)
    return StatedCondition(name, float(quantity.value), "" if written == "1" else written, by)


def _words(condition: StatedCondition) -> str:
    value = f"{condition.value:.12g}" if isinstance(condition.value, float) else condition.value
    return f"{value} {condition.unit}".strip()


def _take_temperature(stated: Stated, key: str, text: str, by: str, cell: str) -> None:
    location = stated.text("temperature")
    dimension = find_dimension(f"temperature {location}") if location else None
    if dimension is not None:
        _take_condition(stated, dimension.name, dimension.name, text, by, cell)
        return
    stated.questions.append(
        Question(
            key,
            cell,
            "a temperature that does not say whose",
            f"{unlocated_temperature_hint()}: --state temperature=ambient",
        )
    )


def _take_calibration(stated: Stated, asset: str, text: str, by: str, cell: str, key: str) -> None:
    due = read_day(text)
    if due is None:
        stated.questions.append(
            Question(key, cell, f"{text!r} is no date with one meaning", "write it as YYYY-MM-DD")
        )
        return
    stated.equipment.append(Equipment(asset=asset, calibration_due=due))
    stated.readings.append(ColumnReading(key, cell, Role.STATED, f"{asset}, calibrated until {due}", by))
