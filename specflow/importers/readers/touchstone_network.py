"""A network as a Touchstone file records it: frequencies, entries as written, matrix, and where each number stands."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

from specflow.errors import FileError
from specflow.importers.readers.source import FileFingerprint

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]


class PairFormat(StrEnum):
    """How the two numbers of an entry are meant: dB and angle, magnitude and angle, real and imaginary part."""

    DB = "DB"
    MA = "MA"
    RI = "RI"

    @property
    def parts(self) -> tuple[str, str]:
        """What the first and the second number of a pair are."""
        return {"DB": ("dB", "angle"), "MA": ("magnitude", "angle"), "RI": ("real", "imaginary")}[self.value]


HERTZ = {"Hz": 1.0, "kHz": 1e3, "MHz": 1e6, "GHz": 1e9, "THz": 1e12}


def values_per_frequency(ports: int, matrix_format: str = "Full") -> int:
    """Return how many numbers a frequency has: 2n²+1 (Full), n²+n+1 (Lower or Upper).

    Source: Touchstone File Format Specification 2.1 (IBIS Open Forum, 26 January 2024), network data rules.

    >>> [values_per_frequency(n) for n in (1, 2, 3, 4, 6)]
    [3, 9, 19, 33, 73]
    """
    return (2 * ports * ports if matrix_format == "Full" else ports * (ports + 1)) + 1


@dataclass(frozen=True, slots=True)
class Comment:
    """The text after a ``!``; ``beside_data`` where numbers stand before it on the line."""

    line: int
    text: str
    beside_data: bool = False


class DoubtKind(StrEnum):
    """What a reader cannot know and does not guess."""

    X_AXIS = "x axis"
    COLUMN_ORDER = "column order"
    PAIR_FORMAT = "format"
    ANGLES = "angles"
    REFERENCE = "reference"


@dataclass(frozen=True, slots=True)
class Doubt:
    """Something in the file that speaks against the plain reading; a person must settle it.

    ``named`` are the entries (to, from; counted from 1) in the order of the comment, where that is the doubt.
    """

    kind: DoubtKind
    line: int
    what: str
    named: tuple[tuple[int, int], ...] = ()


@dataclass(frozen=True, slots=True)
class Remark:
    """Something that was done or found on the way and changes no number; ``warns`` where a person should look."""

    line: int
    what: str
    warns: bool = False


@dataclass(frozen=True, slots=True)
class Hole:
    """A number that the file does not give (nan, -inf, an overflow mark): its place and its text."""

    line: int
    token: int
    text: str


@dataclass(frozen=True, slots=True)
class Places:
    """Where the numbers of a file stand: ``line_numbers`` of the data lines, and the offset of the first of each."""

    line_numbers: NDArray[np.int64]
    line_offsets: NDArray[np.int64]

    def of(self, offset: int) -> tuple[int, int]:
        """Return (line, number on the line), both from 1, of a number by its offset in the file."""
        line = int(np.searchsorted(self.line_offsets, offset, side="right")) - 1
        return int(self.line_numbers[line]), offset - int(self.line_offsets[line]) + 1

    def lines(self, offsets: NDArray[np.int64]) -> NDArray[np.int64]:
        """Return the line of each number."""
        return self.line_numbers[np.searchsorted(self.line_offsets, offsets, side="right") - 1]


@dataclass(frozen=True, slots=True)
class NoiseBlock:
    """Noise parameters of a two-port over frequency, source at port 1.

    ``axis`` (m,) in the unit of the file, ``fmin_db``, ``gamma_opt`` complex (as magnitude and angle in ``magnitude``
    and ``angle_deg``), ``rn`` as recorded: divided by ``rn_unit_ohm`` in version 1, in ohm (1.0) in version 2.
    """

    axis: Floats
    fmin_db: Floats
    magnitude: Floats
    angle_deg: Floats
    rn: Floats
    rn_unit_ohm: float
    starts: NDArray[np.int64]

    @property
    def gamma_opt(self) -> Complexes:
        """The optimum source reflection, complex (m,)."""
        turn: Complexes = np.exp(1j * np.deg2rad(self.angle_deg))
        return self.magnitude * turn

    @property
    def rn_ohm(self) -> Floats:
        """The noise resistance in ohm, (m,)."""
        return self.rn * self.rn_unit_ohm


@dataclass(frozen=True, slots=True)
class NetworkFile:
    """A Touchstone file as read.

    ``axis`` float64 (n,) as written, in ``axis_unit``; ``first`` and ``second`` (n, p, p) are the numbers of each entry
    as written, in ``pair_format`` (of Lower and Upper files mirrored), ``recorded`` the complex matrix they say and
    ``s`` the scattering matrix: the same for S files, converted for the others. ``[k, i, j]`` is from port j+1 to port
    i+1. ``reference_ohm`` (p,) real. ``starts`` (n,) and ``pair_places`` (p, p) give the offset of each number.
    ``impedances`` (n, p) complex are those that comments give per frequency, or None; ``at_impedances`` where a person
    says that the entries are referred to them.
    """

    fingerprint: FileFingerprint
    version: str
    parameter: str
    pair_format: PairFormat
    axis: Floats
    axis_unit: str
    first: Floats
    second: Floats
    recorded: Complexes
    s: Complexes
    reference_ohm: Floats
    places: Places
    starts: NDArray[np.int64]
    pair_places: NDArray[np.int64]
    matrix_format: str = "Full"
    port_modes: tuple[str, ...] = ()
    port_names: tuple[str, ...] = ()
    conversion: str = ""
    noise: NoiseBlock | None = None
    impedances: Complexes | None = None
    at_impedances: bool = False
    comments: Sequence[Comment] = ()
    holes: Sequence[Hole] = ()
    doubts: Sequence[Doubt] = ()
    remarks: Sequence[Remark] = ()
    notes: Sequence[str] = field(default=())

    @property
    def reference_words(self) -> str:
        """What the entries are referred to: "50 ohm", "50, 75 ohm", or the range of the impedances of the comments."""
        if self.at_impedances and self.impedances is not None:
            size = np.abs(self.impedances)
            return f"the impedances of the comments ({size.min():.4g} to {size.max():.4g} ohm)"
        return ", ".join(f"{ohm:g}" for ohm in dict.fromkeys(self.reference_ohm.tolist())) + " ohm"

    @property
    def ports(self) -> int:
        """How many ports the network has."""
        return len(self.reference_ohm)

    @property
    def frequency_hz(self) -> Floats:
        """The axis in hertz, (n,); NaN where the option line names another unit than one of frequency."""
        return self.axis * HERTZ.get(self.axis_unit, np.nan)

    @property
    def lines(self) -> NDArray[np.int64]:
        """The line in which each frequency begins, (n,)."""
        return self.places.lines(self.starts)

    def entry_name(self, i: int, j: int) -> str:
        """Return the name of an entry by its indices from 0: S21, S10_1 beyond nine ports, "S D2,3 C2,3" of modes."""
        if self.port_modes:
            return f"{self.parameter} {self.port_modes[i]} {self.port_modes[j]}"
        joint = "" if self.ports < 10 else "_"
        return f"{self.parameter}{i + 1}{joint}{j + 1}"

    def entry(self, name: str) -> tuple[int, int]:
        """Return the indices from 0 of an entry (S21; S10_1 or S10,1). ValueError where the network has none such."""
        numbers = name.strip()[1:].replace(",", "_").split("_")
        if len(numbers) == 1 and len(numbers[0]) == 2:
            numbers = list(numbers[0])
        if len(numbers) != 2 or not all(
            one.isascii() and one.isdecimal() and 1 <= int(one) <= self.ports for one in numbers
        ):
            raise ValueError(f"the file has {self.ports} ports and no {name}")
        return int(numbers[0]) - 1, int(numbers[1]) - 1

    def place(self, frequency: int, i: int, j: int) -> tuple[int, int]:
        """Return (line, number on that line) of the first number of an entry at a frequency, all counted as written."""
        return self.places.of(int(self.starts[frequency] + self.pair_places[i, j]))

    def lines_below(self, i: int, j: int) -> int | None:
        """Return how many lines below the first of its frequency an entry stands, None where that changes."""
        offsets = self.places.lines(self.starts + self.pair_places[i, j]) - self.lines
        return int(offsets[0]) if bool((offsets == offsets[0]).all()) else None


def refusal(name: str, line: int, what: str, remedy: str) -> FileError:
    """Return the error that refuses a file for what stands in one of its lines."""
    return FileError(f"not readable as a Touchstone file: {what}", where=f"{name}, line {line}", hint=remedy)
