"""What a difference between documents becomes: a change that says what it means."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import date
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.changes import diff, diff_snapshots, due_revision
from specflow.errors import DocumentError
from specflow.exchange import read_text
from specflow.limits import parse_limit
from specflow.model.base import Document, code_key
from specflow.model.block import Plane, Tier
from specflow.model.change import Change
from specflow.model.conditions import Combination
from specflow.model.declared import UncertaintyEntry
from specflow.model.nouns import NOUN_BY_DOCUMENT, NOUN_BY_NAME
from specflow.model.origin import Origin
from specflow.model.requirement import Obligation, OpenValue, Requirement, Source
from specflow.model.snapshot import Snapshot
from tests.builders import (
    a_block,
    a_budget,
    a_budget_line,
    a_conditions_set,
    a_declared_value,
    a_dimension,
    a_parameter,
    a_project,
    a_quantity,
    a_requirement,
    a_snapshot,
    a_waiver,
    an_activity,
    an_evidence_file,
    an_evidence_table,
    an_item,
    at_least,
    at_most,
)


def an_uncertainty(**fields: Any) -> UncertaintyEntry:
    line = {"id": "U-1", "set_up": "Range A", "parameter": "eirp", "standard_uncertainty": 0.4, "unit": "dB"}
    return UncertaintyEntry(**(line | fields))


def documents(*given: Document) -> Mapping[str, Mapping[str, Document]]:
    return a_snapshot(*given).documents


def changed(document: Document, **fields: Any) -> Document:
    return type(document).model_validate(document.model_dump() | fields)


def only_change(before: Document, after: Document) -> Change:
    (change,) = diff(documents(before), [after])
    return change


def meaning(before: Document, **fields: Any) -> str:
    (field,) = only_change(before, changed(before, **fields)).fields
    return field.meaning


def revision_after(change: Change) -> int:
    assert change.after is not None
    revision: int = read_text(change.noun, change.after).model_dump()["revision"]
    return revision


def applied(
    before: Mapping[str, Mapping[str, Document]], changes: Sequence[Change]
) -> dict[str, dict[str, Document]]:
    """Do what accepting the changes does, on a copy; refuse a change that was made from something else."""
    result = {noun: dict(group) for noun, group in before.items()}
    for change in changes:
        group = result.setdefault(change.noun, {})
        known = group.get(code_key(change.id))
        if change.action == "add":
            assert known is None
        else:
            assert change.before is not None and read_text(change.noun, change.before) == known
        if change.after is None:
            del group[code_key(change.id)]
        else:
            group[code_key(change.id)] = read_text(change.noun, change.after)
    return {noun: group for noun, group in result.items() if group}


def test_a_new_document_is_added_and_an_equal_one_is_no_change() -> None:
    known = a_requirement("R-1")
    new = a_requirement("R-2")
    (change,) = diff(documents(known), [known, new])
    assert (change.noun, change.id, change.action, change.base_revision) == (
        "requirement",
        "R-2",
        "add",
        None,
    )
    assert change.before is None and change.after is not None
    assert read_text("requirement", change.after) == new


def test_ids_and_links_are_compared_without_case_and_keep_the_spelling_that_is_stored() -> None:
    known = a_requirement("R-1", parents=("SYS-1",), note="old")
    assert diff(documents(known), [changed(known, id="r-1", parents=("sys-1",), block="lna")]) == []
    change = only_change(known, changed(known, id="r-1", parents=("sys-1",), note="new"))
    assert change.id == "R-1"
    assert change.after is not None
    after = read_text("requirement", change.after)
    assert isinstance(after, Requirement)
    assert (after.id, after.parents, after.note) == ("R-1", ("SYS-1",), "new")


def test_a_quantity_in_another_case_is_the_same_quantity() -> None:
    known = a_requirement(quantity=a_quantity("gain", plane="Port 1"))
    assert diff(documents(known), [changed(known, quantity=a_quantity("GAIN", plane="port 1"))]) == []


def test_revision_and_origin_are_no_difference_but_the_new_origin_comes_with_a_change() -> None:
    place = Origin(file="requirements.xlsx", sheet="Requirements", row=7)
    known = a_requirement(revision=4)
    assert diff(documents(known), [changed(known, revision=1, origin=place)]) == []
    change = only_change(known, changed(known, revision=1, origin=place, note="seen"))
    assert [field.field for field in change.fields] == ["note"]
    assert change.after is not None
    after = read_text("requirement", change.after)
    assert isinstance(after, Requirement) and after.origin == place
    kept = only_change(changed(known, origin=place), changed(known, note="seen"))
    assert kept.after is not None and "requirements.xlsx" in kept.after


def test_a_change_of_meaning_bumps_the_revision_and_a_note_or_owner_does_not() -> None:
    known = a_requirement(revision=4)
    assert revision_after(only_change(known, changed(known, limit=at_least(21)))) == 5
    assert revision_after(only_change(known, changed(known, conditions="OTHER"))) == 5
    for quiet in (
        {"note": "x"},
        {"owner": "A. Invented"},
        {"title": "x"},
        {"open_value": OpenValue(owner="B")},
    ):
        change = only_change(known, changed(known, **quiet))
        assert (change.base_revision, revision_after(change)) == (4, 4), quiet


def test_a_limit_says_by_how_much_it_was_tightened_or_relaxed() -> None:
    known = a_requirement(limit=parse_limit(">= 45 dBm"))
    change = only_change(known, changed(known, limit=parse_limit(">= 45.5 dBm")))
    (field,) = change.fields
    assert (field.field, field.before, field.after) == ("limit", ">= 45 dBm", ">= 45.5 dBm")
    assert field.meaning == "tightened by 0.5 dB (45 -> 45.5 dBm)"
    assert "relaxed by 1 dB" in meaning(known, limit=parse_limit(">= 44 dBm"))
    assert change.sentence() == "requirement R-1 changed: tightened by 0.5 dB (45 -> 45.5 dBm)"


def test_a_limit_that_is_only_written_otherwise_keeps_its_revision() -> None:
    known = a_requirement(limit=parse_limit(">= 45 dBm"), revision=2)
    change = only_change(known, changed(known, limit=parse_limit("45 dBm min")))
    assert change.fields[0].meaning == "limit written otherwise, the same in meaning"
    assert revision_after(change) == 2


def test_a_conditions_set_says_which_points_come_and_go() -> None:
    known = a_conditions_set("CS", a_dimension(values=(27.5, 30.0)))
    more = a_conditions_set("CS", a_dimension(values=(27.5, 28.75, 30.0)))
    change = only_change(known, more)
    (field,) = change.fields
    assert "28.75 GHz" in field.meaning and "1 more point" in field.meaning
    assert revision_after(change) == 2


def test_values_and_combination_of_a_conditions_set_are_told_once() -> None:
    known = a_conditions_set("CS", a_dimension(values=(27.5, 28.75, 30.0)))
    other = a_conditions_set(
        "CS", a_dimension(values=(27.5, 28.75, 30.0, 31.0)), combination=Combination.CORNERS
    )
    (field,) = only_change(known, other).fields
    assert field.field == "dimensions"
    assert field.meaning.count("corners") == 1
    assert "corners" in field.after and "all combinations" in field.before


def test_a_conditions_set_typed_otherwise_keeps_its_revision() -> None:
    known = a_conditions_set("CS", a_dimension(text="27.5, 28.75, 30 GHz ± 10 MHz"))
    change = only_change(
        known, a_conditions_set("CS", a_dimension(text="27.5; 28.75; 30 GHz, tolerance 10 MHz"))
    )
    assert change.fields[0].meaning == "conditions written otherwise, the same in meaning"
    assert revision_after(change) == 1


@pytest.mark.parametrize(
    ("before", "fields", "words"),
    [
        (a_block("LNA", parent="RX"), {"parent": "TX"}, "moved from RX to TX"),
        (a_block("LNA"), {"parent": "RX"}, "moved under RX"),
        (a_block("LNA", parent="RX"), {"parent": None}, "taken out of RX, now at the top"),
        (a_block("LNA", owner="A"), {"owner": "B"}, "owner changed from A to B"),
        (a_block("LNA"), {"owner": "B"}, "owner is now B"),
        (a_block("LNA", owner="A"), {"owner": ""}, "owner A taken off"),
        (a_block("LNA"), {"supplier": "Invented Ltd"}, "supplier set to Invented Ltd"),
        (a_block("LNA", supplier="Invented Ltd"), {"supplier": ""}, "supplier Invented Ltd removed"),
        (an_item("LNA-1", built_into="RX-1"), {"built_into": "RX-2"}, "moved from RX-1 into RX-2"),
        (an_item("LNA-1"), {"built_into": "RX-2"}, "built into RX-2"),
        (a_requirement(), {"parents": ("SYS-1",)}, "now under SYS-1"),
        (a_requirement(parents=("SYS-1",)), {"parents": ("SYS-2",)}, "now under SYS-2; no longer under SYS-1"),
        (a_requirement(), {"block": "MIX"}, "now on block MIX (was LNA)"),
        (a_requirement(), {"conditions": None}, "now over conditions set none (was CS)"),
        (
            a_requirement(quantity=a_quantity(bandwidth_hz=1e6)),
            {"quantity": a_quantity(bandwidth_hz=1e5, plane="output")},
            "plane is now output (was not stated); reference bandwidth is now 100 kHz (was 1 MHz)",
        ),
        (a_requirement(statement="Old."), {"statement": "New."}, "statement reworded"),
        (a_declared_value(), {"value": 54.5}, "raised by 0.5 dB (54 → 54.5 dBm)"),
        (a_declared_value(), {"value": 24.0, "unit": "dBW"}, "the same value in dBW"),
        (a_declared_value(), {"value": 20.0, "unit": "dBW"}, "lowered by 4 dB (54 dBm → 20 dBW)"),
        (a_declared_value(value=25.0, unit="°C"), {"value": 30.0}, "raised by 5 K (25 → 30 °C)"),
        (a_declared_value(value=19.5), {"unit": "W"}, "raised by 19.4109 W (19.5 dBm → 19.5 W)"),
        (a_declared_value(), {"unit": "GHz"}, ""),
        (a_declared_value(value=0.0, unit="W"), {"value": 30.0, "unit": "dBm"}, ""),
        (a_waiver(), {"expires_on": date(2027, 1, 30)}, "expires on 30 days later (2026-12-31 → 2027-01-30)"),
        (a_waiver(), {"expires_on": date(2026, 12, 30)}, "expires on 1 day earlier (2026-12-31 → 2026-12-30)"),
        (a_waiver(permitted=">= 30 dB"), {"permitted": ">= 29 dB"}, "relaxed by 1 dB (30 -> 29 dB)"),
        (a_waiver(permitted=">= 30 dB"), {"permitted": "30 dB min"}, "written otherwise, the same in meaning"),
        (a_waiver(permitted="30"), {"permitted": "29"}, ""),
        (an_uncertainty(), {"frequency_from_hz": 71e9}, "frequency from is now 71 GHz (was not stated)"),
        (an_uncertainty(frequency_to_hz=5e6), {"frequency_to_hz": 6e6}, "frequency to is now 6 MHz (was 5 MHz)"),
        (a_requirement(), {"obligation": Obligation.SHOULD}, ""),
    ],
)  # fmt: skip
def test_differences_are_told_in_plain_words(before: Document, fields: dict[str, Any], words: str) -> None:
    assert meaning(before, **fields) == words


def test_a_difference_without_words_of_its_own_shows_both_values() -> None:
    known = a_requirement()
    assert only_change(known, changed(known, obligation="should")).sentence() == (
        "requirement R-1 changed: obligation: shall → should"
    )
    unlike = only_change(a_declared_value(), a_declared_value(unit="GHz"))
    assert (unlike.fields[0].before, unlike.fields[0].after) == ("54 dBm", "54 GHz")


def test_parts_of_a_nested_document_are_told_one_by_one() -> None:
    known = a_requirement(source=Source(document="ICD", issue="2", paragraph="4.1"))
    change = only_change(known, changed(known, source=Source(document="ICD", issue="3", paragraph="4.1")))
    assert [(field.field, field.before, field.after) for field in change.fields] == [
        ("source.issue", "2", "3")
    ]


def test_of_a_list_only_the_members_that_differ_are_told() -> None:
    known = a_budget()
    lines = (a_budget_line(value=19.5), known.lines[1])
    (field,) = only_change(known, known.model_copy(update={"lines": lines})).fields
    assert "20" in field.before and "19.5" in field.after
    assert "MIX" not in field.before + field.after
    assert field.meaning == "LNA gain (position 1) changed"
    (field,) = only_change(known, known.model_copy(update={"lines": known.lines[1:]})).fields
    assert field.meaning == "LNA gain (position 1) taken out"
    planes = only_change(
        a_block(planes=(Plane(name="in"),)), a_block(planes=(Plane(name="in"), Plane(name="out")))
    )
    assert (planes.fields[0].before, planes.fields[0].after) == ("", "out")


def test_members_in_another_order_are_told_as_that() -> None:
    known = a_block(planes=(Plane(name="in"), Plane(name="out")))
    (field,) = only_change(known, a_block(planes=(Plane(name="out"), Plane(name="in")))).fields
    assert (field.before, field.after) == ("in the order in, out", "in the order out, in")


def test_a_noun_without_revision_is_compared_like_any_other() -> None:
    known = a_parameter("link_gain")
    change = only_change(known, a_parameter("LINK_GAIN", unit="dBi"))
    assert (change.id, change.base_revision) == ("link_gain", None)
    assert [field.field for field in change.fields] == ["unit"]


def test_nothing_is_removed_unless_the_noun_is_said_to_be_complete() -> None:
    known = documents(a_block("LNA"), a_requirement("R-1", revision=3), a_requirement("R-2"))
    assert diff(known, [a_requirement("R-2")]) == []
    (change,) = diff(known, [a_requirement("R-2")], complete_nouns={"requirement"})
    assert (change.id, change.action, change.base_revision, change.after) == ("R-1", "remove", 3, None)
    assert (
        change.before is not None and read_text("requirement", change.before) == known["requirement"]["r-1"]
    )


def test_changes_come_in_the_order_of_the_nouns_with_removals_last_and_backwards() -> None:
    known = documents(a_block("OLD"), a_requirement("R-OLD", block="OLD"))
    new = [an_activity("R-1"), a_requirement("R-1"), a_block("LNA")]
    changes = diff(known, new, complete_nouns=("block", "requirement"))
    assert [(change.noun, change.action) for change in changes] == [
        ("block", "add"),
        ("requirement", "add"),
        ("activity", "add"),
        ("requirement", "remove"),
        ("block", "remove"),
    ]


def test_an_id_given_twice_and_an_unknown_noun_are_refused() -> None:
    with pytest.raises(DocumentError, match="requirement r-1: the id is given twice"):
        diff({}, [a_requirement("R-1"), a_requirement("r-1")])
    with pytest.raises(DocumentError, match="'unit' is no noun"):
        diff({}, [], complete_nouns={"unit"})


def test_two_snapshots_are_compared_with_removals_and_revisions_as_they_are_stored() -> None:
    first = a_snapshot(a_project(), a_requirement("R-1"), a_requirement("R-2"))
    second = a_snapshot(a_project(), changed(a_requirement("R-1"), limit=at_least(22), revision=7))
    edit, removal = diff_snapshots(first, second)
    assert (edit.id, edit.base_revision, revision_after(edit)) == ("R-1", 1, 7)
    assert edit.fields[0].meaning == "tightened by 2 dB (20 -> 22 dB)"
    assert (removal.id, removal.action) == ("R-2", "remove")
    assert diff_snapshots(first, first) == []


def test_other_values_in_an_evidence_table_are_told() -> None:
    known = an_evidence_table(digest="a" * 64)
    assert meaning(known, digest="b" * 64) == "other values than before"


CODES = st.sampled_from(["A", "B", "c-1", "C-2", "ä"])
WORDS = st.sampled_from(["", "x", "two words", "Ω"])
LIMITS = st.builds(
    lambda make, value: make(value), st.sampled_from([at_least, at_most]), st.integers(-50, 50)
)
DOCUMENTS = st.one_of(
    st.builds(
        a_requirement,
        CODES,
        limit=LIMITS,
        note=WORDS,
        owner=WORDS,
        parents=st.lists(CODES, max_size=2, unique=True).map(tuple),
        conditions=st.none() | CODES,
        quantity=st.builds(
            a_quantity, plane=WORDS, bandwidth_hz=st.none() | st.sampled_from([1.0, 2e3, 1e6, 5e9])
        ),
        source=st.builds(Source, document=WORDS, issue=WORDS),
        open_value=st.none() | st.builds(OpenValue, owner=WORDS, due=st.none() | st.dates()),
    ),
    st.builds(
        a_block,
        CODES,
        parent=st.none() | CODES,
        planes=st.lists(st.builds(Plane, name=WORDS, convention=WORDS), max_size=3).map(tuple),
    ),
    st.builds(
        a_declared_value, CODES, value=st.floats(-300, 300), unit=st.sampled_from(["dBm", "W", "GHz", "°C"])
    ),
    st.builds(
        a_waiver, CODES, expires_on=st.none() | st.dates(), items=st.lists(WORDS, max_size=2).map(tuple)
    ),
    st.builds(
        lambda code, values: a_conditions_set(code, a_dimension(values=tuple(values))),
        CODES,
        st.lists(st.sampled_from([27.5, 28.0, 29.25, 30.0]), min_size=1, unique=True),
    ),
    st.builds(an_evidence_file, CODES, note=WORDS),
)


def identity(document: Document) -> tuple[str, str]:
    noun = NOUN_BY_DOCUMENT[type(document)]
    return noun.name, code_key(str(getattr(document, noun.id_field)))


PROJECTS = st.lists(DOCUMENTS, max_size=8, unique_by=identity)


def content(source: Mapping[str, Mapping[str, Document]]) -> dict[tuple[str, str], dict[str, Any]]:
    """Return documents as data, without revision and with the codes as they are compared."""
    found = {}
    for noun, group in source.items():
        links = {name for name, _ in NOUN_BY_NAME[noun].links} | {NOUN_BY_NAME[noun].id_field}
        for key, document in group.items():
            data = document.model_dump(exclude={"revision", "origin"})
            for name in links & data.keys():
                data[name] = (
                    [code_key(code) for code in data[name]] if isinstance(data[name], tuple) else data[name]
                )
                data[name] = code_key(data[name]) if isinstance(data[name], str) else data[name]
                data[name] = sorted(data[name]) if isinstance(data[name], list) else data[name]
            found[noun, key] = data
    return found


@given(PROJECTS)
def test_nothing_differs_from_itself(project: list[Document]) -> None:
    snapshot = a_snapshot(*project)
    assert (
        diff(snapshot, [document for group in snapshot.documents.values() for document in group.values()])
        == []
    )
    assert diff_snapshots(snapshot, snapshot) == []


@given(PROJECTS, PROJECTS)
def test_applying_the_changes_gives_what_was_read(first: list[Document], second: list[Document]) -> None:
    before, after = documents(*first), documents(*second)
    given_documents = [document for group in after.values() for document in group.values()]
    changes = diff(before, given_documents, complete_nouns=NOUN_BY_NAME)
    result = applied(before, changes)
    assert content(result) == content(after)
    assert diff(result, given_documents, complete_nouns=NOUN_BY_NAME) == []


@given(PROJECTS, PROJECTS)
def test_every_edit_has_a_sentence_and_fields_that_differ(
    first: list[Document], second: list[Document]
) -> None:
    for change in diff_snapshots(a_snapshot(*first), a_snapshot(*second)):
        assert change.sentence()
        assert (change.action == "edit") == bool(change.fields)
        assert all(field.meaning or field.before != field.after for field in change.fields)


@given(PROJECTS, PROJECTS)
def test_the_changes_of_two_snapshots_give_the_second_exactly(
    first: list[Document], second: list[Document]
) -> None:
    before, after = documents(*first), documents(*second)
    result = Snapshot(1, applied(before, diff_snapshots(before, after)))
    assert diff_snapshots(result, after) == []


def test_what_is_unwanted_is_removed_if_it_is_stored() -> None:
    before = a_snapshot(a_block(), a_block("PA"))
    changes = diff(before, [a_block()], removals=[a_block("pa"), a_block("MIX")])
    assert [(change.action, change.id, change.base_revision) for change in changes] == [("remove", "PA", 1)]
    with pytest.raises(DocumentError, match="both given and to be removed"):
        diff(before, [a_block()], removals=[a_block()])


def test_the_revision_that_is_due_is_the_one_that_is_stored() -> None:
    before = a_requirement(revision=4)
    renamed = before.model_copy(update={"title": "Another"})
    moved = before.model_copy(update={"tier": Tier.BLOCK if before.tier is not Tier.BLOCK else Tier.SYSTEM})
    assert due_revision(None, before) == 4
    assert due_revision(before, renamed) == 4
    assert due_revision(before, moved) == 5
    (change,) = diff(a_snapshot(before), [moved])
    assert change.after is not None and '"revision":5' in change.after
