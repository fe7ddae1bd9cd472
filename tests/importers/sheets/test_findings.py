"""The catalogue of what loading a workbook may report."""

from __future__ import annotations

import re
from pathlib import Path

import specflow.importers.sheets
from specflow.importers.sheets.findings import WORKBOOK_FINDINGS

SOURCES = Path(specflow.importers.sheets.__file__).parent


def test_the_catalogue_has_every_rule_that_is_reported_and_no_other() -> None:
    files = [path for path in SOURCES.glob("*.py") if path.name != "findings.py"]
    texts = [path.read_text("utf-8") for path in [*files, SOURCES.parent / "workbook.py"]]
    assert {rule for text in texts for rule in re.findall(r'"(workbook-[a-z-]+)"', text)} == set(
        WORKBOOK_FINDINGS
    )
