"""Check the project: what the rules find, and whether anything of it is grave enough to stop a script."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import date
from typing import Any

from specflow.errors import SpecflowError
from specflow.model.base import code_key
from specflow.model.finding import Finding, Severity
from specflow.model.project import Policy
from specflow.model.report import ReportTable
from specflow.reports.findings import findings_table
from specflow.store import ProjectStore
from specflow.workflows.evaluate_project import evaluate_project
from specflow.workflows.rule_catalogue import codes_of_rules


@dataclass(frozen=True)
class Checked:
    """The findings that were asked for, worst first; ``threshold`` is the severity from which on they count."""

    project: str
    revision: int
    as_of: str
    gate: str
    findings: Sequence[Finding]
    threshold: Severity

    @property
    def grave(self) -> int:
        """How many findings are at the threshold or above."""
        return sum(finding.severity.rank >= self.threshold.rank for finding in self.findings)

    @property
    def totals(self) -> Mapping[str, int]:
        """How many findings there are of each severity, worst first."""
        counts = Counter(finding.severity for finding in self.findings)
        return {severity.value: counts[severity] for severity in sorted(Severity, key=lambda one: -one.rank)}

    @property
    def summary(self) -> str:
        """The totals in a sentence."""
        counts = ", ".join(f"{count} {severity}" for severity, count in self.totals.items())
        at = f"{self.grave} at {self.threshold.value} or above"
        gate = f" for {self.gate}" if self.gate else ""
        return f"{len(self.findings)} findings ({counts}); {at}; judged as of {self.as_of}{gate}"

    @property
    def table(self) -> ReportTable:
        """The findings as a table."""
        return findings_table(self.findings)

    @property
    def data(self) -> dict[str, Any]:
        """The findings with all their parts, for scripts."""
        return {
            "project": self.project,
            "project_revision": self.revision,
            "as_of": self.as_of,
            "gate": self.gate,
            "at_or_above": self.threshold.value,
            "grave": self.grave,
            "totals": dict(self.totals),
            "findings": [finding.model_dump(mode="json") for finding in self.findings],
        }


def check_project(
    store: ProjectStore,
    as_of: date,
    *,
    at_or_above: str = "warning",
    rules: Sequence[str] = (),
    gate: str = "",
) -> Checked:
    """Return what the rules find in a project as of a date, of all rules or of those named.

    With a review ``gate`` they weigh as the policy has it there. SpecflowError for a severity, a rule or a gate that
    there is not.
    """
    threshold = _severity(at_or_above)
    wanted = codes_of_rules(rules)
    evaluation = evaluate_project(store, as_of)
    snapshot = evaluation.snapshot
    named = _gate(gate, snapshot.project.policy) if gate else ""
    findings = [one for one in evaluation.findings_at(named) if not wanted or one.rule in wanted]
    return Checked(snapshot.project.name, snapshot.revision, as_of.isoformat(), named, findings, threshold)


def _gate(text: str, policy: Policy) -> str:
    """Return a review gate as the policy spells it."""
    for known in policy.gates:
        if code_key(known) == code_key(text):
            return known
    known_gates = f"gates: {', '.join(policy.gates)}; " if policy.gates else ""
    raise SpecflowError(
        f"the policy says nothing of a gate {text!r}",
        hint=f"{known_gates}a row 'Severity of RULE at {text}' on the sheet Project says how a rule weighs there",
    )


def _severity(text: str) -> Severity:
    try:
        return Severity(code_key(text))
    except ValueError:
        known = ", ".join(severity.value for severity in Severity)
        raise SpecflowError(f"there is no severity {text!r}", hint=f"severities: {known}") from None
