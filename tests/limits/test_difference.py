"""What changed between two limits, in meaning."""

from __future__ import annotations

import pytest

from specflow.limits import limit_difference, parse_limit


@pytest.mark.parametrize(
    ("before", "after", "words"),
    [
        ("<= -28 dBc", "<= -28.5 dBc", "tightened by 0.5 dB (-28 -> -28.5 dBc)"),
        ("<= -28 dBc", "-25 dBc max", "relaxed by 3 dB (-28 -> -25 dBc)"),
        (">= 45 dBm", ">= 45.1 dBm", "tightened by 0.1 dB (45 -> 45.1 dBm)"),
        (">= 45 dBm", ">= 42 dBm", "relaxed by 3 dB (45 -> 42 dBm)"),
        ("<= 80 °C", "<= 70 °C", "tightened by 10 K (80 -> 70 °C)"),
        (">= 45 dBm", "45 dBm min", ""),
        ("<= 4 dB", "<= 4.0 dB", "written with other digits (4 -> 4.0 dB)"),
        (
            ">= 45 dBm",
            ">= 45 dBW",
            "unit changed from dBm to dBW: tightened by 30 dB (>= 45 dBm -> >= 45 dBW)",
        ),
        (
            "-10 dBW max",
            "20 dBm max",
            "unit changed from dBW to dBm, the same in meaning (<= -10 dBW -> <= 20 dBm)",
        ),
        (
            "<= 20 dBm",
            "< -10 dBW",
            "unit changed from dBm to dBW, strictness changed: equality no longer meets it (<= 20 dBm -> < -10 dBW)",
        ),
        (
            "<= 0.5 V/m",
            "<= 0.5 mV/m",
            "unit changed from V/m to mV/m: tightened by 499.5 mV/m (<= 0.5 V/m -> <= 0.5 mV/m)",
        ),
        (
            "<= 500 mV/m",
            "<= 0.5 V/m",
            "unit changed from mV/m to V/m, the same in meaning (<= 500 mV/m -> <= 0.5 V/m)",
        ),
        (
            ">= 43 dBi",
            ">= 43 dBd",  # IEEE Std 145: a half-wave dipole has 2.15 dBi
            "unit changed from dBi to dBd: tightened by 2.15 dB (>= 43 dBi -> >= 43 dBd)",
        ),
        (
            "21..24 dBm",
            "21..24 dBW",
            "unit changed from dBm to dBW: lower limit tightened by 30 dB, upper limit relaxed by 30 dB "
            "(21 dBm..24 dBm -> 21 dBW..24 dBW)",
        ),
        (
            "21..24 dBm",
            "-9..-5 dBW",
            "unit changed from dBm to dBW: lower limit the same in meaning, upper limit relaxed by 1 dB "
            "(21 dBm..24 dBm -> -9 dBW..-5 dBW)",
        ),
        (
            "20..30 dBm",
            "-10..0 dBW",
            "unit changed from dBm to dBW, the same in meaning (20 dBm..30 dBm -> -10 dBW..0 dBW)",
        ),
        (
            "-50 dBW/4 kHz max",
            "-50 dBW/MHz max",
            "unit changed from dBW/4 kHz to dBW/MHz (<= -50 dBW/4 kHz -> <= -50 dBW/MHz)",
        ),
        (
            "± 7 ppm",
            "± 7000 ppb",
            "unit changed from ppm to ppb, the same in meaning (± 7 ppm -> ± 7000 ppb)",
        ),
        ("± 7 ppm", "± 7 ppb", "unit changed from ppm to ppb (± 7 ppm -> ± 7 ppb)"),
        (
            "20 ± 1 dBm",
            "-10 ± 1 dBW",
            "unit changed from dBm to dBW, the same in meaning (20 dBm ± 1 dB -> -10 dBW ± 1 dB)",
        ),
        (
            "20 ± 1 dBm",
            "-9 ± 1 dBW",
            "unit changed from dBm to dBW (20 dBm ± 1 dB -> -9 dBW ± 1 dB)",
        ),
        ("21..24 dBm", ">= 21 dBm", "upper limit 24 dBm removed"),
        (
            "21..24 dBm",
            "< 23 dBm",
            "lower limit 21 dBm removed; upper limit tightened by 1 dB (24 -> 23 dBm); "
            "strictness changed: equality with the upper limit no longer meets it",
        ),
        (">= 21 dBm", "20..24 dBm", "upper limit 24 dBm added; lower limit relaxed by 1 dB (21 -> 20 dBm)"),
        (">= 45 dBm", "> 45 dBm", "strictness changed: equality no longer meets it"),
        (">= 45 dBm", "<= 45 dBm", "changed from at least 45 dBm to at most 45 dBm"),
        (
            "3..5 V",
            "3.5..5.5 V",
            "lower limit tightened by 0.5 V (3 -> 3.5 V); upper limit relaxed by 0.5 V (5 -> 5.5 V)",
        ),
        ("54 ± 1.5 dBm", "54 ± 1 dBm", "tolerance tightened by 0.5 dB (1.5 -> 1 dB)"),
        ("26 +2/-3 dBm", "26 +2/-3.5 dBm", "lower tolerance relaxed by 0.5 dB (3 -> 3.5 dB)"),
        ("54 ± 1.5 dBm", "53 ± 1.5 dBm", "nominal moved from 54 to 53 dBm"),
        ("TBR 3.2 dB max", "3.2 dB max", "state changed from TBR to firm"),
        ("TBD", "<= 3 dB", "no longer TBD: at most 3 dB"),
        ("<= 3 dB", "TBD", "changed from at most 3 dB to TBD"),
        (
            "mask(offset[MHz], max dBm: 0..5: -5; 5..100: -13)",
            "mask(offset[MHz], max dBm: 0..5: -5; 5..100: -15)",
            "mask segment 2 tightened by 2 dB (-13 -> -15 dBm)",
        ),
        (
            "mask(offset[MHz], max dBm: 0..5: -5; 5..100: -13 in 1 MHz)",
            "mask(offset[MHz], max dBm: 0..5: -5; 5..90: -13 in 10 MHz)",
            "mask segment 2 moved along the axis; mask segment 2 measurement bandwidth changed",
        ),
        (
            "mask(offset[MHz], max dBm: 0: -5; 5: -13)",
            "mask(offset[MHz], max dBm: 0: -5; 5: -12)",
            "mask segment 1 at its end relaxed by 1 dB (-13 -> -12 dBm)",
        ),
        (
            "by band (n257: >= 22.4 dBm; n260: >= 20.6 dBm)",
            "by band (n257: >= 22.4 dBm; n260: >= 20 dBm)",
            "case 2 (band is n260) relaxed by 0.6 dB (20.6 -> 20 dBm)",
        ),
        (
            "looser(>= 28 dB; <= -13 dBm/MHz)",
            "looser(>= 28 dB; <= -15 dBm/MHz)",
            "alternative 2 tightened by 2 dB (-13 -> -15 dBm/MHz)",
        ),
        ("looser(>= 28 dB; >= 20 dB)", "stricter(>= 28 dB; >= 20 dB)", "the stricter now governs"),
        (">= 3 dB if x > 3", ">= 4 dB if x > 3", "tightened by 1 dB (3 -> 4 dB)"),
        ("<= P - 35 dB", "<= P - 33 dB", "formula changed from (P - 35 dB) to (P - 33 dB)"),
        (
            ">= 3 dB at 50 % of CDF over sphere",
            ">= 3 dB at 60 % of CDF over sphere",
            "statistic changed from 'at 50 % of CDF' to 'at 60 % of CDF'",
        ),
        ("<= 3 dB", "<= 3 dB rounded to 0.1", "rounding changed"),
        ("<= 3 dB", "<= 3 dB test tolerance 1 dB", "test tolerance changed"),
    ],
)
def test_difference_is_told_in_meaning(before: str, after: str, words: str) -> None:
    assert limit_difference(parse_limit(before), parse_limit(after)) == words
