"""Report → JSON: titles, columns, and for each cell the text shown, the number behind it and its origin."""

from __future__ import annotations

import json

from specflow.model.report import Report

title = "JSON"
extension = ".json"
FORMAT = 1


def render(report: Report) -> bytes:
    """Return the report as JSON; empty parts of cells are left out."""
    payload = {"format": FORMAT, **report.model_dump(mode="json", exclude_defaults=True)}
    return (json.dumps(payload, ensure_ascii=False, indent=1) + "\n").encode()
