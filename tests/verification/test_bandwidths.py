"""Measurement bandwidths: what scales, and readings that are open downwards."""

from __future__ import annotations

import numpy as np
import pytest

from specflow.limits import parse_limit
from specflow.model.evidence import SpectrumKind, ValueArrays
from specflow.model.verdict import RequirementStatus, Verdict
from specflow.units import converter, parse_unit
from specflow.verification.comparable import Fit
from tests.builders import (
    a_conditions_set,
    a_dimension,
    a_quantity,
    a_requirement,
    a_value_column,
    an_evidence_table,
    some_columns,
    some_evidence,
)
from tests.verification.evaluating import status_of


def emission(
    limit: str,
    value: float,
    unit: str,
    *,
    high: float | None = None,
    bandwidth_hz: float | None = 1e6,
    spectrum: SpectrumKind = SpectrumKind.NOISE_LIKE,
) -> RequirementStatus:
    """Return the status of one reading of an emission against a limit that states its bandwidth, or none."""
    quantity = a_quantity("spurious_emission")
    recorded = quantity.model_copy(update={"bandwidth_hz": bandwidth_hz})
    column = a_value_column("P", quantity=recorded, unit=unit, spectrum=spectrum)
    evidence = some_evidence(
        {"P": [value]}, high=None if high is None else [high], conditions=some_columns(frequency=[27.5])
    )
    return status_of(
        a_requirement(quantity=quantity, limit=parse_limit(limit)),
        a_conditions_set("CS", a_dimension(values=(27.5,))),
        an_evidence_table(rows=1, values=(column,)),
        T_1=evidence,
    )


def test_a_linear_reading_is_not_scaled_by_decibels() -> None:
    """10.5 mW in 1 MHz is 1.05 mW in 100 kHz if it is noise: above 1 mW; taking 10 off would say 0.5 mW."""
    status = emission("<= 1 mW in 100 kHz", 10.5, "mW")
    assert (status.k, status.verdict) == (0, Verdict.INCONCLUSIVE)
    assert any("are not in dB" in remark for remark in status.remarks)


def test_a_linear_reading_of_a_line_needs_no_scaling() -> None:
    assert emission("<= 1 mW in 100 kHz", 0.5, "mW", spectrum=SpectrumKind.DISCRETE).verdict is Verdict.PASS


def test_a_linear_reading_in_the_bandwidth_of_the_limit_is_compared() -> None:
    assert emission("<= 1 mW in 1 MHz", 0.5, "mW").verdict is Verdict.PASS


@pytest.mark.parametrize(("value", "verdict"), [(-66.0, Verdict.PASS), (-64.0, Verdict.FAIL)])
def test_the_bandwidth_of_the_unit_goes_before_that_of_the_receiver(value: float, verdict: Verdict) -> None:
    """-65 dBm/kHz is -35 dBm in 1 MHz, whatever bandwidth the receiver was set to."""
    assert emission("<= -35 dBm in 1 MHz", value, "dBm/kHz").verdict is verdict


@pytest.mark.parametrize(("limit", "verdict"), [("<= 0 dBm", Verdict.PASS), (">= 0 dBm", Verdict.FAIL)])
def test_less_than_in_a_linear_unit_stays_open_downwards_in_decibels(limit: str, verdict: Verdict) -> None:
    """``< 0.1 mW`` is below -10 dBm."""
    status = emission(limit, -np.inf, "mW", high=0.1, bandwidth_hz=None)
    assert status.verdict is verdict


def test_an_open_end_and_an_empty_cell_are_told_apart() -> None:
    fit = Fit(converter(parse_unit("mW"), parse_unit("dBm")))
    values = fit.apply(ValueArrays(np.array([-np.inf, np.nan, 1.0]), np.array([0.1, np.nan, 1.0])))
    assert values.low.tolist()[0] == -np.inf
    assert values.high.tolist()[0] == -10
    assert np.isnan([values.low[1], values.high[1]]).all()
    assert values.low[2] == 0
