"""Laws of balanced ports: gain and loss between modes of a network that was measured port by port."""

from __future__ import annotations

import re

import numpy as np
from numpy.typing import NDArray

from specflow.derive.law import Law, Outcome, Setting
from specflow.derive.samples import Samples
from specflow.derive.scattering import entry, row_by_row
from specflow.derive.scattering_paths import roles_of_entries
from specflow.errors import CalculationError

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

_MODE = re.compile(r"(?P<kind>[DC])\s*(?P<plus>\d+)\s*,\s*(?P<minus>\d+)|S\s*(?P<single>\d+)", re.IGNORECASE)
_NEEDS = "the entries between the ports of both modes, of one network file recorded port by port"


def mode_weights(text: str, setting: str = "mode") -> dict[int, float]:
    """Return how a mode is made of ports (counted from 1): D2,3 is (1, -1)/√2, C2,3 is (1, 1)/√2, S4 is port 4.

    Raises CalculationError for what is no mode.
    """
    match = _MODE.fullmatch(text.strip())
    if match is None or (match["kind"] and int(match["plus"]) == int(match["minus"])):
        raise CalculationError(
            f"{text!r} is no mode",
            where=setting,
            hint="write D1,3 (differential, port 1 plus, port 3 minus), C1,3 (common) or S2 (port 2 alone)",
        )
    if match["single"]:
        return {int(match["single"]): 1.0}
    size = 1.0 / np.sqrt(2.0)
    return {int(match["plus"]): size, int(match["minus"]): -size if match["kind"].upper() == "D" else size}


def mode_entry(samples: Samples) -> Complexes:
    """Return the scattering parameter (n,) from the mode ``input`` to the mode ``output``."""
    into = mode_weights(samples.word("input"), "input")
    out = mode_weights(samples.word("output"), "output")
    known = roles_of_entries(samples)
    total: Complexes = np.zeros(samples.size, np.complex128)
    for to, weight in out.items():
        for start, share in into.items():
            roles = known.get((to, start))
            if roles is None:
                raise CalculationError(
                    f"there is no S{to}_{start}", hint="name ports that the network has, as D1,3 or S2"
                )
            total += weight * share * entry(samples, roles)
    return total


def _db(samples: Samples) -> Floats:
    size = np.abs(mode_entry(samples))
    if (size == 0).any():
        raise CalculationError(
            f"the entry is zero at {np.count_nonzero(size == 0)} of {len(size)} places, which has no value in dB",
            hint="look at the entries that it is made of",
        )
    value: Floats = 20.0 * np.log10(size)
    return value


def mode_gain(samples: Samples) -> Outcome:
    """Return the gain from one mode of a network to another in dB: differential gain, mode conversion.

    Formula: 20·log10 |Σ w_m·S_mn·w_n| over the ports m of the output mode and n of the input mode; w is (1, -1)/√2 for
    D, (1, 1)/√2 for C, 1 for S. From D1,3 to D2,4: ½·(S21 - S23 - S41 + S43).
    Valid: the ports of a pair have one real reference R; the mode then has 2R (D) or R/2 (C).
    Source: modes as in [Mixed-Mode Order] of the Touchstone File Format Specification 2.1; D. E. Bockelman and W. R.
    Eisenstadt, IEEE Trans. MTT 43 (1995), from memory; equals scikit-rf ``se2gmm`` in the tests.
    """
    return row_by_row(_db(samples), "dB")


def mode_loss(samples: Samples) -> Outcome:
    """Return the loss from one mode of a network to another in dB, positive; a return loss where both are the same.

    Formula: -20·log10 |Σ w_m·S_mn·w_n|, as the law "mode gain".
    Valid: the ports of a pair have one real reference R; the mode then has 2R (D) or R/2 (C).
    Source: as of the law "mode gain".
    """
    return row_by_row(-_db(samples), "dB")


_SETTINGS = (
    Setting("input", "the mode that is driven: D1,3 (plus, minus), C1,3 or S1", None, is_text=True),
    Setting("output", "the mode that is read: D2,4, C2,4 or S2", None, is_text=True),
)

MODE_LAWS: tuple[Law, ...] = (
    Law("mode gain", "20·log of a parameter between modes of balanced ports: differential gain, mode conversion",
        mode_gain, needs=_NEEDS, roles=(), whole_table=True, over="each", settings=_SETTINGS,
        gives=("gain", "transmission_magnitude", "reverse_transmission", "reflection_magnitude")),
    Law("mode loss", "-20·log of a parameter between modes of balanced ports: differential return loss, balance",
        mode_loss, needs=_NEEDS, roles=(), whole_table=True, over="each", settings=_SETTINGS,
        gives=("insertion_loss", "return_loss", "isolation", "reverse_isolation", "coupling", "attenuation")),
)  # fmt: skip
