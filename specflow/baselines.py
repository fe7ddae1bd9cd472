"""Baselines: a whole project frozen as canonical bytes with their hash, and checked again later.

The bytes hold every document (evidence tables with the digest of their values), the hash of every file received, and
the status that was computed of every requirement. They hold no measured values: the digests say whether those stored
are still the same. Layout, format 1: ``format``, ``project_revision``, ``as_of``, ``documents`` (noun → payloads),
``evidence`` (table → digest of its values), ``files`` (file → sha256), ``statuses`` (requirement → status).
"""

from __future__ import annotations

import hashlib
import json
import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from specflow.errors import DocumentError
from specflow.exchange import canonical_bytes, payload, read_payload
from specflow.model.base import Document, code_key
from specflow.model.baseline import Baseline
from specflow.model.evidence import EvidenceFile
from specflow.model.nouns import NOUN_BY_NAME, NOUNS
from specflow.model.snapshot import Results, Snapshot, reading_order
from specflow.model.verdict import ActivityResult, GoverningPoint, RequirementStatus

FORMAT = 1

_PARTS: Mapping[str, type] = {
    "project_revision": int,
    "as_of": str,
    "documents": dict,
    "evidence": dict,
    "files": dict,
    "statuses": dict,
}


@dataclass(frozen=True)
class FrozenProject:
    """What the bytes of a baseline hold: a snapshot without arrays, and what was computed then, as plain data."""

    snapshot: Snapshot
    as_of: str
    evidence: Mapping[str, str]
    files: Mapping[str, str]
    statuses: Mapping[str, Mapping[str, Any]]


def freeze(
    snapshot: Snapshot,
    results: Results,
    *,
    id: str,
    created_at: str,
    created_by: str,
    title: str = "",
    gate: str = "",
    note: str = "",
) -> tuple[Baseline, bytes]:
    """Freeze a project with its results; return the baseline document and the bytes to keep beside it.

    The same snapshot and results give the same bytes, whoever freezes them and when. Raises DocumentError when a
    requirement has no status in ``results``.
    """
    content = canonical_bytes(_content(snapshot, results))
    baseline = Baseline(
        id=id,
        title=title,
        gate=gate,
        created_at=created_at,
        created_by=created_by,
        project_revision=snapshot.revision,
        content_sha256=hashlib.sha256(content).hexdigest(),
        size=len(content),
        note=note,
    )
    return baseline, content


def verify(baseline: Baseline, content: bytes) -> tuple[str, ...]:
    """Return what is wrong with the bytes of a baseline, in sentences; nothing when they are those that were frozen."""
    faults = []
    if len(content) != baseline.size:
        faults.append(f"{len(content)} bytes are kept, {baseline.size} were frozen")
    found = hashlib.sha256(content).hexdigest()
    if found != baseline.content_sha256:
        faults.append(f"the hash of the bytes is {found}, frozen was {baseline.content_sha256}")
    try:
        frozen = thaw(content)
    except DocumentError as error:
        return (*faults, f"the bytes cannot be read: {error}")
    if frozen.snapshot.revision != baseline.project_revision:
        faults.append(
            f"the bytes are of project revision {frozen.snapshot.revision}, the baseline of {baseline.project_revision}"
        )
    return tuple(faults)


def thaw(content: bytes) -> FrozenProject:
    """Return the project that the bytes of a baseline hold, to compare it with another.

    Raises DocumentError when they are no baseline, or one of a format newer than this program knows.
    """
    data = _read(content)
    documents: dict[str, dict[str, Document]] = {}
    for noun, payloads in data["documents"].items():
        read = [read_payload(noun, entry) for entry in payloads]
        documents[noun] = {code_key(str(getattr(one, NOUN_BY_NAME[noun].id_field))): one for one in read}
    return FrozenProject(
        Snapshot(data["project_revision"], documents),
        data["as_of"],
        data["evidence"],
        data["files"],
        data["statuses"],
    )


def _read(content: bytes) -> dict[str, Any]:
    try:
        data = json.loads(content)
    except ValueError as error:
        raise DocumentError(f"not the bytes of a baseline ({error})") from None
    if not isinstance(data, dict) or not isinstance(data.get("format"), int):
        raise DocumentError("not the bytes of a baseline")
    if data["format"] > FORMAT:
        raise DocumentError(
            f"a baseline of format {data['format']}; this program reads up to {FORMAT}",
            hint="update specflow",
        )
    wrong = [name for name, kind in _PARTS.items() if not isinstance(data.get(name), kind)]
    if wrong:
        raise DocumentError(f"the bytes of the baseline lack {', '.join(wrong)}")
    unknown = sorted(data["documents"].keys() - NOUN_BY_NAME.keys())
    if unknown or not all(isinstance(group, list) for group in data["documents"].values()):
        raise DocumentError(f"the documents of the baseline cannot be read {', '.join(unknown)}".rstrip())
    return data


def _content(snapshot: Snapshot, results: Results) -> dict[str, Any]:
    documents = {
        noun.name: [payload(snapshot.documents[noun.name][key]) for key in _ordered(snapshot, noun.name)]
        for noun in NOUNS
        if snapshot.documents.get(noun.name)
    }
    return {
        "format": FORMAT,
        "project_revision": snapshot.revision,
        "as_of": results.as_of,
        "documents": documents,
        "evidence": {table.id: table.digest for table in snapshot.tables},
        "files": {file.id: file.sha256 for file in snapshot.all(EvidenceFile)},
        "statuses": _statuses(snapshot, results),
    }


def _ordered(snapshot: Snapshot, noun: str) -> list[str]:
    return sorted(snapshot.documents[noun], key=reading_order)


def _statuses(snapshot: Snapshot, results: Results) -> dict[str, Any]:
    missing = [one.id for one in snapshot.requirements if code_key(one.id) not in results.statuses]
    if missing:
        raise DocumentError(
            f"no status was computed of {', '.join(missing[:5])}" + (" ..." if len(missing) > 5 else ""),
            hint="evaluate the whole project before it is frozen",
        )
    return {one.id: _status(results.of(one.id)) for one in snapshot.requirements}


def _status(status: RequirementStatus) -> dict[str, Any]:
    return {
        "label": status.label.value,
        "verdict": status.verdict.words,
        "compliance": status.compliance.value,
        "close_out": status.close_out.value,
        "close_out_reason": status.close_out_reason,
        "standing": {standing.value: count for standing, count in status.standing.items()},
        "proved": status.k,
        "points": status.n,
        "failing": status.n_failing,
        "missing": status.n_missing,
        "marginal": status.marginal,
        "unit": status.unit,
        "governing": _point(status.governing),
        "smallest_margin": _point(status.smallest_margin),
        "remarks": list(status.remarks),
        "activities": {activity.activity: _activity(activity) for activity in status.activities},
    }


def _activity(result: ActivityResult) -> dict[str, Any]:
    return {
        "state": result.state.value,
        "verdict": result.verdict.words,
        "proved": result.k,
        "points": result.n,
        "failing": result.n_failing,
        "missing": result.n_missing,
        "item": result.shown_item,
        "proved_by_item": {item: points.k for item, points in result.items.items()},
        "governing": _point(result.governing),
        "marginal": result.marginal,
        "why": list(result.why),
    }


def _point(point: GoverningPoint | None) -> dict[str, Any] | None:
    if point is None:
        return None
    record = point.record
    return {
        "point": point.words,
        "verdict": point.verdict.words,
        "margin": _number(point.margin),
        "guarded_margin": _number(point.guarded_margin),
        "unit": point.unit,
        "item": point.item,
        "record": None
        if record is None
        else {"table": record.table, "column": record.column, "row": record.row},
    }


def _number(value: float) -> float | str | None:
    """Return a number that JSON can hold: open ends as words, nothing where there is no number."""
    if math.isnan(value):
        return None
    if math.isinf(value):
        return "inf" if value > 0 else "-inf"
    return float(value)
