"""Bad figures get one message that says which figure, and what to do."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from specflow.calculators.active_reflection import active_mismatch_loss, active_reflection
from specflow.calculators.adjacent_channel import cascade_aclr, channel_gap_constant
from specflow.calculators.array_errors import bits_for_sidelobe, failed_eirp_loss, quantisation_gain_loss
from specflow.calculators.array_power import taper_efficiency
from specflow.calculators.cascade import cascade_results, cascade_slopes
from specflow.calculators.compression import blocker_gain_change, cubic_ip3_minus_p1db
from specflow.calculators.converter import quantisation_snr
from specflow.calculators.dc_power import dc_power, tracked_dc_power
from specflow.calculators.fading import rayleigh_fade_margin
from specflow.calculators.frequency_plan import band_overlap, product_band, product_frequency
from specflow.calculators.gain_states import gain_states
from specflow.calculators.intercept_cascade import cascade_iip3
from specflow.calculators.mismatch import mismatch_transfer
from specflow.calculators.mismatched_noise import mismatched_cascade_noise_figure, noise_figure_at_source
from specflow.calculators.noise import (
    first_stage_noise_figure,
    thermal_noise_power,
    y_factor_noise_temperature,
)
from specflow.calculators.noise_cascade import cascade_gain, cascade_noise_figure, cascade_noise_temperature
from specflow.calculators.passive_loss import passive_noise_figure
from specflow.calculators.phase_noise import rms_phase_error
from specflow.calculators.reflection import mismatch_loss, reflection_from_return_loss, reflection_from_vswr
from specflow.calculators.scan import grating_lobe_angle
from specflow.calculators.two_port import available_gain, cascade_two_ports
from specflow.errors import CalculationError

NAN, INF = float("nan"), float("inf")
GOOD = ([10.0, -1.0], [2.0, 1.0], [0.0, 5.0], [-10.0, -5.0])


def chain_with(place: int, value: Any) -> list[Any]:
    figures = [list(figure) for figure in GOOD]
    figures[place][1] = value
    return figures


REFUSED: list[tuple[str, Callable[[], Any], str]] = [
    ("lengths differ", lambda: cascade_noise_figure([10.0, -1.0], [2.0]), "gain_db 2, nf_db 1"),
    ("no positions", lambda: cascade_gain([]), "gain_db has no positions"),
    ("a single number is no chain", lambda: cascade_gain(3.0), "gain_db has no positions"),
    (
        "points differ",
        lambda: cascade_noise_figure(np.zeros((2, 3)), np.zeros((2, 4))),
        "shapes do not go together",
    ),
    ("ragged", lambda: cascade_gain([[1.0, 2.0], [3.0]]), "no array of numbers"),
    ("text", lambda: cascade_gain(["ten"]), "no array of numbers"),
    ("gain without value", lambda: cascade_gain([10.0, None]), r"gain_db\[1\] is nan"),
    ("NaN", lambda: cascade_noise_figure([10.0, NAN], [2.0, 1.0]), r"gain_db\[1\] is nan"),
    ("infinite gain", lambda: cascade_noise_figure([INF, 1.0], [2.0, 1.0]), r"gain_db\[0\] is inf"),
    ("noise figure below 0 dB", lambda: cascade_noise_figure([10.0], [-0.1]), r"nf_db\[0\] is -0.1, below 0"),
    ("temperature below 0 K", lambda: cascade_noise_temperature([10.0], [-5.0]), "below 0"),
    ("loss below 0 dB", lambda: passive_noise_figure(-3.0), "loss_db is -3, below 0"),
    ("no bandwidth", lambda: thermal_noise_power(290.0, 0.0), "bandwidth_hz is 0"),
    ("intercept NaN", lambda: cascade_iip3([1.0], [NAN]), r"iip3_dbm\[0\] is nan"),
    ("intercept -inf", lambda: cascade_iip3([1.0], [-INF]), r"iip3_dbm\[0\] is -inf"),
    ("unknown law", lambda: cascade_iip3([1.0], [1.0], "rss"), "'rss' is no law"),  # type: ignore[arg-type]
    ("unknown sum", lambda: cascade_aclr([45.0], "rss"), "'rss' is no law"),  # type: ignore[arg-type]
    ("kernel, gain", lambda: cascade_results(*chain_with(0, NAN)), r"gain_db\[1\] is nan"),
    ("kernel, infinite gain", lambda: cascade_results(*chain_with(0, -INF)), r"gain_db\[1\] is -inf"),
    ("kernel, noise figure", lambda: cascade_results(*chain_with(1, -1.0)), r"nf_db\[1\] is -1"),
    ("kernel, intercept", lambda: cascade_results(*chain_with(2, NAN)), r"iip3_dbm\[1\] is nan"),
    ("kernel, compression", lambda: cascade_results(*chain_with(3, -INF)), r"ip1db_dbm\[1\] is -inf"),
    (
        "kernel, lengths",
        lambda: cascade_results([1.0], [1.0, 2.0], [1.0], [1.0]),
        "numbers of positions differ",
    ),
    ("slopes, gain", lambda: cascade_slopes(*chain_with(0, NAN)), r"gain_db\[1\] is nan"),
    ("slopes, noise figure", lambda: cascade_slopes(*chain_with(1, -1.0)), r"nf_db\[1\] is -1"),
    ("cubic beyond its range", lambda: blocker_gain_change(0.0, -2.0), "within 3.01 dB"),
    ("three tones", lambda: cubic_ip3_minus_p1db(3), "one and two tones"),
    (
        "second stage too noisy",
        lambda: first_stage_noise_figure(3.0, 20.0, 0.0),
        "more noise than was measured",
    ),
    ("Y too large", lambda: y_factor_noise_temperature(290.0, 77.0, 10.0), "below 0 K"),
    (
        "gain state turned round",
        lambda: gain_states([[1.0]], [[1.0]], [[1.0]], 1e6, [-40.0], [-90.0]),
        "ends below",
    ),
    ("spacing below the width", lambda: channel_gap_constant(5.0, 4.0), "times the width"),
    ("spacing of 2 widths", lambda: channel_gap_constant(5.0, 10.0), "times the width"),
    ("efficiency in %", lambda: dc_power(40.0, 40.0), "efficiency is 40"),
    ("beyond the table", lambda: tracked_dc_power(31.0, [10.0, 30.0], [1.0, 2.0]), "output_dbm is 31"),
    ("unsorted table", lambda: tracked_dc_power(15.0, [30.0, 10.0], [1.0, 2.0]), "do not rise"),
    ("beyond the profile", lambda: rms_phase_error([1e3, 1e6], [-80, -100], 1e2, 1e5), "low_hz is 100"),
    ("empty integration", lambda: rms_phase_error([1e3, 1e6], [-80, -100], 1e5, 1e5), "ends where it begins"),
    ("unsorted profile", lambda: rms_phase_error([1e6, 1e3], [-80, -100]), "do not rise"),
    ("too wide for the rate", lambda: quantisation_snr(12, 10.0, 100e6, 60e6), "half the sample rate"),
    ("part of a bit", lambda: quantisation_gain_loss(2.5), "bits is 2.5"),
    ("no elements", lambda: bits_for_sidelobe(0, -40.0), "elements is 0"),
    ("all failed", lambda: failed_eirp_loss(1.0), "all elements"),
    ("no drive", lambda: taper_efficiency([0.0, 0.0]), "no element is driven"),
    ("no grating lobe", lambda: grating_lobe_angle(0.5, 10.0), "no grating lobe"),
    ("ports differ", lambda: active_reflection(np.eye(3), [1.0, 1.0]), "3 ports"),
    ("element off", lambda: active_reflection(np.eye(2), [1.0, 0.0]), "not driven"),
    ("matrix not square", lambda: active_reflection(np.zeros((2, 3)), [1.0, 1.0]), "shape"),
    ("active reflection of 1", lambda: active_mismatch_loss(1.0), "reaches 1"),
    ("three ports in a cascade", lambda: cascade_two_ports(np.eye(3), np.eye(3)), "2 by 2"),
    ("source of 1", lambda: available_gain(np.zeros((2, 2)), 1.0), "reaches 1"),
    ("load of 1", lambda: mismatch_transfer(0.0, 1.0), "reaches 1"),
    ("complex NaN", lambda: mismatch_transfer(NAN, 0.0), "source has a value that is not finite"),
    ("no two-ports", lambda: mismatched_cascade_noise_figure([]), "no positions"),
    ("active source", lambda: noise_figure_at_source(1.0, 0.3, 10.0, 1.0), "source reflection reaches 1"),
    ("|S11| in dB as return loss", lambda: reflection_from_return_loss(-15.0), "return_loss_db is -15"),
    ("VSWR below 1", lambda: reflection_from_vswr(0.9), "vswr is 0.9"),
    ("total reflection", lambda: mismatch_loss(1.0), "reflection is 1"),
    ("percent as probability", lambda: rayleigh_fade_margin(1.0), "not below 1"),
    ("band turned round", lambda: product_band([(2.0, 1.0)], [1]), "no pair of frequencies"),
    ("victim turned round", lambda: band_overlap((1.0, 2.0), (4.0, 3.0)), "no pair of frequencies"),
    ("coefficients missing", lambda: product_frequency([1.0, 2.0], [1]), "2 signals and 1 coefficients"),
]


@pytest.mark.parametrize(("call", "said"), [row[1:] for row in REFUSED], ids=[row[0] for row in REFUSED])
def test_bad_figures_are_refused_with_what_to_do(call: Callable[[], Any], said: str) -> None:
    with pytest.raises(CalculationError, match=said) as refusal:
        call()
    assert refusal.value.hint


def test_an_intercept_without_value_is_ideal_and_a_chain_of_ideal_stages_has_none() -> None:
    assert cascade_iip3([10.0, 5.0], [None, 3.0]) == pytest.approx(-7.0)
    assert cascade_iip3([10.0, 5.0], [None, None]) == INF
    assert cascade_results([10.0], [0.0], [None], [None]).iip3_dbm == INF


def test_figures_that_overflow_are_refused_rather_than_returned() -> None:
    with pytest.raises(CalculationError, match="too large"), np.errstate(over="ignore", divide="ignore"):
        cascade_results([0.0], [1e5], [0.0], [0.0])
