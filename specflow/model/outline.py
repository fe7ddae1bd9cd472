"""An outline: everything there is, in one line each, in the order of a tree; what a browser shows beside a card."""

from __future__ import annotations

from specflow.model.base import Document
from specflow.model.report import CellTone


class OutlineEntry(Document):
    """One line: a requirement, or (``id`` empty) a heading such as a block or a source document.

    ``mark`` is the state in a word that fits a narrow line, ``label`` in full; ``proved`` is k/n. ``depth`` is the
    place in the tree: an entry stands under the nearest one above it with a smaller depth.
    """

    id: str = ""
    title: str
    depth: int = 0
    mark: str = ""
    label: str = ""
    tone: CellTone = CellTone.PLAIN
    proved: str = ""
    is_open: bool = False
    is_failing: bool = False


class Outline(Document):
    """The same requirements in one order; ``title`` names the order."""

    title: str
    entries: tuple[OutlineEntry, ...]
