"""Evidence that serves nothing, or not what its sheet says: with the reason, and what would help."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping, Sequence

import numpy as np

from specflow.conditions.match import unstated_conditions
from specflow.conditions.points import Points
from specflow.conditions.words import difference_words, range_words
from specflow.model.base import code_key
from specflow.model.derivation import Derivation
from specflow.model.evidence import EvidenceTable
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import Mismatch
from specflow.parameters.relations import parameters_telling
from specflow.verification.records import Records, SourceColumn
from specflow.verification.workspace import Workspace


def serving_nothing(points: Points, records: Records, serving: np.ndarray) -> tuple[Mismatch, ...]:
    """Return the sources of which no reading serves a required point; ``serving`` are the records that do."""
    if len(records.sources) == 1 and len(serving):
        return ()
    counts = np.bincount(records.source[serving], minlength=len(records.sources))
    idle = [place for place in range(len(records.sources)) if counts[place] == 0]
    return tuple(_idle(points, records, place) for place in idle)


def _idle(points: Points, records: Records, place: int) -> Mismatch:
    source = records.sources[place]
    rows = np.flatnonzero(records.source == place)
    unstated = unstated_conditions(points, records.conditions.take(rows))
    missing = [name for name, lacking in unstated.items() if len(lacking) == len(rows)]
    derived = _derived_over(source.table, missing)
    if derived:
        what, remedy = derived, "derive it over the range that is required, from data with the step required"
    elif missing:
        words = ", ".join(name.replace("_", " ") for name in missing)
        what, remedy = f"does not state the {words}", f"state the {words} for the table in its mapping"
    else:
        what = "no reading lies within the setting tolerance of a required point"
        remedy = "measure at the required conditions, or correct the conditions set"
    return Mismatch(source.table.id, source.column.name, len(rows), what, remedy, "conditions")


def _derived_over(table: EvidenceTable, missing: Sequence[str]) -> str:
    """Say of a derived table over what it was derived, where it lacks just that condition; "" for others."""
    said = [
        f"was derived over {range_words(one.dimension, one.low, one.high, one.unit)} with gaps up to "
        f"{difference_words(one.largest_gap, one.unit)}, which is not what is required"
        for one in table.covers
        if one.dimension in missing
    ]
    return "; ".join(said)


def misattributed(snapshot: Snapshot) -> Mapping[str, list[Mismatch]]:
    """Return, by requirement, the tables whose sheet names it although they hold nothing of its quantity or block."""
    found: dict[str, list[Mismatch]] = defaultdict(list)
    for table in snapshot.tables:
        requirement = snapshot.find(Requirement, table.requirement)
        if requirement is None:
            continue
        what = _contradiction(table, requirement)
        if what:
            remedy = "correct the requirement id in the sheet, or the mapping of the table"
            found[code_key(requirement.id)].append(
                Mismatch(table.id, "", table.rows, what, remedy, "requirement")
            )
    return dict(found)


def _contradiction(table: EvidenceTable, requirement: Requirement) -> str:
    if code_key(table.block) != code_key(requirement.block):
        return f"the sheet names {requirement.id}, which is on {requirement.block}; the table is on {table.block}"
    parameters = {code_key(column.quantity.parameter) for column in table.values}
    if parameters_telling(requirement.quantity.parameter).isdisjoint(parameters):
        return f"the sheet names {requirement.id} ({requirement.quantity.parameter}), which the table does not hold"
    return ""


def unmatched(workspace: Workspace) -> Mapping[str, str]:
    """Return the tables of which no reading serves any requirement, by id, with the reason."""
    asked = {
        (code_key(one.block), parameter)
        for one in workspace.snapshot.requirements
        for parameter in parameters_telling(one.quantity.parameter)
    }
    reasons: dict[str, str] = {}
    read = {code_key(code) for one in workspace.snapshot.all(Derivation) for code in one.inputs}
    for table in workspace.snapshot.tables:
        if (
            table.id in workspace.served or code_key(table.id) in read
        ):  # what was made of it is looked at instead
            continue
        reasons[table.id] = _reason(table, asked, workspace)
    return reasons


def _reason(table: EvidenceTable, asked: set[tuple[str, str]], workspace: Workspace) -> str:
    if table.requirement is not None and workspace.snapshot.find(Requirement, table.requirement) is None:
        return f"the sheet names {table.requirement}, which is not in the project"
    names = {column.quantity.parameter for column in table.values}
    if not any((code_key(table.block), code_key(name)) in asked for name in names):
        return f"no requirement on {table.block} asks for {', '.join(sorted(names))}"
    words = "no reading can be compared at a required point of any requirement; see their mismatches"
    missed = _missed_elsewhere(table, workspace)
    if missed:
        words += f". Some of it would fail {', '.join(missed)}, were it referred to what is required there"
    return words


def _missed_elsewhere(table: EvidenceTable, workspace: Workspace) -> list[str]:
    """Return the requirements that a table fails under another plane, statistic, bandwidth or polarisation.

    A requirement whose plane was changed must not lose sight of a fail that stands under the old one.
    """
    asking = workspace.snapshot.requirements_of_block.get(code_key(table.block), ())
    sources = [SourceColumn(table, column, place) for place, column in enumerate(table.values)]
    return [
        requirement.id
        for requirement in asking
        if any(
            code_key(source.column.quantity.parameter) == code_key(requirement.quantity.parameter)
            and workspace.misses_elsewhere(source, requirement)
            for source in sources
        )
    ]
