"""JSON: everything that the report says, and that again as a report."""

from __future__ import annotations

import json

import pytest

from specflow.errors import SpecflowError
from specflow.exporters import WRITERS, writer
from specflow.model.report import Report
from tests.exporters.reporting import harbour_report


def test_json_reads_back_as_the_same_report() -> None:
    report = harbour_report()
    payload = json.loads(writer("json").render(report))
    assert payload.pop("format") == 1
    assert Report.model_validate(payload) == report


def test_numbers_are_unrounded_and_cells_have_their_origin() -> None:
    payload = json.loads(writer("json").render(harbour_report()))
    matrix = next(table for table in payload["tables"] if table["key"] == "matrix")
    row = next(row for row in matrix["rows"] if row["id"] == "PA-1")
    cells = dict(zip((column["key"] for column in matrix["columns"]), row["cells"], strict=True))
    assert cells["guarded_margin"]["number"] == pytest.approx(-1.188857538602619, abs=1e-15)
    assert cells["evidence"]["origin"]["row"] == 9


def test_every_format_has_the_same_surface_and_gives_the_same_bytes_twice() -> None:
    for name in WRITERS:
        made = writer(name)
        assert made.title and made.extension == f".{name}"
        assert made.render(harbour_report()) == made.render(harbour_report())


def test_an_unknown_format_is_refused_with_those_there_are() -> None:
    with pytest.raises(SpecflowError, match="xlsx, html, csv, json"):
        writer("pdf")
