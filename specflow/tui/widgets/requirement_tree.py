"""The tree: all requirements in one order, each with its state in a word, k of n, and its title."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import ClassVar

from rich.style import Style
from rich.text import Text
from textual.binding import Binding, BindingType
from textual.widgets import Tree
from textual.widgets.tree import TreeNode

from specflow.model.base import code_key
from specflow.model.outline import Outline, OutlineEntry
from specflow.model.report import CellTone
from specflow.tui.messages import RequirementChosen


class RequirementTree(Tree[OutlineEntry]):
    """The requirements of an outline; filtered, what stands above a hit stays in view."""

    DEFAULT_CSS = """
    RequirementTree {
        width: 36; border: round $surface-lighten-2; padding: 0; overflow-x: hidden;
        border-title-color: $text-muted; border-subtitle-color: $text-muted; scrollbar-size-vertical: 1;
        background: $background;
    }
    RequirementTree:focus { border: round $primary; }
    RequirementTree.wide { width: 52; }
    RequirementTree > .tree--cursor { background: $surface-lighten-1; color: $foreground; text-style: none; }
    RequirementTree:focus > .tree--cursor { background: $primary 30%; color: $foreground; text-style: bold; }
    """
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("left", "close_or_parent", "close", show=False),
        Binding("right", "open_or_first", "open", show=False),
        Binding("j", "cursor_down", "down", show=False),
        Binding("k", "cursor_up", "up", show=False),
    ]
    KEY_HELP = (
        ("↑ ↓", "to the requirement above or below; its card is shown beside"),
        ("← →", "close or open a branch, go to what is above or below it"),
        ("enter", "open or close a branch"),
    )

    def __init__(self) -> None:
        super().__init__("requirements")
        self.show_root = False
        self.guide_depth = 2
        self._outline = Outline(title="", entries=())
        self._words = ""
        self._open_only = False

    def show(self, outline: Outline, *, words: str = "", open_only: bool = False) -> None:
        """Show an outline, filtered; the cursor stays on the requirement it was on where that is still shown."""
        kept = self.chosen
        self._outline, self._words, self._open_only = outline, words, open_only
        shown = visible(outline.entries, words, open_only)
        self._fill(shown)
        hits = sum(bool(entry.id) for entry in shown)
        total = sum(bool(entry.id) for entry in outline.entries)
        self.border_title = outline.title
        self.border_subtitle = self._subtitle(hits, total)
        asked = code_key(words).split()
        first = next((entry.id for entry in shown if entry.id and _says(entry, asked)), "") if asked else ""
        self.call_after_refresh(self._return_to, first or kept)

    def _subtitle(self, hits: int, total: int) -> str:
        filters = [
            *(["open only"] if self._open_only else []),
            *([f"“{self._words}”"] if self._words else []),
        ]
        return f"{hits} of {total}: {', '.join(filters)}" if filters else f"{total} requirements"

    def _fill(self, entries: Sequence[OutlineEntry]) -> None:
        self.clear()
        above: list[tuple[int, TreeNode[OutlineEntry]]] = []
        for place, entry in enumerate(entries):
            while above and above[-1][0] >= entry.depth:
                above.pop()
            parent = above[-1][1] if above else self.root
            has_children = place + 1 < len(entries) and entries[place + 1].depth > entry.depth
            if has_children:
                above.append((entry.depth, parent.add(entry.id or entry.title, entry, expand=True)))
            else:
                parent.add_leaf(entry.id or entry.title, entry)
        self.root.expand()

    def _return_to(self, id: str) -> None:
        nodes = self.all_lines()
        node = next((one for one in nodes if _is(one, id)), None)
        node = node or next((one for one in nodes if one.data and one.data.id), None)
        if node is None:
            self.post_message(RequirementChosen(""))
            return
        self.move_cursor(node)
        self.scroll_to_node(node, animate=False)
        self.post_message(RequirementChosen(node.data.id if node.data else ""))

    def all_lines(self) -> list[TreeNode[OutlineEntry]]:
        """Return all nodes from top to bottom."""
        found: list[TreeNode[OutlineEntry]] = []
        waiting = list(reversed(self.root.children))
        while waiting:
            node = waiting.pop()
            found.append(node)
            waiting.extend(reversed(node.children))
        return found

    @property
    def chosen(self) -> str:
        """The id of the requirement under the cursor, "" on a heading."""
        node = self.cursor_node
        return node.data.id if node is not None and node.data is not None else ""

    def go_to(self, id: str) -> bool:
        """Put the cursor on a requirement; False when it is not shown."""
        node = next((one for one in self.all_lines() if _is(one, id)), None)
        if node is not None:
            self._reveal(node)
        return node is not None

    def go_to_next(self, wanted: Callable[[OutlineEntry], bool]) -> bool:
        """Put the cursor on the next entry of a kind, from the top again after the last; False when there is none."""
        nodes = self.all_lines()
        start = next((place for place, node in enumerate(nodes) if node is self.cursor_node), -1) + 1
        for node in [*nodes[start:], *nodes[:start]]:
            if node.data is not None and wanted(node.data):
                self._reveal(node)
                return True
        return False

    def _reveal(self, node: TreeNode[OutlineEntry]) -> None:
        parent = node.parent
        while parent is not None:
            parent.expand()
            parent = parent.parent
        self.call_after_refresh(self._move_to, node)

    def _move_to(self, node: TreeNode[OutlineEntry]) -> None:
        self.move_cursor(node)
        self.scroll_to_node(node, animate=False)

    def action_close_or_parent(self) -> None:
        """Close the branch; on one that is closed, go to what it stands under."""
        node = self.cursor_node
        if node is not None and node.is_expanded and node.children:
            node.collapse()
        elif node is not None and node.parent is not None and not node.parent.is_root:
            self.move_cursor(node.parent)

    def action_open_or_first(self) -> None:
        """Open the branch; on one that is open, go to what stands first in it."""
        node = self.cursor_node
        if node is not None and node.children and not node.is_expanded:
            node.expand()
        elif node is not None and node.children:
            self.move_cursor(node.children[0])

    def on_tree_node_highlighted(self, event: Tree.NodeHighlighted[OutlineEntry]) -> None:
        """Tell which requirement is looked at."""
        event.stop()
        self.post_message(RequirementChosen(event.node.data.id if event.node.data else ""))

    def render_label(self, node: TreeNode[OutlineEntry], base_style: Style, style: Style) -> Text:
        """Set one line: the mark of a branch, id, state in a word, k/n, and as much of the title as fits."""
        entry = node.data
        branch = ("▾ " if node.is_expanded else "▸ ") if node.children else "  "
        if entry is None:
            return Text(branch, style)
        if not entry.id:
            return Text.assemble((branch, base_style), (entry.title, style + Style(bold=True)))
        line = Text.assemble((f"{branch}{entry.id} ", style), (entry.mark, self._style(entry.tone, style)))
        line.append(f" {entry.proved}", style)
        line.append(f"  {entry.title}", style + Style(dim=True))
        return line

    def _style(self, tone: CellTone, style: Style) -> Style:
        colours = self.app.theme_variables
        name = {
            CellTone.GOOD: "text-success",
            CellTone.DOUBTFUL: "text-warning",
            CellTone.BAD: "text-error",
            CellTone.QUIET: "foreground-muted",
        }.get(tone)
        colour = colours.get(name, "") if name else ""
        bold = Style(bold=tone is CellTone.BAD)
        return (
            style + bold + (Style(color=colour) if colour.startswith("#") and len(colour) == 7 else Style())
        )


def _is(node: TreeNode[OutlineEntry], id: str) -> bool:
    return bool(id) and node.data is not None and code_key(node.data.id) == code_key(id)


def visible(
    entries: Sequence[OutlineEntry], words: str = "", open_only: bool = False
) -> Sequence[OutlineEntry]:
    """Return the entries that pass the filters, with what they stand under."""
    if not words and not open_only:
        return entries
    asked = code_key(words).split()
    kept: list[OutlineEntry] = []
    depth = -1  # of the last one kept, looking backwards: what stands above it is kept as well
    for entry in reversed(entries):
        hit = bool(entry.id) and (entry.is_open or not open_only) and _says(entry, asked)
        if hit or entry.depth < depth:
            kept.append(entry)
            depth = entry.depth
        elif entry.depth == 0:
            depth = -1
    return tuple(reversed(kept))


def _says(entry: OutlineEntry, asked: Sequence[str]) -> bool:
    text = code_key(f"{entry.id} {entry.title} {entry.label} {entry.mark}")
    return all(word in text for word in asked)
