"""The published and computed cases of tests/data/metrology_cases.json, each against the function that answers it.

Every case names its source and how its expected value is known (seen, or computed from the published formula).
Methods that the package does not have are listed with the reason, and all cases are counted.
"""

from __future__ import annotations

import json
import math
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from specflow.model.requirement import RuleName
from specflow.model.verdict import Verdict
from specflow.statistics import decision, rounding, sphere, tolerance

CASES: list[dict[str, Any]] = json.loads(
    (Path(__file__).parents[1] / "data" / "metrology_cases.json").read_text(encoding="utf-8")
)

Answer = Mapping[str, Any]


def _zone(rule: RuleName, reading: float, limit: float, guard: float) -> str:
    point = np.array([reading])
    verdict = decision.decide(rule, point, point, decision.AcceptanceInterval(upper=limit), guard)[0]
    return Verdict(verdict).name.lower()


def _upper(i: Answer) -> Answer:
    return {"p_c": decision.conformance_probability(i["y"], i["u"], upper=i["T_U"])}


def _lower(i: Answer) -> Answer:
    return {"p_c": decision.conformance_probability(i["y"], i["u"], lower=i["T_L"])}


def _two_sided(i: Answer) -> Answer:
    return {"p_c": decision.conformance_probability(i["y"], i["u"], i["T_L"], i["T_U"])}


def _from_expanded(i: Answer) -> Answer:
    u = i["U"] / i["k"]
    return {
        "u": u,
        "p_c": decision.conformance_probability(i["y"], u, upper=i["T_U"]),
        "wrong_p_c_if_U_used_as_u": decision.conformance_probability(i["y"], i["U"], upper=i["T_U"]),
    }


def _acceptance_upper(i: Answer) -> Answer:
    w = decision.guard_factor_for_probability(i["p_c_min"]) * i["u"]
    return {"w": w, "A_U": decision.AcceptanceInterval(upper=i["T_U"]).inward(w).upper}


def _acceptance_lower(i: Answer) -> Answer:
    w = decision.guard_factor_for_probability(i["p_c_min"]) * i["u"]
    return {"w": w, "A_L": decision.AcceptanceInterval(lower=i["T_L"]).inward(w).lower}


def _empty_interval(i: Answer) -> Answer:
    bounds = decision.AcceptanceInterval(i["T_L"], i["T_U"])
    centre = np.array([(i["T_L"] + i["T_U"]) / 2])
    for rule in (RuleName.GUARDED, RuleName.FOUR_WAY):
        assert decision.decide(rule, centre, centre, bounds, i["w"])[0] == Verdict.UNDECIDABLE
    return {
        "acceptance_interval_exists": bool(bounds.inward(i["w"]).leave_room),
        "max_p_c_at_centre": decision.conformance_probability(0.0, i["u"], i["T_L"], i["T_U"]),
    }


def _zones(i: Answer) -> Answer:
    return {
        "non_binary_w_eq_U": _zone(RuleName.FOUR_WAY, i["y"], i["T_U"], i["w"]),
        "simple_acceptance": _zone(RuleName.SIMPLE, i["y"], i["T_U"], i["w"]),
        "binary_guarded_w_eq_U": _zone(RuleName.GUARDED, i["y"], i["T_U"], i["w"]),
    }


def _test_requirement(i: Answer) -> Answer:
    core = decision.AcceptanceInterval(upper=float(i["minimum_requirement_max_dBm"]))
    return {"test_requirement_dBm": core.relaxed(i["test_tolerance_dB"]).upper}


def _shared_risk(i: Answer) -> Answer:
    u = i["U95_k1.96_dB"] / 1.96
    test_limit = decision.AcceptanceInterval(upper=float(i["core_limit_max_dBm"])).relaxed(i["TT_dB"]).upper
    assert test_limit is not None
    return {
        "P_pass_if_true_value_at_core_limit": decision.conformance_probability(
            i["core_limit_max_dBm"], u, upper=test_limit
        ),
        "conformance_probability_if_reading_at_test_limit": decision.conformance_probability(
            test_limit, u, upper=i["core_limit_max_dBm"]
        ),
    }


def _ceiling(i: Answer) -> Answer:
    admitted = bool(decision.admissible(i["U_lab_dB"] / 2, i["U_max_dB"]))
    return {"evidence_admissible": admitted, "verdict": "none" if not admitted else "judged"}


def _excess(i: Answer) -> Answer:
    taken = decision.excess(i["U_lab_dB"] / 2, i["U_max_dB"])
    return {"limit_effective": decision.AcceptanceInterval(upper=i["limit_max"]).inward(taken).upper}


def _cispr(i: Answer) -> Answer:
    taken = decision.excess(i["U_lab"] / 2, i["U_cispr"])
    reading = np.array([i["measured"]])
    verdict = decision.decide(
        RuleName.SIMPLE, reading, reading, decision.AcceptanceInterval(upper=i["limit_max"]).inward(taken)
    )
    return {"adjusted": i["measured"] + taken, "pass": bool(verdict[0] == Verdict.PASS)}


def _linear_or_db(i: Answer) -> Answer:
    u_db = 10 / math.log(10) * i["u_rel"]
    y_dbm = 10 * math.log10(i["y_mW"])
    return {
        "p_c_normal_in_mW": decision.conformance_probability(
            i["y_mW"], i["u_rel"] * i["y_mW"], lower=10 ** (i["T_L_dBm"] / 10)
        ),
        "p_c_normal_in_dB": decision.conformance_probability(y_dbm, u_db, lower=i["T_L_dBm"]),
        "u_dB": u_db,
    }


def _one_sided_factor(i: Answer) -> Answer:
    k = tolerance.one_sided_factor(i["n"], i["P"], i["confidence"])
    root = math.sqrt(i["n"])
    return {"k1": k, "t": k * root, "ncp": decision.guard_factor_for_probability(i["P"]) * root}


def _one_sided_upper(i: Answer) -> Answer:
    return {"U": i["mean"] + tolerance.one_sided_factor(i["n"], i["P"], i["confidence"]) * i["s"]}


def _lognormal(i: Answer) -> Answer:
    logs = np.log(i["data"])
    k = tolerance.one_sided_factor(len(logs), i["P"], i["confidence"])
    return {"UTL": math.exp(logs.mean() + k * logs.std(ddof=1))}


def _lower_against_limit(i: Answer) -> Answer:
    bound = i["mean"] - tolerance.one_sided_factor(i["n"], i["P"], i["confidence"]) * i["s"]
    return {"LTL": bound, "pass": bound >= i["limit_min"], "three_sigma_lower": i["mean"] - 3 * i["s"]}


def _yield(i: Answer) -> Answer:
    distance = (i["mean"] - i["limit_min"]) / i["s"]
    return {
        "yield_point": decision.conformance_probability(0.0, 1.0, upper=distance),
        "yield_lower95": tolerance.yield_lower_bound(distance, i["n"], i["confidence"]),
    }


def _db_or_linear_tolerance(i: Answer) -> Answer:
    levels = np.array(i["data_dBm"])
    powers = 10 ** (levels / 10)
    k = tolerance.one_sided_factor(levels.size, i["P"], i["confidence"])
    return {
        "UTL_in_dB_domain": levels.mean() + k * levels.std(ddof=1),
        "UTL_in_mW_domain_as_dBm": 10 * math.log10(powers.mean() + k * powers.std(ddof=1)),
        "LTL_in_mW_is_negative": bool(powers.mean() - k * powers.std(ddof=1) < 0),
    }


def _wilks(i: Answer) -> Answer:
    return {"n": tolerance.items_needed(i["P"], i["confidence"], sides=i["sides"])}


def _wilks_by_rank(i: Answer) -> Answer:
    counts = [
        tolerance.items_needed(i["P"], i["confidence"], sides=2, discarded=rank - 1)
        for rank in i["lower_rank"]
    ]
    return {"n": counts}


def _zero_failures(i: Answer) -> Answer:
    return {"n": tolerance.items_needed(i["reliability"], i["confidence"])}


def _zero_failure_table(i: Answer) -> Answer:
    return {"n": [tolerance.items_needed(r, c) for r, c in i["R_C_pairs"]]}


def _with_failures(i: Answer) -> Answer:
    counts = [
        tolerance.items_needed(i["reliability"], i["confidence"], discarded=failed)
        for failed in i["failures"]
    ]
    return {"n": counts}


def _clopper_pearson(i: Answer) -> Answer:
    low, high = tolerance.clopper_pearson(i["x_fail"], i["n"], i["confidence"])
    return {"p_L": low, "p_U": high}


def _rule_of_three(i: Answer) -> Answer:
    return {"p_U_exact": tolerance.proportion_bound(0, i["n"], i["confidence"]), "p_U_rule": 3 / i["n"]}


def _pattern(step: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    theta = np.arange(0, 180 + step / 2, step)
    return theta, 40 - 0.1 * theta, sphere.grid_weights(theta)


def _sphere_percentile(i: Answer) -> Answer:
    _, level, weights = _pattern(0.0001)
    return {"EIRP": [sphere.percentile(level, weights, 100 * p) for p in i["percentile_CDF"]]}


def _sphere_unweighted(i: Answer) -> Answer:
    theta, level, weights = _pattern(0.0001)
    plain = sphere.percentile(level, np.ones_like(theta), 100 * i["percentile_CDF"])
    right = sphere.percentile(level, weights, 100 * i["percentile_CDF"])
    return {"unweighted_theta_EIRP": plain, "bias_dB": plain - right}


def _sphere_share(i: Answer) -> Answer:
    _, level, weights = _pattern(0.0001)
    return {"fraction": sphere.share_at_or_above(level, weights, i["level_dBm"] - 1e-9)}


def _rounding(i: Answer) -> Answer:
    step = rounding.digit_of(i["unit_of_limit"])
    plain, near = float(i["observed"]), float(rounding.round_to(i["observed"], step))
    met = (lambda x: x <= i["limit"]) if i["kind"] == "max" else (lambda x: x >= i["limit"])
    assert rounding.round_values(np.array([plain]), step)[0] == pytest.approx(near, abs=1e-12)
    return {"rounded": near, "rounding_method_pass": met(near), "absolute_method_pass": met(plain)}


def _rounding_to_limit(i: Answer) -> Answer:
    near = rounding.round_to(i["observed"], rounding.digit_of(i["limit_text"]))
    return {"pass": float(near) <= float(i["limit_text"])}


METHODS: dict[str, Callable[[Answer], Answer]] = {
    "guard_band_z_for_conformance_probability": lambda i: {
        "z": decision.guard_factor_for_probability(np.array(i["p_c"]))
    },
    "conformance_probability_upper": _upper,
    "conformance_probability_lower": _lower,
    "conformance_probability_two_sided": _two_sided,
    "conformance_probability_from_expanded_uncertainty": _from_expanded,
    "acceptance_limit_upper_from_p_c": _acceptance_upper,
    "acceptance_limit_lower_from_p_c": _acceptance_lower,
    "acceptance_interval_empty": _empty_interval,
    "min_half_tolerance_over_u_for_p_c": lambda i: {"T_over_u": decision.least_half_tolerance(i["p_c_min"])},
    "specific_risk_simple_acceptance_at_limit": lambda i: {
        "P_false_accept_at_A": decision.specific_risk(i["w_over_U"], i["k"])
    },
    "specific_risk_at_acceptance_limit": lambda i: {
        "P_false_accept_at_A": decision.specific_risk(i["w_over_U"], i["k"])
    },
    "iso14253_default_guard_band": lambda i: {
        "w_over_u": decision.guard_factor_for_probability(i["p_c_min"]),
        "w_over_U": decision.guard_factor_for_probability(i["p_c_min"]) / i["k"],
    },
    "decision_zone_upper_limit": _zones,
    "test_requirement_shared_risk": _test_requirement,
    "shared_risk_relaxed_limit_probabilities": _shared_risk,
    "uncertainty_ceiling_gate": _ceiling,
    "excess_uncertainty_tightening": _excess,
    "cispr_adjustment": _cispr,
    "conformance_probability_linear_vs_dB": _linear_or_db,
    "k_one_sided_exact": _one_sided_factor,
    "k_two_sided_exact": lambda i: {"k2": tolerance.two_sided_factor(i["n"], i["P"], i["confidence"])},
    "tolerance_limit_one_sided": _one_sided_upper,
    "tolerance_limit_lognormal_upper": _lognormal,
    "tolerance_limit_one_sided_lower_vs_limit": _lower_against_limit,
    "yield_lower_confidence_bound_normal": _yield,
    "tolerance_limit_dB_vs_linear_wide": _db_or_linear_tolerance,
    "wilks_min_sample_size": _wilks,
    "wilks_min_sample_size_by_lower_rank": _wilks_by_rank,
    "nonparametric_coverage_of_maximum": lambda i: {
        "P": tolerance.coverage_of_extreme(i["n"], i["confidence"])
    },
    "nonparametric_confidence_of_maximum": lambda i: {
        "confidence": tolerance.confidence_of_extreme(i["n"], i["P"])
    },
    "nonparametric_upper_limit_rank_from_top": lambda i: {
        "rank_from_top": tolerance.rank_from_extreme(i["n"], i["P"], i["confidence"])
    },
    "clopper_pearson_two_sided": _clopper_pearson,
    "zero_failure_sample_size": _zero_failures,
    "zero_failure_sample_size_table": _zero_failure_table,
    "sample_size_with_failures": _with_failures,
    "reliability_lower_bound": lambda i: {
        "R_L": 1 - tolerance.proportion_bound(i["x_fail"], i["n"], i["confidence"])
    },
    "rule_of_three": _rule_of_three,
    "constant_step_grid_unique_points": lambda i: {"N": sphere.unique_directions(i["step_deg"])},
    "sphere_percentile_analytic": _sphere_percentile,
    "sphere_percentile_unweighted_error": _sphere_unweighted,
    "sphere_fraction_meeting_level": _sphere_share,
    "multiple_point_false_fail": lambda i: {"P_any": decision.chance_of_any(i["p_each"], i["points"])},
    "multiple_point_false_accept": lambda i: {"P_any": decision.chance_of_any(i["p_each"], i["points"])},
    "bonferroni_guard_factor": lambda i: {
        "z": decision.guard_factor_for_probability(1 - i["overall_risk"] / i["points"])
    },
    "rounding_vs_absolute": _rounding,
    "rounding_to_digits_of_limit": _rounding_to_limit,
}

#: A level between the directions of the grid is off by half a step of the pattern.
GRID_TOLERANCE = {
    "sphere_percentile_analytic": 2e-5,
    "sphere_percentile_unweighted_error": 4e-5,
    "sphere_fraction_meeting_level": 1e-6,
}

_PROCESS = "risk over a process needs the distribution of the product, which no document of the model holds"
_APPROXIMATION = "an approximation of a factor that the package computes exactly"
_UNCERTAINTY = "uncertainty arrives as u with its k; the package combines no uncertainty budgets"
_CAPABILITY = "capability indices are asked for by no limit the model can express"
_BUDGET = "belongs to the combination of budget lines, not to the judging of evidence"

NOT_IN_THE_PACKAGE: dict[str, str] = {
    "global_risk_normal_guarded": _PROCESS,
    "process_conformance": _PROCESS,
    "global_risk_gamma_simple_acceptance": _PROCESS,
    "acceptance_limit_for_target_global_risk": _PROCESS,
    "global_risk_normal_sigma_units": _PROCESS,
    "false_accept_unconditional_and_conditional": _PROCESS,
    "guard_band_multiplier_managed_2pct": "guard bands by TUR belong to calibration; rules here use w = r·U",
    "guard_band_rss": "guard bands by TUR belong to calibration; rules here use w = r·U",
    "k_two_sided_howe": _APPROXIMATION,
    "k_one_sided_natrella_approx": _APPROXIMATION,
    "tolerance_interval_two_sided": _APPROXIMATION,
    "median_confidence_interval_ranks": "no limit asks for the confidence interval of a quantile",
    "capability_indices_with_95pct_limits": _CAPABILITY,
    "cpu_exact_lower_bound": _CAPABILITY,
    "capability_and_fallout": _CAPABILITY,
    "gum_end_gauge_components": _UNCERTAINTY,
    "welch_satterthwaite_end_gauge": _UNCERTAINTY,
    "gum_end_gauge_second_order": _UNCERTAINTY,
    "gum_correlated_inputs": _UNCERTAINTY,
    "gum_ignoring_correlation_error": _UNCERTAINTY,
    "monte_carlo_comparison_loss": _UNCERTAINTY,
    "monte_carlo_log": _UNCERTAINTY,
    "shortest_interval_log": _UNCERTAINTY,
    "product_ratio_budget": _UNCERTAINTY,
    "mismatch_uncertainty_dB": _UNCERTAINTY,
    "mismatch_exact_vs_approx": _UNCERTAINTY,
    "mismatch_limit_percent_power": _UNCERTAINTY,
    "mismatch_limits_dB": _UNCERTAINTY,
    "dB_to_percent_asymmetric": _UNCERTAINTY,
    "mismatch_u_shaped_small": _UNCERTAINTY,
    "dB_linear_conversion_factors": _UNCERTAINTY,
    "dB_linear_exact_vs_linearised": _UNCERTAINTY,
    "percent_to_dB": _UNCERTAINTY,
    "influence_quantity_supply_voltage": _UNCERTAINTY,
    "percent_power_to_dB_standard": _UNCERTAINTY,
    "step_attenuator_30dB": _UNCERTAINTY,
    "step_attenuator_dof": _UNCERTAINTY,
    "step_attenuator_interval_not_2u": _UNCERTAINTY,
    "combine_dB_standard_uncertainties": _UNCERTAINTY,
    "divisors": _UNCERTAINTY,
    "coverage_factors_9545": _UNCERTAINTY,
    "worst_case_vs_rss_vs_statistical": _BUDGET,
    "expected_maximum_of_n_normals": "readings are judged as they are; the bias of a worst one is not corrected for",
    "corner_coverage_fraction": "tested on a whole project in tests/verification/test_points.py",
    "corners_miss_interior_extremum": "tested on a whole project in tests/verification/test_points.py",
    "remove_measurement_scatter_from_unit_scatter": "observed scatter is used as it is, which is the safe side",
}

TESTED = [case for case in CASES if case["method"] in METHODS]


@pytest.mark.parametrize("case", TESTED, ids=[case["id"] for case in TESTED])
def test_agrees_with_the_published_or_recomputed_value(case: dict[str, Any]) -> None:
    answer = METHODS[case["method"]](case["inputs"])
    allowed = GRID_TOLERANCE.get(case["method"], case["abs_tol"])
    for name, expected in case["expected"].items():
        if isinstance(expected, bool | str):
            assert answer[name] == expected, name
        else:
            assert np.asarray(answer[name]) == pytest.approx(np.asarray(expected), rel=0, abs=allowed), name


def test_every_case_is_tested_or_listed_with_its_reason() -> None:
    methods = {case["method"] for case in CASES}
    assert methods == METHODS.keys() | NOT_IN_THE_PACKAGE.keys()
    assert not METHODS.keys() & NOT_IN_THE_PACKAGE.keys()
    assert len(CASES) == 129
    assert len(TESTED) == 73
    assert sum(case["method"] in NOT_IN_THE_PACKAGE for case in CASES) == 56
