"""The proof grid: every required point as a cell; the one under the cursor is said in words below."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from typing import ClassVar

from textual.app import RenderResult
from textual.binding import Binding, BindingType
from textual.content import Content
from textual.geometry import Size
from textual.reactive import reactive
from textual.widget import Widget

from specflow.model.card import PointState, ProofCell, ProofGrid
from specflow.tui.tones import POINT_MARKS, POINT_STYLES

NARROWEST = 3  # cells of a point: its mark, and room for the brackets that the cursor is
DETAIL_LINES, WIDE_DETAIL_LINES, WIDE = 6, 4, 60  # lines below a grid, and where it is wide


@dataclass(frozen=True, slots=True)
class Place:
    """A cell by its row and column."""

    row: int
    column: int


class ProofGridView(Widget, can_focus=True):
    """Points in rows and columns; a mark for each state, and the margin beside it where there is room."""

    DEFAULT_CSS = """
    ProofGridView { height: auto; }
    """
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("left,h", "move(0, -1)", "point", show=False),
        Binding("right,l", "move(0, 1)", "point", show=False),
        Binding("up,k", "move(-1, 0)", "point", show=False),
        Binding("down,j", "move(1, 0)", "point", show=False),
        Binding("home", "edge(-1)", "first", show=False),
        Binding("end", "edge(1)", "last", show=False),
        Binding("x", "next_open", "open point"),
    ]
    KEY_HELP = (
        ("← → ↑ ↓", "from point to point (tab goes to the grid); the point is said in words below it"),
        ("x", "to the next point that is not proved"),
        ("home end", "first and last point of a row"),
    )

    cursor: reactive[Place] = reactive(Place(0, 0))

    def __init__(self, grid: ProofGrid) -> None:
        super().__init__()
        self.grid = grid
        self._counts = Counter(cell.state for row in grid.cells for cell in row if cell)
        self.cursor = self._first_open() or Place(0, 0)

    @property
    def cell(self) -> ProofCell | None:
        """The point under the cursor; None where the combination is not required."""
        return self._at(self.cursor)

    def get_content_height(self, container: Size, viewport: Size, width: int) -> int:
        """Return the lines of titles, rows, legend and detail."""
        layout = Layout.of(self.grid, width)
        return 2 + layout.header_lines + layout.row_lines + _detail_lines(width)

    def render(self) -> RenderResult:
        layout = Layout.of(self.grid, max(self.size.width, 12))
        lines = [
            Content.styled(self.grid.title, "bold"),
            *_header(self.grid, layout, self.cursor),
            *_rows(self.grid, layout, self.cursor, self.has_focus),
            _legend(self._counts),
            *_detail(self.cell, self.grid.note, layout.width),
        ]
        return Content("\n").join(lines)

    def on_focus(self) -> None:
        """Show the cursor."""
        self.refresh()

    def on_blur(self) -> None:
        """Show that keys go elsewhere."""
        self.refresh()

    def action_move(self, down: int, right: int) -> None:
        """Move the cursor by one cell; a single row that is folded is moved through line by line."""
        if down and len(self.grid.cells) == 1:
            down, right = 0, down * Layout.of(self.grid, max(self.size.width, 12)).columns
        row = min(max(self.cursor.row + down, 0), len(self.grid.cells) - 1)
        column = min(max(self.cursor.column + right, 0), len(self.grid.cells[row]) - 1)
        self.cursor = Place(row, column)

    def action_edge(self, side: int) -> None:
        """Go to the first or the last cell of the row."""
        last = len(self.grid.cells[self.cursor.row]) - 1
        self.cursor = Place(self.cursor.row, last if side > 0 else 0)

    def action_next_open(self) -> None:
        """Go to the next point that is not proved, from the first again after the last."""
        places = self._open_places()
        here = (self.cursor.row, self.cursor.column)
        after = [place for place in places if (place.row, place.column) > here]
        if after or places:
            self.cursor = (after or places)[0]

    def _first_open(self) -> Place | None:
        """Return the worst of the open points: a failing one before one without evidence."""
        order = [PointState.FAILING, PointState.WITHOUT_EVIDENCE, PointState.UNDECIDED]
        places = self._open_places()
        return min(places, key=lambda place: order.index(self._state(place)), default=None)

    def _open_places(self) -> list[Place]:
        return [
            Place(row, column)
            for row, cells in enumerate(self.grid.cells)
            for column, cell in enumerate(cells)
            if cell is not None and cell.state is not PointState.PROVED
        ]

    def _state(self, place: Place) -> PointState:
        cell = self._at(place)
        return cell.state if cell is not None else PointState.PROVED

    def _at(self, place: Place) -> ProofCell | None:
        if place.row < len(self.grid.cells) and place.column < len(self.grid.cells[place.row]):
            return self.grid.cells[place.row][place.column]
        return None


@dataclass(frozen=True, slots=True)
class Layout:
    """How a grid is set in ``width`` cells: ``columns`` of ``cell`` cells each, after titles of ``title`` cells.

    ``folded``: a single row goes on in the next line; else columns that do not fit are scrolled to.
    """

    width: int
    title: int
    cell: int
    columns: int
    folded: bool
    header_lines: int
    row_lines: int

    @classmethod
    def of(cls, grid: ProofGrid, width: int) -> Layout:
        """Return the layout that shows most."""
        count = max((len(row) for row in grid.cells), default=0)
        title = max((len(one) + 1 for one in grid.row_titles if one), default=0)
        title = min(title, max(width // 2, width - count * NARROWEST))
        words = [len(cell.margin) + 4 for row in grid.cells for cell in row if cell]
        wide = max([*words, *(len(one) + 1 for one in grid.column_titles)], default=NARROWEST)
        room = width - title
        cell = wide if count * wide <= room else NARROWEST
        fits = max(room // cell, 1)
        folded = len(grid.cells) == 1 and count > fits
        lines = -(-count // fits) if folded else len(grid.cells)
        headed = bool(grid.column_titles) and not folded
        return cls(width, title, cell, min(fits, count), folded, 1 if headed else 0, lines)

    def first(self, grid: ProofGrid, cursor: Place) -> int:
        """Return the first column shown, so that the cursor is in view."""
        count = max((len(row) for row in grid.cells), default=0)
        if self.folded or count <= self.columns:
            return 0
        return min(max(cursor.column - self.columns // 2, 0), count - self.columns)


def _header(grid: ProofGrid, layout: Layout, cursor: Place) -> list[Content]:
    """Title every column, or where there is no room say the first and the last one shown."""
    if not layout.header_lines:
        return []
    first = layout.first(grid, cursor)
    titles = grid.column_titles[first : first + layout.columns]
    if layout.cell > NARROWEST:
        words = " " + "".join(f"{title:<{layout.cell}}" for title in titles)
    else:
        words = f"{titles[0]} … {titles[-1]}" if len(titles) > 1 else titles[0]
        more = len(grid.column_titles) - len(titles)
        words = f" {words} (‹ › {more} more)" if more else f" {words}"
    line = " " * layout.title + words
    if len(line) > layout.width:
        line = _cut(words.strip(), layout.width).rjust(layout.width)
    return [Content.styled(line, "$secondary")]


def _rows(grid: ProofGrid, layout: Layout, cursor: Place, focused: bool) -> list[Content]:
    lines = []
    for number, row in enumerate(grid.cells):
        title = _row_title(grid, number)
        first = layout.first(grid, cursor)
        starts = range(0, len(row), layout.columns) if layout.folded else (first,)
        for start in starts:
            room = max(layout.title - 1, 0)
            line = Content.styled(_cut(title, room).rjust(room).ljust(layout.title), "$secondary")
            for column in range(start, min(start + layout.columns, len(row))):
                line += _cell(row[column], layout.cell, Place(number, column) == cursor, focused)
            lines.append(line)
    return lines


def _row_title(grid: ProofGrid, number: int) -> str:
    """Return a row's title, without the leading parts that it has in common with the row above."""
    if number >= len(grid.row_titles):
        return ""
    parts = grid.row_titles[number].split(", ")
    above = grid.row_titles[number - 1].split(", ") if number else []
    common = 0
    while common < min(len(parts) - 1, len(above)) and parts[common] == above[common]:
        common += 1
    return ", ".join(parts[common:])


def _cut(text: str, width: int) -> str:
    if width <= 0:
        return ""
    return text if len(text) <= width else text[: max(width - 1, 0)] + "…"


def _cell(cell: ProofCell | None, width: int, here: bool, focused: bool) -> Content:
    if cell is None:
        return Content(("[ ]" if here else "").ljust(width))
    words = POINT_MARKS[cell.state]
    if width > NARROWEST and cell.value:
        words += f" {cell.margin}"
    opens, closes = ("[", "]") if here else (" ", " ")
    brackets = "bold $accent" if focused else "$secondary"
    rest = " " * (width - len(words) - 2)
    return Content.assemble((opens, brackets), (words, POINT_STYLES[cell.state]), (closes, brackets), rest)


def _legend(counts: Counter[PointState]) -> Content:
    legend = Content("")
    for state, mark in POINT_MARKS.items():
        if counts[state]:
            legend += Content.styled(f"{mark} {counts[state]} {state.value}  ", POINT_STYLES[state])
    return legend


def _detail(cell: ProofCell | None, note: str, width: int) -> list[Content]:
    """Say the point under the cursor; always the same number of lines, so that nothing below it moves."""
    lines: list[Content] = []
    if cell is None:
        lines.append(Content.styled("not required", "$secondary"))
    else:
        lines += Content.assemble(("▸ ", "$primary"), (cell.words, "bold")).wrap(width)
        said = [cell.verdict, cell.value, f"guarded {cell.margin}" if cell.value else ""]
        lines += Content.styled(" · ".join(part for part in said if part), POINT_STYLES[cell.state]).wrap(
            width
        )
        for words in (cell.origin, cell.lacks):
            if words:
                lines += Content(words).wrap(width)
    if note:
        lines += Content.styled(note, "$secondary").wrap(width)
    most = _detail_lines(width)
    if len(lines) > most:
        lines = [*lines[: most - 1], lines[most - 1].truncate(width - 1) + Content("…")]
    return [*lines, *[Content("")] * (most - len(lines))]


def _detail_lines(width: int) -> int:
    return WIDE_DETAIL_LINES if width >= WIDE else DETAIL_LINES
