"""Relations between parameters: numbers from tables, there and back, and agreement with the calculators."""

from __future__ import annotations

from itertools import permutations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.calculators import noise, reflection
from specflow.model.evidence import ValueArrays
from specflow.parameters import load_dictionary
from specflow.parameters.relations import Relation, parameters_telling, related_to, relation_between

REFLECTION, NOISE = ("vswr", "return_loss", "reflection_magnitude"), ("noise_figure", "noise_temperature")
PAIRS = [*permutations(REFLECTION, 2), *permutations(NOISE, 2)]


def relation(recorded: str, wanted: str) -> Relation:
    found = relation_between(recorded, wanted)
    assert found is not None
    return found


def through(recorded: str, wanted: str, *values: float) -> list[float]:
    return relation(recorded, wanted).values(np.array(values)).tolist()


@pytest.mark.parametrize(
    ("recorded", "wanted", "value", "expected", "within"),
    [
        # VSWR 1.5 : 1 is a return loss of 14.0 dB, 2 : 1 of 9.5 dB, 1.2 : 1 of 20.8 dB: the conversion table found in
        # handbooks and on slide rules of makers of test equipment (figures from memory, each to its last digit).
        ("vswr", "return_loss", 1.5, 14.0, 0.05),
        ("vswr", "return_loss", 2.0, 9.5, 0.05),
        ("vswr", "return_loss", 1.2, 20.8, 0.05),
        ("return_loss", "vswr", 20.0, 1.22, 0.005),
        ("return_loss", "vswr", 10.0, 1.92, 0.005),
        ("return_loss", "reflection_magnitude", 15.0, -15.0, 1e-9),
        # Noise figure 3 dB is 288.6 K, 1 dB is 75.1 K: table of noise figure and temperature at 290 K, as above.
        ("noise_figure", "noise_temperature", 3.0, 288.6, 0.05),
        ("noise_figure", "noise_temperature", 1.0, 75.1, 0.05),
        ("noise_temperature", "noise_figure", 290.0, 10 * np.log10(2), 1e-12),
    ],
)
def test_values_of_the_usual_tables(
    recorded: str, wanted: str, value: float, expected: float, within: float
) -> None:
    assert through(recorded, wanted, value) == [pytest.approx(expected, abs=within)]


@given(st.floats(1.001, 50))
def test_they_agree_with_the_calculators(vswr: float) -> None:
    gamma = reflection.reflection_from_vswr(vswr)
    assert through("vswr", "return_loss", vswr) == [pytest.approx(float(reflection.return_loss(gamma)))]
    loss = float(reflection.return_loss(gamma))
    back = float(reflection.vswr(reflection.reflection_from_return_loss(loss)))
    assert through("return_loss", "vswr", loss) == [pytest.approx(back)]
    assert through("noise_figure", "noise_temperature", vswr) == [
        pytest.approx(float(noise.noise_temperature(vswr)))
    ]


@given(st.sampled_from(PAIRS), st.floats(0.01, 0.99))
def test_there_and_back_is_the_same(pair: tuple[str, str], common: float) -> None:
    there = relation(*pair)
    value = there.recorded.of(np.array([common]))
    again = relation(*reversed(pair)).values(there.values(value))
    assert again == pytest.approx(value, rel=1e-9, abs=1e-9)


@given(st.sampled_from(PAIRS), st.floats(0.05, 0.9), st.floats(0.0, 0.05))
def test_an_interval_stays_one_and_holds_what_it_held(
    pair: tuple[str, str], common: float, width: float
) -> None:
    there = relation(*pair)
    ends = np.sort(there.recorded.of(np.array([common, common + width])))
    arrays = there.apply(ValueArrays(ends[:1], ends[1:], np.array([0.001])))
    inside = there.values(ends.mean(keepdims=True))
    assert arrays.low <= inside + 1e-9 and inside <= arrays.high + 1e-9
    assert arrays.u is not None and arrays.u[0] > 0


def test_ends_of_the_scales() -> None:
    assert through("vswr", "return_loss", 1.0, np.inf) == [np.inf, 0.0]
    assert through("return_loss", "vswr", np.inf, 0.0) == [1.0, np.inf]
    assert through("return_loss", "reflection_magnitude", np.inf) == [-np.inf]
    # No VSWR is below 1, no passive return loss below 0 dB: these mean nothing here and are not made to.
    assert np.isnan(through("vswr", "return_loss", 0.9)).all()
    assert np.isnan(through("return_loss", "vswr", -1.0)).all()
    # "less than 46 dB" of return loss is no bound on one side: a VSWR of 1.01 at least, without upper end.
    arrays = relation("return_loss", "vswr").apply(ValueArrays(np.array([-np.inf]), np.array([46.0])))
    assert arrays.low[0] == pytest.approx(1.0101, abs=1e-4) and arrays.high[0] == np.inf


def test_uncertainty_goes_over_by_the_larger_change() -> None:
    arrays = relation("vswr", "return_loss").apply(ValueArrays(*[np.array([1.2])] * 2, np.array([0.02])))
    worse, better = through("vswr", "return_loss", 1.22, 1.18)
    middle = through("vswr", "return_loss", 1.2)[0]
    assert arrays.u == pytest.approx([max(middle - worse, better - middle)])
    # Beside a perfect match the return loss may be anything: its uncertainty is not known.
    perfect = relation("vswr", "return_loss").apply(ValueArrays(*[np.array([1.0])] * 2, np.array([0.02])))
    assert perfect.u is not None and np.isnan(perfect.u).all()


def test_the_scales_are_those_of_the_dictionary() -> None:
    dictionary = load_dictionary()
    for recorded, wanted in PAIRS:
        scale = relation(recorded, wanted).recorded
        parameter = dictionary.get(scale.parameter)
        assert parameter is not None
        assert (parameter.unit, parameter.log_factor) == (scale.unit, scale.log_factor)


def test_nothing_else_is_related() -> None:
    assert relation_between("system_noise_temperature", "noise_figure") is None
    assert relation_between("active_reflection", "return_loss") is None
    assert relation_between("vswr", "vswr") is None
    assert set(related_to("VSWR")) == {"return_loss", "reflection_magnitude"}
    assert parameters_telling("gain") == {"gain"}
