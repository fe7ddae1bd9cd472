"""Noise power, noise temperature and noise figure of one thing."""

from __future__ import annotations

import numpy as np

from specflow.calculators.arguments import Figures, Floats, above, count, finite, kelvin, noise_figure
from specflow.calculators.decibel import BOLTZMANN, T0, decibels, ratio
from specflow.errors import CalculationError


def thermal_noise_density(temperature_k: Figures) -> Floats:
    """Return the available noise power density of a resistor in dBm/Hz.

    Formula: 10·log(k·T·1000).
    Valid: below some 100 GHz at room temperature (h·f much less than k·T). -174 is a rounding of -173.975.
    Source: H. Nyquist, Phys. Rev. 32 (1928); k of the SI. Example computed from the formula.

    >>> print(f"{thermal_noise_density(290):.3f}")
    -173.975
    """
    return decibels(BOLTZMANN * above(temperature_k, 0.0, "temperature_k") * 1e3)


def thermal_noise_power(temperature_k: Figures, bandwidth_hz: Figures) -> Floats:
    """Return the available noise power of a resistor in dBm.

    Formula: 10·log(k·T·B·1000).
    Valid: B is the noise bandwidth: neither the channel spacing nor the 3 dB width.
    Source: H. Nyquist, Phys. Rev. 32 (1928); k of the SI. Example computed from the formula.

    >>> print(f"{thermal_noise_power(290, 10e6):.4f}")
    -103.9752
    """
    return thermal_noise_density(temperature_k) + decibels(above(bandwidth_hz, 0.0, "bandwidth_hz"))


def noise_temperature(nf_db: Figures, reference_k: float = T0) -> Floats:
    """Return the equivalent input noise temperature in K.

    Formula: Te = T0·(F - 1).
    Valid: T0 is 290 K by definition; some texts take 300 K, which gives other numbers.
    Source: worked answer (4 dB, 300 K reference: 453.6 K) in a textbook solution read at holooly.com.

    >>> print(f"{noise_temperature(4.0, 300.0):.1f} {noise_temperature(4.0):.1f}")
    453.6 438.4
    """
    kelvin(reference_k, "reference_k")
    return reference_k * (ratio(noise_figure(nf_db, "nf_db")) - 1.0)


def noise_figure_of_temperature(te_k: Figures) -> Floats:
    """Return the noise figure in dB of an equivalent input noise temperature.

    Formula: F = 1 + Te/290.
    Valid: always, by the definition of the noise figure.
    Source: inverse of Te = 290·(F - 1); the example takes the inverse of the value above.

    >>> print(f"{noise_figure_of_temperature(438.4471):.4f}")
    4.0000
    """
    return decibels(1.0 + kelvin(te_k, "te_k") / T0)


def butterworth_noise_bandwidth_ratio(order: Figures) -> Floats:
    """Return the noise bandwidth of a Butterworth low-pass relative to its 3 dB bandwidth.

    Formula: (π/2n)/sin(π/2n).
    Valid: the ideal response 1/(1 + f^2n), source of white noise.
    Source: courseware "Noise in Communication Systems" (order 1: 1.571); integral of the response.

    >>> print(f"{butterworth_noise_bandwidth_ratio(1):.4f} {butterworth_noise_bandwidth_ratio(3):.4f}")
    1.5708 1.0472
    """
    half = np.pi / (2.0 * count(order, "order"))
    return half / np.sin(half)


def y_factor_noise_temperature(hot_k: Figures, cold_k: Figures, y_db: Figures) -> Floats:
    """Return the noise temperature in K measured with a hot and a cold source.

    Formula: Te = (Th - Y·Tc)/(Y - 1).
    Valid: same match and bandwidth in both states; Y above 0 dB and Th above Y·Tc.
    Source: D. M. Pozar, Microwave Engineering, Y-factor example (values from memory, 170 K printed).

    >>> print(f"{y_factor_noise_temperature(290.0, 77.0, 2.7):.1f}")
    170.1
    """
    y = ratio(above(y_db, 0.0, "y_db"))
    temperature = (kelvin(hot_k, "hot_k") - y * kelvin(cold_k, "cold_k")) / (y - 1.0)
    if np.any(temperature < 0):
        raise CalculationError(
            "the hot and the cold reading give a noise temperature below 0 K",
            hint="Y is larger than a noiseless receiver would show; check the source temperatures",
        )
    return temperature


def y_factor_noise_figure(enr_db: Figures, y_db: Figures, cold_k: Figures = T0) -> Floats:
    """Return the noise figure in dB measured with a noise source of known excess noise ratio.

    Formula: Th = 290·(1 + ENR), Te = (Th - Y·Tc)/(Y - 1), F = 1 + Te/290; NF = ENR - 10·log(Y - 1) if Tc is 290 K.
    Valid: ENR is referred to 290 K whatever the cold temperature is.
    Source: the definition of ENR; the example is computed from the formula.

    >>> print(f"{y_factor_noise_figure(15.0, 8.0, 300.0):.4f}")
    7.7194
    """
    hot = T0 * (1.0 + ratio(finite(enr_db, "enr_db")))
    return noise_figure_of_temperature(y_factor_noise_temperature(hot, cold_k, y_db))


def first_stage_noise_figure(
    measured_nf_db: Figures, second_nf_db: Figures, first_gain_db: Figures
) -> Floats:
    """Return the noise figure in dB of a device when the instrument behind it is taken off the measured value.

    Formula: F1 = F12 - (F2 - 1)/G1.
    Valid: poor where G1 is small and F2 large (a difference of near-equal numbers); below 0 dB it is refused.
    Source: Friis solved for the first stage; the example is the two-stage cascade 10/2 dB, -/8 dB taken back.

    >>> print(f"{first_stage_noise_figure(3.2548, 8.0, 10.0):.3f}")
    2.000
    """
    second = (ratio(noise_figure(second_nf_db, "second_nf_db")) - 1.0) / ratio(
        finite(first_gain_db, "first_gain_db")
    )
    first = ratio(noise_figure(measured_nf_db, "measured_nf_db")) - second
    if np.any(first < 1.0):
        raise CalculationError(
            "the second stage alone makes more noise than was measured",
            hint="check the gain of the first and the noise figure of the second stage",
        )
    return decibels(first)


def output_noise_power(gain_db: Figures, nf_db: Figures, antenna_k: Figures, bandwidth_hz: Figures) -> Floats:
    """Return the noise power at the output in dBm.

    Formula: No = G·k·B·(Ta + (F - 1)·290).
    Valid: one bandwidth along the chain; Ta at the same plane as F.
    Source: D. M. Pozar, Microwave Engineering, 4th ed., Example 10.5 (-47.4 dBm printed).

    >>> print(f"{output_noise_power(40.0, 7.0, 150.0, 100e6):.2f}")
    -47.42
    """
    system = kelvin(antenna_k, "antenna_k") + noise_temperature(nf_db)
    return thermal_noise_power(system, bandwidth_hz) + finite(gain_db, "gain_db")


def minimum_input_signal(
    nf_db: Figures, antenna_k: Figures, bandwidth_hz: Figures, snr_db: Figures
) -> Floats:
    """Return the input level in dBm that gives an output signal-to-noise ratio, for any antenna temperature.

    Formula: Si = SNR·k·B·(Ta + Te). NF alone must not be added to kTB when Ta is not 290 K.
    Valid: one bandwidth along the chain.
    Source: D. M. Pozar, Microwave Engineering, 4th ed., Example 10.2 (-82.8 dBm printed).

    >>> print(f"{minimum_input_signal(2.5555, 150.0, 10e6, 20.0):.2f}")
    -82.77
    """
    system = kelvin(antenna_k, "antenna_k") + noise_temperature(nf_db)
    return thermal_noise_power(system, bandwidth_hz) + finite(snr_db, "snr_db")


def rms_voltage(level_dbm: Figures, impedance_ohm: float = 50.0) -> Floats:
    """Return the rms voltage in V of a level in a matched load.

    Formula: V = √(P·Z).
    Valid: real impedance.
    Source: D. M. Pozar, Microwave Engineering, 4th ed., Example 10.2 (16.2 µV printed).

    >>> print(f"{rms_voltage(-82.7791) * 1e6:.2f} uV")
    16.24 uV
    """
    above(impedance_ohm, 0.0, "impedance_ohm")
    return np.sqrt(ratio(finite(level_dbm, "level_dbm")) * 1e-3 * impedance_ohm)
