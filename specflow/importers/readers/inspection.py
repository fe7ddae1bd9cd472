"""A closer look at single cells of a workbook, for whoever asks where a number comes from: formulas and comments."""

from __future__ import annotations

from collections.abc import Collection
from xml.parsers import expat

from specflow.importers.readers.book import read_book, relations
from specflow.importers.readers.cell_events import cell_place
from specflow.importers.readers.grid import by_sheet_name
from specflow.importers.readers.places import address
from specflow.importers.readers.source import Source
from specflow.importers.readers.styles import children, local_name
from specflow.importers.readers.xlsx import open_archive

Cell = tuple[int, int]


def formulas(source: Source, sheet: str, cells: Collection[Cell]) -> dict[Cell, str]:
    """The formula text, with ``=``, of those of the given cells that hold one.

    A formula that was filled over several cells is stored once, at the first of them; the others get its text with
    the cell that it is written for. Raises FileError as reading does.
    """
    archive = open_archive(source)
    part = by_sheet_name(read_book(archive).sheets, sheet, source.name)
    reader = _FormulaEvents(frozenset(cells))
    try:
        for piece in archive.stream(part):
            reader.parser.Parse(piece, False)
    except (expat.ExpatError, LookupError, ValueError) as error:
        raise archive.damaged(f"sheet {sheet!r}: its XML is not well-formed ({error})") from error
    return reader.result()


def comments(source: Source, sheet: str) -> dict[Cell, str]:
    """The comments (notes) of a sheet by cell. Raises FileError as reading does."""
    archive = open_archive(source)
    part = by_sheet_name(read_book(archive).sheets, sheet, source.name)
    found: dict[Cell, str] = {}
    for kind, target in relations(archive, part).values():
        if kind == "comments":
            for comment in children(archive.xml(target), "commentList"):
                text = "".join(run.text or "" for run in comment.iter() if local_name(run) == "t")
                found[cell_place(comment.get("ref", ""))] = text.strip()
    return found


class _FormulaEvents:
    """Keeps the formulas of the wanted cells, and those that others share."""

    def __init__(self, wanted: frozenset[Cell]) -> None:
        self._wanted = wanted
        self._found: dict[Cell, str] = {}
        self._followers: dict[Cell, str] = {}
        self._shared: dict[str, tuple[Cell, str]] = {}
        self._cell: Cell = (0, 0)
        self._group = ""
        self._text: list[str] | None = None
        self.parser = expat.ParserCreate()
        self.parser.buffer_text = True
        self.parser.StartElementHandler = self._start
        self.parser.EndElementHandler = self._end
        self.parser.CharacterDataHandler = self._characters

    def result(self) -> dict[Cell, str]:
        """The formulas found, when all has been fed."""
        for cell, group in self._followers.items():
            if group in self._shared:
                home, text = self._shared[group]
                self._found[cell] = f"={text} (as in {address(*home)})"
        return self._found

    def _start(self, name: str, attributes: dict[str, str]) -> None:
        match name.rpartition(":")[2]:
            case "row":
                given = attributes.get("r", "")
                self._cell = (int(given) if given.isdigit() else self._cell[0] + 1, 0)
            case "c":
                here = (self._cell[0], self._cell[1] + 1)
                self._cell = cell_place(attributes["r"]) if "r" in attributes else here
            case "f":
                self._text = []
                self._group = attributes.get("si", "") if attributes.get("t") == "shared" else ""

    def _characters(self, text: str) -> None:
        if self._text is not None:
            self._text.append(text)

    def _end(self, name: str) -> None:
        if name.rpartition(":")[2] != "f" or self._text is None:
            return
        text, self._text = "".join(self._text), None
        if text and self._group:
            self._shared[self._group] = (self._cell, text)
        if self._cell in self._wanted:
            if text:
                self._found[self._cell] = f"={text}"
            elif self._group:
                self._followers[self._cell] = self._group
