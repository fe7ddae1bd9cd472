"""Taking statements: by the person, by the mapping of a table, or by the key–value rows above it.

The person has the last word. Where the mapping and the file disagree, or the file says two things, nobody is believed:
that is a question.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable, Mapping

from specflow.conditions import (
    Comparison,
    find_dimension,
    is_unlocated_temperature,
    known_dimension,
    unlocated_temperature_hint,
)
from specflow.errors import UnitError
from specflow.importers.measured.cell_units import slip_of
from specflow.importers.measured.day import day_first, read_day
from specflow.importers.measured.facts import Fact
from specflow.importers.measured.formats import format_of
from specflow.importers.measured.header_text import known_unit, read_header
from specflow.importers.measured.instrument import (
    is_bare_serial,
    is_export,
    is_own_setting,
    is_serial_of_instrument,
    names_instrument,
    names_model,
    says_corrected,
    says_scaled,
)
from specflow.importers.measured.names import NAMES, OF_THE_SHEET, canonical, name_of
from specflow.importers.measured.result import ColumnReading, Question, Role
from specflow.importers.measured.stated import MAPPING, PERSON, Said, Stated, StatedCondition
from specflow.model.evidence import Equipment, SpectrumKind
from specflow.model.requirement import Method, Stage
from specflow.units import compatible, format_unit, parse_quantity, parse_unit

_CALIBRATION = re.compile(
    r"^(?P<asset>.*?)\s*\bcal(?:ibration|\.)?\s*(?:due|expir\w*|valid until|until)\b.*$", re.IGNORECASE
)
_NAMELESS = "instrument"
_CUT = re.compile(r"^(?P<angle>[A-Za-zθφϕ]+)\s*=?\s*(?P<value>[+\-−]?[0-9].*)$")
#: What varies along a cut at a fixed value of the other angle.
_ACROSS = {"phi": "theta", "theta": "phi", "azimuth": "elevation", "elevation": "azimuth"}
_UNIT_IN_BRACKETS = re.compile(r"^\(\s*[Uu]nits?\s*[:=]\s*(?P<unit>[^()]+?)\s*\)$")
_REVISION = re.compile(
    r"^(?P<name>.*\S)[\s,]+(?:rev(?:ision)?|issue|iss)\.?\s*(?P<revision>\S+)$", re.IGNORECASE
)
_NOT_ONE_VALUE = re.compile(r"±|\+/-|\.\.|\bto\b|…|\d\s*[-–]\s*\d", re.IGNORECASE)
_CHOICES: Mapping[str, type[Method] | type[Stage] | type[SpectrumKind]] = {
    "method": Method,
    "stage": Stage,
    "spectrum": SpectrumKind,
}


def collect(
    facts: Iterable[Fact],
    mapping: Mapping[str, str],
    person: Mapping[str, str],
    *,
    sheet_facts: Iterable[Fact] = (),
    own_dimensions: Collection[str] = (),
) -> Stated:
    """Bring the sources together. ``sheet_facts`` stand above an earlier table and hold where these say nothing.

    ``own_dimensions`` are those of the project; the person may state them although no dictionary knows them.
    """
    facts = tuple(dict.fromkeys(facts))  # a block of numbers brings those above it, and so does the sheet
    sheet_facts = tuple(fact for fact in dict.fromkeys(sheet_facts) if fact not in facts)
    collector = _Collector(own_dimensions, is_export((*facts, *sheet_facts)))
    for key, text in person.items():
        collector.take(key, text, PERSON, "")
    for key, text in mapping.items():
        collector.take(key, text, MAPPING, "")
    for fact in facts:
        collector.take(fact.key, fact.value, f"stated in {fact.cell}", fact.cell)
    said = set(collector.stated.said)
    for fact in sheet_facts:
        if canonical(fact.key) not in said:
            collector.take(fact.key, fact.value, f"stated in {fact.cell}", fact.cell)
    return collector.result()


def holds_below(fact: Fact) -> bool:
    """Whether a fact above the first table of a sheet speaks of the tables below it as well."""
    return canonical(fact.key) in OF_THE_SHEET or _CALIBRATION.match(fact.key) is not None


class _Collector:
    """Takes one statement after the other."""

    def __init__(self, own_dimensions: Collection[str], of_instrument: bool) -> None:
        self.stated = Stated(of_instrument=of_instrument)
        self._own = own_dimensions
        self._of_instrument = of_instrument

    def result(self) -> Stated:
        stated = self.stated
        procedure = _REVISION.match(stated.text("procedure"))
        if procedure and "procedure_revision" not in stated.said:
            by = stated.by("procedure")
            stated.said["procedure"] = Said(procedure["name"], by)
            stated.said["procedure_revision"] = Said(procedure["revision"], by)
        stated.equipment = _joined(stated.equipment)
        return stated

    def take(self, key: str, text: str, by: str, cell: str) -> None:
        text = text.strip()
        if not text or text in ("-", "—"):
            return
        calibration = _CALIBRATION.match(key)
        if by in (PERSON, MAPPING):
            self._take_word(key, text, by)
        elif calibration:
            self._take_calibration(calibration["asset"] or _NAMELESS, key, text, by, cell)
        elif says_corrected(key, text):
            self.stated.corrected.append(Said(text, by, key))
            self._show(key, cell, f"corrected already, by what the file says: {key} {text}", by)
        elif says_scaled(key, text):
            self._ask_about_scale(key, text, by, cell)
        elif self._of_instrument and is_own_setting(key):
            self._leave(key, text, cell)
        elif names_instrument(key) or (self._of_instrument and names_model(key)):
            self._take_instrument(key, text, by, cell)
        elif unit := _UNIT_IN_BRACKETS.match(text):
            self._take_name("unit", key, unit["unit"], by, cell)
        elif name := name_of(key):
            self._take_name(_meant(name, key, text), key, text, by, cell)
        elif dimension := canonical(key):
            self._take_condition(dimension, key, text, by, cell)
        elif "uncertainty" in key.casefold():
            self.stated.uncertainties.append(Said(text, by, key))
            self._show(key, cell, f"{key}: {text}", by)
        elif is_unlocated_temperature(read_header(key).name):
            self._take_temperature(key, text, by, cell)
        else:
            self._leave(key, text, cell)

    def _take_word(self, key: str, text: str, by: str) -> None:
        """What the person or a mapping says: by its name, else as files spell it."""
        name = key if key in NAMES else canonical(key)
        if key.casefold().startswith("column "):
            self.stated.columns[key[len("column ") :].strip()] = text
        elif name in NAMES:
            self._take_name(name, key, text, by, "")
        elif name:
            self._take_condition(name, key, text, by, "")
        elif key in self._own:
            self._take_own(key, text, by)
        else:
            known = ", ".join(NAMES)
            remedy = f"one of {known}; a condition (temperature_ambient, supply_voltage ...); or 'column C'"
            self._ask(key, "", f"{key!r} ({by}) is nothing that can be stated", remedy)

    def _take_name(self, name: str, key: str, text: str, by: str, cell: str) -> None:
        text = day_first(key, text) if name == "date" else text
        known = self.stated.said.get(name)
        if name == "date" and cell and known is not None and known.by == PERSON and read_day(text) is None:
            self._leave(key, text, cell)
            return
        if name == "date" and read_day(text) is None:
            self._ask(key, cell, f"{text!r} is no date with one meaning", "say --state date=YYYY-MM-DD")
            return
        choices = _CHOICES.get(name)
        if cell and choices and text.casefold() not in {choice.value for choice in choices}:
            self._leave(key, text, cell)  # "Method: TP 4, annex B" of a sheet is another method than ours
            return
        if choices and text.casefold() not in {choice.value for choice in choices}:
            known_choices = ", ".join(choice.value for choice in choices)
            is_simulation = name == "method" and text.casefold().startswith("simulat")
            hint = "a simulation is an analysis; " if is_simulation else ""
            self._ask(key, cell, f"{text!r} is no {name} ({by})", f"{hint}one of: {known_choices}")
            return
        if cell and name in ("unit", "axis_unit") and known_unit(text) is None:
            self._leave(key, text, cell)
            return
        if cell and name == "format" and format_of(text) is None:
            self._leave(key, text, cell)
            return
        if name == "item":
            doubtful = bool(cell) and self._of_instrument and is_bare_serial(key)
            self.stated.items.append(Said(text, by, key, doubtful))
            if doubtful:
                self._show(key, cell, f"{key}: {text}, of the instrument or of the item", by)
                return
        known = self.stated.said.get(name)
        if known is not None:
            self._compare(known, name, key, text, cell)
            return
        self.stated.said[name] = Said(text, by, key)
        self._show(key, cell, f"{name.replace('_', ' ')}: {text}", by)

    def _compare(self, known: Said, name: str, key: str, text: str, cell: str) -> None:
        """A thing that is said twice: the person stands; a mapping and a file that disagree are asked about."""
        if known.text.casefold() == text.casefold() or name == "item":
            return
        if known.by == MAPPING and cell:
            what = f"the mapping says {known.text}, the file says {text}"
            self._ask(key, cell, what, f"say which holds for this file: --state {name}=...")
        elif cell:
            self._leave(key, text, cell)

    def _take_condition(self, name: str, key: str, text: str, by: str, cell: str) -> None:
        cut = _CUT.match(text) if name == "cut_plane" else None
        across = find_dimension(cut["angle"]) if cut else None
        if cut is not None and across is not None and across.name in _ACROSS:
            self.stated.said["cut_varies"] = Said(_ACROSS[across.name], by, key)
            self._take_condition(across.name, key, cut["value"], by, cell)
            return
        known = known_dimension(name)
        if known is None or known.comparison is Comparison.TEXT:
            found: StatedCondition | str = StatedCondition(name, text, "", by)
        elif (
            cell
            and "temperature" not in name
            and (not re.search(r"[0-9]", text) or re.search(r"\d:\d\d", text))
        ):
            self._leave(key, text, cell)  # "Level: qualification", "Time: 14:32"
            return
        else:
            found = _number(name, known.unit, text, read_header(key).unit, by)
        said = self.stated.conditions.get(name)
        if isinstance(found, str) and said is not None and said.by == PERSON:
            self._leave(key, text, cell)
            return
        if isinstance(found, str):
            self.stated.doubts.setdefault(
                name, Question(key, cell, found, f"say --state {name}=VALUE with its unit")
            )
            return
        before = self.stated.conditions.get(name)
        if before is not None:
            self._compare_condition(before, found, key, cell)
            return
        self.stated.conditions[name] = found
        meaning = f"{name.replace('_', ' ')} = {found.words()} for all rows"
        self.stated.readings.append(ColumnReading(key, cell, Role.CONDITION, meaning, by))

    def _compare_condition(
        self, before: StatedCondition, found: StatedCondition, key: str, cell: str
    ) -> None:
        if before.words().casefold() == found.words().casefold() or before.by == PERSON:
            return
        who = "the mapping" if before.by == MAPPING else before.by.removeprefix("stated in ")
        what = f"{who} says {before.words()}, the file says {found.words()}"
        remedy = f"say which holds for this file: --state {found.dimension}=..."
        self.stated.doubts[found.dimension] = Question(key, cell, what, remedy)

    def _take_own(self, name: str, text: str, by: str) -> None:
        """A dimension of this project: a number with its unit, else a word."""
        try:
            quantity = parse_quantity(text)
            value = float(quantity.value)
            found = StatedCondition(name, value, format_unit(quantity.unit), by)
        except UnitError:
            found = StatedCondition(name, text, "", by)
        self.stated.conditions[name] = found
        self.stated.readings.append(
            ColumnReading(name, "", Role.CONDITION, f"{name} = {found.words()} for all rows", by)
        )

    def _take_temperature(self, key: str, text: str, by: str, cell: str) -> None:
        location = self.stated.text("temperature")
        dimension = find_dimension(f"temperature {location}") if location else None
        if dimension is not None:
            self._take_condition(dimension.name, key, text, by, cell)
            return
        remedy = f"{unlocated_temperature_hint()}: --state temperature=ambient"
        self._ask(key, cell, "a temperature that does not say whose", remedy)

    def _take_calibration(self, asset: str, key: str, text: str, by: str, cell: str) -> None:
        due = read_day(text)
        if due is None:
            self._ask(key, cell, f"{text!r} is no date with one meaning", "write it as YYYY-MM-DD")
            return
        self.stated.equipment.append(Equipment(asset=asset, calibration_due=due))
        self._show(key, cell, f"{asset}, calibrated until {due}", by)

    def _ask_about_scale(self, key: str, text: str, by: str, cell: str) -> None:
        """A factor or a normalisation of all readings: they hold it already, or it is still to be applied."""
        if self.stated.text("scaled"):
            self._show(key, cell, f"{key}: {text}; the readings are taken as they stand", by)
            return
        what = f"the file says {key}: {text}; it does not say whether the readings hold it already"
        remedy = "--state scaled=yes takes them as they stand; else that, and scale = ... for the columns in a mapping"
        self._ask(key, cell, what, remedy)

    def _take_instrument(self, key: str, text: str, by: str, cell: str) -> None:
        """An instrument by name; a serial number that follows belongs to the one named before it."""
        equipment = self.stated.equipment
        if is_serial_of_instrument(key) and equipment and equipment[-1].calibration_due is None:
            equipment[-1] = Equipment(asset=f"{equipment[-1].asset} {text}")
        else:
            equipment.append(Equipment(asset=text))
        self._show(key, cell, f"instrument: {text}", by)

    def _ask(self, header: str, cell: str, what: str, remedy: str) -> None:
        self.stated.questions.append(Question(header, cell, what, remedy))

    def _show(self, key: str, cell: str, meaning: str, by: str) -> None:
        self.stated.readings.append(ColumnReading(key, cell, Role.STATED, meaning, by))

    def _leave(self, key: str, text: str, cell: str) -> None:
        self.stated.unused.append(f"{cell}: {key} = {text[:60]}")


def _meant(name: str, key: str, text: str) -> str:
    """ "Unit: SN 0007" speaks of a specimen, "Unit: dB" of a unit, and so does "Unit: dBX", although of none known."""
    speaks_of_item = name == "unit" and key.strip(" :").casefold() == "unit" and known_unit(text) is None
    return "item" if speaks_of_item and text[:2].casefold() != "db" else name


def _joined(equipment: list[Equipment]) -> list[Equipment]:
    """A date of calibration that names no instrument is that of the only one that is named without a date."""
    undated = [one for one in equipment if one.calibration_due is None]
    nameless = [one for one in equipment if one.calibration_due is not None and one.asset == _NAMELESS]
    if len(undated) != 1 or len(nameless) != 1:
        return list(dict.fromkeys(equipment))
    joined = Equipment(asset=undated[0].asset, calibration_due=nameless[0].calibration_due)
    return [joined, *(one for one in equipment if one not in (undated[0], nameless[0]))]


def _number(name: str, wanted: str, text: str, unit: str, by: str) -> StatedCondition | str:
    """The condition, or the sentence that says why the text is none."""
    title = name.replace("_", " ")
    if _NOT_ONE_VALUE.search(text):
        return f"{text!r} is a range, not the {title} that was set"
    try:
        written = text if not unit or text.endswith(unit) else f"{text} {unit}"
        quantity = parse_quantity(written if wanted else f"{written} 1")
    except UnitError as error:
        return f"{title}: {error.message}"
    if not compatible(quantity.unit, parse_unit(wanted or "1")):
        return f"{title} in {quantity.unit}: expected is a unit like {wanted or 'none'}"
    spelled = format_unit(quantity.unit)
    slip = "" if by == PERSON else slip_of(spelled)
    if slip:
        return f"{title} {text}: {slip}"
    return StatedCondition(name, float(quantity.value), "" if spelled == "1" else spelled, by)
