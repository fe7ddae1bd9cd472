"""How a stored table came to be: its bytes, the mapping and importer that read it, its columns and units."""

from __future__ import annotations

from collections.abc import Container, Iterator

import numpy as np

from specflow.model.base import code_key
from specflow.model.card import TrailStep
from specflow.model.columns import Columns
from specflow.model.evidence import ConditionColumn, EvidenceFile, EvidenceTable, ValueColumn
from specflow.model.origin import Origin, column_letters
from specflow.model.snapshot import Snapshot


def file_step(table: EvidenceTable, snapshot: Snapshot) -> TrailStep:
    """Return the file of a table with the hash that says which bytes it was."""
    file = snapshot.find(EvidenceFile, table.file)
    name = file.name if file else table.file
    sha256 = file.sha256 if file else ""
    return TrailStep(
        depth=-1,
        kind="file",
        id=table.file,
        text=f"{name}, SHA-256 {sha256}" if sha256 else name,
        origin=Origin(file=name, sha256=sha256, sheet=table.sheet),
    )


def received_step(table: EvidenceTable, snapshot: Snapshot) -> TrailStep | None:
    """Return when and from where the file came, and whether the project keeps a copy; None without its document."""
    file = snapshot.find(EvidenceFile, table.file)
    if file is None:
        return None
    facts = [f"{file.size} bytes", f"received {file.received_at}" if file.received_at else ""]
    facts += [f"from {file.received_from}" if file.received_from else ""]
    facts += [
        f"lay at {file.path}" if file.path else "",
        "a copy is kept" if file.kept else "no copy is kept",
    ]
    return TrailStep(depth=-1, kind="received", id=file.id, text=", ".join(filter(None, facts)))


def reading_steps(table: EvidenceTable, snapshot: Snapshot, depth: int) -> Iterator[TrailStep]:
    """Give how a table came to be: who measured with what, and by which importer and mapping it was read from where."""
    yield TrailStep(depth=depth, kind="measured by", id=table.id, text=_circumstances(table))
    file = snapshot.find(EvidenceFile, table.file)
    how = table.how_read
    importer = how.importer or (file.importer_version if file else "")
    by_mapping = (
        f"mapping {table.mapping} revision {table.mapping_revision}" if table.mapping else "no mapping"
    )
    facts = [f"importer {importer or 'not recorded'}", by_mapping]
    facts += [f"layout {how.layout}" if how.layout else "", f"cells {how.place}" if how.place else ""]
    facts += ["hidden rows read, too"] if how.include_hidden_rows else []
    facts += [f"stated by the person: {name} = {said}" for name, said in how.stated]
    facts += [f"correction: {one}" for one in table.corrections]
    yield TrailStep(depth=depth, kind="read by", id=table.id, text=", ".join(filter(None, facts)))


def column_steps(
    table: EvidenceTable, snapshot: Snapshot, depth: int, *, parameters: Container[str] | None = None
) -> Iterator[TrailStep]:
    """Give the columns: of each what it means, where its unit was found, what was converted, where u is from.

    Of the value columns only those of ``parameters`` (keys), if they are given. A condition that was stated for all
    rows stands with its value, which is in no column of the file.
    """
    is_stated = any(condition.column is None for condition in table.conditions)
    loaded = snapshot.load_columns([table.id]).get(table.id) if is_stated else None
    for condition in table.conditions:
        stands = _stands(condition, loaded.conditions) if loaded and condition.column is None else ""
        yield TrailStep(depth=depth, kind="condition", id=table.id, text=_condition_words(condition, stands))
    for column in table.values:
        if parameters is not None and code_key(column.quantity.parameter) not in parameters:
            continue
        yield TrailStep(depth=depth, kind="column", id=table.id, text=_column_words(column))


def _stands(condition: ConditionColumn, columns: Columns) -> str:
    """The one value of a condition over all rows, "" where it has several or none."""
    if condition.dimension in columns.text:
        words = {columns.text[condition.dimension].word(row) for row in range(columns.size)}
        return words.pop() if len(words) == 1 else ""
    values = np.unique(columns.numeric.get(condition.dimension, np.zeros(0)))
    return f"{values[0]:.10g} {condition.unit}".rstrip() if len(values) == 1 else ""


def _condition_words(condition: ConditionColumn, stands: str) -> str:
    name = condition.dimension.replace("_", " ")
    what = f"{name} in {condition.unit}" if condition.unit else name
    if condition.column is None:
        return f"{f'{name} {stands}' if stands else what}, {condition.stated_by}"
    source = f" (unit from {condition.unit_from})" if condition.unit_from and condition.unit else ""
    return f"{_place(condition.column, condition.header)}: {what}{source}"


def _column_words(column: ValueColumn) -> str:
    quantity = column.quantity
    identity = [quantity.parameter, f"at {quantity.plane}" if quantity.plane else "", quantity.statistic]
    identity += [quantity.polarisation, f"per {quantity.bandwidth_hz:g} Hz" if quantity.bandwidth_hz else ""]
    what = ", ".join(filter(None, identity))
    parts = [
        f"{_place(column.column, column.header)}: {what} in {column.unit} (unit from {column.unit_from})"
    ]
    parts += column.conversions or ("no conversion",)
    parts += (
        [f"uncertainty from {column.uncertainty_from}"] if column.uncertainty_from else ["no uncertainty"]
    )
    return "; ".join(parts)


def _place(column: int, header: str) -> str:
    """The column by its letter, and by its header where it has one."""
    words = " ".join(header.split())
    return f"column {column_letters(column)}" + (f" ({words})" if words else "")


def _circumstances(table: EvidenceTable) -> str:
    """Who measured when, on which set-up, by which procedure and with what; or with which model it was computed."""
    procedure = f"{table.procedure} {table.procedure_revision}".strip()
    model = f"{table.simulation_model} {table.simulation_version}".strip()
    instruments = [
        one.asset + (f" (calibrated until {one.calibration_due})" if one.calibration_due else "")
        for one in table.equipment
    ]
    facts = [
        f"{table.method.value}, {table.stage.value}",
        f"by {table.performer}" if table.performer else "",
        f"on {table.performed_on}" if table.performed_on else "",
        f"set-up {table.set_up}" if table.set_up else "",
        f"procedure {procedure}" if procedure else "",
        f"with {', '.join(instruments)}" if instruments else "",
        f"model {model}" if model else "",
    ]
    return ", ".join(filter(None, facts))
