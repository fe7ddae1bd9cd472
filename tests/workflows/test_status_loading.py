"""What ``status`` does not need is not loaded for it: a person waits for every import."""

from __future__ import annotations

import subprocess
import sys

LOAD = """
import sys
import specflow.cli.status, specflow.cli.tables, specflow.store, specflow.workflows.status
print("\\n".join(sys.modules))
"""
NEEDLESS = (
    "alembic", "jinja2", "openpyxl", "pint", "python_calamine", "rich", "scipy", "sqlalchemy", "textual", "xlsxwriter",
    "specflow.budgets", "specflow.calculators", "specflow.changes", "specflow.exporters", "specflow.importers",
    "specflow.rules", "specflow.limits.grammar", "specflow.limits.expression_grammar",
)  # fmt: skip


def test_status_loads_no_more_than_it_needs() -> None:
    said = subprocess.run([sys.executable, "-c", LOAD], check=True, capture_output=True, text=True).stdout
    loaded = set(said.split())
    assert "specflow.verification" in loaded
    assert [name for name in NEEDLESS if name in loaded] == []
