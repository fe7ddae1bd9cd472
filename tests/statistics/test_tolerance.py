"""Bad input to tolerance factors, and the ends of proportions."""

from __future__ import annotations

import pytest

from specflow.statistics.tolerance import (
    clopper_pearson,
    one_sided_factor,
    proportion_bound,
    rank_from_extreme,
)


def test_one_value_says_nothing_about_a_spread() -> None:
    with pytest.raises(ValueError, match="at least 2"):
        one_sided_factor(1, 0.95, 0.95)
    with pytest.raises(ValueError, match="between 0 and 1"):
        one_sided_factor(10, 95, 0.95)


def test_proportions_without_or_with_only_failures_reach_the_end() -> None:
    assert clopper_pearson(0, 20, 0.9)[0] == 0.0
    assert clopper_pearson(20, 20, 0.9)[1] == 1.0
    with pytest.raises(ValueError, match="no proportion"):
        proportion_bound(3, 2, 0.95)


def test_too_small_a_sample_has_no_distribution_free_limit() -> None:
    assert rank_from_extreme(58, 0.95, 0.95) == 0
    assert rank_from_extreme(59, 0.95, 0.95) == 1
