"""scikit-rf as an independent reference: noise cascade matched and mismatched, S cascade, active reflection."""

from __future__ import annotations

import numpy as np
import pytest

from specflow.calculators.active_reflection import active_reflection, line_excitation
from specflow.calculators.arguments import Complexes
from specflow.calculators.mismatched_noise import NoisyTwoPort, mismatched_cascade_noise_figure
from specflow.calculators.noise_cascade import cascade_noise_figure
from specflow.calculators.two_port import cascade_two_ports

skrf = pytest.importorskip("skrf")


def a_matrix(drawn: np.random.Generator, ports: int, scale: float) -> Complexes:
    parts = drawn.uniform(-1, 1, (ports, ports, 2))
    return np.asarray(scale * (parts @ np.array([1.0, 1j])), np.complex128)


def a_network(
    s: Complexes, nfmin_db: float | None = None, optimum: complex = 0.0, rn: float = 10.0
) -> object:
    frequency = skrf.Frequency.from_f([1.0], unit="ghz")
    network = skrf.Network(frequency=frequency, s=s[None], z0=50.0)
    if nfmin_db is not None:
        network.set_noise_a(
            frequency, nfmin_db=np.array([nfmin_db]), gamma_opt=np.array([optimum]), rn=np.array([rn])
        )
    return network


def test_cascade_of_random_two_ports() -> None:
    drawn = np.random.default_rng(2)
    for _ in range(20):
        first, second = a_matrix(drawn, 2, 0.6), a_matrix(drawn, 2, 0.6)
        theirs = (a_network(first) ** a_network(second)).s[0]  # type: ignore[operator]
        np.testing.assert_allclose(cascade_two_ports(first, second), theirs, atol=1e-12)


def test_noise_cascade_with_mismatch() -> None:
    drawn = np.random.default_rng(3)
    for _ in range(20):
        stages, networks = [], []
        for _ in range(3):
            s = a_matrix(drawn, 2, 0.35)
            s[1, 0] *= 8.0
            s[0, 1] *= 0.1
            optimum = complex(*drawn.uniform(-0.4, 0.4, 2))
            nfmin, rn = drawn.uniform(0.5, 3.0), drawn.uniform(5.0, 30.0)
            stages.append(NoisyTwoPort.of(s, nfmin, optimum, rn))
            networks.append(a_network(s, nfmin, optimum, rn))
        chain = networks[0] ** networks[1] ** networks[2]  # type: ignore[operator]
        theirs = 10 * np.log10(chain.nf(50.0)[0])
        assert mismatched_cascade_noise_figure(stages) == pytest.approx(theirs, abs=1e-6)


def test_noise_cascade_of_matched_stages() -> None:
    gain, nf = [15.0, -3.0, 10.0], [2.0, 3.0, 10.0]
    networks = []
    for g, n in zip(gain, nf, strict=True):
        s = np.array([[0.0, 0.0], [10 ** (g / 20), 0.0]], np.complex128)
        networks.append(a_network(s, n, 0.0, 10.0))
    chain = networks[0] ** networks[1] ** networks[2]  # type: ignore[operator]
    assert cascade_noise_figure(gain, nf) == pytest.approx(10 * np.log10(chain.nf(50.0)[0]), abs=1e-6)


def test_active_reflection_over_scan() -> None:
    drawn = np.random.default_rng(4)
    s = a_matrix(drawn, 5, 0.2)
    excitation = line_excitation(5, 0.55, [-40.0, 0.0, 25.0, 60.0])
    mine = active_reflection(s, excitation)
    for row, drive in zip(mine, excitation, strict=True):
        np.testing.assert_allclose(row, a_network(s).s_active(drive)[0], atol=1e-12)  # type: ignore[attr-defined]
