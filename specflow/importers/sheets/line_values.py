"""What a value cell of a budget line says: a number, a table by one condition, a trace, a Touchstone file, and drifts.

24 dB
24 dB - 0.02 dB/K of temperature_baseplate from 23 °C between -40 and 85 °C
table frequency: 17.7 GHz 23.5; 20.2 GHz 24.5 dB linear
table if_frequency: 2 GHz 8; 6 GHz 7.2 dB step
table gain_state: high = 20 dB; low = 5 dB
trace T-12: Gain along frequency item LNA-1
touchstone filter.s2p S21 along if_frequency
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from specflow.conditions import find_dimension, is_unlocated_temperature, unlocated_temperature_hint
from specflow.errors import DocumentError, UnitError
from specflow.importers.readers.touchstone_trace import read_touchstone
from specflow.model.budget_line import ConditionTable, Constant, Drift, LineValue, Trace, WordTable
from specflow.units import convert, format_value, parse_number, parse_unit, split_quantity, tolerance_unit

_NUMBER = r"[+-]?(?:\d+(?:[.,]\d+)?|[.,]\d+)(?:[eE][+-]?\d+)?"
_DRIFT = re.compile(
    rf"(?:^|(?<=\s))(?P<sign>[+-])\s*(?P<amount>{_NUMBER})\s*(?P<unit>[^\s/\d]+)\s*/\s*(?P<per>[^\s\d]+)"
    r"(?:\s+(?:of|by)\s+(?P<dimension>\w+))?"
    rf"\s+from\s+(?P<reference>{_NUMBER}\s*[^\s\d+-]*)"
    rf"(?:\s*\(?\s*between\s+(?P<low>{_NUMBER}\s*[^\s\d+-]*)\s+and\s+(?P<high>{_NUMBER}\s*[^\s\d+()-]*)\)?)?",
    re.IGNORECASE,
)
_TABLE = re.compile(
    r"^table\s+(?:by\s+)?(?P<dimension>[^:]+?)\s*:\s*(?P<entries>.+)$", re.IGNORECASE | re.DOTALL
)
_BETWEEN = re.compile(
    r"[\s,;]+(?P<word>steps?|linear)(?:\s+in\s+(?P<drawn>dB|power|linear power))?\s*$", re.IGNORECASE
)
_ENTRY = re.compile(
    rf"^(?P<at>{_NUMBER})\s*(?P<at_unit>[^\s\d:=+-][^\s:=]*)?\s*[\s:=]\s*(?P<value>{_NUMBER})\s*(?P<unit>\S+)?$"
)
_WORD_ENTRY = re.compile(rf"^(?P<word>[^=]*[^=\s])\s*=\s*(?P<value>{_NUMBER})\s*(?P<unit>\S+)?$")
_TRACE = re.compile(
    r"^trace\s+(?P<table>[^:]+?)\s*:\s*(?P<column>.+?)"
    r"(?:\s+along\s+(?P<along>\w+))?(?:\s+item\s+(?P<item>.+?))?(?:\s+linear\s+in\s+(?P<drawn>dB|power))?$",
    re.IGNORECASE,
)
_TOUCHSTONE = re.compile(
    r"^touchstone\s+(?P<file>.+?)\s+(?P<entry>S\d+(?:[,_]\d+)?)(?:\s+along\s+(?P<along>\w+))?$", re.IGNORECASE
)
_SHAPES = (
    "write 24 dB, 'table frequency: 17.7 GHz 23.5; 20.2 GHz 24.5 dB linear', 'trace TABLE: COLUMN along frequency' "
    "or 'touchstone FILE.s2p S21', each perhaps with '- 0.02 dB/K of temperature_baseplate from 23 °C'"
)


@dataclass(frozen=True, slots=True)
class CellContext:
    """What a cell leaves unsaid: the unit of its column, the block's own temperature and frequency, the folder."""

    unit: str = ""
    temperatures: Sequence[str] = ()
    frequencies: Sequence[str] = ()
    folder: Path | None = None


@dataclass(frozen=True, slots=True)
class ReadValue:
    """A value cell read: the value with its unit and drifts, and what was supplied, in sentences."""

    value: LineValue
    unit: str
    drifts: tuple[Drift, ...] = ()
    notes: tuple[str, ...] = ()


def read_line_value(text: str, context: CellContext) -> ReadValue:
    """Read a value cell. SpecflowError that says which part cannot be read and what to write."""
    plain = text.replace("−", "-").replace("\u00a0", " ").strip()
    found = list(_DRIFT.finditer(plain))
    head = plain[: found[0].start()].strip() if found else plain
    tail = "".join(plain[match.end() : following] for match, following in _gaps(found, len(plain)))
    if tail.strip(" ,;"):
        raise DocumentError(f"{tail.strip()!r} in {text!r} is not understood", hint=_SHAPES)
    read = _head(head, context)
    notes = list(read.notes)
    drifts = tuple(_drift(match, read.unit, context, notes) for match in found)
    return ReadValue(read.value, read.unit, drifts, tuple(notes))


def _gaps(found: Sequence[re.Match[str]], end: int) -> list[tuple[re.Match[str], int]]:
    starts = [*(match.start() for match in found[1:]), end][: len(found)]
    return list(zip(found, starts, strict=True))


def _head(text: str, context: CellContext) -> ReadValue:
    if table := _TABLE.match(text):
        return _table(table, context)
    if trace := _TRACE.match(text):
        along = _dimension(trace["along"]) if trace["along"] else ""
        value = Trace(
            table=trace["table"],
            column=trace["column"].strip("'\""),
            along=along,
            item=trace["item"] or "",
            drawn_in=_drawn(trace["drawn"]),
        )
        return ReadValue(value, _needed_unit("", context, text))
    if touchstone := _TOUCHSTONE.match(text):
        along = _dimension(touchstone["along"]) if touchstone["along"] else "frequency"
        value_of_file = read_touchstone(
            touchstone["file"], touchstone["entry"].upper(), context.folder, along
        )
        return ReadValue(value_of_file, "dB")
    try:
        number, unit = split_quantity(text)
        value_of_number = parse_number(number)
    except UnitError as error:
        raise DocumentError(f"{text!r} is no value of a budget line", hint=error.hint or _SHAPES) from None
    return ReadValue(Constant(value=value_of_number), _needed_unit(unit, context, text))


def _needed_unit(unit: str, context: CellContext, text: str) -> str:
    unit = unit or context.unit
    if not unit:
        raise UnitError(f"{text!r} has no unit", hint="write the unit with the value, or in the column Unit")
    parse_unit(unit)
    return unit


def _table(match: re.Match[str], context: CellContext) -> ReadValue:
    dimension = _dimension(match["dimension"])
    text = match["entries"].strip()
    words = [_WORD_ENTRY.match(part.strip()) for part in re.split(r"[;\n]", text) if part.strip()]
    if any(one is not None and not re.match(_NUMBER, one["word"]) for one in words):
        return _word_table(dimension, text, words, context)
    between = _BETWEEN.search(text)
    if between is None:
        raise DocumentError(
            f"the table does not say what holds between its entries: {text!r}",
            hint="end it with step or linear (linear in dB is meant; or write linear in power)",
        )
    entries = [_entry(part) for part in re.split(r"[;\n]", text[: between.start()]) if part.strip()]
    at_unit = next((entry["at_unit"] for entry in entries if entry["at_unit"]), "")
    units = list(dict.fromkeys(entry["unit"] for entry in entries if entry["unit"]))
    if len(units) > 1:
        raise DocumentError(
            f"the values of the table are in {' and '.join(units)}", hint="write them in one unit"
        )
    unit = _needed_unit(units[0] if units else "", context, text)
    value = ConditionTable(
        dimension=dimension,
        dimension_unit=at_unit,
        at=tuple(_place(entry, at_unit) for entry in entries),
        values=tuple(parse_number(entry["value"]) for entry in entries),
        between="step" if between["word"].lower().startswith("step") else "linear",
        drawn_in=_drawn(between["drawn"]),
    )
    notes: tuple[str, ...] = ()
    if value.between == "linear" and not between["drawn"] and parse_unit(unit).is_log:
        notes = (f"straight lines between the entries by {dimension} are drawn in dB",)
    return ReadValue(value, unit, (), notes)


def _word_table(
    dimension: str, text: str, entries: Sequence[re.Match[str] | None], context: CellContext
) -> ReadValue:
    """Read ``high = 20 dB; low = 5 dB``: values by words, nothing between them."""
    found = [one for one in entries if one is not None]
    if len(found) < len(entries):
        raise DocumentError(
            f"{text!r} is no table by words", hint="write each state with its value: high = 20 dB; low = 5 dB"
        )
    units = list(dict.fromkeys(one["unit"] for one in found if one["unit"]))
    if len(units) > 1:
        raise DocumentError(
            f"the values of the table are in {' and '.join(units)}", hint="write them in one unit"
        )
    value = WordTable(
        dimension=dimension,
        words=tuple(one["word"].strip("'\"") for one in found),
        values=tuple(parse_number(one["value"]) for one in found),
    )
    return ReadValue(value, _needed_unit(units[0] if units else "", context, text))


def _entry(text: str) -> dict[str, str]:
    found = _ENTRY.match(text.strip())
    if found is None:
        raise DocumentError(
            f"{text.strip()!r} is no entry of a table",
            hint="write the place and the value there: 17.7 GHz 23.5 dB",
        )
    return {name: part or "" for name, part in found.groupdict().items()}


def _place(entry: dict[str, str], unit: str) -> float:
    value = parse_number(entry["at"])
    if entry["at_unit"] in ("", unit):
        return value
    return float(convert(value, parse_unit(entry["at_unit"]), parse_unit(unit)))


def _drawn(word: str | None) -> Literal["dB", "linear"]:
    return "linear" if word and "power" in word.lower() else "dB"


def _dimension(text: str) -> str:
    if is_unlocated_temperature(text):
        raise DocumentError(
            f"{text.strip()!r} does not say whose temperature", hint=unlocated_temperature_hint()
        )
    known = find_dimension(text)
    return known.name if known is not None else re.sub(r"\W+", "_", text.strip().casefold())


def _drift(match: re.Match[str], unit: str, context: CellContext, notes: list[str]) -> Drift:
    number, reference_unit = split_quantity(match["reference"])
    reference = parse_number(number)
    per = parse_unit(match["per"])
    own = parse_unit(reference_unit or match["per"])
    step = tolerance_unit(own)
    wanted = tolerance_unit(parse_unit(unit))
    slope = parse_number(match["amount"]) * (-1.0 if match["sign"] == "-" else 1.0)
    slope = float(convert(slope, parse_unit(match["unit"]), wanted, difference=True))
    slope /= float(convert(1.0, per, step, difference=True))
    named = match["dimension"]
    dimension = (
        _dimension(named) if named else _unsaid(step.dimension, match.group(0).strip(), context, notes)
    )
    ends = {}
    for name in ("low", "high"):
        if match[name]:
            value, end_unit = split_quantity(match[name])
            end = parse_number(value)
            ends[name] = float(convert(end, parse_unit(end_unit), own)) if end_unit else end
    return Drift(dimension=dimension, dimension_unit=own.symbol, slope=slope, reference=reference, **ends)


def _unsaid(kind: str, text: str, context: CellContext, notes: list[str]) -> str:
    """Return the one condition of the block that a drift can mean, and say so."""
    candidates = (
        context.temperatures if kind == "temperature" else context.frequencies if kind == "frequency" else ()
    )
    if len(candidates) != 1:
        named = f" (the block has {', '.join(candidates)})" if candidates else ""
        raise DocumentError(
            f"'{text}' does not say by which condition{named}",
            hint=f"write 'of {candidates[0] if candidates else 'temperature_baseplate'}' before 'from'",
        )
    notes.append(f"'{text}' is read as by {candidates[0]}")
    return candidates[0]


def _between_words(table: ConditionTable) -> str:
    if table.between == "step":
        return "in steps"
    return "straight between" + (" in power" if table.drawn_in == "linear" else "")


def value_words(value: LineValue, unit: str, drifts: Sequence[Drift]) -> str:
    """Say a value back in words."""
    match value:
        case Constant(value=number):
            words = f"{format_value(number)} {unit}"
        case ConditionTable():
            first, last = format_value(value.at[0]), format_value(value.at[-1])
            words = (
                f"{len(value.at)} entries by {value.dimension} from {first} to {last} {value.dimension_unit}, "
                f"{format_value(min(value.values))} to {format_value(max(value.values))} {unit}, "
                + _between_words(value)
            )
        case WordTable():
            listed = (
                f"{word} {format_value(one)}" for word, one in zip(value.words, value.values, strict=True)
            )
            words = f"by {value.dimension}: {', '.join(listed)} {unit}"
        case Trace():
            words = f"as recorded in {value.table}, {value.column}"
        case _:
            low, high = (format_value(one / 1e9) for one in (value.frequency_hz[0], value.frequency_hz[-1]))
            words = f"|{value.entry}| of {value.file}, {low} to {high} GHz"
    for drift in drifts:
        per = tolerance_unit(parse_unit(drift.dimension_unit)).symbol if drift.dimension_unit else ""
        step = tolerance_unit(parse_unit(unit)).symbol
        words += f", {drift.slope:+g} {step}/{per} of {drift.dimension} from "
        words += f"{format_value(drift.reference)} {drift.dimension_unit}"
    return words
