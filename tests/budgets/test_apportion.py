"""Sharing a limit: hand-solved shares, what is taken first, closure, and what cannot be shared."""

from __future__ import annotations

import math
from decimal import ROUND_CEILING, ROUND_FLOOR, Decimal
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.budgets.allotment import Allotment, rounded_safely
from specflow.budgets.apportion import Apportionment, apportion
from specflow.budgets.evaluate import evaluate_budget
from specflow.calculators.apportionment import equal_share_iip3, equal_share_noise_figures, proportional_iip3
from specflow.errors import CalculationError, InfeasibleError
from specflow.model.budget import Budget
from specflow.model.budget_line import Drift
from specflow.parameters import load_dictionary
from tests.budgets.chains import a_chain, project_of
from tests.builders import (
    a_conditions_set,
    a_dimension,
    a_quantity,
    a_requirement,
    at_least,
    at_most,
    between,
)

DICTIONARY = load_dictionary()
GAINS = (18.0, -2.5, -7.0, 20.0)
WITHIN = {"minus": 0.5, "plus": 0.5, "meaning": "limits"}


def shared(budget: Budget, *, way: str = "equal", fixed: tuple[str, ...] = (), **more: Any) -> Apportionment:
    """Apportion a budget."""
    return apportion(budget, project_of(budget, **more), DICTIONARY, way=way, fixed=fixed)  # type: ignore[arg-type]


def of(found: Apportionment, block: str, parameter: str) -> Allotment:
    """Return one allotment."""
    return next(one for one in found.allotments if (one.block, one.parameter) == (block, parameter))


def exact_chain(**fields: Any) -> Budget:
    """Return four stages with their noise figures and intercepts."""
    return a_chain(
        {"block": "A", "gain": GAINS[0], "noise_figure": 1.2, "iip3": -2.0},
        {"block": "B", "gain": GAINS[1], "noise_figure": 2.5, "iip3": 30.0},
        {"block": "C", "gain": GAINS[2], "noise_figure": 7.0, "iip3": 6.0},
        {"block": "D", "gain": GAINS[3], "noise_figure": 4.0, "iip3": 12.0},
        **fields,
    )


def test_equal_shares_of_noise_are_those_of_the_formula() -> None:
    # rf-budget.md section 8: F_i = 1 + G_b(i)(F_t - 1)/n.
    found = shared(exact_chain(), limit=at_most(3.0))
    formula = equal_share_noise_figures(3.0, list(GAINS))
    for block, figure in zip("ABCD", formula, strict=True):
        allotment = of(found, block, "noise_figure")
        assert allotment.high == pytest.approx(float(figure), abs=0.0101)
        assert allotment.high <= float(figure) + 1e-9
        assert allotment.is_shared and math.isinf(allotment.low)


@pytest.mark.parametrize("law", ["coherent", "non-coherent"])
def test_equal_shares_of_distortion_are_those_of_the_formula(law: str) -> None:
    # rf-budget.md section 8: target + G_b + 10 log n (coherent), + 5 log n (power sum).
    chain = exact_chain(parameter="iip3", intermodulation=law)
    found = shared(chain, limit=at_least(-10, "dBm"))
    formula = equal_share_iip3(-10.0, list(GAINS), "coherent" if law == "coherent" else "noncoherent")
    for block, figure in zip("ABCD", formula, strict=True):
        allotment = of(found, block, "iip3")
        assert float(figure) - 1e-9 <= allotment.low <= float(figure) + 0.0101


def test_proportional_shares_move_every_intercept_alike() -> None:
    found = shared(exact_chain(parameter="iip3"), way="proportional", limit=at_least(-12, "dBm"))
    formula = proportional_iip3(-12.0, list(GAINS), [-2.0, 30.0, 6.0, 12.0])
    for block, figure in zip("ABCD", formula, strict=True):
        assert of(found, block, "iip3").low == pytest.approx(float(figure), abs=0.0101)


def test_passive_positions_take_their_share_first_and_the_system_closes() -> None:
    chain = a_chain(
        {"block": "LNA", "gain": 18.0, "noise_figure": 1.2, "more": {"gain": {"tolerance": WITHIN}}},
        {
            "block": "FIL",
            "insertion_loss": 2.5,
            "passive": True,
            "more": {"insertion_loss": {"tolerance": WITHIN}},
        },
        {"block": "MIX", "gain": -7.0, "noise_figure": 7.0, "more": {"gain": {"tolerance": WITHIN}}},
        {"block": "IF", "gain": 20.0, "noise_figure": 4.0, "more": {"gain": {"tolerance": WITHIN}}},
    )
    found = shared(chain, limit=at_most(3.0))
    assert of(found, "FIL", "insertion_loss").high == 3.0
    assert not of(found, "FIL", "insertion_loss").is_shared
    # By hand: gains 17.5, -3, -7.5 at their worst; three active stages share F_t - 1 - (F_fil - 1)/G_lna.
    g_lna, loss = 10**1.75, 10**0.3
    left = (10**0.3 - 1 - (loss - 1) / g_lna) / 3
    before = {"LNA": 1.0, "MIX": g_lna / loss, "IF": g_lna / loss * 10**-0.75}
    for block, gain in before.items():
        assert of(found, block, "noise_figure").high == pytest.approx(
            10 * math.log10(1 + left * gain), abs=0.0101
        )
    assert found.closure.closes is True
    assert 0 <= found.closure.limits[0].smallest < 0.02


def test_nominal_shares_are_the_textbook_ones_and_need_not_close() -> None:
    window = {"gain": {"tolerance": WITHIN}}
    stages = [
        {"block": block, "gain": gain, "noise_figure": nf, "more": window}
        for block, gain, nf in zip("ABCD", GAINS, (1.2, 2.5, 7.0, 4.0), strict=True)
    ]
    chain = a_chain(*stages)
    found = apportion(chain, project_of(chain, limit=at_most(3.0)), DICTIONARY, at_nominal=True)
    formula = equal_share_noise_figures(3.0, list(GAINS))
    for block, figure in zip("ABCD", formula, strict=True):
        assert of(found, block, "noise_figure").high == pytest.approx(float(figure), abs=0.0101)
    assert found.closure.closes is False


def test_exact_gains_that_hurt_on_both_sides_leave_closure_unshown() -> None:
    requirements = [
        a_requirement(
            "R-NF", block="SYS", quantity=a_quantity("noise_figure"), limit=at_most(3), conditions=None
        ),
        a_requirement(
            "R-IP", block="SYS", quantity=a_quantity("iip3"), limit=at_least(-12, "dBm"), conditions=None
        ),
    ]
    chain = exact_chain(requirements=("R-NF", "R-IP"))
    found = apportion(chain, project_of(chain, requirements=requirements), DICTIONARY)
    assert found.closure.closes is None
    assert any("A gain has neither a limit nor a tolerance" in one for one in found.closure.missing)
    assert of(found, "A", "noise_figure").is_shared and of(found, "A", "iip3").is_shared


def test_reserve_leaves_less_to_share() -> None:
    reserve = {"parameter": "noise_figure", "amount": 0.5, "unit": "dB", "holder": "Systems"}
    found = shared(exact_chain(reserves=(reserve,)), limit=at_most(3.0))
    formula = equal_share_noise_figures(2.5, list(GAINS))
    assert of(found, "A", "noise_figure").high == pytest.approx(float(formula[0]), abs=0.0101)


def test_fixed_blocks_keep_their_figure() -> None:
    found = shared(exact_chain(), fixed=("C",), limit=at_most(3.0))
    formula = equal_share_noise_figures(3.0, list(GAINS), [None, None, 7.0, None])
    assert of(found, "C", "noise_figure").high == pytest.approx(7.0)
    assert of(found, "A", "noise_figure").high == pytest.approx(float(formula[0]), abs=0.0101)


def test_what_is_taken_first_may_leave_nothing() -> None:
    chain = a_chain(
        {"block": "FIL", "insertion_loss": 2.5, "passive": True},
        {"block": "LNA", "gain": 18.0, "noise_figure": 1.0},
    )
    with pytest.raises(InfeasibleError, match=r"infeasible, and short by 0\.5 dB"):
        shared(chain, limit=at_most(2.0))


def test_nothing_to_share_over_is_said() -> None:
    chain = a_chain({"block": "FIL", "insertion_loss": 2.5, "passive": True})
    with pytest.raises(CalculationError, match="nothing is left to share R-1"):
        shared(chain, limit=at_most(3.0))


def test_amounts_share_their_limit_and_gains_the_margin() -> None:
    watts = a_sum("dc_power", ("A", "dc_power", 1.0), ("B", "dc_power", 0.5), unit="W")
    equal, scaled = (shared(watts, way=way, limit=at_most(3.0, "W")) for way in ("equal", "proportional"))
    assert [of(equal, block, "dc_power").high for block in "AB"] == [1.5, 1.5]
    assert [of(scaled, block, "dc_power").high for block in "AB"] == [2.0, 1.0]
    gains = a_chain({"block": "A", "gain": 20.0}, {"block": "B", "gain": -7.0}, parameter="gain")
    found = shared(gains, limit=between(12, 15))
    assert (of(found, "A", "gain").low, of(found, "A", "gain").high) == (19.5, 21.0)
    assert (of(found, "B", "gain").low, of(found, "B", "gain").high) == (-7.5, -6.0)
    assert found.closure.closes is True


def a_sum(parameter: str, *lines: tuple[str, str, float], unit: str = "dB", law: str = "sum") -> Budget:
    """Return a sum of one line a block."""
    return Budget(
        id="B-1",
        requirements=("R-1",),
        quantity=a_quantity(parameter),
        law=law,
        lines=tuple(
            {"position": order, "block": block, "parameter": name, "value": value, "unit": unit}
            for order, (block, name, value) in enumerate(lines, 1)
        ),
    )


def test_error_vector_and_noise_powers_share_as_they_add() -> None:
    vector = a_sum("evm", ("A", "evm", 3.0), ("B", "evm", 1.0), unit="%", law="root sum of squares")
    assert of(shared(vector, limit=at_most(5, "%")), "A", "evm").high == pytest.approx(
        5 / math.sqrt(2), abs=0.001
    )
    scaled = shared(vector, way="proportional", limit=at_most(5, "%"))
    assert of(scaled, "A", "evm").high == pytest.approx(3 * 5 / math.sqrt(10), abs=0.002)
    levels = a_sum(
        "noise_density",
        ("A", "noise_density", -150.0),
        ("B", "noise_density", -160.0),
        unit="dBm/Hz",
        law="power sum",
    )
    found = shared(levels, limit=at_most(-140, "dBm/Hz"))
    assert of(found, "B", "noise_density").high == pytest.approx(-143.01, abs=0.011)


@settings(max_examples=25, deadline=None)
@given(
    gains=st.lists(st.floats(0, 20), min_size=2, max_size=5),
    noise=st.lists(st.floats(0.5, 8), min_size=5, max_size=5),
    limit=st.floats(1, 12),
    way=st.sampled_from(["equal", "proportional"]),
)
def test_shares_put_back_in_fill_the_limit(
    gains: list[float], noise: list[float], limit: float, way: str
) -> None:
    stages = [{"gain": gain, "noise_figure": nf} for gain, nf in zip(gains, noise, strict=False)]
    chain = a_chain(*stages)
    bar = at_most(round(limit, 3))
    found = shared(chain, way=way, limit=bar)
    values = {
        (order, "noise_figure"): of(found, f"S{order}", "noise_figure").high
        for order in range(1, len(gains) + 1)
    }
    result = evaluate_budget(chain, project_of(chain, limit=bar), DICTIONARY, values=values)
    margin = result.served[0].smallest_margin
    assert -1e-9 <= margin < 0.06  # each of five figures is rounded down to 0.01 dB
    assert np.isfinite(margin)


@settings(max_examples=300, deadline=None)
@given(
    value=st.one_of(
        st.floats(-200, 200, allow_nan=False),
        st.decimals(-200, 200, places=2).map(float),
        st.floats(0.01, 1e6, allow_nan=False),
    ),
    is_log=st.booleans(),
    up=st.booleans(),
)
def test_sides_are_rounded_as_on_paper(value: float, is_log: bool, up: bool) -> None:
    """Against decimal arithmetic: steps of 0.01, or of the fourth digit."""
    unit = "dB" if is_log else "W"
    low, high = (value, math.inf) if up else (-math.inf, value)
    one = Allotment("A", "gain", unit, low, high, True, 0.0, 0.0, "")
    found = rounded_safely(one)
    exact = Decimal(repr(round(value, 9)))
    if exact == 0:
        return
    step = Decimal("0.01") if is_log else Decimal(10) ** (exact.adjusted() - 3)
    expected = (exact / step).to_integral_value(ROUND_CEILING if up else ROUND_FLOOR) * step
    assert (found.low if up else found.high) == pytest.approx(float(expected), rel=1e-12, abs=1e-12)


@pytest.mark.parametrize("way", ["equal", "proportional"])
def test_one_number_for_all_conditions_asks_for_nothing_in_vain(way: Any) -> None:
    """A gain and a noise figure that drift: by hand, F_i - 1 in proportion to the estimates in the heat, scaled."""
    gain = Drift(dimension="temperature_ambient", dimension_unit="°C", slope=-0.05, reference=25.0)
    noise = gain.model_copy(update={"slope": 0.01})
    budget = a_chain(
        {"block": "A", "gain": 15.0, "noise_figure": 1.5, "more": {
            "gain": {"drifts": (gain,)}, "noise_figure": {"drifts": (noise,)}}},
        {"block": "B", "gain": 10.0, "noise_figure": 8.0},
        conditions="CS",
    )  # fmt: skip
    air = a_conditions_set("CS", a_dimension("temperature_ambient", "°C", values=(-35.0, 25.0, 85.0)))
    found = apportion(budget, project_of(budget, air, limit=at_most(4)), DICTIONARY, way=way, at_nominal=True)
    first, second = (
        next(one.high for one in found.allotments if (one.block, one.parameter) == (name, "noise_figure"))
        for name in "AB"
    )
    own, behind = 10 ** (first / 10) - 1, 10 ** (second / 10) - 1
    hot = 10 ** ((15.0 - 3.0) / 10)
    assert 10 * math.log10(1 + own + behind / hot) == pytest.approx(4.0, abs=0.01)
    if way == "equal":
        assert own == pytest.approx(behind / hot, rel=0.01)
    else:
        assert own / (10**0.21 - 1) == pytest.approx(behind / (10**0.8 - 1), rel=0.01)


@pytest.mark.parametrize("way", ["equal", "proportional"])
def test_parallel_paths_share_by_what_they_add_to_the_chain(way: Any) -> None:
    """Two unlike paths of 15 and 12 dB in front of a third block: F - 1 = Σ (F_k - 1)·g_k/(2·G) + (F_C - 1)/G."""
    chain = a_chain(
        {"block": "A", "gain": 15.0, "noise_figure": 2.0},
        {"block": "B", "gain": 12.0, "noise_figure": 3.0},
        {"block": "C", "gain": 10.0, "noise_figure": 8.0},
    )
    paths = zip(chain.positions, ("a", "b", ""), strict=True)
    budget = chain.model_copy(
        update={"positions": tuple(one.model_copy(update={"path": path}) for one, path in paths)}
    )
    found = apportion(budget, project_of(budget, limit=at_most(3.5)), DICTIONARY, way=way, at_nominal=True)
    figures = {one.block: one.high for one in found.allotments if one.parameter == "noise_figure"}
    g = {"A": 10**1.5, "B": 10**1.2}
    whole = ((g["A"] ** 0.5 + g["B"] ** 0.5) / 2) ** 2
    weight = {"A": g["A"] / (2 * whole), "B": g["B"] / (2 * whole), "C": 1 / whole}
    parts = {name: (10 ** (figures[name] / 10) - 1) * weight[name] for name in weight}
    assert 10 * math.log10(1 + sum(parts.values())) == pytest.approx(3.5, abs=0.01)
    estimate = {"A": 2.0, "B": 3.0, "C": 8.0}
    alike = [
        part / (1.0 if way == "equal" else (10 ** (estimate[name] / 10) - 1) * weight[name])
        for name, part in parts.items()
    ]
    assert max(alike) / min(alike) == pytest.approx(1.0, abs=0.015)


@pytest.mark.parametrize(
    ("figure", "law"), [("iip3", "coherent"), ("iip2", "coherent"), ("iip2", "non-coherent")]
)
def test_parallel_paths_share_distortion_equally(figure: str, law: str) -> None:
    """Each position alone, the others ideal, would leave the same intercept: that is what an equal share is."""
    chain = a_chain(
        {"block": "A", "gain": 15.0, figure: 0.0},
        {"block": "B", "gain": 12.0, figure: 3.0},
        {"block": "C", "gain": 10.0, figure: 20.0},
        parameter=figure,
        intermodulation=law,
    )
    paths = zip(chain.positions, ("a", "b", ""), strict=True)
    budget = chain.model_copy(
        update={"positions": tuple(one.model_copy(update={"path": path}) for one, path in paths)}
    )
    snapshot = project_of(budget, limit=at_least(-10, "dBm"))
    found = apportion(budget, snapshot, DICTIONARY, way="equal", at_nominal=True)
    shares = {one.block: one.low for one in found.allotments if one.parameter == figure}
    orders = {"A": 1, "B": 2, "C": 3}
    everyone = {(orders[name], figure): value for name, value in shares.items()}
    whole = evaluate_budget(budget, snapshot, DICTIONARY, values=everyone).of(figure).result[0]
    assert whole == pytest.approx(-10.0, abs=0.02)
    alone = [
        evaluate_budget(
            budget,
            snapshot,
            DICTIONARY,
            values={key: (value if key[0] == order else 300.0) for key, value in everyone.items()},
        )
        .of(figure)
        .result[0]
        for order in orders.values()
    ]
    assert max(alone) - min(alone) < 0.05


@pytest.mark.parametrize(("limit", "asked"), [(30.0, 0.5), (30.3, 0.65), (34.0, 2.5)])
def test_a_gain_that_has_to_be_harder_keeps_the_width_of_its_tolerance(limit: float, asked: float) -> None:
    within = {"tolerance": {"minus": 0.5, "plus": 0.5, "meaning": "limits"}}
    chain = a_chain(
        {"block": "A", "gain": 18.0, "more": {"gain": within}},
        {"block": "B", "gain": 11.0, "more": {"gain": within}},
        parameter="gain",
    )
    found = apportion(chain, project_of(chain, limit=at_least(limit)), DICTIONARY, way="equal")
    windows = {one.block: (one.low, one.high) for one in found.allotments}
    assert windows["A"] == (pytest.approx(18.0 + asked), pytest.approx(19.0 + asked))
    assert windows["B"] == (pytest.approx(11.0 + asked), pytest.approx(12.0 + asked))
    assert found.closure.closes is True
