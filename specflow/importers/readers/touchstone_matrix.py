"""From pairs of numbers to matrices: the order of the entries, the complex value, and S from Y, Z, G and H."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.importers.readers.touchstone_network import Complexes, Floats, PairFormat

#: Beyond it fewer than four digits of S are left of the sixteen of Z, Y, G or H (rule of thumb, no source).
_MOST_CONDITION = 1e12


def pair_order(ports: int, matrix_format: str, s21_first: bool) -> NDArray[np.int64]:
    """Return (p, p): which pair of a frequency is entry [i, j], counted from 0.

    ``s21_first``: two-ports in the order 11 21 12 22 (version 1, and 21_12 of version 2); else row by row. Entries that
    Lower and Upper leave out are those of the transpose.
    Source: Touchstone File Format Specification 2.1, network data of version 1 and 2, [Matrix Format].
    """
    order = np.zeros((ports, ports), np.int64)
    if matrix_format == "Full":
        order = np.arange(ports * ports, dtype=np.int64).reshape(ports, ports)
        return order.T.copy() if ports == 2 and s21_first else order
    rows, columns = np.tril_indices(ports) if matrix_format == "Lower" else np.triu_indices(ports)
    order[rows, columns] = order[columns, rows] = np.arange(len(rows))
    return order


def complex_of(first: Floats, second: Floats, pair_format: PairFormat) -> Complexes:
    """Return the complex values that pairs mean; dB are 20·log10 of the magnitude, angles in degrees."""
    if pair_format is PairFormat.RI:
        value: Complexes = first + 1j * second
        return value
    size = 10.0 ** (first / 20.0) if pair_format is PairFormat.DB else first
    angle = np.deg2rad(second)
    value = np.empty(first.shape, np.complex128)
    value.real, value.imag = size * np.cos(angle), size * np.sin(angle)
    return value


def denormalised(matrix: Complexes, parameter: str, reference_ohm: float) -> Complexes:
    """Return Y, Z, G or H in ohm and siemens from what a version 1 file gives, divided by its reference.

    Z in R, Y in 1/R; of H only h11 (R) and h22 (1/R), of G only g11 (1/R) and g22 (R) have a dimension.
    Source: Touchstone File Format Specification 2.1, Examples 10 and 11 (0.99 at R 75 is 74.25 ohm); the rule for G
    and H follows from their dimensions.
    """
    r = reference_ohm
    scale = {
        "Z": np.full((1, 1), r),
        "Y": np.full((1, 1), 1.0 / r),
        "H": np.array([[r, 1.0], [1.0, 1.0 / r]]),
        "G": np.array([[1.0 / r, 1.0], [1.0, r]]),
    }[parameter]
    scaled: Complexes = matrix * scale
    return scaled


def scattering_of(matrix: Complexes, parameter: str, reference_ohm: Floats) -> Complexes:
    """Return S (n, p, p) of Z, Y, G or H in ohm and siemens; NaN where they have none.

    Formula: with V and I the port voltages and currents that the columns of the matrix mean, a = (V + R·I)/(2·√R),
    b = (V - R·I)/(2·√R) and S = b·a⁻¹.
    Source: power waves with real reference (Touchstone File Format Specification 2.1; K. Kurokawa, IEEE Trans. MTT 13,
    1965, from memory); equals scikit-rf in the tests.
    """
    voltage, current = _voltages_and_currents(matrix, parameter)
    r = reference_ohm[:, None]
    incident = (voltage + r * current) / (2.0 * np.sqrt(r))
    reflected = (voltage - r * current) / (2.0 * np.sqrt(r))
    s = np.full(matrix.shape, np.nan + 0j)
    with np.errstate(all="ignore"):
        usable = np.isfinite(incident).all(axis=(1, 2)) & (np.abs(np.linalg.det(incident)) > 0)
        usable[usable] = _condition(incident[usable]) < _MOST_CONDITION
    s[usable] = np.linalg.solve(
        incident[usable].transpose(0, 2, 1), reflected[usable].transpose(0, 2, 1)
    ).transpose(0, 2, 1)
    return s


def _condition(matrix: Complexes) -> Floats:
    """The condition number of each matrix, its rows and columns brought to one size first: that a port has kilohms
    where another has ohms loses no digits, that two ports say nearly the same does."""
    columns = matrix / np.abs(matrix).max(axis=1, keepdims=True)
    condition: Floats = np.linalg.cond(columns / np.abs(columns).max(axis=2, keepdims=True))
    return condition


def _voltages_and_currents(matrix: Complexes, parameter: str) -> tuple[Complexes, Complexes]:
    one = np.broadcast_to(np.eye(matrix.shape[-1], dtype=np.complex128), matrix.shape)
    if parameter == "Z":
        return matrix, one
    if parameter == "Y":
        return one, matrix
    voltage, current = one.copy(), one.copy()
    if parameter == "H":  # of i1 and v2: v1 and i2
        voltage[:, 0], voltage[:, 1] = matrix[:, 0], (0.0, 1.0)
        current[:, 0], current[:, 1] = (1.0, 0.0), matrix[:, 1]
    else:  # G, of v1 and i2: i1 and v2
        voltage[:, 0], voltage[:, 1] = (1.0, 0.0), matrix[:, 1]
        current[:, 0], current[:, 1] = matrix[:, 0], (0.0, 1.0)
    return voltage, current
