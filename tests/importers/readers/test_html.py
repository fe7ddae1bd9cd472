"""Tables of web pages against an independent reader: the XML parser of the standard library and, for the places of
cells that span several, the steps "forming a table" of the HTML Standard (WHATWG, 4.9.12.1, as remembered)."""

from __future__ import annotations

from pathlib import Path
from xml.etree import ElementTree
from xml.sax.saxutils import escape

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from specflow.importers.readers import open_grids

texts = st.text("aZ0.,-−°µ<&>\"' \n\t;", max_size=8) | st.floats(-1e6, 1e6).map(repr)
cells = st.tuples(st.sampled_from(["td", "th"]), texts, st.integers(1, 3), st.integers(1, 3))
tables = st.lists(st.lists(cells, max_size=5), min_size=1, max_size=6)


def page_of(rows: list[list[tuple[str, str, int, int]]]) -> str:
    lines = [
        "".join(
            f'<{tag} colspan="{columns}" rowspan="{down}"><b>{escape(text)}</b></{tag}>'
            for tag, text, columns, down in row
        )
        for row in rows
    ]
    body = "".join(f"<tr>{line}</tr>" for line in lines)
    return f"<html><body><p>7 &lt; 8</p><table>{body}</table></body></html>"


def formed(page: str) -> tuple[dict[tuple[int, int], str], set[str]]:
    """The text of each cell by row and column, and the cells that span several as (row, column, rows, columns)."""
    taken: set[tuple[int, int]] = set()
    found: dict[tuple[int, int], str] = {}
    spans: set[str] = set()
    for row, line in enumerate(ElementTree.fromstring(page).iter("tr"), start=1):
        column = 1
        for cell in line:
            while (row, column) in taken:
                column += 1
            wide, high = int(cell.attrib["colspan"]), int(cell.attrib["rowspan"])
            found[row, column] = " ".join("".join(cell.itertext()).split())
            taken |= {(row + down, column + right) for down in range(high) for right in range(wide)}
            if wide > 1 or high > 1:
                spans.add(str((row, column, row + high - 1, column + wide - 1)))
            column += wide
    return found, spans


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(tables)
def test_cells_stand_where_an_independent_reader_puts_them(
    tmp_path: Path, rows: list[list[tuple[str, str, int, int]]]
) -> None:
    page = page_of([[("td", "begin", 1, 1)], *rows])
    (tmp_path / "a.html").write_text(page, encoding="utf-8")
    [grid] = open_grids(tmp_path / "a.html")
    found, spans = formed(page)
    read = {
        (row, column): grid.value(row, column)
        for row in range(1, grid.last_row + 1)
        for column in range(1, grid.last_column + 1)
    }
    assert {place: value for place, value in read.items() if value != ""} == {
        place: text for place, text in found.items() if text
    }
    assert {
        str((one.first_row, one.first_column, one.last_row, one.last_column)) for one in grid.merged
    } == spans
