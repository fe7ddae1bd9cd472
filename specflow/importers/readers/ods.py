"""OpenDocument spreadsheets (.ods): values, formats and places from one pass over content.xml.

One pass, and not bulk reading with a scan beside it as for xlsx: an OpenDocument cell carries its type and value as
attributes, and its place only as a count of all that went before, so whoever finds the odd cells has read all others,
too. python-calamine reads the same files in the tests.
"""

from __future__ import annotations

from xml.parsers.expat import ExpatError

from specflow.errors import FileError
from specflow.importers.readers.archive import Archive
from specflow.importers.readers.grid import Grid
from specflow.importers.readers.ods_events import OdsEvents, OdsProblem, OdsSheet
from specflow.importers.readers.source import Source

MAX_CELLS = 16_000_000

_CONTENT, _STYLES, _MANIFEST = "content.xml", "styles.xml", "META-INF/manifest.xml"


def read_ods(source: Source) -> list[Grid]:
    """All sheets, in the order of the file. Raises FileError for whatever is not a readable spreadsheet."""
    archive = Archive(source)
    if _CONTENT not in archive:
        raise archive.damaged(f"the part {_CONTENT} is missing")
    if _MANIFEST in archive and b"encryption-data" in archive.read(_MANIFEST):
        raise FileError(
            "the spreadsheet is protected by a password",
            where=source.name,
            hint="open it and save it without a password",
        )
    events = OdsEvents(MAX_CELLS)
    for part in (_STYLES, _CONTENT):
        if part in archive:
            _feed(events, archive, part)
    if not any(sheet.rows for sheet in events.sheets):
        raise FileError(
            "no cell of the spreadsheet holds anything",
            where=source.name,
            hint="check that it was saved with its data",
        )
    return [_grid(sheet, source.name) for sheet in events.sheets]


def _feed(events: OdsEvents, archive: Archive, part: str) -> None:
    try:
        events.feed(archive.stream(part))
    except OdsProblem as problem:
        error = archive.damaged(f"{part}: {problem}")
        error.where = ", ".join(filter(None, (archive.name, problem.place)))
        raise error from problem
    except (ExpatError, LookupError, ValueError) as error:  # LookupError: an encoding that there is not
        raise archive.damaged(f"{part} is no well-formed XML ({error})") from error


def _grid(sheet: OdsSheet, file: str) -> Grid:
    return Grid(
        name=sheet.name,
        rows=sheet.rows,
        file=file,
        odd=sheet.marks.cells(),
        hidden=sheet.hidden,
        hidden_rows=sheet.seen_hidden_rows(),
        hidden_columns=frozenset(sheet.hidden_columns),
        merged=tuple(sheet.merged),
    )
