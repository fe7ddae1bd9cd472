"""Mappings: how a person settled the layout of a table, as TOML. Read strictly: a word we do not know is refused.

One file may hold several layouts (``[[table]]``); each is kept as a mapping of its own and found again by its key.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from dataclasses import fields
from typing import Any

from specflow.errors import FileError
from specflow.importers.measured.area import read_area
from specflow.importers.measured.mapping_parts import (
    AxisMapping,
    ColumnMapping,
    DeriveMapping,
    LayoutMapping,
    LongMapping,
    MatrixMapping,
    PivotMapping,
)
from specflow.importers.measured.result import Role
from specflow.model.evidence import SpectrumKind

__all__ = [
    "FORMAT",
    "ROLES",
    "ColumnMapping",
    "LayoutMapping",
    "PivotMapping",
    "read_mappings",
    "write_mapping",
]

FORMAT = 1

_PARTS = ("stated", "columns", "pivots", "long", "matrix", "derive")

ROLES = tuple(role.value for role in Role if role not in (Role.UNRESOLVED, Role.PIVOT, Role.STATED))


_STATED = ("block", "method", "stage", "requirement", "set_up", "performer", "procedure", "procedure_revision", "item",
           "model", "model_version", "validated", "temperature", "bandwidth", "spectrum", "uncertainty", "corrections",
           "scanned", "floor", "list")  # fmt: skip


def read_mappings(text: str, name: str) -> tuple[LayoutMapping, ...]:
    """Read the layouts of a mapping file. Raises FileError that names the entry and the word that is wrong."""
    try:
        data = tomllib.loads(text)
    except (tomllib.TOMLDecodeError, RecursionError) as error:
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
    single = data.pop("pivot", [])
    data["pivot"] = single if isinstance(single, list) else [single]
    pivots = [_pivot(entry, where) for entry in _entries_of(data, "pivot", where)]
    derive = [_derive(entry, where) for entry in _entries_of(data, "derive", where)]
    long, matrix = _part_of(data, "long", where), _part_of(data, "matrix", where)
    stated = {key: str(value) for key, value in _part_of(data, "stated", where).items()}
    stated |= {key: _said(data.pop(key)) for key in _STATED if key in data}
    _check(LayoutMapping, data, where, but=("columns", "stated", "pivots", "long", "matrix", "derive"))
    _check_area(data, where)
    if data.get("others", Role.NOT_READ) != Role.NOT_READ:
        raise FileError(
            f"others = {data['others']!r} is not what belongs there",
            where=where,
            hint='write others = "not read"',
        )
    return LayoutMapping(
        **data,
        stated=stated,
        columns=tuple(columns),
        pivots=tuple(pivots),
        long=_long(long, where) if long else None,
        matrix=_matrix(matrix, where) if matrix else None,
        derive=tuple(derive),
    )


def _derive(data: dict[str, Any], where: str) -> DeriveMapping:
    where = f"{where}, derive"
    if isinstance(data.get("settings"), dict):
        data["settings"] = {key: str(value) for key, value in data["settings"].items()}
    _check(DeriveMapping, data, where)
    _demand(data, ("law",), where)
    return DeriveMapping(**data)


def _check_area(data: Mapping[str, Any], where: str) -> None:
    if "area" in data and read_area(data["area"]) is None:
        raise FileError(
            f"area = {data['area']!r} is no area of a sheet",
            where=where,
            hint='write area = "K6:L10" or "A137:B"',
        )
    if not data.get("area") and data.get("header_rows") == 0:
        raise FileError("header_rows = 0 without an area", where=where, hint='write area = "K6:L10", too')


def _long(data: dict[str, Any], where: str) -> LongMapping:
    where = f"{where}, long"
    _check(LongMapping, data, where)
    _demand(data, ("parameter", "value"), where)
    return LongMapping(**data)


def _matrix(data: dict[str, Any], where: str) -> MatrixMapping:
    where = f"{where}, matrix"
    axes: list[AxisMapping] = []
    for name in ("rows", "columns"):
        part = _part_of(data, name, where)
        _check(AxisMapping, part, f"{where}, {name}")
        _demand(part, ("dimension", "start", "step"), f"{where}, {name}")
        if not part["step"]:
            raise FileError("a step of 0", where=f"{where}, {name}", hint="say how far the lines lie apart")
        axes.append(AxisMapping(**part | {"start": float(part["start"]), "step": float(part["step"])}))
    _check(MatrixMapping, data, where, but=("rows", "columns"))
    _demand(data, ("parameter", "unit"), where)
    _check_spectrum(data, where)
    return MatrixMapping(rows=axes[0], columns=axes[1], **data)


def _demand(data: Mapping[str, Any], names: tuple[str, ...], where: str) -> None:
    for name in names:
        if data.get(name, "") == "":
            raise FileError(f"{name} is missing", where=where, hint=f"write {name} = ...")


def _said(value: Any) -> str:
    """What is said for a table as a text; a list of names has commas between them."""
    return ", ".join(map(str, value)) if isinstance(value, list) else str(value)


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
    for key in ("k", "scale"):
        if key in data:
            data[key] = float(data[key])
            if not data[key] > 0:
                raise FileError(f"{key} = {data[key]:g} is no factor", where=where, hint="a number above 0")
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
            "int": isinstance(value, int) and not isinstance(value, bool) and value >= 0,
            "float": isinstance(value, int | float) and not isinstance(value, bool),
            "str": isinstance(value, str),
            "Mapping": isinstance(value, dict) and all(isinstance(one, str) for one in value.values()),
            "Sequence": isinstance(value, list) and all(_is_one_of(one, str(known[key])) for one in value),
        }
        if not right.get(expected, True):
            raise FileError(f"{key} = {value!r} is not what belongs there", where=where, hint=f"a {expected}")


def _is_one_of(value: object, kind: str) -> bool:
    return (
        isinstance(value, int) and not isinstance(value, bool) if "[int]" in kind else isinstance(value, str)
    )


def _refuse_unknown(data: Mapping[str, Any], known: tuple[str, ...], where: str) -> None:
    for key in data:
        if key not in known:
            hint = f"known here: {', '.join((*known, *_STATED))}" if known else "known here: format, table"
            raise FileError(f"{key!r} is not known in a mapping", where=where, hint=hint)


def write_mapping(mapping: LayoutMapping, reasons: Mapping[str, str] | None = None) -> str:
    """Return one layout as TOML; ``reasons`` are put as comments over the columns, by header."""
    lines = ["[[table]]", *_entries(mapping, but=_PARTS)]
    if mapping.stated:
        lines += ["", "[table.stated]"]
        lines += [f"{_key(key)} = {_toml(value)}" for key, value in mapping.stated.items()]
    if mapping.long:
        lines += ["", "[table.long]", *_entries(mapping.long)]
    if mapping.matrix:
        lines += ["", "[table.matrix]", *_entries(mapping.matrix)]
    mark = "[table.pivot]" if len(mapping.pivots) == 1 else "[[table.pivot]]"
    for pivot in mapping.pivots:
        lines += ["", mark, *_entries(pivot)]
    for derived in mapping.derive:
        lines += ["", "[[table.derive]]", *_entries(derived)]
    for column in mapping.columns:
        lines.append("")
        reason = (reasons or {}).get(f"{column.column}:{column.header}", "")
        lines += [f"# {line}" for line in reason.splitlines()]
        lines += ["[[table.column]]", *_entries(column)]
    return "\n".join(lines) + "\n"


def _entries(part: object, but: tuple[str, ...] = ()) -> list[str]:
    """The fields of a part that say something."""
    return [
        f"{one.name} = {_toml(value)}"
        for one in fields(part)  # type: ignore[arg-type]
        if one.name not in but and (value := getattr(part, one.name)) != one.default and value not in ({}, ())
    ]


def _toml(value: object) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, AxisMapping):
        return "{ " + ", ".join(_entries(value)) + " }"
    if isinstance(value, list | tuple):
        return "[" + ", ".join(map(_toml, value)) + "]"
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
