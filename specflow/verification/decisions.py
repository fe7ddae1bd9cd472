"""What people decided, by the requirement it is about: waivers, splits, approvals, dispositions, nonconformances.

As seen on the day of judgement: what was decided later is not known yet. A waiver decided later is still requested, a
nonconformance closed later is still open; a decision without a date counts.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from datetime import date
from typing import TypeVar

from specflow.model.base import code_key
from specflow.model.budget import Allocation
from specflow.model.decision import Approval, DeclaredSplit, Disposition, Nonconformance, Waiver
from specflow.model.evidence import EvidenceTable
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import Conflict
from specflow.verification.dates import is_after

D = TypeVar("D")

#: The rule that dispositions of conflicting evidence name.
CONFLICT_RULE = "conflicting-evidence"


@dataclass(frozen=True, slots=True)
class Decisions:
    """Decisions by requirement key; dispositions by subject key; ``allocated`` are the children that a
    requirement was handed down to, by its key."""

    waivers: Mapping[str, Sequence[Waiver]]
    splits: Mapping[str, Sequence[DeclaredSplit]]
    approvals: Mapping[str, Sequence[Approval]]
    nonconformances: Mapping[str, Sequence[Nonconformance]]
    dispositions: Mapping[str, Sequence[Disposition]]
    allocated: Mapping[str, Sequence[str]]

    @classmethod
    def of(cls, snapshot: Snapshot, as_of: date) -> Decisions:
        """Collect the decisions of a snapshot that were taken by that day."""
        waivers = (_seen_waiver(one, as_of) for one in snapshot.all(Waiver))
        reports = (_seen_report(one, as_of) for one in snapshot.all(Nonconformance))
        splits = (one for one in snapshot.all(DeclaredSplit) if one.on <= as_of)
        approvals = (one for one in snapshot.all(Approval) if one.on <= as_of)
        dispositions = (one for one in snapshot.all(Disposition) if one.on <= as_of)
        return cls(
            _by((one for one in waivers if one is not None), lambda waiver: waiver.requirement),
            _by(splits, lambda split: split.requirement),
            _by(approvals, lambda approval: approval.requirement),
            _by(reports, lambda report: report.requirement),
            _by(dispositions, lambda disposition: disposition.subject),
            {
                key: [allocation.child for allocation in allocations]
                for key, allocations in _by(snapshot.all(Allocation), lambda one: one.parent).items()
            },
        )

    def latest_approval(self, requirement: str) -> Approval | None:
        """Return the last decision of the board on a requirement; of one day the one that kept it open."""
        approvals = self.approvals.get(code_key(requirement), ())
        return max(approvals, key=lambda one: (one.on, one.decision == "kept open"), default=None)

    def open_nonconformances(self, requirement: str) -> tuple[str, ...]:
        """Return the ids of open nonconformances against a requirement."""
        reports = self.nonconformances.get(code_key(requirement), ())
        return tuple(report.id for report in reports if report.state == "open")

    def settles(self, requirement: str, conflict: Conflict, snapshot: Snapshot, as_of: date) -> bool:
        """Whether somebody disposed of conflicting evidence of a requirement, and the decision stands for this one.

        Of several the last one decided holds, as it does for findings. It settles the conflicts of that day: evidence
        that was accepted later makes a new one.
        """
        decided = [
            disposition
            for disposition in self.dispositions.get(code_key(requirement), ())
            if code_key(disposition.rule) == CONFLICT_RULE
        ]
        last = max(reversed(decided), key=lambda disposition: disposition.on, default=None)
        if last is None or (last.expires_on is not None and last.expires_on < as_of):
            return False
        tables = (snapshot.find(EvidenceTable, one.table) for one in (conflict.first, conflict.second))
        return not any(table is not None and is_after(table.accepted_at, last.on) for table in tables)


def _seen_waiver(waiver: Waiver, as_of: date) -> Waiver | None:
    if waiver.requested_on is not None and waiver.requested_on > as_of:
        return None
    if waiver.decided_on is not None and waiver.decided_on > as_of:
        return waiver.model_copy(update={"state": "requested"})
    return waiver


def _seen_report(report: Nonconformance, as_of: date) -> Nonconformance:
    if report.state == "closed" and report.decided_on is not None and report.decided_on > as_of:
        return report.model_copy(update={"state": "open"})
    return report


def _by(documents: Iterable[D], subject: Callable[[D], str | None]) -> Mapping[str, Sequence[D]]:
    found: dict[str, list[D]] = defaultdict(list)
    for document in documents:
        key = subject(document)
        if key is not None:
            found[code_key(key)].append(document)
    return dict(found)
