"""The published and computed cases of tests/data/rf_cases.json, each against the function that answers it.

Every case names its source and how its expected value is known (seen, computed from the published formula, or recalled
from memory and recomputed). Methods that the calculators do not have are listed with the reason, and all are counted.
"""

from __future__ import annotations

import cmath
import itertools
import json
import math
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from specflow.calculators import (
    active_reflection,
    adjacent_channel,
    apportionment,
    array_errors,
    array_power,
    blocking,
    cascade,
    compression,
    converter,
    directivity,
    dynamic_range,
    error_vector,
    fading,
    frequency_plan,
    gain_states,
    image_noise,
    intercept_cascade,
    intermodulation,
    inverse,
    link,
    mismatch,
    mismatched_noise,
    mixer_spurs,
    modulator,
    noise,
    noise_cascade,
    passive_loss,
    phase_noise,
    reflection,
    scan,
    sensitivity,
    transmit_chain,
    two_port,
)
from specflow.calculators.combination.operands import Operand
from specflow.calculators.combination.power_sum import power_sum
from specflow.calculators.combination.rss import root_sum_square, uniform_standard_deviation
from specflow.calculators.combination.worst_case import worst_case_sum

CASES: list[dict[str, Any]] = json.loads(
    (Path(__file__).parents[1] / "data" / "rf_cases.json").read_text(encoding="utf-8")
)

Inputs = Mapping[str, Any]
Answer = Mapping[str, Any]

ELSEWHERE = {
    "touchstone_read": "run by the tests of the reader of Touchstone files",
    "touchstone_value_count": "run by the tests of the reader of Touchstone files",
}


def column(i: Inputs, name: str) -> list[Any]:
    """Return one figure of all stages; null stays none (ideal, or the unknown)."""
    return [None if stage[name] == "unknown" else stage[name] for stage in i["stages"]]


def gains(i: Inputs) -> list[Any]:
    return column(i, "gain_db")


def input_ip3(i: Inputs) -> list[Any]:
    return [
        stage["iip3_dbm"] if "iip3_dbm" in stage else stage["oip3_dbm"] - stage["gain_db"]
        for stage in i["stages"]
    ]


def polar(pair: Sequence[float]) -> complex:
    return cmath.rect(pair[0], math.radians(pair[1]))


def matrix(stage: Inputs) -> list[list[complex]]:
    return [[polar(stage["s11"]), polar(stage["s12"])], [polar(stage["s21"]), polar(stage["s22"])]]


def _friis(i: Inputs) -> Answer:
    nf = noise_cascade.cascade_noise_figure(gains(i), column(i, "nf_db"))
    return {"nf_db": nf, "noise_factor": 10 ** (nf / 10), "gain_db": noise_cascade.cascade_gain(gains(i))}


def _cascade_temperature(i: Inputs) -> Answer:
    te = noise_cascade.stage_temperatures(column(i, "nf_db"))
    return {"te_k": noise_cascade.cascade_noise_temperature(gains(i), te)}


def _minimum_signal(i: Inputs) -> Answer:
    nf = noise_cascade.cascade_noise_figure(gains(i), column(i, "nf_db"))
    level = noise.minimum_input_signal(nf, i["antenna_temperature_k"], i["bandwidth_hz"], i["snr_db"])
    return {"signal_in_dbm": level, "signal_in_uv_rms": 1e6 * noise.rms_voltage(level, i["impedance_ohm"])}


def _passive(i: Inputs) -> Answer:
    nf = passive_loss.passive_noise_figure(i["loss_db"], i["physical_temperature_k"])
    return {"nf_db": nf, "noise_factor": 10 ** (nf / 10)}


def _mismatched(i: Inputs) -> Answer:
    stages = [
        mismatched_noise.NoisyTwoPort.of(matrix(s), s["nfmin_db"], polar(s["gamma_opt"]), s["rn_ohm"])
        for s in (i["stage1"], i["stage2"])
    ]
    first, second = stages
    seen = two_port.output_reflection(first.s, 0.0)
    at = mismatched_noise.noise_figure_at_source
    return {
        "nf_db": mismatched_noise.mismatched_cascade_noise_figure(stages, 0.0, i["z0_ohm"]),
        "stage1_nf_db": at(first.nfmin_db, first.gamma_opt, first.rn_ohm, 0.0, i["z0_ohm"]),
        "stage2_nf_db_at_gamma_out1": at(second.nfmin_db, second.gamma_opt, second.rn_ohm, seen, i["z0_ohm"]),
        "stage1_available_gain_db": two_port.available_gain(first.s),
    }


def _y_factor(i: Inputs) -> Answer:
    y = i["n_hot_dbm"] - i["n_cold_dbm"]
    return {"te_k": noise.y_factor_noise_temperature(i["t_hot_k"], i["t_cold_k"], y)}


def _image(i: Inputs) -> Answer:
    figures = (i["lna_nf_db"], i["lna_gain_db"], i["mixer_nf_dsb_db"], i["image_filter_rejection_db"])
    return {"nf_ssb_db": image_noise.image_noise_figure(*figures)}


def _g_over_t(i: Inputs) -> Answer:
    te = [
        passive_loss.passive_noise_temperature(i["feed_loss_db"], i["feed_temperature_k"]),
        noise.noise_temperature(i["lna_nf_db"]),
        noise.noise_temperature(i["receiver_nf_db"]),
    ]
    gain = [-i["feed_loss_db"], i["lna_gain_db"], 0.0]
    at_lna = noise_cascade.g_over_t(i["antenna_gain_dbi"], i["antenna_temperature_k"], gain, te, plane=1)
    at_antenna = noise_cascade.g_over_t(i["antenna_gain_dbi"], i["antenna_temperature_k"], gain, te)
    assert at_lna == pytest.approx(at_antenna, abs=1e-12)  # moving the plane changes nothing
    return {
        "g_over_t_db_per_k": at_antenna,
        "t_sys_k": noise_cascade.system_temperature(i["antenna_temperature_k"], gain, te),
    }


def _implied_snr(i: Inputs) -> Answer:
    band = i["rb"] * i["rb_bandwidth_hz"]
    figures = (i["refsens_dbm"], band, i["nf_db"], i["implementation_margin_db"], i["kt_dbm_hz"])
    return {"implied_snr_db": sensitivity.implied_snr(*figures)}


def _coherent(i: Inputs) -> Answer:
    iip3 = intercept_cascade.cascade_iip3(gains(i), input_ip3(i))
    return {"iip3_dbm": iip3, "oip3_dbm": iip3 + sum(gains(i))}


def _noncoherent(i: Inputs) -> Answer:
    iip3 = intercept_cascade.cascade_iip3(gains(i), input_ip3(i), "noncoherent")
    return {"iip3_dbm": iip3, "oip3_dbm": iip3 + sum(gains(i))}


def _p1db(i: Inputs) -> Answer:
    ip1db = compression.cascade_ip1db(gains(i), column(i, "ip1db_dbm"))
    return {"ip1db_dbm": ip1db, "op1db_dbm": compression.output_p1db(ip1db, sum(gains(i)))}


def _output_noise(i: Inputs) -> Any:
    return noise.output_noise_power(i["gain_db"], i["nf_db"], i["antenna_temperature_k"], i["bandwidth_hz"])


def _floor(i: Inputs) -> Any:
    return sensitivity.noise_floor(i["bandwidth_hz"], i["nf_db"], i["kt_dbm_hz"])


def _tx_noise(i: Inputs) -> Answer:
    figures = (i["tx_noise_dbm_hz"], i["isolation_db"], i["rx_nf_db"], i["kt_dbm_hz"])
    over = blocking.transmit_noise_ratio(*figures)
    return {"i_over_n_db": over, "rise_db": blocking.noise_rise(over)}


def _interference(i: Inputs) -> Answer:
    im3 = intermodulation.im3_level(i["im3_tone_dbm"], i["im3_tone_dbm"], i["iip3_dbm"])
    mixed = blocking.reciprocal_mixing(i["blocker_dbm"], i["phase_noise_dbc_hz"], i["bandwidth_hz"])
    return {
        "im3_input_dbm": im3,
        "reciprocal_dbm": mixed,
        "total_dbm": blocking.total_interference([i["noise_floor_dbm"], im3, mixed]),
        "rise_db": blocking.desense(i["noise_floor_dbm"], [im3, mixed]),
    }


def _agc(i: Inputs) -> Answer:
    gain, nf, iip3 = (np.array(figure)[:, None] for figure in (gains(i), column(i, "nf_db"), input_ip3(i)))
    states = gain_states.gain_states(gain, nf, iip3, i["bandwidth_hz"], [i["input_dbm"]], [i["input_dbm"]])
    floor = sensitivity.noise_floor(i["bandwidth_hz"], states.nf_db)
    return {
        "nf_db": states.nf_db[0],
        "iip3_dbm": states.iip3_dbm[0],
        "snr_db": link.signal_to_noise(i["input_dbm"], floor)[0],
        "sndr_two_tone_db": states.sndr_lowest_db[0],
    }


def _aclr(i: Inputs) -> Answer:
    widths = (i["occupied_bandwidth"], i["channel_spacing"])
    return {
        "offset_db": adjacent_channel.channel_gap_constant(*widths),
        "aclr_db": adjacent_channel.aclr_from_oip3(i["pout_dbm"], i["oip3_dbm"], *widths),
    }


def _in_band(i: Inputs) -> Answer:
    return {
        "evm_db": adjacent_channel.in_band_distortion(i["pout_dbm"], i["oip3_dbm"]),
        "evm_percent": error_vector.evm_from_compression(i["pout_dbm"], i["oip3_dbm"]),
    }


def _evm_db(i: Inputs) -> Answer:
    db = error_vector.evm_db(i["evm_percent"])
    return {"evm_db": db, "equivalent_snr_db": -db}


def _phase_and_thermal(i: Inputs) -> Answer:
    parts = [
        error_vector.evm_from_phase_noise(i["phase_noise_rms_deg"]),
        error_vector.evm_from_snr(i["snr_db"]),
    ]
    return {"evm_percent": error_vector.combined_evm(parts)}


def _phase_noise(i: Inputs) -> Answer:
    profile = np.array(i["points_hz_dbc_hz"]).T
    rms = phase_noise.rms_phase_error(*profile)
    return {
        "rms_deg": rms,
        "evm_percent": error_vector.evm_from_phase_noise(rms),
        "integrated_dbc_both_sidebands": phase_noise.integrated_phase_noise(*profile),
    }


def _tapered(i: Inputs) -> Answer:
    figures = (i["amplitudes"], i["full_element_power_dbm"])
    return {
        "eirp_dbm": array_power.tapered_eirp(*figures, i["element_gain_dbi"]),
        "total_power_dbm": array_power.tapered_total_power(*figures),
        "taper_efficiency_db": array_power.taper_efficiency(i["amplitudes"]),
    }


def _linear_directivity(i: Inputs) -> Answer:
    figures = (i["elements"], i["spacing_wavelengths"])
    exact = directivity.linear_directivity(*figures)
    return {
        "directivity": exact,
        "directivity_dbi": 10 * np.log10(exact),
        "estimate_2nd": directivity.linear_directivity_estimate(*figures),
    }


def _quantisation_loss(i: Inputs) -> Answer:
    rms = array_errors.quantisation_phase_error(i["bits"])
    return {
        "loss_db": array_errors.quantisation_gain_loss(i["bits"]),
        "second_order_loss_db": array_errors.phase_error_gain_loss(rms),
    }


def _pointing(i: Inputs) -> Answer:
    exact = array_errors.pointing_error(
        i["elements"], i["spacing_wavelengths"], i["phase_error_rms_deg"], i["scan_deg"]
    )
    n = i["elements"]  # the case's first figure is the N³ form of the same law
    return {"pointing_rms_deg": exact * math.sqrt((n * n - 1) / n**2), "exact_least_squares_deg": exact}


def _active(i: Inputs) -> Answer:
    n = i["elements"]
    s = [[polar(i["s_by_separation"][str(abs(m - k))]) for k in range(n)] for m in range(n)]
    drive = active_reflection.line_excitation(n, i["spacing_wavelengths"], i["scan_deg"])
    gamma = active_reflection.active_reflection(s, drive)
    return {
        "magnitude": np.abs(gamma),
        "phase_deg": np.angle(gamma, deg=True),
        "mismatch_loss_db": active_reflection.active_mismatch_loss(gamma),
    }


def _reflection_figures(g: Any) -> dict[str, Any]:
    return {
        "gamma": g,
        "vswr": reflection.vswr(g),
        "return_loss_db": reflection.return_loss(g),
        "mismatch_loss_db": reflection.mismatch_loss(g),
    }


def _mismatch_percent(i: Inputs) -> Answer:
    both = [reflection.reflection_from_vswr(i[side]) for side in ("source_vswr", "load_vswr")]
    return {"percent": mismatch.mismatch_limits_percent(*both)[i["side"] == "minus"]}


def _mismatch_db(i: Inputs) -> Answer:
    upper, lower = mismatch.mismatch_limits(i["gamma_source"], i["gamma_load"])
    return {"plus_db": upper, "minus_db": lower}


def _mismatch_standard(i: Inputs) -> Answer:
    both = (i["gamma_source_max"], i["gamma_load_max"])
    return {
        "u_shape_power": mismatch.mismatch_standard_uncertainty(*both),
        "uniform_disc_power": mismatch.mismatch_standard_uncertainty_of_maxima(*both),
    }


def _two_port(i: Inputs) -> Answer:
    s = two_port.cascade_two_ports(matrix(i["first"]), matrix(i["second"]))
    names = {"s11": s[0, 0], "s12": s[0, 1], "s21": s[1, 0], "s22": s[1, 1]}
    return {name: [abs(value), math.degrees(cmath.phase(value))] for name, value in names.items()}


def _band_hit(i: Inputs) -> Answer:
    bands = [tuple(i["f1_band_mhz"]), tuple(i["f2_band_mhz"])]
    product = frequency_plan.product_band(bands, i["coefficients"])
    overlap = frequency_plan.band_overlap(product, tuple(i["victim_band_mhz"]))
    return {
        "product_mhz": list(product),
        "hit": overlap.hit,
        "overlap_mhz": list(overlap.band or ()),
        "gap_mhz": overlap.gap,
    }


def _mixer(i: Inputs) -> Answer:
    upper, lower, *half = mixer_spurs.mixer_responses(i["lo_mhz"], i["if_mhz"])
    return {"wanted_high_side_rf_mhz": upper, "image_mhz": lower, "half_if_mhz": half}


def _crossing(i: Inputs) -> Answer:
    figures = (i["lo_mhz"], i["if_mhz"], i["rf_mhz"], i["max_lo_order"], i["max_if_order"])
    return {"mn_pairs": [list(pair) for pair in mixer_spurs.crossing_spurs(*figures)]}


def _im2_desense(i: Inputs) -> Answer:
    im2 = intermodulation.im2_level(i["p1_dbm"], i["p2_dbm"], i["iip2_dbm"])
    return {"im2_input_dbm": im2, "rise_db": blocking.desense(i["noise_floor_dbm"], [im2])}


def _received(i: Inputs) -> Answer:
    power = i["pt_dbw"] if "pt_dbw" in i else 10 * math.log10(i["pt_w"])
    loss = (
        i["path_loss_db"] if "path_loss_db" in i else link.free_space_loss(i["frequency_hz"], i["distance_m"])
    )
    radiated = link.eirp(power, i["gt_db"])
    level = link.received_level(radiated, loss, i["gr_db"], i.get("misc_loss_db", 0.0))
    return {"eirp_dbw": radiated, "fspl_db": loss, "pr_dbw": level}


def _slopes_nf(i: Inputs) -> Answer:
    slopes = noise_cascade.noise_figure_slopes(gains(i), column(i, "nf_db"))
    return {
        "d_nf_sys_d_nf": slopes.to_figure,
        "d_nf_sys_d_gain": slopes.to_gain,
        "nf_db": noise_cascade.cascade_noise_figure(gains(i), column(i, "nf_db")),
    }


def _slopes_iip3(i: Inputs) -> Answer:
    slopes = intercept_cascade.iip3_slopes(gains(i), input_ip3(i))
    return {"d_iip3_sys_d_iip3": slopes.to_figure, "d_iip3_sys_d_gain": slopes.to_gain}


def specimens(i: Inputs, deviations: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return gains and noise figures (positions, trials) for deviations (gain or NF, positions, trials) within ±1.

    The passive stage has one figure, its loss: a gain that falls by x raises its noise figure by x.
    """
    gain = (
        np.array(gains(i))[:, None]
        + np.array([t["gain_db"] for t in i["tolerances"]])[:, None] * deviations[0]
    )
    nf = (
        np.array(column(i, "nf_db"))[:, None]
        + np.array([t["nf_db"] for t in i["tolerances"]])[:, None] * deviations[1]
    )
    passive = i["passive_stage"] - 1
    nf[passive] = -gain[passive]
    return gain, nf


def _tolerance(i: Inputs) -> Answer:
    n = len(i["stages"])
    corners = np.array(list(itertools.product((-1.0, 1.0), repeat=2 * n))).T.reshape(2, n, -1)
    results = noise_cascade.cascade_noise_figure(*specimens(i, corners))
    slopes = noise_cascade.noise_figure_slopes(gains(i), column(i, "nf_db"))
    to_gain, to_nf = slopes.to_gain.copy(), slopes.to_figure.copy()
    passive = i["passive_stage"] - 1
    to_gain[passive], to_nf[passive] = to_gain[passive] - to_nf[passive], 0.0
    parts = [
        abs(slope * t[name])
        for name, both in (("gain_db", to_gain), ("nf_db", to_nf))
        for slope, t in zip(both, i["tolerances"], strict=True)
    ]
    return {
        "nominal_nf_db": noise_cascade.cascade_noise_figure(gains(i), column(i, "nf_db")),
        "worst_case_nf_db": results.max(),
        "best_case_nf_db": results.min(),
        "linear_worst_case_delta_db": worst_case_sum(parts, Operand.TOLERANCE),
        "rss_delta_db": root_sum_square(parts, Operand.TOLERANCE),
    }


def _monte_carlo(i: Inputs) -> Answer:
    n = len(i["stages"])
    gain, nf = specimens(i, np.random.default_rng(7).uniform(-1.0, 1.0, (2, n, i["samples"])))
    ideal = [None] * n
    results = cascade.cascade_results(gain, nf, ideal, ideal, keep=np.float32).nf_db
    return {"mean_nf_db": results.mean(), "std_nf_db": results.std(), "p99_nf_db": np.quantile(results, 0.99)}


def _inverse_nf(i: Inputs) -> Answer:
    figures = (i["target_nf_db"], gains(i), column(i, "nf_db"), i["unknown_stage"] - 1)
    bound = inverse.stage_noise_figure(*figures)
    factor = inverse.noise_factor_bound(*figures)
    return {"max_nf_db": bound.value, "max_noise_factor": factor, "feasible": bound.feasible}


def _inverse_gain(i: Inputs) -> Answer:
    figures = (i["target_nf_db"], gains(i), column(i, "nf_db"), i["unknown_stage"] - 1)
    return {"min_gain_db": inverse.stage_gain(*figures).for_all_points()}


def _inverse_iip3(i: Inputs) -> Answer:
    figures = (i["target_iip3_dbm"], gains(i), column(i, "iip3_dbm"), i["unknown_stage"] - 1, i["rule"])
    return {"min_iip3_dbm": inverse.stage_iip3(*figures).for_all_points()}


METHODS: dict[str, Callable[[Inputs], Answer]] = {
    "thermal_noise_power": lambda i: {
        "dbm": noise.thermal_noise_power(i["temperature_k"], i["bandwidth_hz"])
    },
    "noise_temperature_from_nf": lambda i: {
        "te_k": noise.noise_temperature(i["nf_db"], i["reference_temperature_k"])
    },
    "passive_loss_noise_factor": _passive,
    "noise_temperature_after_loss": lambda i: {
        "t_out_k": passive_loss.temperature_after_loss(
            i["source_temperature_k"], i["loss_db"], i["loss_physical_temperature_k"]
        )
    },
    "noise_bandwidth_ratio": lambda i: {
        "enbw_over_f3db": noise.butterworth_noise_bandwidth_ratio(i["order"])
    },
    "nf_cascade_friis": _friis,
    "minimum_input_signal": _minimum_signal,
    "noise_temperature_cascade": _cascade_temperature,
    "nf_contribution_share": lambda i: {
        "share_of_excess_noise": noise_cascade.excess_noise_shares(gains(i), column(i, "nf_db"))
    },
    "nf_cascade_friis_mismatched": _mismatched,
    "y_factor_noise_temperature": _y_factor,
    "y_factor_noise_figure": lambda i: {
        "nf_db": noise.y_factor_noise_figure(i["enr_db"], i["y_db"], i["t_cold_k"])
    },
    "image_noise_cascade": _image,
    "mixer_nf_ssb_from_dsb": lambda i: {"nf_ssb_db": image_noise.ssb_noise_figure(i["nf_dsb_db"])},
    "g_over_t": _g_over_t,
    "sensitivity": lambda i: {
        "sensitivity_dbm": sensitivity.sensitivity(
            i["bandwidth_hz"], i["nf_db"], i["snr_db"], density_dbm_hz=i["kt_dbm_hz"]
        )
    },
    "noise_floor": lambda i: {"noise_floor_dbm": _floor(i)},
    "refsens_bandwidth_scaling": lambda i: {
        "refsens_dbm": sensitivity.scaled_sensitivity(i["reference_dbm"], i["reference_rb"], i["rb"])
    },
    "implied_snr_from_refsens": _implied_snr,
    "noise_rise": lambda i: {"rise_db": blocking.noise_rise(i["i_over_n_db"])},
    "i_over_n_for_rise": lambda i: {"i_over_n_db": blocking.i_over_n_for_rise(i["rise_db"])},
    "oip3_cascade_coherent": _coherent,
    "iip3_cascade_coherent": _coherent,
    "iip3_cascade_noncoherent": _noncoherent,
    "iip3_contribution_share": lambda i: {"share": intercept_cascade.iip3_shares(gains(i), input_ip3(i))},
    "iip2_cascade_coherent": lambda i: {
        "iip2_dbm": intercept_cascade.cascade_iip2(gains(i), column(i, "iip2_dbm"))
    },
    "ip3_minus_p1db_cubic": lambda i: {
        "iip3_minus_per_tone_p1db_db": compression.cubic_ip3_minus_p1db(i["tones"])
    },
    "blocker_small_signal_compression": lambda i: {
        "blocker_dbm": compression.blocker_for_compression(i["iip3_dbm"], i["compression_db"])
    },
    "blocker_gain_drop": lambda i: {
        "gain_change_db": compression.blocker_gain_change(i["iip3_dbm"], i["blocker_dbm"])
    },
    "im3_level": lambda i: {"im3_dbm": intermodulation.im3_level(i["p1_dbm"], i["p2_dbm"], i["oip3_dbm"])},
    "im2_level": lambda i: {"im2_dbm": intermodulation.im2_level(i["p1_dbm"], i["p2_dbm"], i["oip2_dbm"])},
    "im3_level_relative": lambda i: {
        "im3_dbc_below_tone": intermodulation.im3_below_tone(i["total_output_dbm"], i["oip3_dbm"], i["tones"])
    },
    "sfdr_from_intercept": lambda i: {
        "sfdr_db": dynamic_range.sfdr3(i["intercept_dbm"], i["noise_floor_dbm"])
    },
    "harmonic_level": lambda i: {
        "h3_dbm": intermodulation.third_harmonic_level(i["per_tone_dbm"], i["oip3_dbm"]),
        "im3_dbm": intermodulation.im3_level(i["per_tone_dbm"], i["per_tone_dbm"], i["oip3_dbm"]),
    },
    "im3_level_input": lambda i: {
        "im3_input_dbm": intermodulation.im3_level(i["double_dbm"], i["single_dbm"], i["iip3_dbm"])
    },
    "tx_noise_desense": _tx_noise,
    "output_noise_power": lambda i: {"noise_out_dbm": _output_noise(i)},
    "linear_dynamic_range": lambda i: {
        "ldr_db": dynamic_range.linear_dynamic_range(i["op1db_dbm"], _output_noise(i))
    },
    "sfdr_output_with_snr": lambda i: {
        "sfdr_db": dynamic_range.sfdr3(i["oip3_dbm"], _output_noise(i), i["snr_db"])
    },
    "sfdr_from_iip3": lambda i: {"sfdr_db": dynamic_range.sfdr3(i["iip3_dbm"], _floor(i))},
    "sfdr2_from_iip2": lambda i: {"sfdr2_db": dynamic_range.sfdr2(i["iip2_dbm"], _floor(i))},
    "p1db_cascade_reciprocal": _p1db,
    "phase_noise_requirement": lambda i: {
        "phase_noise_dbc_hz": blocking.phase_noise_limit(
            i["carrier_dbm"], i["required_rejection_db"], i["interferer_dbm"], i["bandwidth_hz"]
        )
    },
    "reciprocal_mixing_noise": lambda i: {
        "noise_dbm": blocking.reciprocal_mixing(i["blocker_dbm"], i["phase_noise_dbc_hz"], i["bandwidth_hz"])
    },
    "receiver_interference_total": _interference,
    "agc_state_cascade": _agc,
    "tx_output_noise_density": lambda i: {
        "output_noise_dbm_hz": transmit_chain.output_noise_density(
            gains(i), column(i, "nf_db"), i["input_noise_dbm_hz"]
        )
    },
    "aclr_from_oip3_noise_like": _aclr,
    "aclr_minus_two_tone_imr": lambda i: {
        "aclr_minus_imr_db": adjacent_channel.contiguous_aclr_from_imr(0.0)
    },
    "aclr_multitone_minus_imr": lambda i: {
        "aclr_minus_imr_db": adjacent_channel.multitone_aclr_minus_imr(i["tones"])
    },
    "evm_from_oip3_noise_like": _in_band,
    "evm_minus_aclr_contiguous": lambda i: {
        "evm_db": adjacent_channel.in_band_distortion_from_aclr(i["aclr_db"])
    },
    "aclr_cascade_power_sum": lambda i: {"aclr_db": adjacent_channel.cascade_aclr(i["aclr_db"])},
    "aclr_cascade_coherent": lambda i: {
        "aclr_db": adjacent_channel.cascade_aclr(i["aclr_db"], "coherent"),
        "aclr_power_sum_db": adjacent_channel.cascade_aclr(i["aclr_db"]),
    },
    "evm_percent_to_db": _evm_db,
    "evm_db_to_percent": lambda i: {"evm_percent": error_vector.evm_percent(i["evm_db"])},
    "evm_rss": lambda i: {"evm_percent": error_vector.combined_evm(i["evm_percent"])},
    "image_rejection": lambda i: {
        "irr_db": modulator.image_rejection(i["gain_imbalance_db"], i["phase_imbalance_deg"])
    },
    "evm_phase_noise_and_snr": _phase_and_thermal,
    "phase_noise_integration": _phase_noise,
    "evm_from_carrier_leakage": lambda i: {
        "evm_percent": error_vector.evm_from_carrier_leakage(i["leakage_dbc"])
    },
    "quantisation_snr": lambda i: {
        "snr_db": converter.quantisation_snr(
            i["bits"], i["crest_factor_db"], i["sample_rate_hz"], i["bandwidth_hz"]
        )
    },
    "jitter_snr": lambda i: {"snr_db": converter.jitter_snr(i["frequency_hz"], i["jitter_rms_s"])},
    "power_sum": lambda i: {"sum_dbw": power_sum(i["levels_dbw"], Operand.LEVEL)},
    "tolerance_combination": lambda i: {
        "worst_case_db": worst_case_sum(i["tolerances_db"], Operand.TOLERANCE),
        "rss_db": root_sum_square(i["tolerances_db"], Operand.TOLERANCE),
        "uniform_std_db": uniform_standard_deviation(i["tolerances_db"]),
    },
    "array_eirp": lambda i: {
        "eirp_dbm": array_power.array_eirp(i["elements"], i["element_power_dbm"], i["element_gain_dbi"]),
        "total_power_dbm": array_power.array_total_power(i["elements"], i["element_power_dbm"]),
    },
    "array_eirp_tapered": _tapered,
    "scan_loss": lambda i: {"loss_db": scan.scan_loss(i["scan_deg"], i["q"])},
    "array_directivity_isotropic": _linear_directivity,
    "array_directivity_area": lambda i: {
        "directivity_dbi": directivity.planar_directivity(
            i["elements"], i["dx_wavelengths"], i["dy_wavelengths"], i["scan_deg"]
        )
    },
    "directivity_from_beamwidths": lambda i: {
        "directivity_dbi": directivity.directivity_from_beamwidths(
            i["theta1_deg"], i["theta2_deg"], i["constant"]
        )
    },
    "random_phase_error_gain_loss": lambda i: {
        "gain_loss_db": array_errors.phase_error_gain_loss(i["phase_error_rms_deg"])
    },
    "random_error_directivity_loss": lambda i: {
        "ratio_first_order": array_errors.error_directivity_ratio_first_order(
            i["phase_error_rms_deg"], i["amplitude_error_rms"]
        ),
        "ratio_exponential": array_errors.error_directivity_ratio(
            i["phase_error_rms_deg"], i["amplitude_error_rms"]
        ),
    },
    "random_error_average_sidelobe": lambda i: {
        "average_sidelobe_db": array_errors.error_sidelobe(
            i["elements"], i["phase_error_rms_deg"], i["amplitude_error_rms"]
        ),
        "first_order_db": array_errors.error_sidelobe_first_order(
            i["elements"], i["phase_error_rms_deg"], i["amplitude_error_rms"]
        ),
    },
    "phase_quantisation_gain_loss": _quantisation_loss,
    "phase_quantisation_average_sidelobe": lambda i: {
        "rms_phase_error_deg": array_errors.quantisation_phase_error(i["bits"]),
        "average_sidelobe_db": array_errors.quantisation_sidelobe(i["bits"], i["elements"]),
    },
    "phase_bits_for_average_sidelobe": lambda i: {
        "bits": array_errors.bits_for_sidelobe(i["elements"], i["target_sidelobe_db"])
    },
    "amplitude_error_conversion": lambda i: {
        "amplitude_error_rms": array_errors.amplitude_error_fraction(i["amplitude_error_rms_db"])
    },
    "beam_pointing_error": _pointing,
    "grating_lobe_spacing": lambda i: {"max_spacing_wavelengths": scan.grating_lobe_spacing(i["scan_deg"])},
    "grating_lobe_angle": lambda i: {
        "grating_lobe_deg": scan.grating_lobe_angle(i["spacing_wavelengths"], i["scan_deg"])
    },
    "active_reflection_coefficient": _active,
    "return_loss_conversion": lambda i: _reflection_figures(
        reflection.reflection_from_return_loss(i["return_loss_db"])
    ),
    "vswr_conversion": lambda i: _reflection_figures(reflection.reflection_from_vswr(i["vswr"])),
    "mismatch_uncertainty_percent": _mismatch_percent,
    "uncertainty_rss": lambda i: {"percent": root_sum_square(i["percent"], Operand.ERROR)},
    "mismatch_uncertainty_db": _mismatch_db,
    "mismatch_standard_uncertainty": _mismatch_standard,
    "return_loss_through_attenuator": lambda i: {
        "input_return_loss_db": reflection.return_loss_through_attenuator(
            i["load_return_loss_db"], i["attenuation_db"]
        )
    },
    "mismatch_ripple_through_line": lambda i: {
        "ripple_pp_db": mismatch.line_ripple(i["gamma_source"], i["gamma_load"], i["line_loss_db"])
    },
    "two_port_cascade_s": _two_port,
    "noise_figure_from_parameters": lambda i: {
        "nf_db": mismatched_noise.noise_figure_at_source(
            i["nfmin_db"], polar(i["gamma_opt"]), i["rn_ohm"], polar(i["gamma_source"]), i["z0_ohm"]
        )
    },
    "intermodulation_band_hit": _band_hit,
    "intermodulation_product": lambda i: {
        "product_mhz": frequency_plan.product_frequency([i["f1_mhz"], i["f2_mhz"]], i["coefficients"])
    },
    "intermodulation_bandwidth": lambda i: {
        "bandwidth_mhz": frequency_plan.product_width(
            [i["bandwidth1_mhz"], i["bandwidth2_mhz"]], i["coefficients"]
        )
    },
    "mixer_spur_input_frequencies": _mixer,
    "mixer_crossing_spurs": _crossing,
    "im2_desense": _im2_desense,
    "link_received_power": _received,
    "link_snr": lambda i: {"snr_db": link.signal_to_noise(i["pr_dbw"], i["noise_dbw"])},
    "free_space_path_loss": lambda i: {"fspl_db": link.free_space_loss(i["frequency_hz"], i["distance_m"])},
    "rayleigh_fade_margin": lambda i: {"margin_db": fading.rayleigh_fade_margin(i["outage"])},
    "lognormal_fade_margin": lambda i: {
        "margin_db": fading.lognormal_fade_margin(i["sigma_db"], i["availability"])
    },
    "nf_sensitivities": _slopes_nf,
    "nf_tolerance_analysis": _tolerance,
    "nf_monte_carlo": _monte_carlo,
    "inverse_stage_nf": _inverse_nf,
    "inverse_stage_gain": _inverse_gain,
    "inverse_stage_iip3": _inverse_iip3,
    "equal_apportionment_nf": lambda i: {
        "nf_db": apportionment.equal_share_noise_figures(i["target_nf_db"], i["gains_db"])
    },
    "equal_apportionment_iip3": lambda i: {
        "iip3_dbm": apportionment.equal_share_iip3(i["target_iip3_dbm"], i["gains_db"], i["rule"])
    },
    "iip3_sensitivities": _slopes_iip3,
}


@pytest.mark.parametrize(
    "case", [c for c in CASES if c["method"] not in ELSEWHERE], ids=lambda case: case["id"]
)
def test_case_agrees_with_its_source(case: dict[str, Any]) -> None:
    answer = METHODS[case["method"]](case["inputs"])
    for name, expected in case["expected"].items():
        got = answer[name]
        if isinstance(expected, bool):
            assert got is expected, (name, case["source"])
        else:
            assert np.shape(got) == np.shape(expected)
            # 1e-9 allows for the last digit of expected values that are printed with as many digits as the tolerance
            tolerance = case["abs_tol"] + 1e-9
            np.testing.assert_allclose(
                got, expected, rtol=0, atol=tolerance, err_msg=f"{name}: {case['source']}"
            )


def test_every_case_is_tested_or_said_to_belong_elsewhere() -> None:
    named = {case["method"] for case in CASES}
    assert named == set(METHODS) | set(ELSEWHERE)
    assert not set(METHODS) & set(ELSEWHERE)
    assert len(CASES) == 148
    assert [case["id"] for case in CASES if case["method"] in ELSEWHERE] == [
        "touchstone-v1-2port-order",
        "touchstone-v2-12-21-order",
        "touchstone-values-per-frequency",
    ]


def test_every_case_names_its_source() -> None:
    assert all(case["source"] and case["known_by"] in {"seen", "computed", "memory"} for case in CASES)
