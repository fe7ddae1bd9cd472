"""Limits on one quantity by the thousand: each is told once, against the first it disagrees with, and in no time."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator, Sequence
from datetime import date

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.model.limit import Limit
from specflow.model.requirement import Requirement
from specflow.parameters import load_dictionary
from specflow.rules.base import Found
from specflow.rules.facts import Facts
from specflow.rules.limits import contradicting_limits, duplicate_limit
from specflow.verification import evaluate
from tests.builders import a_block, a_conditions_set, a_requirement, a_snapshot, at_least, at_most, between

Check = Callable[[Facts], Iterator[Found]]
DICTIONARY = load_dictionary()


def facts_of(requirements: Sequence[Requirement]) -> Facts:
    snapshot = a_snapshot(a_block(), a_conditions_set(), *requirements)
    return Facts(snapshot, evaluate(snapshot, DICTIONARY, as_of=date(2026, 6, 1)), DICTIONARY)


@pytest.mark.parametrize(
    ("check", "limits"),
    [
        (duplicate_limit, [at_least(20)] * 1000),
        (contradicting_limits, [at_least(20 + place / 1000) for place in range(1000)]),
        (contradicting_limits, [at_least(20), *[at_most(19)] * 999]),
    ],
)
def test_each_of_a_thousand_is_told_once_and_soon(check: Check, limits: list[Limit]) -> None:
    facts = facts_of([a_requirement(f"R-{place}", limit=limit) for place, limit in enumerate(limits)])
    assert len(facts.defined) == 1000
    start = time.perf_counter()
    found = list(check(facts))
    assert time.perf_counter() - start < 2.0
    assert [one.subject for one in found] == [f"R-{place}" for place in range(1, 1000)]
    assert {one.related for one in found} == {("R-0",)}


def test_many_limits_that_agree_are_compared_soon() -> None:
    limits = [at_least(20)] * 500 + [at_most(25)] * 500
    facts = facts_of([a_requirement(f"R-{place}", limit=limit) for place, limit in enumerate(limits)])
    start = time.perf_counter()
    assert list(contradicting_limits(facts)) == []
    assert time.perf_counter() - start < 2.0


def test_children_of_one_parent_disagree_among_each_other_not_with_it() -> None:
    parent = a_requirement("R-0", limit=at_least(20))
    children = [a_requirement(f"R-{n}", limit=at_least(20 + n), parents=("R-0",)) for n in (1, 2)]
    (found,) = contradicting_limits(facts_of([parent, *children]))
    assert (found.subject, found.related) == ("R-2", ("R-1",))


# Each limit with what it lets through and the side it limits.
LIMITS = [
    (at_least(20), 20, 99, "lower"),
    (at_least(22), 22, 99, "lower"),
    (at_most(18), -99, 18, "upper"),
    (at_most(21), -99, 21, "upper"),
    (at_most(24), -99, 24, "upper"),
    (between(19, 23), 19, 23, "both"),
    (between(25, 26), 25, 26, "both"),
]


@given(st.lists(st.tuples(st.sampled_from(range(len(LIMITS))), st.integers(-1, 4)), min_size=2, max_size=6))
def test_whoever_disagrees_with_an_earlier_one_is_told(described: list[tuple[int, int]]) -> None:
    """Against a second route: every pair compared by what a limit lets through."""
    above = [up if up < place else -1 for place, (_, up) in enumerate(described)]
    requirements = [
        a_requirement(f"R-{place}", limit=LIMITS[which][0], parents=(f"R-{up}",) if up >= 0 else ())
        for place, ((which, _), up) in enumerate(zip(described, above, strict=True))
    ]
    expected = [
        f"R-{second}"
        for second, (which, _) in enumerate(described)
        if any(above[second] != first and _disagree(described[first][0], which) for first in range(second))
    ]
    assert [one.subject for one in contradicting_limits(facts_of(requirements))] == expected


def _disagree(first: int, second: int) -> bool:
    (_, low, high, side), (_, least, most, other) = LIMITS[first], LIMITS[second]
    return first != second and (side == other or max(low, least) > min(high, most))
