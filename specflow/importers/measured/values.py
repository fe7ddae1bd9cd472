"""The value columns of a table: readings, their uncertainty, and the document of each."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass, field, replace

import numpy as np

from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.header_text import known_unit
from specflow.importers.measured.linear_values import doubt_linear
from specflow.importers.measured.readings import Numbers, read_numbers
from specflow.importers.measured.result import Role
from specflow.importers.measured.stated import Said
from specflow.importers.measured.uncertainty import (
    Registered,
    Spread,
    completed,
    from_column,
    from_register,
    from_statement,
)
from specflow.importers.measured.work import TableWork
from specflow.model.columns import Columns, TextColumn
from specflow.model.declared import UncertaintyEntry
from specflow.model.evidence import EvidenceColumns, ValueArrays, ValueColumn
from specflow.units import Kind, format_unit, parse_unit

ONE_FORMAT = "give the whole column one number format, and attach again"


#: Ratios that count how far something lies below something else.
_POSITIVE = frozenset(
    ("return_loss", "insertion_loss", "isolation", "aclr", "acs", "image_rejection", "carrier_rejection",
     "cross_polarisation", "front_to_back_ratio", "side_lobe_suppression")
)  # fmt: skip


@dataclass
class ReadValues:
    """Documents of the value columns, their arrays by name, and what stands beside them row by row."""

    documents: list[ValueColumn] = field(default_factory=list)
    arrays: dict[str, ValueArrays] = field(default_factory=dict)
    extra: dict[str, TextColumn] = field(default_factory=dict)


def read_values(work: TableWork, conditions: Columns) -> ReadValues:
    """Read all value columns."""
    read = ReadValues()
    for meaning in work.of(Role.VALUE):
        numbers = column_numbers(work, meaning)
        spread = _spread(work, meaning, numbers, conditions)
        name = column_name(meaning, read.arrays)
        read.arrays[name] = ValueArrays(numbers.low, numbers.high, spread.u)
        if spread.lines is not None:
            read.extra[f"u of {name} from"] = spread.lines
        read.documents.append(value_document(meaning, name, spread, numbers.notes))
    return read


def column_numbers(work: TableWork, meaning: ColumnMeaning) -> Numbers:
    """Read the numbers of one value column; what number formats or merged cells make doubtful is asked or rejected."""
    numbers = read_numbers(work.table, meaning.column, meaning.spelled, work.rows, work.rejects)
    if numbers.problem:
        work.questions.append(meaning.asks(numbers.problem, ONE_FORMAT))
    _reject_merged(work, meaning.column, numbers)
    _doubt_sign(work, meaning, numbers)
    doubt_linear(work, meaning, numbers)
    work.notes += [f"{meaning.header.line}: {note}" for note in numbers.notes]
    return numbers


def column_name(meaning: ColumnMeaning, taken: Collection[str] = ()) -> str:
    """The name of a column within its table: its header without the unit."""
    whole = meaning.role is Role.STATED_VERDICT  # P/F is no P in farads
    name = meaning.header.text if whole else meaning.parts.name or meaning.header.text
    return name if name not in taken else f"{name} ({meaning.letter})"


def value_document(
    meaning: ColumnMeaning, name: str, spread: Spread, conversions: Sequence[str] = ()
) -> ValueColumn:
    """The document of a value column."""
    assert meaning.quantity is not None  # a value without a quantity is a question, and questions end before
    return ValueColumn(
        name=name,
        quantity=meaning.quantity,
        unit=format_unit(parse_unit(meaning.unit)),
        unit_from=meaning.unit_from,
        column=meaning.column,
        header=meaning.header.text,
        spectrum=meaning.spectrum,
        uncertainty_from=spread.source,
        coverage_factor=spread.k,
        conversions=tuple(conversions),
    )


def _reject_merged(work: TableWork, column: int, numbers: Numbers) -> None:
    for area in work.table.grid.merged:
        if not area.first_column <= column <= area.last_column:
            continue
        inside = (work.rows >= area.first_row) & (work.rows <= area.last_row) & ~np.isnan(numbers.low)
        for place in np.flatnonzero(inside).tolist():
            reason = f"merged cells {area}: it does not say for which of them the value is"
            work.rejects.add(int(work.rows[place]), column, float(numbers.low[place]), reason)
            numbers.drop(place)


def _doubt_sign(work: TableWork, meaning: ColumnMeaning, numbers: Numbers) -> None:
    """Quantities that are positive by definition and yet often exported with the sign of what they are derived from."""
    known = numbers.low[np.isfinite(numbers.low)]
    if (
        meaning.parameter is not None
        and meaning.parameter.key in _POSITIVE
        and len(known)
        and (known < 0).all()
    ):
        work.notes.append(
            f"{meaning.header.line}: all values are negative, but a {meaning.parameter.title.lower()} is positive; "
            "they were read as written"
        )


def _spread(work: TableWork, value: ColumnMeaning, numbers: Numbers, conditions: Columns) -> Spread:
    """The uncertainty of one column: its own, else what is stated, else the register of the project."""
    ends = np.where(np.isfinite(numbers.low), numbers.low, numbers.high)
    level = np.where(np.isfinite(ends), ends, np.nan)
    own = [one for one in work.of(Role.UNCERTAINTY) if one.of == value.header.cell]
    stated = None if own else _stated_uncertainty(work, value)
    if own:
        spread = from_column(work.table, own[0], value, level, work.rows, work.rejects)
    elif stated is not None:
        spread = from_statement(stated, value, level)
    else:
        spread = Spread()
    set_up = work.stated.text("set_up")
    register = from_register(
        work.context.snapshot.all(UncertaintyEntry), set_up, _registered(value), level, conditions
    )
    spread = completed(spread, register) if own or stated is not None else register
    if spread.question:
        work.questions.append(spread.question)
    work.notes += [f"{value.header.text}: {note}" for note in spread.notes]
    return spread


def _registered(value: ColumnMeaning) -> Registered:
    parameter, quantity = value.parameter, value.quantity
    return Registered(
        quantity.parameter if quantity else "",
        value.unit,
        None if parameter is None else parameter.log_factor,
    )


def with_register(
    work: TableWork, columns: EvidenceColumns, values: Sequence[ValueColumn]
) -> tuple[EvidenceColumns, list[ValueColumn]]:
    """Give stacked columns, which bring no uncertainty of their own, that of the register."""
    documents = []
    for value in values:
        arrays = columns.values[value.name]
        parameter = work.context.dictionary.get(value.quantity.parameter)
        if arrays.u is None and not value.uncertainty_from and parameter is not None:
            asked = Registered(value.quantity.parameter, value.unit, parameter.log_factor)
            ends = np.where(np.isfinite(arrays.low), arrays.low, arrays.high)
            entries = work.context.snapshot.all(UncertaintyEntry)
            spread = from_register(entries, work.stated.text("set_up"), asked, ends, columns.conditions)
            work.notes += [f"{value.header}: {note}" for note in spread.notes]
            changed = {**columns.values, value.name: ValueArrays(arrays.low, arrays.high, spread.u)}
            lines = {} if spread.lines is None else {f"u of {value.name} from": spread.lines}
            columns = replace(columns, values=changed, extra={**columns.extra, **lines})
            value = value.model_copy(update={"uncertainty_from": spread.source})
        documents.append(value)
    return columns, documents


def _stated_uncertainty(work: TableWork, value: ColumnMeaning) -> Said | None:
    """What is stated for this column: by its quantity, else for the table if it can only mean this one."""
    for said in work.stated.uncertainties:
        if _names(said.key, value):
            return said
    said_of_all = work.stated.said.get("uncertainty")
    if said_of_all is None or not _may_be_of(said_of_all, value):
        return None
    alike = [one for one in work.of(Role.VALUE) if _may_be_of(said_of_all, one)]
    if len(alike) > 1:
        what = f"the uncertainty {said_of_all.text!r} is {said_of_all.by}; of which of the {len(alike)} columns is it"
        remedy = 'name the quantity ("Gain uncertainty: 0.4 dB (k=2)"), or give the columns uncertainties of their own'
        work.questions.append(value.asks(what, remedy))
        return None
    return said_of_all


def _names(key: str, value: ColumnMeaning) -> bool:
    parameter = value.parameter
    words = key.casefold().replace("uncertainty", "").replace("_", " ").strip(" :-,")
    if parameter is None:
        return False
    spellings = (parameter.key, parameter.title, *parameter.aliases, value.parts.name)
    return words in {spelling.casefold().replace("_", " ") for spelling in spellings}


def _may_be_of(said: Said, value: ColumnMeaning) -> bool:
    """Whether an uncertainty can be one of these values: dB with dB, else a unit of the same kind or a part of it."""
    written = said.text.split("(")[0].split(",")[0].split(";")[0]
    unit = known_unit(written.lstrip("uU=±+/-− 0123456789.").strip())
    wanted = parse_unit(value.unit)
    if unit is None:
        return True
    if unit.is_log or wanted.is_log:
        return unit.is_log == wanted.is_log
    return unit.kind is Kind.RATIO or unit.dimension == wanted.dimension
