"""The trail of a requirement tells near misses and conversions, not only cells."""

from __future__ import annotations

from specflow.model.base import Document
from specflow.model.evidence import EvidenceColumns
from specflow.model.parameter import Parameter
from specflow.parameters import load_dictionary
from specflow.reports.trace import requirement_trail
from specflow.verification import evaluate
from tests.builders import (
    a_quantity,
    a_requirement,
    a_snapshot,
    a_value_column,
    an_evidence_file,
    an_evidence_table,
    at_least,
    at_most,
    some_evidence,
)
from tests.verification.evaluating import AS_OF, project


def trail(*documents: Document, evidence: EvidenceColumns) -> list[tuple[str, str]]:
    """Return kind and text of the steps of R-1, with one table T-1."""
    snapshot = a_snapshot(*project(an_evidence_file(), *documents), columns={"T-1": evidence})
    results = evaluate(snapshot, load_dictionary(snapshot.all(Parameter)), as_of=AS_OF)
    steps = requirement_trail(snapshot.requirements[0], snapshot, results)
    return [(step.kind, step.text) for step in steps]


def test_an_evm_of_no_statistic_is_told_that_an_rms_one_was_recorded() -> None:
    column = a_value_column("EVM", quantity=a_quantity("evm", statistic="rms"), unit="%")
    steps = trail(
        a_requirement(quantity=a_quantity("evm"), limit=at_most(8, "%")),
        an_evidence_table(values=(column,)),
        evidence=some_evidence({"EVM": [5.0, 5.0, 5.0]}),
    )
    points = [text for kind, text in steps if kind == "point"]
    assert len(points) == 3
    assert all(
        "no evidence (EVM of T-1 may not be compared: the statistic is rms, the requirement states none)"
        in text
        for text in points
    )
    (aside,) = [text for kind, text in steps if kind == "not counted"]
    assert aside.endswith("the requirement states none; state the statistic in the requirement")


def test_a_value_recorded_as_another_parameter_is_told_with_formula_and_source() -> None:
    column = a_value_column("VSWR", quantity=a_quantity("vswr"), unit="1")
    steps = trail(
        a_requirement(quantity=a_quantity("return_loss"), limit=at_least(12)),
        an_evidence_table(values=(column,)),
        evidence=some_evidence({"VSWR": [1.2, 1.5, 2.0]}),
    )
    first = next(text for kind, text in steps if kind == "point")
    assert "20.83 dB · pass" in first
    assert "recorded as VSWR 1.2; VSWR told as return loss: |Γ| = (V - 1)/(V + 1), RL = -20·log |Γ|" in first
