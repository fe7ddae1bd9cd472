"""The kinds of quantity that radio engineering tells apart, and what a spectrum can be."""

from __future__ import annotations

from enum import StrEnum


class Kind(StrEnum):
    """What a unit measures. Arithmetic and conversion are decided by kind, not by the letters of the symbol."""

    LEVEL = "level"  # a power, or a voltage or current level: dBm, dBW, W, dBµV
    LEVEL_DENSITY = "level density"  # a level in a reference bandwidth: dBm/MHz, dBm/40 kHz, W/Hz
    FIELD_LEVEL = "field level"  # V/m, dBµV/m, A/m
    FIELD_DENSITY = "field level density"  # a field level in a reference bandwidth: dBµV/m/MHz
    POWER_FLUX = "power flux"  # W/m², mW/cm², dBW/m²
    POWER_FLUX_DENSITY = "power flux density"  # power flux in a reference bandwidth: dBW/m²/MHz
    RATIO = "ratio"  # dB, dBc, dBi, dBd, dBr, dBFS, %, ppm, 1
    RATIO_DENSITY = "ratio density"  # dBc/Hz
    DB_PER_LENGTH = "dB per length"  # dB/m, dB/100 m
    DB_SLOPE = "dB slope"  # dB/MHz, dB/°C, deg/dB
    BANDWIDTH_LOG = "bandwidth in dB"  # dBHz
    MERIT = "figure of merit"  # dB/K
    PHYSICAL_LOG = "physical quantity in dB"  # dBK, dBsm
    PHYSICAL = "physical quantity"  # Hz, s, K, °C, V, A, Ω, deg, RB


class Spectrum(StrEnum):
    """How a signal fills its bandwidth: only a noise-like one scales with the bandwidth it is measured in."""

    NOISE_LIKE = "noise-like"
    DISCRETE = "discrete"
    UNKNOWN = "unknown"
