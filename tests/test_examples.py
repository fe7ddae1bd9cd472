"""The examples: the script reproduces what is committed, and the tool finds every trap that was set.

The traps are those of the table in ``examples/README.md``; numbers are asserted where the table tells them.
"""

from __future__ import annotations

import subprocess
import sys
from datetime import date
from pathlib import Path
from zipfile import ZipFile

import pytest

from specflow.importers.measurements import read_measurements
from specflow.importers.workbook import read_workbook
from specflow.model.conditions import ConditionsSet
from specflow.model.derivation import Derivation
from specflow.model.evidence import EvidenceTable
from specflow.model.finding import Severity
from specflow.model.project import Project
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import CloseOut, Compliance, Label, RequirementStatus, Verdict
from specflow.parameters import load_dictionary
from specflow.store import create_project, open_project
from specflow.workflows.attach import Decision, accept_attach, preview_attach
from specflow.workflows.budget_outcome import HowToCompute, budget_outcome
from specflow.workflows.demo import Demo, build_demo, examples_folder
from specflow.workflows.evaluate_project import Evaluation, evaluate_project
from specflow.workflows.load_workbook import accept_load, preview_load
from specflow.workflows.show_budget import budget_named
from tests.builders import a_snapshot

HERE = Path(__file__).parents[1] / "examples"
WRITTEN = sorted(
    path.relative_to(HERE)
    for pattern in ("**/*.xlsx", "**/*.csv")
    for path in HERE.glob(pattern)
    if not path.name.startswith("~$")
)


@pytest.fixture(scope="module")
def rewritten(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return a folder in which the script has written everything anew."""
    folder = tmp_path_factory.mktemp("rewritten")
    command = [sys.executable, "-B", str(HERE / "make_example.py"), str(folder)]
    subprocess.run(command, check=True, capture_output=True, timeout=60)
    return folder


def content(path: Path) -> dict[str, bytes]:
    """Return what a file holds; the parts of a workbook, because another zlib packs the same into other bytes."""
    if path.suffix != ".xlsx":
        return {path.name: path.read_bytes()}
    with ZipFile(path) as book:
        return {name: book.read(name) for name in book.namelist()}


def test_the_script_writes_all_files_that_are_committed(rewritten: Path) -> None:
    made = sorted(path.relative_to(rewritten) for path in rewritten.rglob("*") if path.is_file())
    assert made == WRITTEN
    assert len(made) == 8


@pytest.mark.parametrize("name", WRITTEN, ids=str)
def test_the_script_reproduces_the_committed_file(rewritten: Path, name: Path) -> None:
    assert content(rewritten / name) == content(HERE / name)


def test_the_same_script_gives_the_same_bytes(rewritten: Path, tmp_path: Path) -> None:
    command = [sys.executable, "-B", str(HERE / "make_example.py"), str(tmp_path)]
    subprocess.run(command, check=True, capture_output=True, timeout=60)
    for name in WRITTEN:
        assert (tmp_path / name).read_bytes() == (rewritten / name).read_bytes()


def test_the_examples_are_found_beside_the_package() -> None:
    assert examples_folder() == HERE


@pytest.fixture(scope="module")
def demo(tmp_path_factory: pytest.TempPathFactory) -> Demo:
    """Return the demo, built once."""
    return build_demo(tmp_path_factory.mktemp("demo") / "ferry", lambda text: None)


@pytest.fixture(scope="module")
def evaluation(demo: Demo) -> Evaluation:
    return demo.evaluation


def status(evaluation: Evaluation, requirement: str) -> RequirementStatus:
    return evaluation.results.of(requirement)


def rules_about(evaluation: Evaluation, subject: str) -> set[str]:
    """Return the codes of the rules that report something about a document."""
    return {finding.rule for finding in evaluation.findings if finding.subject == subject}


def messages(evaluation: Evaluation, rule: str) -> dict[str, str]:
    """Return what one rule reports, by subject."""
    return {finding.subject: finding.message for finding in evaluation.findings if finding.rule == rule}


def test_the_ferry_has_the_size_that_is_promised(evaluation: Evaluation) -> None:
    snapshot = evaluation.snapshot
    assert len(snapshot.requirements) == 60
    assert {requirement.tier.value for requirement in snapshot.requirements} == {
        "system",
        "assembly",
        "block",
    }
    assert len(snapshot.blocks) == 12
    assert len(snapshot.all(ConditionsSet)) == 6
    assert [item.serial for item in snapshot.items if item.block == "UT"] == ["HF-0007", "HF-0008"]
    assert snapshot.project.invented


def test_the_workbook_loads_without_any_finding() -> None:
    for workbook in HERE.glob("*/*-requirements.xlsx"):
        assert read_workbook(workbook, a_snapshot(), load_dictionary()).findings == []


BUDGETS = {
    # nominal margin at the worst point, where that is, share of the largest contributor in %
    "B-RX-GT": ("UT-GOT-1", 0.26, "17.7 GHz, +55 °C ambient", "RX-LNA", 63),
    "B-RX-NF": ("RXA-NF-1", 0.32, "17.7 GHz, +55 °C ambient", "RX-LNA", 88),
    "B-TX-EIRP": ("UT-EIRP-1", 0.48, "27.5 GHz, +55 °C ambient, beam θ 0°, beam φ 0°", "", 0),
    "B-EVM": ("UT-EVM-1", 1.83, "", "TXA", 78),
}


@pytest.mark.parametrize("code", BUDGETS)
def test_the_budgets_stand_as_told(evaluation: Evaluation, code: str) -> None:
    """The margins of the table in the README, and who has the largest share there."""
    requirement, margin, where, block, share = BUDGETS[code]
    budget = budget_named(evaluation.snapshot, code)
    outcome = budget_outcome(budget, evaluation.snapshot, evaluation.dictionary, HowToCompute(ways=()))
    (served,) = outcome.served
    assert served.requirement.id == requirement
    assert served.smallest_margin == pytest.approx(margin, abs=0.005)
    assert where in outcome.places[served.worst]
    shares = outcome.quantities[0].shares
    if shares is not None:
        largest = int(shares[:, served.worst].argmax())
        assert outcome.positions[largest].block == block
        assert 100 * shares[largest, served.worst] == pytest.approx(share, abs=0.5)


def test_the_lna_on_the_cold_plate_is_warmer_than_the_radome_in_the_air(evaluation: Evaluation) -> None:
    """The trap of budgets: ambient taken for baseplate. The radome makes noise at +55 °C, the feed at +73 °C."""
    budget = budget_named(evaluation.snapshot, "B-RX-GT")
    outcome = budget_outcome(budget, evaluation.snapshot, evaluation.dictionary, HowToCompute(ways=()))
    kelvin = {
        one.label: outcome.temperature_k[row, outcome.place] for row, one in enumerate(outcome.positions)
    }
    assert kelvin["Radome"] == pytest.approx(55 + 273.15)
    assert kelvin["Element feed"] == pytest.approx(73 + 273.15)
    lna = next(one for one in outcome.lines if one.line.block == "RX-LNA" and one.figure == "noise_figure")
    assert lna.value[outcome.place] == pytest.approx(1.5 + 0.007 * (73 - 41))


def test_the_demo_exports_its_budgets(demo: Demo) -> None:
    with ZipFile(demo.folder / "ferry-compliance.xlsx") as book:
        names = book.read("xl/workbook.xml").decode()
    page = (demo.folder / "ferry-compliance.html").read_text("utf-8")
    for code in BUDGETS:
        assert f'name="Budget {code}"' in names
        assert f'id="budget-{code}"' in page
    assert page.count("<svg ") >= 2 * len(BUDGETS)


def test_the_failing_corner_governs_its_requirement(evaluation: Evaluation) -> None:
    found = status(evaluation, "UT-EIRP-1")
    assert (found.label, found.compliance) == (Label.FAILING, Compliance.NON_COMPLIANT)
    governing = found.governing
    assert governing is not None
    assert governing.verdict is Verdict.FAIL
    assert governing.margin == pytest.approx(-1.1)
    assert governing.item == "UT-07"
    assert governing.words == "30 GHz, +55 °C ambient, beam θ 60°, beam φ 0°"
    assert {"failing", "failing-without-report"} <= rules_about(evaluation, "UT-EIRP-1")


def test_items_never_complete_each_other_and_a_record_off_its_setting_proves_nothing(
    evaluation: Evaluation,
) -> None:
    """36 points for each of two terminals: the first lacks the failing one, the second 12 hot and 6 cold ones."""
    found = status(evaluation, "UT-EIRP-1")
    assert (found.k, found.n, found.n_failing, found.n_missing) == (53, 72, 1, 18)


def test_a_pass_within_its_uncertainty_is_marginal(evaluation: Evaluation) -> None:
    found = status(evaluation, "TIL-GAI-1")
    assert (found.label, found.k, found.n) == (Label.MARGINAL, 9, 9)
    assert found.governing is not None
    assert found.governing.margin == pytest.approx(0.2)
    assert "marginal" in rules_about(evaluation, "TIL-GAI-1")


def test_the_column_in_a_wrong_unit_is_refused_and_proves_nothing(evaluation: Evaluation) -> None:
    path = HERE / "ferry" / "results" / "tile_and_amplifier.xlsx"
    tile, amplifier = read_measurements(path, before_attaching(), evaluation.dictionary).tables
    assert [(question.cell, question.what) for question in tile.questions] == [
        ("H1", "column H: Noise figure in dBm; a noise figure is a ratio (dB)")
    ]
    assert tile.document is None
    assert amplifier.questions == ()
    found = status(evaluation, "TIL-NF-1")
    assert (found.k, found.n_missing) == (0, 9)
    assert "unverified" in rules_about(evaluation, "TIL-NF-1")


def before_attaching() -> Snapshot:
    """Return a snapshot of the requirements alone: the demo's own has the mapping stored already."""
    workbook = HERE / "ferry" / "ferry-requirements.xlsx"
    return a_snapshot(*read_workbook(workbook, a_snapshot(), load_dictionary()).documents)


def test_two_laboratories_that_contradict_each_other_are_a_conflict(evaluation: Evaluation) -> None:
    found = status(evaluation, "UT-XPD-1")
    assert found.label is Label.CONFLICTING
    assert found.n_failing == 0
    (conflict,) = found.conflicts
    assert conflict.difference == pytest.approx(4.1)
    assert conflict.allowed == pytest.approx((1.0**2 + 1.2**2) ** 0.5)
    assert "28.75 GHz" in conflict.words
    assert "conflicting-evidence" in rules_about(evaluation, "UT-XPD-1")


def test_a_hole_in_a_trace_leaves_one_range_without_a_flatness(evaluation: Evaluation) -> None:
    found = status(evaluation, "RXA-FLT-1")
    assert (found.k, found.n, found.n_failing) == (2, 3, 0)
    (derived,) = [one for one in evaluation.snapshot.all(EvidenceTable) if one.derivation]
    (derivation,) = evaluation.snapshot.all(Derivation)
    assert (derivation.law, derivation.gives.parameter, derived.rows) == ("ripple", "gain_flatness", 2)
    (left,) = derived.left_out
    assert left.text == "item RP-0007, +55 °C ambient"
    assert left.reason == "no value between 18.9 and 19.2 GHz; the step is 0.1 GHz"
    assert "left-out-cells" in rules_about(evaluation, derived.id)


def test_hidden_row_and_mean_are_left_out_and_stay_a_finding(evaluation: Evaluation) -> None:
    (table,) = [one for one in evaluation.snapshot.all(EvidenceTable) if one.sheet == "Upconverter"]
    reasons = {left_out.cell: left_out.reason for left_out in table.left_out}
    assert set(reasons) == {"A20", "A21"}
    assert "hidden" in reasons["A20"]
    assert "summary" in reasons["A21"]
    assert table.rows == 8
    assert "left-out-cells" in rules_about(evaluation, table.id)
    for requirement in ("UPC-GAI-1", "UPC-P1D-1", "UPC-IRJ-1", "UPC-LOL-1", "UPC-EVM-1"):
        found = status(evaluation, requirement)
        assert (found.label, found.k, found.n) == (Label.PARTIALLY_VERIFIED, 8, 9), requirement
    assert "30 GHz, +73 °C baseplate" in messages(evaluation, "partially-verified")["UPC-GAI-1"]


def test_percent_formatted_cells_are_percent(evaluation: Evaluation) -> None:
    """The greatest cell holds 0.0326 and shows 3.3 %: 0.74 % from the limit of 4 %, not 3.97 %."""
    governing = status(evaluation, "UPC-EVM-1").governing
    assert governing is not None
    assert governing.margin == pytest.approx(0.74)


def test_an_upper_bound_does_not_show_a_least_value(evaluation: Evaluation) -> None:
    found = status(evaluation, "DNC-IRJ-1")
    assert (found.label, found.k, found.n, found.n_failing) == (Label.INCONCLUSIVE, 8, 9, 0)
    assert found.governing is not None
    assert found.governing.verdict is Verdict.INCONCLUSIVE
    assert "20.2 GHz, +55 °C ambient" in messages(evaluation, "inconclusive")["DNC-IRJ-1"]


def test_directions_spelled_another_way_serve_the_same_points(evaluation: Evaluation) -> None:
    """The second laboratory counts θ to both sides; its smaller XPD governs the point at boresight."""
    (second,) = [one for one in evaluation.snapshot.all(EvidenceTable) if one.sheet == "Range B"]
    assert second.id not in evaluation.results.unmatched
    governing = status(evaluation, "UT-XPD-1").governing
    assert governing is not None
    assert governing.record is not None
    assert (governing.record.table, governing.margin) == (second.id, pytest.approx(23.6 - 22))
    theta = evaluation.snapshot.load_columns([second.id])[second.id].conditions.numeric["scan_theta"]
    assert theta.min() == -60


@pytest.mark.parametrize("requirement", ["DNC-GAI-1", "LNA-NF-1", "LNA-GAI-1"])
def test_condition_maps_lead_from_block_to_system_conditions(
    evaluation: Evaluation, requirement: str
) -> None:
    found = status(evaluation, requirement)
    assert (found.label, found.k, found.n) == (Label.READY, 9, 9)


def test_a_declared_path_moves_values_between_planes(evaluation: Evaluation) -> None:
    found = status(evaluation, "TIL-P1D-1")
    assert (found.k, found.n) == (9, 9)
    assert any("-0.6 dB by declared path" in remark for remark in found.remarks)


def test_a_reading_that_is_not_there_leaves_its_point_open(evaluation: Evaluation) -> None:
    found = status(evaluation, "TIL-PHE-1")
    assert (found.label, found.k, found.n) == (Label.PARTIALLY_VERIFIED, 8, 9)
    assert "27.5 GHz, -7 °C baseplate" in messages(evaluation, "partially-verified")["TIL-PHE-1"]


def test_a_gap_in_a_range_and_a_missing_test_leave_the_mask_open(evaluation: Evaluation) -> None:
    analysis, test = status(evaluation, "UT-OAD-1").activities
    assert (analysis.k, analysis.n) == (5, 6)
    assert (test.k, test.n) == (0, 6)
    assert "28.75 GHz, θ 2 to 60°, φ 90°" in messages(evaluation, "partially-verified")["UT-OAD-1"]
    assert "an analysis does not close a test" in messages(evaluation, "no-credit")["UT-OAD-1"]


def test_open_values_block_or_keep_from_closing(evaluation: Evaluation) -> None:
    assert status(evaluation, "UT-BST-1").label is Label.TBD
    assert {"tbd-left", "open-value-overdue"} <= rules_about(evaluation, "UT-BST-1")
    reviewed = status(evaluation, "UT-PTE-1")
    assert (reviewed.label, reviewed.close_out) == (Label.TBR, CloseOut.OPEN)
    assert (reviewed.k, reviewed.n) == (36, 36)
    assert "tbr-left" in rules_about(evaluation, "UT-PTE-1")


def test_what_was_not_shared_out_or_planned_is_said(evaluation: Evaluation) -> None:
    assert status(evaluation, "UT-STU-1").label is Label.UNALLOCATED
    assert set(messages(evaluation, "unallocated")) == {"UT-STU-1"}
    assert {"no-conditions", "not-planned"} <= rules_about(evaluation, "UT-SCN-1")


def test_two_limits_on_one_quantity_are_found(evaluation: Evaluation) -> None:
    (told,) = messages(evaluation, "contradicting-limits").items()
    assert told[0] == "UT-DCP-2"
    assert "UT-DCP-1" in told[1]


def test_a_waiver_closes_and_never_makes_compliant(evaluation: Evaluation) -> None:
    found = status(evaluation, "DNC-NF-1")
    assert (found.label, found.compliance) == (Label.CLOSED_WAIVED, Compliance.NON_COMPLIANT)
    assert found.n_failing == 1


def test_the_waiver_lapses_after_its_day(demo: Demo) -> None:
    with open_project(demo.project, read_only=True) as store:
        later = evaluate_project(store, date(2027, 1, 1))
    assert status(later, "DNC-NF-1").label is Label.WAIVER_EXCEEDED


def test_nothing_else_is_an_error(evaluation: Evaluation) -> None:
    errors = {
        (finding.rule, finding.subject)
        for finding in evaluation.findings
        if finding.severity is Severity.ERROR
    }
    assert errors == {
        ("failing", "UT-EIRP-1"),
        ("conflicting-evidence", "UT-XPD-1"),
        ("open-value-overdue", "UT-BST-1"),
        ("contradicting-limits", "UT-DCP-2"),
    }
    assert evaluation.results.unmatched == {}


def test_the_gateway_loads_and_attaches_without_a_mapping(tmp_path: Path) -> None:
    folder = HERE / "gateway"
    with create_project(tmp_path / "gateway.specflow", Project(name="gateway", invented=True)) as store:
        accept_load(store, preview_load(store, folder / "gateway-requirements.xlsx"), by="tester")
        accept_attach(store, preview_attach(store, folder / "gateway_bench.csv"), Decision(by="tester"))
        found = evaluate_project(store, date(2026, 6, 30))
    assert len(found.snapshot.requirements) == 10
    for requirement in ("GW-POW-1", "GW-SEN-1", "GW-FER-1"):
        one = status(found, requirement)
        assert (one.k, one.n, one.n_failing) == (8, 9, 0), (requirement, one.mismatches)


def test_the_readme_names_every_file_and_marks_it_invented() -> None:
    text = (HERE / "README.md").read_text(encoding="utf-8")
    assert "invented" in text.splitlines()[2]
    for name in WRITTEN:
        if name.parts[0] == "ferry":
            assert name.name in text, name
    for code, (requirement, margin, *_) in BUDGETS.items():
        row = next(line for line in text.splitlines() if line.startswith(f"| `{code}`"))
        assert f"`{requirement}`" in row and f"+{margin}" in row
