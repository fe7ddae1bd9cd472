"""One entry of a Touchstone file over frequency in dB, as a line of a budget takes it over."""

from __future__ import annotations

from pathlib import Path

import numpy as np

from specflow.errors import FileError
from specflow.importers.readers.source import read_source
from specflow.importers.readers.touchstone import read_network
from specflow.importers.readers.touchstone_network import NetworkFile, PairFormat
from specflow.model.budget_line import MOST_TOUCHSTONE_POINTS, TouchstoneTrace


def read_touchstone(
    name: str, entry: str, folder: Path | None, dimension: str = "frequency"
) -> TouchstoneTrace:
    """Return |S| of ``entry`` (S21; S12_3 or S12,3 beyond nine ports) of the file ``name``, looked for in ``folder``.

    The values are taken over with the digest of the file, so that they stay as they were read. FileError where the file
    cannot be read or is doubtful, has no such entry, or is longer than a budget line holds.
    """
    path = (folder or Path()) / name
    if not path.is_file():
        raise FileError(
            "there is no such Touchstone file", where=str(name), hint="put it beside the workbook"
        )
    network = read_network(read_source(path))
    if network.doubts:
        doubt = network.doubts[0]
        raise FileError(doubt.what, where=f"{name}, line {doubt.line}", hint="mend the file or its comment")
    try:
        row, column = network.entry(entry)
    except ValueError as error:
        raise FileError(str(error), where=name, hint="write S21, or S1_12 for more") from None
    frequency = network.frequency_hz
    if not 2 <= len(frequency) <= MOST_TOUCHSTONE_POINTS:
        raise FileError(
            f"{len(frequency)} frequencies",
            where=name,
            hint=f"a budget line holds 2 to {MOST_TOUCHSTONE_POINTS}; attach longer traces as evidence and name them",
        )
    return TouchstoneTrace(
        file=Path(name).name,
        sha256=network.fingerprint.sha256,
        entry=entry,
        frequency_hz=tuple(frequency.tolist()),
        values_db=_in_db(network, row, column, entry, name),
        dimension=dimension,
    )


def _in_db(network: NetworkFile, row: int, column: int, entry: str, name: str) -> tuple[float, ...]:
    """|S| of an entry in dB: as written where the file has dB, else 20·log10."""
    if network.parameter == "S" and network.pair_format is PairFormat.DB:
        values = network.first[:, row, column]
    else:
        with np.errstate(divide="ignore"):
            values = 20.0 * np.log10(np.abs(network.s[:, row, column]))
    if not np.isfinite(values).all():
        raise FileError(
            f"{entry} is zero or missing at some frequency, which has no value in dB",
            where=name,
            hint="leave it out",
        )
    return tuple(values.tolist())
