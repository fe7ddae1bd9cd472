"""The names of a limit find their columns, also where a limit spells a dimension in its own way."""

from __future__ import annotations

import pytest

from specflow.limits import parse_limit
from specflow.model.verdict import Verdict
from tests.builders import a_declared_value, a_requirement, some_columns, some_evidence
from tests.verification.evaluating import status_of


def judged(limit: str, *documents: object, values: list[float], **conditions: list[float]) -> Verdict:
    requirement = a_requirement(limit=parse_limit(limit), conditions=None)
    evidence = some_evidence(
        values, conditions=some_columns({"offset": "MHz", "frequency": "GHz"}, **conditions)
    )
    return status_of(requirement, *documents, T_1=evidence).verdict  # type: ignore[arg-type]


@pytest.mark.parametrize("name", ["frequency", "f", "freq", "F"])
@pytest.mark.parametrize(("values", "verdict"), [([21, 26], Verdict.PASS), ([21, 24], Verdict.FAIL)])
def test_a_limit_may_spell_a_dimension_in_its_own_way(
    name: str, values: list[float], verdict: Verdict
) -> None:
    limit = f"by {name}[GHz] (27..28: >= 20 dB; 28<..30: >= 25 dB)"
    assert judged(limit, values=values, frequency=[27, 29]) is verdict


def test_a_mask_over_an_alias_of_the_offset_is_judged() -> None:
    mask = "mask(f_offset[MHz], max dB: 0..5: 10; 5<..10: 5)"
    sweep = [0.5 * step for step in range(21)]
    values = [9.0 if offset <= 5 else 4.0 for offset in sweep]
    assert judged(mask, values=values, offset=sweep) is Verdict.PASS
    assert judged(mask, values=[9, 6], offset=[1, 6]) is Verdict.FAIL


def test_two_names_of_one_dimension_are_not_read_as_the_same() -> None:
    """3GPP TS 38.104 6.6.4 states one mask over f_offset and over delta f, which differ by half the filter."""
    both = "stricter(mask(f_offset[MHz], max dB: 0..5: 10); mask(delta_f[MHz], max dB: 5<..10: 5))"
    assert judged(both, values=[9, 4], offset=[1, 6]) not in (Verdict.PASS, Verdict.FAIL)


def test_a_declared_value_of_such_a_name_is_itself() -> None:
    """``drive`` is a spelling of the input level, and here a declared value: 20 dB, not what was recorded."""
    declared = a_declared_value("drive", name="drive", value=20.0, unit="dB")
    limit = ">= drive dB"
    requirement = a_requirement(limit=parse_limit(limit), conditions=None)
    evidence = some_evidence([21.0], conditions=some_columns({"input_level": "dBm"}, input_level=[30.0]))
    assert status_of(requirement, declared, T_1=evidence).verdict is Verdict.PASS
