"""Noise of passive losses at their physical temperature."""

from __future__ import annotations

from specflow.calculators.arguments import Figures, Floats, kelvin, loss
from specflow.calculators.decibel import T0, decibels, ratio


def passive_noise_figure(loss_db: Figures, physical_k: Figures = T0) -> Floats:
    """Return the noise figure in dB of a matched passive loss.

    Formula: F = 1 + (L - 1)·T/290.
    Valid: matched, all of it at one physical temperature; equals the loss in dB only at 290 K.
    Source: E. Bedrosian, On the Noise Temperature of Coupling Networks, RAND 1960, with F = 1 + Te/290; computed.

    >>> print(f"{passive_noise_figure(3.0):.4f} {passive_noise_figure(3.0, 350.0):.4f}")
    3.0000 3.4266
    """
    return decibels(1.0 + passive_noise_temperature(loss_db, physical_k) / T0)


def passive_noise_temperature(loss_db: Figures, physical_k: Figures = T0) -> Floats:
    """Return the equivalent input noise temperature in K of a matched passive loss.

    Formula: Te = (L - 1)·T.
    Valid: matched, all of it at one physical temperature.
    Source: E. Bedrosian, RAND 1960 (AD0616562); computed: twice the temperature at L = 3, doubled noise.

    >>> print(f"{passive_noise_temperature(4.7712125, 100.0):.3f}")
    200.000
    """
    return (ratio(loss(loss_db, "loss_db")) - 1.0) * kelvin(physical_k, "physical_k")


def temperature_after_loss(source_k: Figures, loss_db: Figures, physical_k: Figures = T0) -> Floats:
    """Return the noise temperature in K behind a loss.

    Formula: T = Ts/L + Tp·(1 - 1/L).
    Valid: matched.
    Source: E. Bedrosian, On the Noise Temperature of Coupling Networks, RAND 1960 (AD0616562); value computed.

    >>> print(f"{temperature_after_loss(150.0, 1.0):.3f}")
    178.794
    """
    passed = 1.0 / ratio(loss(loss_db, "loss_db"))
    return kelvin(source_k, "source_k") * passed + kelvin(physical_k, "physical_k") * (1.0 - passed)
