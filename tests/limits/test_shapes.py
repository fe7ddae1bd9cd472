"""Every shape that published limits have (numbered list of 59 shapes, from the standards named beside each).

A shape of the limit parses, reads back from JSON and from its canonical text, and evaluates, or says what kind of
evidence it needs instead. Shapes that are not the limit's own name the document that holds them.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest

from specflow.limits import LimitContext, alternatives, evaluate_limit, limit_text, parse_limit
from specflow.limits.tree import walk_limit
from specflow.model.columns import Columns, TextColumn
from specflow.model.limit import Exceptions, Limit, LimitState, Population
from specflow.units import parse_quantity

_WORDS = {
    "band": "n257",
    "bs_type": "1-H",
    "category": "B",
    "option": "2",
    "env": "extreme",
    "state": "initial access",
    "waveform": "DFT-s-OFDM QPSK",
    "direction": "reference",
    "ns": "NS_202",
    "country": "other",
}
_NUMBERS = {
    "offset": (6.0, "MHz"),
    "f_offset": (1.0, "MHz"),
    "delta_f": (12.0, "MHz"),
    "edge_distance": (3.0, "MHz"),
    "frequency": (28.0, "GHz"),
    "adjacent_power": (-30.0, "dBm"),
    "eirp": (0.0, "dBm"),
    "bw": (50.0, "MHz"),
    "N_RB": (273.0, ""),
    "power_class": (3.0, ""),
    "rx_ports": (4.0, ""),
    "channel": (2.0, ""),
    "pct": (60.0, "%"),
    "date": (20280101.0, ""),
    "theta": (70.0, "deg"),
}
_DECLARED = {
    "claimed_eirp": "30 dBm",
    "carrier": "28 GHz",
    "P_rated": "30 dBm",
    "BW": "50 MHz",
    "basic_limit": "-13 dBm",
    "E": "-100 dBm",
    "delta_R_IB": "0.5 dB",
    "N_TXU": "8 1",
    "f_max": "1500 MHz",
    "general": "-28 dB",
    "image": "-28 dB",
    "dfOBUE": "1.5 GHz",
}


def everything() -> LimitContext:
    """Return one record that states every condition used below."""
    return LimitContext(
        Columns(
            1,
            {name: np.array([value]) for name, (value, _) in _NUMBERS.items()},
            {name: TextColumn.of([word]) for name, word in _WORDS.items()},
            {name: unit for name, (_, unit) in _NUMBERS.items()},
        ),
        {name: parse_quantity(text) for name, text in _DECLARED.items()},
    )


@dataclass(frozen=True)
class Bounded:
    """The shape evaluates for one record to these bounds."""

    lower: float | None = None
    upper: float | None = None


@dataclass(frozen=True)
class Apart:
    """Alternatives on different quantities: each member needs evidence of its own."""

    quantities: tuple[str, ...]


@dataclass(frozen=True)
class OfMany(Bounded):
    """The bounds hold for a statistic of many values, not for one reading."""

    statistic: str = ""


@dataclass(frozen=True)
class NoNumber:
    """There is nothing to compare with (yet)."""

    state: LimitState
    required: bool


Expected = Bounded | Apart | NoNumber
SEM = "mask(offset[MHz], max dBm: 0..0.1*BW: -5 in 1 MHz; 0.1*BW..{end}: -13 in 1 MHz; {end}..f_max: -5 in 10 MHz)"
SHAPES: dict[int, list[tuple[str, Expected]]] = {
    1: [("claimed_eirp[dBm] ± 3.4 dB", Bounded(26.6, 33.4))],
    2: [("26 +2/-3 dBm", Bounded(23, 28)), ("0 +4/-6 dB", Bounded(-6, 4))],
    3: [("cases(when edge_distance < 4 MHz: 26 +2/-4.5 dBm; otherwise: 26 +2/-3 dBm)", Bounded(21.5, 28))],
    4: [("< -36 dBm/MHz", Bounded(None, -36)), ("> 17 dB", Bounded(17)), ("<= 50 MHz", Bounded(None, 50))],
    5: [
        ("<= -96.1 + 10 log10(N_RB/24) dBm", Bounded(None, -85.54)),
        ("min(-5, max(P_rated - 35, -12)) dBm max", Bounded(None, -5)),
    ],
    6: [("<= (-96.1 + 10 log10(N_RB/24)) dBm rounded to 0.1", Bounded(None, -85.5))],
    7: [
        ("± (0.05 ppm of carrier + 12 Hz)", Bounded(-1412, 1412)),
        # 47 CFR 30.202: 75 dBm/100 MHz scaled with bandwidth is 71.99 dBm in 50 MHz
        ("<= 75 + 10*log10(min(bw[MHz], 100)/100) dBm", Bounded(None, 71.99)),
    ],
    8: [("<= 500 µV/m", Bounded(None, 500)), (">= 0.36 V/m", Bounded(0.36))],
    9: [
        ("TBD", NoNumber(LimitState.TBD, True)),
        ("FFS", NoNumber(LimitState.TBD, True)),
        ("N/A", NoNumber(LimitState.FIRM, False)),
        ("no upper limit", NoNumber(LimitState.FIRM, False)),
        ("[8] dB min", Bounded(8)),
    ],
    10: [("28 dB min or acp <= -13 dBm/MHz, whichever is less stringent", Apart(("", "acp")))],
    11: [("> 17 dB if adjacent_power > -35 dBm", Bounded(17))],
    12: [
        (
            "min(max(11, 11 + 0.4*(pct[%] - 50) + 10 log10(bw[MHz])), 56) dB min or density <= -13 dBm/MHz",
            Apart(("", "density")),
        )
    ],
    13: [
        (
            "sum(mask(offset[MHz], max dBm, in 1 MHz: 0..10: -13);"
            " mask(offset[MHz], max dBm, in 10 MHz: 0..10: -3); in 1 MHz)",
            Bounded(None, -9.99),
        )
    ],
    14: [
        (
            "cases(when offset < 10 MHz: sum(<= -30 dBr; <= -30 dBr); when offset in 40..60 MHz:"
            " looser(<= -10 dBr; <= -20 dBr); otherwise: mask(offset[MHz], max dBr, linear: 10: -27; 40: -10))",
            Bounded(None, -26.99),
        )
    ],
    15: [("looser(<= -25 dB; sum(<= general dB; <= image dB))", Bounded(None, -24.99))],
    16: [
        (
            "ripple_1 <= 6 dB p-p and ripple_2 <= 9 dB p-p and cross_12 <= 7 dB and cross_21 <= 8 dB",
            Apart(("ripple_1", "ripple_2", "cross_12", "cross_21")),
        )
    ],
    17: [
        (
            "looser(power_of_sum: {<= basic_limit + 9 dBm}; power_of_each: {<= basic_limit + 9 - 10*log10(N_TXU) dBm"
            " worst over connector})",
            Apart(("power_of_sum", "power_of_each")),
        )
    ],
    18: [
        (
            "by bs_type ('1-H': <= basic_limit + 10*log10(N_TXU) dBm; '1-O': <= basic_limit + 9 dBm;"
            " 'co-location': <= basic_limit - 21 dBm)",
            Bounded(None, -3.97),
        )
    ],
    19: [("by category (A: <= -13 dBm; B: by option (1: <= -15 dBm; 2: <= -16 dBm))", Bounded(None, -16))],
    20: [(SEM.format(end="(2*BW if BW <= 500 MHz else BW + 500 MHz)"), Bounded(None, -13))],
    21: [(SEM.format(end="100"), Bounded(None, -13))],
    22: [
        (
            "stricter(mask(f_offset[MHz], max dBm, in 100 kHz: 0.05..10.05: -14);"
            " mask(delta_f[MHz], max dBm, in 1 MHz: 10..40: -15))",
            Bounded(None, -15),
        )
    ],
    23: [
        (
            "mask(f_offset[MHz], max dBm: 0.05..5.05: -7 - (7/5)*(f_offset[MHz] - 0.05) in 100 kHz)",
            Bounded(None, -8.33),
        ),
        ("mask(pct[%], min dB: 45..100: 568*log10(pct[%]/45))", Bounded(70.97)),
    ],
    24: [
        (
            "by band (n257: mask(frequency[GHz], max dBm, in 10 MHz: 18..23.5: -20; 23.5..25: -15; 25..31: -10;"
            " except 26.5 GHz - dfOBUE..27 GHz); n258: mask(frequency[GHz], max dBm, in 10 MHz: 18..21: -20))",
            Bounded(None, -10),
        )
    ],
    25: [
        ("mask(offset[MHz], max dBr, in 100 kHz: 0..9: 0)", Bounded(None, 0)),
        ("<= -25 dBc", Bounded(None, -25)),
        ("<= -13 dBm in 1 MHz", Bounded(None, -13)),
        ("<= -13 dBm/MHz", Bounded(None, -13)),
    ],
    26: [("by channel (1: >= 35 dB; 2: >= 40 dB)", Bounded(40))],
    27: [
        (
            "cases(when band == n257 and bw == 50 MHz and power_class == 3: <= -88.3 dBm;"
            " when band == n257 and bw == 100 MHz: <= -85.3 dBm)",
            Bounded(None, -88.3),
        )
    ],
    28: [("<= -96.1 + (-2.7 if rx_ports == 4 else 0) dBm", Bounded(None, -98.8))],
    29: [("<= -96.1 + delta_R_IB dBm", Bounded(None, -95.6))],
    30: [("cases(when ns == NS_202: <= -5 dBm in 200 MHz; otherwise: no limit)", Bounded(None, -5))],
    31: [
        (
            "cases(when date >= 20270901 or country == 'adopting': <= -9 dBm; otherwise: <= -3 dBm) in 200 MHz",
            Bounded(None, -9),
        )
    ],
    32: [("by env (normal: ± 3.4 dB; extreme: ± 4.5 dB)", Bounded(-4.5, 4.5))],
    33: [("by state ('initial access': >= (11.5 - 2) dBm; otherwise: >= 11.5 dBm)", Bounded(9.5))],
    34: [("cases(when frequency in 28 GHz and bw == 50 MHz: <= -80 dBm)", Bounded(None, -80))],
    35: [("<= 12.5 % if eirp >= -10 dBm", Bounded(None, 12.5))],
    36: [("by frequency[GHz] (<= 4.2: <= 2.5 %; > 4.2: <= 2.8 %)", Bounded(None, 2.8))],
    37: [(">= 22.4 dBm if waveform == 'DFT-s-OFDM QPSK'", Bounded(22.4))],
    39: [(">= 11.5 dBm at 50 % of CDF over sphere", OfMany(11.5, statistic="percentile"))],
    40: [("<= -77.4 dBm at 50 % of CCDF over sphere", OfMany(None, -77.4, "percentile"))],
    41: [
        (
            ">= 20 dBm worst over theta, phi where theta in 60..90 deg"
            " and (phi in -37.5..37.5 deg or phi in 142.5..217.5 deg)",
            OfMany(20, statistic="worst"),
        )
    ],
    42: [
        (
            "<= 3.0 dB at 85 % of CDF of (best_eirp - autonomous_eirp) over angle where rank_of_best_eirp[%] >= 50",
            OfMany(None, 3, "percentile"),
        )
    ],
    43: [(">= 95 %", Bounded(95))],
    45: [("<= E + 3 - 3 dBm", Bounded(None, -100))],
    46: [("<= -95.6 dBm worst over frc_instance", OfMany(None, -95.6, "worst"))],
    48: [("± 3 dB with 3 exceptions within ± 11 dB", OfMany(-3, 3, "exceptions"))],
    49: [("<= 12.5 % mean of squares over frame from at least 20", OfMany(None, 12.5, "mean"))],
    50: [("<= 12.5 % worst over window_end", OfMany(None, 12.5, "worst"))],
    51: [("by direction (reference: <= E - 3 dBm; otherwise: <= E dBm)", Bounded(None, -103))],
    52: [("eirp: {10..23 dBm} and trp <= 23 dBm", Apart(("eirp", "trp")))],
    53: [("<= -88.3 dBm worst over polarisation", OfMany(None, -88.3, "worst"))],
    54: [("<= -50 dBm test tolerance 1.5 dB", Bounded(None, -50))],
    55: [(">= 95 % test tolerance 0.7 dB on stimulus", Bounded(95))],
    57: [("<= -13 dBm test tolerance 0 dB", Bounded(None, -13))],
}
#: Shapes that another document holds, and which.
ELSEWHERE = {
    38: "metric and plane: QuantityIdentity of the requirement",
    44: "stimulus relative to another limit: a condition of the conditions set with a declared value",
    47: "not directly measurable: several activities of one requirement, or requirements it is met by",
    56: "test tolerance by conditions: one requirement with its own conditions set for each amount",
    58: "laboratory worse than allowed: DecisionRule.greatest_uncertainty with excess_tightens",
    59: "decision rule by name: DecisionRule.name",
}
CASES = [(number, text, expected) for number, found in SHAPES.items() for text, expected in found]


def test_every_shape_is_placed_once() -> None:
    assert set(SHAPES) | set(ELSEWHERE) == set(range(1, 60))
    assert not set(SHAPES) & set(ELSEWHERE)


@pytest.mark.parametrize(
    ("number", "text", "expected"), CASES, ids=[f"{number}: {text[:40]}" for number, text, _ in CASES]
)
def test_shape_parses_reads_back_and_evaluates(number: int, text: str, expected: Expected) -> None:
    limit = parse_limit(text)
    assert Limit.model_validate_json(limit.model_dump_json()) == limit
    assert parse_limit(limit_text(limit)).tree == limit.tree
    found = evaluate_limit(limit, everything())
    if isinstance(expected, NoNumber):
        assert limit.state is expected.state
        assert bool(found.applies.all()) is expected.required and (
            not expected.required or found.unknown.all()
        )
    elif isinstance(expected, Apart):
        assert found.unknown.all() and "different quantities" in found.why
        assert tuple(part.quantity for part in alternatives(limit)) == expected.quantities
        for part in alternatives(limit):
            assert not evaluate_limit(part.limit, everything()).unknown.any()
    else:
        assert not found.unknown.any(), found.why
        assert found.applies.all()
        assert (None if found.lower is None else float(found.lower[0])) == _about(expected.lower)
        assert (None if found.upper is None else float(found.upper[0])) == _about(expected.upper)
    statistics = [node.statistic for node in walk_limit(limit.tree) if isinstance(node, Population)]
    if isinstance(expected, OfMany):
        assert [statistic.kind for statistic in statistics] == [expected.statistic]


def _about(value: float | None) -> object:
    return value if value is None else pytest.approx(value, abs=0.01)


def test_exceptions_keep_their_relaxed_limit() -> None:
    # 38.101-1 power sweep: 3 exceptions within ± 11 dB (shape 48)
    tree = parse_limit("± 3 dB with 3 exceptions within ± 11 dB").tree
    assert isinstance(tree, Population) and isinstance(tree.statistic, Exceptions)
    assert tree.statistic.count == 3 and tree.statistic.relaxed == parse_limit("± 11 dB").tree


def test_allowance_of_samples_is_kept() -> None:
    limit = parse_limit("<= -30 dBc allow 10 % by 3 dB")
    assert limit_text(limit) == "<= -30 dBc allow 10 % by 3 dB"
    assert float(evaluate_limit(limit, everything()).upper[0]) == -30.0  # type: ignore[index]
