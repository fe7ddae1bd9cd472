"""A greatest uncertainty from the workbook to the verdict: loader and judgement speak the unit of the limit."""

from __future__ import annotations

from collections.abc import Iterator
from datetime import date
from pathlib import Path
from typing import Any

import pytest

from specflow.model.requirement import Requirement
from specflow.model.verdict import RequirementStatus
from specflow.store import ProjectStore, create_project
from specflow.workflows.attach import Decision, accept_attach, preview_attach
from specflow.workflows.evaluate_project import evaluate_project
from specflow.workflows.load_workbook import LoadPreview, accept_load, preview_load
from tests.builders import a_project, project_workbook

AS_OF = date(2026, 6, 1)
ME = "Ann Invented"


@pytest.fixture
def store(tmp_path: Path) -> Iterator[ProjectStore]:
    with create_project(tmp_path / "harbour.specflow", a_project()) as opened:
        yield opened


def preview(store: ProjectStore, tmp_path: Path, parameter: str, limit: str, **more: Any) -> LoadPreview:
    path = project_workbook(
        tmp_path / "reqs.xlsx",
        blocks=[{"ID": "UT", "Name": "Invented terminal"}],
        items=[{"ID": "UT-1", "Block": "UT"}],
        requirements=[{"ID": "R-1", "Block": "UT", "Parameter": parameter, "Limit": limit} | more],
    )
    return preview_load(store, path)


def ceiling(store: ProjectStore) -> float | None:
    found = store.load().find(Requirement, "R-1")
    assert found is not None
    return found.decision_rule.greatest_uncertainty


def status(
    store: ProjectStore, tmp_path: Path, quantity: str, value: float, expanded: float, name: str = "bench.csv"
) -> RequirementStatus:
    """Attach one reading with its U (k = 2), in the unit of the reading's differences, and judge."""
    path = tmp_path / name
    unit = "%" if "%" in quantity else "dB"
    header = f"Item,f [GHz],{quantity},U (k=2) [{unit}]"
    path.write_text(f"{header}\nUT-1,28,{value},{expanded}\n", encoding="utf-8")
    accept_attach(store, preview_attach(store, path), Decision(ME))
    return evaluate_project(store, AS_OF).results.of("R-1")


@pytest.mark.parametrize(
    ("parameter", "limit", "greatest", "stored", "quantity", "value"),
    [
        ("evm", "8 % max", "1 %", 1.0, "EVM [%]", 5),
        ("evm", "8 % max", "1.5 % (k=3)", 1.0, "EVM [%]", 5),
        ("evm", "-22 dB max", "1 dB", 1.0, "EVM [dB]", -26),
        ("eirp", ">= 45 dBm", "1 dB", 1.0, "EIRP [dBm]", 48),
        ("eirp", ">= 45 dBm", "1 dB", 1.0, "EIRP [dBW]", 18),
        ("eirp", ">= 15 dBW", "1 dB", 1.0, "EIRP [dBm]", 48),
    ],
)
def test_evidence_above_the_ceiling_of_the_workbook_proves_nothing(
    store: ProjectStore,
    tmp_path: Path,
    parameter: str,
    limit: str,
    greatest: str,
    stored: float,
    quantity: str,
    value: float,
) -> None:
    """The ceiling is 1 % or 1 dB at k = 2, and is kept in the tolerance unit of the limit; U is 1.1, then 0.9."""
    loaded = preview(store, tmp_path, parameter, limit, **{"Greatest uncertainty": greatest})
    accept_load(store, loaded, by=ME)
    assert ceiling(store) == pytest.approx(stored, rel=1e-12)
    refused = status(store, tmp_path, quantity, value, 1.1)
    assert refused.k == 0
    assert any("not admissible" in remark for remark in refused.remarks)
    assert status(store, tmp_path, quantity, value, 0.9, "better.csv").k == 1


@pytest.mark.parametrize(
    ("parameter", "limit", "greatest", "quantity", "value", "margin"),
    [
        # 8 % less the excess of 1 % is 7 %: 6.5 % passes by 0.5 %, 7.5 % fails by as much.
        ("evm", "8 % max", "1 %", "EVM [%]", 6.5, 0.5),
        ("evm", "8 % max", "1 %", "EVM [%]", 7.5, -0.5),
        # 45 dBm and the excess of 0.8 dB are 45.8 dBm.
        ("eirp", ">= 45 dBm", "1.2 dB", "EIRP [dBm]", 46.3, 0.5),
        ("eirp", ">= 45 dBm", "1.2 dB", "EIRP [dBm]", 45.3, -0.5),
    ],
)
def test_what_is_above_the_ceiling_tightens_the_limit_in_its_own_unit(
    store: ProjectStore,
    tmp_path: Path,
    parameter: str,
    limit: str,
    greatest: str,
    quantity: str,
    value: float,
    margin: float,
) -> None:
    more = {"Greatest uncertainty": greatest, "Excess uncertainty": "tightens the limit"}
    accept_load(store, preview(store, tmp_path, parameter, limit, **more), by=ME)
    found = status(store, tmp_path, quantity, value, 2.0)
    assert found.governing is not None
    assert found.governing.guarded_margin == pytest.approx(margin, abs=1e-9)
    assert (found.k, found.n_failing) == ((1, 0) if margin > 0 else (0, 1))


def test_a_limit_in_two_units_takes_no_greatest_uncertainty(store: ProjectStore, tmp_path: Path) -> None:
    loaded = preview(
        store, tmp_path, "evm", "8 % or -22 dB whichever is looser", **{"Greatest uncertainty": "1 %"}
    )
    (finding,) = loaded.rejected
    assert "is in several units" in finding.message
    alike = preview(
        store,
        tmp_path,
        "aclr",
        ">= 28 dB or -13 dBm/MHz whichever is looser",
        **{"Greatest uncertainty": "1 dB"},
    )
    assert not alike.rejected


def test_a_stored_ceiling_is_not_carried_into_another_unit(store: ProjectStore, tmp_path: Path) -> None:
    accept_load(store, preview(store, tmp_path, "evm", "8 % max", **{"Greatest uncertainty": "1 %"}), by=ME)
    assert not preview(store, tmp_path, "evm", "7 % max").rejected
    (finding,) = preview(store, tmp_path, "evm", "-22 dB max").rejected
    assert "the greatest uncertainty of the project, 1 %, is no amount of it" in finding.message
    assert not preview(store, tmp_path, "evm", "-22 dB max", **{"Greatest uncertainty": "1 dB"}).rejected
