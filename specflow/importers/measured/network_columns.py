"""The value columns of a network: a pair of columns an entry, as recorded, each with its place; and the noise block."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from specflow.importers.measured.result import ColumnReading, Role
from specflow.importers.readers.touchstone_network import Floats, Hole, NetworkFile, NoiseBlock, PairFormat
from specflow.model.evidence import ValueArrays, ValueColumn
from specflow.model.parameter import QuantityIdentity

Entry = tuple[int, int]

_PARTS = {
    "dB": ("scattering_db", "dB"),
    "magnitude": ("scattering_magnitude", "1"),
    "angle": ("scattering_angle", "deg"),
    "real": ("scattering_real", "1"),
    "imaginary": ("scattering_imaginary", "1"),
}
_ONE_ENTRY = ("first", "second")
_OTHER_ENTRY = ("other first", "other second")
_NOISE_ROLES = ("fmin", "magnitude", "angle", "rn")
_NOISE_NAMES = ("Fmin", "Gopt magnitude", "Gopt angle", "Rn")


@dataclass(frozen=True)
class NetworkTable:
    """One table of a network file: its axis (n,), the line of each row, and its columns with their documents.

    ``pairs``: the names of the two columns of each entry. ``part`` sets the table apart from others of the file.
    """

    title: str
    place: str
    axis: Floats
    lines: NDArray[np.int32]
    documents: tuple[ValueColumn, ...]
    arrays: Mapping[str, ValueArrays]
    recognised: tuple[ColumnReading, ...]
    pairs: Mapping[Entry, tuple[str, str]] = field(default_factory=dict)
    holes: Sequence[Hole] = ()
    notes: tuple[str, ...] = ()
    is_noise: bool = False

    @property
    def part(self) -> str:
        """What is added to the key of the layout for this table."""
        return "+noise" if self.is_noise else ""

    def roles(self, entries: Sequence[Entry]) -> tuple[tuple[str, str], ...]:
        """The columns that a law reads of these entries (or of the noise block), by their roles."""
        if self.is_noise:
            return tuple(zip(_NOISE_ROLES, _NOISE_NAMES, strict=True))
        if len(entries) > 2:
            return tuple((name, name) for entry in entries for name in self.pairs[entry])
        names = [name for entry in entries for name in self.pairs[entry]]
        return tuple(zip((*_ONE_ENTRY, *_OTHER_ENTRY), names, strict=False))

    def entry_names(self, entries: Sequence[Entry]) -> list[str]:
        """The names of entries: S21."""
        return [self.pairs[entry][0].rsplit(" ", 1)[0] for entry in entries]


def scattering_table(network: NetworkFile) -> NetworkTable:
    """Return all entries as recorded; converted to S where the file has Y, Z, G or H parameters."""
    is_s = network.parameter == "S"
    parts = network.pair_format.parts if is_s else PairFormat.RI.parts
    first, second = (network.first, network.second) if is_s else (network.s.real, network.s.imag)
    lacks = np.isnan(first) | np.isnan(second)
    documents: list[ValueColumn] = []
    arrays: dict[str, ValueArrays] = {}
    pairs: dict[Entry, tuple[str, str]] = {}
    moving = False
    for i, j in np.ndindex(network.ports, network.ports):
        below = network.lines_below(i, j)
        moving = moving or below is None
        names = []
        for place, (part, numbers) in enumerate(zip(parts, (first, second), strict=True)):
            name = f"{_entry_name(network, i, j)} {part}"
            column = _column(network, (i, j), part, name, place, below or 0)
            values = np.where(lacks[:, i, j], np.nan, numbers[:, i, j])
            documents.append(column)
            arrays[name] = ValueArrays(values, values)
            names.append(name)
        pairs[i, j] = (names[0], names[1])
    notes = _zero_notes(network) + _place_notes(network, moving)
    return NetworkTable(
        title=_title(network),
        place=_lines_words(network.lines),
        axis=network.axis,
        lines=network.lines.astype(np.int32),
        documents=tuple(documents),
        arrays=arrays,
        recognised=(_entries_reading(network, parts),),
        pairs=pairs,
        holes=[hole for hole in network.holes if not _in_noise(network, hole)],
        notes=tuple(notes),
    )


def _title(network: NetworkFile) -> str:
    """What the table is, with the reference impedance: gain and match mean something at it only."""
    ports = f"{network.ports} port{'s' * (network.ports != 1)}"
    return f"scattering parameters of {ports} at {network.reference_words}"


def _entry_name(network: NetworkFile, i: int, j: int) -> str:
    name = network.entry_name(i, j)
    return name if network.parameter == "S" else "S" + name[1:]


def _column(network: NetworkFile, entry: Entry, part: str, name: str, number: int, below: int) -> ValueColumn:
    parameter, unit = _PARTS[part]
    i, j = entry
    offset = int(network.starts[0] + network.pair_places[i, j]) + number
    modes = network.port_modes or tuple(f"port {port + 1}" for port in range(network.ports))
    plane = modes[i] if i == j else f"{modes[j]} to {modes[i]}"
    return ValueColumn(
        name=name,
        quantity=QuantityIdentity(parameter=parameter, plane=plane),
        unit=unit,
        unit_from="the option line" if network.parameter == "S" else "converted",
        column=network.places.of(offset)[1],
        header=name,
        conversions=(network.conversion,) if network.conversion else (),
        lines_below=below,
    )


def _entries_reading(network: NetworkFile, parts: tuple[str, str]) -> ColumnReading:
    first, last = _entry_name(network, 0, 0), _entry_name(network, network.ports - 1, network.ports - 1)
    entries = first if first == last else f"{first} ... {last}"
    meaning = f"{network.ports**2} entries as recorded, {parts[0]} and {parts[1]}"
    if network.conversion:
        meaning = f"{network.ports**2} entries, real and imaginary part: {network.conversion}"
    reason = f"the option line says {network.parameter} {network.pair_format.value}"
    return ColumnReading(entries, "", Role.VALUE, meaning, reason)


def _zero_notes(network: NetworkFile) -> list[str]:
    """Say which entries are nothing but zeros: they were hardly measured."""
    zero = (network.first == 0).all(axis=0) & (network.second == 0).all(axis=0)
    names = [network.entry_name(int(i), int(j)) for i, j in np.argwhere(zero)]
    if not names:
        return []
    shown = ", ".join(names[:8]) + (" ..." if len(names) > 8 else "")
    return [f"{shown}: all numbers are 0; it may not have been measured"]


def _place_notes(network: NetworkFile, moving: bool) -> list[str]:
    notes = []
    if moving:
        notes.append("the lines of a frequency change within the file: places are those of its first line")
    if network.matrix_format != "Full":
        notes.append(
            f"the file has the {network.matrix_format.lower()} triangle; the other entries mirror it"
        )
    return notes


def _lines_words(lines: NDArray[np.int64]) -> str:
    return f"lines {int(lines[0])} to {int(lines[-1])}" if len(lines) else "no lines"


def _in_noise(network: NetworkFile, hole: Hole) -> bool:
    return network.noise is not None and hole.line >= int(network.places.lines(network.noise.starts)[0])


def noise_table(network: NetworkFile) -> NetworkTable:
    """Return the noise block as recorded: Rn in ohm (version 2), or divided by the reference (version 1)."""
    noise = network.noise
    assert noise is not None
    normalised = noise.rn_unit_ohm != 1.0
    kinds = (
        ("noise_figure_minimum", "dB"),
        ("optimum_source_magnitude", "1"),
        ("optimum_source_angle", "deg"),
        ("noise_resistance_normalised", "1") if normalised else ("noise_resistance", "ohm"),
    )
    numbers = _noise_numbers(noise)
    documents = [
        ValueColumn(
            name=name,
            quantity=QuantityIdentity(parameter=parameter, plane="input"),
            unit=unit,
            unit_from="the format of noise data",
            column=2 + place,
            header=name,
        )
        for place, (name, (parameter, unit)) in enumerate(zip(_NOISE_NAMES, kinds, strict=True))
    ]
    lines = network.places.lines(noise.starts)
    rn = f"Rn divided by {noise.rn_unit_ohm:g} ohm (version 1)" if normalised else "Rn in ohm (version 2)"
    reading = ColumnReading(
        "Fmin ... Rn", "", Role.VALUE, f"minimum noise figure, Gopt and Rn as recorded; {rn}", "noise data"
    )
    return NetworkTable(
        title="noise parameters",
        place=_lines_words(lines),
        axis=noise.axis,
        lines=lines.astype(np.int32),
        documents=tuple(documents),
        arrays={
            name: ValueArrays(values, values) for name, values in zip(_NOISE_NAMES, numbers, strict=True)
        },
        recognised=(reading,),
        holes=[hole for hole in network.holes if _in_noise(network, hole)],
        notes=("port 1 is the source side of noise data, by the format",),
        is_noise=True,
    )


def _noise_numbers(noise: NoiseBlock) -> tuple[Floats, ...]:
    return noise.fmin_db, noise.magnitude, noise.angle_deg, noise.rn
