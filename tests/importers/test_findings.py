"""What is said of the codes that reading a file reports."""

from __future__ import annotations

import re
from pathlib import Path

import specflow
from specflow.importers.findings import ATTACH_FINDINGS, IMPORT_FINDINGS
from specflow.rules import RULE_BY_CODE
from specflow.workflows.remove_gone import REMOVAL_FINDINGS

SOURCES = Path(specflow.__file__).parent
CODE = re.compile(r'rule"?[=:] ?"([a-z-]+)"')


def test_every_code_that_a_finding_of_an_import_has_is_explained() -> None:
    explained = IMPORT_FINDINGS.keys() | REMOVAL_FINDINGS.keys()
    files = [path for part in ("importers", "workflows") for path in (SOURCES / part).rglob("*.py")]
    reported = {code for path in files for code in CODE.findall(path.read_text("utf-8"))}
    assert reported <= explained and len(reported) > 5
    assert {code for code in reported if code.startswith("attach-")} | {"attach-test-sheet-empty"} == (
        ATTACH_FINDINGS.keys()
    )
    assert not explained & RULE_BY_CODE.keys()
