"""What limits come to, against a second route in plain Python and against published tables."""

from __future__ import annotations

import math
import time

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.limits import (
    Bounds,
    LimitContext,
    alternatives,
    choose,
    evaluate_limit,
    limit_inputs,
    parse_limit,
    rule_of,
)
from specflow.model.columns import Columns, TextColumn
from specflow.model.limit import Stringency
from specflow.units import Quantity, parse_quantity


def context(
    declared: dict[str, str] | None = None, **columns: list[float] | list[str | None]
) -> LimitContext:
    """Build a context; ``name__unit=[...]`` is a numeric column in that unit, ``name=[...]`` words."""
    numeric, text, units = {}, {}, {}
    size = 1
    for key, values in columns.items():
        name, _, unit = key.partition("__")
        size = len(values)
        if unit:
            numeric[name] = np.array(values, dtype=float)
            units[name] = "" if unit == "plain" else unit
        else:
            text[name] = TextColumn.of([None if word is None else str(word) for word in values])
    quantities: dict[str, Quantity] = {name: parse_quantity(said) for name, said in (declared or {}).items()}
    return LimitContext(Columns(size, numeric, text, units), quantities)


def bounds(text: str, where: LimitContext | None = None, **settings_: bool) -> Bounds:
    return evaluate_limit(parse_limit(text), where or context(), **settings_)


def uppers(text: str, where: LimitContext) -> list[float]:
    found = bounds(text, where).spread(where.rows)
    assert found.upper is not None
    return [float(value) for value in found.upper]


def test_one_sided_limits_bound_one_side() -> None:
    found = bounds(">= 45 dBm")
    assert found.lower is not None and found.lower.tolist() == [45.0]
    assert found.upper is None and found.unit == "dBm" and not found.lower_strict.any()
    strict = bounds("< -36 dBm/MHz")
    assert strict.upper is not None and strict.upper.tolist() == [-36.0] and strict.upper_strict.all()


def test_asymmetric_tolerance_has_its_own_sides() -> None:
    # 38.101-1 6.2.1: UE 26 dBm +2/-3 dB (standards-limits.md 1.1, shape 2)
    found = bounds("26 +2/-3 dBm")
    assert (found.lower, found.upper) == (np.array([23.0]), np.array([28.0]))


def test_tolerance_about_a_declared_value_needs_the_declaration() -> None:
    # 38.104 9.2.3: EIRP within 3.4 dB of the claimed EIRP (BS2O-EIRP-N)
    limit = parse_limit("claimed_eirp[dBm] ± 3.4 dB")
    known = evaluate_limit(limit, context({"claimed_eirp": "30 dBW"}))
    assert known.lower == pytest.approx([56.6]) and known.upper == pytest.approx([63.4])
    unknown = evaluate_limit(limit, context())
    assert unknown.unknown.all() and "claimed_eirp is not declared" in unknown.why
    assert limit_inputs(limit) == {"claimed_eirp"}


def test_percent_and_ppm_are_shares_of_the_nominal() -> None:
    assert bounds("5 V ± 5 %").upper == pytest.approx([5.25])
    found = bounds("10 GHz ± 20 ppm")
    assert found.lower == pytest.approx([9.9998], rel=1e-12)
    # mixed units: 0.05 ppm + 12 Hz (standards-limits.md shape 7; the 12 Hz from memory), by hand at 28 GHz
    mixed = bounds("± (0.05 ppm of carrier + 12 Hz)", context({"carrier": "28 GHz"}))
    assert mixed.upper == pytest.approx([1412.0]) and mixed.unit == "Hz"


@pytest.mark.parametrize(("rated", "expected"), [(20.0, -12.0), (25.0, -10.0), (30.0, -5.0), (40.0, -5.0)])
def test_nested_min_max_follows_the_rated_power(rated: float, expected: float) -> None:
    # 38.104 9.7.4.3.2: min(-5, max(P - 35, -12)) (BS2O-OBUE-A-24.25-33.4-1); expected values by hand
    found = bounds("min(-5, max(P_rated - 35, -12)) dBm max", context({"P_rated": f"{rated} dBm"}))
    assert found.upper == pytest.approx([expected])


def test_declared_values_are_converted_to_the_unit_of_the_limit() -> None:
    assert bounds("max(P_rated - 15, -20) dBm max", context({"P_rated": "1 W"})).upper == pytest.approx(
        [15.0]
    )
    assert bounds("43 + 10*log10(P_W) dB min", context({"P": "43 dBm"})).lower == pytest.approx(
        [56.0], abs=1e-3
    )


def test_sloped_formula_meets_its_neighbours() -> None:
    # TS 36.104 6.6.3.2.2 (E-OBUE-B2-2): -14 - 15*(f - 0.215) runs from -14 at 0.215 to -26 at 1.015 MHz
    where = context(f_offset__kHz=[215.0, 615.0, 1015.0])
    assert uppers("-14 - 15*(f_offset_MHz - 0.215) dBm max", where) == pytest.approx([-14.0, -20.0, -26.0])


def test_reference_sensitivity_formula_and_its_rounding() -> None:
    # 38.101-1 T7.3.2-1b: -96.1 + 10 log10(273/24) = -85.54 (standards-limits.md 3.4), to one decimal
    where = context(N_RB__plain=[273.0, 24.0])
    assert uppers("<= -96.1 + 10 log10(N_RB/24) dBm", where) == pytest.approx([-85.54, -96.1], abs=5e-3)
    assert uppers("<= (-96.1 + 10 log10(N_RB/24)) dBm rounded to 0.1", where) == pytest.approx([-85.5, -96.1])
    assert uppers("<= (-96.1 + 10 log10(N_RB/24)) dBm rounded down to 0.5", where) == pytest.approx(
        [-86.0, -96.5]
    )
    assert uppers("<= (-96.1 + 10 log10(N_RB/24)) dBm rounded up to 0.5", where) == pytest.approx(
        [-85.5, -96.0]
    )


def test_measurement_bandwidth_formula_reproduces_the_table() -> None:
    # 38.101-2 T6.5.2.3-1: SCS*(12*N_RB+1) gives 95.16, 190.20, 380.28 MHz (UE2-MBW-*)
    where = context(scs__kHz=[120.0, 120.0, 120.0], N_RB__plain=[66.0, 132.0, 264.0])
    assert uppers("<= (scs*(12*N_RB+1)) MHz", where) == pytest.approx([95.16, 190.2, 380.28])


def test_table_by_band_picks_the_row_and_leaves_the_rest_alone() -> None:
    # 38.101-2 6.2.1.3: minimum peak EIRP of power class 3 (UE2-EIRP-PC3-*)
    text = "by band (n257 | n258 | n261: >= 22.4 dBm; n259: >= 18.7 dBm; n260: >= 20.6 dBm)"
    found = bounds(text, context(band=["n257", "N261", "n260", "n263", None])).spread(5)
    assert found.lower is not None
    assert found.lower[:3].tolist() == [22.4, 22.4, 20.6]
    assert found.applies.tolist() == [True, True, True, False, True]
    assert found.outside.tolist() == [False, False, False, True, False]
    assert found.unknown.tolist() == [False, False, False, False, True]
    assert "band is not stated" in found.why


def test_threshold_inside_a_table_of_cases() -> None:
    # 38.104 T6.5.2.2-1: 1024QAM EVM 2.5 % up to 4.2 GHz, 2.8 % above
    text = "by frequency[GHz] (<= 4.2: <= 2.5 %; > 4.2: <= 2.8 %)"
    assert uppers(text, context(frequency__MHz=[3500.0, 4200.0, 4200.1])) == [2.5, 2.5, 2.8]


def test_gate_that_is_not_open_is_not_triggered() -> None:
    # 38.101-2 6.5.2.3: UE ACLR counts only if the adjacent power exceeds -35 dBm (UE2-ACLR-n257)
    where = context(adjacent_power__dBm=[-30.0, -35.0, math.nan])
    found = bounds("> 17 dB if adjacent_power > -35 dBm", where).spread(3)
    assert found.applies.tolist() == [True, False, True]
    assert found.outside.tolist() == [False, False, False]
    assert found.unknown.tolist() == [False, False, True]


def test_gate_compares_across_units_at_the_boundary() -> None:
    # 1 mW is 0 dBm: equality after a conversion is equality (design 4)
    where = context(adjacent_power__mW=[1.0, 1.0000001, 0.5])
    assert bounds(">= 3 dB if adjacent_power >= 0 dBm", where).applies.tolist() == [True, True, False]
    assert bounds(">= 3 dB if adjacent_power > 0 dBm", where).applies.tolist() == [False, True, False]


MASK = "mask(offset[MHz], max dBm: 0..0.1*BW: -5 in 1 MHz; 0.1*BW..100: -13 in 10 MHz; except 45..55)"


def test_mask_bounds_inside_outside_at_the_shared_breakpoint_and_unknown() -> None:
    where = context({"BW": "50 MHz"}, offset__MHz=[0.0, 5.0, 6.0, 50.0, 100.0, 101.0, math.nan])
    found = bounds(MASK, where).spread(7)
    assert found.upper is not None and found.bandwidth_hz is not None
    # at 5 MHz both segments hold: the more stringent one applies
    assert found.upper[[0, 1, 2, 4]].tolist() == [-5.0, -13.0, -13.0, -13.0]
    assert found.bandwidth_hz[[0, 1]].tolist() == [1e6, 1e7]
    assert found.applies.tolist() == [True, True, True, False, True, False, True]
    assert found.outside.tolist() == [
        False,
        False,
        False,
        False,
        False,
        True,
        False,
    ]  # 50 MHz is excluded on purpose
    assert found.unknown.tolist() == [False] * 6 + [True]


def test_half_open_segment_leaves_the_breakpoint_to_the_next() -> None:
    where = context(offset__MHz=[4.999, 5.0])
    assert uppers("mask(offset[MHz], max dBm: 0..<5: -20; 5..10: -13)", where) == [-20.0, -13.0]


def test_mask_with_an_undeclared_end_is_unknown_only_where_it_matters() -> None:
    # 120 MHz might still belong to the first segment; 50 MHz is excluded whatever BW is
    found = bounds(MASK, context(offset__MHz=[0.0, 6.0, 50.0, 120.0])).spread(4)
    assert found.unknown.tolist() == [True, True, False, True]
    assert "BW is not declared" in found.why


def test_breakpoints_run_straight_in_db() -> None:
    # IEEE 802.11 17.3.9.3: 0, -20, -28, -40 dBr at 9, 11, 20, 30 MHz (WIFI-MASK20-*); halves by hand
    where = context(offset__MHz=[9.0, 10.0, 11.0, 15.5, 20.0, 25.0, 30.0])
    text = "mask(offset[MHz], max dBr, in 100 kHz: 9: 0; 11: -20; 20: -28; 30: -40)"
    assert uppers(text, where) == pytest.approx([0.0, -10.0, -20.0, -24.0, -28.0, -34.0, -40.0])


def test_logarithmic_slope_is_straight_over_decades() -> None:
    where = context(offset__MHz=[1.0, 10.0, 100.0])
    assert uppers("mask(offset[MHz], max dBc: 1..100: -90 to -110 log)", where) == pytest.approx(
        [-90, -100, -110]
    )


def test_formula_of_the_axis_in_percent_of_bandwidth() -> None:
    # 802.11p Mask M (WIFI-MASKM-2/-3): 568*log10(pct/45), then 26 + 145*log10(pct/50)
    text = "mask(pct[%], min dB: 45..50: 568*log10(pct[%]/45); 50..55: 26 + 145*log10(pct[%]/50))"
    found = bounds(text, context(pct__plain=[0.45, 0.475, 0.55]))
    assert found.lower is None or found.unknown.all()  # a plain column is no percentage: its unit is needed
    stated = bounds(text, context({}, **{"pct__%": [45.0, 47.5, 55.0]}))
    assert stated.lower == pytest.approx([0.0, 568 * math.log10(47.5 / 45), 26 + 145 * math.log10(1.1)])


def test_alternatives_of_one_unit_have_common_bounds() -> None:
    assert bounds("-40 dBm max or -20 dBm max, whichever is looser").upper == pytest.approx([-20.0])
    assert bounds("-40 dBm max or -20 dBm max, whichever is stricter").upper == pytest.approx([-40.0])
    assert bounds("40 dBm max or 1 W max, whichever is stricter").upper == pytest.approx([30.0])
    both = bounds(">= 3 V and < 5 V")
    assert (both.lower, both.upper) == (np.array([3.0]), np.array([5.0])) and both.upper_strict.all()


def test_alternatives_on_different_quantities_are_judged_apart() -> None:
    # 38.104 9.7.3.3: ACLR 28 dB or -13 dBm/MHz, whichever is less stringent: passing either passes
    limit = parse_limit("28 dB min or acp_density <= -13 dBm/MHz, whichever is less stringent")
    assert evaluate_limit(limit, context()).unknown.all()
    first, second = alternatives(limit)
    assert (first.quantity, first.limit.unit) == ("", "dB")
    assert (second.quantity, second.limit.unit) == ("acp_density", "dBm/MHz")
    assert rule_of(limit) is Stringency.LOOSER
    passed = [np.array([True, False, False]), np.array([False, True, False])]
    assert choose(limit, passed).tolist() == [True, True, False]
    assert choose(parse_limit("stricter(>= 28 dB; <= -13 dBm/MHz)"), passed).tolist() == [False, False, False]


def test_power_sum_of_masks_is_scaled_to_one_bandwidth() -> None:
    # two equal limits add 3.01 dB; a 10 MHz limit scaled to 1 MHz loses 10 dB (38.104 9.7.4.3: far side scaled)
    where = context(offset__MHz=[2.0])
    same = "sum(mask(offset[MHz], max dBm, in 1 MHz: 0..5: -13); mask(offset[MHz], max dBm, in 1 MHz: 0..5: -13))"
    assert uppers(same, where) == pytest.approx([-13 + 10 * math.log10(2)])
    scaled = (
        "sum(mask(offset[MHz], max dBm, in 1 MHz: 0..5: -13);"
        " mask(offset[MHz], max dBm, in 10 MHz: 0..5: -13); in 1 MHz)"
    )
    assert uppers(scaled, where) == pytest.approx([10 * math.log10(10**-1.3 + 10**-2.3)])


def test_test_tolerance_is_kept_apart_and_relaxes_each_side() -> None:
    # 38.521-1 6.3.2 as quoted: core -50 dBm, test tolerance 1.5 dB, test limit -48.5 dBm (TL-38521-OFF--48.5)
    limit = parse_limit("<= -50 dBm test tolerance 1.5 dB")
    assert evaluate_limit(limit, context()).upper == pytest.approx([-50.0])
    assert evaluate_limit(limit, context(), with_test_tolerance=True).upper == pytest.approx([-48.5])
    both = bounds("54 ± 1.5 dBm test tolerance 0.5 dB", with_test_tolerance=True)
    assert both.lower == pytest.approx([52.0]) and both.upper == pytest.approx([56.0])
    stimulus = bounds(">= 95 % test tolerance 0.7 dB on stimulus", with_test_tolerance=True)
    assert stimulus.lower == pytest.approx([95.0])


def test_what_has_no_number_is_unknown_and_no_limit_requires_nothing() -> None:
    tbd = bounds("TBD dBm max")
    assert tbd.unknown.all() and tbd.why == "the limit is TBD"
    for text in ("no limit", "n/a"):
        free = bounds(text)
        assert not free.applies.any() and not free.outside.any() and free.lower is None and free.upper is None


def test_unit_that_does_not_fit_is_unknown_with_the_remedy_and_raises_nothing() -> None:
    found = bounds("P_rated - 35 dB max", context({"P_rated": "5 V"}))
    assert found.unknown.all() and "V cannot be read in dB" in found.why and "P_rated[dBm]" in found.why
    assert bounds("<= 10*log10(x) dB", context({"x": "-1 1"})).unknown.all()


def test_plain_number_beside_a_quantity_is_refused_not_guessed() -> None:
    found = bounds(">= 3 dB if frequency > 28", context(frequency__GHz=[29.0]))
    assert found.unknown.all() and "plain number meets a value in GHz" in found.why
    assert bounds(">= 3 dB if frequency[GHz] > 28", context(frequency__MHz=[29000.0])).applies.all()


def test_sum_of_two_levels_is_refused_when_the_units_are_known() -> None:
    levels = {"P": "20 dBm", "Q": "0 dBW", "G": "3 dB"}
    assert "two levels do not add" in bounds("P + Q dBm max", context(levels)).why
    assert "two levels do not add" in bounds("max(P + Q, -3) dBm max", context(levels)).why
    assert bounds("P + G dBm max", context(levels)).upper == pytest.approx([23.0])
    assert bounds("Q - P - 30 dBm max", context(levels)).upper == pytest.approx([-20.0])
    assert bounds("powersum(P, P) dBm max", context(levels)).upper == pytest.approx([23.0103])


_DECLARED = {"a": 3.5, "b": -12.25, "c": 40.0}
_leaf = st.one_of(
    st.integers(-60, 60).map(lambda value: (str(value) if value >= 0 else f"({value})", float(value))),
    st.sampled_from(sorted(_DECLARED)).map(lambda name: (name, _DECLARED[name])),
)


def _grown(inner: st.SearchStrategy[tuple[str, float]]) -> st.SearchStrategy[tuple[str, float]]:
    two = st.tuples(inner, inner)
    return st.one_of(
        two.map(lambda pair: (f"({pair[0][0]} + {pair[1][0]})", pair[0][1] + pair[1][1])),
        two.map(lambda pair: (f"({pair[0][0]} - {pair[1][0]})", pair[0][1] - pair[1][1])),
        two.map(lambda pair: (f"min({pair[0][0]}, {pair[1][0]})", min(pair[0][1], pair[1][1]))),
        two.map(lambda pair: (f"max({pair[0][0]}, {pair[1][0]})", max(pair[0][1], pair[1][1]))),
        inner.map(lambda one: (f"-{one[0]}", -one[1])),
        inner.map(lambda one: (f"abs({one[0]})", abs(one[1]))),
        st.tuples(inner, inner, inner, inner).map(
            lambda four: (
                f"({four[0][0]} if {four[1][0]} dB <= ({four[2][0]}) else {four[3][0]})"
                if four[1][0].isdigit() and four[2][0] in _DECLARED
                else four[0][0],
                (four[0][1] if four[1][1] <= four[2][1] else four[3][1])
                if four[1][0].isdigit() and four[2][0] in _DECLARED
                else four[0][1],
            )
        ),
    )


@settings(max_examples=300, deadline=None)
@given(st.recursive(_leaf, _grown, max_leaves=12))
def test_formulas_agree_with_plain_python(pair: tuple[str, float]) -> None:
    text, expected = pair
    declared = {name: f"{value} dB" for name, value in _DECLARED.items()}
    assert bounds(f"max(-999, {text}) dB max", context(declared)).upper == pytest.approx(
        [max(-999.0, expected)]
    )


@settings(max_examples=200, deadline=None)
@given(
    st.lists(
        st.tuples(st.integers(0, 20), st.integers(1, 10), st.integers(-60, 0), st.integers(-60, 0)),
        min_size=1,
        max_size=5,
    ),
    st.lists(st.integers(-2, 34), min_size=1, max_size=20),
)
def test_masks_agree_with_plain_python(pieces: list[tuple[int, int, int, int]], places: list[int]) -> None:
    segments = [f"{start}..{start + width}: {first} to {last}" for start, width, first, last in pieces]
    where = context(offset__MHz=[float(place) for place in places])
    found = bounds(f"mask(offset[MHz], max dBm: {'; '.join(segments)})", where).spread(len(places))
    assert found.upper is not None
    for row, place in enumerate(places):
        here = [
            first + (place - start) / width * (last - first)
            for start, width, first, last in pieces
            if start <= place <= start + width
        ]
        assert bool(found.applies[row]) == bool(here)
        assert not here or float(found.upper[row]) == pytest.approx(min(here))


def test_constant_limits_cost_microseconds() -> None:
    # 2,000 requirements are evaluated on the way of every status; 100 µs each is the ceiling, ~7 µs what it takes
    limits = [parse_limit(f">= {value % 50} dBm") for value in range(2000)]
    where = context(frequency__GHz=[28.0] * 50)
    started = time.perf_counter()
    for limit in limits:
        evaluate_limit(limit, where)
    assert time.perf_counter() - started < 0.2


def test_a_million_records_are_bounded_at_numpy_speed() -> None:
    offsets = np.linspace(0, 120, 1_000_000)
    where = LimitContext(
        Columns(offsets.size, {"offset": offsets}, {}, {"offset": "MHz"}), {"BW": parse_quantity("50 MHz")}
    )
    started = time.perf_counter()
    found = evaluate_limit(parse_limit(MASK), where)
    assert time.perf_counter() - started < 2.0
    assert found.upper is not None and found.upper.shape == (1_000_000,)
