"""Rows of published tables that make one requirement: pieces of one mask, and alternatives joined by ``or_with``."""

from __future__ import annotations

import re
from collections.abc import Sequence
from fnmatch import fnmatchcase

from specflow.importers.published_conditions import name_and_unit
from specflow.importers.published_row import PublishedRow, slug

_PIECE = re.compile(r"\b(?:mask|segment|breakpoint)\b", re.IGNORECASE)
_NUMBERED = re.compile(r"(.+) segment \d+ \(.*\)")
_AXES = ("offset_MHz", "f_offset_MHz", "delta_f_MHz", "offset_from_edge_MHz", "pct")
_CATEGORY = re.compile(r"Category ([A-Z])")
_END_OF_CATEGORY = re.compile(r"(\w+) \(([A-Z])\)")
_NUMBER = re.compile(r"[+-]?\d+(?:\.\d+)?")
_ONE_END = re.compile(r">=? ?([+-]?\d+(?:\.\d+)?)")


def is_mask_piece(row: PublishedRow) -> bool:
    """Tell whether a row is a segment or breakpoint of a mask: its title or clause says so and it has an axis."""
    says_so = _PIECE.search(row.parameter) or _PIECE.search(row.clause)
    return bool(says_so) and axis_of(row) is not None


def axis_of(row: PublishedRow) -> tuple[str, str] | None:
    """Return name and unit of the axis a row is stated on."""
    if row.said("offset_to"):
        return "offset", "MHz"
    for key in _AXES:
        if row.said(key):
            name, unit = name_and_unit(key)
            return name, unit or "%"
    return None


def mask_key(row: PublishedRow) -> tuple[str, ...]:
    """Return what the pieces of one mask have in common: the document, and the stem of the id or of the title."""
    numbered = _NUMBERED.fullmatch(row.parameter)
    if numbered is not None:
        return row.document, row.version, numbered.group(1), row.said("band_range_GHz")
    return row.document, row.version, row.id.rpartition("-")[0]


def mask_keys_in_limit(row: PublishedRow) -> frozenset[str]:
    """Return the keys of the conditions that the mask itself says."""
    keys = {*_AXES, "offset_from", "offset_to", "not_applicable_if"}
    keys |= {condition.key for condition in row.written if _defines(row, condition.key)}
    return frozenset(keys)


def _defines(row: PublishedRow, key: str) -> bool:
    """Tell whether a condition defines a name that an end of the segment uses (f_B=2*BW if ...)."""
    ends = f"{row.said('offset_from')} {row.said('offset_to')}"
    return key not in ("offset_from", "offset_to") and re.search(rf"\b{re.escape(key)}\b", ends) is not None


def mask_text(rows: Sequence[PublishedRow]) -> str:
    """Return the limit that the pieces of one mask make."""
    categories = sorted({name for row in rows for name in _CATEGORY.findall(row.parameter)})
    if len(categories) > 1 and all(row.said("offset_to") for row in rows):
        parts = [f"'{name}': {_one_mask(_rows_of(rows, name), rows, name)}" for name in categories]
        return f"by category ({'; '.join(parts)})"
    return _one_mask(rows, rows, "")


def _rows_of(rows: Sequence[PublishedRow], category: str) -> list[PublishedRow]:
    return [
        row for row in rows if f"Category {category}" in row.parameter or f"and {category}" in row.parameter
    ]


def _one_mask(rows: Sequence[PublishedRow], all_rows: Sequence[PublishedRow], category: str) -> str:
    """Return one mask for each axis, the looser floor beyond a breakpoint as a case of its own."""
    floors = [row for row in rows if _ONE_END.fullmatch(row.said("offset_MHz"))]
    pieces = [row for row in rows if row not in floors]
    axes = list(dict.fromkeys(axis for row in pieces if (axis := axis_of(row)) is not None))
    masks = [
        _axis_mask([row for row in pieces if axis_of(row) == axis], all_rows, axis, category) for axis in axes
    ]
    text = masks[0] if len(masks) == 1 else f"stricter({'; '.join(masks)})"
    for floor in floors:
        end = _ONE_END.fullmatch(floor.said("offset_MHz"))
        place = end.group(1) if end is not None else ""
        # At the breakpoint itself the mask still holds: it is the more stringent of the two.
        text = f"cases(when offset[MHz] > {place}: {floor.bound_text()}; otherwise: {text})"
    return text


def _axis_mask(
    rows: Sequence[PublishedRow], all_rows: Sequence[PublishedRow], axis: tuple[str, str], category: str
) -> str:
    name, unit = axis
    first = rows[0]
    side = "max" if first.bound == "max" else "min"
    head = f"{name}[{unit}], {side} {first.unit}{', strict' if first.strict else ''}"
    if all(_NUMBER.fullmatch(row.said(f"{name}_{unit}")) for row in rows):
        bandwidth = f", in {first.bandwidth}" if first.bandwidth else ""
        points = [f"{row.said(f'{name}_{unit}')}: {row.value}" for row in rows]
        return f"mask({head}{bandwidth}, linear: {'; '.join(points)})"
    segments = [_segment(row, all_rows, name, unit, category) for row in rows]
    text = f"mask({head}: {'; '.join(segments)})"
    excepted = {row.said("not_applicable_if") for row in rows} - {""}
    return f"{text} if not ({excepted.pop()})" if len(excepted) == 1 else text


def _segment(row: PublishedRow, all_rows: Sequence[PublishedRow], axis: str, unit: str, category: str) -> str:
    start, stop = _ends(row, axis, unit, category)
    defined = {
        condition.key: condition.value
        for other in all_rows
        for condition in other.written
        if _defines(other, condition.key)
    }
    for name, value in defined.items():
        start, stop = (re.sub(rf"\b{re.escape(name)}\b", f"({value})", end) for end in (start, stop))
    # A name of the axis inside a formula means its plain number in the unit of the axis.
    value = re.sub(rf"\b{re.escape(axis)}\b(?![\w\[])", f"{axis}[{unit}]", row.value)
    bandwidth = f" in {row.bandwidth}" if row.bandwidth else ""
    return f"{start}..{stop}: {value}{bandwidth}"


def _ends(row: PublishedRow, axis: str, unit: str, category: str) -> tuple[str, str]:
    if row.said("offset_to"):
        by_category = {name: end for end, name in _END_OF_CATEGORY.findall(row.said("offset_to"))}
        return row.said("offset_from"), by_category.get(category, row.said("offset_to"))
    said = row.said(f"{axis}_{unit}") or row.said(axis)
    start, stop = re.split(r"\.\.|(?<=.)-", said, maxsplit=1)
    # "max" alone is the end of the axis: f_offset_max.
    return start, re.sub(r"\bmax\b(?! *\()", f"{axis}_max", stop)


def joined_by_or(row: PublishedRow, rows: Sequence[PublishedRow]) -> list[PublishedRow]:
    """Return the rows that ``or_with`` names: an id, ids with ``*``, or a word of the title in the same clause."""
    target = row.said("or_with")
    if not target:
        return []
    named = [other for other in rows if other is not row and fnmatchcase(other.id, target)]
    if named:
        return named
    clause = row.clause.split()[0] if row.clause else ""
    return [
        other
        for other in rows
        if other is not row
        and other.bound
        and other.document == row.document
        and other.clause.split()[:1] == [clause]
        and re.search(rf"\b{re.escape(target)}\b", other.parameter)
    ]


def alternatives_text(rows: Sequence[PublishedRow]) -> tuple[str, frozenset[str]]:
    """Return the limit that rows joined by ``or_with`` make, and the keys its tables of cases use.

    Rows of one title are cases of one member; the first title is the requirement's own quantity, the others are
    named after their titles.
    """
    titles = list(dict.fromkeys(row.parameter for row in rows))
    used: set[str] = set()
    members = []
    for at, title in enumerate(titles):
        same = [row for row in rows if row.parameter == title]
        text, keys = _cases_text(same)
        used |= keys
        members.append(text if at == 0 else f"{slug(title)}: {{{text}}}")
    looser = any("less stringent" in row.said("rule") for row in rows)
    return f"{'looser' if looser else 'stricter'}({'; '.join(members)})", frozenset(used)


def _cases_text(rows: Sequence[PublishedRow]) -> tuple[str, frozenset[str]]:
    if len(rows) == 1:
        return rows[0].limit_text(), frozenset()
    parsed = [row.parsed(row.keys_in_limit())[0] for row in rows]
    for name in parsed[0]:
        if all(name in conditions for conditions in parsed):
            values = [conditions[name] for conditions in parsed]
            if len({value.verbatim for value in values}) == len(rows):
                unit = f"[{values[0].unit}]" if values[0].unit else ""
                cases = [
                    f"{value.value_text()}: {row.limit_text()}"
                    for value, row in zip(values, rows, strict=True)
                ]
                key = values[0].verbatim.partition("=")[0]
                return f"by {name}{unit} ({'; '.join(cases)})", frozenset({key})
    return f"stricter({'; '.join(row.limit_text() for row in rows)})", frozenset()
