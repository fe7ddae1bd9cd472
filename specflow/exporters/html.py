"""Report → one plain, self-contained page: no script, no font and no address from elsewhere."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from urllib.parse import quote

import jinja2
from markupsafe import Markup

from specflow.exporters.svg import svg
from specflow.model.report import Report

title = "Page"
extension = ".html"


def render(report: Report) -> bytes:
    """Return the page."""
    names = _anchors(report)
    page = _template().render(report=report, anchors=names, starts=_starts(names), drawings=_drawings(report))
    return page.encode()


@dataclass(frozen=True, slots=True)
class _Drawing:
    """A picture with its drawing."""

    title: str
    words: str
    markup: Markup


def _drawings(report: Report) -> dict[str, list[_Drawing]]:
    """Return the drawings that stand above each table, by its key."""
    drawn: dict[str, list[_Drawing]] = {}
    for number, one in enumerate(report.pictures, start=1):
        markup = Markup(svg(one.picture, f"picture-{number}"))  # its text is escaped where it is drawn
        drawn.setdefault(one.table, []).append(_Drawing(one.picture.title, one.picture.words, markup))
    return drawn


def _anchors(report: Report) -> dict[str, tuple[str, int]]:
    """Return where links lead: to the first row about something, by its place in its table."""
    known: dict[str, tuple[str, int]] = {}
    for table in report.tables:
        for place, row in enumerate(table.rows):
            known.setdefault(f"{table.key}/{row.id}", (table.key, place))
    return known


def _starts(anchors: dict[str, tuple[str, int]]) -> dict[tuple[str, int], str]:
    """Return the name of every row that a link may lead to; an id may hold blanks, a name may not."""
    return {place: quote(link, safe="/") for link, place in anchors.items()}


@cache
def _template() -> jinja2.Template:
    source = files("specflow.exporters").joinpath("templates", "report.html.jinja").read_text("utf-8")
    environment = jinja2.Environment(autoescape=True, trim_blocks=True, lstrip_blocks=True)
    return environment.from_string(source)
