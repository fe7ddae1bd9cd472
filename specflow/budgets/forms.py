"""How the figure that a line states becomes the figure that a law takes, with its derivative."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.calculators.decibel import T0
from specflow.calculators.error_vector import (
    evm_from_carrier_leakage,
    evm_from_image,
    evm_from_phase_noise,
    evm_from_snr,
)
from specflow.calculators.image_noise import ssb_noise_figure
from specflow.calculators.noise import noise_figure_of_temperature

Floats = NDArray[np.float64]
_PER_DB = math.log(10.0) / 20.0


@dataclass(frozen=True, slots=True)
class Form:
    """``value`` maps the stated figure, ``slope`` is its derivative (both elementwise); ``rises``: +1 or -1."""

    value: Callable[[Floats], Floats]
    slope: Callable[[Floats], Floats]
    rises: int = 1


@dataclass(frozen=True, slots=True)
class Role:
    """What a line is for the law: the ``figure`` it gives, in ``unit`` before ``form`` is applied.

    ``port``: "output" for an intercept or compression point stated there, which the position's gain takes to its input.
    """

    figure: str
    unit: str
    form: Form
    port: str = ""


def _one(values: Floats) -> Floats:
    return np.ones_like(values)


def _phase_slope(degrees: Floats) -> Floats:
    radians = np.deg2rad(degrees)
    value = np.sqrt(-2.0 * np.expm1(-(radians**2) / 2.0))
    rise = np.divide(radians, value, out=np.ones_like(radians), where=value > 0)
    return np.asarray(100.0 * math.pi / 180.0 * rise * np.exp(-(radians**2) / 2.0))


AS_IT_IS = Form(lambda values: values, _one)
LOSS = Form(np.negative, lambda values: -_one(values), -1)
TEMPERATURE = Form(
    noise_figure_of_temperature, lambda kelvin: np.asarray(10.0 / math.log(10.0) / (T0 + kelvin))
)
DOUBLE_SIDEBAND = Form(ssb_noise_figure, _one)
DOUBLE_SIDEBAND_TEMPERATURE = Form(
    lambda kelvin: ssb_noise_figure(noise_figure_of_temperature(kelvin)), TEMPERATURE.slope
)
SIGNAL_TO_ERROR = Form(evm_from_snr, lambda db: -_PER_DB * evm_from_snr(db), -1)
IMAGE = Form(evm_from_image, lambda db: -_PER_DB * evm_from_image(db), -1)
CARRIER = Form(evm_from_carrier_leakage, lambda dbc: _PER_DB * evm_from_carrier_leakage(dbc))
PHASE_NOISE = Form(evm_from_phase_noise, _phase_slope)

LOSSES = (
    "insertion_loss",
    "conversion_loss",
    "attenuation",
    "radome_loss",
    "scan_loss",
    "pointing_loss",
)

GAINS = ("gain", "antenna_gain")

#: Parameter of a line -> its role in a cascade.
CASCADE_ROLES: dict[str, Role] = {
    "gain": Role("gain", "dB", AS_IT_IS),
    **{name: Role("gain", "dB", LOSS) for name in LOSSES},
    "noise_figure": Role("noise_figure", "dB", AS_IT_IS),
    "noise_temperature": Role("noise_figure", "K", TEMPERATURE),
    "iip3": Role("iip3", "dBm", AS_IT_IS, "input"),
    "oip3": Role("iip3", "dBm", AS_IT_IS, "output"),
    "iip2": Role("iip2", "dBm", AS_IT_IS, "input"),
    "oip2": Role("iip2", "dBm", AS_IT_IS, "output"),
    "ip1db": Role("ip1db", "dBm", AS_IT_IS, "input"),
    "op1db": Role("ip1db", "dBm", AS_IT_IS, "output"),
    "antenna_gain": Role("antenna_gain", "dBi", AS_IT_IS),
    "antenna_noise_temperature": Role("source_k", "K", AS_IT_IS),
    "output_power": Role("source_level", "dBm", AS_IT_IS),
    "snr": Role("snr", "dB", AS_IT_IS),
    "image_rejection": Role("image_rejection", "dB", AS_IT_IS),
    "dc_power": Role("dc_w", "W", AS_IT_IS),
    "drain_efficiency": Role("efficiency", "%", AS_IT_IS),
    "pae": Role("added_efficiency", "%", AS_IT_IS),
    "blocking_level": Role("blocker", "dBm", AS_IT_IS),
    "receiver_intermodulation": Role("tones", "dBm", AS_IT_IS),
    "phase_noise": Role("phase_noise", "dBc/Hz", AS_IT_IS),
    "noise_density": Role("leaked_noise", "dBm/Hz", AS_IT_IS),
    "isolation": Role("isolation", "dB", AS_IT_IS),
    "rejection": Role("rejection", "dB", AS_IT_IS),
    "desensitisation": Role("allowed_rise", "dB", AS_IT_IS),
}

#: The same of a mixer whose figure is a double-sideband one: what the law takes is the single-sideband figure.
DOUBLE_SIDEBAND_ROLES: dict[str, Role] = {
    "noise_figure": Role("noise_figure", "dB", DOUBLE_SIDEBAND),
    "noise_temperature": Role("noise_figure", "K", DOUBLE_SIDEBAND_TEMPERATURE),
}

#: Parameter of a line -> how it becomes a part of an error vector in %.
ERROR_VECTOR_ROLES: dict[str, Role] = {
    "evm": Role("amount", "%", AS_IT_IS),
    "snr": Role("amount", "dB", SIGNAL_TO_ERROR),
    "modulation_error_ratio": Role("amount", "dB", SIGNAL_TO_ERROR),
    "image_rejection": Role("amount", "dB", IMAGE),
    "carrier_rejection": Role("amount", "dB", IMAGE),
    "image_level": Role("amount", "dBc", CARRIER),
    "carrier_leakage": Role("amount", "dBc", CARRIER),
    "integrated_phase_error": Role("amount", "deg", PHASE_NOISE),
}
