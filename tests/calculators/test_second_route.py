"""Closed forms against integration and simulation."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import integrate

from specflow.calculators import array_errors, compression, converter, directivity, error_vector, modulator
from specflow.calculators.adjacent_channel import multitone_aclr_minus_imr
from specflow.calculators.array_contributions import array_evm, array_intermodulation
from specflow.calculators.dynamic_range import sfdr3
from specflow.calculators.gain_states import gain_states, sndr_two_tone
from specflow.calculators.intermodulation import im3_level, out_of_band_ip3
from specflow.calculators.link import signal_to_noise
from specflow.calculators.mismatch import (
    mismatch_standard_uncertainty,
    mismatch_standard_uncertainty_of_maxima,
)
from specflow.calculators.noise import butterworth_noise_bandwidth_ratio, first_stage_noise_figure
from specflow.calculators.noise_cascade import (
    cascade_noise_figure,
    cumulative_noise_figure,
    g_over_t,
    stage_temperatures,
)
from specflow.calculators.passive_loss import (
    passive_noise_figure,
    passive_noise_temperature,
    temperature_after_loss,
)
from specflow.calculators.phase_noise import integrated_phase_noise, reciprocal_mixing_of_profile
from specflow.calculators.sensitivity import noise_floor
from specflow.calculators.transmit_chain import output_back_off, output_noise_density


@pytest.mark.parametrize("order", [1, 2, 3, 5])
def test_noise_bandwidth_is_the_integral_of_the_response(order: int) -> None:
    area, _ = integrate.quad(lambda f: 1 / (1 + f ** (2 * order)), 0, np.inf)
    assert butterworth_noise_bandwidth_ratio(order) == pytest.approx(area, rel=1e-7)


@pytest.mark.parametrize("slope", [-10.0, -20.0, 0.0, 7.0, -9.999])
def test_phase_noise_pieces_are_their_integral(slope: float) -> None:
    offset, density = [1e3, 1e5], [-80.0, -80.0 + 2 * slope]

    def profile(f: float) -> float:
        return 10 ** ((-80.0 + slope * math.log10(f / 1e3)) / 10)

    area, _ = integrate.quad(profile, 2e3, 5e4, epsrel=1e-10)
    assert integrated_phase_noise(offset, density, 2e3, 5e4) == pytest.approx(
        10 * math.log10(2 * area), abs=1e-7
    )
    assert reciprocal_mixing_of_profile(-30.0, offset, density, 2e3, 5e4) == pytest.approx(
        -30.0 + 10 * math.log10(area), abs=1e-7
    )


def test_the_parts_of_a_profile_add_up_to_the_whole() -> None:
    profile = ([1e3, 1e4, 1e5, 1e6], [-80.0, -90.0, -105.0, -140.0])
    parts = [10 ** (integrated_phase_noise(*profile, *ends) / 10) for ends in ((1e3, 3e4), (3e4, 1e6))]
    assert sum(parts) == pytest.approx(10 ** (integrated_phase_noise(*profile) / 10))


def test_directivity_of_a_line_is_the_integral_of_its_pattern() -> None:
    n, d = 8, 0.6

    def pattern(theta: float) -> float:
        phases = 2 * np.pi * d * np.arange(n) * math.cos(theta)
        return float(abs(np.exp(1j * phases).sum()) ** 2) * math.sin(theta)

    power, _ = integrate.quad(pattern, 0, math.pi, limit=200)
    assert directivity.linear_directivity(n, d) == pytest.approx(2 * n * n / power, rel=1e-8)
    assert directivity.linear_directivity(n, [0.5, 0.6])[0] == pytest.approx(n)


def test_beamwidth_is_where_the_pattern_of_a_long_line_falls_by_half() -> None:
    n, d = 100, 0.5
    half = math.radians(float(directivity.line_beamwidth(n, d)) / 2)
    field = abs(np.exp(2j * np.pi * d * np.arange(n) * math.sin(half)).sum()) / n
    assert field**2 == pytest.approx(0.5, abs=1e-3)


def test_mismatch_uncertainty_is_the_spread_of_random_phases_and_discs() -> None:
    drawn = np.random.default_rng(5)
    phase, again = np.exp(2j * np.pi * drawn.random((2, 400_000)))
    known = abs(1 + 0.02 * 0.03 * phase) ** 2
    assert mismatch_standard_uncertainty(0.02, 0.03) == pytest.approx(known.std(), rel=0.01)
    radii = np.sqrt(drawn.random((2, 400_000))) * np.array([[0.02], [0.03]])
    disc = abs(1 + radii[0] * radii[1] * phase * again) ** 2
    assert mismatch_standard_uncertainty_of_maxima(0.02, 0.03) == pytest.approx(disc.std(), rel=0.01)


def test_array_errors_agree_with_simulated_arrays() -> None:
    drawn = np.random.default_rng(6)
    n, trials = 64, 4000
    phase = np.deg2rad(10.0) * drawn.standard_normal((trials, n))
    weights = (1 + 0.1 * drawn.standard_normal((trials, n))) * np.exp(1j * phase)
    peak = abs(weights.sum(axis=1)) ** 2
    directed = peak / (n * (abs(weights) ** 2).sum(axis=1))
    assert array_errors.error_directivity_ratio(10.0, 0.1) == pytest.approx(directed.mean(), abs=1e-3)
    null = np.exp(2j * np.pi * np.arange(n) / n)  # a zero of the array factor without errors
    side = (abs(weights @ null) ** 2).mean() / (n * n * np.exp(-(np.deg2rad(10.0) ** 2)))
    assert array_errors.error_sidelobe(n, 10.0, 0.1) == pytest.approx(10 * np.log10(side), abs=0.15)


def test_pointing_error_is_the_spread_of_fitted_slopes() -> None:
    drawn = np.random.default_rng(8)
    phases = np.deg2rad(10.0) * drawn.standard_normal((16, 20_000))
    slope = np.polyfit(np.arange(16), phases, 1)[0]
    pointing = np.rad2deg(slope / (2 * np.pi * 0.5))
    assert array_errors.pointing_error(16, 0.5, 10.0) == pytest.approx(pointing.std(), rel=0.02)


def test_failed_elements_lower_the_field_and_its_power() -> None:
    alive = np.ones(100)
    alive[:7] = 0
    eirp = 20 * np.log10(alive.sum() / 100)
    directed = 10 * np.log10(alive.sum() ** 2 / (alive**2).sum() / 100)
    assert array_errors.failed_eirp_loss(0.07) == pytest.approx(-eirp)
    assert array_errors.failed_directivity_loss(0.07) == pytest.approx(-directed)


def test_bits_for_a_sidelobe_are_the_fewest_that_do() -> None:
    for target in (-30.0, -40.0, -42.9930, -43.1, -60.0):
        bits = array_errors.bits_for_sidelobe(64, target)
        assert array_errors.quantisation_sidelobe(bits, 64) <= target + 1e-4
        if bits > 1:
            assert array_errors.quantisation_sidelobe(bits - 1, 64) > target


def test_independent_errors_average_over_elements_and_common_ones_do_not() -> None:
    drawn = np.random.default_rng(9)
    noise = drawn.standard_normal((3, 64, 20_000)) * 0.04 / math.sqrt(2)
    shared = drawn.standard_normal((2, 20_000)) * 0.01 / math.sqrt(2)
    beam = (noise[0] + 1j * noise[1]).mean(axis=0) + shared[0] + 1j * shared[1]
    rms = 100 * math.sqrt((abs(beam) ** 2).mean())
    assert array_evm(4.0, 1.0, 64) == pytest.approx(rms, rel=0.01)
    assert array_intermodulation(-40.0, 64, alike=0.0) == pytest.approx(-40.0 - 10 * math.log10(64))


def test_image_and_phase_noise_errors_agree_with_simulated_symbols() -> None:
    drawn = np.random.default_rng(10)
    symbols = np.exp(2j * np.pi * np.arange(200_000) / 200_000)
    g, p = 10 ** (0.5 / 20), math.radians(2.0)
    received = symbols.real + 1j * g * (symbols.imag * math.cos(p) + symbols.real * math.sin(p))
    wanted, image = np.vdot(symbols, received), np.vdot(symbols.conj(), received)
    assert modulator.image_rejection(0.5, 2.0) == pytest.approx(20 * math.log10(abs(wanted / image)))
    turned = symbols * np.exp(1j * math.radians(5.0) * drawn.standard_normal(symbols.size))
    rms = 100 * math.sqrt((abs(turned - symbols) ** 2).mean())
    assert error_vector.evm_from_phase_noise(5.0) == pytest.approx(rms, rel=0.01)
    assert modulator.image_rejection(0.0, 0.0) == np.inf


def test_cubic_relations_agree_with_the_cubic_itself() -> None:
    """v = a - a³ with the tone intercept at a² = 4/3 (IIP3 as a power of one tone a²/2 is 2/3)."""
    iip3 = 10 * math.log10(4 / 3)
    single = iip3 - float(compression.cubic_ip3_minus_p1db(1))
    a = 10 ** (single / 20)
    assert 20 * math.log10(1 - 0.75 * a * a) == pytest.approx(-1.0)
    per_tone = iip3 - float(compression.cubic_ip3_minus_p1db(2))
    a = 10 ** (per_tone / 20)
    assert 20 * math.log10(1 - 9 / 4 * a * a) == pytest.approx(-1.0)
    blocker = float(compression.blocker_for_compression(iip3, 1.0))
    assert compression.blocker_gain_change(iip3, blocker) == pytest.approx(-1.0)


def test_beats_are_counted_as_they_stand_in_the_spectrum_of_a_cube() -> None:
    """The power above the band of (Σ tones)³, averaged over random phases, against the count of beats."""
    n, length, trials = 6, 256, 20_000
    phases = 2 * np.pi * np.random.default_rng(11).random((trials, n))
    bins = 40 + np.arange(n)
    spectrum = np.zeros((trials, length), complex)
    spectrum[:, bins] = np.exp(1j * phases) / 2
    cube = np.fft.fft((2 * (np.fft.ifft(spectrum) * length).real) ** 3) / length
    above = (abs(2 * cube[:, bins[-1] + 1 : bins[-1] + n + 1]) ** 2).sum(axis=1).mean()
    # unit tones have IM3 of amplitude 3/4; two tones of the same total power n have amplitude √(n/2)
    two_tone = (0.75 * (n / 2) ** 1.5) ** 2 / (n / 2)
    assert multitone_aclr_minus_imr(n) == pytest.approx(10 * math.log10(two_tone / (above / n)), abs=0.1)


def test_intercept_behind_a_filter_is_that_of_filtered_tones() -> None:
    filtered = im3_level(-20.0 - 15.0, -20.0 - 25.0, -5.0)
    assert im3_level(-20.0, -20.0, out_of_band_ip3(-5.0, 15.0, 25.0)) == pytest.approx(filtered)


def test_at_the_top_of_the_dynamic_range_distortion_equals_noise() -> None:
    top = -110.0 + sfdr3(-10.0, -110.0)
    assert im3_level(top, top, -10.0) == pytest.approx(-110.0)
    assert sndr_two_tone(top, -110.0, -10.0) == pytest.approx(top + 110.0 - 10 * math.log10(2))


def test_a_full_scale_sine_gives_the_known_six_decibels_a_bit() -> None:
    snr = converter.quantisation_snr(12, 10 * math.log10(2), 100e6, 50e6)
    assert snr == pytest.approx(6.0206 * 12 + 1.7609, abs=1e-3)
    assert converter.bits_for_snr(snr) == pytest.approx(12.0)


def test_moving_the_plane_leaves_the_figure_of_merit_unchanged() -> None:
    gain, te = np.array([-0.5, 25.0, -6.0, 30.0]), np.array([35.0, 60.0, 870.0, 2000.0])
    at_planes = [g_over_t(38.0, 60.0, gain, te, plane) for plane in range(4)]
    assert at_planes == pytest.approx([at_planes[0]] * 4)


def test_a_warm_loss_is_the_same_by_noise_figure_and_by_temperature() -> None:
    """Noise out of a loss: (Ts + Te)/L by its noise temperature, and Ts/L + T(1 - 1/L) by Bedrosian."""
    passed = 10**-0.2
    by_te = (150.0 + passive_noise_temperature(2.0, 350.0)) * passed
    assert temperature_after_loss(150.0, 2.0, 350.0) == pytest.approx(by_te)
    assert stage_temperatures(passive_noise_figure(2.0, 350.0)) == pytest.approx(
        passive_noise_temperature(2.0, 350.0)
    )


def test_second_stage_correction_takes_a_cascade_back() -> None:
    both = cascade_noise_figure([12.0, 5.0], [1.7, 9.0])
    assert first_stage_noise_figure(both, 9.0, 12.0) == pytest.approx(1.7)
    assert cumulative_noise_figure([12.0, 5.0], [1.7, 9.0]) == pytest.approx([1.7, both])


def test_gain_states_are_never_mixed() -> None:
    high, low = ([20.0, 10.0], [1.0, 8.0], [-10.0, 0.0]), ([2.0, 10.0], [9.0, 8.0], [10.0, 0.0])
    gain, nf, iip3 = (np.array(pair).T for pair in zip(high, low, strict=True))
    states = gain_states(gain, nf, iip3, 1e6, [-100.0, -60.0], [-50.0, -20.0])
    for place, figures in enumerate((high, low)):
        assert states.nf_db[place] == cascade_noise_figure(figures[0], figures[1])
    assert states.nf_db[0] < states.nf_db[1] and states.iip3_dbm[0] < states.iip3_dbm[1]
    floor = noise_floor(1e6, states.nf_db)
    assert states.sndr_highest_db == pytest.approx(sndr_two_tone([-50.0, -20.0], floor, states.iip3_dbm))
    assert np.all(
        states.sndr_highest_db < signal_to_noise([-50.0, -20.0], floor) - 1.0
    )  # distortion shows there


def test_transmit_noise_of_a_thermal_source_is_the_short_formula() -> None:
    gain, nf = [12.0, 15.0, 13.0], [5.0, 6.0, 8.0]
    thermal = 10 * math.log10(1.380649e-23 * 290 * 1e3)
    short = thermal + cascade_noise_figure(gain, nf) + 40.0
    assert output_noise_density(gain, nf, thermal) == pytest.approx(short)
    assert output_back_off(-13.0, gain, [10.0, None, 37.0]).tolist() == [11.0, np.inf, 10.0]
