"""Two-ports by scattering parameters: cascade with mismatch, gains between a source and a load.

Matrices are (…, 2, 2) with S[i, j] from port j to port i, waves referred to one real impedance at every joint.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from specflow.calculators.arguments import Complexes, Floats, complex_finite, matrices
from specflow.calculators.decibel import decibels
from specflow.errors import CalculationError


def cascade_two_ports(first: npt.ArrayLike, second: npt.ArrayLike) -> Complexes:
    """Return the scattering matrix of two two-ports in a row.

    Formula: with D = 1 - S22a·S11b: S21 = S21a·S21b/D, S12 = S12a·S12b/D, S11 = S11a + S12a·S21a·S11b/D,
    S22 = S22b + S12b·S21b·S22a/D.
    Valid: the reference impedances at the joint match.
    Source: signal flow graph; equals the cascade of scikit-rf. Multiplying |S21| alone leaves out the mismatch.

    >>> a, b = [[0.0, 0.5], [0.5, 0.2]], [[0.5, 0.4], [0.4, 0.0]]
    >>> print(np.round(cascade_two_ports(a, b).real, 4))
    [[0.1389 0.2222]
     [0.2222 0.0356]]
    """
    a, b = matrices(first, 2, "first"), matrices(second, 2, "second")
    loop = 1.0 - a[..., 1, 1] * b[..., 0, 0]
    if np.any(loop == 0):
        raise CalculationError("the reflections at the joint are 1 together", hint="the cascade oscillates")
    result = np.empty(np.broadcast_shapes(a.shape, b.shape), np.complex128)
    result[..., 0, 0] = a[..., 0, 0] + a[..., 0, 1] * a[..., 1, 0] * b[..., 0, 0] / loop
    result[..., 0, 1] = a[..., 0, 1] * b[..., 0, 1] / loop
    result[..., 1, 0] = a[..., 1, 0] * b[..., 1, 0] / loop
    result[..., 1, 1] = b[..., 1, 1] + b[..., 0, 1] * b[..., 1, 0] * a[..., 1, 1] / loop
    return result


def input_reflection(s: npt.ArrayLike, load: npt.ArrayLike) -> Complexes:
    """Return the reflection at port 1 with a load at port 2.

    Formula: S11 + S12·S21·Γl/(1 - S22·Γl).
    Valid: stable termination.
    Source: D. M. Pozar, Microwave Engineering, ch. 12; a matched load gives S11.

    >>> print(input_reflection([[0.3, 0.1], [2.0, 0.4]], 0.0).real)
    0.3
    """
    m, g = matrices(s, 2, "s"), complex_finite(load, "load")
    return m[..., 0, 0] + m[..., 0, 1] * m[..., 1, 0] * g / (1.0 - m[..., 1, 1] * g)


def output_reflection(s: npt.ArrayLike, source: npt.ArrayLike) -> Complexes:
    """Return the reflection at port 2 with a source at port 1.

    Formula: S22 + S12·S21·Γs/(1 - S11·Γs).
    Valid: stable termination.
    Source: D. M. Pozar, Microwave Engineering, ch. 12; a matched source gives S22.

    >>> print(output_reflection([[0.3, 0.1], [2.0, 0.4]], 0.0).real)
    0.4
    """
    m, g = matrices(s, 2, "s"), complex_finite(source, "source")
    return m[..., 1, 1] + m[..., 0, 1] * m[..., 1, 0] * g / (1.0 - m[..., 0, 0] * g)


def available_gain(s: npt.ArrayLike, source: npt.ArrayLike = 0.0) -> Floats:
    """Return the available gain in dB: power available from port 2 over power available from the source.

    Formula: |S21|²·(1 - |Γs|²)/(|1 - S11·Γs|²·(1 - |Γout|²)).
    Valid: |Γs| and |Γout| below 1. This is the gain that Friis needs.
    Source: D. M. Pozar, Microwave Engineering, ch. 12; computed: matched source, |S21| 2, S22 0.4.

    >>> print(f"{available_gain([[0.3, 0.0], [2.0, 0.4]]):.4f}")
    6.7778
    """
    m, g = matrices(s, 2, "s"), complex_finite(source, "source")
    left = 1.0 - np.abs(output_reflection(m, g)) ** 2
    given = 1.0 - np.abs(g) ** 2
    if np.any(left <= 0) or np.any(given <= 0):
        raise CalculationError(
            "a reflection reaches 1", hint="the available gain is defined for a source and an output below 1"
        )
    return decibels(np.abs(m[..., 1, 0]) ** 2 * given / (np.abs(1.0 - m[..., 0, 0] * g) ** 2 * left))


def transducer_gain(s: npt.ArrayLike, source: npt.ArrayLike = 0.0, load: npt.ArrayLike = 0.0) -> Floats:
    """Return the transducer gain in dB: power into the load over power available from the source.

    Formula: |S21|²(1 - |Γs|²)(1 - |Γl|²)/(|1 - Γs·Γin|²·|1 - S22·Γl|²).
    Valid: |Γs| and |Γl| below 1.
    Source: D. M. Pozar, Microwave Engineering, ch. 12; |S21|² between matched ends.

    >>> print(f"{transducer_gain([[0.3, 0.0], [2.0, 0.4]]):.4f}")
    6.0206
    """
    m = matrices(s, 2, "s")
    gs, gl = complex_finite(source, "source"), complex_finite(load, "load")
    passed = (1.0 - np.abs(gs) ** 2) * (1.0 - np.abs(gl) ** 2)
    if np.any(np.abs(gs) >= 1.0) or np.any(np.abs(gl) >= 1.0):
        raise CalculationError("a reflection reaches 1", hint="give source and load reflections below 1")
    loop = np.abs(1.0 - gs * input_reflection(m, gl)) ** 2 * np.abs(1.0 - m[..., 1, 1] * gl) ** 2
    return decibels(np.abs(m[..., 1, 0]) ** 2 * passed / loop)
