"""The card: margin bar, proof grids, what open points lack, and the trail in both directions."""

from __future__ import annotations

import pytest

from specflow.model.block import Block
from specflow.model.card import BarAxis, Card, PointState, TrailStep
from specflow.model.evidence import EvidenceTable
from specflow.model.finding import Finding, Severity
from specflow.model.requirement import Requirement
from specflow.reports import proof_grid
from specflow.reports.about import EXPOSURE_CAUTION
from specflow.reports.card import requirement_card
from specflow.reports.serving import requirements_served
from specflow.reports.trace import block_trail, requirement_trail, table_trail, trail_table
from tests import harbour
from tests.builders import a_conditions_set, a_dimension, a_requirement, a_snapshot

SNAPSHOT = harbour.snapshot()
RESULTS = harbour.results(SNAPSHOT)


def requirement(id: str) -> Requirement:
    found = SNAPSHOT.find(Requirement, id)
    assert found is not None
    return found


def card(id: str, *findings: Finding) -> Card:
    return requirement_card(requirement(id), SNAPSHOT, RESULTS, findings, harbour.DICTIONARY)


def states(id: str, grid: int = 0) -> list[list[str]]:
    return [[cell.state.value if cell else "" for cell in row] for row in card(id).grids[grid].cells]


def test_the_card_says_the_limit_in_words_and_as_written() -> None:
    found = card("PA-1")
    assert (found.limit_words, found.limit_text) == ("at least 30 dBm", ">= 30 dBm")
    assert found.proved == "8 of 9 proved, 4 failing, 1 without evidence"
    facts = dict(found.facts)
    assert facts["Governed at"] == "30 GHz, +85 °C ambient, item PA-A: 0.95 W"
    assert facts["Guarded margin"] == "-1.19 dB"


def test_only_radiated_power_shows_the_exposure_caution() -> None:
    assert card("SYS-1").cautions == (EXPOSURE_CAUTION,)
    assert card("PA-1").cautions == ()


def test_the_card_has_its_own_findings_only() -> None:
    own = Finding(rule="failing", severity=Severity.ERROR, subject="pa-1", message="fails")
    other = own.model_copy(update={"subject": "PA-2"})
    assert card("PA-1", own, other).findings == (own,)


def test_the_margin_bar_spans_the_results_of_all_items() -> None:
    bar = card("PA-1").bar
    assert bar is not None and bar.axis is BarAxis.VALUE
    assert (bar.lower, bar.upper, bar.unit) == (30.0, None, "dBm")
    assert bar.least == pytest.approx(29.777, abs=1e-3) and bar.greatest == pytest.approx(31.461, abs=1e-3)
    assert bar.guard == pytest.approx(0.966, abs=1e-3)
    assert bar.words == "results 29.78 to 31.46 dBm; guard band 0.97 dB"


def test_where_the_limit_differs_the_bar_is_over_margins() -> None:
    bar = card("LNA-2").bar
    assert bar is not None and bar.axis is BarAxis.MARGIN
    assert (bar.lower, bar.greatest) == (0.0, 3.0) and bar.least == pytest.approx(0.1)
    assert bar.words == "margin +0.10 dB to +3.00 dB, the limit differs from point to point"


def test_without_evidence_there_is_no_bar() -> None:
    assert card("SYS-1").bar is None


def test_the_grid_has_the_dimension_of_most_values_as_columns() -> None:
    grid = card("PA-1").grids[0]
    assert grid.column_titles == ("27.5 GHz", "28.75 GHz", "30 GHz")
    assert grid.row_titles == ("-40 °C ambient", "+25 °C ambient", "+85 °C ambient")
    assert (grid.column_dimension, grid.row_dimension) == ("frequency", "ambient temperature")


def test_the_cells_of_the_grid_add_up_to_k_of_n() -> None:
    for id in ("PA-1", "PA-2", "LNA-1", "LNA-2", "SYS-1"):
        status = RESULTS.of(id)
        found = [cell for grid in card(id).grids for row in grid.cells for cell in row if cell]
        proved = sum(cell.state is PointState.PROVED for cell in found)
        if id == "PA-1":  # where any one item will do, the grid of the item that fails stands beside it
            assert (proved, len(found)) == (8 + 4, 18)
        else:
            assert (proved, len(found)) == (status.k, status.n)


def test_the_item_that_fails_has_a_grid_of_its_own() -> None:
    assert [grid.title for grid in card("PA-1").grids] == [
        "item PA-B: 8 of 9 proved",
        "item PA-A: 4 of 9 proved",
    ]
    assert states("PA-1", 1) == [
        ["proved", "proved", "without evidence"],
        ["failing", "proved", "proved"],
        ["failing", "failing", "failing"],
    ]


def test_an_open_point_says_how_far_the_nearest_record_of_its_item_is() -> None:
    cell = card("PA-1").grids[0].cells[1][1]
    assert cell is not None and cell.state is PointState.WITHOUT_EVIDENCE and cell.verdict == "no evidence"
    assert cell.lacks == "nearest in T-PA: +85 °C ambient is not +25 °C ambient (off by 60 K, 2 K allowed)"


def test_a_range_with_a_gap_says_which() -> None:
    cell = card("LNA-1").grids[0].cells[0][0]
    assert cell is not None and cell.state is PointState.UNDECIDED
    assert cell.verdict == "pass, but not proved"
    assert cell.lacks == "no evidence from 18.2 to 19.7 GHz (largest gap allowed: 0.5 GHz)"


def test_a_proved_point_names_value_margin_and_cell() -> None:
    cell = card("PA-1").grids[0].cells[0][0]
    assert cell is not None
    assert (cell.words, cell.value, cell.margin, cell.origin, cell.lacks) == (
        "27.5 GHz, -40 °C ambient",
        "31.46 dBm",
        "+0.82 dB",
        "pa_bench.xlsx · Bench 1 · D10",
        "",
    )


def test_very_many_points_are_cut_to_the_worst(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(proof_grid, "MOST_CELLS", 5)
    grid = card("PA-1").grids[1]
    kept = [cell.state.value for cell in grid.cells[0] if cell]
    assert sorted(kept) == ["failing"] * 4 + ["without evidence"]
    assert grid.note.startswith("the 5 worst of 9 points")


def test_a_requirement_whose_set_cannot_be_expanded_has_a_card() -> None:
    huge = a_conditions_set(
        "CS", *(a_dimension(name, values=tuple(range(1, 400))) for name in ("frequency", "offset", "theta"))
    )
    snapshot = a_snapshot(a_requirement(), huge)
    found = requirement_card(a_requirement(), snapshot, harbour.results(snapshot), [], harbour.DICTIONARY)
    assert found.grids == () and found.proved == "no required points"
    assert "points, more than" in found.remarks[0]


def kinds(steps: tuple[TrailStep, ...]) -> list[tuple[int, str, str]]:
    return [(step.depth, step.kind, step.id) for step in steps]


def test_the_trail_goes_up_to_the_system_and_down_to_the_cell() -> None:
    steps = requirement_trail(requirement("PA-1"), SNAPSHOT, RESULTS)
    assert kinds(steps)[:4] == [
        (-1, "requirement", "SYS-1"),
        (0, "requirement", "PA-1"),
        (1, "activity", "PA-1/test"),
        (2, "point", "T-PA"),
    ]
    assert str(steps[3].origin) == "pa_bench.xlsx · Bench 1 · D10"
    assert sum(step.kind == "point" for step in steps) == 17


def test_the_trail_of_the_system_names_its_children() -> None:
    steps = requirement_trail(requirement("SYS-1"), SNAPSHOT, RESULTS)
    assert [step.id for step in steps if step.kind == "child"] == ["PA-1", "PA-2", "PA-3", "PA-4"]


def test_a_short_trail_keeps_the_points_that_decide() -> None:
    steps = requirement_trail(requirement("PA-1"), SNAPSHOT, RESULTS, most_points=4)
    texts = [step.text for step in steps if "item PA-A" in step.text and step.kind == "point"]
    assert len(texts) == 4 and all("fail" in text for text in texts)
    assert "... and 4 more points" in [step.text for step in steps]


def test_a_table_leads_back_to_the_requirements_it_governs() -> None:
    table = SNAPSHOT.find(EvidenceTable, "T-PA")
    assert table is not None
    steps = table_trail(table, SNAPSHOT, RESULTS, requirements_served(SNAPSHOT, RESULTS))
    assert kinds(steps)[:3] == [(-1, "file", "F-PA"), (-1, "received", "F-PA"), (0, "table", "T-PA")]
    assert [step.id for step in steps if step.kind == "requirement"] == ["PA-1", "PA-2"]
    assert harbour.PA_FILE.sha256 in steps[0].text


def test_a_block_leads_to_its_requirements_items_and_tables() -> None:
    block = SNAPSHOT.find(Block, "pa")
    assert block is not None
    steps = block_trail(block, SNAPSHOT, RESULTS, requirements_served(SNAPSHOT, RESULTS))
    assert kinds(steps) == [
        (-1, "block", "TERM"),
        (0, "block", "PA"),
        *((1, "requirement", f"PA-{number}") for number in (1, 2, 3, 4)),
        (1, "item", "PA-A"),
        (1, "item", "PA-B"),
        (1, "table", "T-PA"),
    ]


def test_a_trail_as_a_table_keeps_its_depth_and_origins() -> None:
    steps = requirement_trail(requirement("PA-1"), SNAPSHOT, RESULTS)
    table = trail_table("Trace of PA-1", steps)
    assert [row.depth for row in table.rows[:4]] == [0, 1, 2, 3]
    assert table.rows[3].cells[3].origin == steps[3].origin
