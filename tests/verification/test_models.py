"""What a table says about the validation of its model."""

from __future__ import annotations

import pytest

from specflow.model.requirement import Method
from specflow.model.verdict import Verdict
from specflow.verification.model_range import is_validated
from tests.builders import an_activity, an_evidence_table, some_evidence
from tests.verification.evaluating import status_of


@pytest.mark.parametrize(
    "text", ["", "no", "No", "not yet", "none", "n/a", "-", "No, planned for June", "unvalidated"]
)
def test_a_denial_is_no_validation(text: str) -> None:
    assert not is_validated(text)


@pytest.mark.parametrize("text", ["yes", "report V-7", "frequency in 27..31 GHz", "against the breadboard"])
def test_anything_else_is_one(text: str) -> None:
    assert is_validated(text)


@pytest.mark.parametrize(("text", "verdict"), [("no", Verdict.FAIL), ("report V-7", Verdict.PASS)])
def test_a_model_that_was_not_validated_does_not_outrank_another(text: str, verdict: Verdict) -> None:
    """Two analyses at the same points: one passes, the other fails; without validation the worse governs."""
    analysis = {"method": Method.ANALYSIS}
    passing = an_evidence_table("T-1", simulation_validated=text, **analysis)
    status = status_of(
        an_activity(method=Method.ANALYSIS),
        passing,
        an_evidence_table("T-2", **analysis),
        T_1=some_evidence(),
        T_2=some_evidence((15.0, 15.0, 15.0)),
    )
    assert status.verdict is verdict
