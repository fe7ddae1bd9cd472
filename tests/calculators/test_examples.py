"""The catalogue: every calculator is listed, says what it must say, and its worked example gives what it says."""

from __future__ import annotations

import doctest
import importlib
import inspect
import pkgutil
from types import ModuleType

import numpy as np
import pytest

import specflow.calculators as package
from specflow.calculators import CALCULATORS, Calculator
from specflow.calculators.calculator import Figure

FOUNDATIONS = {"arguments", "calculator", "decibel", "operands"}
NOT_LAWS = {"exponent", "referred"}
"""Public functions that laws share and that are no calculators of their own."""


def modules() -> list[ModuleType]:
    found = pkgutil.walk_packages(package.__path__, f"{package.__name__}.")
    return [importlib.import_module(info.name) for info in found]


@pytest.mark.parametrize("module", modules(), ids=lambda module: module.__name__)
def test_worked_examples_give_what_they_say(module: ModuleType) -> None:
    result = doctest.testmod(module, extraglobs={"np": np})
    assert result.failed == 0


@pytest.mark.parametrize("entry", CALCULATORS, ids=lambda entry: entry.name)
def test_each_calculator_states_formula_validity_source_and_example(entry: Calculator) -> None:
    text = inspect.getdoc(entry.function) or ""
    for part in ("\nFormula: ", "\nValid: ", "\nSource: ", "\n>>> "):
        assert part in text, f"{entry.name} lacks{part}"
    assert entry.source and entry.summary.endswith(".")
    assert entry.inputs and entry.outputs


def test_every_public_function_is_in_the_catalogue_once() -> None:
    written = {
        name
        for module in modules()
        if module.__name__.rpartition(".")[2] not in FOUNDATIONS
        for name, function in inspect.getmembers(module, inspect.isfunction)
        if function.__module__ == module.__name__ and not name.startswith("_")
    }
    listed = [entry.name for entry in CALCULATORS]
    assert len(listed) == len(set(listed))
    assert written - NOT_LAWS == set(listed)


def test_the_unit_of_a_figure_is_the_end_of_its_name() -> None:
    assert Figure.named("density_dbm_hz") == Figure("density_dbm_hz", "dBm/Hz")
    assert Figure.named("g_over_t_db_per_k").unit == "dB/K"
    assert Figure.named("bandwidth_hz").unit == "Hz"
    assert Figure.named("position").unit == ""


def test_every_logarithmic_input_carries_a_unit() -> None:
    """A name with dB in it that no ending explains would be a figure whose unit nobody can tell."""
    for entry in CALCULATORS:
        for figure in (*entry.inputs, *entry.outputs):
            assert figure.unit or "db" not in figure.name.split("_"), (entry.name, figure.name)
