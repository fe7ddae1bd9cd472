"""Conditions in words."""

from __future__ import annotations

import numpy as np

from specflow.conditions import (
    conditions_words,
    dimension_words,
    expand,
    explain_mismatch,
    match,
    missing_words,
    parse_dimension,
    point_words,
    set_words,
)
from specflow.model.columns import Columns
from tests.conditions.make import a_set, everything, rows


def test_points() -> None:
    points = expand(a_set("frequency: 29.5 GHz", "temperature_ambient: 85 °C", "theta: 30 deg", "phi: 0 deg"))
    assert point_words(points, 0) == "29.5 GHz, +85 °C ambient, θ 30°, φ 0°"


def test_points_in_words_and_ranges() -> None:
    points = expand(a_set("frequency: 27.5 to 30 GHz step 1 GHz", "polarisation: H", "supply_voltage: 5 V"))
    assert point_words(points, 0) == "27.5 to 30 GHz, supply 5 V, H polarisation"


def test_binary_noise_is_not_shown() -> None:
    assert conditions_words(rows(frequency=[0.1 + 0.2]), 0) == "0.3 GHz"


def test_a_row_that_states_nothing() -> None:
    assert conditions_words(rows(frequency=[None]), 0) == ""


def test_dimensions() -> None:
    said = {
        "frequency: 27.5, 28.75, 30 GHz ± 10 MHz": "27.5, 28.75, 30 GHz (± 0.01 GHz)",
        "temperature_ambient: -40 to 85 °C ± 2 K step 25 K": "-40 to +85 °C ambient (gaps up to 25 K, ± 2 K)",
        "temperature_ambient: 15 to 30 °C anywhere": "+15 to +30 °C ambient (anywhere in range)",
        "input_level: >= -10 dBm": "input -10 dBm (at or above)",
        "supply_voltage: 5 V ± 1 %": "supply 5 V (± 1 %)",
        "frequency: 30 GHz": "30 GHz (exact)",
        "humidity: not required": "relative humidity not required",
        "beam: any": "any beam",
        "environment: normal; extreme not required": "normal environment, extreme not required",
        "theta: -60 to 60 deg step 5 deg": "θ -60 to 60° (gaps up to 5°)",
    }
    assert {text: dimension_words(parse_dimension(text)) for text in said} == said


def test_sets() -> None:
    conditions = a_set(
        "frequency: 27.5, 30 GHz", "mode: A, B", "humidity: any", exclusions="frequency = 30 GHz and mode = B"
    )
    assert set_words(conditions) == (
        "27.5, 30 GHz (exact); mode A, B; any relative humidity (all combinations); "
        "except frequency = 30 GHz and mode = B"
    )
    assert set_words(a_set()) == "any conditions"


def test_23_is_not_55() -> None:
    points = expand(a_set("temperature_ambient: 55 °C ± 3 K"))
    assert explain_mismatch(points, 0, rows(temperature_ambient=[-40, 23])) == (
        "+23 °C ambient is not +55 °C ambient (off by 32 K, 3 K allowed)"
    )


def test_only_what_is_off_is_told_and_of_the_nearest_record() -> None:
    points = expand(
        a_set("frequency: 28, 30 GHz ± 10 MHz", "temperature_ambient: 55 °C ± 3 K", "polarisation: H, V")
    )
    records = rows(frequency=[20, 30, 30], temperature_ambient=[55, 55, 23], polarisation=["V", "H", "H"])
    assert explain_mismatch(points, 3, records) == "H polarisation is not V polarisation"
    assert explain_mismatch(points, 2, records) == ""


def test_what_is_not_stated_is_told() -> None:
    points = expand(a_set("temperature_baseplate: 85 °C ± 2 K"))
    assert explain_mismatch(points, 0, rows(temperature_ambient=[85])) == (
        "+85 °C baseplate is asked, the record states temperature_ambient: unlike places need a condition map"
    )
    assert explain_mismatch(points, 0, rows(frequency=[1])) == (
        "+85 °C baseplate is asked, the record does not state the baseplate temperature"
    )
    assert "without a unit" in explain_mismatch(
        points, 0, rows({"temperature_baseplate": ""}, temperature_baseplate=[85])
    )
    assert explain_mismatch(points, 0, Columns(0)) == "there is no record"


def test_directions_off_are_told_by_their_angle() -> None:
    points = expand(a_set("theta: 30 deg ± 1 deg", "phi: 0 deg"))
    said = explain_mismatch(points, 0, rows(theta=[30], phi=[90]))
    assert said == "θ 30°, φ 90° is 41.4° away from θ 30°, φ 0° (1° allowed)"


def test_gaps_of_a_range_are_told() -> None:
    points = expand(a_set("frequency: 27.5 to 30 GHz step 0.5 GHz ± 10 MHz"))
    records = rows(frequency=[27.5, 28, 28.5, 29.3, 29.7, 30])
    matching = match(points, records)
    assert missing_words(points, 0, matching, records, everything(records)) == (
        "no evidence from 28.5 to 29.3 GHz (largest gap allowed: 0.5 GHz)"
    )
    assert missing_words(points, 0, matching, records, np.zeros(6, np.bool_)) == "no record counts"


def test_nothing_is_missing_at_a_proved_point() -> None:
    points = expand(a_set("frequency: 28, 30 GHz"))
    records = rows(frequency=[28])
    matching = match(points, records)
    assert missing_words(points, 0, matching, records, everything(records)) == ""
    assert missing_words(points, 1, matching, records, everything(records)) == (
        "28 GHz is not 30 GHz (off by 2 GHz, no setting tolerance stated)"
    )
