"""Budgets of a workbook that cannot be evaluated are refused with place and remedy; what waits for evidence is not."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from specflow.errors import DocumentError
from specflow.model.budget import Budget
from specflow.store import ProjectStore, create_project
from specflow.workflows.load_workbook import LoadPreview, accept_load, preview_load
from tests.builders import a_project, project_workbook


@pytest.fixture
def store(tmp_path: Path) -> Iterator[ProjectStore]:
    with create_project(tmp_path / "harbour.specflow", a_project()) as opened:
        yield opened


def preview(store: ProjectStore, tmp_path: Path, *lines: dict[str, Any]) -> LoadPreview:
    sheets = {
        "blocks": [{"ID": name, "Name": f"Invented {name}"} for name in ("UT", "CAB", "LNA")],
        "requirements": [{"ID": "R-1", "Block": "UT", "Parameter": "noise_figure", "Limit": "<= 8 dB"}],
        "budgets": [{"ID": "B-1", "Requirements": "R-1", "Law": "cascade"}],
        "budget_lines": [{"Budget": "B-1", **line} for line in lines],
    }
    return preview_load(store, project_workbook(tmp_path / "budget.xlsx", **sheets))


def line(position: int, block: str, parameter: str, value: str, **more: Any) -> dict[str, Any]:
    return {"Position": position, "Block": block, "Parameter": parameter, "Value": value, **more}


NOISE = line(2, "LNA", "noise_figure", "1.4 dB")
CABLE = line(1, "CAB", "insertion_loss", "1.2 dB", Passive="yes")


@pytest.mark.parametrize(
    ("lines", "place", "message"),
    [
        (
            (line(1, "CAB", "gain", "1.2 dB", Passive="yes"), NOISE),
            "CAB gain",
            "the passive block has a gain",
        ),
        ((line(1, "CAB", "insertion_loss", "-1.2 dB"), NOISE), "CAB insertion_loss", "is -1.2 dB"),
        ((CABLE, {**NOISE, "Sideband": "DSB"}), "LNA noise_figure", "double-sideband"),
        ((CABLE, {**NOISE, "Value": "table if_frequency: 1 GHz 2; 2 GHz 3 dB step"}), "LNA", "if_frequency"),
    ],
)
def test_a_budget_that_cannot_be_is_one_message_and_nothing_is_saved(
    store: ProjectStore, tmp_path: Path, lines: tuple[dict[str, Any], ...], place: str, message: str
) -> None:
    shown, before = preview(store, tmp_path, *lines), store.revision
    (finding,) = shown.rejected
    assert finding.subject == "B-1" and finding.remedy and finding.origin is not None
    assert place in finding.message and message in finding.message
    row = next(number for number, one in enumerate(lines, 2) if place.split()[0] == one["Block"])
    assert (finding.origin.sheet, finding.origin.row) == ("Budget lines", row)
    with pytest.raises(DocumentError, match="nothing was stored"):
        accept_load(store, shown, by="A. Invented")
    assert store.revision == before
    accept_load(store, shown, by="A. Invented", take_rest=True)
    assert store.load().find(Budget, "B-1") is None


def test_a_sound_budget_and_one_that_waits_for_a_table_are_loaded(
    store: ProjectStore, tmp_path: Path
) -> None:
    for noise in (NOISE, {**NOISE, "Value": "trace T-1: Noise figure along frequency", "Unit": "dB"}):
        shown = preview(store, tmp_path, CABLE, noise)
        assert not shown.rejected
        accept_load(store, shown, by="A. Invented")
        assert store.load().find(Budget, "B-1") is not None
