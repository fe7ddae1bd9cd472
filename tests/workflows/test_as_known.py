"""Budgets as known through the store: which evidence serves which place, serial as built, recording."""

from __future__ import annotations

from dataclasses import replace
from datetime import date
from pathlib import Path

import numpy as np
import pytest

from specflow.budgets.closure import closure_of_children
from specflow.budgets.knowledge import KnownLine
from specflow.budgets.probe import Probe
from specflow.errors import DocumentError
from specflow.model.base import Document
from specflow.model.block import HardwareType
from specflow.model.budget import Budget
from specflow.model.evidence import EvidenceColumns, EvidenceTable, ValueColumn
from specflow.model.requirement import Method
from specflow.parameters import load_dictionary
from specflow.store import ProjectStore
from specflow.workflows.allocate import accept_allocation, preview_allocation
from specflow.workflows.as_known import children_of_budget, known_budget
from specflow.workflows.evaluate_project import evaluate_project
from specflow.workflows.known_tables import known_as_json, known_tables
from specflow.workflows.record_known import record_known
from tests.budgets import receiver
from tests.budgets.chains import a_chain, project_of
from tests.builders import (
    a_quantity,
    a_requirement,
    a_value_column,
    adding,
    an_evidence_file,
    an_evidence_table,
    an_item,
    at_least,
    editing,
    some_columns,
    some_evidence,
)

AS_OF = date(2026, 6, 1)


def noise_table(id: str, block: str, **fields: object) -> EvidenceTable:
    """Return a table of noise figures over temperature."""
    column = a_value_column("NF", quantity=a_quantity("noise_figure"))
    return an_evidence_table(id, block=block, values=(column,), conditions=(), **fields)


def over_temperature(*values: float, item: str = "LNA-1", u: float | None = None) -> EvidenceColumns:
    """Return readings at -30, 20 and 55 °C."""
    columns = some_columns(temperature_ambient=[-30.0, 20.0, 55.0][: len(values)])
    return some_evidence({"NF": values}, conditions=columns, items=item, u=u)


def with_evidence(
    store: ProjectStore, documents: list[Document], columns: dict[str, EvidenceColumns]
) -> None:
    """Add evidence to the project."""
    store.apply(adding(an_evidence_file(), *documents), columns=columns, by="A. Invented")


def items() -> list[Document]:
    """Return two amplifiers, one of them built into a system."""
    return [
        an_item("SYS-1", block="SYS"),
        an_item("LNA-1", hardware_type=HardwareType.QUALIFICATION, built_into="SYS-1"),
        an_item("LNA-2", hardware_type=HardwareType.QUALIFICATION),
    ]


def test_evidence_is_used_place_by_place_in_the_order_of_rank(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        documents = [
            *items(),
            noise_table("EV-1", "LNA", rows=2),
            noise_table("EV-2", "LNA", method=Method.ANALYSIS, simulation_model="m", rows=3),
        ]
        columns = {"EV-1": over_temperature(1.0, 1.3), "EV-2": over_temperature(0.8, 0.9, 1.1, item="")}
        with_evidence(store, documents, columns)
        found = known_budget(store, "RX", AS_OF)
    line = next(one for one in found.known.lines if one.read.line.parameter == "noise_figure")
    assert list(line.value) == pytest.approx([1.0, 1.3, 1.1])
    assert line.source_words(0) == "test on qualification or production hardware: EV-1 NF, 1 item"
    assert line.source_words(2) == "analysis: EV-2 NF"
    assert set(found.tables) == {"EV-1", "EV-2"}


@pytest.mark.parametrize(("said", "taken"), [("DSB", False), ("SSB", True), ("", True)])
def test_a_noise_figure_of_the_other_sideband_is_left_out(tmp_path: Path, said: str, taken: bool) -> None:
    column = a_value_column("NF", quantity=a_quantity("noise_figure", plane=said))
    table = an_evidence_table("EV-1", block="LNA", values=(column,), conditions=())
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        with_evidence(store, [*items(), table], {"EV-1": over_temperature(1.0, 1.3, 1.4)})
        found = known_budget(store, "RX", AS_OF)
    assert bool(found.tables) is taken
    assert any("another sideband" in note for note in found.notes) is not taken


def test_what_may_not_count_is_left_out_and_said(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        with_evidence(
            store,
            [*items(), noise_table("EV-1", "LNA", provisional=True)],
            {"EV-1": over_temperature(1.0, 1.3, 1.4)},
        )
        found = known_budget(store, "RX", AS_OF)
    assert not found.tables
    assert any("not accepted yet" in note for note in found.notes)


def test_one_system_as_built_takes_its_own_amplifier(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        documents = [*items(), noise_table("EV-1", "LNA"), noise_table("EV-2", "LNA")]
        columns = {
            "EV-1": over_temperature(1.0, 1.1, 1.2, item="LNA-1", u=0.05),
            "EV-2": over_temperature(2.0, 2.1, 2.2, item="SN-LNA-2"),
        }
        with_evidence(store, documents, columns)
        of_type = known_budget(store, "RX", AS_OF)
        built = known_budget(store, "RX", AS_OF, serial="sn-sys-1")
        with pytest.raises(DocumentError, match="nothing is recorded as built into LNA-2"):
            known_budget(store, "RX", AS_OF, serial="LNA-2")
        with pytest.raises(DocumentError, match="there is no item"):
            known_budget(store, "RX", AS_OF, serial="X")
    typical, own = (
        next(one for one in each.known.lines if one.read.line.parameter == "noise_figure")
        for each in (of_type, built)
    )
    assert list(typical.value) == pytest.approx([1.5, 1.6, 1.7]) and typical.spread[0] > 0.5
    assert list(own.value) == pytest.approx([1.0, 1.1, 1.2]) and own.spread[0] == 0
    assert own.common[0] == pytest.approx(0.05)
    assert any("no specimen of MIX is recorded as built into SYS-1" in note for note in built.notes)


def test_a_block_that_misses_is_judged_by_the_system(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        accept_allocation(store, preview_allocation(store, "RX"), by="A. Invented")
        with_evidence(
            store,
            [*items(), noise_table("EV-1", "LNA"), noise_table("EV-3", "MIX")],
            {"EV-1": over_temperature(2.4, 2.5, 2.8), "EV-3": over_temperature(5.0, 5.0, 5.0, item="")},
        )
        found = known_budget(store, "RX", AS_OF)
    (miss,) = found.reallocation.misses
    assert miss.line == "LNA noise_figure" and "+55 °C" in miss.words
    assert [cost.requirement for cost in miss.costs] == ["SYS-NF"]
    assert {one.line for one in found.reallocation.slack} == {"MIX noise_figure"}
    told = known_as_json(found)
    assert told["misses"][0]["source"].endswith("EV-1 NF, 1 item")
    assert [one.key for one in known_tables(found)][:3] == ["margins", "sources", "misses"]


def test_the_result_is_recorded_as_analysis_with_its_sources(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        with_evidence(
            store, [*items(), noise_table("EV-1", "LNA")], {"EV-1": over_temperature(1.0, 1.1, 1.2, u=0.05)}
        )
        found = known_budget(store, "RX", AS_OF)
        tables = record_known(store, found, by="A. Invented")
        evaluation = evaluate_project(store, AS_OF)
        snapshot = evaluation.snapshot
        first = snapshot.find(EvidenceTable, tables[0])
        assert first is not None
        content = store.file_bytes(first.file)
    assert tables == ("EV-2", "EV-3")
    assert first.method is Method.ANALYSIS and "EV-1" in first.hardware_note
    assert content is not None and "EV-1 NF" in content.decode()
    assert first.id not in evaluation.results.unmatched
    status = evaluation.results.of("SYS-NF")
    assert status.k == 0 and status.n == 3  # an analysis shows progress and never closes a test
    assert status.activities[0].items
    reading = next(iter(status.activities[0].items.values()))
    assert list(reading.value_low) == pytest.approx(list(found.known.served[0].served.result))


def test_a_gain_recorded_of_what_the_budget_calls_a_loss_turns_its_sign(tmp_path: Path) -> None:
    column = a_value_column("S21", quantity=a_quantity("gain"))
    table = an_evidence_table("EV-1", block="FIL", values=(column,), conditions=(), method=Method.ANALYSIS)
    arrays = some_evidence(
        {"S21": (-2.2, -2.1, -2.0)},
        conditions=some_columns(temperature_ambient=[-30.0, 20.0, 55.0]),
        items="",
        u=0.02,
    )
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        with_evidence(store, [table], {"EV-1": arrays})
        found = known_budget(store, "RX", AS_OF)
    line = next(one for one in found.known.lines if one.read.line.parameter == "insertion_loss")
    assert list(line.value) == pytest.approx([2.2, 2.1, 2.0])
    assert line.common[0] == pytest.approx(0.02)


def test_nothing_known_is_nothing_to_record(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        found = known_budget(store, "RX", AS_OF)
        with pytest.raises(DocumentError, match="no result to record"):
            record_known(store, found, by="A. Invented")


def test_a_requirement_below_the_one_served_holds_its_line_without_an_allocation() -> None:
    budget = a_chain({"block": "A", "gain": 10.0}, {"block": "B", "gain": 5.0}, parameter="gain")
    quantity = a_quantity("gain")
    below = a_requirement("R-A", block="A", quantity=quantity, limit=at_least(8), parents=("R-1",))
    elsewhere = a_requirement("R-X", block="A", quantity=quantity, limit=at_least(9))
    other = a_requirement("R-NF", block="A", quantity=a_quantity("noise_figure"), parents=("R-1",))
    snapshot = project_of(budget, below, elsewhere, other, limit=at_least(12))
    assert [one.id for one in children_of_budget(snapshot, budget)] == ["R-A"]
    (found,) = closure_of_children(
        Probe.of(budget, snapshot, load_dictionary()), children_of_budget(snapshot, budget)
    ).limits
    assert found.smallest == pytest.approx(8.0 + 5.0 - 12.0)


def columns_of(*names: tuple[str, str, str]) -> tuple[ValueColumn, ...]:
    """Return value columns by name, parameter and unit."""
    return tuple(
        a_value_column(name, quantity=a_quantity(parameter), unit=unit) for name, parameter, unit in names
    )


HOT_AND_COLD = some_columns(temperature_ambient=[-30.0, 20.0, 55.0])


def known_line(store: ProjectStore, parameter: str, position: int = 1) -> KnownLine:
    found = known_budget(store, "RX", AS_OF).known
    return next(
        one
        for one in found.lines
        if (one.read.line.parameter, one.read.line.position) == (parameter, position)
    )


def test_an_output_intercept_serves_a_line_at_the_input_through_the_gain_recorded_beside_it(
    tmp_path: Path,
) -> None:
    """OIP3 20 dBm (u 0.4 dB) and gain 18.5 dB (u 0.3 dB) of one row: IIP3 1.5 dBm, u 0.5 dB."""
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        table = an_evidence_table(
            "EV-1",
            block="LNA",
            values=columns_of(("OIP3", "oip3", "dBm"), ("G", "gain", "dB")),
            conditions=(),
            rows=3,
        )
        made = some_evidence(
            {"OIP3": [20.0, 19.0, 18.0], "G": [18.5, 18.0, 17.0]}, conditions=HOT_AND_COLD, u=0.4
        )
        gain = replace(made.values["G"], u=np.full(3, 0.3))
        made = replace(made, values={**made.values, "G": gain})
        with_evidence(store, [*items(), table], {"EV-1": made})
        line = known_line(store, "iip3")
    assert line.value.tolist() == pytest.approx([1.5, 1.0, 1.0])
    assert line.common.tolist() == pytest.approx([0.5, 0.5, 0.5])
    assert line.source_words(0).startswith("test on qualification or production hardware")
    assert "EV-1 OIP3 less the gain (the gain recorded beside it)" in line.source_words(0)


def test_through_an_estimated_gain_an_intercept_is_known_no_better_than_that(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        table = an_evidence_table(
            "EV-1", block="LNA", values=columns_of(("OIP3", "oip3", "dBm")), conditions=(), rows=3
        )
        made = some_evidence({"OIP3": [20.0, 19.0, 18.0]}, conditions=HOT_AND_COLD, u=0.4)
        with_evidence(store, [*items(), table], {"EV-1": made})
        line = known_line(store, "iip3")
    # gain 18 dB ± 0.5 dB, uniform: u = 0.289 dB
    assert line.value.tolist() == pytest.approx([2.0, 1.0, 0.0])
    assert line.common[0] == pytest.approx(np.hypot(0.4, 0.5 / np.sqrt(3.0)))
    assert line.source_words(0).startswith(
        "estimate: EV-1 OIP3 less the gain (the gain of the block, estimate"
    )


def test_the_gain_of_the_same_specimen_is_taken_from_another_table(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        tables = [
            an_evidence_table(
                "EV-1", block="LNA", values=columns_of(("OIP3", "oip3", "dBm")), conditions=(), rows=3
            ),
            an_evidence_table(
                "EV-2", block="LNA", values=columns_of(("G", "gain", "dB")), conditions=(), rows=6
            ),
        ]
        twice = some_columns(temperature_ambient=[-30.0, 20.0, 55.0] * 2)
        gains = some_evidence(
            {"G": [18.0, 18.0, 18.0, 15.0, 15.0, 15.0]},
            conditions=twice,
            items=["LNA-1"] * 3 + ["LNA-2"] * 3,
        )
        made = some_evidence({"OIP3": [20.0, 19.0, 18.0]}, conditions=HOT_AND_COLD, items="LNA-2")
        with_evidence(store, [*items(), *tables], {"EV-1": made, "EV-2": gains})
        line = known_line(store, "iip3")
    assert line.value.tolist() == pytest.approx([5.0, 4.0, 3.0])
    assert "less the gain (the gain of the block, the same specimen, EV-2 G)" in line.source_words(0)
    assert line.source_words(0).startswith("test on qualification or production hardware")


def test_what_is_recorded_straight_goes_before_what_comes_through_the_gain(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        tables = [
            an_evidence_table(
                "EV-1", block="LNA", values=columns_of(("OIP3", "oip3", "dBm")), conditions=(), rows=3
            ),
            an_evidence_table(
                "EV-2", block="LNA", values=columns_of(("IIP3", "iip3", "dBm")), conditions=(), rows=1
            ),
        ]
        made = {
            "EV-1": some_evidence({"OIP3": [20.0, 19.0, 18.0]}, conditions=HOT_AND_COLD),
            "EV-2": some_evidence({"IIP3": [-3.0]}, conditions=some_columns(temperature_ambient=[-30.0])),
        }
        with_evidence(store, [*items(), *tables], made)
        line = known_line(store, "iip3")
    assert line.value.tolist() == pytest.approx([-3.0, 1.0, 0.0])


def test_a_noise_temperature_serves_a_noise_figure_exactly(tmp_path: Path) -> None:
    """290 K is 3.0103 dB; u = 10 K there is 10/ln 10 · 10/580 = 0.0749 dB."""
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        table = an_evidence_table(
            "EV-1", block="LNA", values=columns_of(("Te", "noise_temperature", "K")), conditions=(), rows=3
        )
        made = some_evidence({"Te": [290.0, 145.0, 0.0]}, conditions=HOT_AND_COLD, u=10.0)
        with_evidence(store, [*items(), table], {"EV-1": made})
        line = known_line(store, "noise_figure")
    assert line.value.tolist() == pytest.approx([3.0103, 1.7609, 0.0], abs=1e-4)
    assert line.common[0] == pytest.approx(0.0749, abs=1e-4)
    assert "EV-1 Te as a noise figure" in line.source_words(0)


def test_evidence_of_another_plane_than_the_line_states_is_left_out(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        budget = store.load().find(Budget, "RX")
        assert budget is not None
        lines = tuple(
            one.model_copy(update={"plane": "element port"}) if one.parameter == "noise_figure" else one
            for one in budget.lines
        )
        store.apply([editing(budget, lines=lines)], by="A. Invented")
        column = a_value_column("NF", quantity=a_quantity("noise_figure", plane="connector"))
        table = an_evidence_table("EV-1", block="LNA", values=(column,), conditions=(), rows=3)
        with_evidence(store, [*items(), table], {"EV-1": over_temperature(1.0, 1.1, 1.2)})
        found = known_budget(store, "RX", AS_OF)
    assert any("EV-1 NF is left out: another plane" in note for note in found.notes)
