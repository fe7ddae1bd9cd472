"""A small writer of Touchstone files for the tests, made from the format rules and not from the reader.

Rules: Touchstone File Format Specification 2.1, IBIS Open Forum, 26 January 2024. It takes the pairs of numbers as they
are to stand in the file, so that what is read can be compared exactly.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from specflow.importers.readers.source import read_source
from specflow.importers.readers.touchstone import read_network
from specflow.importers.readers.touchstone_network import NetworkFile

Pairs = NDArray[np.float64]


@dataclass(frozen=True)
class Written:
    """What is to be written. ``pairs`` (n, p, p, 2): [k, i, j] is the entry from port j+1 to port i+1."""

    axis: Sequence[float]
    pairs: Pairs
    unit: str = "GHz"
    parameter: str = "S"
    pair_format: str = "MA"
    reference: Sequence[float] = ()
    version: str = ""
    order: str = ""
    matrix_format: str = ""
    noise: Sequence[Sequence[float]] = ()
    comments: Sequence[str] = ()
    ending: str = "\n"
    row_breaks: bool = True
    per_line: int = 4
    keyword_reference: Sequence[float] = field(default=())

    @property
    def ports(self) -> int:
        return self.pairs.shape[1]


def text_of(what: Written) -> str:
    """Return the file as text."""
    lines = [f"! {comment}" for comment in what.comments]
    if what.version:
        lines.append(f"[Version] {what.version}")
    option = f"# {what.unit} {what.parameter} {what.pair_format}"
    if what.reference:
        option += " R " + " ".join(repr(float(ohm)) for ohm in what.reference)
    lines.append(option)
    if what.version:
        lines += _keywords(what)
    for value, matrix in zip(what.axis, what.pairs, strict=True):
        lines += _frequency(what, value, matrix)
    if what.noise and what.version:
        lines.append("[Noise Data]")
    lines += [" ".join(repr(float(one)) for one in row) for row in what.noise]
    if what.version:
        lines.append("[End]")
    return what.ending.join(lines) + what.ending


def _keywords(what: Written) -> list[str]:
    lines = [f"[Number of Ports] {what.ports}"]
    if what.ports == 2:
        lines.append(f"[Two-Port Data Order] {what.order}")
    lines.append(f"[Number of Frequencies] {len(what.axis)}")
    if what.noise:
        lines.append(f"[Number of Noise Frequencies] {len(what.noise)}")
    if what.keyword_reference:
        first, *rest = (repr(float(ohm)) for ohm in what.keyword_reference)
        lines += [f"[Reference] {first}", *rest]
    if what.matrix_format:
        lines.append(f"[Matrix Format] {what.matrix_format}")
    return [*lines, "[Network Data]"]


def _frequency(what: Written, value: float, matrix: Pairs) -> list[str]:
    ports = what.ports
    rows = [_entries(what, row) for row in range(ports)]
    if ports == 2 and (not what.version or what.order == "21_12") and what.matrix_format in ("", "Full"):
        rows = [[(0, 0), (1, 0), (0, 1), (1, 1)]]
    elif ports <= 2 or not what.row_breaks:
        rows = [[entry for row in rows for entry in row]]
    lines = []
    for row in rows:
        numbers = [f"{float(matrix[i, j, k])!r}" for i, j in row for k in (0, 1)]
        width = 2 * what.per_line if len(row) > 4 and what.row_breaks else len(numbers)
        lines += [" ".join(numbers[start : start + width]) for start in range(0, len(numbers), width)]
    lines[0] = f"{float(value)!r} {lines[0]}"
    return lines


def _entries(what: Written, row: int) -> list[tuple[int, int]]:
    columns = {"Lower": range(row + 1), "Upper": range(row, what.ports)}.get(
        what.matrix_format, range(what.ports)
    )
    return [(row, column) for column in columns]


def read_text(folder: Path, text: str | bytes, name: str) -> NetworkFile:
    """Write a file and read it."""
    path = folder / name
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return read_network(read_source(path))
