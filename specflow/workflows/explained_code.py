"""Explain a code that stands beside a finding: that of a rule, or of what loading and attaching report."""

from __future__ import annotations

from typing import Any

from specflow.importers.findings import IMPORT_FINDINGS
from specflow.model.base import code_key
from specflow.model.report import ReportTable
from specflow.reports.rule_catalogue import import_finding_table, rule_table
from specflow.workflows.remove_gone import REMOVAL_FINDINGS
from specflow.workflows.rule_catalogue import rule_named

_NO_RULES = {**IMPORT_FINDINGS, **REMOVAL_FINDINGS}


def explained_code(code: str) -> ReportTable:
    """Return the explanation of a rule, in a line that of another finding. SpecflowError for a code that is neither."""
    key = code_key(code)
    return import_finding_table(key, _NO_RULES[key]) if key in _NO_RULES else rule_table(rule_named(code))


def explained_as_json(code: str) -> dict[str, Any]:
    """Return the same as data for scripts."""
    key = code_key(code)
    if key in _NO_RULES:
        return {"code": key, "title": _NO_RULES[key]}
    return rule_named(code).model_dump(mode="json")
