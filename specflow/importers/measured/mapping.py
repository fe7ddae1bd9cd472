"""Mappings: how a person settled the layout of a table, as TOML. Read strictly: a word we do not know is refused.

One file may hold several layouts (``[[table]]``); each is kept as a mapping of its own and found again by its key.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, fields
from typing import Any

from specflow.errors import FileError
from specflow.importers.measured.header_text import header_key
from specflow.importers.measured.result import Role
from specflow.model.evidence import SpectrumKind

FORMAT = 1

ROLES = tuple(role.value for role in Role if role not in (Role.UNRESOLVED, Role.PIVOT, Role.STATED))


@dataclass(frozen=True, slots=True)
class ColumnMapping:
    """How one column is read. Empty means: as recognised. ``of`` is the header of the column that an uncertainty is of.

    ``k`` is the coverage factor (1: a standard uncertainty); ``fill_down`` says that a blank cell means the one above.
    """

    header: str = ""
    column: str = ""
    role: str = ""
    parameter: str = ""
    plane: str = ""
    statistic: str = ""
    polarisation: str = ""
    unit: str = ""
    bandwidth: str = ""
    spectrum: str = ""
    dimension: str = ""
    of: str = ""
    k: float | None = None
    fill_down: bool = False

    def is_about(self, text: str, letter: str) -> bool:
        """Whether this entry speaks of the column with this header (and letter, where the entry gives one)."""
        if self.column and self.column.upper() != letter:
            return False
        return not self.header or header_key(self.header) == header_key(text)


@dataclass(frozen=True, slots=True)
class PivotMapping:
    """Columns that are one quantity at several conditions.

    ``header`` is a pattern like ``{polarisation} @ {frequency} MHz``. The names in braces are dimensions; ``units``
    gives the unit of the numeric ones.
    """

    header: str
    parameter: str
    unit: str
    units: Mapping[str, str] = field(default_factory=dict)
    plane: str = ""
    statistic: str = ""
    polarisation: str = ""
    bandwidth: str = ""
    spectrum: str = ""

    def pattern(self) -> re.Pattern[str]:
        """Return the expression that the headers match; blanks do not matter."""
        pieces = []
        for piece in re.split(r"(\{\w+\})", " ".join(self.header.split())):
            if re.fullmatch(r"\{\w+\}", piece):
                pieces.append(f"(?P<{piece[1:-1]}>.+?)")
            else:
                pieces.append(re.escape(piece).replace(r"\ ", r"\s*"))
        return re.compile("".join(pieces), re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class LayoutMapping:
    """The mapping of one layout."""

    layout: str = ""
    title: str = ""
    sheet: str = ""
    skip: bool = False
    header_rows: int = 1
    include_hidden_rows: bool = False
    keep_summary_rows: bool = False
    keep_placeholders: bool = False
    stated: Mapping[str, str] = field(default_factory=dict)
    columns: Sequence[ColumnMapping] = ()
    pivot: PivotMapping | None = None

    def column(self, text: str, letter: str) -> ColumnMapping | None:
        """Return the entry about a column."""
        return next((one for one in self.columns if one.is_about(text, letter)), None)


_STATED = ("block", "method", "stage", "requirement", "set_up", "performer", "procedure", "procedure_revision", "item",
           "model", "model_version", "validated", "temperature", "bandwidth", "spectrum", "uncertainty")  # fmt: skip


def read_mappings(text: str, name: str) -> tuple[LayoutMapping, ...]:
    """Read the layouts of a mapping file. Raises FileError that names the entry and the word that is wrong."""
    try:
        data = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise FileError(f"the mapping is no TOML: {error}", where=name, hint="mend that line") from None
    if data.pop("format", FORMAT) != FORMAT:
        raise FileError(
            "a mapping of another format", where=name, hint=f"this program reads format = {FORMAT}"
        )
    tables = _entries_of(data, "table", name)
    _refuse_unknown(data, (), name)
    if not tables:
        raise FileError("the mapping has no [[table]]", where=name, hint="let --propose-mapping write one")
    return tuple(_layout(table, f"{name}, table {number}") for number, table in enumerate(tables, 1))


def _layout(data: dict[str, Any], where: str) -> LayoutMapping:
    columns = [
        _column(entry, f"{where}, column {number}")
        for number, entry in enumerate(_entries_of(data, "column", where), 1)
    ]
    pivot = _part_of(data, "pivot", where)
    stated = {key: str(value) for key, value in _part_of(data, "stated", where).items()}
    stated |= {key: str(data.pop(key)) for key in _STATED if key in data}
    _check(LayoutMapping, data, where, but=("columns", "stated", "pivot"))
    return LayoutMapping(
        **data, stated=stated, columns=tuple(columns), pivot=_pivot(pivot, where) if pivot else None
    )


def _entries_of(data: dict[str, Any], key: str, where: str) -> list[dict[str, Any]]:
    entries = data.pop(key, [])
    if not isinstance(entries, list) or not all(isinstance(entry, dict) for entry in entries):
        raise FileError(f"{key} is no list of entries", where=where, hint=f"write each as [[...{key}]]")
    return entries


def _part_of(data: dict[str, Any], key: str, where: str) -> dict[str, Any]:
    part = data.pop(key, {})
    if not isinstance(part, dict):
        raise FileError(f"{key} is no group of words", where=where, hint=f"write it as [table.{key}]")
    return part


def _column(data: dict[str, Any], where: str) -> ColumnMapping:
    _check(ColumnMapping, data, where)
    if not data.get("header") and not data.get("column"):
        raise FileError("the entry names no column", where=where, hint='write header = "..." or column = "C"')
    role = data.get("role", "")
    if role and role not in ROLES:
        raise FileError(f"{role!r} is no role of a column", where=where, hint=f"one of: {', '.join(ROLES)}")
    _check_spectrum(data, where)
    if "k" in data:
        data["k"] = float(data["k"])
    return ColumnMapping(**data)


def _check_spectrum(data: Mapping[str, Any], where: str) -> None:
    known = [kind.value for kind in SpectrumKind]
    if data.get("spectrum", known[0]) not in known:
        raise FileError(
            f"{data['spectrum']!r} is no kind of spectrum", where=where, hint=f"one of: {', '.join(known)}"
        )


def _pivot(data: dict[str, Any], where: str) -> PivotMapping:
    where = f"{where}, pivot"
    _check(PivotMapping, data, where)
    for name in ("header", "parameter", "unit"):
        if not data.get(name):
            raise FileError(f"the pivot states no {name}", where=where, hint=f'write {name} = "..."')
    _check_spectrum(data, where)
    names = re.findall(r"\{(\w+)\}", data["header"])
    if not names or len(set(names)) < len(names) or not all(name.isidentifier() for name in names):
        raise FileError(
            "the pattern must name dimensions, each once",
            where=where,
            hint='write header = "Gain @ {frequency} GHz"',
        )
    return PivotMapping(**data)


def _check(kind: type[Any], data: Mapping[str, Any], where: str, but: tuple[str, ...] = ()) -> None:
    known = {one.name: str(one.type) for one in fields(kind) if one.name not in but}
    _refuse_unknown(data, tuple(known), where)
    for key, value in data.items():
        expected = known[key].split(" ")[0].split("[")[0]
        right = {
            "bool": isinstance(value, bool),
            "int": isinstance(value, int) and not isinstance(value, bool) and value > 0,
            "float": isinstance(value, int | float) and not isinstance(value, bool) and value > 0,
            "str": isinstance(value, str),
            "Mapping": isinstance(value, dict) and all(isinstance(one, str) for one in value.values()),
        }
        if not right.get(expected, True):
            raise FileError(f"{key} = {value!r} is not what belongs there", where=where, hint=f"a {expected}")


def _refuse_unknown(data: Mapping[str, Any], known: tuple[str, ...], where: str) -> None:
    for key in data:
        if key not in known:
            hint = f"known here: {', '.join((*known, *_STATED))}" if known else "known here: format, table"
            raise FileError(f"{key!r} is not known in a mapping", where=where, hint=hint)


def write_mapping(mapping: LayoutMapping, reasons: Mapping[str, str] | None = None) -> str:
    """Return one layout as TOML; ``reasons`` are put as comments over the columns, by header."""
    lines = ["[[table]]"]
    for name in (
        "layout",
        "title",
        "sheet",
        "skip",
        "header_rows",
        "include_hidden_rows",
        "keep_summary_rows",
        "keep_placeholders",
    ):
        value = getattr(mapping, name)
        if value not in ("", False) and (name, value) != ("header_rows", 1):
            lines.append(f"{name} = {_toml(value)}")
    if mapping.stated:
        lines += ["", "[table.stated]"]
        lines += [f"{_key(key)} = {_toml(value)}" for key, value in mapping.stated.items()]
    if mapping.pivot:
        lines += ["", "[table.pivot]", *_entries(mapping.pivot)]
    for column in mapping.columns:
        lines.append("")
        reason = (reasons or {}).get(f"{column.column}:{column.header}", "")
        lines += [f"# {line}" for line in reason.splitlines()]
        lines += ["[[table.column]]", *_entries(column)]
    return "\n".join(lines) + "\n"


def _entries(part: ColumnMapping | PivotMapping) -> list[str]:
    return [
        f"{one.name} = {_toml(value)}"
        for one in fields(part)
        if (value := getattr(part, one.name)) not in ("", None, False, {})
    ]


def _toml(value: object) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, Mapping):
        return "{ " + ", ".join(f"{_key(key)} = {_toml(one)}" for key, one in value.items()) + " }"
    if isinstance(value, str):
        escaped = value.replace("\\", "\\\\").replace('"', '\\"')
        return '"' + "".join(c if c.isprintable() else _escaped(c) for c in escaped) + '"'
    return repr(value)


def _escaped(character: str) -> str:
    number = ord(character)
    return f"\\u{number:04x}" if number < 0x10000 else f"\\U{number:08x}"


def _key(key: str) -> str:
    return key if key.replace("_", "").replace("-", "").isalnum() and key.isascii() else _toml(key)
