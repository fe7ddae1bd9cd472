"""Whose evidence it is: spellings of one item, readings that name none, parts that changed."""

from __future__ import annotations

from datetime import date

import pytest

from specflow.model.evidence import EvidenceColumns, ItemChange
from specflow.model.requirement import Method, Provers
from specflow.model.verdict import Label, RequirementStatus, Standing, Verdict
from tests.builders import (
    a_block,
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
TWO = a_requirement(provers=Provers(rule="number of", number=2))


def two_readings(first: str | None, second: str | None, value: float = 21.0) -> EvidenceColumns:
    at = some_columns(frequency=[27.5, 27.5])
    return some_evidence((21.0, value), items=[first, second], conditions=at)


def of_two(columns: EvidenceColumns) -> RequirementStatus:
    """Return the status where two specimens must prove one point."""
    return status_of(TWO, ONE_POINT, an_evidence_table(rows=2), T_1=columns)


def test_two_spellings_of_a_serial_are_one_specimen() -> None:
    status = of_two(two_readings("SN-9", "sn-9"))
    assert (status.k, status.n) == (1, 2)
    assert of_two(two_readings("SN-9", "SN-8")).k == 2


def test_two_spellings_in_two_tables_are_one_specimen() -> None:
    at = some_columns(frequency=[27.5])
    tables = [an_evidence_table(name, rows=1) for name in ("T-1", "T-2")]
    columns = {
        "T_1": some_evidence((21.0,), items="SN-9", conditions=at),
        "T_2": some_evidence((21.0,), items="sn-9", conditions=at),
    }
    assert status_of(TWO, ONE_POINT, *tables, **columns).k == 1


def test_a_reading_that_names_no_item_is_no_second_specimen() -> None:
    status = of_two(two_readings("SN-9", None))
    assert (status.k, status.n) == (1, 2)
    assert any("no item is named" in remark for remark in status.remarks)


def test_a_reading_that_names_no_item_may_still_fail() -> None:
    assert of_two(two_readings("SN-9", None, 15.0)).verdict is Verdict.FAIL


def test_where_any_one_will_do_a_reading_without_an_item_is_engineering_hardware() -> None:
    nameless = some_evidence(items=[None] * 3)  # type: ignore[list-item]
    assert status_of(an_activity(), T_1=nameless).k == 3
    assert status_of(an_activity(credit_from="qualification"), T_1=nameless).k == 0


CHANGED = ItemChange(
    id="C-1", block="LNA", item="LNA-1", effective=date(2026, 5, 5), description="new firmware"
)


@pytest.mark.parametrize(
    ("items", "method", "standing"),
    [
        (["LNA-1"] * 3, Method.TEST, Standing.STALE),
        (["SN-LNA-1"] * 3, Method.TEST, Standing.STALE),
        (["LNA-2"] * 3, Method.TEST, Standing.ACCEPTED),
        ([None] * 3, Method.TEST, Standing.STALE),
        ([None] * 3, Method.ANALYSIS, Standing.ACCEPTED),  # about the design, of which nothing changed
    ],
)
def test_a_change_of_one_item_touches_what_may_be_of_it(
    items: list[str | None], method: Method, standing: Standing
) -> None:
    table = an_evidence_table(method=method)
    assert status_of(CHANGED, table, T_1=some_evidence(items=items)).standing == {standing: 3}


def test_a_change_of_an_item_that_nobody_registered_is_found_by_its_name() -> None:
    change = CHANGED.model_copy(update={"item": "lna-9"})
    assert status_of(change, T_1=some_evidence(items="LNA-9")).standing == {Standing.STALE: 3}


SYSTEM = (a_block("SYS"), a_block("LNA", parent="SYS"), a_requirement(block="SYS"))


def of_system(change: ItemChange, *documents: object, item: str | None = "SYS-1") -> RequirementStatus:
    """Return the status of a limit on the system, measured on SYS-1, when the LNA changed after that."""
    return status_of(
        *SYSTEM,
        change,
        an_evidence_table(block="SYS"),
        an_item("SYS-1", block="SYS"),
        *documents,  # type: ignore[arg-type]
        T_1=some_evidence(items=[item] * 3),
    )


BUILT_IN = an_item("LNA-1", built_into="SYS-1")


@pytest.mark.parametrize("item", ["LNA-1", None])
def test_a_change_of_what_is_built_in_makes_the_evidence_of_its_host_stale(item: str | None) -> None:
    """Both the specimen that changed and the type of which it is one."""
    status = of_system(CHANGED.model_copy(update={"item": item}), BUILT_IN)
    assert (status.standing, status.label) == ({Standing.STALE: 3}, Label.REVERIFY)
    assert any("LNA-1, which is built into SYS-1, changed" in remark for remark in status.remarks)


def test_a_change_of_another_part_leaves_the_host_as_it_was() -> None:
    status = of_system(CHANGED.model_copy(update={"item": "LNA-2"}), BUILT_IN, an_item("LNA-2"))
    assert status.standing == {Standing.ACCEPTED: 3}


def test_a_change_is_followed_through_several_assemblies() -> None:
    inside = an_item("BOX-1", block="BOX", built_into="SYS-1")
    documents = (a_block("BOX", parent="SYS"), inside, an_item("LNA-1", built_into="BOX-1"))
    assert of_system(CHANGED, *documents).standing == {Standing.STALE: 3}


def test_a_change_of_a_part_names_its_quantities_for_the_host_too() -> None:
    change = CHANGED.model_copy(update={"parameters": ("noise_figure",)})
    assert of_system(change, BUILT_IN).standing == {Standing.ACCEPTED: 3}


def test_a_change_of_a_procedure_touches_no_host() -> None:
    assert of_system(CHANGED.model_copy(update={"aspect": "procedure"}), BUILT_IN).standing == {
        Standing.ACCEPTED: 3
    }


def test_a_change_below_that_nobody_knows_to_be_built_in_is_said() -> None:
    status = of_system(CHANGED)
    assert (status.standing, status.k) == ({Standing.ACCEPTED: 3}, 3)
    assert any(
        "LNA, a part of SYS, changed on 2026-05-05 (C-1: new firmware)" in one for one in status.remarks
    )


def test_items_built_into_each_other_do_no_harm() -> None:
    knot = (an_item("LNA-1", built_into="SYS-1"), an_item("SYS-1", block="SYS", built_into="LNA-1"))
    assert of_system(CHANGED, *knot).standing == {Standing.STALE: 3}
