"""Limits on a statistic of many values, and alternatives on different quantities."""

from __future__ import annotations

import numpy as np
import pytest

from specflow.limits import parse_limit
from specflow.model.verdict import Label, RequirementStatus, Verdict
from specflow.statistics.tolerance import one_sided_factor
from tests.builders import (
    a_conditions_set,
    a_dimension,
    a_quantity,
    a_requirement,
    a_value_column,
    an_evidence_table,
    an_item,
    some_columns,
    some_evidence,
)
from tests.verification.evaluating import status_of

ONE_POINT = a_conditions_set("CS", a_dimension(values=(28.0,)))


def of_many(
    text: str, values: list[float], *, unit: str = "dB", u: float | None = None, **fields: object
) -> RequirementStatus:
    """Return the status of a population limit over readings that all serve one point."""
    conditions = fields.pop("conditions", None) or some_columns(frequency=[28.0] * len(values))
    quantity = a_quantity("gain" if unit == "dB" else "eirp")
    column = a_value_column("V", quantity=quantity, unit=unit)
    requirement = a_requirement(quantity=quantity, limit=parse_limit(text))
    evidence = some_evidence({"V": values}, conditions=conditions, u=u, items=fields.pop("items", "LNA-1"))
    table = an_evidence_table(rows=len(values), values=(column,))
    items = [an_item(f"LNA-{number}") for number in range(2, 12)]
    return status_of(requirement, ONE_POINT, table, *items, T_1=evidence)


def value_of(status: RequirementStatus) -> float:
    (points,) = status.activities[0].items.values()
    return float(points.value_low[0])


LEVELS = [20.0, 23.0, 26.0]


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        (">= 20 dBm mean of dB over run", 23.0),
        (">= 20 dBm mean of power over run", 10 * np.log10(np.mean(10 ** (np.array(LEVELS) / 10)))),
        (">= 20 dBm mean of squares over run", np.sqrt(np.mean(np.square(LEVELS)))),
    ],
)
def test_a_mean_is_taken_as_it_is_asked_for(text: str, expected: float) -> None:
    """The mean of dBm is not the dBm of the mean: 23 against 23.7 dBm here."""
    status = of_many(text, LEVELS, unit="dBm", u=0.2)
    assert value_of(status) == pytest.approx(expected)
    assert status.activities[0].items["LNA-1"].u.tolist() == [0.2]


def test_fewer_values_than_asked_for_are_insufficient() -> None:
    status = of_many(">= 20 dB mean of dB over run from at least 5", LEVELS)
    assert status.label is Label.INSUFFICIENT
    assert status.verdict is Verdict.INSUFFICIENT


def test_a_tolerance_bound_is_mean_less_k_s_over_the_items() -> None:
    """TI-031 of metrology_cases.json: ten items, 23.4 ± 0.35 dB: the 95/95 bound is 22.38, which misses 22.5."""
    drawn = np.random.default_rng(1).standard_normal(10)
    values = 23.4 + 0.35 * (drawn - drawn.mean()) / drawn.std(ddof=1)
    items = [f"LNA-{number}" for number in range(1, 11)]
    status = of_many(">= 22.5 dB at 95/95 over item", values.tolist(), items=items)
    assert value_of(status) == pytest.approx(22.3811628054, abs=1e-8)
    assert status.label is Label.FAILING
    assert of_many(">= 22.3 dB at 95/95 over item", values.tolist(), items=items).k == 1


def test_repeats_on_one_item_are_no_items() -> None:
    status = of_many(">= 10 dB at 95/95 over item", [23.0, 23.1, 23.2, 22.9])
    assert status.label is Label.INSUFFICIENT


def test_the_worst_repeat_of_an_item_stands_for_it() -> None:
    status = of_many(
        ">= 10 dB at 95/95 over item", [23.0, 22.0, 23.5, 24.0], items=["LNA-1", "LNA-1", "LNA-2", "LNA-3"]
    )
    values = np.array([22.0, 23.5, 24.0])
    assert value_of(status) == pytest.approx(
        values.mean() - one_sided_factor(3, 0.95, 0.95) * values.std(ddof=1)
    )


def test_worst_of_items_needs_every_item_to_meet_the_limit() -> None:
    items = ["LNA-1", "LNA-2", "LNA-3"]
    assert of_many(">= 20 dB worst over item from at least 3", [21, 22, 23], items=items).k == 1
    assert (
        of_many(">= 20 dB worst over item from at least 3", [21, 19, 23], items=items).label is Label.FAILING
    )
    few = of_many(
        ">= 20 dB worst over item from at least 3", [21, 21.3, 23], items=["LNA-1", "LNA-1", "LNA-2"]
    )
    assert few.label is Label.INSUFFICIENT


def test_a_percentile_over_the_sphere_weighs_by_solid_angle() -> None:
    """PC-006 of metrology_cases.json: 40 - 0.1·θ dBm has 35.44 dBm at 85 % of its CDF, not the unweighted 37.3."""
    theta, phi = (angle.ravel() for angle in np.meshgrid(np.arange(181.0), np.arange(360.0), indexing="ij"))
    at = some_columns({"theta": "deg", "phi": "deg"}, theta=theta, phi=phi, frequency=[28.0] * theta.size)
    status = of_many(
        ">= 35.4 dBm at 85 % of CDF over sphere", (40 - 0.1 * theta).tolist(), unit="dBm", conditions=at
    )
    assert value_of(status) == pytest.approx(35.4427004001, abs=0.06)
    assert status.verdict is Verdict.PASS


@pytest.mark.parametrize(
    ("theta", "phi"),
    [
        ([0.0, 10, 20], [0.0, 0, 0]),  # a cone
        ([0.0], [0.0]),
        ([90.0, 90], [0.0, 90]),  # one ring: the step of the grid is unknown
        ([0.0, 90, 180], [0.0, 0, 0]),  # one meridian
        ([0.0, *[90.0] * 4, 180], [0.0, 0, 90, 180, 180, 0]),  # one direction twice, one missing
    ],
)
@pytest.mark.parametrize("level", [19.0, 42.0])
def test_directions_that_do_not_cover_the_sphere_decide_nothing(
    theta: list[float], phi: list[float], level: float
) -> None:
    at = some_columns({"theta": "deg", "phi": "deg"}, theta=theta, phi=phi, frequency=[28.0] * len(theta))
    status = of_many(">= 35 dBm at 50 % of CDF over sphere", [level] * len(theta), unit="dBm", conditions=at)
    assert (status.k, status.verdict) == (0, Verdict.INSUFFICIENT)
    assert any("over the whole sphere" in remark for remark in status.remarks)


def test_the_six_directions_of_a_right_angled_grid_cover_the_sphere() -> None:
    theta, phi = [0.0, *[90.0] * 4, 180], [0.0, 0, 90, 180, 270, 0]
    at = some_columns({"theta": "deg", "phi": "deg"}, theta=theta, phi=phi, frequency=[28.0] * 6)
    assert of_many(">= 35 dBm at 50 % of CDF over sphere", [36.0] * 6, unit="dBm", conditions=at).k == 1


def test_a_percentile_over_the_sphere_without_directions_is_not_decided() -> None:
    status = of_many(">= 35 dBm at 85 % of CDF over sphere", [40, 41, 42], unit="dBm")
    assert status.label is Label.INSUFFICIENT


def test_counted_exceptions_may_miss_the_limit_but_not_the_relaxed_one() -> None:
    text = ">= 20 dB with 1 exceptions within >= 18 dB"
    assert of_many(text, [21, 19, 22]).k == 1
    assert of_many(text, [21, 19, 19.5]).label is Label.FAILING
    assert of_many(text, [21, 17, 22]).label is Label.FAILING


def test_a_share_of_the_samples_may_exceed_by_so_much() -> None:
    text = "<= 20 dB allow 25 % by 3 dB"
    assert of_many(text, [19, 19, 19, 22]).k == 1
    assert of_many(text, [19, 19, 19, 23.5]).label is Label.FAILING
    assert of_many(text, [19, 19, 21, 22]).label is Label.FAILING


def alternative(eirp: list[float] | None, gain: list[float] | None) -> RequirementStatus:
    """Return the status of ``gain >= 20 dB or eirp <= 30 dBm, whichever is looser`` at three points."""
    limit = parse_limit("looser(>= 20 dB; eirp <= 30 dBm)")
    columns = {
        "G": (a_value_column("G"), gain),
        "E": (a_value_column("E", quantity=a_quantity("eirp", plane="far field"), unit="dBm"), eirp),
    }
    present = {name: values for name, (_, values) in columns.items() if values is not None}
    table = an_evidence_table(
        values=tuple(column for column, values in columns.values() if values is not None)
    )
    return status_of(a_requirement(limit=limit), table, T_1=some_evidence(present))


def test_the_looser_of_alternatives_passes_if_any_does_and_fails_only_if_all_do() -> None:
    nan = float("nan")
    assert alternative([40, 40, 40], [21, 21, 21]).label is Label.READY
    assert alternative([25, 40, 25], [21, 21, 10]).label is Label.READY
    failing = alternative([40, 25, 25], [10, 21, 21])
    assert (failing.label, failing.k, failing.n_failing) == (Label.FAILING, 2, 1)
    assert alternative(None, [10, 21, 21]).label is Label.INCONCLUSIVE
    assert alternative([nan, 25, 25], [nan, 21, 21]).label is Label.PARTIALLY_VERIFIED


def test_a_limit_on_another_quantity_alone_is_judged_on_that_quantity() -> None:
    limit = parse_limit("eirp <= 30 dBm")
    column = a_value_column("E", quantity=a_quantity("eirp"), unit="dBm")
    status = status_of(
        a_requirement(limit=limit),
        an_evidence_table(values=(column,)),
        T_1=some_evidence({"E": [29, 29, 31]}),
    )
    assert (status.k, status.n_failing) == (2, 1)
