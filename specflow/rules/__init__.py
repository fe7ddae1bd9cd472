"""Rules: what is unallocated, unverified, failing, waived, out of date, and what to do about it.

What may live here:

- ``RULES`` the one list of all rules, with the default severity of each; ``run_rules`` runs them
- ``base`` what a rule is and how its docstring explains it; ``facts`` what it looks at; ``words`` phrases they share
- ``running`` severities of the project and dispositions
- every other module: the rules about the noun it is named for, one function a rule

A rule is handed results and calculates nothing. To add one: write the function with its docstring, list it here, and
describe a case that passes and one that fails in ``tests/rules/cases``.
"""

from __future__ import annotations

from specflow.model.finding import Finding, Severity
from specflow.model.snapshot import Results, Snapshot
from specflow.parameters import Dictionary
from specflow.rules import (
    activities,
    blocks,
    conditions,
    evidence,
    flow_down,
    items,
    limits,
    project,
    requirements,
    sources,
    verdicts,
    waivers,
)
from specflow.rules.base import Rule
from specflow.rules.running import run

_INFO, _WARNING, _ERROR = Severity.INFO, Severity.WARNING, Severity.ERROR

RULES: tuple[Rule, ...] = (
    Rule.of(verdicts.failing, "requirement", _ERROR),
    Rule.of(waivers.failing_without_report, "requirement", _WARNING),
    Rule.of(waivers.waiver_exceeded, "requirement", _ERROR),
    Rule.of(waivers.waiver_requested, "waiver", _WARNING),
    Rule.of(waivers.unbounded_waiver, "waiver", _WARNING),
    Rule.of(waivers.idle_waiver, "waiver", _INFO),
    Rule.of(waivers.open_report, "nonconformance", _WARNING),
    Rule.of(waivers.overtaken_decision, "requirement", _WARNING),
    Rule.of(evidence.conflicting_evidence, "requirement", _ERROR),
    Rule.of(verdicts.superseded_fail, "requirement", _ERROR),
    Rule.of(verdicts.reverify, "requirement", _WARNING),
    Rule.of(limits.tbd_left, "requirement", _WARNING),
    Rule.of(limits.tbr_left, "requirement", _WARNING),
    Rule.of(limits.open_value_without_plan, "requirement", _WARNING),
    Rule.of(limits.open_value_overdue, "requirement", _ERROR),
    Rule.of(limits.duplicate_limit, "requirement", _WARNING),
    Rule.of(limits.contradicting_limits, "requirement", _ERROR),
    Rule.of(flow_down.unallocated, "requirement", _WARNING),
    Rule.of(flow_down.orphan, "requirement", _WARNING),
    Rule.of(flow_down.child_failing, "requirement", _WARNING),
    Rule.of(flow_down.child_open, "requirement", _INFO),
    Rule.of(flow_down.outdated_allocation, "allocation", _WARNING),
    Rule.of(flow_down.allocation_differs, "allocation", _WARNING),
    Rule.of(flow_down.allocation_by_hand, "allocation", _INFO),
    Rule.of(flow_down.closure_not_shown, "budget", _WARNING),
    Rule.of(requirements.cannot_be_judged, "requirement", _ERROR),
    Rule.of(requirements.unknown_parameter, "requirement", _ERROR),
    Rule.of(requirements.bandwidth_not_stated, "requirement", _WARNING),
    Rule.of(requirements.unapproved_tailoring, "requirement", _WARNING),
    Rule.of(requirements.undecided_applicability, "requirement", _WARNING),
    Rule.of(conditions.no_conditions, "requirement", _WARNING),
    Rule.of(conditions.idle_exclusion, "conditions_set", _WARNING),
    Rule.of(conditions.unused_conditions, "conditions_set", _INFO),
    Rule.of(activities.not_planned, "requirement", _WARNING),
    Rule.of(activities.outdated_activity, "activity", _INFO),
    Rule.of(requirements.unverified, "requirement", _WARNING),
    Rule.of(requirements.partially_verified, "requirement", _WARNING),
    Rule.of(verdicts.marginal, "requirement", _WARNING),
    Rule.of(verdicts.undecidable, "requirement", _WARNING),
    Rule.of(verdicts.insufficient, "requirement", _WARNING),
    Rule.of(verdicts.inconclusive, "requirement", _WARNING),
    Rule.of(verdicts.no_uncertainty, "requirement", _WARNING),
    Rule.of(verdicts.no_credit, "requirement", _INFO),
    Rule.of(evidence.unit_mismatch, "requirement", _WARNING),
    Rule.of(evidence.plane_mismatch, "requirement", _WARNING),
    Rule.of(evidence.statistic_mismatch, "requirement", _WARNING),
    Rule.of(evidence.bandwidth_mismatch, "requirement", _WARNING),
    Rule.of(evidence.polarisation_mismatch, "requirement", _WARNING),
    Rule.of(evidence.conditions_mismatch, "requirement", _WARNING),
    Rule.of(evidence.wrong_requirement_named, "requirement", _WARNING),
    Rule.of(sources.stated_verdict_differs, "requirement", _WARNING),
    Rule.of(sources.stated_fail_unjudged, "evidence_table", _WARNING),
    Rule.of(sources.stated_limit_differs, "requirement", _WARNING),
    Rule.of(sources.values_without_meaning, "requirement", _WARNING),
    Rule.of(sources.outdated_correction, "evidence_table", _WARNING),
    Rule.of(evidence.unmatched_evidence, "evidence_table", _WARNING),
    Rule.of(evidence.ambiguous_evidence, "requirement", _WARNING),
    Rule.of(evidence.left_out_cells, "evidence_table", _WARNING),
    Rule.of(evidence.provisional_evidence, "evidence_table", _WARNING),
    Rule.of(evidence.outdated_derivation, "evidence_table", _WARNING),
    Rule.of(evidence.withdrawn_evidence, "evidence_table", _WARNING),
    Rule.of(evidence.calibration_lapsed, "evidence_table", _ERROR),
    Rule.of(items.unknown_item, "item", _WARNING),
    Rule.of(items.unnamed_item, "requirement", _WARNING),
    Rule.of(items.item_of_another_block, "requirement", _WARNING),
    Rule.of(blocks.block_without_requirement, "block", _INFO),
    Rule.of(project.unknown_rule_named, "project", _WARNING),
)
RULE_BY_CODE = {rule.code: rule for rule in RULES}


def run_rules(
    snapshot: Snapshot, results: Results, dictionary: Dictionary, *, gate: str = ""
) -> list[Finding]:
    """Return all findings about a snapshot and what was computed from it, worst first; as they weigh at a ``gate``."""
    return run(RULES, snapshot, results, dictionary, gate)


__all__ = ["RULES", "RULE_BY_CODE", "Rule", "run_rules"]
