"""The rules explain themselves in one form, and stay small."""

from __future__ import annotations

import inspect
import re

import pytest

from specflow.model.nouns import NOUN_BY_NAME
from specflow.rules import RULE_BY_CODE, RULES, Rule
from specflow.rules.base import Found, read_docstring
from specflow.rules.facts import Facts

MOST_LINES = 25


def test_codes_are_lower_case_words_with_hyphens_and_differ() -> None:
    codes = [rule.code for rule in RULES]
    assert all(re.fullmatch(r"[a-z]+(-[a-z]+)*", code) for code in codes)
    assert len(set(codes)) == len(codes) == len(RULE_BY_CODE)


@pytest.mark.parametrize("rule", RULES, ids=lambda rule: rule.code)
def test_every_part_of_the_explanation_is_a_sentence(rule: Rule) -> None:
    description = rule.description
    assert description.noun in NOUN_BY_NAME
    for part in (
        description.title,
        description.why,
        description.fails,
        description.passes,
        description.remedy,
    ):
        assert part.endswith(".")
        assert part[0].isupper() or part[0] in "\"'<" or part[0].isdigit(), part
        assert "  " not in part
    assert len({description.why, description.fails, description.passes, description.remedy}) == 4


@pytest.mark.parametrize("rule", RULES, ids=lambda rule: rule.code)
def test_a_rule_fits_in_the_eye(rule: Rule) -> None:
    source = inspect.getsource(rule.check)
    docstring = inspect.getdoc(rule.check) or ""
    assert source.count("\n") - docstring.count("\n") - 1 <= MOST_LINES


def no_parts(facts: Facts) -> list[Found]:
    """Says nothing more."""
    return []


def in_disorder(facts: Facts) -> list[Found]:
    """Has its parts in disorder.

    Do: nothing.
    Why: no reason.
    Fails: this.
    Passes: that.
    """
    return []


@pytest.mark.parametrize("check", [no_parts, in_disorder])
def test_a_rule_that_does_not_explain_itself_is_refused(check: object) -> None:
    with pytest.raises(ValueError, match="needed are Why, Fails, Passes, Do"):
        Rule.of(check, "requirement", RULES[0].description.severity)  # type: ignore[arg-type]


def test_a_title_is_one_sentence() -> None:
    parts = "\n\nWhy: a.\nFails: b.\nPasses: c.\nDo: d."
    with pytest.raises(ValueError, match="a title of one line"):
        read_docstring("x", "Two lines\nof title." + parts)
    with pytest.raises(ValueError, match="ends in a full stop"):
        read_docstring("x", "No full stop" + parts)
    assert read_docstring("x", "One line." + parts) == (
        "One line.",
        {"Why": "A.", "Fails": "B.", "Passes": "C.", "Do": "D."},
    )
