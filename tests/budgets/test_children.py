"""Requirements on blocks as bounds of lines: the same figure in other words, other planes, other conditions."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from specflow.budgets.children import ends_of_children
from specflow.budgets.closure import closure_of_children
from specflow.budgets.probe import Probe
from specflow.conditions import parse_map_entry
from specflow.limits import parse_limit
from specflow.model.conditions import ConditionMap
from specflow.model.requirement import Requirement
from specflow.parameters import load_dictionary
from tests.budgets.chains import a_chain, project_of
from tests.builders import (
    a_conditions_set,
    a_dimension,
    a_quantity,
    a_requirement,
    at_least,
)

DICTIONARY = load_dictionary()
BAND = a_conditions_set("CS", a_dimension("frequency", values=(27.5, 30.0)))


def a_probe(*stages: dict[str, Any], documents: tuple[Any, ...] = (), **fields: Any) -> Probe:
    budget = a_chain(*stages, conditions="CS", **fields)
    limit = parse_limit(">= -100 dBm") if "ip" in budget.quantity.parameter else None
    return Probe.of(budget, project_of(budget, BAND, *documents, limit=limit), DICTIONARY)


def child(block: str, parameter: str, limit: str, **fields: Any) -> Requirement:
    quantity = a_quantity(parameter, **fields.pop("quantity", {}))
    fields = {"conditions": "CS"} | fields
    return a_requirement(f"{block}-1", block=block, quantity=quantity, limit=parse_limit(limit), **fields)


LOSS = {"block": "FIL", "insertion_loss": 2.0, "passive": True}
LNA = {"block": "LNA", "gain": 20.0, "noise_figure": 2.0}


def test_a_limit_on_gain_holds_a_loss_with_the_other_sign() -> None:
    ends, notes = ends_of_children(a_probe(LOSS, LNA), [child("FIL", "gain", "-3..-1 dB")])
    assert ends[0] is not None and ends[1] is None and not notes
    assert (ends[0][0].tolist(), ends[0][1].tolist()) == ([1.0, 1.0], [3.0, 3.0])


def test_a_limit_on_noise_temperature_holds_a_noise_figure() -> None:
    ends, _ = ends_of_children(a_probe(LNA), [child("LNA", "noise_temperature", "<= 290 K")])
    assert ends[1] is not None
    assert np.isneginf(ends[1][0]).all() and ends[1][1] == pytest.approx(10 * math.log10(2))
    warm = {"block": "LNA", "gain": 20.0, "noise_temperature": 200.0}
    back, _ = ends_of_children(a_probe(warm), [child("LNA", "noise_figure", "<= 3.0103 dB")])
    assert back[1] is not None and back[1][1] == pytest.approx(290.0, abs=0.01)


def test_a_limit_at_another_plane_bounds_nothing_and_is_told() -> None:
    stage = {**LNA, "more": {"noise_figure": {"plane": "element port"}}}
    elsewhere = child("LNA", "noise_figure", "<= 3 dB", quantity={"plane": "connector"})
    ends, notes = ends_of_children(a_probe(stage), [elsewhere])
    assert ends[1] is None and "another plane" in notes[0]
    same = child("LNA", "noise_figure", "<= 3 dB", quantity={"plane": "Element port"})
    assert ends_of_children(a_probe(stage), [same])[0][1] is not None


def test_a_limit_by_frequency_is_read_in_the_terms_of_its_own_conditions() -> None:
    """The converter knows 3 and 5.5 GHz where the system has 27.5 and 30: a shared set speaks the system's terms."""
    own_map = ConditionMap(id="M", block="IF", entries=(parse_map_entry("frequency = frequency - 24.5 GHz"),))
    own_set = a_conditions_set("CS-IF", a_dimension("frequency", values=(3.0, 5.5)))
    probe = a_probe({"block": "IF", "gain": 10.0, "noise_figure": 3.0}, documents=(own_map, own_set))
    system = child("IF", "noise_figure", "by frequency[GHz] (27.5: <= 3 dB; 30: <= 4 dB)")
    block = child("IF", "noise_figure", "by frequency[GHz] (3: <= 3 dB; 5.5: <= 4 dB)", conditions="CS-IF")
    for one in (system, block):
        ends, _ = ends_of_children(probe, [one])
        assert ends[1] is not None and ends[1][1].tolist() == [3.0, 4.0]


def test_closure_holds_with_limits_in_other_words() -> None:
    probe = a_probe(LOSS, LNA)
    children = [
        child("FIL", "gain", "-2.2..-1.8 dB"),
        child("LNA", "noise_temperature", "<= 290 K"),
        a_requirement("LNA-2", block="LNA", quantity=a_quantity("gain"), limit=at_least(18), conditions="CS"),
    ]
    found = closure_of_children(probe, children)
    assert found.closes is True and found.limits[0].smallest == pytest.approx(100 - 2.2 - 3.0103, abs=1e-3)


def test_an_output_intercept_holds_a_line_at_the_input_with_the_gain_that_hurts() -> None:
    """OIP3 at least 20 dBm and a gain of 9 to 11 dB: IIP3 at least 9 dBm, as a gain of 11 dB would have it."""
    probe = a_probe({"block": "A", "gain": 10.0, "iip3": 12.0}, parameter="iip3")
    gain = child("A", "gain", "9..11 dB")
    output = child("A", "oip3", ">= 20 dBm").model_copy(update={"id": "A-2"})
    ends, notes = ends_of_children(probe, [output, gain])
    assert ends[1] is not None
    assert ends[1][0].tolist() == [9.0, 9.0] and np.isposinf(ends[1][1]).all()
    assert any("gain that hurts" in note for note in notes)
    ends, _ = ends_of_children(probe, [output, child("A", "gain", ">= 9 dB")])
    assert ends[1] is not None and np.isneginf(ends[1][0]).all()  # a gain without end leaves nothing shown


def test_an_input_compression_point_holds_a_line_at_the_output() -> None:
    """IP1dB at least 0 dBm, gain 10 dB ± 0.5 dB by its tolerance: OP1dB at least 0 + 9.5 - 1 dBm."""
    window = {"minus": 0.5, "plus": 0.5, "meaning": "limits", "distribution": "uniform"}
    stage = {"block": "A", "gain": 10.0, "op1db": 10.0, "more": {"gain": {"tolerance": window}}}
    ends, _ = ends_of_children(a_probe(stage, parameter="ip1db"), [child("A", "ip1db", ">= 0 dBm")])
    assert ends[1] is not None and ends[1][0].tolist() == pytest.approx([8.5, 8.5])
