"""Published limits as requirements of a block: one requirement a limit, with conditions sets and activities.

Nothing of a row is lost: what a limit, its quantity or its conditions set does not say stays verbatim in the note, and
each row that makes no requirement is a finding that says why.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import PurePath

from specflow.conditions import find_dimension, make_conditions_set, set_words
from specflow.importers.published_dimensions import published_dimensions
from specflow.importers.published_limits import NotTaken, PublishedLimit, PublishedTable
from specflow.importers.published_quantity import PublishedQuantity, published_quantity
from specflow.limits import limit_words
from specflow.limits.tree import varying_names
from specflow.model.base import MAX_CODE_LENGTH, Document, code_key
from specflow.model.block import Block
from specflow.model.conditions import ConditionsSet, Dimension
from specflow.model.draft import Draft
from specflow.model.finding import Finding, Severity
from specflow.model.origin import Origin
from specflow.model.parameter import Parameter
from specflow.model.requirement import Activity, Requirement, Source
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary

#: Rule → what it means. Errors keep the row out; the rest only inform.
PUBLISHED_FINDINGS: dict[str, str] = {
    "published-counts": "How many rows were taken, joined and not taken, and how many conditions are text.",
    "published-no-limit": "A row states a definition, a stimulus or a term; it limits nothing.",
    "published-not-read": "A row is a limit, but it cannot be read.",
    "published-own-parameter": "No known parameter fits a title; one is proposed for the project.",
    "published-no-step": "A range has no step; evidence is asked for at both of its ends.",
    "published-limit-varies": "A limit differs by a condition of which the table requires no values.",
    "published-id-too-long": "The id is too long for a requirement with its activities.",
}


@dataclass
class _Making:
    """What one table gives so far."""

    snapshot: Snapshot
    dictionary: Dictionary
    block: Block
    prefix: str
    file: str
    sha256: str
    parameters: dict[str, Parameter] = field(default_factory=dict)
    sets: dict[tuple[Dimension, ...], ConditionsSet] = field(default_factory=dict)
    requirements: list[Requirement] = field(default_factory=list)
    findings: list[Finding] = field(default_factory=list)
    echoes: dict[str, str] = field(default_factory=dict)
    verbatim_count: int = 0
    dropped_rows: int = 0

    def origin(self, row: int) -> Origin:
        return Origin(file=self.file, sha256=self.sha256, row=row)

    def report(self, rule: str, severity: Severity, message: str, **more: object) -> None:
        self.findings.append(Finding(rule=rule, severity=severity, message=message, **more))  # type: ignore[arg-type]


def published_draft(
    table: PublishedTable,
    snapshot: Snapshot,
    dictionary: Dictionary,
    *,
    block: Block,
    prefix: str = "",
    file: str = "",
    sha256: str = "",
) -> Draft:
    """Make requirements on ``block`` of the limits of a table; ``prefix`` goes before every id.

    Of a requirement that the project has already, what a table cannot say (owner, parents, decision rule ...) stays as
    it is. ``file`` and ``sha256`` say where the rows came from.
    """
    making = _Making(snapshot, dictionary, block, prefix, PurePath(file).name, sha256)
    for limit in table.limits:
        _take(making, limit)
    for left in table.not_taken:
        _leave(making, left)
    making.findings.sort(key=lambda finding: (finding.origin.row or 0) if finding.origin else 0)
    making.findings.insert(0, _counts(making, table))
    documents: list[Document] = [*making.parameters.values(), *making.sets.values(), *making.requirements]
    return Draft(documents=[*documents, *_activities(making)], findings=making.findings, echoes=making.echoes)


def _take(making: _Making, limit: PublishedLimit) -> None:
    code = f"{making.prefix}{limit.id}"
    if len(code) > MAX_CODE_LENGTH - len("CS-"):
        making.dropped_rows += len(limit.rows)
        making.report(
            "published-id-too-long",
            Severity.ERROR,
            f"the id {code[:20]}... is longer than {MAX_CODE_LENGTH - len('CS-')} characters",
            subject=code[:MAX_CODE_LENGTH],
            remedy="shorten the id or the prefix",
            origin=making.origin(limit.rows[0]),
        )
        return
    quantity = published_quantity(limit, making.dictionary, making.parameters)
    _propose(making, limit, quantity, code)
    conditions, verbatim = _conditions(making, limit, quantity, code)
    making.verbatim_count += len(verbatim)
    requirement = Requirement(
        id=code,
        title=limit.parameter_title or quantity.parameter.title,
        source=Source(document=limit.document, issue=limit.version, paragraph=limit.clause),
        tier=making.block.tier,
        block=making.block.id,
        quantity=quantity.identity,
        limit=limit.limit,
        conditions=conditions,
        note=_note(verbatim),
        origin=making.origin(limit.rows[0]),
    )
    _doubt(making, requirement)
    making.requirements.append(_as_known(making, requirement))
    making.echoes[code] = limit_words(limit.limit, quantity.parameter)


def _doubt(making: _Making, requirement: Requirement) -> None:
    """Report a table of limits or a mask that nothing asks to be shown at all its parts."""
    found = next((one for one in making.sets.values() if one.id == requirement.conditions), None)
    required = {dimension.name for dimension in found.dimensions} if found else set()
    for name in sorted(varying_names(requirement.limit.tree)):
        known = find_dimension(name)
        if name in required or (known is not None and known.name in required):
            continue
        making.report(
            "published-limit-varies",
            Severity.INFO,
            f"the limit differs by {name}, of which the table requires no values; evidence at one counts for all",
            subject=requirement.id,
            remedy=f"give the requirement a conditions set with the values of {name} that must be shown",
            origin=requirement.origin,
        )


def _propose(making: _Making, limit: PublishedLimit, quantity: PublishedQuantity, code: str) -> None:
    proposed = quantity.proposed
    if proposed is None or proposed.key in making.parameters:
        return
    making.parameters[proposed.key] = proposed
    making.report(
        "published-own-parameter",
        Severity.WARNING,
        f"{quantity.why}; the project gets a parameter {proposed.key} in {proposed.unit}",
        subject=code,
        remedy="keep it, or load the project's own parameter with this title as an alias first",
        origin=making.origin(limit.rows[0]),
    )


def _conditions(
    making: _Making, limit: PublishedLimit, quantity: PublishedQuantity, code: str
) -> tuple[str | None, tuple[str, ...]]:
    """Return the id of the conditions set (limits of the same conditions share one), and what stays text."""
    open_conditions = {
        name: condition
        for name, condition in limit.conditions.items()
        if condition.verbatim not in quantity.said
    }
    found = published_dimensions(open_conditions)
    left = [*limit.unparsed, *found.verbatim]
    verbatim = tuple(dict.fromkeys(text for text in left if text not in quantity.said))
    if not found.dimensions:
        return None, verbatim
    if found.dimensions not in making.sets:
        making.sets[found.dimensions] = _new_set(
            making, limit, found.dimensions, found.stepless, f"CS-{code}"
        )
    return making.sets[found.dimensions].id, verbatim


def _new_set(
    making: _Making,
    limit: PublishedLimit,
    dimensions: tuple[Dimension, ...],
    stepless: Sequence[str],
    code: str,
) -> ConditionsSet:
    origin = making.origin(limit.rows[0])
    if stepless:
        making.report(
            "published-no-step",
            Severity.INFO,
            f"the table states no step for the range of {', '.join(stepless)}; evidence is asked for at both ends",
            subject=code,
            subject_kind="conditions set",
            remedy="give the set a step in the project's workbook where the whole range must be covered",
            origin=origin,
        )
    source = " ".join(filter(None, (limit.document, limit.version, limit.clause)))
    made = make_conditions_set(code, dimensions, source=source, origin=origin)
    making.echoes[code] = set_words(made)
    return made


def _note(verbatim: Sequence[str]) -> str:
    return f"As published: {'; '.join(verbatim)}" if verbatim else ""


def _as_known(making: _Making, requirement: Requirement) -> Requirement:
    """The requirement with what the table does not say as the project has it."""
    before = making.snapshot.find(Requirement, requirement.id)
    if before is None:
        return requirement
    limit = requirement.limit.model_copy(update={"test_tolerance": before.limit.test_tolerance})
    said = ("title", "source", "tier", "block", "quantity", "conditions", "note", "origin")
    return before.model_copy(update={"limit": limit, **{name: getattr(requirement, name) for name in said}})


def _activities(making: _Making) -> list[Activity]:
    """The default activity of each requirement that nobody has planned for."""
    return [
        Activity(
            id=f"{requirement.id}/A1",
            requirement=requirement.id,
            tier=requirement.tier,
            planned=False,
            origin=requirement.origin,
        )
        for requirement in making.requirements
        if code_key(requirement.id) not in making.snapshot.activities_of
    ]


def _leave(making: _Making, left: NotTaken) -> None:
    making.report(
        "published-not-read" if left.is_limit else "published-no-limit",
        Severity.ERROR if left.is_limit else Severity.INFO,
        f"row {left.row} was not taken: {left.why}",
        subject=left.id or f"row {left.row}",
        subject_kind="row",
        remedy="mend the row and load again" if left.is_limit else "",
        origin=making.origin(left.row),
    )


def _counts(making: _Making, table: PublishedTable) -> Finding:
    joined = sum(len(limit.rows) - 1 for limit in table.limits)
    message = (
        f"{table.row_count} rows: {len(table.limits)} taken as requirements, {joined} joined to another row's, "
        f"{len(table.not_taken)} not taken"
    )
    if making.dropped_rows:
        message += f", {making.dropped_rows} refused for their id"
    kept = making.verbatim_count
    return Finding(
        rule="published-counts",
        severity=Severity.INFO,
        subject=making.file,
        subject_kind="file",
        message=f"{message}; {kept} condition{'s' * (kept != 1)} kept as written in the notes",
        remedy="read the notes: nothing checks what stands there" if kept else "",
        origin=Origin(file=making.file, sha256=making.sha256),
    )
