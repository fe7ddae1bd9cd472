"""Published limits: tables of standards with one row a limit, as structured drafts for requirements.

Columns are found by name in any order: id, standard, version, clause, parameter, bound, value, unit, conditions. Rows
joined by ``or_with`` and the pieces of one mask become one limit. Every row is either part of a limit or returned as
not taken with the reason; conditions that are not parsed are kept as written.
"""

from __future__ import annotations

import csv
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import takewhile
from pathlib import Path

from specflow.errors import ExpressionError, FileError
from specflow.importers.published_conditions import PublishedCondition
from specflow.importers.published_masks import (
    alternatives_text,
    is_mask_piece,
    joined_by_or,
    mask_key,
    mask_keys_in_limit,
    mask_text,
)
from specflow.importers.published_row import PublishedRow
from specflow.limits import parse_limit
from specflow.model.limit import Limit

_NEEDED = ("id", "parameter", "bound", "value", "unit")
_BOUNDS = ("max", "min", "abs", "range")
_MOST_BYTES = 50_000_000


@dataclass(frozen=True, slots=True)
class PublishedLimit:
    """One limit of a published table.

    ``rows`` are the row numbers it was made of (header is row 1); ``conditions`` the parsed conditions by name;
    ``unparsed`` those kept verbatim (with the id of the row in front when only one of several rows has it);
    ``in_limit`` those that the limit itself says, verbatim.
    """

    id: str
    rows: tuple[int, ...]
    document: str
    version: str
    clause: str
    parameter_title: str
    limit: Limit
    conditions: Mapping[str, PublishedCondition]
    unparsed: tuple[str, ...]
    in_limit: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class NotTaken:
    """A row that makes no limit, and why; ``is_limit`` when it should have made one and cannot be read."""

    row: int
    id: str
    why: str
    is_limit: bool = True


@dataclass(frozen=True, slots=True)
class PublishedTable:
    """What a table came to. Rows of the file = taken + joined + not taken."""

    limits: tuple[PublishedLimit, ...]
    not_taken: tuple[NotTaken, ...]
    row_count: int

    @property
    def joined_count(self) -> int:
        """How many rows were joined to another row's limit."""
        return sum(len(limit.rows) - 1 for limit in self.limits)

    @property
    def unparsed_count(self) -> int:
        """How many conditions are kept verbatim because they were not (wholly) parsed."""
        return sum(len(limit.unparsed) for limit in self.limits)


def read_published_limits(path: Path) -> PublishedTable:
    """Read a csv file of published limits.

    Raises FileError for a file that cannot be read or lacks a needed column. Faults of single rows are returned.
    """
    return published_limits(_read_rows(path))


def _read_rows(path: Path) -> list[PublishedRow]:
    try:
        if path.stat().st_size > _MOST_BYTES:
            raise FileError("the table is larger than 50 MB", where=str(path), hint="split it")
        text = path.read_text(encoding="utf-8-sig")
    except OSError as error:
        raise FileError(f"cannot be read: {error.strerror or error}", where=str(path)) from error
    except UnicodeDecodeError as error:
        raise FileError("is not UTF-8 text", where=str(path), hint="save it as csv in UTF-8") from error
    try:
        lines = list(csv.reader(text.splitlines(keepends=True), strict=True))
    except csv.Error as error:
        raise FileError(f"is no csv table: {error}", where=str(path)) from error
    return list(_rows(lines, str(path)))


def _rows(lines: Sequence[Sequence[str]], where: str) -> Iterator[PublishedRow]:
    if not lines:
        raise FileError("the table is empty", where=where)
    header = [cell.strip().casefold() for cell in lines[0]]
    missing = [name for name in _NEEDED if name not in header]
    if missing:
        raise FileError(
            f"the header has no column {', '.join(missing)}",
            where=f"{where}, row 1",
            hint="columns are found by name: id, standard, version, clause, parameter, bound, value, unit, conditions",
        )
    places = {name: header.index(name) for name in header}

    def cell(line: Sequence[str], name: str) -> str:
        place = places.get(name, len(line))
        return line[place].strip() if place < len(line) else ""

    for number, line in enumerate(lines[1:], start=2):
        if any(text.strip() for text in line):
            names = (
                "id",
                "standard",
                "version",
                "clause",
                "parameter",
                "bound",
                "value",
                "unit",
                "conditions",
            )
            yield PublishedRow(number, *(cell(line, name) for name in names))


def published_limits(rows: Sequence[PublishedRow]) -> PublishedTable:
    """Turn rows into limits; every row ends in a limit or among those not taken."""
    not_taken: list[NotTaken] = []
    usable: list[PublishedRow] = []
    seen: dict[str, int] = {}
    for row in rows:
        why_no_limit, why = _why_no_limit(row), _why_not(row, seen)
        if why_no_limit or why:
            not_taken.append(NotTaken(row.number, row.id, why_no_limit or why, not why_no_limit))
        else:
            seen[row.id.casefold()] = row.number
            usable.append(row)
    limits: list[PublishedLimit] = []
    for group in _groups(usable):
        try:
            limits.append(_limit_of(group, limits))
        except ExpressionError as error:
            not_taken += [NotTaken(row.number, row.id, f"the limit cannot be read: {error}") for row in group]
    not_taken.sort(key=lambda left: left.row)
    return PublishedTable(tuple(limits), tuple(not_taken), len(rows))


def _why_no_limit(row: PublishedRow) -> str:
    """Say why a row is no limit at all; "" when it is one."""
    if not row.bound:
        value = f"{row.value} {row.unit}".strip()
        return f"no bound is stated, so it limits nothing: {row.parameter} = {value} is a definition, stimulus or term"
    if row.said("is_requirement") == "no":
        return "the row says that it is not itself a requirement (is_requirement=no)"
    return ""


def _why_not(row: PublishedRow, seen: Mapping[str, int]) -> str:
    """Say what is wrong with a row that is a limit; "" when nothing is."""
    if not row.id:
        return "the row has no id"
    if row.id.casefold() in seen:
        return f"the id is that of row {seen[row.id.casefold()]}"
    if row.bound not in _BOUNDS:
        return f"the bound {row.bound!r} is not one of {', '.join(_BOUNDS)}"
    return "" if row.value else "the row has a bound but no value"


def _groups(rows: Sequence[PublishedRow]) -> list[list[PublishedRow]]:
    """Return the rows in groups that make one limit each, in the order of their first rows."""
    group_of: dict[int, list[PublishedRow]] = {row.number: [row] for row in rows}
    masks: dict[tuple[str, ...], PublishedRow] = {}
    for row in rows:
        together = joined_by_or(row, rows)
        if is_mask_piece(row):
            together.append(masks.setdefault(mask_key(row), row))
        for other in together:
            _unite(group_of, row, other)
    groups = {id(group): group for group in group_of.values()}
    ordered = [sorted(group, key=lambda row: row.number) for group in groups.values()]
    return sorted(ordered, key=lambda group: group[0].number)


def _unite(group_of: dict[int, list[PublishedRow]], row: PublishedRow, other: PublishedRow) -> None:
    one, two = group_of[row.number], group_of[other.number]
    if one is two:
        return
    one.extend(two)
    for member in two:
        group_of[member.number] = one


def _limit_of(group: Sequence[PublishedRow], made: Sequence[PublishedLimit]) -> PublishedLimit:
    text, used = _text_of(group)
    conditions, unparsed, in_limit = _shared(group, used)
    first = group[0]
    return PublishedLimit(
        id=_id_of(group, {limit.id.casefold() for limit in made}),
        rows=tuple(row.number for row in group),
        document=first.document,
        version=first.version,
        clause=first.clause,
        parameter_title=first.parameter,
        limit=parse_limit(text),
        conditions=conditions,
        unparsed=unparsed,
        in_limit=in_limit,
    )


def _text_of(group: Sequence[PublishedRow]) -> tuple[str, Callable[[PublishedRow], frozenset[str]]]:
    """Return the text of the limit, and which keys of each row it says."""
    if all(is_mask_piece(row) for row in group):
        return mask_text(group), lambda row: row.keys_in_limit() | mask_keys_in_limit(row)
    if len(group) == 1:
        return group[0].limit_text(), PublishedRow.keys_in_limit
    text, keys = alternatives_text(group)
    return text, lambda row: row.keys_in_limit() | keys | {"or_with"}


def _shared(
    group: Sequence[PublishedRow], used: Callable[[PublishedRow], frozenset[str]]
) -> tuple[dict[str, PublishedCondition], tuple[str, ...], tuple[str, ...]]:
    """Return the conditions all rows share, those kept verbatim, and those the limit says."""
    conditions: dict[str, PublishedCondition] = {}
    unparsed: list[str] = []
    in_limit: list[str] = []
    parsed = [(row, *row.parsed(used(row))) for row in group]
    for row, found, rest in parsed:
        in_limit += [written.verbatim for written in row.written if written.key in used(row)]
        for name, condition in found.items():
            everywhere = all(other.get(name) == condition for _, other, _ in parsed)
            if everywhere:
                conditions[name] = condition
            else:
                unparsed.append(f"{row.id}: {condition.verbatim}")
        for verbatim in rest:
            everywhere = len(group) == 1 or all(verbatim in others for _, _, others in parsed)
            unparsed.append(verbatim if everywhere else f"{row.id}: {verbatim}")
    return conditions, tuple(dict.fromkeys(unparsed)), tuple(dict.fromkeys(in_limit))


def _id_of(group: Sequence[PublishedRow], taken: set[str]) -> str:
    """Return the id of a single row; for several what their ids share, if nobody else has it."""
    if len(group) == 1:
        return group[0].id
    same = [row.id.split("-") for row in group if row.parameter == group[0].parameter]
    shared = same[0][:-1] if len(same) == 1 else _common(same)
    candidates = ("-".join(shared), group[0].id)
    return next(name for name in candidates if name and name.casefold() not in taken)


def _common(ids: Sequence[Sequence[str]]) -> list[str]:
    """Return the leading parts that all ids have."""
    return [parts[0] for parts in takewhile(lambda parts: len(set(parts)) == 1, zip(*ids, strict=False))]
