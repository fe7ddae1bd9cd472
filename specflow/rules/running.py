"""Running the rules: each finding gets the severity that the project wants; what people disposed of is only noted."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from datetime import date

from specflow.model.base import code_key
from specflow.model.decision import Disposition
from specflow.model.finding import Finding, Severity
from specflow.model.snapshot import Results, Snapshot, reading_order
from specflow.parameters import Dictionary
from specflow.rules.base import Rule
from specflow.rules.facts import Facts
from specflow.rules.project import OFF

Dispositions = Mapping[tuple[str, str], Disposition]


def run(
    rules: Sequence[Rule], snapshot: Snapshot, results: Results, dictionary: Dictionary, gate: str = ""
) -> list[Finding]:
    """Return what the rules find, worst first, then in the order of subjects, then as the rules stand.

    Each weighs as the policy has it, at a review ``gate`` where one is named.
    """
    facts = Facts(snapshot, results, dictionary, frozenset(rule.code for rule in rules))
    settled = _settled(snapshot.all(Disposition), facts.as_of)
    wanted = snapshot.project.policy.severities_at(gate)
    found: list[Finding] = []
    for rule in rules:
        severity = _severity(rule, wanted)
        if severity is not None:
            found.extend(_told(rule, severity, facts, settled))
    return sorted(found, key=lambda one: (-one.severity.rank, reading_order(code_key(one.subject))))


def _severity(rule: Rule, wanted: Mapping[str, str]) -> Severity | None:
    """Return the severity of a rule here; None when it is off. A word that is no severity changes nothing."""
    word = wanted.get(rule.code, "")
    if word == OFF:
        return None
    return Severity(word) if word in set(Severity) else rule.description.severity


def _told(rule: Rule, severity: Severity, facts: Facts, settled: Dispositions) -> Iterator[Finding]:
    for found in rule.check(facts):
        finding = rule.finding(found, severity)
        disposition = settled.get((rule.code, code_key(found.subject)))
        yield finding if disposition is None else _disposed(finding, disposition, facts.as_of)


def _settled(dispositions: Iterable[Disposition], as_of: date) -> Dispositions:
    """Return the disposition that stands for each rule and subject; the last one decided where there are several."""
    ordered = sorted(dispositions, key=lambda one: one.on)
    return {(code_key(one.rule), code_key(one.subject)): one for one in ordered if one.on <= as_of}


def _disposed(finding: Finding, disposition: Disposition, as_of: date) -> Finding:
    """Return the finding as a note that says who disposed of it; one that has run out only says so."""
    until = disposition.expires_on
    if until is not None and until < as_of:
        message = f"{finding.message} (the disposition {disposition.id} ran out on {until})"
        return finding.model_copy(update={"message": message})
    end = f" until {until}" if until is not None else ""
    said = (
        f"disposed of by {disposition.by} on {disposition.on}{end} ({disposition.id}: {disposition.reason})"
    )
    return finding.model_copy(
        update={
            "severity": Severity.INFO,
            "message": f"{said}: {finding.message}",
            "remedy": "nothing, as long as the reason holds",
        }
    )
