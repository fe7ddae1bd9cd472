"""The page: the same text as everywhere, self-contained, and harmless whatever a file is called."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
from html.parser import HTMLParser
from pathlib import Path

import pytest

from specflow.exporters import writer
from specflow.model.report import ReportCell
from tests.exporters.reporting import HOSTILE, harbour_report, small_report

GOLDEN = Path(__file__).parent / "golden" / "harbour.html"
REPORT = harbour_report()
PAGE = writer("html").render(REPORT).decode("utf-8")


class Cells(HTMLParser):
    """Gathers the text of table cells, ids and the targets of links."""

    def __init__(self) -> None:
        super().__init__()
        self.cells: list[str] = []
        self.ids: list[str] = []
        self.links: list[str] = []
        self.tags: set[str] = set()
        self._inside = False

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        known = dict(attrs)
        self.tags.add(tag)
        self.ids += [known["id"] or ""] if "id" in known else []
        self.links += [known["href"] or ""] if "href" in known else []
        if tag == "td":
            self._inside = True
            self.cells.append("")

    def handle_endtag(self, tag: str) -> None:
        if tag == "td":
            self._inside = False

    def handle_data(self, data: str) -> None:
        if self._inside:
            self.cells[-1] += data


def parsed(page: str) -> Cells:
    reader = Cells()
    reader.feed(page)
    return reader


def test_every_cell_shows_what_the_report_shows() -> None:
    ours = [cell.text for table in REPORT.tables for row in table.rows for cell in row.cells]
    assert parsed(PAGE).cells == ours


def test_the_page_needs_nothing_from_elsewhere() -> None:
    page = parsed(PAGE)
    assert not {"script", "link", "img", "iframe", "object"} & page.tags
    assert all(link.startswith("#") for link in page.links)
    assert "url(" not in PAGE and "@import" not in PAGE


def test_text_is_text_whatever_it_holds() -> None:
    assert "<b>mend</b>" not in PAGE and "&lt;b&gt;mend&lt;/b&gt;" in PAGE
    assert HOSTILE in parsed(PAGE).cells
    page = writer("html").render(small_report(ReportCell(text="</td><script>alert(1)</script>")))
    assert b"<script>" not in page


def test_links_lead_to_rows_that_are_there_and_ids_are_single() -> None:
    page = parsed(PAGE)
    assert len(page.ids) == len(set(page.ids))
    assert {"#points/PA-1", "#matrix/PA-1"} <= set(page.links)
    assert {link[1:] for link in page.links} <= set(page.ids)


def test_findings_can_be_reached_from_the_requirement_and_back() -> None:
    page = parsed(PAGE)
    assert {"#findings/PA-1", "#findings/PA-4"} <= set(page.links) and "findings/PA-1" in page.ids


def test_paper_leaves_out_what_only_describes_and_says_so() -> None:
    said = next(line for line in PAGE.splitlines() if "Not on paper" in line)
    assert "Limit in words" in said and "Owner" in said and "Guarded margin" not in said
    details = PAGE.count('class="detail"') + PAGE.count('class="number detail"')
    assert details == sum(column.detail for column in REPORT.table("matrix").columns)


def test_cautions_and_the_date_of_judgement_are_on_the_page() -> None:
    assert "not a certificate" in PAGE and "judged as of 2026-06-01" in PAGE
    assert "exposure assessment" in PAGE


def test_the_page_is_the_one_that_was_looked_at() -> None:
    """A change of the page is a decision: look at it, then run with SPECFLOW_NEW_GOLDEN=1."""
    if os.environ.get("SPECFLOW_NEW_GOLDEN"):
        GOLDEN.parent.mkdir(exist_ok=True)
        GOLDEN.write_text(PAGE, "utf-8")
    assert GOLDEN.read_text("utf-8") == PAGE


def browser() -> str:
    """Return a browser, or skip the test."""
    found = next(filter(None, map(shutil.which, ("chromium", "chromium-browser", "google-chrome"))), None)
    if found is None:
        pytest.skip("no chromium is installed")
    return found


@pytest.mark.desktop
def test_a_browser_prints_the_matrix_within_the_width_of_a_page(tmp_path: Path) -> None:
    if shutil.which("pdftotext") is None:
        pytest.skip("pdftotext (poppler) is not installed")
    (tmp_path / "page.html").write_text(PAGE, "utf-8")
    subprocess.run(
        [browser(), "--headless", "--no-sandbox", "--disable-gpu", f"--user-data-dir={tmp_path / 'profile'}",
         f"--print-to-pdf={tmp_path / 'page.pdf'}", (tmp_path / "page.html").as_uri()],
        check=True, timeout=120, capture_output=True,
    )  # fmt: skip
    said = subprocess.run(
        ["pdftotext", "-layout", str(tmp_path / "page.pdf"), "-"],
        check=True, timeout=60, capture_output=True, text=True,
    ).stdout  # fmt: skip
    words = " ".join(said.split())
    assert "Limit as written" in words
    assert "Governing value" not in words.split("Not on paper", 1)[1].split("show them.", 1)[1]


@pytest.mark.desktop
def test_a_browser_shows_the_page(tmp_path: Path) -> None:
    (tmp_path / "page.html").write_text(PAGE, "utf-8")
    shown = subprocess.run(
        [browser(), "--headless", "--no-sandbox", "--disable-gpu", f"--user-data-dir={tmp_path / 'profile'}",
         "--window-size=1600,1200", f"--screenshot={tmp_path / 'page.png'}", "--dump-dom",
         (tmp_path / "page.html").as_uri()],
        check=True, timeout=120, capture_output=True, text=True,
    ).stdout  # fmt: skip
    assert re.search(r"pa_bench\.xlsx · Bench 1 · D9", shown)
    assert parsed(shown).cells == parsed(PAGE).cells
