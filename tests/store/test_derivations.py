"""Derivations in the store: their links hold, and what they point to cannot vanish."""

from __future__ import annotations

import pytest

from specflow.errors import DocumentError
from specflow.model.derivation import Covered, Derivation, InputColumn
from specflow.model.evidence import EvidenceTable
from specflow.store import create_project, open_project
from tests.builders import (
    a_block,
    a_project,
    a_quantity,
    adding,
    an_evidence_file,
    an_evidence_table,
    removing,
    some_evidence,
)


def a_derivation(id: str = "DV-1", **fields: object) -> Derivation:
    """Return the worst gain of T-1."""
    return Derivation.model_validate(
        {
            "id": id,
            "law": "worst",
            "inputs": ("T-1",),
            "digests": ("d",),
            "columns": (InputColumn(role="value", table="T-1", column="Gain"),),
            "over": ("frequency 27.5..30 GHz",),
            "gives": a_quantity(statistic="worst"),
            "unit": "dB",
        }
        | fields
    )


def test_a_derivation_comes_back_as_it_was_stored(where: str) -> None:
    covers = (
        Covered(dimension="frequency", low=27.5, high=30.0, largest_gap=1.25, unit="GHz", in_parts=True),
    )
    table = an_evidence_table("EV-1", derivation="DV-1", covers=covers)
    derivations = a_derivation(), a_derivation("DV-2", again_of="DV-1")
    with create_project(where, a_project()) as store:
        store.apply(
            adding(a_block(), an_evidence_file(), an_evidence_table(), *derivations, table),
            columns={"T-1": some_evidence(), "EV-1": some_evidence()},
            by="me",
        )
    with open_project(where, read_only=True) as store:
        snapshot = store.load()
    assert snapshot.all(Derivation) == [*derivations]
    found = snapshot.find(EvidenceTable, "EV-1")
    assert found is not None and (found.derivation, found.covers) == ("DV-1", covers)


def test_what_was_derived_from_cannot_be_removed(where: str) -> None:
    table = an_evidence_table()
    with create_project(where, a_project()) as store:
        store.apply(
            adding(a_block(), an_evidence_file(), table, a_derivation()),
            columns={"T-1": some_evidence()},
            by="me",
        )
        with pytest.raises(DocumentError, match="still in use"):
            store.apply([removing(table)], by="me")


def test_a_derivation_of_a_table_that_is_not_there_is_refused(where: str) -> None:
    with create_project(where, a_project()) as store, pytest.raises(DocumentError, match="a link leads"):
        store.apply(adding(a_derivation()), by="me")


def test_inputs_and_columns_must_agree() -> None:
    with pytest.raises(ValueError, match="do not name the same tables"):
        a_derivation(inputs=("T-2",))
    with pytest.raises(ValueError, match="1 inputs have 2 digests"):
        a_derivation(digests=("a", "b"))
