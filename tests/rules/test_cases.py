"""Every rule has cases that it reports and cases that it does not, as data; all of them run through the real thing."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
import yaml

from specflow.rules import RULES
from tests.rules.described import findings_of

CASES = Path(__file__).with_name("cases")
BASE = yaml.safe_load((CASES / "base.yaml").read_text(encoding="utf-8"))
FILES = {path.stem: path for path in sorted(CASES.glob("*.yaml")) if path.stem != "base"}


def read(code: str) -> dict[str, Any]:
    """The cases of one rule: passes and fails, by what each shows."""
    content = yaml.safe_load(FILES[code].read_text(encoding="utf-8"))
    assert isinstance(content, dict)
    return content


def cases(kind: str) -> Iterator[Any]:
    """All cases of a kind as parameters: the rule, the project described, and what is to be found."""
    for code in FILES:
        for name, case in read(code).get(kind, {}).items():
            finds = case.pop("finds", {})
            yield pytest.param(code, BASE | case, finds, id=f"{code}: {name}")


def test_every_rule_has_cases_of_both_kinds_and_every_file_is_of_a_rule() -> None:
    assert set(FILES) == {rule.code for rule in RULES}
    for code in FILES:
        found = read(code)
        assert set(found) == {"passes", "fails"}, code
        assert found["passes"], code
        assert all(case.get("finds") for case in found["fails"].values()), code


def test_nothing_is_reported_of_the_base_project() -> None:
    assert [f"{one.rule}: {one.message}" for one in findings_of(BASE)] == []


@pytest.mark.parametrize(("code", "description", "finds"), cases("passes"))
def test_the_rule_is_silent(code: str, description: dict[str, Any], finds: dict[str, str]) -> None:
    assert not finds, "a case that passes finds nothing"
    assert [one.message for one in findings_of(description) if one.rule == code] == []


@pytest.mark.parametrize(("code", "description", "finds"), cases("fails"))
def test_the_rule_reports(code: str, description: dict[str, Any], finds: dict[str, str]) -> None:
    found = {one.subject: one.message for one in findings_of(description) if one.rule == code}
    assert set(found) == set(finds)
    for subject, words in finds.items():
        assert words in found[subject]
