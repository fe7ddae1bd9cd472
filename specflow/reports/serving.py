"""Which requirements a table serves: those with a point that one of its records governs."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping

import numpy as np

from specflow.model.base import code_key
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import ActivityResult, PointResults

Served = Mapping[str, Mapping[str, int]]


def requirements_served(snapshot: Snapshot, results: Results) -> Served:
    """Return, by table key, the requirements it serves and how many points its records govern.

    Of several activities and items, the one with the most such points counts.
    """
    served: dict[str, dict[str, int]] = defaultdict(dict)
    for requirement in _judged(snapshot, results):
        for activity in results.of(requirement.id).activities:
            for table, count in _governed(activity).items():
                known = served[code_key(table)]
                known[requirement.id] = max(count, known.get(requirement.id, 0))
    return served


def _judged(snapshot: Snapshot, results: Results) -> list[Requirement]:
    return [one for one in snapshot.requirements if code_key(one.id) in results.statuses]


def _governed(activity: ActivityResult) -> Mapping[str, int]:
    most: dict[str, int] = {}
    for found in activity.items.values():
        for table, count in governed_points(found).items():
            most[table] = max(count, most.get(table, 0))
    return most


def governed_points(found: PointResults) -> Mapping[str, int]:
    """Return how many points the records of each table govern; a table may be listed once for each of its columns."""
    counts = np.bincount(found.table[found.table >= 0], minlength=len(found.tables))
    governed: dict[str, int] = defaultdict(int)
    for table, count in zip(found.tables, counts.tolist(), strict=True):
        if count:
            governed[table] += count
    return governed
