"""A mapping as we would write it: every column with its role and the reason, for a person to edit."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.layout import sheet_pattern
from specflow.importers.measured.mapping import FORMAT, ColumnMapping, LayoutMapping, write_mapping
from specflow.importers.measured.result import Role
from specflow.importers.measured.tables import FoundTable
from specflow.model.evidence import SpectrumKind

HEAD = f"""# A mapping of measurement tables: how the columns of each layout are to be read.
# A layout is recognised by its headers, their units and their order, not by the name of the file.
# role: value, condition, item, uncertainty, date, requirement, stated limit, stated verdict, index, remark, not read
# value:       parameter, unit; plane, statistic, polarisation, bandwidth = "1 MHz",
#              spectrum = "noise-like" or "discrete"; scale = 20 where a reading times 20 is in the unit
# condition:   dimension, unit; fill_down = true where a blank cell means the one above
# uncertainty: unit, k = 2 (1: a standard uncertainty), of = "header of the values"
# table:       block, method, stage; [table.stated] for conditions that hold for all rows; header_rows = 2;
#              include_hidden_rows, keep_summary_rows, keep_placeholders, skip = true
# derive:      [[table.derive]] law = "ripple", over = "frequency 17.7..20.2 GHz step 0.1 GHz", requirement = "R-1"
#              (specflow derive lists the laws; values, where, settings, gives, plane, statistic)
# pivot:       [table.pivot] header = "Gain @ {{frequency}} GHz", parameter, unit, units = {{ frequency = "GHz" }}
format = {FORMAT}
"""


@dataclass(frozen=True, slots=True)
class Proposal:
    """One table as it was understood."""

    table: FoundTable
    key: str
    mapping: LayoutMapping
    meanings: Sequence[ColumnMeaning]
    title: str


def propose(proposals: Sequence[Proposal]) -> str:
    """Return the TOML for the tables of a file."""
    parts = [HEAD]
    for one in proposals:
        columns = tuple(
            _entry(meaning, one.mapping) for meaning in one.meanings if meaning.role is not Role.PIVOT
        )
        reasons = {f"{meaning.letter}:{meaning.header.text}": _reason(meaning) for meaning in one.meanings}
        mapping = replace(
            one.mapping,
            layout=one.key,
            title=one.mapping.title or one.title,
            sheet=sheet_pattern(one.table),
            columns=columns,
        )
        parts.append(write_mapping(mapping, reasons))
    return "\n".join(parts)


def _reason(meaning: ColumnMeaning) -> str:
    if meaning.question is None:
        return f"{meaning.header.cell}: {meaning.words()}; {meaning.reason}"
    return f"{meaning.header.cell}: TO SETTLE. {meaning.question.what}\n{meaning.question.remedy}"


def _entry(meaning: ColumnMeaning, mapping: LayoutMapping) -> ColumnMapping:
    letter = meaning.letter
    unit = (
        "" if meaning.by_row or meaning.by_cell else meaning.unit
    )  # one unit for all would override those beside
    used = mapping.column(meaning.header.text, letter)
    if used is not None:
        return used
    entry = ColumnMapping(
        header=meaning.header.text, column=letter, scale=None if meaning.scale == 1 else meaning.scale
    )
    if meaning.of_file:
        return entry
    if meaning.role is Role.VALUE and meaning.quantity is not None:
        quantity = meaning.quantity
        return replace(
            entry, role="value", parameter=quantity.parameter, unit=unit, plane=quantity.plane,
            statistic=quantity.statistic, polarisation=quantity.polarisation,
            spectrum="" if meaning.spectrum is SpectrumKind.UNKNOWN else meaning.spectrum.value,
        )  # fmt: skip
    if meaning.role is Role.CONDITION:
        return replace(entry, role="condition", dimension=meaning.dimension, unit=unit)
    if meaning.role is Role.UNCERTAINTY:
        return replace(entry, role="uncertainty", unit=unit, k=meaning.k)
    if meaning.role is Role.BANDWIDTH:
        return replace(entry, role="remark")
    if meaning.role is Role.UNRESOLVED:
        return entry
    return replace(entry, role=meaning.role.value)
