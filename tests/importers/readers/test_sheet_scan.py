"""The two ways to scan a sheet must see the same; the fast one must pass on whatever it does not understand."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.errors import FileError
from specflow.importers.readers import sheet_scan
from specflow.importers.readers.cell_bytes import Irregular
from specflow.importers.readers.odd_cells import OddCell, OddKind
from specflow.importers.readers.places import address
from specflow.importers.readers.sheet_scan import SheetScan, scan_sheet
from specflow.importers.readers.styles import Styles
from tests.importers.readers.workbooks import MAIN

STYLES = Styles((None, OddCell(OddKind.PERCENT, "0%"), None, OddCell(OddKind.UNIT_FORMAT, '0" dBm"', "dBm")))

BODIES = [
    "<v>1.5</v>", "<v>0</v>", "<v></v>", "<v/>", "", "<f>A1*2</f><v>3</v>", "<f>A1</f><v>0</v>", "<f>A1&lt;2</f>",
    "<f/>", '<f t="shared" si="0"/><v>3</v>', "<f>A1</f><v></v>", "<f>A1</f><v/>", "<is><t>x</t></is>",
    '<is><r><rPr><color rgb="FF"/></rPr><t>x</t></r></is>', '<v xml:space="preserve"> </v>', "<f></f><v>7</v>",
]  # fmt: skip
EXTRAS = ["", "", "", ' cm="1"', ' cm="1" vm="12"']
TYPES = ["", ' t="n"', ' t="s"', ' t="str"', ' t="inlineStr"', ' t="b"', ' t="e"', ' t="d"']


@dataclass(frozen=True)
class Row:
    number: int
    hidden: bool
    cells: tuple[tuple[int, str, str, str], ...]

    def xml(self) -> str:
        cells = "".join(
            f'<c r="{address(self.number, column)}"{style}{kind}' + (f">{body}</c>" if body else "/>")
            for column, style, kind, body in self.cells
        )
        hidden = ' hidden="1"' if self.hidden else ""
        return f'<row r="{self.number}"{hidden} spans="1:3">{cells}</row>'


cells = st.tuples(
    st.integers(1, 16_384),
    st.sampled_from(["", *(f' s="{style}"' for style in range(6))]),
    st.tuples(st.sampled_from(EXTRAS), st.sampled_from(TYPES), st.sampled_from(EXTRAS)).map(
        lambda parts: parts[0] + parts[1] + ("" if parts[0] else parts[2])
    ),
    st.sampled_from(BODIES),
)
rows = st.builds(
    Row,
    st.integers(1, 1_048_576),
    st.booleans(),
    st.lists(cells, max_size=6, unique_by=lambda cell: cell[0]).map(tuple),
)
tables = st.lists(rows, max_size=8, unique_by=lambda row: row.number)


def worksheet(rows: str) -> bytes:
    return (
        f'<?xml version="1.0" encoding="UTF-8"?><worksheet xmlns="{MAIN}"><cols><col min="2" max="3" hidden="1"/>'
        f'</cols><sheetData>{rows}</sheetData><mergeCells><mergeCell ref="B2:C3"/></mergeCells></worksheet>'
    ).encode()


def pieces(content: bytes, size: int) -> Iterator[bytes]:
    return iter([content[at : at + size] for at in range(0, len(content), size)])


def scanned(rows: str, styles: Styles = STYLES) -> SheetScan:
    content = worksheet(rows)
    return scan_sheet(lambda: iter([content]), styles, lambda what: FileError(what, where="x", hint="y"))


@given(tables, st.integers(7, 400), st.booleans())
def test_both_ways_see_the_same(table: list[Row], size: int, never_calculated: bool) -> None:
    content = worksheet("".join(row.xml() for row in table))
    styles = Styles(STYLES.odd, never_calculated)

    def scan(way: object) -> tuple[object, ...] | str:
        try:
            result: SheetScan = way(pieces(content, size), styles)  # type: ignore[operator]
        except sheet_scan.SheetProblem:
            return "refused"
        except Irregular:
            return scan(sheet_scan._scan_events)
        return (list(result.odd), result.extent, result.hidden_rows, result.hidden_columns, result.merged)

    assert scan(sheet_scan._scan_regular) == scan(sheet_scan._scan_events)


@pytest.mark.parametrize(
    "rows",
    [
        '<row r="2"><c t="e" r="B2"><v>#N/A</v></c></row>',
        "<row r='2'><c r='B2' t='e'><v>#N/A</v></c></row>",
        '<row r="2"><c/><c t="e"><v>#N/A</v></c></row>',
        '<row r="1"/><row><c/><c t="e"><v>#N/A</v></c></row>',
        '<row r="2"><c\n r="B2" t="e"><v>#N/A</v></c></row>',
        '<row r="2"><c r="B2" t = "e" ><v>#N/A</v></c></row>',
        '<row r="2"><c r="B2" new="1" t="e"><v>#N/A</v></c></row>',
        '<row r="2"><c r="B2" t="e" s="1"><v>#N/A</v></c></row>',
        '<row r="2"><c r="B2" t="e">\n<v>#N/A</v>\n</c></row>',
        '<row r="2"><!-- <c r="A1"> --><c r="B2" t="e"><v>#N/A</v></c></row>',
        '<row r="2"><c r="b2" t="e"><v>#N/A</v></c></row>',
        '<row r="2"><c r="B2" t="&#101;"><v>#N/A</v></c></row>',
    ],
)
def test_unusual_writing_is_read_as_events(rows: str) -> None:
    content = worksheet(rows)
    with pytest.raises(Irregular):
        sheet_scan._scan_regular(iter([content]), STYLES)
    assert [(run.column, run.first, run.cell) for run in scanned(rows).odd] == [
        (2, 2, OddCell(OddKind.ERROR, "#N/A"))
    ]


def test_cells_of_dynamic_arrays_are_read_fast() -> None:
    rows = '<row r="1"><c r="A1" s="1" cm="1"><f t="array" ref="A1">x</f><v>1</v></c><c r="B1" t="e" vm="1"/></row>'
    marks = sheet_scan._scan_regular(iter([worksheet(rows)]), STYLES).odd
    assert [run.cell.kind for run in marks] == [OddKind.PERCENT, OddKind.ERROR]


def test_prefixed_names_are_read() -> None:
    content = (
        f'<x:worksheet xmlns:x="{MAIN}"><x:sheetData><x:row r="1" hidden="true"><x:c r="A1" s="1"><x:v>1</x:v></x:c>'
        "</x:row></x:sheetData></x:worksheet>"
    ).encode()
    scan = scan_sheet(lambda: iter([content]), STYLES, lambda what: FileError(what))
    assert [run.cell.kind for run in scan.odd] == [OddKind.PERCENT]
    assert scan.hidden_rows == {1}


def test_text_that_looks_like_cells_is_no_cell() -> None:
    rows = '<row r="1"><c r="A1" t="inlineStr"><is><t>&lt;c r="Z9" t="e"&gt;&lt;v&gt;</t></is></c></row>'
    scan = scanned(rows)
    assert list(scan.odd) == []
    assert str(scan.extent) == "A1:A1"


def test_error_text_is_decoded() -> None:
    scan = scanned(
        '<row r="1"><c r="A1" t="e"><v>#DIV/0!</v></c><c r="B1" t="e"><f>x</f><v>#REF!</v></c></row>'
    )
    assert [run.cell.detail for run in scan.odd] == ["#DIV/0!", "#REF!"]


def test_extent_leaves_out_cells_that_only_have_a_style() -> None:
    assert scanned('<row r="9"><c r="A9" s="1"/><c r="XFD9" s="1"></c></row>').extent is None
    assert str(
        scanned('<row r="2"><c r="C2"><v>1</v></c></row><row r="9"><c r="B9"><v>1</v></c></row>').extent
    ) == ("B2:C9")


@pytest.mark.parametrize(
    ("rows", "what"),
    [
        ('<row r="1"><c r="A1" t="s"><v>x</v></c></row>', "no shared text"),
        ('<row r="1"><c r="A1"><v><![CDATA[5]]></v></c></row>', "CDATA"),
        ('<row r="1"><c r="A0"><v>5</v></c></row>', "outside the sheet"),
        ('<row r="1"><c r="A1048577"><v>5</v></c></row>', "outside the sheet"),
        ('<row r="1"><c r="XFE1"><v>5</v></c></row>', "outside the sheet"),
        ('<row r="1"><c r="A99999999999"><v>5</v></c></row>', "no cell of a sheet"),
        ('<row r="1"><c r="1A"><v>5</v></c></row>', "no cell of a sheet"),
        ('<row r="1"><c r="A1" t="s"><v>1.5</v></c></row>', "no shared text"),
        ('<row r="1"></row></sheetData><mergeCells><oddCells></sheetData>', "not well-formed"),
    ],
)
def test_contradictions_are_refused(rows: str, what: str) -> None:
    with pytest.raises(FileError, match=what):
        scanned(rows)


def test_sheet_that_ends_within_its_rows_is_refused() -> None:
    content = worksheet('<row r="1"><c r="A1"><v>5</v></c></row>').partition(b"</sheetData>")[0]
    with pytest.raises(FileError, match="end too early"):
        scan_sheet(lambda: iter([content]), STYLES, lambda what: FileError(what))


def test_row_without_end_is_refused_before_it_fills_the_memory(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sheet_scan, "MAX_ROW_BYTES", 1000)
    content = worksheet('<row r="1">' + '<c r="A1"><v>5</v></c>' * 200)
    with pytest.raises(FileError, match="longer than"):
        scan_sheet(lambda: pieces(content, 100), STYLES, lambda what: FileError(what))
