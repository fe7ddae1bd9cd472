"""Laws between modes of balanced ports, against closed forms and the mixed-mode matrix of scikit-rf."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from specflow.derive import LAW_BY_NAME, Outcome, Readings, Samples, complete_settings
from specflow.derive.said import typed_settings
from specflow.derive.scattering_modes import mode_weights
from specflow.errors import CalculationError


def table_of(s: Any) -> dict[str, Readings]:
    """The columns of a network table with real and imaginary parts."""
    readings = {}
    for m, n in np.ndindex(*s.shape[1:]):
        for part, column in (("real", s[:, m, n].real), ("imaginary", s[:, m, n].imag)):
            readings[f"S{m + 1}{n + 1} {part}"] = Readings(column, column, "1")
    return readings


def law(name: str, readings: dict[str, Readings], into: str, out: str) -> Outcome:
    found = LAW_BY_NAME[name]
    texts = complete_settings(found, {"input": into, "output": out})
    typed = typed_settings(found, texts, axis_unit="GHz", value_unit="dB")
    return found.function(Samples(readings, settings=typed))


def some_network(ports: int = 4) -> Any:
    draw = np.random.default_rng(11)
    return draw.uniform(-0.5, 0.5, (5, ports, ports)) + 1j * draw.uniform(-0.5, 0.5, (5, ports, ports))


def test_every_entry_between_two_pairs_is_that_of_scikit_rf() -> None:
    """se2gmm takes pairs (1, 2) and (3, 4) and gives D1,2 D3,4 C1,2 C3,4 in this order."""
    skrf = pytest.importorskip("skrf")
    s = some_network()
    network = skrf.Network(f=np.arange(1, 6) * 1e9, s=s.copy(), z0=50)
    network.se2gmm(p=2)
    modes = ("D1,2", "D3,4", "C1,2", "C3,4")
    for m, n in np.ndindex(4, 4):
        into, out = modes[n], modes[m]
        expected = 20 * np.log10(np.abs(network.s[:, m, n]))
        np.testing.assert_allclose(
            law("mode gain", table_of(s), into, out).value, expected, rtol=0, atol=1e-9
        )
        np.testing.assert_allclose(
            law("mode loss", table_of(s), into, out).value, -expected, rtol=0, atol=1e-9
        )


def test_two_equal_lines_have_the_gain_of_one_and_convert_nothing() -> None:
    """From D1,3 to D2,4: ½·(S21 - S23 - S41 + S43) = S21; a single port keeps its own entry."""
    s = np.zeros((2, 4, 4), np.complex128) + 0.01
    s[:, 1, 0] = s[:, 3, 2] = 2.0 + 0.01
    assert law("mode gain", table_of(s), "D1,3", "D2,4").value == pytest.approx(20 * np.log10(2.0))
    assert law("mode gain", table_of(s), "c 1, 3", "C2,4").value == pytest.approx(20 * np.log10(2.02))
    assert law("mode gain", table_of(s), "S1", "S2").value == pytest.approx(20 * np.log10(2.01))
    with pytest.raises(CalculationError, match="zero at 2 of 2 places"):
        law("mode loss", table_of(s), "C1,3", "D2,4")


@pytest.mark.parametrize("bad", ["", "1,3", "D1", "D1,1", "DC", "S1,2", "differential"])
def test_what_is_no_mode_is_refused(bad: str) -> None:
    with pytest.raises(CalculationError, match="is no mode"):
        mode_weights(bad)


def test_a_port_that_is_not_there_and_an_entry_that_was_not_measured_are_refused() -> None:
    with pytest.raises(CalculationError, match="there is no S5_1"):
        law("mode gain", table_of(some_network()), "D1,3", "D5,4")
    s = some_network()
    s[:, 1, 2] = 0
    with pytest.raises(CalculationError, match="both numbers of the entry are 0"):
        law("mode gain", table_of(s), "D1,3", "D2,4")
    assert law("mode gain", table_of(s), "S1", "D2,4").value.shape == (5,)  # which does not need S23
