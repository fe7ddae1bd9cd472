"""Columns that say the same in every row: they speak of the whole table (set-up, procedure, resolution bandwidth)."""

from __future__ import annotations

from dataclasses import dataclass

from specflow.importers.measured.header_text import read_header
from specflow.importers.measured.mapping import LayoutMapping
from specflow.importers.measured.names import name_of
from specflow.importers.measured.rejects import cell_text
from specflow.importers.measured.result import Role
from specflow.importers.measured.roles import role_of_words, uncertainty_of
from specflow.importers.measured.spectrum_words import bandwidth_in, heads_kinds, speaks_of_kinds
from specflow.importers.measured.stated import Said, Stated
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import is_blank, looks_numeric

_OF_THE_TABLE = frozenset(
    [
        "block",
        "method",
        "stage",
        "set_up",
        "performer",
        "operator",
        "procedure",
        "procedure_revision",
        "model",
        "model_version",
        "bandwidth",
        "spectrum",
        "plane",
        "statistic",
        "hardware",
    ]
)
_MAY_VARY = frozenset(("performer", "operator", "hardware"))


def mapping_settles(mapping: LayoutMapping, header: str, letter: str) -> bool:
    """Whether a mapping says what a column is."""
    mapped = mapping.column(header, letter)
    return mapped is not None and bool(mapped.role or mapped.parameter or mapped.dimension)


def _are_bandwidths(role: Role, words: set[str], unit: str) -> bool:
    return (
        role is Role.BANDWIDTH and bool(words) and all(bandwidth_in(word, unit) is not None for word in words)
    )


@dataclass(frozen=True, slots=True)
class ConstantColumn:
    """A column that speaks of the whole table; ``problem`` when its rows disagree."""

    role: Role
    reason: str
    problem: str = ""


def read_constants(table: FoundTable, mapping: LayoutMapping, stated: Stated) -> dict[int, ConstantColumn]:
    """Find such columns by their headers and add what they say to ``stated``, unless somebody said it already."""
    found: dict[int, ConstantColumn] = {}
    for header in table.headers:
        parts = read_header(header.text)
        name = name_of(parts.name)
        if name not in _OF_THE_TABLE and not heads_kinds(parts.name):
            continue  # the cells of other columns are not looked at one by one
        cells = table.cells(header.column).at(table.rows)
        if speaks_of_kinds(parts.name, cells) and not mapping_settles(mapping, header.text, header.letter):
            found[header.column] = ConstantColumn(Role.SPECTRUM, "it says line or noise of each row")
            continue
        if name not in _OF_THE_TABLE or role_of_words(parts) or uncertainty_of(parts):
            continue
        if mapping_settles(mapping, header.text, header.letter):
            continue
        words = {cell_text(value).strip() for value in cells if not is_blank(value)}
        role = Role.BANDWIDTH if name == "bandwidth" else Role.REMARK
        gaps = role is Role.BANDWIDTH and any(map(is_blank, cells))
        if len(words) > 1 and name in _MAY_VARY:
            found[header.column] = ConstantColumn(role, f"the {name} of each row; kept as a remark")
        elif (len(words) > 1 or gaps) and _are_bandwidths(role, words, parts.unit or header.unit):
            found[header.column] = ConstantColumn(role, "the bandwidth of each row")
        elif len(words) > 1:
            problem = f"says more than one {name.replace('_', ' ')}: {', '.join(sorted(words)[:4])}"
            found[header.column] = ConstantColumn(role, "", problem)
        elif words:
            text = words.pop()
            unit = parts.unit or header.unit
            text = f"{text} {unit}" if unit and looks_numeric(text) else text
            stated.said.setdefault(name, Said(text, f"stated in {header.line}", parts.name))
            found[header.column] = ConstantColumn(role, f"the {name.replace('_', ' ')} of the table: {text}")
    return found
