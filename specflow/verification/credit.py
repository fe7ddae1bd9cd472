"""Credit: which reading may prove a point of one activity, and which outranks which.

Rank at one point of one item, highest first (process rule 5): test on a representative item, test on a less
representative one, analysis with a validated model, other analysis, similarity, estimate. What is proved by a higher
rank is proved: a test serves an analysis activity, an analysis never closes a test activity. A reading without credit
shows progress when it passes; when it fails it stays an open fail unless something of higher rank stands at the point.

Stages: evidence proves activities of its own stage (the default activity, which nobody planned, takes any). A fail at
a later stage keeps its weight; one at an earlier stage counts like one on less representative hardware.

Items: a reading that names none, or one that nobody registered, is taken as of engineering hardware, the default of an
item. Where any one item will do that gives credit if the activity is content with engineering hardware (and a rule
reports it); where several must prove, or named ones, a reading that names no item proves nothing: it may be of the same
specimen as another.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from specflow.model.base import code_key
from specflow.model.block import HardwareType
from specflow.model.evidence import EvidenceTable
from specflow.model.requirement import Activity, Method, Provers, Stage
from specflow.verification.model_range import is_validated
from specflow.verification.records import Records, SourceColumn
from specflow.verification.standing import ACCEPTED, STALE
from specflow.verification.workspace import Workspace

Codes = NDArray[np.int8]
Flags = NDArray[np.bool_]

REPRESENTATIVE, LESS_REPRESENTATIVE, VALIDATED, REASONED, SIMILAR, ESTIMATE = 6, 5, 3, 2, 1, 0

_SERVES: dict[Method, frozenset[Method]] = {
    Method.TEST: frozenset({Method.TEST}),
    Method.DEMONSTRATION: frozenset({Method.DEMONSTRATION, Method.TEST}),
    Method.INSPECTION: frozenset({Method.INSPECTION}),
    Method.REVIEW_OF_DESIGN: frozenset({Method.REVIEW_OF_DESIGN, Method.ANALYSIS, Method.TEST}),
    Method.ANALYSIS: frozenset({Method.ANALYSIS, Method.TEST}),
    Method.SIMILARITY: frozenset({Method.SIMILARITY, Method.ANALYSIS, Method.TEST}),
}
#: Methods that observe a specimen.
OBSERVED = frozenset({Method.TEST, Method.DEMONSTRATION, Method.INSPECTION})
_HARDWARE = {one: place for place, one in enumerate(HardwareType)}
_STAGES = tuple(Stage)


@dataclass(frozen=True, slots=True)
class Credit:
    """For each pair of reading and point: ``rank`` int8, ``counts`` (may prove), ``stale`` (its subject changed).

    ``why`` says what has no credit and for what reason.
    """

    rank: Codes
    counts: Flags
    stale: Flags
    why: tuple[str, ...] = ()

    def take(self, pairs: NDArray[np.intp] | Flags) -> Credit:
        """Return the credit of the pairs chosen."""
        return Credit(self.rank[pairs], self.counts[pairs], self.stale[pairs], self.why)


def is_of_design(source: SourceColumn) -> bool:
    """Whether evidence is about the design and so holds for every item of the block."""
    return is_about_design(source.table)


def is_about_design(table: EvidenceTable) -> bool:
    """Whether a table is about the design: reasoned, not observed on a specimen."""
    return table.method not in OBSERVED


def credit(
    activity: Activity,
    provers: Provers,
    records: Records,
    record: NDArray[np.intp],
    workspace: Workspace,
) -> Credit:
    """Return rank and credit of every pair for one activity; ``record`` (p,) are the readings of the pairs."""
    kinds: list[tuple[int, bool, bool]] = []
    why: dict[str, None] = {}
    named, several = _named(provers, workspace), provers.rule != "any one"
    for source in records.sources:
        reason = _no_credit(activity, source, workspace)
        outdated = _outdated(activity, source.table)
        for item in records.items:
            fit = _is_representative(activity, source, item, workspace)
            own = reason or _item_reason(activity, source, item, named, several, fit, workspace)
            rank = _rank(activity, source, fit, workspace)
            kinds.append((rank, not own and not outdated, bool(outdated)))
            if own or outdated:
                why.update(dict.fromkeys(text for text in (own, outdated) if text))
    return _spread(records, record, kinds, tuple(why))


def _spread(
    records: Records,
    record: NDArray[np.intp],
    kinds: Sequence[tuple[int, bool, bool]],
    why: tuple[str, ...],
) -> Credit:
    """Give every pair what its source and item have; ``kinds`` holds rank, credit, staleness, items fastest."""
    if records.all_accepted and len(set(kinds)) == 1:
        same = _uniform(len(record), *kinds[0])
        return replace(same, why=why) if why else same
    kind = records.item[record]
    if len(records.sources) > 1:
        kind = kind + records.source[record] * len(records.items)
    standing = records.standing[record]
    ranks, counting, outdated = zip(*kinds, strict=True) if kinds else ((), (), ())
    return Credit(
        np.array(ranks, np.int8)[kind],
        np.array(counting, bool)[kind] & (standing == ACCEPTED),
        np.array(outdated, bool)[kind] | (standing == STALE),
        (*why, *records.reasons),
    )


@lru_cache(maxsize=256)
def _uniform(size: int, rank: int, counts: bool, stale: bool) -> Credit:
    """Return the same for every pair; read-only, because many requirements share it."""
    arrays = np.full(size, rank, np.int8), np.full(size, counts), np.full(size, stale)
    for array in arrays:
        array.setflags(write=False)
    return Credit(*arrays)


def _named(provers: Provers, workspace: Workspace) -> frozenset[str]:
    return frozenset(code_key(getattr(workspace.item(name), "id", name)) for name in provers.items)


def _no_credit(activity: Activity, source: SourceColumn, workspace: Workspace) -> str:
    table = source.table
    if table.method not in _SERVES[activity.method]:
        return f"{table.id}: {_articled(table.method)} does not close {_articled(activity.method)}"
    if code_key(table.file) in workspace.datasheets and activity.method is not Method.REVIEW_OF_DESIGN:
        return f"{table.id}: a datasheet is no {activity.method.value} of this item"
    if activity.planned and table.stage is not activity.stage:
        return f"{table.id}: taken at the {table.stage.value} stage, planned is {activity.stage.value}"
    return ""


def _articled(method: Method) -> str:
    return f"{'an' if method.value[0] in 'aeiou' else 'a'} {method.value}"


def _item_reason(
    activity: Activity,
    source: SourceColumn,
    item: str,
    named: frozenset[str],
    several: bool,
    representative: bool,
    workspace: Workspace,
) -> str:
    if is_of_design(source) and not item:
        return ""
    if not item and (named or several):
        return f"{source.table.id}: no item is named in the evidence"
    if named and code_key(item) not in named:
        return f"item {item} is not one of those named to prove it"
    if not representative:
        kind = workspace.hardware_type(item).value
        return f"item {item} is {kind} hardware, credit needs {activity.credit_from.value} or better"
    return ""


def _is_representative(activity: Activity, source: SourceColumn, item: str, workspace: Workspace) -> bool:
    if source.table.method not in OBSERVED:
        return True
    return _HARDWARE[workspace.hardware_type(item)] >= _HARDWARE[activity.credit_from]


def _rank(activity: Activity, source: SourceColumn, representative: bool, workspace: Workspace) -> int:
    table = source.table
    if code_key(table.file) in workspace.datasheets:
        return ESTIMATE
    if table.method in OBSERVED:
        early = activity.planned and _STAGES.index(table.stage) < _STAGES.index(activity.stage)
        return REPRESENTATIVE if representative and not early else LESS_REPRESENTATIVE
    if table.method is Method.SIMILARITY:
        return SIMILAR
    return VALIDATED if is_validated(table.simulation_validated) else REASONED


def _outdated(activity: Activity, table: EvidenceTable) -> str:
    """Say that the procedure the evidence followed is not the one the activity asks for now."""
    if not (activity.procedure and activity.procedure_revision and table.procedure_revision):
        return ""
    if code_key(table.procedure) != code_key(activity.procedure):
        return ""
    if code_key(table.procedure_revision) == code_key(activity.procedure_revision):
        return ""
    return (
        f"{table.id}: followed {table.procedure} revision {table.procedure_revision}, "
        f"now {activity.procedure_revision} is asked for"
    )
