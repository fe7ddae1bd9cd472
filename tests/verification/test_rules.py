"""The rules of roll-up, in their order: applicability, TBD and TBR, standing, worst verdict, rank, retest, activities,
waivers, parents, totals, the board. One test or more a rule."""

from __future__ import annotations

from datetime import date

import pytest

from specflow.model.block import HardwareType, Tier
from specflow.model.budget import Allocation
from specflow.model.decision import Approval, DeclaredSplit, Disposition, Nonconformance
from specflow.model.evidence import ItemChange, Supersession, Withdrawal
from specflow.model.finding import Severity
from specflow.model.limit import Limit, LimitState, Undefined
from specflow.model.requirement import DecisionRule, Method, Provers, RuleName, Stage
from specflow.model.verdict import CloseOut, Compliance, Label, PointsState, Standing, Verdict
from specflow.parameters import load_dictionary
from specflow.rules import run_rules
from specflow.verification import evaluate
from tests.builders import (
    a_block,
    a_declared_value,
    a_requirement,
    a_snapshot,
    a_waiver,
    an_activity,
    an_evidence_table,
    an_item,
    at_least,
    some_evidence,
)
from tests.verification.evaluating import AS_OF, project, results_of, status_of


def approval(**fields: object) -> Approval:
    return Approval(
        **{
            "id": "A-1",
            "requirement": "R-1",
            "decision": "closed",
            "computed_label": "ready for close-out",
            "by": "A. Invented",
            "on": AS_OF,
        }
        | fields
    )


# Rule 1: applicability first


def test_not_applicable_with_reason_and_approver_is_closed_and_keeps_its_reason() -> None:
    tailored = a_requirement(not_applicable_reason="no such port", not_applicable_approver="B. Invented")
    status = status_of(tailored)
    assert status.label is Label.NOT_APPLICABLE
    assert status.compliance is Compliance.NOT_APPLICABLE
    assert status.close_out is CloseOut.CLOSED
    assert "no such port (approved by B. Invented)" in status.close_out_reason
    assert (status.k, status.n) == (0, 0)


def test_not_applicable_without_an_approver_stays_applicable_and_says_so() -> None:
    status = status_of(a_requirement(not_applicable_reason="no such port"))
    assert status.compliance is Compliance.COMPLIANT
    assert any("nobody approved" in remark for remark in status.remarks)


@pytest.mark.parametrize(("rated", "expected"), [(30.0, Label.NOT_APPLICABLE), (45.0, Label.READY)])
def test_applicability_is_decided_by_declared_values(rated: float, expected: Label) -> None:
    declared = a_declared_value("P_rated", value=rated, unit="dBm")
    requirement = a_requirement(applicability="P_rated > 40 dBm")
    assert status_of(requirement, declared).label is expected


def test_applicability_that_cannot_be_decided_stays_applicable() -> None:
    status = status_of(a_requirement(applicability="P_rated > 40 dBm"))
    assert status.label is Label.READY
    assert any("cannot be decided" in remark for remark in status.remarks)


# Rule 2: TBD blocks, TBR is provisional


def test_tbd_is_not_determined_whatever_was_measured() -> None:
    status = status_of(
        a_requirement(limit=Limit(text="TBD", state=LimitState.TBD, tree=Undefined(unit="dB"), unit="dB"))
    )
    assert status.label is Label.TBD
    assert status.compliance is Compliance.NOT_DETERMINED
    assert status.close_out is CloseOut.OPEN
    assert status.n == 3


def test_tbr_computes_but_cannot_close_even_when_the_board_closed_it() -> None:
    tentative = a_requirement(limit=at_least(20, state=LimitState.TBR))
    status = status_of(tentative, approval())
    assert status.compliance is Compliance.COMPLIANT
    assert status.label is Label.TBR
    assert status.close_out is CloseOut.OPEN


# Rule 3: standing gates verdicts, with the asymmetry


@pytest.mark.parametrize("provisional", [{"provisional": True}, {"accepted_by": ""}])
def test_a_provisional_pass_shows_progress_and_proves_nothing(provisional: dict[str, object]) -> None:
    status = status_of(an_evidence_table(**provisional), T_1=some_evidence())
    assert status.standing == {Standing.PROVISIONAL: 3}
    assert (status.k, status.n_missing) == (0, 3)
    assert status.activities[0].state is PointsState.IN_PROGRESS
    assert status.compliance is Compliance.NOT_DETERMINED
    assert status.label is Label.PLANNED


def test_a_provisional_fail_is_an_open_fail() -> None:
    status = status_of(an_evidence_table(provisional=True), T_1=some_evidence([21, 18, 21]))
    assert status.label is Label.FAILING
    assert (status.n_failing, status.n_missing) == (1, 2)


def firmware_change(**fields: object) -> ItemChange:
    return ItemChange(
        **{
            "id": "C-1",
            "block": "LNA",
            "aspect": "firmware",
            "effective": date(2026, 5, 10),
            "description": "bias table",
        }
        | fields
    )


def test_a_stale_pass_does_not_count_and_asks_for_re_verification() -> None:
    status = status_of(firmware_change())
    assert status.standing == {Standing.STALE: 3}
    assert status.label is Label.REVERIFY
    assert status.k == 0
    assert any("bias table" in remark for remark in status.remarks)


def test_a_stale_fail_stays_open_until_re_verified() -> None:
    stale = some_evidence([21, 18, 21])
    assert status_of(firmware_change(), T_1=stale).label is Label.FAILING
    later = an_evidence_table("T-2", performed_on="2026-05-20")
    again = status_of(firmware_change(), later, T_1=stale, T_2=some_evidence([21, 21, 21]))
    assert again.label is Label.READY
    assert again.k == 3


def test_a_change_that_names_another_parameter_makes_nothing_stale() -> None:
    assert status_of(firmware_change(parameters=("noise_figure",))).label is Label.READY


def test_a_change_of_another_item_makes_nothing_stale() -> None:
    other = an_item("LNA-2")
    assert status_of(other, firmware_change(item="LNA-2")).label is Label.READY
    assert status_of(other, firmware_change(item="LNA-1")).label is Label.REVERIFY


def test_a_moved_limit_makes_nothing_stale_it_is_judged_again() -> None:
    status = status_of(a_requirement(revision=2, limit=at_least(20.9)), firmware_change(parameters=("eirp",)))
    assert status.k == 3


def test_a_withdrawn_reading_is_gone_but_counted_in_the_standing() -> None:
    withdrawn = Withdrawal(id="X-1", table="T-1", rows=(1,), reason="cable was loose")
    status = status_of(withdrawn, T_1=some_evidence([21, 18, 21]))
    assert status.standing == {Standing.ACCEPTED: 2, Standing.WITHDRAWN: 1}
    assert (status.k, status.n_failing, status.n_missing) == (2, 0, 1)


def test_less_representative_hardware_shows_progress_only() -> None:
    breadboard = an_item(hardware_type=HardwareType.BREADBOARD)
    status = status_of(breadboard)
    assert status.k == 0
    assert any("breadboard hardware" in remark for remark in status.remarks)


# Rule 4: the worst verdict governs


def test_the_worst_reading_at_a_point_governs_and_is_named() -> None:
    second = an_evidence_table("T-2")
    status = status_of(second, T_1=some_evidence([21, 21, 21]), T_2=some_evidence([21, 19.9, 21]))
    assert status.verdict is Verdict.FAIL
    assert status.governing is not None
    assert status.governing.record is not None
    assert (status.governing.record.table, status.governing.record.row) == ("T-2", 1)
    assert status.governing.words == "28.75 GHz"


def test_an_inconclusive_point_outweighs_passes() -> None:
    low, high = [21.0, float("-inf"), 21.0], [21.0, 25.0, 21.0]
    status = status_of(T_1=some_evidence(low, high=high))
    assert status.verdict is Verdict.INCONCLUSIVE
    assert status.label is Label.INCONCLUSIVE
    assert (status.k, status.n_failing, status.n_missing) == (2, 0, 0)
    assert any("known as an interval only" in remark for remark in status.remarks)


# Rule 5: rank, point by point; see also test_credit and test_conflicts


def simulation(id: str = "T-2", **fields: object) -> object:
    return an_evidence_table(id, **{"method": Method.ANALYSIS} | fields)


def test_a_test_governs_a_simulation_at_the_same_point() -> None:
    status = status_of(
        an_activity(method=Method.ANALYSIS),
        simulation(),
        T_1=some_evidence([21, 21, 21]),
        T_2=some_evidence([19, 19, 19], items=[None, None, None]),
    )
    assert status.label is Label.READY


def test_a_simulated_fail_governs_where_nobody_tested() -> None:
    status = status_of(
        simulation(),
        T_1=some_evidence([21, 21, float("nan")]),
        T_2=some_evidence([19, 19, 19], items=[None, None, None]),
    )
    assert (status.k, status.n_failing) == (2, 1)
    assert status.label is Label.FAILING


def test_a_simulation_closes_an_analysis_but_no_test() -> None:
    simulated = some_evidence(items=[None, None, None])
    analysed = status_of(an_activity(method=Method.ANALYSIS), simulation("T-1"), T_1=simulated)
    assert analysed.k == 3
    tested = status_of(simulation("T-1"), T_1=simulated)
    assert tested.k == 0
    assert any("an analysis does not close a test" in remark for remark in tested.remarks)


# Rule 6: a retest replaces a fail only when it names it


@pytest.mark.parametrize(("names", "expected"), [("", Label.FAILING), ("NCR-1: reworked", Label.READY)])
def test_a_retest_replaces_a_fail_only_when_it_names_it(names: str, expected: Label) -> None:
    retest = Supersession(id="S-1", earlier="T-1", later="T-2", names_fail=names)
    status = status_of(
        retest, an_evidence_table("T-2"), T_1=some_evidence([21, 18, 21]), T_2=some_evidence([21, 21, 21])
    )
    assert status.label is expected
    assert status.standing[Standing.SUPERSEDED] == 3


# Rule 7: all required activities


def test_a_requirement_is_compliant_only_when_every_activity_is() -> None:
    acceptance = an_activity(id="R-1/acceptance", stage=Stage.ACCEPTANCE)
    status = status_of(acceptance, an_activity())
    assert [one.k for one in status.activities] == [0, 3]
    assert status.compliance is Compliance.NOT_DETERMINED
    assert status.label is Label.PARTIALLY_VERIFIED


# Rule 8: waivers


def failing_with(*documents: object) -> object:
    return status_of(*documents, T_1=some_evidence([21, 19.5, 21]))


def granted(**fields: object) -> object:
    return a_waiver(
        **{"state": "approved", "approver": "the board", "permitted": ">= 19 dB", "expires_on": None} | fields
    )


def test_a_waiver_closes_and_never_makes_compliant() -> None:
    status = failing_with(granted())
    assert status.compliance is Compliance.NON_COMPLIANT
    assert status.label is Label.CLOSED_WAIVED
    assert (status.close_out, status.close_out_reason) == (CloseOut.CLOSED, "waived by W-1")


@pytest.mark.parametrize(
    ("fields", "words"),
    [
        ({"permitted": ">= 19.8 dB"}, "permits >= 19.8 dB, and 1 point misses that"),
        ({"expires_on": date(2026, 5, 31)}, "expired on 2026-05-31"),
        ({"requirement_revision": 2}, "was written against revision 2"),
        ({"items": ("LNA-2",)}, "does not cover"),
        ({"conditions": "frequency > 29 GHz"}, "does not cover"),
        ({"state": "lapsed"}, "has lapsed"),
    ],
)
def test_a_waiver_that_does_not_cover_what_fails_is_lapsed_or_exceeded(
    fields: dict[str, object], words: str
) -> None:
    status = failing_with(granted(**fields))
    assert status.label is Label.WAIVER_EXCEEDED
    assert words in status.close_out_reason
    assert status.close_out is CloseOut.OPEN


@pytest.mark.parametrize(
    "fields", [{"items": ("SN-LNA-1",)}, {"conditions": "frequency in 28..29 GHz"}, {"expires_on": AS_OF}]
)
def test_a_waiver_covers_by_serial_by_conditions_and_on_its_last_day(fields: dict[str, object]) -> None:
    assert failing_with(granted(**fields)).label is Label.CLOSED_WAIVED


def test_a_waiver_is_judged_with_the_uncertainty_of_the_rule() -> None:
    guarded = a_requirement(decision_rule=DecisionRule(name=RuleName.GUARDED))
    reading = some_evidence([22, 19.5, 22], u=0.2)
    assert status_of(guarded, granted(), T_1=reading).label is Label.CLOSED_WAIVED
    assert status_of(guarded, granted(permitted=">= 19.3 dB"), T_1=reading).label is Label.WAIVER_EXCEEDED


def test_a_requested_waiver_changes_nothing_but_the_reason() -> None:
    status = failing_with(granted(state="requested"))
    assert status.label is Label.FAILING
    assert "waiver requested (W-1)" in status.close_out_reason


def test_a_waiver_does_not_make_up_for_missing_points() -> None:
    status = status_of(granted(), T_1=some_evidence([21, 19.5, float("nan")]))
    assert status.label is Label.PARTIALLY_VERIFIED


def test_a_declared_split_makes_partially_compliant_and_missing_evidence_never_does() -> None:
    split = DeclaredSplit(
        id="D-1",
        requirement="R-1",
        scope_not_met="frequency in 28.7..28.8 GHz",
        reason="known",
        by="A",
        on=AS_OF,
    )
    assert failing_with(split).label is Label.PARTIALLY_COMPLIANT
    assert status_of(split, T_1=some_evidence([21, float("nan"), 21])).label is Label.PARTIALLY_VERIFIED


# Rule 9: parents


def parent(**fields: object) -> object:
    return a_requirement("R-0", **{"met_by_lower_level": True} | fields)


@pytest.mark.parametrize(
    ("values", "compliance"),
    [
        ([21, 21, 21], Compliance.COMPLIANT),
        ([21, 18, 21], Compliance.NON_COMPLIANT),
        ([21, float("nan"), 21], Compliance.NOT_DETERMINED),
    ],
)
def test_met_by_lower_level_alone_takes_the_worst_of_the_children(
    values: list[float], compliance: Compliance
) -> None:
    children = a_requirement(parents=("R-0",)), a_requirement("R-2", parents=("R-0",), limit=at_least(10))
    status = status_of(*children, parent(), requirement="R-0", T_1=some_evidence(values))
    assert status.compliance is compliance


def test_children_by_allocation_count_like_children_that_name_their_parent() -> None:
    link = Allocation(id="AL-1", parent="R-0", child="R-1", manual_reason="shared by hand")
    status = status_of(parent(), link, a_requirement(), requirement="R-0", T_1=some_evidence([21, 18, 21]))
    assert status.compliance is Compliance.NON_COMPLIANT


def test_a_system_requirement_of_a_block_with_blocks_below_is_to_be_allocated() -> None:
    system, blocks = a_requirement("R-0", tier=Tier.SYSTEM), (a_block(), a_block("MIXER", parent="LNA"))
    assert status_of(system, *blocks, requirement="R-0").label is Label.UNALLOCATED
    assert status_of(system, a_block(), requirement="R-0").label is not Label.UNALLOCATED
    excused = system.model_copy(update={"needs_allocation": False})
    assert status_of(excused, *blocks, requirement="R-0").label is not Label.UNALLOCATED
    link = Allocation(id="AL-1", parent="R-0", child="R-1", manual_reason="shared by hand")
    assert status_of(system, link, *blocks, requirement="R-0").label is not Label.UNALLOCATED


def test_otherwise_a_failing_child_does_not_fail_its_parent() -> None:
    own = parent(met_by_lower_level=False, limit=at_least(15))
    child = a_requirement(parents=("R-0",))
    status = status_of(own, child, requirement="R-0", T_1=some_evidence([21, 18, 21]))
    assert status.compliance is Compliance.COMPLIANT


def test_a_requirement_that_is_its_own_descendant_is_left_out_of_its_children() -> None:
    loop = parent(parents=("R-9",)), a_requirement("R-9", parents=("R-0",), met_by_lower_level=True)
    assert status_of(*loop, requirement="R-0").compliance is Compliance.NOT_DETERMINED


# Rule 10: totals print their denominators


def test_k_and_n_count_all_required_points_of_all_activities() -> None:
    status = status_of(T_1=some_evidence([21, 18, float("nan")]))
    assert (status.k, status.n, status.n_failing, status.n_missing) == (1, 3, 1, 1)
    assert (status.n_without_evidence, status.n_undecided) == (1, 0)


def test_points_with_evidence_that_decides_nothing_are_told_from_points_without_any() -> None:
    simulated = some_evidence([21, 21, float("nan")])
    status = status_of(an_evidence_table(method=Method.ANALYSIS), T_1=simulated)
    assert (status.k, status.n_failing, status.n_missing) == (0, 0, 3)
    assert (status.n_without_evidence, status.n_undecided) == (1, 2)


def test_a_point_that_one_item_fails_and_another_has_no_reading_of_counts_once() -> None:
    status = status_of(
        an_item("LNA-2"),
        an_evidence_table("T-2"),
        T_1=some_evidence([21, 21, float("nan")]),
        T_2=some_evidence([18, float("nan"), 18], items="LNA-2"),
    )
    assert (status.k, status.n_failing, status.n_without_evidence, status.n_undecided) == (2, 2, 0, 0)


def test_items_that_each_must_prove_have_their_own_points_without_evidence() -> None:
    each = a_requirement(provers=Provers(rule="each of", items=("LNA-1", "LNA-2")))
    status = status_of(an_item("LNA-2"), each, T_1=some_evidence([21, 18, float("nan")]))
    assert (status.k, status.n, status.n_failing, status.n_without_evidence) == (1, 6, 1, 4)


# Rule 11: the board


def test_the_board_closes_what_is_ready() -> None:
    status = status_of(approval())
    assert status.label is Label.CLOSED_VERIFIED
    assert (status.close_out, status.close_out_reason) == (CloseOut.CLOSED, "verified")


def test_a_later_change_reopens_and_both_states_are_shown() -> None:
    status = status_of(approval(), T_1=some_evidence([21, 18, 21]))
    assert status.label is Label.FAILING
    assert status.close_out is CloseOut.OPEN
    assert any("the board closed it" in remark for remark in status.remarks)


def test_an_approval_of_an_earlier_revision_does_not_close_this_one() -> None:
    status = status_of(a_requirement(revision=2), approval())
    assert status.label is Label.READY
    assert any("revision 1" in remark for remark in status.remarks)


def test_the_latest_decision_of_the_board_stands() -> None:
    kept = approval(id="A-2", decision="kept open", on=date(2026, 5, 31), note="more corners")
    status = status_of(approval(on=date(2026, 5, 30)), kept)
    assert status.label is Label.READY
    assert any("more corners" in remark for remark in status.remarks)


def test_an_open_nonconformance_keeps_a_row_open() -> None:
    report = Nonconformance(id="NCR-1", requirement="R-1", description="oscillates")
    status = status_of(report, approval())
    assert status.close_out is CloseOut.OPEN
    assert "NCR-1 open" in status.close_out_reason


def test_a_disposition_settles_a_conflict_until_it_expires() -> None:
    settled = Disposition(
        id="D-1", rule="conflicting-evidence", subject="R-1", reason="cable", by="A", on=AS_OF
    )
    two = {"T_1": some_evidence([25, 25, 25], u=0.1), "T_2": some_evidence([24, 25, 25], u=0.1)}
    table = an_evidence_table("T-2")
    assert status_of(table, **two).label is Label.CONFLICTING
    assert status_of(table, settled, **two).label is Label.READY
    lapsed = settled.model_copy(update={"expires_on": date(2026, 5, 31)})
    assert status_of(table, lapsed, **two).label is Label.CONFLICTING
    renewed = settled.model_copy(update={"id": "D-2", "on": date(2026, 5, 1), "expires_on": date(2026, 5, 2)})
    assert status_of(table, settled, renewed, **two).label is Label.READY, "the last one decided holds"


@pytest.mark.parametrize(
    ("rule", "on", "expires_on", "settles"),
    [
        ("conflicting-evidence", AS_OF, None, True),
        ("Conflicting-Evidence", AS_OF, AS_OF, True),
        ("conflict", AS_OF, None, False),
        ("interest-conflict", AS_OF, None, False),
        ("conflicting-evidence", date(2026, 6, 2), None, False),
        ("conflicting-evidence", date(2026, 5, 1), date(2026, 5, 31), False),
    ],
)
def test_status_and_rules_take_the_same_dispositions_of_a_conflict(
    rule: str, on: date, expires_on: date | None, settles: bool
) -> None:
    one = Disposition(
        id="D-1", rule=rule, subject="R-1", reason="cable", by="A", on=on, expires_on=expires_on
    )
    two = {"T-1": some_evidence([25, 25, 25], u=0.1), "T-2": some_evidence([24, 25, 25], u=0.1)}
    snapshot = a_snapshot(*project(an_evidence_table(), an_evidence_table("T-2"), one), columns=two)
    dictionary = load_dictionary()
    results = evaluate(snapshot, dictionary, as_of=AS_OF)
    found = [f for f in run_rules(snapshot, results, dictionary) if f.rule == "conflicting-evidence"]
    assert results.of("R-1").label is (Label.READY if settles else Label.CONFLICTING)
    assert [f.severity for f in found] == [Severity.INFO if settles else Severity.ERROR]


# Who must prove


def test_any_one_item_shows_the_one_with_most_points_and_items_never_complete_each_other() -> None:
    nan = float("nan")
    both = some_evidence([21, 21, nan], items="LNA-1"), some_evidence([nan, nan, 21], items="LNA-2")
    status = status_of(an_item("LNA-2"), an_evidence_table("T-2"), T_1=both[0], T_2=both[1])
    assert (status.k, status.n) == (2, 3)
    assert status.activities[0].shown_item == "LNA-1"
    together = a_requirement(provers=Provers(may_complete_each_other=True))
    status = status_of(together, an_item("LNA-2"), an_evidence_table("T-2"), T_1=both[0], T_2=both[1])
    assert (status.k, status.n) == (3, 3)


def test_each_of_named_items_counts_points_times_items() -> None:
    each = a_requirement(provers=Provers(rule="each of", items=("SN-LNA-1", "LNA-2")))
    status = status_of(each, an_item("LNA-2"))
    assert (status.k, status.n, status.n_missing) == (3, 6, 3)
    assert status.label is Label.PARTIALLY_VERIFIED


def test_a_number_of_items_takes_the_best_of_them() -> None:
    two = a_requirement(provers=Provers(rule="number of", number=2))
    documents = two, an_item("LNA-2"), an_item("LNA-3"), an_evidence_table("T-2"), an_evidence_table("T-3")
    status = status_of(
        *documents,
        T_1=some_evidence(),
        T_2=some_evidence([21, float("nan"), float("nan")], items="LNA-2"),
        T_3=some_evidence(items="LNA-3"),
    )
    assert (status.k, status.n) == (6, 6)
    assert status_of(two).n_missing == 3


def test_a_fail_of_another_representative_item_is_not_hidden() -> None:
    status = status_of(
        an_item("LNA-2"),
        an_evidence_table("T-2"),
        T_1=some_evidence(),
        T_2=some_evidence([18, 21, 21], items="LNA-2"),
    )
    assert (status.k, status.n, status.n_failing) == (3, 3, 1)
    assert status.label is Label.FAILING
    assert status.governing is not None
    assert status.governing.item == "LNA-2"


def test_a_fail_of_a_breadboard_is_outranked_once_representative_hardware_passes() -> None:
    breadboard = an_item("LNA-0", hardware_type=HardwareType.BREADBOARD)
    early = some_evidence([18, 21, 21], items="LNA-0")
    assert (
        status_of(breadboard, an_evidence_table("T-2"), T_1=some_evidence(), T_2=early).label is Label.READY
    )
    assert status_of(breadboard, T_1=early).label is Label.FAILING


def test_only_named_items_may_prove() -> None:
    named = a_requirement(provers=Provers(items=("LNA-2",)))
    status = status_of(named, an_item("LNA-2"))
    assert status.k == 0
    assert any("not one of those named" in remark for remark in status.remarks)


def test_evaluating_some_requirements_gives_those_only() -> None:
    results = results_of(a_requirement("R-2"))
    assert set(results.statuses) == {"r-1", "r-2"}
