"""The facts that rules look at: the snapshot, the results computed from it, and look-ups that several rules share."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from datetime import date
from functools import cached_property

from specflow.conditions import Points, compile_points, point_words
from specflow.errors import ConditionsError
from specflow.limits.tree import undefined_in
from specflow.model.base import code_key
from specflow.model.conditions import ConditionsSet
from specflow.model.decision import Nonconformance, Waiver
from specflow.model.evidence import (
    SOURCE_COLUMN,
    EvidenceColumns,
    EvidenceFile,
    EvidenceTable,
    Supersession,
    Withdrawal,
)
from specflow.model.limit import LimitState
from specflow.model.origin import Origin, column_number
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import (
    ActivityResult,
    Compliance,
    PointResults,
    RecordRef,
    RequirementStatus,
    Verdict,
)
from specflow.parameters import Dictionary

Judged = tuple[Requirement, RequirementStatus]

#: Governing verdicts that are a fail.
FAILS = (Verdict.FAIL, Verdict.CONDITIONAL_FAIL)


@dataclass(frozen=True)
class Facts:
    """Everything a rule may look at. ``codes`` are the codes of all rules."""

    snapshot: Snapshot
    results: Results
    dictionary: Dictionary
    codes: frozenset[str] = frozenset()
    _columns: dict[str, EvidenceColumns] = field(default_factory=dict)

    @cached_property
    def as_of(self) -> date:
        """The date of judgement."""
        return date.fromisoformat(self.results.as_of)

    @cached_property
    def replaced_tables(self) -> frozenset[str]:
        """Keys of the tables that were superseded or withdrawn as a whole."""
        superseded = {code_key(one.earlier) for one in self.snapshot.all(Supersession) if one.rows is None}
        return frozenset(
            superseded | {code_key(one.table) for one in self.snapshot.all(Withdrawal) if one.rows is None}
        )

    @cached_property
    def judged(self) -> Sequence[Judged]:
        """Requirements that apply, with their status."""
        known = self.results.statuses
        pairs = [
            (one, known[code_key(one.id)]) for one in self.snapshot.requirements if code_key(one.id) in known
        ]
        return [pair for pair in pairs if pair[1].compliance is not Compliance.NOT_APPLICABLE]

    @cached_property
    def defined(self) -> Sequence[Judged]:
        """Requirements that apply, have a number, and are proved by evidence of their own."""
        return [
            (requirement, status)
            for requirement, status in self.judged
            if not is_undefined(requirement) and not requirement.met_by_lower_level
        ]

    def status(self, requirement: Requirement) -> RequirementStatus | None:
        """Return the status of a requirement, None where it was not computed."""
        return self.results.statuses.get(code_key(requirement.id))

    def is_planned(self, requirement: Requirement) -> bool:
        """Whether anybody planned a verification of it."""
        return any(one.planned for one in self.snapshot.activities_of.get(code_key(requirement.id), ()))

    def children(self, requirement: Requirement) -> Sequence[Requirement]:
        """Return the requirements that name this one as a parent."""
        return self.snapshot.children_of.get(code_key(requirement.id), ())

    @cached_property
    def waivers(self) -> Mapping[str, Sequence[Waiver]]:
        """Waivers by requirement key."""
        found: dict[str, list[Waiver]] = defaultdict(list)
        for waiver in self.snapshot.all(Waiver):
            found[code_key(waiver.requirement)].append(waiver)
        return dict(found)

    @cached_property
    def reports(self) -> Mapping[str, Sequence[Nonconformance]]:
        """Nonconformances by requirement key."""
        found: dict[str, list[Nonconformance]] = defaultdict(list)
        for report in self.snapshot.all(Nonconformance):
            if report.requirement is not None:
                found[code_key(report.requirement)].append(report)
        return dict(found)

    def points(self, requirement: Requirement) -> Points | None:
        """Return the required points; None without a conditions set, or where it cannot be expanded."""
        conditions = self.snapshot.find(ConditionsSet, requirement.conditions)
        if conditions is None:
            return None
        try:
            return compile_points(conditions)
        except ConditionsError:
            return None

    def point(self, requirement: Requirement, number: int) -> str:
        """Return a required point in words; "" where the requirement has no conditions."""
        points = self.points(requirement)
        return "" if points is None or not number < points.size else point_words(points, number)

    def named_items(self, requirement: Requirement) -> list[str]:
        """Return the ids of the items that must prove a requirement; a name that nobody registered as it is."""
        known = self.snapshot.items_by_name
        return [
            item.id if (item := known.get(code_key(name))) else name for name in requirement.provers.items
        ]

    @cached_property
    def serving(self) -> frozenset[tuple[str, str]]:
        """Tables and columns (keys) of which a reading governs a point of any requirement."""
        found: set[tuple[str, str]] = set()
        for _, results in self.all_items():
            pairs = set(zip(results.table.tolist(), results.column.tolist(), strict=True))
            found.update(
                (code_key(table.id), code_key(table.values[column].name))
                for place, column in pairs
                if place >= 0 and (table := self.table(results.tables[place])) is not None
            )
        return frozenset(found)

    def all_items(self) -> Iterator[tuple[RequirementStatus, PointResults]]:
        """Yield every requirement's status with the points of every item."""
        for status in self.results.statuses.values():
            for activity in status.activities:
                for results in activity.items.values():
                    yield status, results

    def table(self, table: str) -> EvidenceTable | None:
        """Return an evidence table."""
        return self.snapshot.find(EvidenceTable, table)

    def governing(self, results: PointResults, point: int) -> RecordRef | None:
        """Return the record that governs a point."""
        place = int(results.table[point])
        table = self.table(results.tables[place]) if place >= 0 else None
        if table is None:
            return None
        return RecordRef(table.id, table.values[int(results.column[point])].name, int(results.row[point]))

    def columns(self, table: str) -> EvidenceColumns:
        """Return the arrays of a table, fetched once."""
        key = code_key(table)
        if key not in self._columns:
            self._columns[key] = next(iter(self.snapshot.load_columns([table]).values()))
        return self._columns[key]

    def origin(self, record: RecordRef | None) -> Origin | None:
        """Return the cell of a record."""
        table = self.table(record.table) if record is not None else None
        if record is None or table is None:
            return None
        columns = self.columns(record.table)
        value = next((one for one in table.values if one.name == record.column), None)
        column = value.column if value else None
        row = int(columns.source_rows[record.row]) + (value.lines_below if value else 0)
        if SOURCE_COLUMN in columns.extra:  # values of several columns were stacked
            column = column_number(columns.extra[SOURCE_COLUMN].word(record.row))
        if column is not None:
            row, column = table.cell(row, column)
        return self.place(table).model_copy(update={"row": row, "column": column})

    def place(self, table: EvidenceTable) -> Origin:
        """Return the file and sheet of a table."""
        file = self.snapshot.find(EvidenceFile, table.file)
        name, sha256 = (file.name, file.sha256) if file is not None else (table.file, "")
        return Origin(file=name, sha256=sha256, sheet=table.sheet)


def is_undefined(requirement: Requirement) -> bool:
    """Whether the limit has no number yet, or a part of it has none."""
    return requirement.limit.state is LimitState.TBD or undefined_in(requirement.limit.tree)


def has_no_evidence(status: RequirementStatus) -> bool:
    """Whether nothing was ever recorded at any required point; one that cannot be judged at all is another matter."""
    return bool(status.activities) and not status.standing


def shown(activity: ActivityResult) -> PointResults | None:
    """Return the points of the item that is shown for an activity."""
    return activity.items.get(activity.shown_item)
