"""Laws of several scattering parameters at once: imbalance of two paths, active reflection of an array over scan."""

from __future__ import annotations

import re

import numpy as np
from numpy.typing import NDArray

from specflow.calculators.active_reflection import active_reflection, line_excitation
from specflow.calculators.decibel import LIGHT
from specflow.conditions import parse_dimension
from specflow.derive.law import Law, Outcome, Setting
from specflow.derive.samples import Samples
from specflow.derive.scattering import ENTRY, entry, magnitude_db, row_by_row
from specflow.errors import CalculationError, ConditionsError
from specflow.units import convert, parse_unit

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

OTHER = ("other first", "other second")
_TWO = (
    "the columns of two scattering parameters from one port, of one file or of two with the same frequencies"
)
MOST_SCANS = 721
_ENTRY_COLUMN = re.compile(r"^S(?:(\d)(\d)|(\d+)_(\d+)) (?P<part>\S+)$")


def amplitude_imbalance(samples: Samples) -> Outcome:
    """Return how much stronger the first path is than the other, in dB.

    Formula: 20·log10 |S| - 20·log10 |S other|.
    Valid: both from one input, at the same frequencies.
    Source: definition; the sign is first minus other.
    """
    return row_by_row(magnitude_db(samples) - magnitude_db(samples, OTHER), "dB")


def phase_imbalance(samples: Samples) -> Outcome:
    """Return the phase of the first path against the other, less the nominal difference, in degrees.

    Formula: arg(S/S other) - nominal, brought within half a turn of ``near``: between -180 and 180 degrees for 0.
    Valid: both from one input, at the same frequencies. The nominal difference is 90 deg for a quadrature hybrid. Of
    outputs in antiphase, near 180 deg: -179 deg are 181 deg there.
    Source: definition; the sign is first minus other.
    """
    nominal, near = samples.number("nominal"), samples.number("near")
    difference: Complexes = (
        entry(samples) * np.conj(entry(samples, OTHER)) * np.exp(-1j * np.deg2rad(nominal + near))
    )
    if (difference == 0).any():
        raise CalculationError(
            "an entry is zero at some place, which has no phase", hint="choose a range without it"
        )
    value: Floats = near + np.rad2deg(np.angle(difference))
    return row_by_row(value, "deg")


def _matrix(samples: Samples) -> Complexes:
    """The matrix (n, p, p) of a network table, whose columns are the roles: "S12 magnitude", "S12 angle" ..."""
    roles = roles_of_entries(samples)
    ports = round(len(roles) ** 0.5)
    every = [(m, n) for m in range(1, ports + 1) for n in range(1, ports + 1)]
    pairs = [roles.get(one) for one in every]
    if not ports or len(roles) != ports * ports or None in pairs:
        raise CalculationError(
            "an active reflection needs every entry of a network",
            hint="derive it from the table of a network file",
        )
    entries = [entry(samples, pair) for pair in pairs if pair is not None]
    return np.stack(entries, axis=-1).reshape(-1, ports, ports)


def roles_of_entries(samples: Samples) -> dict[tuple[int, int], tuple[str, str] | None]:
    """Return the two roles of each entry (to, from; counted from 1) of a whole network table, None where one lacks."""
    parts: dict[tuple[int, int], dict[str, str]] = {}
    for role in samples.values:
        found = _ENTRY_COLUMN.match(role)
        if found is not None:
            to, start = (int(one) for one in found.groups()[:4] if one is not None)
            parts.setdefault((to, start), {})[found["part"]] = role
    return {place: _pair(own) for place, own in parts.items()}


def _pair(parts: dict[str, str]) -> tuple[str, str] | None:
    """The roles of both columns of an entry, None where it has others."""
    for first, second in (("dB", "angle"), ("magnitude", "angle"), ("real", "imaginary")):
        if {first, second} == set(parts):
            return parts[first], parts[second]
    return None


def scan_reflection(samples: Samples) -> Outcome:
    """Return the largest active reflection of the elements of a line array in dB, over frequency and scan angle.

    Formula: Γ_m = Σ_n S_mn·a_n/a_m with a_n = exp(-j·2π·(d/λ)·n·sin θ); 20·log10 of the largest |Γ_m|.
    Valid: the ports of the file are the elements of a uniform line in their order, all driven alike, every other port
    of the file none; scan in the plane of the line.
    Source: definition as in scikit-rf ``s_active``; path difference.
    """
    matrix = _matrix(samples)
    ports = matrix.shape[-1]
    if (samples.axis, parse_unit(samples.axis_unit or "1").dimension) != (
        "frequency",
        parse_unit("Hz").dimension,
    ):
        raise CalculationError(f"the axis is {samples.axis}", hint="element spacings need the frequency")
    scans = _scan_angles(samples.word("scan"))
    frequency = convert(samples.along, parse_unit(samples.axis_unit), parse_unit("Hz"))
    spacing = samples.number("spacing") * frequency / LIGHT
    worst = np.empty((len(frequency), len(scans)))
    element = np.empty(worst.shape, np.intp)
    for place in range(len(frequency)):
        excitation = line_excitation(ports, float(spacing[place]), scans)
        size = np.abs(active_reflection(matrix[place], excitation))
        element[place] = np.argmax(size, axis=-1)
        worst[place] = np.max(size, axis=-1)
    if (worst == 0).any():
        raise CalculationError(
            "an active reflection is zero, which has no value in dB", hint="look at the entries"
        )
    value: Floats = 20.0 * np.log10(worst).ravel()
    rows = np.repeat(np.arange(len(frequency), dtype=np.intp), len(scans))
    at = tuple(
        f"{samples.along[row]:.10g} {samples.axis_unit}, scan {scans[place]:g} deg, element {element[row, place] + 1}"
        for row in range(len(frequency))
        for place in range(len(scans))
    )
    axes = {samples.axis: samples.along[rows], "scan_theta": np.tile(scans, len(frequency))}
    return Outcome(value, "dB", rows, at=at, axes=axes, axis_units={"scan_theta": "deg"})


def _scan_angles(text: str) -> Floats:
    """The angles in degrees of "-60..60 deg step 5 deg", or of "-60, -30, 0, 30, 60 deg"."""
    try:
        said = parse_dimension(f"scan_theta: {text}", corners=False)
    except ConditionsError as error:
        raise CalculationError(error.message, where="scan", hint=error.hint) from None
    if said.values:
        return np.asarray(said.values, np.float64)
    span = said.span
    if span is None or span.step is None:
        raise CalculationError(
            f"the scan {text!r} names no angles", hint="write -60..60 deg step 5 deg, or -60, 0, 60 deg"
        )
    count = int(np.floor((span.high - span.low) / span.step + 1e-9)) + 1
    if count > MOST_SCANS:
        raise CalculationError(f"the scan has {count} angles", hint=f"at most {MOST_SCANS}")
    angles = span.low + span.step * np.arange(count)
    ends = [span.high] if span.high - angles[-1] > 1e-9 else []
    return np.asarray([*angles.tolist(), *ends], np.float64)


PATH_LAWS: tuple[Law, ...] = (
    Law("amplitude imbalance", "amplitude of one path against another", amplitude_imbalance, over="each", needs=_TWO,
        roles=(*ENTRY, *OTHER), gives=("amplitude_imbalance",)),
    Law(
        "phase imbalance",
        "phase of one path against another",
        phase_imbalance,
        over="each",
        needs=_TWO,
        roles=(*ENTRY, *OTHER),
        settings=(
            Setting("nominal", "the difference that is meant to be there", "0 deg", "deg"),
            Setting("near", "results are given within half a turn of this angle", "0 deg", "deg"),
        ),
        gives=("phase_imbalance",),
    ),
    Law(
        "active reflection",
        "largest active reflection of a line array over frequency and scan",
        scan_reflection,
        needs="every entry of a network whose ports are the elements of a line",
        roles=(),
        whole_table=True,
        settings=(
            Setting("spacing", "distance between neighbouring elements", None, "m"),
            Setting("scan", "the angles, as in -60..60 deg step 5 deg", None, is_text=True),
        ),
        gives=("active_reflection",),
    ),
)  # fmt: skip
