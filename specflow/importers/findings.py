"""What reading a file may report, by code: what ``specflow rules CODE`` says of a finding that no rule made."""

from __future__ import annotations

from specflow.importers.published_requirements import PUBLISHED_FINDINGS
from specflow.importers.sheets.findings import WORKBOOK_FINDINGS
from specflow.model.bench_sheet import NOTHING_FILLED_IN

#: Code → what it means. Errors keep the table (or the file) out, unless what was read is taken without the rest.
ATTACH_FINDINGS: dict[str, str] = {
    "attach-layout-not-met": "A mapping settles a layout that no table of the file has.",
    "attach-looks-slipped": "A reading stands beside its neighbours as if its decimal or its unit had slipped.",
    "attach-no-table": "No measurement table was found in the file.",
    "attach-reading": "What was done to read a file, or what in it could not be read.",
    "attach-rows-outside": "Rows of numbers belong to no table.",
    NOTHING_FILLED_IN: "A test sheet came back without a value.",
}

IMPORT_FINDINGS = {**WORKBOOK_FINDINGS, **PUBLISHED_FINDINGS, **ATTACH_FINDINGS}
