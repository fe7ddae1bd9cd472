"""Statistics are made of readings that belong together: what may not count never enters one that does."""

from __future__ import annotations

from specflow.limits import parse_limit
from specflow.model.base import Document
from specflow.model.evidence import EvidenceColumns, Supersession
from specflow.model.requirement import Method
from specflow.model.verdict import Compliance, RequirementStatus, Verdict
from tests.builders import (
    a_conditions_set,
    a_dimension,
    a_requirement,
    an_activity,
    an_evidence_table,
    an_item,
    some_columns,
    some_evidence,
)
from tests.verification.evaluating import status_of

ONE_POINT = a_conditions_set("CS", a_dimension(values=(27.5,)))
PROVISIONAL = {"accepted_by": "", "provisional": True}


def readings(values: list[float], items: list[str] | str = "LNA-1") -> EvidenceColumns:
    conditions = some_columns(frequency=[27.5] * len(values))
    return some_evidence(values, items=items, conditions=conditions)


def with_two_tables(
    limit: str, first: EvidenceColumns, second: EvidenceColumns, *documents: Document, **fields: object
) -> RequirementStatus:
    """Return the status with T-1 accepted and T-2 as ``fields`` say."""
    requirement = a_requirement(limit=parse_limit(limit, unit_hint="dB"))
    tables = (
        an_evidence_table("T-1", rows=len(first.source_rows)),
        an_evidence_table("T-2", rows=len(second.source_rows), **fields),
    )
    return status_of(requirement, ONE_POINT, *tables, *documents, T_1=first, T_2=second)


def test_provisional_readings_do_not_lift_a_mean() -> None:
    """19 dB alone fails; the mean with a provisional 23 dB would be 21 dB."""
    status = with_two_tables(">= 20 dB mean", readings([19.0]), readings([23.0]), **PROVISIONAL)
    assert (status.verdict, status.compliance) == (Verdict.FAIL, Compliance.NON_COMPLIANT)
    assert status.governing is not None
    assert status.governing.margin == -1


def test_superseded_readings_do_not_lift_a_mean() -> None:
    superseded = Supersession(id="S-1", earlier="T-2", later="T-1", reason="wrong cable")
    status = with_two_tables(">= 20 dB mean", readings([15.0, 20.5]), readings([26.0]), superseded)
    assert status.governing is not None
    assert (status.verdict, status.governing.margin) == (Verdict.FAIL, -2.25)


def test_stale_readings_do_not_lift_a_mean() -> None:
    """The second table followed a revision of the procedure that is not asked for any more."""
    activity = an_activity(procedure="P-1", procedure_revision="B")
    outdated = {"procedure": "P-1", "procedure_revision": "A"}
    status = with_two_tables(">= 20 dB mean", readings([19.0]), readings([23.0]), activity, **outdated)
    assert status.verdict is Verdict.FAIL


def test_an_analysis_is_no_part_of_a_mean_of_tests() -> None:
    """Each rank is a mean of its own; the higher one governs."""
    status = with_two_tables(
        ">= 20 dB mean", readings([19.0]), readings([23.0]), an_activity(), method=Method.ANALYSIS
    )
    assert status.verdict is Verdict.FAIL


def test_provisional_items_are_no_part_of_the_sample() -> None:
    items = [an_item(f"LNA-{number}") for number in range(2, 11)]
    others = readings([22.1, 22.2, 22.3, 22.1, 22.2, 22.1, 22.2, 22.3, 22.2], [one.id for one in items])
    status = with_two_tables(
        ">= 20 dB at 95/95 over item from at least 10", readings([22.0]), others, *items, **PROVISIONAL
    )
    assert (status.k, status.verdict) == (0, Verdict.INSUFFICIENT)
    whole = with_two_tables(">= 20 dB at 95/95 over item from at least 10", readings([22.0]), others, *items)
    assert (whole.k, whole.verdict) == (1, Verdict.PASS)


def test_provisional_samples_do_not_enlarge_an_allowance() -> None:
    """One in ten may miss by 3 dB; nine of the ten are not accepted."""
    status = with_two_tables(
        ">= 20 dB allow 10 % by 3 dB", readings([18.0]), readings([22.0] * 9), **PROVISIONAL
    )
    assert status.verdict is Verdict.FAIL
    assert with_two_tables(">= 20 dB allow 10 % by 3 dB", readings([18.0]), readings([22.0] * 9)).k == 1


def test_a_provisional_statistic_shows_progress_beside_none_that_counts() -> None:
    status = with_two_tables(">= 20 dB mean", readings([]), readings([23.0, 21.0]), **PROVISIONAL)
    assert (status.k, status.n_undecided, status.verdict) == (0, 1, Verdict.NONE)


def test_a_reading_that_names_no_item_is_no_sample_of_items() -> None:
    status = with_two_tables(
        ">= 20 dB worst over item from at least 2",
        readings([22.0]),
        some_evidence([21.0], items=[None], conditions=some_columns(frequency=[27.5])),  # type: ignore[list-item]
    )
    assert (status.k, status.verdict) == (0, Verdict.INSUFFICIENT)
