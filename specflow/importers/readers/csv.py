"""Delimited text (.csv, .tsv, .txt, .dat): cells stay text as written."""

from __future__ import annotations

import csv

from specflow.importers.readers.grid import Grid, Value
from specflow.importers.readers.source import Source


def read_csv(source: Source) -> list[Grid]:
    text = source.content.decode("utf-8-sig")
    rows: list[list[Value]] = [list(row) for row in csv.reader(text.splitlines())]
    return [Grid(name=source.name, rows=rows, file=source.name, is_text=True)]
