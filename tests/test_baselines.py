"""A baseline: the same project gives the same bytes, and whatever was altered since is noticed."""

from __future__ import annotations

import hashlib
import json
from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.baselines import freeze, thaw, verify
from specflow.changes import diff_snapshots
from specflow.errors import DocumentError
from specflow.exchange import canonical_bytes
from specflow.model.baseline import Baseline
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import ActivityResult, GoverningPoint, PointsState, RecordRef, Verdict
from tests.builders import (
    a_conditions_set,
    a_declared_value,
    a_parameter,
    a_requirement,
    a_snapshot,
    a_status,
    an_evidence_file,
    an_evidence_table,
    at_least,
)

GOVERNING = GoverningPoint(
    point=2,
    words="30 GHz",
    verdict=Verdict.FAIL,
    margin=-0.4,
    guarded_margin=float("nan"),
    unit="dB",
    item="LNA-1",
    record=RecordRef("T-1", "Gain", 2),
)


def a_project_to_freeze() -> Snapshot:
    return a_snapshot(
        a_requirement("R-10"),
        a_requirement("R-2"),
        a_conditions_set(),
        a_parameter("link_gain"),
        some_table(),
        an_evidence_file("F-1", sha256="c" * 64),
    )


def some_table() -> Any:
    return an_evidence_table("T-1", digest="d" * 64)


def results(**fields: Any) -> Results:
    activity = ActivityResult(
        activity="R-10/test",
        state=PointsState.PARTIALLY_VERIFIED,
        verdict=Verdict.FAIL,
        k=2,
        n=3,
        n_failing=1,
        n_missing=0,
        shown_item="LNA-1",
        items={},
        governing=GOVERNING,
        smallest_margin=GOVERNING,
        marginal=False,
        why=("one corner fails",),
    )
    failing = a_status(
        "R-10", k=2, n_failing=1, verdict=Verdict.FAIL, governing=GOVERNING, activities=(activity,)
    )
    return Results("2026-06-01", {"r-10": failing, "r-2": a_status("R-2")} | fields)


def frozen(snapshot: Snapshot, computed: Results, **fields: Any) -> tuple[Baseline, bytes]:
    return freeze(
        snapshot,
        computed,
        **{"id": "BL-1", "created_at": "2026-06-01T12:00:00Z", "created_by": "A. Invented"} | fields,
    )


def test_the_baseline_tells_the_hash_size_and_revision_of_its_bytes() -> None:
    baseline, content = frozen(a_project_to_freeze(), results(), title="CDR", gate="CDR", note="first")
    assert baseline.content_sha256 == hashlib.sha256(content).hexdigest()
    assert (baseline.size, baseline.project_revision) == (len(content), 1)
    assert (baseline.id, baseline.title, baseline.gate, baseline.note) == ("BL-1", "CDR", "CDR", "first")
    assert verify(baseline, content) == ()


def test_the_bytes_are_canonical_and_do_not_depend_on_who_freezes_or_in_which_order_documents_came() -> None:
    snapshot = a_project_to_freeze()
    turned = Snapshot(
        1,
        {
            noun: dict(reversed(list(group.items())))
            for noun, group in reversed(list(snapshot.documents.items()))
        },
    )
    _, content = frozen(snapshot, results())
    _, again = frozen(turned, results(), created_by="B", created_at="2027-01-01T00:00:00Z", id="BL-2")
    assert content == again == canonical_bytes(json.loads(content))


def test_documents_evidence_digests_and_computed_statuses_are_in_the_bytes() -> None:
    _, content = frozen(a_project_to_freeze(), results())
    data = json.loads(content)
    assert [entry["id"] for entry in data["documents"]["requirement"]] == ["R-2", "R-10"]
    assert data["evidence"] == {"T-1": "d" * 64}
    assert data["files"] == {"F-1": "c" * 64}
    assert data["as_of"] == "2026-06-01"
    status = data["statuses"]["R-10"]
    assert (status["verdict"], status["proved"], status["points"], status["failing"]) == ("fail", 2, 3, 1)
    assert status["governing"] == {
        "point": "30 GHz",
        "verdict": "fail",
        "margin": -0.4,
        "guarded_margin": None,
        "unit": "dB",
        "item": "LNA-1",
        "record": {"table": "T-1", "column": "Gain", "row": 2},
    }
    assert status["activities"]["R-10/test"]["state"] == "partially verified"
    assert data["statuses"]["R-2"]["governing"] is None


def test_an_open_margin_is_kept_as_a_word() -> None:
    far = replace(GOVERNING, margin=float("inf"), guarded_margin=float("-inf"), record=None)
    _, content = frozen(
        a_snapshot(a_requirement("R-2")), Results("2026-06-01", {"r-2": a_status("R-2", governing=far)})
    )
    point = json.loads(content)["statuses"]["R-2"]["governing"]
    assert (point["margin"], point["guarded_margin"], point["record"]) == ("inf", "-inf", None)


def test_another_document_or_another_status_gives_other_bytes() -> None:
    snapshot = a_project_to_freeze()
    _, content = frozen(snapshot, results())
    _, other_status = frozen(snapshot, results(**{"r-2": a_status("R-2", n_missing=1)}))
    _, other_document = frozen(a_snapshot(a_requirement("R-10", note="x"), a_requirement("R-2")), results())
    assert len({content, other_status, other_document}) == 3


def test_a_project_is_not_frozen_without_the_status_of_every_requirement() -> None:
    with pytest.raises(DocumentError, match="no status was computed of R-10"):
        frozen(a_project_to_freeze(), Results("2026-06-01", {"r-2": a_status("R-2")}))


def test_thawed_bytes_give_the_documents_back() -> None:
    snapshot = a_project_to_freeze()
    _, content = frozen(snapshot, results())
    project = thaw(content)
    assert project.snapshot.documents == snapshot.documents
    assert project.snapshot.revision == snapshot.revision
    assert project.statuses["R-10"]["label"] == "ready for close-out"
    assert project.evidence == {"T-1": "d" * 64}


def test_two_baselines_are_compared_by_meaning() -> None:
    _, first = frozen(a_project_to_freeze(), results())
    tightened = a_snapshot(a_requirement("R-10", limit=at_least(21), revision=2), a_requirement("R-2"))
    _, second = frozen(tightened, results())
    changes = diff_snapshots(thaw(first).snapshot, thaw(second).snapshot)
    assert "requirement R-10 changed: tightened by 1 dB (20 -> 21 dB)" in [
        change.sentence() for change in changes
    ]


@pytest.mark.parametrize(
    ("alter", "fault"),
    [
        (lambda content: content.replace(b"R-2", b"R-3"), "the hash of the bytes is"),
        (lambda content: content[:-1], "bytes are kept"),
        (lambda content: b"", "not the bytes of a baseline"),
        (lambda content: b"[]", "not the bytes of a baseline"),
        (lambda content: b'{"format": 1}', "lack project_revision, as_of, documents"),
        (lambda content: content.replace(b'"format":1,"project', b'"format":99,"project'), "of format 99"),
        (lambda content: content.replace(b'"documents":{', b'"documents":{"unit":[],'), "cannot be read unit"),
        (lambda content: content.replace(b'"project_revision":1,', b'"project_revision":"1",'), "lack project_rev"),
        (lambda content: content.replace(b'"tier":"block"', b'"tier":"shelf"'), "tier"),
        (lambda content: b"\xff\xfe", "not the bytes of a baseline"),
    ],
)  # fmt: skip
def test_altered_bytes_are_noticed_and_said_what_is_wrong(alter: Any, fault: str) -> None:
    baseline, content = frozen(a_project_to_freeze(), results())
    altered = alter(content)
    assert altered != content
    faults = verify(baseline, altered)
    assert any(fault in one for one in faults), faults


def test_a_baseline_that_tells_of_another_revision_is_noticed() -> None:
    baseline, content = frozen(a_project_to_freeze(), results())
    (fault,) = verify(baseline.model_copy(update={"project_revision": 9}), content)
    assert fault == "the bytes are of project revision 1, the baseline of 9"


@given(st.binary(max_size=200))
def test_any_bytes_are_verified_without_a_traceback(content: bytes) -> None:
    baseline, _ = frozen(a_snapshot(a_requirement("R-2")), Results("2026-06-01", {"r-2": a_status("R-2")}))
    assert verify(baseline, content)


@given(st.lists(st.floats(allow_nan=False, allow_infinity=False), min_size=1, max_size=5))
def test_every_value_comes_back_as_it_was(values: list[float]) -> None:
    declared = [a_declared_value(f"D-{number}", value=value) for number, value in enumerate(values)]
    baseline, content = frozen(a_snapshot(*declared), Results("2026-06-01"))
    assert verify(baseline, content) == ()
    thawed = thaw(content).snapshot.documents["declared_value"]
    assert [thawed[f"d-{number}"].model_dump()["value"] for number in range(len(values))] == values
