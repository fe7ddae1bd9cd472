"""Finding circles among parents."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from specflow.importers.sheets.cycles import find_cycles


def test_a_tree_has_no_circle() -> None:
    assert find_cycles({"a": [], "b": ["a"], "c": ["a", "b"], "d": ["nowhere"]}) == []


def test_circles_start_at_their_first_member() -> None:
    assert find_cycles({"x": ["c"], "b": ["a"], "c": ["b"], "a": ["c"]}) == [["b", "a", "c"]]


def test_two_circles_are_both_found() -> None:
    assert find_cycles({"a": ["b"], "b": ["a"], "c": ["c"], "d": ["a", "c"]}) == [["a", "b"], ["c"]]


def test_a_long_chain_is_walked_without_recursion() -> None:
    above = {str(number): [str(number + 1)] for number in range(50_000)} | {"50000": ["0"]}
    (cycle,) = find_cycles(above)
    assert len(cycle) == 50_001


@given(st.dictionaries(st.integers(0, 9), st.lists(st.integers(0, 9), max_size=3)))
def test_a_circle_is_found_if_and_only_if_there_is_one(links: dict[int, list[int]]) -> None:
    above = {str(node): [str(parent) for parent in parents] for node, parents in links.items()}
    cycles = find_cycles(above)
    for cycle in cycles:
        assert all(
            after in above[before] for before, after in zip(cycle, [*cycle[1:], cycle[0]], strict=True)
        )
    assert bool(cycles) == _has_circle(above)


def _has_circle(above: dict[str, list[str]]) -> bool:
    """Take away whatever has no parent left, as long as there is any (Kahn's algorithm, 1962)."""
    left = {node: {parent for parent in parents if parent in above} for node, parents in above.items()}
    while roots := {node for node, parents in left.items() if not parents}:
        left = {node: parents - roots for node, parents in left.items() if node not in roots}
    return bool(left)
