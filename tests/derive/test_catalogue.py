"""The catalogue of laws: every one documents itself, and its figures are of parameters that exist."""

from __future__ import annotations

import pytest

from specflow.derive import LAW_BY_NAME, LAWS, Law
from specflow.parameters import load_dictionary


def test_names_are_unique_and_plain() -> None:
    assert len(LAW_BY_NAME) == len(LAWS)
    assert all(law.name == law.name.lower().replace("_", " ").replace("-", " ") for law in LAWS)


@pytest.mark.parametrize("law", LAWS, ids=lambda law: law.name)
def test_a_law_says_formula_validity_and_source(law: Law) -> None:
    for part in ("Formula:", "Valid:", "Source:"):
        assert part in law.text, law.name
    assert law.source and law.needs and law.title


@pytest.mark.parametrize("law", LAWS, ids=lambda law: law.name)
def test_what_a_law_gives_and_reads_are_parameters_of_the_dictionary(law: Law) -> None:
    known = load_dictionary()
    assert [name for name in (*law.gives, *law.reads) if known.get(name) is None] == []


@pytest.mark.parametrize("law", LAWS, ids=lambda law: law.name)
def test_settings_have_defaults_that_are_allowed(law: Law) -> None:
    for setting in law.settings:
        assert setting.what
        assert not setting.choices or setting.default in (None, *setting.choices)
