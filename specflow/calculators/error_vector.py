"""Error vector magnitude: its parts, in % of the rms signal and in dB, and their combination."""

from __future__ import annotations

import numpy as np

from specflow.calculators.adjacent_channel import in_band_distortion
from specflow.calculators.arguments import Figures, Floats, above, at_least, chain, finite
from specflow.calculators.decibel import amplitude, decibels, total


def evm_db(evm_percent: Figures) -> Floats:
    """Return an error vector magnitude in dB.

    Formula: 20·log(EVM/100): an amplitude ratio.
    Valid: -20·log EVM is the signal-to-noise ratio only when both use average power and the error is noise-like.
    Source: limits of 3GPP TS 38.104 (12.5 % for 16QAM, 3.5 % for 256QAM) converted; computed.

    >>> print(np.round(evm_db([12.5, 3.5]), 3))
    [-18.062 -29.119]
    """
    return 2.0 * decibels(above(evm_percent, 0.0, "evm_percent") / 100.0)


def evm_percent(evm_db: Figures) -> Floats:
    """Return an error vector magnitude in % from dB; also from a signal-to-error ratio with its sign turned.

    Formula: 100·10^(dB/20).
    Valid: as for dB.
    Source: inverse of 20·log(EVM/100); -40 dB is 1 %.

    >>> print(f"{evm_percent(-40.0):.6f}")
    1.000000
    """
    return 100.0 * amplitude(finite(evm_db, "evm_db"))


def evm_from_snr(snr_db: Figures) -> Floats:
    """Return the error vector magnitude in % of noise (thermal, quantisation, jitter) at a signal-to-noise ratio.

    Formula: 100·10^(-SNR/20).
    Valid: SNR from average powers in the bandwidth of the receiver of the measurement.
    Source: definition; computed.

    >>> print(f"{evm_from_snr(30.0):.4f}")
    3.1623
    """
    return 100.0 * amplitude(-finite(snr_db, "snr_db"))


def evm_from_image(rejection_db: Figures) -> Floats:
    """Return the error vector magnitude in % of an image.

    Formula: 100·10^(-IRR/20).
    Valid: image inside the signal's own band (zero IF), not corrected by the receiver.
    Source: definition; computed.

    >>> print(f"{evm_from_image(40.0):.4f}")
    1.0000
    """
    return 100.0 * amplitude(-finite(rejection_db, "rejection_db"))


def evm_from_carrier_leakage(leakage_dbc: Figures) -> Floats:
    """Return the error vector magnitude in % of carrier leakage.

    Formula: 100·10^(dBc/20).
    Valid: only where the receiver or the definition does not remove it; many standards do.
    Source: definition; computed.

    >>> print(f"{evm_from_carrier_leakage(-35.0):.4f}")
    1.7783
    """
    return 100.0 * amplitude(finite(leakage_dbc, "leakage_dbc"))


def evm_from_phase_noise(rms_deg: Figures) -> Floats:
    """Return the error vector magnitude in % of Gaussian phase noise.

    Formula: 100·√(2 - 2·exp(-σ²/2)), about 100·σ for small σ in rad.
    Valid: whole phase error counts; receivers that track the phase remove the slow part, so integrate from there.
    Source: K. Sankar, EVM with phase noise, 2012 (formula); computed.

    >>> print(f"{evm_from_phase_noise(1.0):.4f}")
    1.7453
    """
    variance = np.deg2rad(at_least(rms_deg, 0.0, "rms_deg")) ** 2
    return 100.0 * np.sqrt(-2.0 * np.expm1(-variance / 2.0))


def evm_from_compression(output_dbm: Figures, oip3_dbm: Figures) -> Floats:
    """Return the error vector magnitude in % of weak third-order distortion of a noise-like signal.

    Formula: EVM_dB = 2·(P - OIP3) + 10·log(4/3).
    Valid: Gaussian signal, memoryless cubic, well below compression; otherwise use measured data.
    Source: computed (simulated 1.27 against 1.249 dB).

    >>> print(f"{evm_from_compression(27.0, 47.0):.4f}")
    1.1547
    """
    return evm_percent(in_band_distortion(output_dbm, oip3_dbm))


def combined_evm(evm_percent: Figures) -> Floats:
    """Return the error vector magnitude in % of uncorrelated parts (first axis).

    Formula: √Σ EVM².
    Valid: uncorrelated errors; two stages of the same kind are not.
    Source: worked budget on a public page on 5G NR EVM: 2, 1.5, 1.5, 0.5 % give 2.96 %.

    >>> print(f"{combined_evm([2.0, 1.5, 1.5, 0.5]):.2f}")
    2.96
    """
    parts = chain(evm_percent=at_least(evm_percent, 0.0, "evm_percent"))[0]
    return np.sqrt(total(parts * parts))
