"""The published table of standards_limits.csv, loaded into a project, held against a plain reading of the file."""

from __future__ import annotations

import csv
import re
from collections import Counter
from collections.abc import Iterator
from datetime import date
from pathlib import Path

import pytest

from specflow.errors import DocumentError
from specflow.importers.published_limits import read_published_limits
from specflow.limits import limit_text
from specflow.limits.expression_shape import walk
from specflow.limits.tree import expressions_in
from specflow.model.block import Block
from specflow.model.conditions import ConditionsSet
from specflow.model.expression import Number
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.store import create_project, open_project
from specflow.workflows.evaluate_project import evaluate_project
from specflow.workflows.load_published import preview_published
from specflow.workflows.load_workbook import LoadPreview, accept_load
from tests.builders import a_block, a_project, adding

TABLE = Path(__file__).parents[1] / "data" / "standards_limits.csv"
AS_OF = date(2026, 6, 1)


def project(path: Path, *blocks: Block) -> Path:
    with create_project(path, a_project()) as store:
        if blocks:
            store.apply(adding(*blocks), by="test")
    return path


@pytest.fixture(scope="module")
def loaded(tmp_path_factory: pytest.TempPathFactory) -> Iterator[tuple[Path, LoadPreview, Snapshot]]:
    """Return the project file, the preview that was accepted, and what a new opening of the file finds."""
    path = project(tmp_path_factory.mktemp("published") / "p.specflow", a_block("RADIO"))
    with open_project(path) as store:
        preview = preview_published(store, TABLE)
        accept_load(store, preview, by="test")
    with open_project(path, read_only=True) as store:
        yield path, preview, store.load()


@pytest.fixture(scope="module")
def source() -> list[dict[str, str]]:
    with TABLE.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def numbers(text: str) -> Counter[float]:
    """The unsigned numbers in a text, by value."""
    return Counter(float(found) for found in re.findall(r"(?<![\w.])\d+(?:\.\d+)?", text))


def test_513_rows_are_taken_joined_or_not_taken(loaded: tuple[Path, LoadPreview, Snapshot]) -> None:
    _, preview, snapshot = loaded
    assert "513 rows: 399 taken as requirements, 53 joined to another row's, 61 not taken" in (
        preview.findings[0].message
    )
    assert len(snapshot.requirements) == 399
    left = [one for one in preview.findings if one.rule in ("published-no-limit", "published-not-read")]
    assert len(left) == 61
    assert all(one.origin is not None and one.origin.row and "was not taken: " in one.message for one in left)
    assert not preview.rejected


def test_every_number_of_every_taken_row_is_in_its_stored_limit(
    loaded: tuple[Path, LoadPreview, Snapshot], source: list[dict[str, str]]
) -> None:
    _, preview, snapshot = loaded
    not_taken = {one.origin.row for one in preview.findings if one.subject_kind == "row" and one.origin}
    rows_of = {found.id: found.rows for found in read_published_limits(TABLE).limits}
    assert not_taken.isdisjoint(row for rows in rows_of.values() for row in rows)
    for requirement in snapshot.requirements:
        held = Counter(
            part.value
            for value in expressions_in(requirement.limit.tree)
            for part in walk(value)
            if isinstance(part, Number)
        )
        for row in rows_of[requirement.id]:
            line = source[row - 2]
            assert not numbers(line["value"]) - held, (requirement.id, line["value"], requirement.limit.text)
            if re.fullmatch(r"-\d+(\.\d+)?", line["value"]):
                signed = rf"(?<![\d.]){line['value']}(?![\d.])"
                assert re.search(signed, limit_text(requirement.limit)), requirement.id
            assert requirement.source.document == line["standard"]


def test_every_condition_is_a_dimension_in_the_identity_in_the_limit_or_in_the_note(
    loaded: tuple[Path, LoadPreview, Snapshot], source: list[dict[str, str]]
) -> None:
    _, _, snapshot = loaded
    where: Counter[str] = Counter()
    for found in read_published_limits(TABLE).limits:
        requirement = snapshot.find(Requirement, found.id)
        assert requirement is not None
        conditions = snapshot.find(ConditionsSet, requirement.conditions)
        said = {one.text for one in conditions.dimensions} if conditions else set()
        for row in found.rows:
            for written in filter(None, (part.strip() for part in source[row - 2]["conditions"].split(";"))):
                key, _, value = written.partition("=")
                if written in said:
                    where["dimension"] += 1
                elif written in requirement.note:
                    where["note"] += 1
                elif written in found.in_limit:
                    where["limit"] += 1
                else:
                    assert key in ("metric", "per", "reference_point")
                    assert value.casefold() == requirement.quantity.plane.casefold()
                    where["identity"] += 1
    # The total is what a plain count of the file gives; how it parts is kept here so that a loss is seen.
    taken = {row for found in read_published_limits(TABLE).limits for row in found.rows}
    lines = [line["conditions"] for row, line in enumerate(source, start=2) if row in taken]
    assert where.total() == sum(bool(part.strip()) for line in lines for part in line.split(";"))
    assert where == {"dimension": 877, "note": 582, "limit": 286, "identity": 32}


def test_values_of_dimensions_are_those_of_the_row(
    loaded: tuple[Path, LoadPreview, Snapshot], source: list[dict[str, str]]
) -> None:
    _, _, snapshot = loaded
    checked = 0
    for requirement in snapshot.requirements:
        conditions = snapshot.find(ConditionsSet, requirement.conditions)
        for dimension in conditions.dimensions if conditions else ():
            written = dimension.text.partition("=")[2]
            if dimension.values:
                stated = numbers(re.sub(r"\(.*\)$", "", written)) or Counter([0.0])
                assert Counter(map(abs, dimension.values)) == stated, dimension.text
                checked += 1
            elif dimension.words:
                assert "|".join(dimension.words) == re.sub(r" \(.*\)$", "", written)
                checked += 1
    assert checked > 700


def test_loading_twice_changes_nothing(loaded: tuple[Path, LoadPreview, Snapshot]) -> None:
    path, preview, _ = loaded
    with open_project(path) as store:
        again = preview_published(store, TABLE)
        assert (list(again.changes), again.echoes) == ([], preview.echoes)
        assert accept_load(store, again, by="test") == store.revision


def test_every_requirement_has_a_status(loaded: tuple[Path, LoadPreview, Snapshot]) -> None:
    path, _, snapshot = loaded
    with open_project(path, read_only=True) as store:
        results = evaluate_project(store, AS_OF).results
    statuses = [results.of(requirement.id) for requirement in snapshot.requirements]
    assert len(statuses) == 399
    assert {(status.k, bool(status.label)) for status in statuses} == {(0, True)}
    assert all(status.n >= 1 for status in statuses)


def test_an_edited_value_is_the_only_change(
    loaded: tuple[Path, LoadPreview, Snapshot], tmp_path: Path
) -> None:
    path, _, _ = loaded
    edited = tmp_path / TABLE.name
    text = TABLE.read_text(encoding="utf-8")
    assert "9.2.3,radiated transmit power accuracy (EIRP of declared beam),abs,3.4,dB" in text
    edited.write_text(
        text.replace("declared beam),abs,3.4,dB", "declared beam),abs,3.0,dB"), encoding="utf-8"
    )
    with open_project(path) as store:
        changes = preview_published(store, edited).changes
    assert [(one.id, one.action) for one in changes] == [("BS2O-EIRP-N", "edit")]
    assert "tightened by 0.4 dB" in str([field.meaning for field in changes[0].fields])


def test_the_block_may_be_named_and_ids_prefixed(tmp_path: Path) -> None:
    path = project(tmp_path / "p.specflow", a_block("UT"), a_block("TX", parent="UT"))
    with open_project(path) as store:
        accept_load(store, preview_published(store, TABLE, block="tx", prefix="STD-"), by="test")
        found = store.load().requirements
    assert {one.block for one in found} == {"TX"}
    assert all(one.id.startswith("STD-") for one in found)


@pytest.mark.parametrize(
    ("blocks", "named", "message"),
    [
        ((), "", "no block that the limits could be on"),
        (("A", "B"), "", "several blocks have no parent: A, B"),
        (("A",), "Z", "there is no block Z"),
    ],
)
def test_without_a_clear_block_nothing_is_read(
    tmp_path: Path, blocks: tuple[str, ...], named: str, message: str
) -> None:
    path = project(tmp_path / "p.specflow", *(a_block(code) for code in blocks))
    with open_project(path) as store, pytest.raises(DocumentError, match=message):
        preview_published(store, TABLE, block=named)
