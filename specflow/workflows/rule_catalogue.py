"""The rules: all of them, and the one that a code names."""

from __future__ import annotations

from collections.abc import Iterable
from difflib import get_close_matches

from specflow.errors import SpecflowError
from specflow.model.base import code_key
from specflow.model.finding import RuleDescription
from specflow.model.report import ReportTable
from specflow.reports.rule_catalogue import catalogue_table
from specflow.rules import RULE_BY_CODE, RULES


def rule_catalogue() -> ReportTable:
    """Return all rules, in the order in which they are listed."""
    return catalogue_table([rule.description for rule in RULES])


def rule_named(code: str) -> RuleDescription:
    """Return the rule of a code (case does not matter). SpecflowError for a code that is none."""
    rule = RULE_BY_CODE.get(code_key(code))
    if rule is None:
        near = get_close_matches(code_key(code), RULE_BY_CODE, n=3, cutoff=0.5)
        hint = f"did you mean {' or '.join(near)}?" if near else "specflow rules lists them all"
        raise SpecflowError(f"there is no rule {code!r}", hint=hint)
    return rule.description


def codes_of_rules(names: Iterable[str]) -> frozenset[str]:
    """Return the codes that a person named. SpecflowError for one that is none."""
    return frozenset(rule_named(name).code for name in names)
