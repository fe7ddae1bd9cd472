"""What reading a measurement file gives: tables, how each column was understood, what is rejected or asked."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum

from specflow.importers.measured.derivation_plan import DerivationPlan
from specflow.importers.measured.mapping_parts import DeriveMapping
from specflow.model.evidence import EvidenceColumns, EvidenceFile, EvidenceTable, LeftOut
from specflow.model.finding import Finding


class Role(StrEnum):
    """What a column of a measurement table is."""

    VALUE = "value"
    CONDITION = "condition"
    ITEM = "item"
    UNCERTAINTY = "uncertainty"
    DATE = "date"
    REQUIREMENT = "requirement"
    BANDWIDTH = "bandwidth"
    SPECTRUM = "spectrum kind"
    STATED_LIMIT = "stated limit"
    STATED_VERDICT = "stated verdict"
    INDEX = "index"
    REMARK = "remark"
    STATED = "stated"
    NOT_READ = "not read"
    PIVOT = "pivot"
    UNRESOLVED = "unresolved"


@dataclass(frozen=True, slots=True)
class Question:
    """Something that only a person can settle; a table with one gives no evidence until it is settled."""

    header: str
    cell: str
    what: str
    remedy: str


@dataclass(frozen=True, slots=True)
class ColumnReading:
    """How one column, or one fact stated for the whole table, was understood, and why."""

    header: str
    cell: str
    role: Role
    meaning: str
    reason: str


@dataclass(frozen=True, slots=True)
class MeasuredTable:
    """One table of a file.

    ``document`` and ``columns`` are None while there are questions, or when no row is left. ``rejected`` are cells that
    hold something which cannot be evidence; long runs of one reason are one entry, ``rejected_cells`` counts the cells.
    ``blank`` counts cells without a result, by reason. ``notes`` tell what was done on the way; ``unused``
    are the settings beside the table from which nothing was taken ("B1: Type = XSA-7"); ``findings`` doubt
    readings that were taken as they stand. ``mapping`` is the
    TOML of the mapping that was used, ``mapping_from`` says where it came from ("" when none was needed). ``plans`` are
    laws to be applied to it once it is stored, ``asked`` those that its mapping asks for.
    """

    sheet: str
    place: str
    title: str
    layout_key: str
    rows: int
    values: int
    recognised: tuple[ColumnReading, ...] = ()
    questions: tuple[Question, ...] = ()
    rejected: tuple[LeftOut, ...] = ()
    rejected_cells: int = 0
    blank: Mapping[str, int] = field(default_factory=dict)
    notes: tuple[str, ...] = ()
    unused: tuple[str, ...] = ()
    findings: tuple[Finding, ...] = ()
    mapping: str = ""
    mapping_from: str = ""
    document: EvidenceTable | None = None
    columns: EvidenceColumns | None = None
    plans: tuple[DerivationPlan, ...] = ()
    asked: tuple[DeriveMapping, ...] = ()


@dataclass(frozen=True, slots=True)
class Measurements:
    """A file as read: its document (with a provisional id), its tables, what was skipped and why.

    ``proposal`` is a mapping as TOML with the reason of every column, for a person to edit.
    """

    file: EvidenceFile
    tables: tuple[MeasuredTable, ...]
    findings: tuple[Finding, ...] = ()
    skipped: tuple[str, ...] = ()
    proposal: str = ""
