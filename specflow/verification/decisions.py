"""What people decided, by the requirement it is about: waivers, splits, approvals, dispositions, nonconformances."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from datetime import date
from typing import TypeVar

from specflow.model.base import code_key
from specflow.model.budget import Allocation
from specflow.model.decision import Approval, DeclaredSplit, Disposition, Nonconformance, Waiver
from specflow.model.snapshot import Snapshot

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
    def of(cls, snapshot: Snapshot) -> Decisions:
        """Collect the decisions of a snapshot."""
        return cls(
            _by(snapshot.all(Waiver), lambda waiver: waiver.requirement),
            _by(snapshot.all(DeclaredSplit), lambda split: split.requirement),
            _by(snapshot.all(Approval), lambda approval: approval.requirement),
            _by(snapshot.all(Nonconformance), lambda report: report.requirement),
            _by(snapshot.all(Disposition), lambda disposition: disposition.subject),
            {
                key: [allocation.child for allocation in allocations]
                for key, allocations in _by(snapshot.all(Allocation), lambda one: one.parent).items()
            },
        )

    def latest_approval(self, requirement: str) -> Approval | None:
        """Return the last decision of the board on a requirement."""
        approvals = self.approvals.get(code_key(requirement), ())
        return max(approvals, key=lambda approval: approval.on, default=None)

    def open_nonconformances(self, requirement: str) -> tuple[str, ...]:
        """Return the ids of open nonconformances against a requirement."""
        reports = self.nonconformances.get(code_key(requirement), ())
        return tuple(report.id for report in reports if report.state == "open")

    def conflict_is_settled(self, requirement: str, as_of: date) -> bool:
        """Whether somebody disposed of conflicting evidence of a requirement by that day, and the decision stands.

        Of several the last one decided holds, as it does for findings.
        """
        decided = [
            disposition
            for disposition in self.dispositions.get(code_key(requirement), ())
            if code_key(disposition.rule) == CONFLICT_RULE and disposition.on <= as_of
        ]
        last = max(reversed(decided), key=lambda disposition: disposition.on, default=None)
        return last is not None and (last.expires_on is None or last.expires_on >= as_of)


def _by(documents: Iterable[D], subject: Callable[[D], str | None]) -> Mapping[str, Sequence[D]]:
    found: dict[str, list[D]] = defaultdict(list)
    for document in documents:
        key = subject(document)
        if key is not None:
            found[code_key(key)].append(document)
    return dict(found)
