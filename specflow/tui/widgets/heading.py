"""The top line: which project, how far it is proved, as of when."""

from __future__ import annotations

from textual.app import RenderResult
from textual.content import Content
from textual.widget import Widget

from specflow.workflows.browse import BrowseData


class Heading(Widget):
    """One line; what does not fit is left out from the right, part by part."""

    DEFAULT_CSS = """
    Heading { dock: top; height: 1; background: $panel; padding: 0 1; }
    """

    def __init__(self) -> None:
        super().__init__()
        self._parts: tuple[str, ...] = ("specflow",)

    def show(self, data: BrowseData) -> None:
        """Show the totals of a project."""
        revision = f"revision {data.revision}"
        self._parts = (data.project, data.headline, f"as of {data.as_of}", revision)
        self.refresh()

    def render(self) -> RenderResult:
        room = self.size.width
        first, *others = self._parts
        shown = Content.styled(first[:room], "bold $primary")
        for part in others:
            if len(shown) + len(part) + 3 > room:
                break
            shown += Content.styled(" │ ", "$secondary") + Content(part)
        return shown
