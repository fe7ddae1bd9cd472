"""Editing a line by verb: shown in meaning with what it does, stored as a revision, refused whole."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

from specflow.errors import ConflictError, DocumentError, SpecflowError
from specflow.model.budget import Budget, BudgetLine
from specflow.model.budget_line import Constant, LineTolerance
from specflow.store import ProjectStore
from specflow.workflows.edit_budget import EditPreview, accept_edit, preview_edit
from tests import receiver


@pytest.fixture
def store(tmp_path: Path) -> Iterator[ProjectStore]:
    with receiver.receiver_store(tmp_path / "receiver.specflow") as opened:
        yield opened


def edit(store: ProjectStore, *settings: str) -> EditPreview:
    return preview_edit(store, "B-RX", settings, "measured")


def stored(store: ProjectStore, position: int, parameter: str) -> BudgetLine:
    budget = store.load().all(Budget)[0]
    return next(one for one in budget.lines if (one.position, one.parameter) == (position, parameter))


def test_an_edit_is_told_in_meaning_and_does_nothing_before_it_is_accepted(store: ProjectStore) -> None:
    before = store.revision
    preview = edit(store, "3 noise_figure = 1.8 dB")
    (change,) = preview.changes
    (field,) = change.fields
    assert field.meaning == (
        "LNA noise_figure (position 3): 1.5 dB, ± 0.3 dB, limits, uniform → 1.8 dB, ± 0.3 dB, limits, uniform, "
        "up by 0.30 dB"
    )
    assert store.revision == before


def test_what_it_does_to_every_margin_is_shown(store: ProjectStore) -> None:
    preview = edit(store, "LNA noise figure = 1.8 dB")
    noise, merit = preview.moved.rows
    assert noise.id == "R-noise_figure"
    step = noise.cells[6].number
    assert step is not None and -0.3 < step < -0.2  # most of the noise is the LNA's
    assert merit.cells[6].number is not None and merit.cells[6].number < 0


def test_accepted_it_is_a_new_revision_with_its_reason(store: ProjectStore) -> None:
    preview = edit(store, "3 noise_figure = 1.8 dB", "FIL insertion_loss = 0.8 dB")
    revision = accept_edit(store, preview, by="Ann", reason="measured")
    assert store.revision == revision
    budget = store.load().all(Budget)[0]
    assert budget.revision == 2
    assert stored(store, 3, "noise_figure").value == Constant(value=1.8)
    assert stored(store, 2, "insertion_loss").value == Constant(value=0.8)
    entry = store.history(id="B-RX")[-1]
    assert (entry.by, entry.reason) == ("Ann", "measured")


def test_what_a_setting_does_not_say_stays(store: ProjectStore) -> None:
    before = stored(store, 3, "gain")
    accept_edit(store, edit(store, "3 gain = 21 dB"), by="Ann", reason="r")
    assert stored(store, 3, "gain") == before.model_copy(update={"value": Constant(value=21)})


def test_a_tolerance_is_set_with_the_value_and_keeps_what_it_means(store: ProjectStore) -> None:
    accept_edit(store, edit(store, "3 gain = 21 dB ± 0.5"), by="Ann", reason="r")
    known = LineTolerance.model_validate(
        {"minus": 0.5, "plus": 0.5, "meaning": "limits", "distribution": "uniform"}
    )
    assert stored(store, 3, "gain").tolerance == known


def test_a_line_may_get_a_table_and_a_drift(store: ProjectStore) -> None:
    setting = "3 noise_figure = 1.5 dB + 0.01 dB/K of temperature_ambient from 23 °C"
    accept_edit(store, edit(store, setting), by="Ann", reason="r")
    (drift,) = stored(store, 3, "noise_figure").drifts
    assert (drift.dimension, drift.slope, drift.reference) == ("temperature_ambient", 0.01, 23)
    table = edit(store, "3 gain = table frequency: 17.7 GHz 20; 20.2 GHz 19 dB linear")
    assert "another table" in table.changes[0].fields[0].meaning


def test_the_same_value_changes_nothing(store: ProjectStore) -> None:
    assert edit(store, "3 gain = 20 dB").changes == []


@pytest.mark.parametrize(
    ("setting", "message"),
    [
        ("gain 20 dB", "sets nothing"),
        ("3 gain =", "sets nothing"),
        ("3 gian = 20 dB", "no line '3 gian'"),
        ("9 gain = 20 dB", "no line '9 gain'"),
        ("3 gain = many", "no value"),
        ("3 gain = 20 dBm", "cannot be"),
        ("2 insertion_loss = -1 dB", "insertion_loss is -1 dB"),
        ("3 noise_figure = table frequency: 18 GHz 1; 19 GHz 2 dB linear", "frequency"),
    ],
)
def test_bad_settings_are_refused_and_nothing_is_stored(
    store: ProjectStore, setting: str, message: str
) -> None:
    before = store.revision
    with pytest.raises(SpecflowError, match=message):
        edit(store, setting)
    assert store.revision == before


def test_without_a_reason_nothing_is_stored(store: ProjectStore) -> None:
    before = store.revision
    with pytest.raises(DocumentError, match="needs a reason"):
        accept_edit(store, edit(store, "3 gain = 21 dB"), by="Ann", reason=" ")
    assert store.revision == before


def test_two_edits_of_one_budget_at_once_conflict(store: ProjectStore) -> None:
    first, second = edit(store, "3 gain = 21 dB"), edit(store, "3 gain = 22 dB")
    accept_edit(store, first, by="Ann", reason="r")
    with pytest.raises(ConflictError):
        accept_edit(store, second, by="Ben", reason="r")
