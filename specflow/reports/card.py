"""The card of one requirement: limit in words, k of n proved, margins, margin bar, proof grids, trail, findings."""

from __future__ import annotations

from collections.abc import Sequence

from specflow.conditions import set_words
from specflow.limits import limit_words
from specflow.model.base import code_key
from specflow.model.budget_outcome import BudgetOutcome
from specflow.model.card import Card, PointState
from specflow.model.conditions import ConditionsSet
from specflow.model.finding import Finding
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import GoverningPoint, RequirementStatus
from specflow.parameters import Dictionary
from specflow.reports.about import EXPOSURE_CAUTION, is_radiated
from specflow.reports.budget import titles
from specflow.reports.figures import DASH, label_tone, margin, share
from specflow.reports.margin_bar import margin_bar
from specflow.reports.matrix import quantity_words
from specflow.reports.origins import OriginFinder
from specflow.reports.predicted import predicted_facts, predicted_pictures
from specflow.reports.proof_grid import proof_grids
from specflow.reports.trace import requirement_trail
from specflow.reports.trace_pictures import trace_pictures

POINTS_IN_TRAIL = 6  # the proof grid has every point; the trail shows those that decide


def requirement_card(
    requirement: Requirement,
    snapshot: Snapshot,
    results: Results,
    findings: Sequence[Finding] | None,
    dictionary: Dictionary,
    outcomes: Sequence[BudgetOutcome] = (),
) -> Card:
    """Return the card of one requirement; only its own evidence is read.

    ``findings`` are those of the whole project, None when they are not known yet. ``outcomes`` are those of
    the budgets that serve it.
    """
    status = results.of(requirement.id)
    finder = OriginFinder(snapshot)
    return Card(
        id=requirement.id,
        title=requirement.title,
        label=status.label.value,
        tone=label_tone(status.label),
        limit_words=limit_words(requirement.limit),
        limit_text=requirement.limit.text,
        proved=proved_words(status),
        k=status.k,
        n=status.n,
        facts=(
            *predicted_facts(requirement, outcomes),
            *_facts(requirement, status, snapshot, dictionary, finder),
        ),
        bar=margin_bar(requirement, status),
        grids=proof_grids(requirement, status, snapshot, finder),
        trail=requirement_trail(requirement, snapshot, results, finder=finder, most_points=POINTS_IN_TRAIL),
        remarks=status.remarks,
        findings=None if findings is None else findings_about(findings, requirement.id),
        cautions=(EXPOSURE_CAUTION,) if is_radiated(requirement, dictionary) else (),
        pictures=predicted_pictures(requirement, outcomes, titles(dictionary)),
        traces=trace_pictures(requirement, status, snapshot, finder),
    )


def proved_words(status: RequirementStatus) -> str:
    """Return how far a requirement is proved; what fails, has no evidence or is undecided is counted apart."""
    if status.n == 0:
        return "no required points"
    counts = (
        (status.n_failing, "failing"),
        (status.n_without_evidence, PointState.WITHOUT_EVIDENCE.value),
        (status.n_undecided, PointState.UNDECIDED.value),
    )
    said = [f"{count} {word}" for count, word in counts if count]
    return ", ".join([f"{share(status.k, status.n)} proved", *said])


def findings_about(findings: Sequence[Finding], code: str) -> tuple[Finding, ...]:
    """Return the findings whose subject is this document."""
    key = code_key(code)
    return tuple(finding for finding in findings if code_key(finding.subject) == key)


def _facts(
    requirement: Requirement,
    status: RequirementStatus,
    snapshot: Snapshot,
    dictionary: Dictionary,
    finder: OriginFinder,
) -> tuple[tuple[str, str], ...]:
    conditions = snapshot.find(ConditionsSet, requirement.conditions)
    source = requirement.source
    document = " ".join(part for part in (source.document, source.issue, source.paragraph) if part)
    return (
        ("Quantity", quantity_words(requirement, dictionary)),
        ("Conditions", set_words(conditions) if conditions else requirement.conditions or "none stated"),
        ("Block", requirement.block),
        ("Compliance", status.compliance.value),
        ("Close-out", f"{status.close_out.value}: {status.close_out_reason}"),
        ("Worst verdict", status.verdict.words),
        *_margins(status, finder),
        ("Evidence", _standing_words(status)),
        ("Source", document or DASH),
        ("Owner", requirement.owner or "nobody"),
    )


def _margins(status: RequirementStatus, finder: OriginFinder) -> tuple[tuple[str, str], ...]:
    governing, smallest = status.governing, status.smallest_margin
    facts: list[tuple[str, str]] = []
    if governing is not None:
        value = finder.recorded(governing.record).text
        facts.append(("Governed at", f"{_where(governing)}: {value}"))
        facts.append(("Margin", margin(governing.margin, governing.unit).text))
        facts.append(("Guarded margin", margin(governing.guarded_margin, governing.unit).text))
    if smallest is not None:
        facts.append(
            ("Smallest margin", f"{margin(smallest.margin, smallest.unit).text} at {_where(smallest)}")
        )
    return tuple(facts)


def _where(point: GoverningPoint) -> str:
    return ", ".join(part for part in (point.words, f"item {point.item}" if point.item else "") if part)


def _standing_words(status: RequirementStatus) -> str:
    parts = [f"{count} {standing.value}" for standing, count in status.standing.items() if count]
    return f"records: {', '.join(parts)}" if parts else "none"
