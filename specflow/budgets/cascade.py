"""The quantities of a cascade, each by the calculators' laws."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.figures import Figures
from specflow.budgets.outputs import Output
from specflow.calculators.compression import cascade_ip1db
from specflow.calculators.decibel import BOLTZMANN, T0, total
from specflow.calculators.intercept_cascade import (
    Law,
    cascade_iip2,
    cascade_iip3,
    iip2_slopes,
    iip3_shares,
    iip3_slopes,
)
from specflow.calculators.noise import noise_temperature
from specflow.calculators.noise_cascade import (
    cascade_gain,
    cascade_noise_figure,
    cumulative_noise_figure,
    excess_noise_shares,
    noise_figure_slopes,
)

Floats = NDArray[np.float64]
Gradient = dict[str, Floats]
Quantity = Callable[[Figures], Floats]
Derivatives = Callable[[Figures], Mapping[str, Floats]]
_PER_NEPER = 10.0 / math.log(10.0)
_MILLIWATT = 1e3


def _sum_law(figures: Figures) -> Law:
    return "coherent" if figures.chain.budget.intermodulation == "coherent" else "noncoherent"


# Gain and level


def gain(figures: Figures) -> Floats:
    """Total gain in dB."""
    return cascade_gain(figures["gain"])


def gain_so_far(figures: Figures) -> Floats:
    """Gain in dB up to and including each position."""
    return np.cumsum(figures["gain"], axis=0)


def _gain_slopes(figures: Figures) -> Gradient:
    return {"gain": np.ones_like(figures["gain"])}


def level(figures: Figures) -> Floats:
    """Level at the output in dBm."""
    assert figures.start is not None
    return figures.start + gain(figures)


def level_so_far(figures: Figures) -> Floats:
    """Level behind each position in dBm."""
    assert figures.start is not None
    return figures.start + gain_so_far(figures)


def _level_slopes(figures: Figures) -> Gradient:
    return {"gain": np.ones_like(figures["gain"]), "source_level": np.ones_like(figures["gain"])}


def eirp(figures: Figures) -> Floats:
    """Level at the output with the antenna gain, dBm."""
    return level(figures) + total(figures["antenna_gain"])


def eirp_so_far(figures: Figures) -> Floats:
    """Level behind each position with the antenna gain met so far."""
    return level_so_far(figures) + np.cumsum(figures["antenna_gain"], axis=0)


def _eirp_slopes(figures: Figures) -> Gradient:
    return {**_level_slopes(figures), "antenna_gain": np.ones_like(figures["gain"])}


# Noise


def noise_figure(figures: Figures) -> Floats:
    """Noise figure in dB, Friis."""
    return cascade_noise_figure(figures["gain"], figures["noise_figure"])


def noise_figure_so_far(figures: Figures) -> Floats:
    """Noise figure of the chain cut off behind each position."""
    return cumulative_noise_figure(figures["gain"], figures["noise_figure"])


def noise_shares(figures: Figures) -> Floats:
    """Share of each position in F - 1."""
    return excess_noise_shares(figures["gain"], figures["noise_figure"])


def _noise_slopes(figures: Figures) -> Gradient:
    slopes = noise_figure_slopes(figures["gain"], figures["noise_figure"])
    return {"noise_figure": slopes.to_figure, "gain": slopes.to_gain}


def _kelvin(nf: Floats) -> Floats:
    return np.asarray(T0 * np.expm1(nf / _PER_NEPER))


def temperature(figures: Figures) -> Floats:
    """Equivalent input noise temperature of the chain in K."""
    return noise_temperature(noise_figure(figures))


def temperature_so_far(figures: Figures) -> Floats:
    """Equivalent input noise temperature behind each position."""
    return _kelvin(noise_figure_so_far(figures))


def _temperature_slopes(figures: Figures) -> Gradient:
    factor = (T0 + temperature(figures)) / _PER_NEPER
    return {name: slope * factor for name, slope in _noise_slopes(figures).items()}


def source(figures: Figures) -> Floats | float:
    """Noise temperature in K of what feeds the chain: antenna line, the budget's own, else 290 K."""
    if "source_k" in figures.arrays and any(one.role.figure == "source_k" for one in figures.chain.lines):
        return total(figures["source_k"])
    stated = figures.chain.budget.noise_source
    return T0 if stated is None else stated


def system(figures: Figures) -> Floats:
    """System noise temperature in K at the input of the chain."""
    return source(figures) + temperature(figures)


def system_so_far(figures: Figures) -> Floats:
    """System noise temperature with the chain cut off behind each position."""
    return source(figures) + temperature_so_far(figures)


def _system_slopes(figures: Figures) -> Gradient:
    return {**_temperature_slopes(figures), "source_k": np.ones_like(figures["gain"])}


def merit(figures: Figures) -> Floats:
    """G/T in dB/K at the input of the chain."""
    return total(figures["antenna_gain"]) - _PER_NEPER * np.log(system(figures))


def merit_so_far(figures: Figures) -> Floats:
    """G/T with the chain cut off behind each position, from the whole antenna gain."""
    return total(figures["antenna_gain"]) - _PER_NEPER * np.log(system_so_far(figures))


def _merit_slopes(figures: Figures) -> Gradient:
    factor = -_PER_NEPER / system(figures)
    parts = {name: slope * factor for name, slope in _system_slopes(figures).items()}
    return {**parts, "antenna_gain": np.ones_like(figures["gain"])}


def system_shares(figures: Figures) -> Floats:
    """Share of each position in the system temperature; what feeds the chain has the rest."""
    return noise_shares(figures) * (temperature(figures) / system(figures))


def floor(figures: Figures) -> Floats:
    """Noise in the bandwidth referred to the input, dBm."""
    return np.asarray(_PER_NEPER * np.log(system(figures) * (BOLTZMANN * _MILLIWATT * _bandwidth(figures))))


def floor_so_far(figures: Figures) -> Floats:
    """The same with the chain cut off behind each position."""
    return _PER_NEPER * np.log(system_so_far(figures) * (BOLTZMANN * _MILLIWATT * _bandwidth(figures)))


def _bandwidth(figures: Figures) -> float:
    found = figures.chain.budget.bandwidth_hz
    assert found is not None
    return found


def _floor_slopes(figures: Figures) -> Gradient:
    factor = _PER_NEPER / system(figures)
    return {name: slope * factor for name, slope in _system_slopes(figures).items()}


def density(figures: Figures) -> Floats:
    """Noise density at the output, dBm/Hz."""
    return gain(figures) + _PER_NEPER * np.log(system(figures) * (BOLTZMANN * _MILLIWATT))


def density_so_far(figures: Figures) -> Floats:
    """Noise density behind each position, dBm/Hz."""
    return gain_so_far(figures) + _PER_NEPER * np.log(system_so_far(figures) * (BOLTZMANN * _MILLIWATT))


def _density_slopes(figures: Figures) -> Gradient:
    slopes = _floor_slopes(figures)
    return {**slopes, "gain": slopes["gain"] + 1.0}


def sensitivity(figures: Figures) -> Floats:
    """Least level at the input in dBm: noise floor and the signal-to-noise ratio that is needed."""
    return floor(figures) + total(figures["snr"])


def sensitivity_so_far(figures: Figures) -> Floats:
    """The same with the chain cut off behind each position."""
    return floor_so_far(figures) + total(figures["snr"])


def _sensitivity_slopes(figures: Figures) -> Gradient:
    return {**_floor_slopes(figures), "snr": np.ones_like(figures["gain"])}


# Distortion


def iip3(figures: Figures) -> Floats:
    """Third-order intercept at the input, dBm."""
    return cascade_iip3(figures["gain"], figures["iip3"], _sum_law(figures))


def iip2(figures: Figures) -> Floats:
    """Second-order intercept at the input, dBm."""
    return cascade_iip2(figures["gain"], figures["iip2"], _sum_law(figures))


def ip1db(figures: Figures) -> Floats:
    """1 dB compression point at the input, dBm (approximation)."""
    return cascade_ip1db(figures["gain"], figures["ip1db"])


def _so_far(figure: str, power: Callable[[Figures], float]) -> Quantity:
    """Return the intercept or compression point of the chain cut off behind each position."""

    def so_far(figures: Figures) -> Floats:
        exponent = power(figures)
        before = np.zeros_like(figures["gain"])
        np.cumsum(figures["gain"][:-1], axis=0, out=before[1:])
        parts = np.exp((before - figures[figure]) * (exponent / _PER_NEPER))
        with np.errstate(divide="ignore"):
            return np.asarray(-_PER_NEPER / exponent * np.log(np.cumsum(parts, axis=0)))

    return so_far


def _third(figures: Figures) -> float:
    return 1.0 if _sum_law(figures) == "coherent" else 2.0


def _second(figures: Figures) -> float:
    return 0.5 if _sum_law(figures) == "coherent" else 1.0


def _iip3_slopes(figures: Figures) -> Gradient:
    slopes = iip3_slopes(figures["gain"], figures["iip3"], _sum_law(figures))
    return {"iip3": slopes.to_figure, "gain": slopes.to_gain}


def _iip2_slopes(figures: Figures) -> Gradient:
    slopes = iip2_slopes(figures["gain"], figures["iip2"], _sum_law(figures))
    return {"iip2": slopes.to_figure, "gain": slopes.to_gain}


def _ip1db_slopes(figures: Figures) -> Gradient:
    slopes = iip3_slopes(figures["gain"], figures["ip1db"], "coherent")
    return {"ip1db": slopes.to_figure, "gain": slopes.to_gain}


def _third_shares(figures: Figures) -> Floats:
    return iip3_shares(figures["gain"], figures["iip3"], _sum_law(figures))


def _second_shares(figures: Figures) -> Floats:
    return iip2_slopes(figures["gain"], figures["iip2"], _sum_law(figures)).to_figure


def _compression_shares(figures: Figures) -> Floats:
    return iip3_shares(figures["gain"], figures["ip1db"], "coherent")


def _at_output(
    value: Quantity, so_far: Quantity, slopes: Derivatives, less: float = 0.0
) -> tuple[Quantity, Quantity, Derivatives]:
    """Refer an input intercept or compression point to the output of the chain."""

    def moved(figures: Figures) -> Floats:
        return value(figures) + gain(figures) - less

    def moved_so_far(figures: Figures) -> Floats:
        return so_far(figures) + gain_so_far(figures) - less

    def moved_slopes(figures: Figures) -> Mapping[str, Floats]:
        found = slopes(figures)
        return {**found, "gain": found["gain"] + 1.0}

    return moved, moved_so_far, moved_slopes


_IIP3_SO_FAR = _so_far("iip3", _third)
_IIP2_SO_FAR = _so_far("iip2", _second)
_IP1DB_SO_FAR = _so_far("ip1db", lambda figures: 1.0)
_OIP3 = _at_output(iip3, _IIP3_SO_FAR, _iip3_slopes)
_OIP2 = _at_output(iip2, _IIP2_SO_FAR, _iip2_slopes)
_OP1DB = _at_output(ip1db, _IP1DB_SO_FAR, _ip1db_slopes, 1.0)


def back_off(figures: Figures) -> Floats:
    """Output compression point less output level, dB."""
    return _OP1DB[0](figures) - level(figures)


def back_off_so_far(figures: Figures) -> Floats:
    """The same behind each position."""
    return _OP1DB[1](figures) - level_so_far(figures)


def _back_off_slopes(figures: Figures) -> Gradient:
    found = _OP1DB[2](figures)
    return {**found, "gain": found["gain"] - 1.0, "source_level": -np.ones_like(figures["gain"])}


def sfdr(figures: Figures) -> Floats:
    """Spurious-free dynamic range 2/3 (IIP3 - noise floor), dB; no signal-to-noise ratio is taken off."""
    return 2.0 / 3.0 * (iip3(figures) - floor(figures))


def sfdr_so_far(figures: Figures) -> Floats:
    """The same with the chain cut off behind each position."""
    return 2.0 / 3.0 * (_IIP3_SO_FAR(figures) - floor_so_far(figures))


def _sfdr_slopes(figures: Figures) -> Gradient:
    third, noise = _iip3_slopes(figures), _floor_slopes(figures)
    names = {*third, *noise}
    zero = np.zeros_like(figures["gain"])
    return {name: 2.0 / 3.0 * (third.get(name, zero) - noise.get(name, zero)) for name in names}


_FRIIS = "Friis, available gains"
_GAIN, _NOISE = ("gain",), ("gain", "noise_figure")
_SYSTEM = (*_NOISE, "source_k")
_THIRD, _SECOND, _COMPRESSION = ("gain", "iip3"), ("gain", "iip2"), ("gain", "ip1db")
_APPROXIMATE = "1/IP1 = sum of G_before/IP1_i, good to about 0.5 dB"

CASCADE: tuple[Output, ...] = (
    Output("gain", "dB", "gains added", _GAIN, gain, gain_so_far, _gain_slopes, last_gain=True),
    Output(
        "noise_figure", "dB", _FRIIS, _NOISE, noise_figure, noise_figure_so_far, _noise_slopes, noise_shares
    ),
    Output(
        "noise_temperature",
        "K",
        _FRIIS,
        _NOISE,
        temperature,
        temperature_so_far,
        _temperature_slopes,
        noise_shares,
    ),
    Output(
        "system_noise_temperature",
        "K",
        "source temperature and chain temperature at the input",
        _SYSTEM,
        system,
        system_so_far,
        _system_slopes,
        system_shares,
        ("noise source",),
    ),
    Output(
        "g_over_t",
        "dB/K",
        "antenna gain over system temperature, both at the input of the chain",
        (*_SYSTEM, "antenna_gain"),
        merit,
        merit_so_far,
        _merit_slopes,
        system_shares,
        ("noise source", "antenna gain"),
    ),
    Output(
        "noise_floor",
        "dBm",
        "k T B",
        _SYSTEM,
        floor,
        floor_so_far,
        _floor_slopes,
        system_shares,
        ("bandwidth",),
    ),
    Output(
        "noise_density",
        "dBm/Hz",
        "G k (T_source + T_chain) at the output",
        _SYSTEM,
        density,
        density_so_far,
        _density_slopes,
        system_shares,
        last_gain=True,
    ),
    *(
        Output(
            name,
            "dBm",
            "noise floor and the signal-to-noise ratio needed",
            (*_SYSTEM, "snr"),
            sensitivity,
            sensitivity_so_far,
            _sensitivity_slopes,
            system_shares,
            ("bandwidth", "signal-to-noise ratio"),
        )
        for name in ("sensitivity", "refsens")
    ),
    Output("iip3", "dBm", "third order", _THIRD, iip3, _IIP3_SO_FAR, _iip3_slopes, _third_shares),
    Output("oip3", "dBm", "third order", _THIRD, *_OIP3, _third_shares, last_gain=True),
    Output("iip2", "dBm", "second order", _SECOND, iip2, _IIP2_SO_FAR, _iip2_slopes, _second_shares),
    Output("oip2", "dBm", "second order", _SECOND, *_OIP2, _second_shares, last_gain=True),
    Output(
        "ip1db", "dBm", _APPROXIMATE, _COMPRESSION, ip1db, _IP1DB_SO_FAR, _ip1db_slopes, _compression_shares
    ),
    Output("op1db", "dBm", _APPROXIMATE, _COMPRESSION, *_OP1DB, _compression_shares, last_gain=True),
    Output(
        "output_power",
        "dBm",
        "input level and gains",
        ("gain", "source_level"),
        level,
        level_so_far,
        _level_slopes,
        asks=("input level",),
        last_gain=True,
    ),
    Output(
        "eirp",
        "dBm",
        "output level and antenna gain",
        ("gain", "source_level", "antenna_gain"),
        eirp,
        eirp_so_far,
        _eirp_slopes,
        asks=("input level", "antenna gain"),
        last_gain=True,
    ),
    Output(
        "output_backoff",
        "dB",
        f"output compression point ({_APPROXIMATE}) less output level",
        (*_COMPRESSION, "source_level"),
        back_off,
        back_off_so_far,
        _back_off_slopes,
        asks=("input level",),
        last_gain=True,
    ),
    Output(
        "sfdr",
        "dB",
        "2/3 (IIP3 - noise floor)",
        (*_SYSTEM, "iip3"),
        sfdr,
        sfdr_so_far,
        _sfdr_slopes,
        asks=("bandwidth",),
        is_monotonic=False,
    ),
)
