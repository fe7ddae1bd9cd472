"""Prediction factors and effective degrees of freedom."""

from __future__ import annotations

import math

import numpy as np
import pytest

from specflow.statistics.prediction import (
    effective_freedom,
    one_sided_quantile,
    prediction_factor,
    probability_below,
)


def test_factor_for_the_next_of_ten_values() -> None:
    # t(0.95; 9) = 1.8331 in every table of Student's t; times sqrt(1.1).
    assert prediction_factor(10, 0.95) == pytest.approx(1.8331 * math.sqrt(1.1), abs=2e-4)


def test_one_value_predicts_nothing() -> None:
    with pytest.raises(ValueError, match="at least 2"):
        prediction_factor(1, 0.95)


def test_effective_freedom_of_the_gauge_block_example() -> None:
    # JCGM 100:2008, H.1.6: 25 (18), 9.7 (25.6), 2.9 (50), 16.6 (2) nm and an exact part give 16.
    parts = np.array([25.0, 9.7, 2.9, 16.6]) ** 2
    found = effective_freedom(parts[:, None], np.array([18.0, 25.6, 50.0, 2.0])[:, None])
    assert math.floor(float(found[0])) == 16


def test_quantile_and_probability_are_inverse_and_normal_at_infinite_freedom() -> None:
    freedom = np.array([3.0, np.inf])
    quantile = one_sided_quantile(0.9, freedom)
    assert quantile[1] == pytest.approx(1.2815515655)
    assert probability_below(quantile, freedom) == pytest.approx([0.9, 0.9])
