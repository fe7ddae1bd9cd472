"""The budget as a worksheet: by hand and by the tool are the same, and no formula holds what a person typed."""

from __future__ import annotations

import re
from dataclasses import replace

import pytest

from specflow.budgets import quantities
from specflow.budgets.forms import CASCADE_ROLES, ERROR_VECTOR_ROLES
from specflow.model.budget import Law
from specflow.model.formula_sheet import CellLook, FormulaCell, FormulaSheet
from specflow.reports.budget import titles
from specflow.reports.calculation_grid import cell_name, plain
from specflow.reports.calculation_sheet import calculation_sheet
from specflow.workflows.budget_outcome import FORMS, HowToCompute, budget_outcome
from tests import receiver
from tests.budgets.chains import POZAR_10_2, a_chain, project_of
from tests.builders import a_budget, a_budget_line, a_quantity, at_most

NAMED = titles(receiver.DICTIONARY)
NOMINAL = HowToCompute(ways=())
ALL = tuple(receiver.UNITS)
FORMULA = re.compile(
    r'=(?:SUM|SUMSQ|SUMPRODUCT|LOG10|SQRT|EXP|RADIANS|IF|IFERROR|MIN|INDEX|MATCH|COUNT|ISNUMBER|"no bound"|"–"|'
    r"1E\+99|\$[A-Z]+\$\d+|"
    r"\d+(?:\.\d+)?(?:e-?\d+)?|[-+*/^(),:=])+"
)


def sheet(intermodulation: str = "coherent") -> FormulaSheet:
    budget = receiver.a_receiver(*ALL, intermodulation=intermodulation)
    return calculation_sheet(receiver.outcome(budget, NOMINAL, ALL), 3, NAMED)


def cells(made: FormulaSheet) -> list[FormulaCell]:
    return [cell for row in made.rows for cell in row if cell is not None]


def differences(made: FormulaSheet) -> list[float]:
    return [abs(cell.number or 0.0) for cell in cells(made) if cell.look is CellLook.DIFFERENCE]


@pytest.mark.parametrize("intermodulation", ["coherent", "non-coherent"])
def test_every_quantity_by_hand_is_what_the_tool_computes(intermodulation: str) -> None:
    """Two routes: the textbook forms in columns, and the calculators on arrays."""
    made = sheet(intermodulation)
    found = differences(made)
    positions = len(receiver.STAGES)
    # 18 results, their margins, and the 18 cumulative columns where both have a value
    assert len(found) >= len(ALL) * (positions - 2) + 2 * len(ALL)
    assert max(found) < 1e-9


def test_image_noise_is_followed_by_hand_along_two_conversions() -> None:
    budget = receiver.with_image(receiver.a_receiver(*ALL))
    made = calculation_sheet(receiver.outcome(budget, NOMINAL, ALL), 3, NAMED)
    assert any(cell.text == "NF with image [dB]" for cell in cells(made))
    assert max(differences(made)) < 1e-9


def test_one_cell_chooses_the_condition_point_of_the_whole_sheet() -> None:
    """What differs between points is taken from the table; what does not stays a given value in its place."""
    found = receiver.outcome(receiver.a_receiver(*ALL), NOMINAL, ALL)
    made = calculation_sheet(found, 1, NAMED)
    (choice,) = made.choices
    listed = [made.rows[row][choice.list_column] for row in range(choice.first_row, choice.last_row + 1)]
    assert [cell.text for cell in listed if cell is not None] == list(found.places)
    chooser = made.rows[choice.row][choice.column]
    assert chooser is not None and chooser.text == found.places[1] and chooser.look is CellLook.INPUT
    taken = [cell for cell in cells(made) if cell.formula.startswith("=INDEX")]
    kelvin = [cell for cell in taken if cell.look is CellLook.INPUT]
    assert kelvin and all(cell.number is not None for cell in taken)
    same = calculation_sheet(replace(found, places=("one",) * len(found.places)), 1, NAMED)
    assert len({cell.text for cell in cells(same) if cell.text.endswith(": one")}) == len(found.places)


def test_a_single_point_is_not_chosen() -> None:
    budget = a_chain(*POZAR_10_2)
    found = budget_outcome(budget, project_of(budget), receiver.DICTIONARY, NOMINAL)
    made = calculation_sheet(found, 0, NAMED)
    assert made.choices == () and not any("INDEX" in cell.formula for cell in cells(made))


def test_no_quantity_of_a_cascade_is_left_out() -> None:
    assert set(quantities(Law.CASCADE)) == set(ALL)


def test_a_quantity_that_the_sheet_does_not_know_is_said_to_be_missing() -> None:
    found = receiver.outcome(how=NOMINAL)
    strange = tuple(replace(one, parameter="something_new") for one in found.quantities)
    made = calculation_sheet(replace(found, quantities=strange), 0, NAMED)
    assert sum(cell.text == "not in this sheet" for cell in cells(made)) == 2 * (1 + len(receiver.STAGES))
    assert differences(made) == []


def test_a_formula_holds_numbers_references_and_functions_only() -> None:
    hostile = '=HYPERLINK("http://invented.invalid","x")'
    budget = receiver.a_receiver(title=hostile)
    lines = tuple(one.model_copy(update={"source": hostile}) for one in budget.lines)
    budget = budget.model_copy(update={"lines": lines})
    made = calculation_sheet(receiver.outcome(budget, NOMINAL), 0, NAMED)
    formulas = [cell.formula for cell in [*cells(made), *cells(sheet())] if cell.formula]
    assert len(formulas) > 100
    for formula in formulas:
        assert FORMULA.fullmatch(formula), formula


def test_every_reference_leads_to_a_cell_of_the_sheet() -> None:
    made = sheet()
    there = {
        cell_name(row, column, fixed=True)
        for row, line in enumerate(made.rows)
        for column, cell in enumerate(line)
        if cell is not None
    }
    named = set()
    for cell in cells(made):
        single = re.sub(r"\$[A-Z]+\$\d+:\$[A-Z]+\$\d+", "", cell.formula)  # a range may hold empty cells
        named |= set(re.findall(r"\$[A-Z]+\$\d+", single))
    assert named and named <= there


def test_every_formula_carries_the_value_it_has() -> None:
    for cell in cells(sheet()):
        if cell.formula:
            assert cell.number is not None or cell.text == "no bound"


def test_the_physical_temperature_of_a_loss_is_a_cell_to_be_changed() -> None:
    inputs = [cell.number for cell in cells(sheet()) if cell.look is CellLook.INPUT]
    assert any(number == pytest.approx(328.15) for number in inputs)  # +55 °C, the fourth place


@pytest.mark.parametrize(
    ("law", "unit", "values", "expected"),
    [
        ("power sum", "dBm", (-10.0, -10.0), -6.9897),
        ("voltage sum", "dBm", (-10.0, -10.0), -3.9794),
    ],
)
def test_sums_of_levels_are_calculated_too(
    law: str, unit: str, values: tuple[float, ...], expected: float
) -> None:
    lines = tuple(
        a_budget_line(place, f"S{place}", "spurious_emission", value, unit=unit)
        for place, value in enumerate(values, 1)
    )
    budget = a_budget(law=law, quantity=a_quantity("spurious_emission"), lines=lines)
    found = budget_outcome(budget, project_of(budget, limit=at_most(0, unit)), receiver.DICTIONARY, NOMINAL)
    made = calculation_sheet(found, 0, NAMED)
    assert max(differences(made)) < 1e-9
    assert any(cell.number == pytest.approx(expected, abs=1e-4) for cell in cells(made) if cell.formula)


def test_an_error_vector_is_calculated_from_what_is_stated() -> None:
    lines = (
        a_budget_line(1, "TX", "evm", 3.0, unit="%"),
        a_budget_line(2, "LO", "integrated_phase_error", 1.0, unit="deg"),
        a_budget_line(3, "MOD", "image_rejection", 40.0),
        a_budget_line(4, "MOD2", "carrier_leakage", -40.0, unit="dBc"),
        a_budget_line(5, "RX", "snr", 40.0),
    )
    budget = a_budget(law="root sum of squares", quantity=a_quantity("evm"), lines=lines)
    found = budget_outcome(budget, project_of(budget, limit=at_most(8, "%")), receiver.DICTIONARY, NOMINAL)
    made = calculation_sheet(found, 0, NAMED)
    assert max(differences(made)) < 1e-9
    whole = (3.0**2 + 1.7452**2 + 3 * 1.0**2) ** 0.5  # 1° of phase is 1.745 %, 40 dB are 1 %
    assert any(cell.number == pytest.approx(whole, abs=1e-3) for cell in cells(made) if cell.formula)


def test_identical_elements_in_a_sum_are_counted_in_the_sheet() -> None:
    lines = (a_budget_line(1, "A", "spurious_emission", -20.0, unit="dBm"),)
    budget = a_budget(
        law="power sum",
        quantity=a_quantity("spurious_emission"),
        positions=({"order": 1, "block": "A", "count": 10},),
        lines=lines,
    )
    found = budget_outcome(budget, project_of(budget, limit=at_most(0, "dBm")), receiver.DICTIONARY, NOMINAL)
    assert max(differences(calculation_sheet(found, 0, NAMED))) < 1e-9


def test_an_ideal_chain_has_no_bound_and_no_difference() -> None:
    stages = ({"block": "A", "gain": -1.0, "passive": True}, {"block": "B", "gain": 10.0, "iip3": 5.0})
    budget = a_chain(*stages, parameter="iip3")
    found = budget_outcome(
        budget, project_of(budget, limit=at_most(100, "dBm")), receiver.DICTIONARY, NOMINAL
    )
    made = calculation_sheet(found, 0, NAMED)
    assert any(cell.text == "no bound" and cell.formula for cell in cells(made))
    assert max(differences(made)) < 1e-9


@pytest.mark.parametrize(("value", "text"), [(1.0, "1"), (0.5, "0.5"), (-2.0, "-2"), (290.15, "290.15")])
def test_numbers_in_formulas_are_plain(value: float, text: str) -> None:
    assert plain(value) == text


def test_gains_and_losses_of_a_plain_sum_have_their_signs() -> None:
    lines = (a_budget_line(1, "A", "gain", 20.0), a_budget_line(2, "B", "insertion_loss", 3.0))
    budget = a_budget(law="sum", lines=lines)
    found = budget_outcome(budget, project_of(budget, limit=at_most(100)), receiver.DICTIONARY, NOMINAL)
    made = calculation_sheet(found, 0, NAMED)
    assert max(differences(made)) < 1e-9
    assert any(cell.number == pytest.approx(17.0) for cell in cells(made) if cell.formula)


def test_an_antenna_of_n_elements_is_counted_in_the_sheet() -> None:
    source = {"block": "PA", "output_power": 20.0, "count": 16}
    antenna = {"block": "ANT", "antenna_gain": 5.0, "antenna_noise_temperature": 60.0, "count": 16}
    for stages, parameter, unit in (
        ((source, antenna), "eirp", "dBm"),
        ((antenna, {"block": "LNA", "gain": 20.0, "noise_figure": 2.0}), "g_over_t", "dB/K"),
    ):
        budget = a_chain(*stages, parameter=parameter)
        project = project_of(budget, limit=at_most(100, unit))
        found = budget_outcome(budget, project, receiver.DICTIONARY, NOMINAL)
        made = calculation_sheet(found, 0, NAMED)
        assert max(differences(made)) < 1e-9


def test_every_way_in_which_a_law_takes_a_line_has_a_formula() -> None:
    forms = {role.form for role in (*CASCADE_ROLES.values(), *ERROR_VECTOR_ROLES.values())}
    assert forms <= set(FORMS)
