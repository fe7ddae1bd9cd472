"""Which requirements lack evidence that a law would make of raw tables, and the command that does it."""

from __future__ import annotations

import shlex
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import date

from specflow.derive import LAWS, Law
from specflow.errors import SpecflowError
from specflow.model.base import code_key
from specflow.model.conditions import ConditionsSet, Dimension
from specflow.model.evidence import EvidenceTable, Supersession, ValueColumn, Withdrawal
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import Compliance
from specflow.parameters import Dictionary
from specflow.store import ProjectStore
from specflow.units import format_value
from specflow.workflows.derive import DeriveOptions, preview_in
from specflow.workflows.evaluate_project import evaluate_project


@dataclass(frozen=True, slots=True)
class Proposal:
    """A requirement without full proof, a law and a raw table that would give evidence, and how to say it."""

    requirement: Requirement
    law: Law
    table: EvidenceTable
    why: str
    command: str


def proposals(store: ProjectStore, as_of: date | None = None) -> list[Proposal]:
    """Return what could be derived for requirements whose points are not all proved."""
    evaluation = evaluate_project(store, as_of or date.today())
    snapshot, found = evaluation.snapshot, []
    standing = _standing(snapshot)
    for requirement in snapshot.requirements:
        status = evaluation.results.of(requirement.id)
        if status.compliance is Compliance.NOT_APPLICABLE or status.k >= status.n:
            continue
        for law, table, column in _sources(requirement, standing):
            proposal = _proposal(snapshot, evaluation.dictionary, requirement, law, table, column)
            if proposal is not None:
                found.append(proposal)
    return found


def _standing(snapshot: Snapshot) -> Sequence[EvidenceTable]:
    gone = {code_key(one.earlier) for one in snapshot.all(Supersession) if one.rows is None}
    gone |= {code_key(one.table) for one in snapshot.all(Withdrawal) if one.rows is None}
    return [table for table in snapshot.tables if code_key(table.id) not in gone]


def _sources(
    requirement: Requirement, tables: Sequence[EvidenceTable]
) -> Iterator[tuple[Law, EvidenceTable, ValueColumn]]:
    """Give the laws that make the quantity of a requirement, with each column of its block that they usually read."""
    wanted = requirement.quantity
    for table in tables:
        if code_key(table.block) != code_key(requirement.block):
            continue
        for column in table.values:
            for law in LAWS:
                if _makes(law, column, wanted.parameter, wanted.statistic) and _has_axes(law, table):
                    yield law, table, column


def _makes(law: Law, column: ValueColumn, parameter: str, statistic: str) -> bool:
    read = column.quantity.parameter
    if law.keeps_parameter:
        same = code_key(read) == code_key(parameter) and column.quantity.statistic != statistic
        return same and bool(statistic) and law.statistic == statistic
    return len(law.roles) == 1 and parameter in law.gives and read in law.reads


def _has_axes(law: Law, table: EvidenceTable) -> bool:
    numeric = {one.dimension for one in table.conditions if one.kind == "numeric" and one.column is not None}
    if law.over == "directions":
        return {"theta", "phi"} <= numeric or {"azimuth", "elevation"} <= numeric
    return law.over == "each" or bool(numeric.intersection(law.along))


def _proposal(
    snapshot: Snapshot,
    dictionary: Dictionary,
    requirement: Requirement,
    law: Law,
    table: EvidenceTable,
    column: ValueColumn,
) -> Proposal | None:
    over, guessed = _over(snapshot, requirement, law, table)
    options = DeriveOptions(
        law.name, (table.id,), (column.name,), (over,) if over else (), requirement=requirement.id
    )
    unsaid = [one.name for one in law.settings if one.default is None]
    why = f"{column.quantity.parameter} of {table.id}, {table.rows} rows"
    if not unsaid:
        try:
            preview = preview_in(snapshot, dictionary, options)
        except SpecflowError as error:
            why += f"; as it stands: {error.message}"
        else:
            if preview.is_unchanged:
                return None
            refused = len(preview.derived.refused)
            given = preview.table.rows
            why += f"; gives {given} value{'s' * (given != 1)}"
            why += f", {refused} group{'s' * (refused != 1)} refused" if refused else ""
    if guessed:
        why += "; the requirement states no range, that of the data is shown: state the one that is meant"
    words = ["specflow", "derive", law.name, "--from", table.id, "--value", column.name]
    words += ["--over", over] if over else []
    words += [word for name in unsaid for word in ("--set", f"{name}=...")]
    return Proposal(requirement, law, table, why, shlex.join([*words, "--for", requirement.id]))


def _over(snapshot: Snapshot, requirement: Requirement, law: Law, table: EvidenceTable) -> tuple[str, bool]:
    """Return the range to run over: that of the requirement, or else (and that is told) that of the data."""
    if law.over != "range":
        return "", False
    recorded = [one.dimension for one in table.conditions if one.kind == "numeric" and one.column is not None]
    axis = next(name for name in law.along if name in recorded)
    conditions = snapshot.find(ConditionsSet, requirement.conditions)
    required = conditions.dimension(axis) if conditions is not None else None
    if required is not None and required.span is not None:
        return _span_words(required), False
    columns = snapshot.load_columns([table.id])[table.id].conditions
    values, unit = columns.numeric[axis], columns.units.get(axis, "")
    known = values[values == values]
    if not len(known) or known.min() == known.max():
        return "", False
    return (
        f"{axis} {format_value(float(known.min()))}..{format_value(float(known.max()))} {unit}".rstrip(),
        True,
    )


def _span_words(dimension: Dimension) -> str:
    assert dimension.span is not None
    span = dimension.span
    words = f"{dimension.name} {format_value(span.low)}..{format_value(span.high)} {dimension.unit}".rstrip()
    if dimension.tolerance:
        words += f" ± {format_value(dimension.tolerance)} {dimension.unit}".rstrip()
    return words + (f" step {format_value(span.step)} {dimension.unit}".rstrip() if span.step else "")
