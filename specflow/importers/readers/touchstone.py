"""Touchstone files: one entry of the scattering matrix over frequency, in dB."""

from __future__ import annotations

import hashlib
from pathlib import Path

import numpy as np

from specflow.errors import FileError
from specflow.model.budget_line import MOST_TOUCHSTONE_POINTS, TouchstoneTrace


def read_touchstone(
    name: str, entry: str, folder: Path | None, dimension: str = "frequency"
) -> TouchstoneTrace:
    """Return |S| of ``entry`` (S21; S12_3 or S12,3 beyond nine ports) of the file ``name``, looked for in ``folder``.

    The values are taken over with the digest of the file, so that they stay as they were read. FileError where the file
    cannot be read, has no such entry, or is longer than a budget line holds.
    """
    path = (folder or Path()) / name
    if not path.is_file():
        raise FileError(
            "there is no such Touchstone file", where=str(name), hint="put it beside the workbook"
        )
    try:
        import skrf  # loading it takes a second
    except ImportError:
        raise FileError(
            "Touchstone files are read through scikit-rf, which is not installed",
            where=name,
            hint="install specflow-rf[touchstone], or scikit-rf itself",
        ) from None
    try:
        network = skrf.Network(str(path))
    except Exception as error:  # the library raises whatever the file provokes
        raise FileError(
            f"not readable as a Touchstone file: {error}", where=name, hint="export it again as .sNp"
        ) from None
    row, column = _ports(entry, network.nports, name)
    frequency = np.asarray(network.f, np.float64)
    if not 2 <= len(frequency) <= MOST_TOUCHSTONE_POINTS:
        raise FileError(
            f"{len(frequency)} frequencies",
            where=name,
            hint=f"a budget line holds 2 to {MOST_TOUCHSTONE_POINTS}; attach longer traces as evidence and name them",
        )
    size = np.abs(np.asarray(network.s, np.complex128)[:, row, column])
    if not size.all():
        raise FileError(
            f"{entry} is zero at some frequency, which has no value in dB", where=name, hint="leave it out"
        )
    return TouchstoneTrace(
        file=Path(name).name,
        sha256=hashlib.sha256(path.read_bytes()).hexdigest(),
        entry=entry,
        frequency_hz=tuple(frequency.tolist()),
        values_db=tuple((20.0 * np.log10(size)).tolist()),
        dimension=dimension,
    )


def _ports(entry: str, ports: int, name: str) -> tuple[int, int]:
    numbers = entry[1:].replace(",", "_").split("_")
    if len(numbers) == 1 and len(numbers[0]) == 2:
        numbers = list(numbers[0])
    if len(numbers) != 2 or not all(part.isdecimal() and 1 <= int(part) <= ports for part in numbers):
        raise FileError(
            f"the file has {ports} ports and no {entry}", where=name, hint="write S21, or S1_12 for more"
        )
    return int(numbers[0]) - 1, int(numbers[1]) - 1
