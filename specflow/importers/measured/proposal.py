"""A mapping as we would write it: every column with its role and the reason, for a person to edit."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.facts import Fact
from specflow.importers.measured.header_text import header_key
from specflow.importers.measured.layout import sheet_pattern
from specflow.importers.measured.mapping import FORMAT, ColumnMapping, LayoutMapping, write_mapping
from specflow.importers.measured.result import Question, Role
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import looks_numeric
from specflow.model.evidence import SpectrumKind

HEAD = f"""# A mapping of measurement tables: how the columns of each layout are to be read.
# A layout is recognised by its headers, their units and their order, not by the name of the file.
# role: value, condition, item, uncertainty, date, requirement, stated limit, stated verdict, index, remark, not read
# value:       parameter, unit; plane, statistic, polarisation, bandwidth = "1 MHz",
#              spectrum = "noise-like" or "discrete"; scale = 20 where a reading times 20 is in the unit
# condition:   dimension, unit; fill_down = true where a blank cell means the one above (an item, too)
# uncertainty: unit, k = 2 (1: a standard uncertainty), of = "header of the values"
# table:       block, method, stage; [table.stated] for conditions that hold for all rows, frequency = "28 GHz", or
#              taken from the sheet: "cell B3", "cell B3 in GHz", "above"; header_rows = 2; others = "not read";
#              include_hidden_rows, keep_summary_rows, keep_placeholders, skip = true; skip_rows = [12, 13]
#              when = {{ Format = "Phase" }} where it holds only for tables that state this
# place:       sheet, area = "K6:L10" (or "A137:B" to the end), header_rows = 0 where columns go by their letters,
#              turned = true where the headers are in the first column, stop_at = "TOTALS", alone = true where nothing
#              else of the sheet is read
# long:        [table.long] parameter = "Parameter", value = "Value", unit = "Unit": the quantity is in the rows;
#              parameters = {{ "Gain at boresight" = "antenna_gain" }}, only = ["..."]
# matrix:      [table.matrix] parameter, unit, rows = {{ dimension = "theta", start = 0, step = 1, unit = "deg" }},
#              columns = {{ dimension = "phi", ... }}: numbers without headers, with area and header_rows = 0
# derive:      [[table.derive]] law = "ripple", over = "frequency 17.7..20.2 GHz step 0.1 GHz", requirement = "R-1"
#              (specflow derive lists the laws; values, where, settings, gives, plane, statistic)
# pivot:       [table.pivot] header = "Gain @ {{frequency}} GHz", parameter, unit, units = {{ frequency = "GHz" }},
#              columns = "C:J"; over = "Gain (dB)", the words over the columns it is meant for; several as
#              [[table.pivot]]
format = {FORMAT}
"""


#: Where a unit stands that is no part of the layout: the next file of it may have another there.
_OF_THIS_FILE = ("stated in ", "the number format ", "the text of the cells")


@dataclass(frozen=True, slots=True)
class Proposal:
    """One table as it was understood: its layout, the mapping it was read by, what it was parted into, what was said.

    ``parts`` are the meanings of its columns, for each part; ``facts`` what stands above it; ``read_as`` the mapping
    that each part was read by; ``doubts`` are the questions how it lies.
    """

    table: FoundTable
    key: str
    mapping: LayoutMapping
    parts: Sequence[Sequence[ColumnMeaning]]
    read_as: Sequence[LayoutMapping]
    facts: Sequence[Fact]
    doubts: Sequence[Question] = ()


def propose(proposals: Sequence[Proposal]) -> str:
    """Return the TOML for the tables of a file; tables of one layout that are read alike make one entry."""
    entries = [HEAD]
    by_key: dict[str, list[Proposal]] = defaultdict(list)
    for one in proposals:
        by_key[one.key].append(one)
    for alike in by_key.values():
        columns = [_columns(one, len(alike) > 1) for one in alike]
        if all(own == columns[0] for own in columns):
            entries.append(_written(alike[0], columns[0], {}))
            continue
        whens = telling_facts([one.facts for one in alike])
        agreed = [entry for entry in columns[0] if all(entry in own for own in columns)]
        for one, own, when in zip(alike, columns, whens, strict=True):
            entries.append(_written(one, own if when else agreed, when))
    return "\n".join(entries)


def telling_facts(facts: Sequence[Sequence[Fact]]) -> list[dict[str, str]]:
    """For each table the fact that tells it apart: one key that all state, each with another value; {} without one."""
    told = [{fact.key: fact.value for fact in own} for own in facts]
    for key in sorted(told[0], key=lambda key: (looks_numeric(told[0][key]), key)):
        values = [own.get(key, "") for own in told]
        if all(values) and len({value.casefold() for value in values}) == len(values):
            return [{key: value} for value in values]
    return [{} for _ in facts]


def _columns(one: Proposal, is_shared: bool) -> list[ColumnMapping]:
    """The entries of all parts, each column once; without letters where several tables of the file have this layout."""
    entries: dict[tuple[str, str], ColumnMapping] = {}
    asked = {doubt.cell for doubt in one.doubts}
    for meanings in one.parts:
        for meaning in meanings:
            if meaning.role is not Role.PIVOT:
                entry = _entry(meaning, one.mapping)
                if meaning.header.cell in asked:
                    entry = ColumnMapping(
                        header=entry.header, column=entry.column
                    )  # the person has to answer
                entries.setdefault((meaning.header.text, meaning.letter), entry)
    texts = [header_key(text) for text, _ in entries]
    if not is_shared or len(set(texts)) < len(texts):
        return list(entries.values())
    return [replace(entry, column="") if entry.header else entry for entry in entries.values()]


def _written(one: Proposal, columns: Sequence[ColumnMapping], when: Mapping[str, str]) -> str:
    reasons: dict[str, str] = {}
    for meaning in (meaning for meanings in one.parts for meaning in meanings):
        for column in (meaning.letter, ""):
            reasons.setdefault(f"{column}:{meaning.header.text}", _reason(meaning))
    pivots = one.mapping.pivots
    if not pivots and one.mapping.matrix is None:
        found = [pivot for read_as in one.read_as for pivot in read_as.pivots]
        pivots = tuple(pivot for place, pivot in enumerate(found) if pivot not in found[:place])
    mapping = replace(
        one.mapping,
        layout=one.key,
        sheet=sheet_pattern(one.table),
        columns=tuple(columns),
        pivots=pivots,
        long=one.mapping.long or one.table.long,
        when=one.mapping.when or when,
    )
    settle = [f"# TO SETTLE. {doubt.what}\n# {doubt.remedy}\n" for doubt in dict.fromkeys(one.doubts)]
    return "".join(settle) + write_mapping(mapping, reasons)


def _reason(meaning: ColumnMeaning) -> str:
    if meaning.question is None:
        return f"{meaning.header.cell}: {meaning.words()}; {meaning.reason}"
    return f"{meaning.header.cell}: TO SETTLE. {meaning.question.what}\n{meaning.question.remedy}"


def _entry(meaning: ColumnMeaning, mapping: LayoutMapping) -> ColumnMapping:
    letter = meaning.letter
    beside = meaning.by_row or meaning.by_cell or meaning.header.unit_from
    beside = beside or meaning.unit_from.startswith(_OF_THIS_FILE)
    unit = (
        "" if beside else meaning.unit
    )  # one unit for all would override those beside, or those of the next file
    used = mapping.column(meaning.header.text, letter)
    if used is not None:
        return used
    entry = ColumnMapping(
        header=meaning.header.text, column=letter, scale=None if meaning.scale == 1 else meaning.scale
    )
    if meaning.of_file:
        return entry
    if meaning.role is Role.VALUE and meaning.quantity is not None:
        quantity, is_unknown = meaning.quantity, meaning.spectrum is SpectrumKind.UNKNOWN
        return replace(
            entry, role="value", parameter=quantity.parameter, unit=unit, polarisation=quantity.polarisation,
            plane="" if "plane" in meaning.said_above else quantity.plane,
            statistic="" if "statistic" in meaning.said_above else quantity.statistic,
            spectrum="" if is_unknown or "spectrum" in meaning.said_above else meaning.spectrum.value,
        )  # fmt: skip
    if meaning.role is Role.CONDITION:
        return replace(entry, role="condition", dimension=meaning.dimension, unit=unit)
    if meaning.role is Role.UNCERTAINTY:
        return replace(entry, role="uncertainty", unit=unit, k=meaning.k)
    if meaning.role is Role.BANDWIDTH:  # what it says is read from each file
        return entry
    if meaning.role is Role.UNRESOLVED:
        return entry
    return replace(entry, role=meaning.role.value)
