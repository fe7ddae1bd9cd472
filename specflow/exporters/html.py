"""Report → one plain, self-contained page: no script, no font and no address from elsewhere."""

from __future__ import annotations

from functools import cache
from importlib.resources import files

import jinja2

from specflow.model.report import Report

title = "Page"
extension = ".html"


def render(report: Report) -> bytes:
    """Return the page."""
    return _template().render(report=report).encode()


@cache
def _template() -> jinja2.Template:
    source = files("specflow.exporters").joinpath("templates", "report.html.jinja").read_text("utf-8")
    environment = jinja2.Environment(autoescape=True, trim_blocks=True, lstrip_blocks=True)
    return environment.from_string(source)
