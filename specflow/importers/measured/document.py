"""The document of an evidence table, its key and its digest."""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray
from pydantic import ValidationError

from specflow.exchange import digest
from specflow.importers.measured.correction_doubts import note_earlier
from specflow.importers.measured.rejects import cell_text
from specflow.importers.measured.result import Role
from specflow.importers.measured.source_says import stated_columns
from specflow.importers.measured.work import TableWork
from specflow.model.block import Block
from specflow.model.correction import AppliedCorrection, Correction
from specflow.model.evidence import ConditionColumn, EvidenceColumns, EvidenceTable, ValueColumn
from specflow.model.requirement import Method, Requirement, Stage
from specflow.model.source_statement import PeakList

PROVISIONAL_TABLE, PROVISIONAL_FILE = "EV-0", "F-0"

_NOT_CONTENT = {"id", "file", "digest", "mapping", "mapping_revision", "accepted_by", "accepted_at", "provisional",
                "revision", "left_out", "title", "sheet", "turned", "how_read", "derivation", "covers"}  # fmt: skip


#: Content only where a table has it, so that tables without it keep their digests.
_WHERE_SAID = {"stated", "peaks", "applied"}


@dataclass(frozen=True, slots=True)
class Identity:
    """What a table is of, and where it stands."""

    block: Block
    method: Method
    stage: Stage
    layout_key: str
    title: str
    sheet: str


@dataclass(frozen=True, slots=True)
class Said:
    """What a table is beyond its columns: a list of peaks, and corrected by what; ``corrections`` in words."""

    peaks: PeakList | None = None
    applied: Sequence[AppliedCorrection] = ()
    corrections: Sequence[str] = ()


def make_document(
    work: TableWork,
    identity: Identity,
    values: Sequence[ValueColumn],
    conditions: Sequence[ConditionColumn],
    columns: EvidenceColumns,
    said: Said | None = None,
) -> EvidenceTable | None:
    """Return the document of a table with provisional ids; None, and a question, when something stated does not fit."""
    stated = work.stated
    if said is None:
        said = _uncorrected(work)
    try:
        document = EvidenceTable(
            id=PROVISIONAL_TABLE,
            file=PROVISIONAL_FILE,
            sheet=identity.sheet,
            turned=work.table.grid.turned,
            title=identity.title[:200],
            block=identity.block.id,
            requirement=_requirement(work),
            method=identity.method,
            stage=identity.stage,
            rows=columns.conditions.size,
            values=tuple(values),
            conditions=tuple(conditions),
            table_key=_table_key(work, identity),
            set_up=stated.text("set_up"),
            performer=stated.text("performer") or stated.text("operator"),
            procedure=stated.text("procedure"),
            procedure_revision=stated.text("procedure_revision"),
            performed_on=stated.day("date"),
            equipment=tuple(stated.equipment),
            corrections=tuple(said.corrections),
            applied=tuple(said.applied),
            simulation_model=stated.text("model"),
            simulation_version=stated.text("model_version"),
            simulation_validated=stated.text("validated"),
            hardware_note=stated.text("hardware"),
            left_out=work.rejects.left_out(),
            stated=stated_columns(work),
            peaks=said.peaks,
        )
    except ValidationError as error:
        fault = error.errors()[0]
        what = f"{'.'.join(map(str, fault['loc']))}: {fault['msg']}"
        work.ask("", "", what, "correct what is stated for the table")
        return None
    note_earlier(work, document)
    return document.model_copy(update={"digest": content_digest(document, columns)})


def _uncorrected(work: TableWork) -> Said:
    """A table whose readings take no correction (S-parameters): one that is named is not passed over in silence."""
    text = work.stated.text("corrections")
    if text and work.context.snapshot.find(Correction, text.split(",")[0].strip()) is not None:
        what = f"the correction {text} is not added to a matrix of S-parameters"
        work.ask(
            "correction", "", what, "de-embed it at the instrument, or derive the quantity and correct that"
        )
    return Said(corrections=tuple(filter(None, [text])))


def content_digest(table: EvidenceTable, columns: EvidenceColumns) -> str:
    """Return the digest of what a table says: values, uncertainties, conditions, items, and what they mean."""
    told = table.model_dump(mode="json", exclude=_NOT_CONTENT)
    told = {name: value for name, value in told.items() if value or name not in _WHERE_SAID}
    words = [text for _, text in sorted(columns.conditions.text.items())]
    told["labels"] = [columns.items.labels, *(text.labels for text in words)]
    beside = [columns.extra[one.name] for one in table.stated if one.name in columns.extra]
    if beside:
        words += beside
        told["stated words"] = [text.labels for text in beside]
    if columns.dates is not None:
        words.append(columns.dates)
        told["dates"] = columns.dates.labels
    arrays: list[NDArray[Any]] = [columns.source_rows, columns.items.codes, *(text.codes for text in words)]
    arrays += [array for _, array in sorted(columns.conditions.numeric.items())]
    for _, value in sorted(columns.values.items()):
        arrays += [value.low, value.high] + ([] if value.u is None else [value.u])
    sums = hashlib.sha256(digest(told).encode())
    for array in arrays:
        sums.update(np.ascontiguousarray(array).data)
    return sums.hexdigest()


def _table_key(work: TableWork, identity: Identity) -> str:
    """What says that a later table is the same one again: layout, sheet, block, and who measured it on which set-up."""
    parts = [identity.sheet, identity.block.id, work.stated.text("set_up"), work.stated.text("performer")]
    parts += [work.table.part] if work.table.part else []
    return "T-" + digest([identity.layout_key, *(part.casefold() for part in parts)])[:16]


def _requirement(work: TableWork) -> str | None:
    """The requirement that the table names, by statement or in a column that says the same in all rows."""
    text = work.stated.text("requirement")
    columns = work.of(Role.REQUIREMENT)
    if not text and columns:
        words = {cell_text(value).strip() for value in work.table.cells(columns[0].column).at(work.rows)} - {
            ""
        }
        text = words.pop() if len(words) == 1 else ""
    if not text:
        return None
    requirement = work.context.snapshot.find(Requirement, text)
    if requirement is None:
        work.notes.append(f"the requirement {text!r} is not known; the values are matched without it")
        return None
    keys = {meaning.quantity.parameter for meaning in work.of(Role.VALUE) if meaning.quantity}
    if keys and requirement.quantity.parameter not in keys:
        work.notes.append(
            f"{requirement.id} is on {requirement.quantity.parameter}, the table has {', '.join(sorted(keys))}"
        )
    return requirement.id
