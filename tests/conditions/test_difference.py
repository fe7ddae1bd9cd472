"""What changed in a conditions set, in meaning."""

from __future__ import annotations

import pytest

from specflow.conditions import conditions_difference
from specflow.model.conditions import ConditionsSet
from tests.conditions.make import a_set

BASE = ("frequency: 27.5, 28.75, 30 GHz ± 10 MHz", "temperature_ambient: -40, 25 °C ± 2 K", "mode: A, B")


def changed(*dimensions: str, **more: str) -> ConditionsSet:
    return a_set(*dimensions, **more)


@pytest.mark.parametrize(
    ("dimensions", "more", "sentences"),
    [
        (BASE, {}, []),
        (
            (BASE[0], "temperature_ambient: -40, 25, 85 °C ± 2 K", BASE[2]),
            {},
            ["temperature_ambient: +85 °C ambient added: 6 more points"],
        ),
        ((BASE[0], BASE[1], "mode: A"), {}, ["mode: mode B removed: 6 fewer points"]),
        (
            ("frequency: 27.5, 28.75, 30 GHz ± 50 MHz", BASE[1], BASE[2]),
            {},
            ["frequency: setting tolerance 0.05 GHz, was 0.01 GHz (wider)"],
        ),
        ((*BASE, "humidity: not required"), {}, ["humidity added: relative humidity not required"]),
        ((BASE[0], BASE[1]), {}, ["mode removed: mode A, B: 6 fewer points"]),
        (
            (BASE[0], BASE[1], "mode: any"),
            {},
            ["mode: any mode, was mode A, B: 6 fewer points"],
        ),
        (BASE, {"combination": "corners"}, ["combined as corners, was all combinations: 4 fewer points"]),
        (BASE, {"exclusions": "mode = B"}, ["excluded: mode = B: 6 fewer points"]),
        (
            ("frequency: 27.5 to 30 GHz ± 10 MHz step 1 GHz", BASE[1], BASE[2]),
            {},
            [
                "frequency: 27.5 GHz, 28.75 GHz, 30 GHz removed",
                "frequency: a range now: 27.5 to 30 GHz (gaps up to 1 GHz, ± 0.01 GHz)",
                "8 fewer points",
            ],
        ),
    ],
)
def test_changes_are_told(dimensions: tuple[str, ...], more: dict[str, str], sentences: list[str]) -> None:
    assert conditions_difference(a_set(*BASE), changed(*dimensions, **more)) == sentences


def test_ranges() -> None:
    before = a_set("frequency: 27.5 to 30 GHz step 1 GHz")
    after = a_set("frequency: 27 to 30 GHz step 500 MHz")
    assert conditions_difference(before, after) == [
        "frequency: range 27 to 30 GHz, was 27.5 to 30 GHz",
        "frequency: largest gap 0.5 GHz, was 1 GHz",
    ]


def test_a_matching_rule() -> None:
    before, after = a_set("input_level: -10 dBm"), a_set("input_level: >= -10 dBm")
    assert conditions_difference(before, after) == ["input_level: matched at or above, was within tolerance"]
