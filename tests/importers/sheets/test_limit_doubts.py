"""Limits that read well and are probably not meant."""

from __future__ import annotations

from pathlib import Path

import pytest

from specflow.importers.sheets.limit_doubts import NEGATIVE, POSITIVE
from specflow.model.finding import Finding
from specflow.parameters import load_dictionary
from tests.builders import read_sheets


def doubts(tmp_path: Path, parameter: str, limit: str, conditions: str = "") -> list[Finding]:
    draft = read_sheets(
        tmp_path,
        blocks=[{"ID": "UT", "Name": "Terminal"}],
        conditions=[{"Set": "CS", "Dimension": "offset", "Values": "10, 100", "Unit": "kHz"}],
        requirements=[
            {"ID": "R-1", "Block": "UT", "Parameter": parameter, "Limit": limit, "Conditions": conditions}
        ],
    )
    assert "R-1" in draft.echoes, [str(one.message) for one in draft.findings]
    return [one for one in draft.findings if one.rule in ("workbook-sign", "workbook-limit-varies")]


@pytest.mark.parametrize(
    ("parameter", "limit", "sign"),
    [
        ("return loss", "-15 dB max", "positive"),
        ("return loss", ">= -15 dB", "positive"),
        ("isolation", "-80 dB max", "positive"),
        ("side-lobe level", "<= 13 dB", "negative"),
        ("harmonics", ">= 40 dBc", "negative"),
    ],
)
def test_a_limit_of_the_other_sign_is_doubtful(tmp_path: Path, parameter: str, limit: str, sign: str) -> None:
    (found,) = doubts(tmp_path, parameter, limit)
    assert found.rule == "workbook-sign"
    assert f"is {sign} here" in found.message


@pytest.mark.parametrize(
    ("parameter", "limit"),
    [
        ("return loss", ">= 15 dB"),
        ("gain", ">= -3 dB"),
        ("harmonics", "<= -40 dBc"),
        ("insertion loss", "0..3 dB"),
    ],
)
def test_a_limit_of_the_right_sign_is_not(tmp_path: Path, parameter: str, limit: str) -> None:
    assert doubts(tmp_path, parameter, limit) == []


def test_a_table_of_limits_needs_a_set_that_asks_for_its_values(tmp_path: Path) -> None:
    limit = "-80 dBc/Hz @ 10 kHz; -100 dBc/Hz @ 100 kHz"
    (found,) = doubts(tmp_path, "phase noise", limit)
    assert found.rule == "workbook-limit-varies"
    assert "differs by offset, but no conditions set asks for values of it" in found.message
    assert doubts(tmp_path, "phase noise", limit, "CS") == []
    assert doubts(tmp_path, "phase noise", "mask(f_offset[kHz], max dBc/Hz: 10..100: -80)", "CS") == []


def test_the_signs_are_those_that_the_dictionary_describes() -> None:
    dictionary = load_dictionary()
    for word, keys in (("positive", POSITIVE), ("negative", NEGATIVE)):
        for key in keys:
            parameter = dictionary.get(key)
            assert parameter is not None and word in parameter.description.lower(), key
