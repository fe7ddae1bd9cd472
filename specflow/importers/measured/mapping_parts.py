"""What a mapping may say of a table: of its columns, of its place, of its shape. Words only, nothing is read here.

``LayoutMapping`` is one ``[[table]]`` of a mapping file. Where a table stands is ``area``; how it lies there is
``turned``, ``header_rows``, ``[table.long]``, ``[table.matrix]`` and ``[table.pivot]``.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from specflow.importers.measured.header_text import header_key
from specflow.importers.readers import column_number

#: The temperature of headers that do not say whose it is: the person states the location.
UNLOCATED = "temperature"


@dataclass(frozen=True, slots=True)
class ColumnMapping:
    """How one column is read. Empty means: as recognised. ``of`` is the header of the column that an uncertainty is of.

    ``k`` is the coverage factor (1: a standard uncertainty); ``fill_down`` says that a blank cell means the one above;
    a reading times ``scale`` is in ``unit``.
    """

    header: str = ""
    column: str = ""
    role: str = ""
    parameter: str = ""
    plane: str = ""
    statistic: str = ""
    polarisation: str = ""
    unit: str = ""
    bandwidth: str = ""
    spectrum: str = ""
    dimension: str = ""
    of: str = ""
    k: float | None = None
    scale: float | None = None
    fill_down: bool = False

    def is_about(self, text: str, letter: str) -> bool:
        """Whether this entry speaks of the column with this header (and letter, where the entry gives one)."""
        if self.column and self.column.upper() != letter:
            return False
        return not self.header or header_key(self.header) == header_key(text)


@dataclass(frozen=True, slots=True)
class DeriveMapping:
    """A law that is applied to the table once it is read, as ``specflow derive`` takes it.

    ``values`` are value columns by name, or "ROLE=NAME"; ``over`` is the range, ``where`` the rows, ``settings`` those
    of the law. ``gives``, ``plane``, ``statistic`` and ``polarisation`` say of what the result is, or ``requirement``
    does.
    """

    law: str
    values: Sequence[str] = ()
    over: str = ""
    where: Sequence[str] = ()
    settings: Mapping[str, str] = field(default_factory=dict)
    gives: str = ""
    plane: str = ""
    statistic: str = ""
    polarisation: str = ""
    requirement: str = ""


@dataclass(frozen=True, slots=True)
class PivotMapping:
    """Columns that are one quantity at several conditions.

    ``header`` is a pattern like ``{polarisation} @ {frequency} MHz``. The names in braces are dimensions; ``units``
    gives the unit of the numeric ones. ``columns`` ("C:J") says where they stand; without it all that fit are meant.
    ``over`` ("Gain (dB)") are the words over the columns that the pivot is meant for, several parted by "|".
    """

    header: str
    parameter: str
    unit: str
    units: Mapping[str, str] = field(default_factory=dict)
    plane: str = ""
    statistic: str = ""
    polarisation: str = ""
    bandwidth: str = ""
    spectrum: str = ""
    columns: str = ""
    over: str = ""

    def is_about(self, text: str, name: str) -> bool:
        """Whether the column called ``name`` ("C") with this header is one of them."""
        first, _, last = self.columns.upper().partition(":")
        if first and not _place_of(first) <= _place_of(name) <= _place_of(last or first):
            return False
        return self.pattern().fullmatch(" ".join(text.split())) is not None

    def pattern(self) -> re.Pattern[str]:
        """Return the expression that the headers match; blanks do not matter."""
        pieces = []
        for piece in re.split(r"(\{\w+\})", " ".join(self.header.split())):
            if re.fullmatch(r"\{\w+\}", piece):
                pieces.append(f"(?P<{piece[1:-1]}>.+?)")
            else:
                pieces.append(re.escape(piece).replace(r"\ ", r"\s*"))
        return re.compile("".join(pieces), re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class LongMapping:
    """A table with the quantity in the rows: which columns (by header or letter) name it, hold it and give its unit.

    ``parameters`` says what names mean ("Gain at boresight" = "antenna_gain"); with ``only`` the other rows are not
    read.
    """

    parameter: str
    value: str
    unit: str = ""
    parameters: Mapping[str, str] = field(default_factory=dict)
    only: Sequence[str] = ()


@dataclass(frozen=True, slots=True)
class AxisMapping:
    """One axis of a matrix without headers: ``start``, ``start + step`` and so on, in ``unit``."""

    dimension: str
    start: float
    step: float
    unit: str = ""


@dataclass(frozen=True, slots=True)
class MatrixMapping:
    """A matrix of one quantity, without headers: ``rows`` runs down, ``columns`` to the right."""

    rows: AxisMapping
    columns: AxisMapping
    parameter: str
    unit: str
    plane: str = ""
    statistic: str = ""
    polarisation: str = ""
    bandwidth: str = ""
    spectrum: str = ""


@dataclass(frozen=True, slots=True)
class LayoutMapping:
    """The mapping of one layout.

    ``area`` ("K6:L10", or "A137:B" to the end of the sheet) says where the table stands, ``alone`` that nothing else
    of its sheet is read; its first ``header_rows`` rows are headers (0: none, columns go by their letters). With
    ``turned`` the headers stand in the first column. ``others = "not read"``: columns that no entry names are not
    read. ``skip_rows`` are rows that are not read, ``stop_at`` the words at which the table has ended. ``when`` are
    facts that must be stated above the table for this mapping to hold.
    """

    layout: str = ""
    title: str = ""
    sheet: str = ""
    area: str = ""
    alone: bool = False
    skip: bool = False
    others: str = ""
    turned: bool = False
    header_rows: int = 1
    skip_rows: Sequence[int] = ()
    stop_at: str = ""
    include_hidden_rows: bool = False
    keep_summary_rows: bool = False
    keep_placeholders: bool = False
    when: Mapping[str, str] = field(default_factory=dict)
    stated: Mapping[str, str] = field(default_factory=dict)
    columns: Sequence[ColumnMapping] = ()
    pivots: Sequence[PivotMapping] = ()
    long: LongMapping | None = None
    matrix: MatrixMapping | None = None
    derive: Sequence[DeriveMapping] = ()

    @property
    def pivot(self) -> PivotMapping | None:
        """The pivot, where there is one."""
        return self.pivots[0] if self.pivots else None

    def column(self, text: str, letter: str) -> ColumnMapping | None:
        """Return the entry about a column."""
        return next((one for one in self.columns if one.is_about(text, letter)), None)


def _place_of(name: str) -> int:
    """A column letter, or the row number that stands for it in a turned table, as a number."""
    return int(name) if name.isdigit() else column_number(name)
