"""Directions are compared on the sphere."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from specflow.conditions import DIRECTION_PAIRS, expand, match, proves, unstated_conditions
from specflow.conditions.directions import angles_between, direction_vectors, folded
from specflow.errors import ConditionsError
from specflow.model.columns import Columns
from tests.conditions.make import a_set, everything, rows
from tests.conditions.second_route import direction, great_circle, range_is_proved

THETA_PHI, AZ_EL = DIRECTION_PAIRS[0], DIRECTION_PAIRS[1]
angles = st.floats(-400, 400).map(lambda angle: round(angle, 3))


def one_by_one(columns: Columns, *dimensions: str) -> dict[int, int]:
    matching = match(expand(a_set(*dimensions)), columns)
    return dict(zip(matching.record.tolist(), matching.point.tolist(), strict=True))


def test_theta_minus_45_phi_180_is_theta_45_phi_0() -> None:
    assert one_by_one(rows(theta=[-45, 45, 45], phi=[180, 360, 180]), "theta: 45 deg", "phi: 0 deg") == {
        0: 0,
        1: 0,
    }


def test_at_boresight_phi_is_free() -> None:
    conditions = ("theta: 0 deg ± 1 deg", "phi: 0 deg")
    assert one_by_one(rows(theta=[0, 0, 0.9, 30], phi=[90, None, 200, None]), *conditions) == {
        0: 0,
        1: 0,
        2: 0,
    }


def test_boresight_is_one_point_whatever_the_phi() -> None:
    points = expand(a_set("theta: 0, 30, 60 deg ± 1 deg", "phi: 0, 90, 180, 270 deg"))
    assert points.size == 1 + 2 * 4


def test_the_tolerance_is_an_angle_on_the_sphere() -> None:
    # At theta 10 deg a turn of 5 deg in phi is 0.87 deg on the sphere; at theta 90 deg it is 5 deg.
    assert one_by_one(rows(theta=[10.0], phi=[5.0]), "theta: 10 deg ± 1 deg", "phi: 0 deg") == {0: 0}
    assert one_by_one(rows(theta=[90.0], phi=[5.0]), "theta: 90 deg ± 1 deg", "phi: 0 deg") == {}


def test_azimuth_and_elevation_are_a_direction_with_the_pole_overhead() -> None:
    conditions = ("elevation: 0, 60 deg ± 1 deg", "azimuth: 0, 2 deg")
    assert one_by_one(rows(azimuth=[358.5, 2.1], elevation=[0.0, 60.0]), *conditions) == {1: 3}
    # At 60 deg elevation two azimuths 1.6 deg apart are 0.8 deg apart on the sphere.
    assert one_by_one(rows(azimuth=[3.6], elevation=[60.0]), *conditions) == {0: 3}


def test_unlike_conventions_never_match() -> None:
    points = expand(a_set("theta: 0 deg ± 1 deg", "phi: 0 deg"))
    records = rows(azimuth=[0.0], elevation=[90.0])
    assert len(match(points, records).record) == 0
    assert set(unstated_conditions(points, records)) == {"theta", "phi"}


def test_polarisation_is_compared_separately() -> None:
    records = rows(theta=[30, 30], phi=[0, 0], polarisation=["H", "V"])
    assert one_by_one(records, "theta: 30 deg ± 1 deg", "phi: 0 deg", "polarisation: H, V") == {0: 0, 1: 1}


def test_radians_serve_degrees() -> None:
    records = rows({"theta": "rad", "phi": "rad"}, theta=[np.pi / 6], phi=[np.pi])
    assert one_by_one(records, "theta: 30 deg ± 0.1 deg", "phi: 180 deg") == {0: 0}


def test_one_angle_alone_is_a_plain_number() -> None:
    assert one_by_one(rows(theta=[30.0, -30.0], phi=[12.0, 13.0]), "theta: 30 deg ± 1 deg", "phi: any") == {
        0: 0
    }


def test_two_tolerances_for_one_direction_are_refused() -> None:
    with pytest.raises(ConditionsError, match="tolerances differ"):
        a_set("theta: 30 deg ± 1 deg", "phi: 0 deg ± 2 deg")


def test_a_rule_for_half_a_direction_is_refused() -> None:
    with pytest.raises(ConditionsError, match="half of a direction"):
        a_set("theta: at or above 30 deg", "phi: 0, 90 deg")


def test_many_directions_are_searched_like_few() -> None:
    thetas = "; ".join(str(theta) for theta in range(0, 181, 10))
    phis = "; ".join(str(phi) for phi in range(0, 360, 10))
    points = expand(a_set(f"theta: {thetas} deg ± 6 deg", f"phi: {phis} deg"))
    assert points.size == 2 + 17 * 36
    rng = np.random.default_rng(5)
    theta, phi = rng.uniform(-180, 180, 200), rng.uniform(-360, 360, 200)
    matching = match(points, rows(theta=list(theta), phi=list(phi)))
    required = direction_vectors(
        THETA_PHI, points.columns_lo.numeric["theta"], points.columns_lo.numeric["phi"]
    )
    pairs = dict(zip(matching.record.tolist(), matching.point.tolist(), strict=True))
    for record in range(200):
        away = [great_circle(direction(theta[record], phi[record]), vector) for vector in required.tolist()]
        assert (record in pairs) == (min(away) <= 6)
        if record in pairs:
            assert away[pairs[record]] == pytest.approx(min(away))
        assert (record in matching.ambiguous) == (sum(angle <= 6 for angle in away) > 1)


@given(angles, angles)
def test_a_direction_has_several_spellings(theta: float, phi: float) -> None:
    spellings = [
        (theta, phi),
        (-theta, phi + 180),
        (theta + 360, phi),
        (theta, phi - 360),
        (360 - theta, phi + 180),
    ]
    vectors = direction_vectors(
        THETA_PHI, *(np.array(column, np.float64) for column in zip(*spellings, strict=True))
    )
    assert np.max(angles_between(vectors, vectors[0])) < 1e-7


@given(angles, angles)
def test_folding_keeps_the_direction(theta: float, phi: float) -> None:
    vector = direction_vectors(THETA_PHI, np.array([theta]), np.array([phi]))
    own_theta, own_phi = folded(vector)
    assert 0 <= own_theta[0] <= 180
    assert float(angles_between(direction_vectors(THETA_PHI, own_theta, own_phi), vector)[0]) < 1e-7


@given(angles, angles, angles, angles)
def test_angles_agree_with_the_arc_tangent_of_cross_and_dot(a: float, b: float, c: float, d: float) -> None:
    one, other = direction(a, b), direction(c, d)
    assert float(angles_between(np.array(one), np.array(other))) == pytest.approx(
        great_circle(one, other), abs=2e-6
    )


@given(angles, angles, st.floats(0, 89))
def test_elevation_is_counted_from_the_equator(azimuth: float, phi: float, elevation: float) -> None:
    up = direction_vectors(AZ_EL, np.array([elevation]), np.array([azimuth]))
    polar = direction_vectors(THETA_PHI, np.array([90 - elevation]), np.array([azimuth]))
    assert float(angles_between(up, polar)[0]) < 1e-7


# Cuts: a range of one angle at listed values of the other.


def test_a_theta_cut_runs_through_boresight() -> None:
    points = expand(a_set("theta: -60 to 60 deg step 15 deg ± 1 deg", "phi: 0, 90 deg"))
    assert points.size == 2
    theta = list(range(-60, 61, 15))
    records = rows(theta=theta, phi=[0.0] * 9)
    assert proves(points, match(points, records), everything(records)).tolist() == [True, False]


def test_the_far_half_of_a_cut_may_be_recorded_at_phi_plus_180() -> None:
    points = expand(a_set("theta: -60 to 60 deg step 15 deg ± 1 deg", "phi: 0 deg"))
    records = rows(theta=[60, 45, 30, 15, 0, 15, 30, 45, 60], phi=[0, 0, 0, 0, 0, 180, 180, 180, 180])
    assert proves(points, match(points, records), everything(records)).tolist() == [True]


def test_boresight_serves_the_cut_on_which_it_was_recorded() -> None:
    points = expand(a_set("theta: -30 to 30 deg step 15 deg ± 1 deg", "phi: 0, 90 deg"))
    theta = [-30, -15, 0, 15, 30] * 2
    records = rows(theta=theta, phi=[0.0] * 5 + [90.0] * 5)
    matching = match(points, records)
    assert proves(points, matching, everything(records)).tolist() == [True, True]
    assert len(matching.ambiguous) == 0


def test_boresight_finds_its_cut_where_some_are_excluded_too() -> None:
    points = expand(
        a_set(
            "theta: -30 to 30 deg step 30 deg ± 1 deg",
            "phi: 0, 90 deg",
            "mode: A, B",
            exclusions="mode = B",
        )
    )
    records = rows(theta=[-30, 0, 30] * 2, phi=[0.0] * 3 + [90.0] * 3, mode=["A"] * 6)
    assert proves(points, match(points, records), everything(records)).tolist() == [True, True]


def test_a_direction_off_the_cut_does_not_serve_it() -> None:
    points = expand(a_set("theta: 0 to 60 deg step 30 deg ± 1 deg", "phi: 0 deg"))
    # 2 deg of phi are 1 deg off the cut at theta 30 deg and 1.7 deg off at theta 60 deg.
    matching = match(points, rows(theta=[30, 60], phi=[1.9, 2.0]))
    assert matching.record.tolist() == [0]


def test_a_full_turn_at_fixed_theta_has_no_ends() -> None:
    points = expand(a_set("theta: 30 deg ± 1 deg", "phi: 0 to 360 deg step 90 deg"))
    records = rows(theta=[30, 30, 30, -30], phi=[10, 100, 190, 100])
    assert proves(points, match(points, records), everything(records)).tolist() == [True]
    fewer = rows(theta=[30, 30, 30], phi=[10, 100, 190])
    assert proves(points, match(points, fewer), everything(fewer)).tolist() == [False]


def test_an_azimuth_range_across_north() -> None:
    points = expand(a_set("azimuth: -30 to 30 deg step 20 deg ± 1 deg"))
    records = rows(azimuth=[330, 350, 10, 30])
    assert proves(points, match(points, records), everything(records)).tolist() == [True]


def test_an_elevation_cut_is_told_in_elevation() -> None:
    points = expand(a_set("elevation: 0 to 90 deg step 45 deg ± 1 deg", "azimuth: 20 deg"))
    records = rows(elevation=[0.5, 45, 89.5], azimuth=[20, 20, 20])
    matching = match(points, records)
    assert matching.along is not None
    assert matching.along == pytest.approx([0.5, 45, 89.5])
    assert proves(points, matching, everything(records)).tolist() == [True]


def test_a_range_of_phi_at_the_pole_is_refused() -> None:
    with pytest.raises(ConditionsError, match="free"):
        a_set("theta: 0 deg ± 1 deg", "phi: 0 to 360 deg step 90 deg")


def test_ranges_of_both_angles_are_refused() -> None:
    with pytest.raises(ConditionsError, match="both ranges"):
        a_set("theta: 0 to 60 deg step 5 deg", "phi: 0 to 90 deg step 5 deg")


@settings(max_examples=150, deadline=None)
@given(st.lists(st.integers(-70, 70), min_size=1, max_size=20), st.sampled_from([10, 20, 30]), st.booleans())
def test_a_cut_is_proved_like_a_plain_range(thetas: list[int], step: int, other_side: bool) -> None:
    assume(len(thetas) > 0)
    points = expand(a_set(f"theta: -60 to 60 deg step {step} deg ± 2 deg", "phi: 0 deg"))
    spelled = [(-theta, 180.0) if other_side else (theta, 0.0) for theta in thetas]
    records = rows(theta=[float(theta) for theta, _ in spelled], phi=[phi for _, phi in spelled])
    proved = proves(points, match(points, records), everything(records))
    assert proved.tolist() == [range_is_proved(-60, 60, 2, step, thetas)]
