"""Evidence under another identity: named alternatives, and fails from before a requirement changed its plane."""

from __future__ import annotations

import pytest

from specflow.limits import parse_limit
from specflow.model.verdict import Label, RequirementStatus, Standing, Verdict
from specflow.parameters import load_dictionary
from specflow.verification import evaluate
from tests.builders import (
    a_block,
    a_conditions_set,
    a_dimension,
    a_parameter,
    a_quantity,
    a_requirement,
    a_snapshot,
    a_value_column,
    an_evidence_table,
    some_columns,
    some_evidence,
)
from tests.verification.evaluating import AS_OF, results_of, status_of

ONE_POINT = a_conditions_set("CS", a_dimension(values=(27.5,)))
AT = some_columns(frequency=[27.5])


def alternative(plane: str, statistic: str, *, wanted: str = "output") -> RequirementStatus:
    """Return the status of ``gain at the output >= 20 dB, or EIRP >= 30 dBm``, of which an EIRP was recorded."""
    requirement = a_requirement(
        quantity=a_quantity(plane=wanted), limit=parse_limit("looser(>= 20 dB; eirp >= 30 dBm)")
    )
    column = a_value_column("E", quantity=a_quantity("eirp", plane=plane, statistic=statistic), unit="dBm")
    snapshot = a_snapshot(
        requirement,
        ONE_POINT,
        a_block(),
        an_evidence_table(rows=1, values=(column,)),
        columns={"T-1": some_evidence({"E": [31.0]}, conditions=AT)},
    )
    known = a_parameter("eirp", unit="dBm", planes=("EIRP", "antenna face"), statistics=("rms", "peak"))
    return evaluate(snapshot, load_dictionary([a_parameter(), known]), as_of=AS_OF).of("R-1")


@pytest.mark.parametrize(
    ("plane", "statistic", "k"),
    [("EIRP", "", 1), ("antenna face", "", 1), ("connector", "", 0), ("EIRP", "peak", 0)],
)
def test_a_named_alternative_asks_for_plane_and_statistic_too(plane: str, statistic: str, k: int) -> None:
    status = alternative(plane, statistic)
    assert status.k == k
    assert bool(status.mismatches) is (k == 0)


def test_a_plane_that_the_other_parameter_knows_is_inherited() -> None:
    assert alternative("antenna face", "", wanted="antenna face").k == 1
    assert alternative("EIRP", "", wanted="antenna face").k == 0


BEFORE = a_value_column(quantity=a_quantity(plane="input"))


def after_new_plane(values: tuple[float, float, float], **fields: object) -> RequirementStatus:
    """Return the status of R-1, now at the output, with a table recorded for it at the input."""
    requirement = a_requirement(quantity=a_quantity(plane="output"), **{"revision": 2} | fields)
    table = an_evidence_table(values=(BEFORE,), requirement="R-1")
    return status_of(requirement, table, T_1=some_evidence(values))


def test_a_fail_from_before_the_plane_was_changed_stays_open() -> None:
    status = after_new_plane((15.0, 21.0, 21.0))
    assert (status.label, status.verdict, status.n_failing) == (Label.FAILING, Verdict.FAIL, 1)
    assert status.standing == {Standing.STALE: 3}
    assert any("recorded for R-1, but referred to input, required at output" in one for one in status.remarks)


def test_a_pass_from_before_the_plane_was_changed_is_to_be_taken_again() -> None:
    status = after_new_plane((21.0, 21.0, 21.0))
    assert (status.label, status.k) == (Label.REVERIFY, 0)
    assert any("required at output" in remark for remark in status.remarks)


def test_a_requirement_that_never_changed_has_no_evidence_from_before() -> None:
    status = after_new_plane((15.0, 21.0, 21.0), revision=1)
    assert (status.verdict, status.n_failing) == (Verdict.NONE, 0)


def test_a_retest_at_the_new_plane_lifts_the_fail() -> None:
    requirement = a_requirement(quantity=a_quantity(plane="output"), revision=2)
    tables = (
        an_evidence_table("T-1", values=(BEFORE,), requirement="R-1"),
        an_evidence_table("T-2", values=(a_value_column(quantity=a_quantity(plane="output")),)),
    )
    status = status_of(requirement, *tables, T_1=some_evidence((15.0, 21.0, 21.0)), T_2=some_evidence())
    assert status.label is Label.READY


@pytest.mark.parametrize(("value", "said"), [(15.0, True), (21.0, False)])
def test_evidence_that_fails_under_another_plane_is_found(value: float, said: bool) -> None:
    """Nobody says for which requirement it was recorded: it is no fail of R-1, and must not go unseen."""
    requirement = a_requirement(quantity=a_quantity(plane="output"))
    results = results_of(
        requirement, an_evidence_table(values=(BEFORE,)), T_1=some_evidence((value, 21.0, 21.0))
    )
    assert ("would fail R-1" in results.unmatched["T-1"]) is said
