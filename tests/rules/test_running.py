"""Severities of the project, dispositions, and the order of findings."""

from __future__ import annotations

from typing import Any

from specflow.model.finding import Finding, Severity
from specflow.model.snapshot import reading_order
from tests.rules.described import findings_of
from tests.rules.test_cases import BASE

FAILS = {
    "evidence": [
        {
            "table": "T-1",
            "block": "RX",
            "rows": "frequency [GHz] | item | gain [dB]\n17.7 | RX-1 | 19.0\n19.0 | RX-1 | 22.5\n20.2 | RX-1 | 21.5",
        }
    ]
}


def found(rule: str, **sections: Any) -> list[Finding]:
    """The findings of one rule in a project of which one point fails."""
    return [one for one in findings_of(BASE | FAILS | sections) if one.rule == rule]


def disposed(**fields: Any) -> list[Finding]:
    disposition = {"id": "D-1", "rule": "failing", "subject": "R-1", "reason": "the budget holds"} | fields
    return found("failing", dispositions=[disposition])


def policy(**severities: str) -> dict[str, Any]:
    return {"policy": {"severities": {name.replace("_", "-"): word for name, word in severities.items()}}}


def test_a_finding_says_where_what_why_and_what_to_do() -> None:
    (finding,) = found("failing")
    assert finding.severity is Severity.ERROR
    assert (finding.subject, finding.subject_kind) == ("R-1", "requirement")
    assert finding.why == "What was built does not do what was promised."
    assert finding.remedy.startswith("Find the cause")
    assert finding.origin is not None
    assert (finding.origin.file, finding.origin.sheet, finding.origin.cell) == ("T-1.xlsx", "Results", "C2")


def test_a_project_sets_another_severity() -> None:
    assert [one.severity for one in found("failing", project=policy(failing="info"))] == [Severity.INFO]


def test_a_project_switches_a_rule_off_in_any_case_of_its_name() -> None:
    assert found("failing-without-report", project=policy(Failing_Without_Report="off")) == []
    assert found("failing", project=policy(Failing_Without_Report="off")) != []


def test_a_rule_weighs_at_a_gate_as_the_policy_has_it_there() -> None:
    stands = {
        "policy": {
            "severities": {"failing": "warning"},
            "gates": {"CDR": {"Failing": "info", "orphan": "off"}},
        }
    }
    weights = {
        gate: [
            one.severity
            for one in findings_of(BASE | FAILS | {"project": stands}, gate=gate)
            if one.rule == "failing"
        ]
        for gate in ("", "cdr", "PDR")
    }
    assert weights == {"": [Severity.WARNING], "cdr": [Severity.INFO], "PDR": [Severity.WARNING]}


def test_a_severity_that_is_none_changes_nothing() -> None:
    assert [one.severity for one in found("failing", project=policy(failing="fatal"))] == [Severity.ERROR]


def test_a_disposition_turns_the_finding_into_a_note_that_says_so() -> None:
    (finding,) = disposed(subject="r-1", rule="Failing")
    assert finding.severity is Severity.INFO
    assert "disposed of by A. Invented on 2026-05-20 (D-1: the budget holds)" in finding.message
    assert "1 of 3 points fail" in finding.message


def test_a_disposition_that_ran_out_is_mentioned_and_does_not_help() -> None:
    (finding,) = disposed(expires_on="2026-05-31")
    assert finding.severity is Severity.ERROR
    assert "(the disposition D-1 ran out on 2026-05-31)" in finding.message


def test_a_disposition_holds_on_its_last_day() -> None:
    assert [one.severity for one in disposed(expires_on="2026-06-01")] == [Severity.INFO]


def test_a_disposition_of_a_later_day_does_not_count_yet() -> None:
    assert [one.severity for one in disposed(on="2026-06-02")] == [Severity.ERROR]


def test_a_disposition_is_of_one_rule_and_one_subject() -> None:
    assert [one.severity for one in disposed(subject="R-2")] == [Severity.ERROR]
    assert [one.severity for one in disposed(rule="marginal")] == [Severity.ERROR]


def test_findings_stand_worst_first_then_by_subject_as_people_count() -> None:
    requirements = [
        {
            "id": f"R-{number}",
            "block": "RX",
            "parameter": "gain",
            "limit": f">= {number + 20} dB",
            "conditions": "CS",
        }
        for number in (10, 1, 2)
    ]
    findings = findings_of(BASE | FAILS | {"requirements": requirements})
    ranks = [one.severity.rank for one in findings]
    assert ranks == sorted(ranks, reverse=True)
    errors = [one.subject for one in findings if one.rule == "failing"]
    assert errors == ["R-1", "R-2", "R-10"]
    assert errors == sorted(errors, key=reading_order)


def test_the_same_project_gives_the_same_findings() -> None:
    assert findings_of(BASE | FAILS) == findings_of(BASE | FAILS)
