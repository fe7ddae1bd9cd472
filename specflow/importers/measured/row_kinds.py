"""Values whose rows say line or noise, or a resolution bandwidth each: one value column for every kind and bandwidth.

Only like compares with like, and what makes two readings alike stands with the column.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.rejects import cell_text
from specflow.importers.measured.result import Role
from specflow.importers.measured.spectrum_words import bandwidth_in, spectrum_kind
from specflow.importers.measured.work import TableWork
from specflow.model.evidence import EvidenceColumns, SpectrumKind, ValueArrays, ValueColumn
from specflow.units import parse_unit

_MOST = 24


@dataclass(frozen=True, slots=True)
class RowKind:
    """What the rows of one kind have in common; None where their rows do not say it."""

    spectrum: SpectrumKind | None
    bandwidth_hz: float | None

    def words(self) -> str:
        """The kind in words."""
        parts = [] if self.spectrum is None else [self.spectrum.value]
        parts += [] if self.bandwidth_hz is None else [f"in {self.bandwidth_hz:g} Hz"]
        return ", ".join(parts)


def by_row_kind(
    work: TableWork, columns: EvidenceColumns, values: list[ValueColumn]
) -> tuple[EvidenceColumns, list[ValueColumn]]:
    """Split the value columns where a column of kinds, or of several bandwidths, tells their rows apart."""
    kinds = _kinds(work)
    if kinds is None or not values or len(columns.source_rows) != len(kinds):
        return columns, values
    distinct = set(kinds)
    if len(distinct) > _MOST:
        work.ask(
            "",
            work.table.place,
            f"the rows have {len(distinct)} different bandwidths and kinds",
            "split the table",
        )
        return columns, values
    arrays: dict[str, ValueArrays] = {}
    documents: list[ValueColumn] = []
    for value in values:
        own = [_for(work, value, kind) for kind in kinds]
        for kind in dict.fromkeys(own):
            document = _of_kind(value, kind)
            arrays[document.name] = _only(columns.values[value.name], np.array([one == kind for one in own]))
            documents.append(document)
    split = EvidenceColumns(
        columns.conditions, arrays, columns.source_rows, columns.items, columns.dates, columns.extra
    )
    return split, documents


def _for(work: TableWork, value: ValueColumn, kind: RowKind) -> RowKind:
    """What a kind means for one quantity: a gain is the same in every bandwidth, a density is per its own."""
    parameter = work.context.dictionary.get(value.quantity.parameter)
    if parse_unit(value.unit).bandwidth_hz is not None:
        return RowKind(kind.spectrum, None)
    if parameter is None or not parameter.needs_bandwidth:
        return RowKind(None, None)
    return kind


def _kinds(work: TableWork) -> list[RowKind] | None:
    """The kind of each row; None where no column tells rows apart."""
    spectra = work.of(Role.SPECTRUM)
    bandwidths = [one for one in work.of(Role.BANDWIDTH) if _several(work, one)]
    if not spectra and not bandwidths:
        return None
    kinds: list[SpectrumKind | None] = [None] * len(work.rows)
    if spectra:
        cells = work.table.cells(spectra[0].column).at(work.rows)
        kinds = [spectrum_kind(cell_text(value)) for value in cells]
    widths: list[float | None] = [None] * len(work.rows)
    if bandwidths:
        widths = [_hertz(work, bandwidths[0], place) for place in range(len(work.rows))]
    return [RowKind(*pair) for pair in zip(kinds, widths, strict=True)]


def _several(work: TableWork, meaning: ColumnMeaning) -> bool:
    """Whether the rows of a column differ, be it that some say nothing."""
    cells = work.table.cells(meaning.column).at(work.rows)
    return len({cell_text(value).strip() for value in cells}) > 1


def _hertz(work: TableWork, meaning: ColumnMeaning, place: int) -> float | None:
    row = int(work.rows[place])
    return bandwidth_in(
        cell_text(work.table.cells(meaning.column).value(row)), meaning.parts.unit or meaning.header.unit
    )


def _of_kind(value: ValueColumn, kind: RowKind) -> ValueColumn:
    words = kind.words()
    bandwidth = value.quantity.bandwidth_hz if kind.bandwidth_hz is None else kind.bandwidth_hz
    return value.model_copy(
        update={
            "name": f"{value.name} ({words})" if words else value.name,
            "spectrum": value.spectrum if kind.spectrum is None else kind.spectrum,
            "quantity": value.quantity.model_copy(update={"bandwidth_hz": bandwidth}),
        }
    )


def _only(values: ValueArrays, chosen: NDArray[np.bool_]) -> ValueArrays:
    low = np.where(chosen, values.low, np.nan)
    high = low if values.high is values.low else np.where(chosen, values.high, np.nan)
    return ValueArrays(low, high, None if values.u is None else np.where(chosen, values.u, np.nan))
