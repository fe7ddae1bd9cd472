"""Compression of a chain, and what a memoryless cubic says about compression and blocking."""

from __future__ import annotations

import numpy as np

from specflow.calculators.arguments import Figures, Floats, above, chain, count, finite, intercept
from specflow.calculators.decibel import decibels, ratio, total
from specflow.calculators.intercept_cascade import referred
from specflow.errors import CalculationError


def cascade_ip1db(gain_db: Figures, ip1db_dbm: Figures) -> Floats:
    """Return the input 1 dB compression point of a chain in dBm: an approximation.

    Formula: 1/IP1 = Σ G_before/IP1_i.
    Valid: no better than about 0.5 dB: two equally referred cubic stages give -13.010 against -12.630 dBm exact; hard
    limiters tend to the smallest referred value.
    Source: common practice, no source; computed: 15/0 and 10/5 dB/dBm (exact cubic composition -10.293 dBm).

    >>> print(f"{cascade_ip1db([15.0, 10.0], [0.0, 5.0]):.3f}")
    -10.414
    """
    return referred(gain_db, ip1db_dbm, 1.0, "ip1db_dbm")


def output_p1db(ip1db_dbm: Figures, gain_db: Figures) -> Floats:
    """Return the output 1 dB compression point in dBm.

    Formula: OP1dB = IP1dB + G - 1.
    Valid: G is the small-signal gain.
    Source: definition of the compression point; computed.

    >>> print(f"{output_p1db(-10.41393, 25.0):.5f}")
    13.58607
    """
    return intercept(ip1db_dbm, "ip1db_dbm") + finite(gain_db, "gain_db") - 1.0


def cascade_op1db(gain_db: Figures, op1db_dbm: Figures) -> Floats:
    """Return the output 1 dB compression point of a chain in dBm from output points: an approximation.

    Formula: each stage IP1 = OP1 - G + 1; 1/IP1 = Σ G_before/IP1_i; OP1 = IP1 + G - 1.
    Valid: no better than about 0.5 dB.
    Source: common practice, no source; the input form of the same chain (14 and 14 dBm) gives 13.586 dBm.

    >>> print(f"{cascade_op1db([15.0, 10.0], [14.0, 14.0]):.3f}")
    13.586
    """
    gain, op1db = chain(gain_db=finite(gain_db, "gain_db"), op1db_dbm=intercept(op1db_dbm, "op1db_dbm"))
    return output_p1db(cascade_ip1db(gain, op1db - gain + 1.0), total(gain))


def cubic_ip3_minus_p1db(tones: Figures = 1) -> Floats:
    """Return IIP3 - IP1dB in dB of a memoryless cubic; with two tones the compression point is that of each tone.

    Formula: -10·log(1 - 10^(-1/20)) for one tone, -10·log((1 - 10^(-1/20))/3) for two.
    Valid: a plausibility check; real devices show 8 to 15 dB.
    Source: computed from the power series.

    >>> print(f"{cubic_ip3_minus_p1db(1):.3f} {cubic_ip3_minus_p1db(2):.3f}")
    9.636 14.407
    """
    number = count(tones, "tones")
    if (number > 2).any():
        raise CalculationError("the cubic relation is known for one and two tones", hint="give 1 or 2 tones")
    return -decibels((1.0 - 10.0**-0.05) / np.where(number == 2, 3.0, 1.0))


def blocker_for_compression(iip3_dbm: Figures, compression_db: Figures = 1.0) -> Floats:
    """Return the blocker level in dBm that lowers the gain of a small wanted signal by ``compression_db``.

    Formula: IIP3 + 10·log((1 - 10^(-c/20))/2).
    Valid: memoryless cubic, small wanted signal; 3.01 dB below the single-tone compression point.
    Source: computed from the power series.

    >>> print(f"{blocker_for_compression(-5.0):.3f}")
    -17.646
    """
    left = 10.0 ** (-above(compression_db, 0.0, "compression_db") / 20.0)
    return finite(iip3_dbm, "iip3_dbm") + decibels((1.0 - left) / 2.0)


def blocker_gain_change(iip3_dbm: Figures, blocker_dbm: Figures) -> Floats:
    """Return the gain change in dB (negative) of a small wanted signal beside a blocker.

    Formula: 20·log(1 - 2·Pb/IIP3).
    Valid: memoryless cubic; blockers within 3.01 dB of the intercept are refused, the gain would cross zero.
    Source: computed from the power series.

    >>> print(f"{blocker_gain_change(-5.0, -20.0):.4f}")
    -0.5675
    """
    left = 1.0 - 2.0 * ratio(finite(blocker_dbm, "blocker_dbm") - finite(iip3_dbm, "iip3_dbm"))
    if (left <= 0).any():
        raise CalculationError(
            "the blocker is within 3.01 dB of the intercept, where the cubic law does not hold",
            hint="use measured compression",
        )
    return 2.0 * decibels(left)
