"""Matrix, points, evidence, findings, about and status of the invented harbour project."""

from __future__ import annotations

from collections.abc import Mapping

import pytest

from specflow.model.finding import Finding, Severity
from specflow.model.report import CellTone, ReportCell, ReportTable
from specflow.reports.about import CAUTION, EXPOSURE_CAUTION, INVENTED, about_table, cautions
from specflow.reports.evidence import evidence_table
from specflow.reports.findings import by_subject, findings_table
from specflow.reports.matrix import compliance_matrix
from specflow.reports.points import points_count, points_table
from specflow.reports.status import (
    close_out_totals,
    compliance_totals,
    in_tree_order,
    points_sentence,
    status_table,
    summary_table,
)
from tests import harbour
from tests.builders import a_project, a_snapshot

SNAPSHOT = harbour.snapshot()
RESULTS = harbour.results(SNAPSHOT)
ORDERED, DEPTHS = in_tree_order(SNAPSHOT)
FINDING = Finding(rule="failing", severity=Severity.ERROR, subject="pa-1", message="fails", remedy="mend it")


def cells(table: ReportTable, id: str) -> Mapping[str, ReportCell]:
    """Return the cells of the first row about something, by column key."""
    row = next(row for row in table.rows if row.id == id)
    return dict(zip((column.key for column in table.columns), row.cells, strict=True))


def texts(table: ReportTable, key: str) -> list[str]:
    """Return the texts of one column."""
    place = [column.key for column in table.columns].index(key)
    return [row.cells[place].text for row in table.rows]


@pytest.fixture(scope="module")
def matrix() -> ReportTable:
    return compliance_matrix(SNAPSHOT, RESULTS, [FINDING], harbour.DICTIONARY, ORDERED, DEPTHS)


@pytest.fixture(scope="module")
def points() -> ReportTable:
    return points_table(SNAPSHOT, RESULTS, ORDERED)


def test_the_matrix_has_children_under_their_parents(matrix: ReportTable) -> None:
    assert texts(matrix, "id") == ["SYS-1", "PA-1", "PA-2", "PA-3", "PA-4", "SYS-2", "LNA-1", "LNA-2"]
    assert [row.depth for row in matrix.rows] == [0, 1, 1, 1, 1, 0, 1, 1]


def test_the_matrix_names_the_governing_value_with_the_cell_it_stands_in(matrix: ReportTable) -> None:
    row = cells(matrix, "PA-1")
    assert row["value"].text == "0.95 W", "as recorded, not as converted"
    assert row["evidence"].text == "pa_bench.xlsx · Bench 1 · D9"
    assert row["evidence"].origin is not None and row["evidence"].origin.sha256 == harbour.PA_FILE.sha256
    assert row["governed_at"].text == "30 GHz, +85 °C ambient" and row["item"].text == "PA-A"
    assert row["margin"].text == "-0.22 dB" and row["guarded_margin"].text == "-1.19 dB"
    assert row["guarded_margin"].number == pytest.approx(-1.188857538602619)


def test_the_matrix_counts_failing_and_without_evidence_apart(matrix: ReportTable) -> None:
    row = cells(matrix, "PA-1")
    assert (row["proved"].text, row["failing"].text, row["without_evidence"].text) == ("8 of 9", "4", "1")
    assert row["label"].text == "failing" and row["label"].tone is CellTone.BAD


def test_findings_are_counted_without_regard_to_case_of_ids(matrix: ReportTable) -> None:
    assert cells(matrix, "PA-1")["findings"].text == "1 error"
    assert cells(matrix, "PA-2")["findings"].text == "–"


def test_the_count_of_findings_leads_to_the_first_of_them(matrix: ReportTable) -> None:
    assert cells(matrix, "PA-1")["findings"].link == "findings/pa-1"
    assert cells(matrix, "PA-2")["findings"].link == ""


def test_what_a_board_asks_stands_first_in_the_matrix(matrix: ReportTable) -> None:
    assert [column.title for column in matrix.columns[:13]] == [
        "Requirement", "Title", "State", "Compliance", "Points proved", "Failing", "Without evidence", "Undecided",
        "Guarded margin", "Governed at", "Item", "Governing cell", "Findings",
    ]  # fmt: skip
    assert not any(column.detail for column in matrix.columns[:13])


def test_the_same_figures_stand_in_status_and_matrix(matrix: ReportTable) -> None:
    status = status_table(SNAPSHOT, RESULTS, ORDERED, DEPTHS)
    for ours, theirs in (("proved", "proved"), ("guarded_margin", "guarded_margin"), ("state", "label")):
        assert texts(status, ours) == texts(matrix, theirs)


def test_the_findings_of_a_requirement_are_counted_in_words_that_fit() -> None:
    several = [FINDING, *[FINDING.model_copy(update={"severity": Severity.WARNING})] * 12]
    found = compliance_matrix(SNAPSHOT, RESULTS, several, harbour.DICTIONARY, ORDERED, DEPTHS)
    told = cells(found, "PA-1")["findings"].text
    assert told == "1 error, 12 warnings"
    assert len(told) < next(column.width for column in found.columns if column.key == "findings")


def test_points_of_every_item_with_evidence_are_listed(points: ReportTable) -> None:
    rows = [
        dict(zip((column.key for column in points.columns), row.cells, strict=True))
        for row in points.rows
        if row.id == "PA-1"
    ]
    items = [row["item"].text for row in rows]
    assert items == ["PA-B"] * 9 + ["PA-A"] * 8, "all points of the item shown, evidence only of the other"
    assert sum(row["proved"].text == "yes" for row in rows[:9]) == RESULTS.of("PA-1").k
    assert sum(row["verdict"].text == "fail" for row in rows) == RESULTS.of("PA-1").n_failing
    assert [row["cell"].text for row in rows if row["verdict"].text == "none"] == ["–"]


def test_each_item_that_must_prove_has_all_its_points_listed(points: ReportTable) -> None:
    listed = [row.cells[2].text for row in points.rows if row.id == "PA-2"]
    assert sorted(listed) == ["PA-A"] * 9 + ["PA-B"] * 9
    proved = [row.cells[4].text for row in points.rows if row.id == "PA-2"].count("yes")
    assert (proved, len(listed)) == (RESULTS.of("PA-2").k, RESULTS.of("PA-2").n)


def test_a_converted_value_is_shown_beside_what_stands_in_its_cell(points: ReportTable) -> None:
    row = next(
        dict(zip((column.key for column in points.columns), row.cells, strict=True))
        for row in points.rows
        if row.id == "PA-1" and row.cells[2].text == "PA-A"
    )
    assert (row["value"].text, row["recorded"].text) == ("30.79 dBm", "1.2 W")
    assert row["u"].text == "0.76 dB", "twice the wider side of 1.2 W with u = 0.1 W: 2 · 10·lg(1.2 / 1.1)"
    assert row["lower"].text == "30 dBm" and row["upper"].text == "–"


def test_the_limit_of_each_point_is_shown_where_it_differs(points: ReportTable) -> None:
    upper = [row.cells[9].text for row in points.rows if row.id == "LNA-2"]
    assert upper == ["30 dB", "30 dB", "28 dB", "28 dB"]


def test_points_can_be_counted_before_they_are_listed() -> None:
    assert points_count(RESULTS, ORDERED) == sum(status.n for status in RESULTS.statuses.values()) == 52


def test_evidence_says_what_it_serves_and_which_bytes_it_was() -> None:
    table = evidence_table(SNAPSHOT, RESULTS)
    assert texts(table, "file") == ["=lna.csv", "=lna.csv", "pa_bench.xlsx", "pa_bench.xlsx"]
    assert cells(table, "T-PA")["serves"].text == "PA-1 (8), PA-2 (8)"
    assert cells(table, "T-PA")["sha256"].text == harbour.PA_FILE.sha256


def test_findings_lead_to_the_row_they_are_about() -> None:
    other = FINDING.model_copy(update={"subject": "T-PA", "subject_kind": "evidence_table"})
    table = findings_table([FINDING, other])
    assert [row.cells[2].link for row in table.rows] == ["matrix/pa-1", ""]
    assert table.rows[0].cells[0].tone is CellTone.BAD


def test_findings_about_one_thing_stand_side_by_side_worst_first() -> None:
    rest = [
        FINDING.model_copy(update={"subject": code, "rule": rule})
        for code, rule in (("B", "x"), ("PA-1", "y"))
    ]
    assert [(one.subject, one.rule) for one in by_subject([FINDING, *rest])] == [
        ("pa-1", "failing"), ("PA-1", "y"), ("B", "x"),
    ]  # fmt: skip


def test_about_names_the_inputs_by_hash_and_reads_no_clock() -> None:
    table = about_table(SNAPSHOT, RESULTS, harbour.DICTIONARY)
    said = dict(zip(texts(table, "name"), texts(table, "value"), strict=True))
    assert said["Judged as of"] == "2026-06-01" and said["Project revision"] == "1"
    assert harbour.PA_FILE.sha256 in said["Evidence file F-PA"]
    assert said["Input workbook"] == f"harbour-requirements.xlsx, SHA-256 {harbour.WORKBOOK.sha256}"
    assert said["Evidence received up to"] == "2026-05-01T00:00:00Z"
    assert table == about_table(SNAPSHOT, RESULTS, harbour.DICTIONARY)


def test_cautions_are_those_that_the_project_calls_for() -> None:
    assert cautions(SNAPSHOT, harbour.DICTIONARY) == (CAUTION, EXPOSURE_CAUTION, INVENTED)
    plain = a_snapshot(a_project(invented=False))
    assert cautions(plain, harbour.DICTIONARY) == (CAUTION,)


def test_totals_print_their_denominators() -> None:
    assert texts(compliance_totals(RESULTS, ORDERED), "count") == [
        "1 of 8",
        "1 of 8",
        "0 of 8",
        "6 of 8",
        "0 of 8",
    ]
    assert points_sentence(RESULTS, ORDERED) == (
        "28 of 52 required points proved, 4 failing (4 of them at points where another item is counted too), "
        "23 without evidence, 1 not decided (inconclusive or without credit) (8 applicable requirements of 8)"
    )
    others = [one for one in ORDERED if one.id != "PA-1"]
    assert points_sentence(RESULTS, others).startswith(
        "20 of 43 required points proved, 0 failing, 22 without evidence, 1 not decided"
    ), "20 + 0 + 22 + 1 are 43: nothing is counted twice, and nothing is said of it"
    counts = close_out_totals(RESULTS, ORDERED)
    assert sum(row.cells[1].number or 0 for row in counts.rows) == 8


def test_the_summary_adds_up_on_every_axis() -> None:
    table = summary_table(RESULTS, ORDERED)
    counts: dict[str, float] = {}
    for row in table.rows:
        counts[row.cells[0].text] = counts.get(row.cells[0].text, 0) + (row.cells[2].number or 0)
    assert counts["Compliance"] == counts["Close-out"] == 8
    points = {
        row.cells[1].text: row.cells[2].text for row in table.rows if row.cells[0].text == "Required points"
    }
    assert points == {
        "proved": "28 of 52", "failing": "4 of 52", "without evidence": "23 of 52", "undecided": "1 of 52",
    }  # fmt: skip


def test_the_state_stands_beside_the_requirement() -> None:
    table = status_table(SNAPSHOT, RESULTS, ORDERED, DEPTHS)
    assert [column.title for column in table.columns] == [
        "Requirement", "State", "Proved", "Guarded margin", "Governed at", "Title", "Block", "Limit",
    ]  # fmt: skip
    row = cells(table, "PA-1")
    assert (row["state"].text, row["proved"].text, row["block"].text) == ("failing", "8 of 9", "PA")
    assert (row["title"].text, row["governed_at"].text) == (
        next(one.title for one in ORDERED if one.id == "PA-1"),
        "30 GHz, +85 °C ambient, item PA-A",
    )


def test_a_project_without_anything_has_reports_too() -> None:
    empty = a_snapshot()
    results = harbour.results(empty)
    assert in_tree_order(empty) == ([], {})
    assert points_table(empty, results, []).rows == ()
    assert evidence_table(empty, results).rows == ()
    assert "no evidence yet" in texts(about_table(empty, results, harbour.DICTIONARY), "value")
