"""Evidence: files received, the tables recorded from them, and what people decided about them.

A table's values are never a document: they are column tables (``EvidenceColumns``), loaded only where they are
judged. The document says what the columns mean and which rows they are.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date
from enum import StrEnum
from typing import Literal

import numpy as np
from numpy.typing import NDArray
from pydantic import Field

from specflow.model.base import Code, Document
from specflow.model.columns import Columns, TextColumn
from specflow.model.correction import AppliedCorrection
from specflow.model.derivation import Covered
from specflow.model.origin import Origin
from specflow.model.parameter import QuantityIdentity
from specflow.model.requirement import Method, Stage
from specflow.model.source_statement import PeakList, StatedColumn


class FileKind(StrEnum):
    """What sort of document the evidence came in."""

    MEASUREMENT = "measurement"
    SIMULATION = "simulation"
    DATASHEET = "datasheet"
    REPORT = "report"
    CERTIFICATE = "certificate"


class EvidenceFile(Document):
    """A file that was received; the id is given by the project, the hash says which bytes it was.

    ``path`` is where it lay, from the folder of the project file, with ``/`` ("" where that says nothing to others);
    ``kept``: the project holds a copy of its bytes.
    """

    id: Code
    name: str
    sha256: str
    size: int
    received_at: str
    received_from: str = ""
    kind: FileKind = FileKind.MEASUREMENT
    document_number: str = ""
    document_revision: str = ""
    issue_date: date | None = None
    authoriser: str = ""
    importer_version: str = ""
    note: str = ""
    path: str = ""
    kept: bool = False
    revision: int = 1


class SpectrumKind(StrEnum):
    """Whether a reading scales with bandwidth."""

    NOISE_LIKE = "noise-like"
    DISCRETE = "discrete"
    UNKNOWN = "unknown"


class ValueColumn(Document):
    """A column of values of one quantity.

    ``unit`` is the unit as recorded (values are kept as written); ``unit_from`` says where it was found.
    ``uncertainty_from`` says where u came from: column, register line, mapping, or "" when there is none.
    ``lines_below`` is how many lines below the first of its row the value stands, in files whose rows take several.
    """

    name: str
    quantity: QuantityIdentity
    unit: str
    unit_from: str
    column: int
    header: str = ""
    spectrum: SpectrumKind = SpectrumKind.UNKNOWN
    uncertainty_from: str = ""
    coverage_factor: float | None = None
    conversions: tuple[str, ...] = ()
    lines_below: int = 0


class ConditionColumn(Document):
    """A column (or a value stated once for the whole table) of one condition dimension."""

    dimension: str
    kind: Literal["numeric", "text"]
    unit: str = ""
    column: int | None = None
    header: str = ""
    stated_by: str = "column"
    unit_from: str = ""


class HowRead(Document):
    """All that is needed to read a table again as it was read, beside its file and its mapping.

    ``importer`` is the version of what read it; ``layout`` the key of its layout and ``place`` its cells ("A5:D17");
    ``stated`` is what the person said for the whole file (name, value).
    """

    importer: str = ""
    layout: str = ""
    place: str = ""
    stated: tuple[tuple[str, str], ...] = ()
    include_hidden_rows: bool = False


class EvidenceTable(Document):
    """One recorded table of one source file, or one derived from such tables.

    A derived table (``derivation``) keeps the file of its input, its rows point to the raw rows that govern, and
    ``covers`` says over which ranges its values were taken. ``turned``: the table lies on its side in its sheet, so
    that ``source_rows`` count columns of the sheet and ``ValueColumn.column`` its rows (``cell`` gives the true place).
    ``stated`` are columns of limits and verdicts of the source; ``peaks`` says that the table is a list of peaks.
    """

    id: Code
    file: Code
    sheet: str = ""
    turned: bool = False
    title: str = ""
    block: Code
    requirement: Code | None = None
    method: Method = Method.TEST
    stage: Stage = Stage.QUALIFICATION
    rows: int
    values: tuple[ValueColumn, ...]
    conditions: tuple[ConditionColumn, ...] = ()
    table_key: str = ""
    digest: str = ""
    mapping: Code | None = None
    mapping_revision: int | None = None
    set_up: str = ""
    performer: str = ""
    procedure: str = ""
    procedure_revision: str = ""
    performed_on: date | None = None
    equipment: tuple[Equipment, ...] = ()
    corrections: tuple[str, ...] = ()
    applied: tuple[AppliedCorrection, ...] = ()
    simulation_model: str = ""
    simulation_version: str = ""
    simulation_validated: str = ""
    hardware_note: str = ""
    accepted_by: str = ""
    accepted_at: str = ""
    provisional: bool = False
    left_out: tuple[LeftOut, ...] = ()
    how_read: HowRead = Field(default_factory=HowRead)
    derivation: Code | None = None
    covers: tuple[Covered, ...] = ()
    stated: tuple[StatedColumn, ...] = ()
    peaks: PeakList | None = None
    revision: int = 1

    def cell(self, row: int, column: int) -> tuple[int, int]:
        """Row and column in the sheet of the cell that stands at (source row, value column) of the table."""
        return (column, row) if self.turned else (row, column)


class Equipment(Document):
    """An instrument used, with the date its calibration runs out."""

    asset: str
    calibration_due: date | None = None


class LeftOut(Document):
    """A cell that was rejected at import and left out with the person's consent; it stays as a finding."""

    sheet: str = ""
    cell: str
    text: str
    reason: str


class TableMapping(Document):
    """How the columns of one layout are to be read; recognised again by the shape of the layout."""

    id: Code
    revision: int = 1
    layout_key: str
    title: str = ""
    toml: str
    origin: Origin | None = None


class Supersession(Document):
    """A correction or a retest: rows of one table that replace rows of another.

    ``rows`` are the positions in the earlier table (None: all of it). ``names_fail`` holds the discrepancy report and
    its disposition when failing rows are replaced; without it the fail stays open.
    """

    id: Code
    earlier: Code
    later: Code
    rows: tuple[int, ...] | None = None
    names_fail: str = ""
    reason: str = ""
    by: str = ""
    at: str = ""
    revision: int = 1


class Withdrawal(Document):
    """A record or table found wrong; it stays visible with the reason."""

    id: Code
    table: Code
    rows: tuple[int, ...] | None = None
    reason: str
    by: str = ""
    at: str = ""
    revision: int = 1


class ItemChange(Document):
    """A change record of a block or an item: evidence of the named parameters before it is stale.

    Empty ``parameters`` names every quantity. ``aspect`` says what changed (hardware, firmware, procedure, model,
    calibration, declaration).
    """

    id: Code
    block: Code
    item: Code | None = None
    aspect: Literal["hardware", "firmware", "procedure", "model", "calibration", "declaration"] = "hardware"
    parameters: tuple[str, ...] = ()
    effective: date
    description: str
    by: str = ""
    revision: int = 1
    origin: Origin | None = None


#: The extra column of stacked tables: the letter of the column that a value stands in.
SOURCE_COLUMN = "source column"
#: The extra column of derived tables: where along its axis a result lies ("18.3 GHz").
AT_COLUMN = "at"


def as_read_column(name: str) -> str:
    """Return the extra column that keeps the readings of a value column as they were before a correction."""
    return f"{name} as read"


@dataclass(frozen=True, slots=True)
class ValueArrays:
    """Values of one column: a reading is the interval [low, high] (the same array when all are points).

    ``low``, ``high``: float64 (n,), NaN where the cell is empty, ±inf at open ends, in the unit as recorded.
    ``u``: standard uncertainty in the tolerance unit, float64 (n,) with NaN where none is known, or None.
    """

    low: NDArray[np.float64]
    high: NDArray[np.float64]
    u: NDArray[np.float64] | None = None


@dataclass(frozen=True, slots=True)
class EvidenceColumns:
    """The arrays of one evidence table; all have the table's number of rows.

    ``source_rows`` int32: row numbers in the sheet; ``items``: item ids or serials as recorded;
    ``dates``: ISO dates per row where a column gives them; ``extra``: what else stands beside a row, as words (limits
    and verdicts of the source, remarks; ``SOURCE_COLUMN`` where values of several columns were stacked).
    """

    conditions: Columns
    values: Mapping[str, ValueArrays]
    source_rows: NDArray[np.int32]
    items: TextColumn
    dates: TextColumn | None = None
    extra: Mapping[str, TextColumn] = field(default_factory=dict)
