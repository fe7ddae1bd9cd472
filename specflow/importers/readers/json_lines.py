"""JSON Lines (.jsonl, .ndjson) of automated benches: one object a line, as one grid with the keys for headers.

The row is the line number of the file, so the headers stand in row 0, above the first line. Nested objects are
flattened with dots. ``{"value": 1.2, "unit": "dB"}`` is one quantity: where all lines agree in the unit the header is
``gain (dB)``. Where they differ in the unit of one quantity, as records of one quantity each do, the units are the
column ``unit``; where they differ in several, each cell keeps its own: ``1.2 dB``. What cannot be one value of one key
(a broken line, a key that stands twice) is an error cell in its place, with a note.
"""

from __future__ import annotations

import json
import sys
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

from specflow.errors import FileError
from specflow.importers.readers.encoding import decode
from specflow.importers.readers.grid import Grid
from specflow.importers.readers.odd_cells import OddCell, OddKind
from specflow.importers.readers.odd_marks import OddMarks
from specflow.importers.readers.source import Source
from specflow.importers.readers.stores import Value

MAX_CELLS = 4_000_000
"""About half a gigabyte while they are read: every line is a dictionary until all keys are known."""

MAX_KEYS = 2_000

_UNIT_NAMES = ("unit", "units")
_EXACT = 2**53
_MOST_NAMED = 5
_TWICE = OddCell(OddKind.ERROR, "the key stands twice in this line")


@dataclass(slots=True)
class _Line:
    """One line: its cells by key, the keys that stand twice, and what is wrong with the line as a whole."""

    cells: dict[str, Value] = field(default_factory=dict)
    twice: frozenset[str] = frozenset()
    lists: int = 0
    broken: str = ""


class _Pairs(list[tuple[str, Any]]):
    """The pairs of an object in order, with repeated keys."""


def read_json_lines(source: Source) -> list[Grid]:
    """The objects of a file. Raises FileError for content that is no text or holds no object a line."""
    lines, notes = _read_lines(source)
    sound = [line for line in lines if line is not None and not line.broken]
    keys = list(dict.fromkeys(key for line in sound for key in (*line.cells, *line.twice)))
    _check_size(source, keys, len(lines))
    doubts = _notes(lines, keys)
    headers = _headers(keys, sound)
    del sound
    odd = _marks(lines, list(headers)).cells()
    return [
        Grid(
            name=source.name,
            rows=[list(headers.values()), *_rows(lines, list(headers))],
            file=source.name,
            first_row=0,
            odd=odd,
            notes=(*notes, *doubts),
        )
    ]


def _read_lines(source: Source) -> tuple[list[_Line | None], list[str]]:
    """The lines, None where one is blank, and notes. FileError where most of them are no objects."""
    text, notes = decode(source)
    lines = [_read_line(line) if line.strip() else None for line in text.rstrip("\n").split("\n")]
    read = [line for line in lines if line is not None]
    broken = [line.broken for line in read if line.broken]
    if 2 * len(broken) >= len(read):
        raise FileError(
            f"{len(broken)} of {len(read)} lines are no JSON object ({broken[0] if broken else 'it is empty'})",
            where=source.name,
            hint="write one object a line, not a list or an object over several lines",
        )
    return lines, notes


def _rows(lines: list[_Line | None], keys: list[str]) -> Iterator[list[Value]]:
    """The cells of each line; a line is forgotten as its row is made, for both together take twice the memory."""
    for place, line in enumerate(lines):
        lines[place] = None
        yield [] if line is None else [line.cells.get(key, "") for key in keys]


def _read_line(text: str) -> _Line:
    line = _Line()
    try:
        found = json.loads(text, object_pairs_hook=_Pairs, parse_constant=str, parse_int=_whole)
        if r"\u" in text:  # half of a pair of surrogates is no sign, and could not be stored
            json.dumps(found, ensure_ascii=False).encode()
    except (ValueError, RecursionError) as error:
        line.broken = str(error)[:80]
        return line
    if not isinstance(found, _Pairs):
        line.broken = f"it is a {type(found).__name__}, not an object"
        return line
    _flatten(found, "", line)
    return line


def _whole(text: str) -> Value:
    """A whole number; one that has no exact float stays as it is, since it is rather a name than a reading."""
    number = int(text)
    return float(number) if abs(number) <= _EXACT else number


def _flatten(pairs: _Pairs, prefix: str, line: _Line) -> None:
    for name, value in pairs:
        key = sys.intern(f"{prefix}{name}")  # every line has the same keys, and mostly the same words
        if isinstance(value, _Pairs):
            _flatten(value, f"{key}.", line)
            continue
        if key in line.cells or key in line.twice:
            line.twice |= {key}
            line.cells.pop(key, None)
            continue
        if isinstance(value, list):
            line.lists += 1
            value = json.dumps(_plain(value), ensure_ascii=False)
        line.cells[key] = "" if value is None else sys.intern(value) if isinstance(value, str) else value
    if len({name for name, _ in pairs}) < len(pairs):
        for name, times in Counter(name for name, _ in pairs).items():
            if times > 1:
                _stands_twice(f"{prefix}{name}", line)


def _stands_twice(key: str, line: _Line) -> None:
    """Of a key that stands twice, nothing below it is known either."""
    below = [other for other in line.cells if other == key or other.startswith(f"{key}.")]
    line.twice |= set(below or [key])
    for other in below:
        del line.cells[other]


def _plain(value: Any) -> Any:
    if isinstance(value, _Pairs):
        return {name: _plain(one) for name, one in value}
    return [_plain(one) for one in value] if isinstance(value, list) else value


def _check_size(source: Source, keys: list[str], lines: int) -> None:
    if len(keys) > MAX_KEYS or len(keys) * lines > MAX_CELLS:
        raise FileError(
            f"{len(keys):,} keys in {lines:,} lines are more than are read",
            where=source.name,
            hint="write one record a line, with the same keys in each; or split the file",
        )


def _headers(keys: list[str], lines: list[_Line]) -> dict[str, str]:
    """Key -> header; keys of units that went elsewhere are left out."""
    headers = {key: key for key in keys}
    differ = []
    for key, unit in _quantities(keys, lines).items():
        base = key.removesuffix(".value")
        units = {
            str(line.cells.get(unit, "")).strip() for line in lines if _has(line, key) or _has(line, unit)
        }
        if len(units) == 1:
            del headers[unit]
            headers[key] = f"{base} ({units.pop()})".removesuffix(" ()")
        else:
            headers[key] = base
            differ.append((key, unit))
    if len(differ) == 1 and not any(name in headers for name in _UNIT_NAMES):
        headers[differ[0][1]] = "unit"
        return headers
    for key, unit in differ:
        del headers[unit]
        for line in lines:
            _join_unit(line, key, unit)
    return headers


def _quantities(keys: list[str], lines: list[_Line]) -> dict[str, str]:
    """Key of a value -> key of its unit, where nothing else has that name."""
    found = {}
    for key in keys:
        base = key.removesuffix(".value")
        unit = next((f"{base}.{name}" for name in _UNIT_NAMES if f"{base}.{name}" in keys), "")
        if base != key and unit and base not in keys and not any(unit in line.twice for line in lines):
            found[key] = unit
    return found


def _has(line: _Line, key: str) -> bool:
    return line.cells.get(key, "") != "" or key in line.twice


def _join_unit(line: _Line, key: str, unit: str) -> None:
    value, said = line.cells.get(key, ""), str(line.cells.get(unit, "")).strip()
    if said and value != "" and not isinstance(value, bool):
        line.cells[key] = f"{value} {said}"


def _marks(lines: list[_Line | None], keys: list[str]) -> OddMarks:
    marks = OddMarks()
    places = {key: column for column, key in enumerate(keys, start=1)}
    for row, line in enumerate(lines, start=1):
        if line is None:
            continue
        for key in line.twice:
            if key in places:
                marks.add_one(row, places[key], _TWICE)
        if line.broken:
            for column in places.values():
                marks.add_one(row, column, OddCell(OddKind.ERROR, f"broken line: {line.broken}"))
    return marks


def _notes(lines: list[_Line | None], keys: list[str]) -> list[str]:
    read = [(row, line) for row, line in enumerate(lines, start=1) if line is not None]
    notes = _counted("no JSON object", [row for row, line in read if line.broken])
    twice = Counter(key for _, line in read for key in line.twice)
    for key in twice:
        notes += _counted(f"two values of {key!r}", [row for row, line in read if key in line.twice])
    notes += _counted("a list, which is kept as text", [row for row, line in read if line.lists])
    notes += [
        f"{key!r} is a value in some lines and an object in others"
        for key in keys
        if any(other.startswith(f"{key}.") for other in keys)
    ]
    for key in keys:
        kinds = {type(value) for _, line in read if (value := line.cells.get(key, "")) != ""}
        if len(kinds - {int}) > 1:
            names = sorted(
                {float: "numbers", str: "texts", bool: "truth values"}.get(kind, "") for kind in kinds
            )
            notes.append(f"{key!r} holds " + " and ".join(filter(None, names)))
    return notes


def _counted(what: str, rows: list[int]) -> list[str]:
    if not rows:
        return []
    named = ", ".join(map(str, rows[:_MOST_NAMED])) + (" and others" if len(rows) > _MOST_NAMED else "")
    return [f"{'line' if len(rows) == 1 else 'lines'} {named}: {what}"]
