"""Builds small workbooks for the tests of the readers: by xlsxwriter where a writer can, by hand where none would."""

from __future__ import annotations

import zipfile
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

import xlsxwriter

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
RELATIONS = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
PACKAGE = "http://schemas.openxmlformats.org/package/2006/relationships"

PARTS = {
    "[Content_Types].xml": '<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types"/>',
    "_rels/.rels": f'<Relationships xmlns="{PACKAGE}"><Relationship Id="rId1" Type="{RELATIONS}/officeDocument"'
    ' Target="xl/workbook.xml"/></Relationships>',
    "xl/workbook.xml": f'<workbook xmlns="{MAIN}" xmlns:r="{RELATIONS}"><sheets>'
    '<sheet name="data" sheetId="1" r:id="rId1"/></sheets></workbook>',
    "xl/_rels/workbook.xml.rels": f'<Relationships xmlns="{PACKAGE}">'
    f'<Relationship Id="rId1" Type="{RELATIONS}/worksheet" Target="worksheets/sheet1.xml"/>'
    f'<Relationship Id="rId2" Type="{RELATIONS}/sharedStrings" Target="sharedStrings.xml"/>'
    f'<Relationship Id="rId3" Type="{RELATIONS}/styles" Target="styles.xml"/></Relationships>',
    "xl/sharedStrings.xml": f'<sst xmlns="{MAIN}"><si><t>Gain (dB)</t></si><si><t>3.1</t></si></sst>',
    "xl/styles.xml": f'<styleSheet xmlns="{MAIN}"><numFmts><numFmt numFmtId="170" formatCode="0.0&quot; dBm&quot;"/>'
    '</numFmts><cellXfs><xf numFmtId="0"/><xf numFmtId="10"/><xf numFmtId="170"/><xf numFmtId="14"/>'
    '<xf numFmtId="2"/></cellXfs></styleSheet>',
}
"""Styles: 0 plain, 1 percent, 2 dBm, 3 date, 4 two decimals. Shared texts: 0 ``Gain (dB)``, 1 ``3.1``."""


def by_hand(
    path: Path, rows: str, *, around: str = "{rows}", parts: Mapping[str, str | bytes | None] = {}
) -> Path:
    """A workbook with one sheet ``data`` whose ``<sheetData>`` holds ``rows``; ``parts`` replaces (None: leaves out)
    parts of the archive."""
    sheet = (
        f'<worksheet xmlns="{MAIN}">' + around.format(rows=f"<sheetData>{rows}</sheetData>") + "</worksheet>"
    )
    everything: dict[str, str | bytes | None] = {**PARTS, "xl/worksheets/sheet1.xml": sheet, **parts}
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in everything.items():
            if content is not None:
                archive.writestr(name, content)
    return path


def written(path: Path, fill: Callable[[Any, Any], None]) -> Path:
    """A workbook by xlsxwriter: ``fill(book, sheet)`` writes into one sheet called ``data``."""
    with xlsxwriter.Workbook(str(path)) as book:
        fill(book, book.add_worksheet("data"))
    return path


def refused(call: Callable[[], object]) -> str:
    """The whole message of the FileError that ``call`` raises; it must name a place and a remedy."""
    from specflow.errors import FileError

    try:
        call()
    except FileError as error:
        assert error.message, "no message"
        assert error.where, f"no place: {error}"
        assert error.hint, f"no remedy: {error}"
        return str(error)
    raise AssertionError("the file was not refused")
