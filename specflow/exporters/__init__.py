"""Report → bytes. One file a format, all with the same surface (``title``, ``extension``, ``render(report)``).

A writer renders what a report says and nothing else: it looks nothing up, computes nothing and rounds nothing.
``template.py`` writes the empty project workbook that people fill in, ``bench_sheet.py`` the test sheet for the bench;
``svg.py`` draws pictures; ``files.py`` puts bytes into a file, whole or not at all.
"""

from __future__ import annotations

from importlib import import_module
from typing import Protocol, cast

from specflow.errors import SpecflowError
from specflow.model.report import Report


class Writer(Protocol):
    """What every format offers."""

    title: str
    extension: str

    def render(self, report: Report) -> bytes:
        """Return the whole file."""
        ...


# Names, not modules: a spreadsheet library is loaded only when its format is asked for.
WRITERS = ("xlsx", "html", "csv", "json")


def writer(name: str) -> Writer:
    """Return the writer of a format by its name; SpecflowError names the formats there are."""
    if name not in WRITERS:
        raise SpecflowError(f"there is no format {name!r}", hint=f"formats: {', '.join(WRITERS)}")
    return cast(Writer, import_module(f"specflow.exporters.{name}"))
