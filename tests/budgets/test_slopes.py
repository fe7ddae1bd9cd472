"""Slopes against finite differences of the whole evaluation; shares that add up."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.budgets import evaluate_budget, line_key, shares_of, slopes_of
from specflow.model.budget import Budget
from specflow.parameters import load_dictionary
from tests.budgets.chains import a_chain, project_of
from tests.builders import a_budget_line, a_quantity, a_requirement, at_least, at_most

DICTIONARY = load_dictionary()
STEP = 1e-4

#: All quantities of a cascade, with the unit of a limit on each.
QUANTITIES = {
    "gain": "dB",
    "noise_figure": "dB",
    "noise_temperature": "K",
    "system_noise_temperature": "K",
    "g_over_t": "dB/K",
    "noise_floor": "dBm",
    "noise_density": "dBm/Hz",
    "sensitivity": "dBm",
    "iip3": "dBm",
    "oip3": "dBm",
    "iip2": "dBm",
    "oip2": "dBm",
    "ip1db": "dBm",
    "op1db": "dBm",
    "output_power": "dBm",
    "eirp": "dBm",
    "output_backoff": "dB",
    "sfdr": "dB",
    "aclr": "dB",
}


def everything(**fields: object) -> tuple[Budget, list[object]]:
    """A chain with an antenna, warm passive losses, figures at either port and in kelvin, serving every quantity."""
    names = tuple(f"R-{number}" for number in range(len(QUANTITIES)))
    budget = a_chain(
        {
            "block": "ANT",
            "antenna_gain": 30.0,
            "antenna_noise_temperature": 60.0,
            "snr": 8.0,
            "output_power": -60.0,
        },
        {"block": "FEED", "insertion_loss": 0.6, "passive": True},
        {
            "block": "LNA",
            "gain": 22.0,
            "noise_temperature": 80.0,
            "oip3": 18.0,
            "oip2": 40.0,
            "op1db": 8.0,
            "count": 4,
        },
        {"block": "LINE", "gain": -3.0, "passive": True},
        {
            "block": "MIX",
            "conversion_loss": 7.0,
            "noise_figure": 8.0,
            "iip3": 12.0,
            "iip2": 45.0,
            "ip1db": 3.0,
        },
        {"block": "IF", "gain": 25.0, "noise_figure": 4.0, "oip3": 30.0, "iip2": 30.0, "op1db": 20.0},
        requirements=names,
        bandwidth_hz=1e6,
        channel_spacing_hz=1.3e6,
        **fields,
    )
    requirements = [
        a_requirement(
            name, block="SYS", quantity=a_quantity(quantity), limit=at_least(-999, unit), conditions=None
        )
        for name, (quantity, unit) in zip(names, QUANTITIES.items(), strict=True)
    ]
    return budget, requirements  # type: ignore[return-value]


@pytest.mark.parametrize("intermodulation", ["coherent", "non-coherent"])
def test_slopes_of_every_quantity_are_those_of_finite_differences(intermodulation: str) -> None:
    budget, requirements = everything(intermodulation=intermodulation)
    snapshot = project_of(budget, requirements=requirements)  # type: ignore[arg-type]
    result = evaluate_budget(budget, snapshot, DICTIONARY)
    slopes = {one.parameter: one for one in slopes_of(result)}
    assert set(slopes) == set(QUANTITIES)
    for line in budget.lines:
        value = line.value.value  # type: ignore[union-attr]
        up, down = (
            evaluate_budget(budget, snapshot, DICTIONARY, values={line_key(line): value + step})
            for step in (STEP, -STEP)
        )
        for name, found in slopes.items():
            difference = (up.of(name).result - down.of(name).result) / (2 * STEP)
            assert found.of(line.position, line.parameter) == pytest.approx(difference, abs=2e-6, rel=2e-6), (
                name,
                line.place,
            )


def test_a_matched_loss_at_290_k_moves_the_noise_figure_by_its_own_slope_less_that_of_its_gain() -> None:
    """dNF/dLoss = dNF/dNF_i - dNF/dG_i with LNA 18/1.2, filter 2.5, mixer -7/7, IF 20/4: 0.0170 + 0.1971."""
    budget = a_chain(
        {"block": "LNA", "gain": 18.0, "noise_figure": 1.2},
        {"block": "FIL", "insertion_loss": 2.5, "passive": True},
        {"block": "MIX", "gain": -7.0, "noise_figure": 7.0},
        {"block": "IF", "gain": 20.0, "noise_figure": 4.0},
    )
    (slopes,) = slopes_of(evaluate_budget(budget, project_of(budget), DICTIONARY))
    assert slopes.of(2, "insertion_loss") == pytest.approx(0.0170 + 0.1971, abs=1e-4)
    assert slopes.of(1, "gain") == pytest.approx(-0.2045, abs=1e-4)
    with pytest.raises(KeyError):
        slopes.of(2, "gain")


@pytest.mark.parametrize("law", ["power sum", "voltage sum"])
@pytest.mark.parametrize("shared", ["common", "per element"])
def test_slopes_of_sums_are_their_shares(law: str, shared: str) -> None:
    lines = tuple(
        a_budget_line(order, block, "spurious_relative", value, unit="dBc", shared=shared)
        for order, (block, value) in enumerate((("A", -60.0), ("B", -63.0), ("C", -70.0)), 1)
    )
    budget = Budget(
        id="B-1", requirements=("R-1",), quantity=a_quantity("spurious_relative"), law=law, lines=lines
    )
    result = evaluate_budget(budget, project_of(budget, limit=at_most(-50, "dBc")), DICTIONARY)
    (slopes,), (shares,) = slopes_of(result), shares_of(result)
    assert slopes.slopes == pytest.approx(shares.shares)
    assert shares.shares.sum(axis=0) == pytest.approx(1.0)


def test_slopes_of_an_error_vector_through_its_kinds() -> None:
    lines = (
        a_budget_line(1, "A", "evm", 2.0, unit="%"),
        a_budget_line(2, "B", "integrated_phase_error", 1.2, unit="deg"),
        a_budget_line(3, "C", "image_rejection", 35.0),
        a_budget_line(4, "D", "snr", 38.0),
        a_budget_line(5, "E", "carrier_leakage", -40.0, unit="dBc"),
    )
    budget = Budget(
        id="B-1", requirements=("R-1",), quantity=a_quantity("evm"), law="root sum of squares", lines=lines
    )
    snapshot = project_of(budget, limit=at_most(8, "%"))
    result = evaluate_budget(budget, snapshot, DICTIONARY)
    (slopes,) = slopes_of(result)
    for line in lines:
        value = line.value.value  # type: ignore[union-attr]
        up, down = (
            evaluate_budget(budget, snapshot, DICTIONARY, values={line_key(line): value + step})
            for step in (STEP, -STEP)
        )
        difference = (up.of("evm").result - down.of("evm").result) / (2 * STEP)
        assert slopes.of(line.position, line.parameter) == pytest.approx(difference, rel=1e-5)
    (shares,) = shares_of(result)
    assert shares.shares.sum() == pytest.approx(1.0)


@settings(max_examples=40, deadline=None)
@given(
    st.lists(
        st.tuples(st.floats(-6.0, 25.0), st.floats(0.1, 12.0), st.floats(-20.0, 30.0)), min_size=1, max_size=8
    )
)
def test_shares_add_up_to_one_and_the_cumulative_column_ends_at_the_result(
    stages: list[tuple[float, float, float]],
) -> None:
    budget = a_chain(
        *(
            {"block": f"S{n}", "gain": g, "noise_figure": nf, "iip3": ip}
            for n, (g, nf, ip) in enumerate(stages)
        ),
        requirements=("R-1", "R-2"),
    )
    requirements = [
        a_requirement("R-1", quantity=a_quantity("noise_figure"), limit=at_most(99), conditions=None),
        a_requirement("R-2", quantity=a_quantity("iip3"), limit=at_least(-99, "dBm"), conditions=None),
    ]
    result = evaluate_budget(budget, project_of(budget, requirements=requirements), DICTIONARY)
    for shares in shares_of(result):
        assert shares.shares.sum(axis=0) == pytest.approx(1.0)
    for one in result.outputs:
        assert one.result == pytest.approx(one.output.value(result.figures))
        assert one.cumulative[-1] == pytest.approx(one.result)


def test_the_rest_of_a_system_temperature_belongs_to_what_feeds_the_chain() -> None:
    budget, requirements = everything()
    result = evaluate_budget(budget, project_of(budget, requirements=requirements), DICTIONARY)  # type: ignore[arg-type]
    shares = next(one for one in shares_of(result) if one.parameter == "g_over_t")
    rest = 60.0 / result.of("system_noise_temperature").result
    assert shares.shares.sum(axis=0) == pytest.approx(1.0 - rest)
    assert np.all(shares.shares >= 0)


def test_every_result_is_the_last_of_its_cumulative_column() -> None:
    budget, requirements = everything()
    result = evaluate_budget(budget, project_of(budget, requirements=requirements), DICTIONARY)  # type: ignore[arg-type]
    for one in result.outputs:
        assert one.result == pytest.approx(one.output.value(result.figures)), one.parameter
