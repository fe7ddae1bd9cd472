"""Applicability: does the requirement bind here? Not applicable needs a reason, and an approver or a declared value."""

from __future__ import annotations

from collections.abc import Mapping

from specflow.errors import ExpressionError
from specflow.limits import evaluate_condition, parse_condition
from specflow.model.requirement import Requirement
from specflow.units import Quantity


def applicability(
    requirement: Requirement, declared: Mapping[str, Quantity]
) -> tuple[bool, str, tuple[str, ...]]:
    """Return whether it applies, the reason when it does not, and remarks about what could not be decided.

    A tailored-out requirement names a reason and an approver; without an approver it stays applicable. An
    applicability expression is decided by declared values; where one is missing the requirement stays applicable.
    """
    remarks: list[str] = []
    if requirement.not_applicable_reason:
        if requirement.not_applicable_approver:
            reason = (
                f"{requirement.not_applicable_reason} (approved by {requirement.not_applicable_approver})"
            )
            return False, reason, ()
        remarks.append("said to be not applicable, but nobody approved it: it stays applicable")
    if not requirement.applicability:
        return True, "", tuple(remarks)
    try:
        holds, known = evaluate_condition(parse_condition(requirement.applicability), dict(declared))
    except ExpressionError as error:
        return (
            True,
            "",
            (*remarks, f"the applicability {requirement.applicability!r} cannot be read: {error.message}"),
        )
    if not known[0]:
        remarks.append(
            f"the applicability {requirement.applicability!r} cannot be decided: a declared value is missing"
        )
        return True, "", tuple(remarks)
    if holds[0]:
        return True, "", tuple(remarks)
    return False, f"{requirement.applicability} does not hold for what is declared", ()
