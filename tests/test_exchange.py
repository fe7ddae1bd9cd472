"""Documents as plain data: nothing lost, nothing smuggled in, old formats brought up to date."""

from __future__ import annotations

import json
import math
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.errors import DocumentError
from specflow.exchange import (
    FORMAT,
    canonical_bytes,
    digest,
    payload,
    payload_text,
    read_payload,
    read_text,
    upgraded,
)
from specflow.model.block import PlanePath
from specflow.model.declared import DeclaredValue
from tests.builders import a_block, a_requirement, an_activity

words = st.text(st.characters(codec="utf-8", exclude_characters="\0"), max_size=30).map(str.strip)
numbers = st.floats(allow_nan=False, allow_infinity=False)


@given(name=words, note=words, gain=numbers, quantity=st.integers(1, 10**6))
def test_a_document_comes_back_as_it_was(name: str, note: str, gain: float, quantity: int) -> None:
    path = PlanePath(start="a", end="b", gain_db=gain, standard_uncertainty_db=0.5)
    block = a_block(name=name, note=note, quantity=quantity, paths=(path,))
    assert read_payload("block", payload(block)) == block
    assert read_payload("block", json.loads(canonical_bytes(block))) == block
    assert read_text("block", payload_text(block)) == block
    assert payload_text(read_text("block", payload_text(block))) == payload_text(block)


def test_every_field_is_written_with_the_format() -> None:
    written = payload(a_requirement())
    assert written["format"] == FORMAT
    assert set(written) == {"format", *type(a_requirement()).model_fields}
    assert written["limit"]["tree"]["kind"] == "bound"


def test_a_payload_may_come_in_any_key_order_and_spacing() -> None:
    requirement = a_requirement()
    spaced = json.dumps(payload(requirement), sort_keys=True, indent=2)
    assert read_text("requirement", spaced) == requirement


def test_negative_zero_becomes_zero_and_nul_is_stripped() -> None:
    value = DeclaredValue(id="D", name="P\0_rated", value=-0.0, unit="dBm")
    for written in (payload(value), json.loads(payload_text(value))):
        assert math.copysign(1.0, written["value"]) == 1.0
        assert written["name"] == "P_rated"
    read = read_payload("declared_value", {**payload(value), "value": -0.0, "note": "a\0b"})
    assert isinstance(read, DeclaredValue)
    assert math.copysign(1.0, read.value) == 1.0
    assert read.note == "ab"


def test_text_that_only_looks_like_an_escape_is_kept() -> None:
    block = a_block(name=r"C:\u0000 and -0.0")
    assert read_text("block", payload_text(block)) == block


@pytest.mark.parametrize("number", ["NaN", "Infinity", "-Infinity"])
def test_what_is_no_number_is_refused_in_texts(number: str) -> None:
    text = payload_text(DeclaredValue(id="D", name="P", value=1.5, unit="dBm")).replace("1.5", number)
    with pytest.raises(DocumentError, match=number):
        read_text("declared_value", text)


def test_what_is_no_number_is_refused_in_payloads_and_canonical_bytes() -> None:
    written = payload(DeclaredValue(id="D", name="P", value=1.5, unit="dBm"))
    with pytest.raises(DocumentError, match="value: Input should be a finite number"):
        read_payload("declared_value", written | {"value": math.nan})
    with pytest.raises(DocumentError, match="canonical"):
        canonical_bytes({"value": math.inf})


def test_every_wrong_field_is_named_at_once() -> None:
    with pytest.raises(DocumentError) as caught:
        read_payload("block", payload(a_block()) | {"tier": "sideways", "quantity": 0, "colour": "red"})
    assert caught.value.where == "block LNA"
    assert all(field in caught.value.message for field in ("tier", "quantity", "colour"))


@pytest.mark.parametrize("text", ["", "[]", "{", "null", '{"format":1,'])
def test_text_that_is_no_document_is_refused(text: str) -> None:
    with pytest.raises(DocumentError):
        read_text("block", text)


def test_an_unknown_noun_is_refused_with_the_list_of_nouns() -> None:
    with pytest.raises(DocumentError) as caught:
        read_payload("gadget", payload(a_block()))
    assert "requirement" in caught.value.hint


@pytest.mark.parametrize("version", [None, "1", 0, True, 1.0])
def test_a_payload_must_say_its_format(version: Any) -> None:
    with pytest.raises(DocumentError, match="format"):
        read_payload("block", payload(a_block()) | {"format": version})


def test_a_newer_format_is_refused_with_what_to_do() -> None:
    with pytest.raises(DocumentError, match=f"format {FORMAT + 1}") as caught:
        read_payload("block", payload(a_block()) | {"format": FORMAT + 1})
    assert "update" in caught.value.hint


def test_an_old_payload_is_upgraded_one_step_a_version() -> None:
    def rename_designation(noun: str, data: dict[str, Any]) -> dict[str, Any]:
        return {("name" if key == "designation" and noun == "block" else key): data[key] for key in data}

    def count_pieces(noun: str, data: dict[str, Any]) -> dict[str, Any]:
        return data | {"quantity": len(data["pieces"])} if noun == "block" else data

    old = {"format": 1, "designation": "LNA", "pieces": ["a", "b"]}
    steps = {1: rename_designation, 2: count_pieces}
    new = upgraded("block", old, upgrades=steps, current=3)
    assert new == {"format": 3, "name": "LNA", "pieces": ["a", "b"], "quantity": 2}
    assert upgraded("item", {"format": 2, "a": 1}, upgrades=steps, current=3) == {"format": 3, "a": 1}
    assert old == {"format": 1, "designation": "LNA", "pieces": ["a", "b"]}


def test_canonical_bytes_do_not_depend_on_order_and_keep_floats_short() -> None:
    assert canonical_bytes({"b": 0.1, "a": [1e22, "Ω"]}) == '{"a":[1e+22,"Ω"],"b":0.1}'.encode()
    assert digest({"a": 1, "b": 2}) == digest({"b": 2, "a": 1})
    assert digest({"a": 1}) != digest({"a": 1.5})


def test_documents_inside_plain_data_are_written_as_payloads() -> None:
    activity = an_activity()
    assert canonical_bytes([activity]) == canonical_bytes([payload(activity)])
    with pytest.raises(DocumentError, match="canonical"):
        canonical_bytes({"when": object()})
