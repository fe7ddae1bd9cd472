"""What a workbook says of itself: its worksheets, the part that holds each, its styles."""

from __future__ import annotations

import posixpath
from dataclasses import dataclass
from xml.etree.ElementTree import Element

from specflow.errors import FileError
from specflow.importers.readers.archive import Archive
from specflow.importers.readers.styles import Styles, children, local_name, read_styles

_WORKBOOK, _STYLES = "xl/workbook.xml", "xl/styles.xml"


@dataclass(frozen=True, slots=True)
class Book:
    """``sheets`` maps each worksheet to its part in the archive, in the order of the workbook; ``hidden`` are the names
    of those that are not shown."""

    sheets: dict[str, str]
    styles: Styles
    hidden: frozenset[str] = frozenset()


def read_book(archive: Archive) -> Book:
    """Raises FileError when the archive is no workbook or has no worksheet."""
    if _WORKBOOK not in archive:
        raise _no_workbook(archive)
    root, targets = archive.xml(_WORKBOOK), relations(archive, _WORKBOOK)
    never = _says(root, "calcPr", "fullCalcOnLoad")
    from_1904 = _says(root, "workbookPr", "date1904")
    styles = read_styles(archive.xml(_STYLES) if _STYLES in archive else None, never, from_1904)
    sheets = {}
    hidden = set()
    for element in children(root, "sheets"):
        kind, part = targets.get(_relation_id(element), ("", ""))
        if kind == "worksheet":
            sheets[element.get("name", "")] = part
            if element.get("state", "visible") != "visible":
                hidden.add(element.get("name", ""))
    if not sheets:
        raise FileError("the workbook has no worksheet", where=archive.name, hint="charts alone are not read")
    return Book(sheets, styles, frozenset(hidden))


def _says(root: Element, name: str, attribute: str) -> bool:
    element = next((element for element in root if local_name(element) == name), None)
    return element is not None and element.get(attribute) in ("1", "true")


def relations(archive: Archive, part: str) -> dict[str, tuple[str, str]]:
    """Relation id -> (kind, part) of one part; empty when it has none."""
    folder, _, name = part.rpartition("/")
    listing = f"{folder}/_rels/{name}.rels"
    if listing not in archive:
        return {}
    found = {}
    for element in archive.xml(listing):
        target = element.get("Target", "")
        place = target[1:] if target.startswith("/") else posixpath.normpath(f"{folder}/{target}")
        found[element.get("Id", "")] = (element.get("Type", "").rpartition("/")[2], place)
    return found


def _relation_id(element: Element) -> str:
    return next((text for name, text in element.items() if name.endswith("}id")), "")


def _no_workbook(archive: Archive) -> FileError:
    return FileError(
        "this is a zip archive, but no workbook",
        where=archive.name,
        hint="unpack it, or save the workbook as .xlsx",
    )
