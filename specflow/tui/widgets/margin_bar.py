"""The margin bar: limit, guard band and spread of results on one axis, drawn with text."""

from __future__ import annotations

from textual.app import RenderResult
from textual.content import Content
from textual.geometry import Size
from textual.widget import Widget

from specflow.model.card import MarginBar
from specflow.tui.tones import STYLES

OUTSIDE, GUARD, LIMIT, SPREAD, POINT, LEFT, RIGHT, AXIS = "╱", "░", "┃", "━", "●", "┣", "┫", "─"


class MarginBarView(Widget):
    """Three lines: limit with its guard band (what lies outside is hatched), results, and their numbers."""

    DEFAULT_CSS = """
    MarginBarView { height: auto; }
    """

    def __init__(self, bar: MarginBar) -> None:
        super().__init__()
        self.bar = bar

    def get_content_height(self, container: Size, viewport: Size, width: int) -> int:
        """Return the lines it takes, with its sentence folded."""
        return 3 + len(Content(self.bar.words).wrap(width))

    def render(self) -> RenderResult:
        return Content("\n").join(bar_lines(self.bar, max(self.size.width, 20)))


def bar_lines(bar: MarginBar, width: int) -> list[Content]:
    """Draw a bar ``width`` cells wide, and its sentence under it."""
    scale = Scale(bar, width)
    return [
        _limit_line(bar, scale),
        _result_line(bar, scale),
        _number_line(bar, scale),
        Content.styled(bar.words, "$secondary"),
    ]


class Scale:
    """Where values stand on a line of ``width`` cells: all that is shown, with some room at either end."""

    def __init__(self, bar: MarginBar, width: int) -> None:
        ends = [value for value in (bar.lower, bar.upper, bar.least, bar.greatest) if value is not None]
        if bar.lower is not None:
            ends.append(bar.lower + bar.guard)
        if bar.upper is not None:
            ends.append(bar.upper - bar.guard)
        low, high = min(ends, default=0.0), max(ends, default=0.0)
        room = (high - low) * 0.15 or max(abs(high), 1.0) * 0.05
        self.width = width
        self._low = low - room
        self._per_cell = (high - low + 2 * room) / (width - 1)

    def cell(self, value: float) -> int:
        """Return the cell of a value."""
        return min(max(round((value - self._low) / self._per_cell), 0), self.width - 1)


def _limit_line(bar: MarginBar, scale: Scale) -> Content:
    cells = [AXIS] * scale.width
    if bar.lower is not None:
        place = scale.cell(bar.lower)
        cells[:place] = OUTSIDE * place
        cells[place + 1 : scale.cell(bar.lower + bar.guard) + 1] = GUARD * (
            scale.cell(bar.lower + bar.guard) - place
        )
        cells[place] = LIMIT
    if bar.upper is not None:
        place, start = scale.cell(bar.upper), scale.cell(bar.upper - bar.guard)
        cells[place + 1 :] = OUTSIDE * (scale.width - place - 1)
        cells[start:place] = GUARD * (place - start)
        cells[place] = LIMIT
    return _styled("".join(cells), {OUTSIDE: "$secondary", GUARD: "$warning", LIMIT: "bold $primary"})


def _result_line(bar: MarginBar, scale: Scale) -> Content:
    if bar.least is None or bar.greatest is None:
        return Content(" ")
    first, last = scale.cell(bar.least), scale.cell(bar.greatest)
    body = POINT if first == last else LEFT + SPREAD * (last - first - 1) + RIGHT
    return Content.assemble(" " * first, (body, STYLES[bar.tone]))


def _number_line(bar: MarginBar, scale: Scale) -> Content:
    """Write the limits under their marks, then the ends of the spread where there is room left."""
    wanted = [
        (bar.lower, bar.lower_text, "bold $primary"),
        (bar.upper, bar.upper_text, "bold $primary"),
        (bar.least, bar.least_text, ""),
        (bar.greatest, bar.greatest_text if bar.greatest != bar.least else "", ""),
    ]
    taken: list[tuple[int, str, str]] = []
    for value, text, style in wanted:
        if value is None or not text or len(text) > scale.width:
            continue
        start = min(max(scale.cell(value) - len(text) // 2, 0), scale.width - len(text))
        if all(start + len(text) < at or at + len(other) < start for at, other, _ in taken):
            taken.append((start, text, style))
    line = Content("")
    for start, text, style in sorted(taken):
        line += Content(" " * (start - len(line))) + Content.styled(text, style)
    return line


def _styled(text: str, styles: dict[str, str]) -> Content:
    """Style runs of like characters."""
    line = Content("")
    start = 0
    for place in range(1, len(text) + 1):
        if place == len(text) or text[place] != text[start]:
            line += Content.styled(text[start:place], styles.get(text[start], ""))
            start = place
    return line
