"""Files that are broken, of another kind, or made to do harm: one clear message each, quickly, in little memory."""

from __future__ import annotations

import io
import struct
import zipfile
from pathlib import Path

import pytest

from specflow.importers.readers import archive as archive_module
from specflow.importers.readers import open_grids, xlsx
from specflow.importers.readers.archive import Archive
from specflow.importers.readers.source import read_source
from tests.importers.readers.workbooks import MAIN, PARTS, by_hand, refused

ONE_CELL = '<row r="1"><c r="A1"><v>5</v></c></row>'
SHEET = "xl/worksheets/sheet1.xml"
OLE = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"


def message_for(path: Path) -> str:
    return refused(lambda: open_grids(path))


def file_of(path: Path, content: bytes) -> Path:
    path.write_bytes(content)
    return path


def patched_size(content: bytes, part: str, size: int) -> bytes:
    """The archive with another uncompressed size of one part, in the directory and in the part's own header."""
    changed = bytearray(content)
    with zipfile.ZipFile(io.BytesIO(content)) as archive:
        start = archive.getinfo(part).header_offset
    struct.pack_into("<L", changed, start + 22, size)
    name = part.encode()
    entry = content.rindex(name) - 46
    assert content[entry : entry + 4] == b"PK\x01\x02"
    struct.pack_into("<L", changed, entry + 24, size)
    return bytes(changed)


@pytest.mark.parametrize(
    ("content", "what"),
    [
        (b"<html><table></table></html>", "a web page without a table"),
        (b"\xef\xbb\xbf  <?xml version='1.0'?><Workbook/>", "XML text, not a table"),
        (
            b"<?xml version='1.0'?><Workbook xmlns='urn:schemas-microsoft-com:office:spreadsheet'/>",
            "as XML text",
        ),
        (b"Measured on Monday\n", "text without a table"),
        (OLE + b"\0" * 600 + "Workbook".encode("utf-16-le"), "damaged"),
        (OLE + b"\0" * 600 + "WordDocument".encode("utf-16-le"), "there is no workbook"),
        (OLE + b"\0" * 600 + "EncryptedPackage".encode("utf-16-le"), "protected by a password"),
        (b"%PDF-1.7\n\x00\x01\x02", "no workbook, and no text either"),
        (b"PK\x03\x04", "zip directory cannot be read"),
        (b"PK\x05\x06" + b"\0" * 18, "no workbook"),
    ],
)
def test_files_of_another_kind_are_named(tmp_path: Path, content: bytes, what: str) -> None:
    assert what in message_for(file_of(tmp_path / "a.xlsx", content))


@pytest.mark.parametrize(
    ("part", "what"),
    [
        ("word/document.xml", "no workbook"),
        ("xl/workbook.bin", ".xlsb"),
        ("content.xml", "no well-formed XML"),
    ],
)
def test_archives_of_another_kind_are_named(tmp_path: Path, part: str, what: str) -> None:
    with zipfile.ZipFile(tmp_path / "a.xlsx", "w") as archive:
        archive.writestr(part, "x")
    assert what in message_for(tmp_path / "a.xlsx")


@pytest.mark.parametrize("share", [0.1, 0.5, 0.9, 0.99])
def test_truncated_workbooks_are_refused(tmp_path: Path, share: float) -> None:
    content = by_hand(tmp_path / "whole.xlsx", ONE_CELL).read_bytes()
    assert "damaged" in message_for(file_of(tmp_path / "a.xlsx", content[: int(len(content) * share)]))


def test_changed_bytes_fail_the_checksum(tmp_path: Path) -> None:
    with zipfile.ZipFile(tmp_path / "a.xlsx", "w", zipfile.ZIP_STORED) as archive:
        for name, part in PARTS.items():
            archive.writestr(name, part)
        archive.writestr(SHEET, f'<worksheet xmlns="{MAIN}"><sheetData>{ONE_CELL}</sheetData></worksheet>')
    content = (tmp_path / "a.xlsx").read_bytes().replace(b"<v>5</v>", b"<v>6</v>")
    assert f"{SHEET} fails its checksum" in message_for(file_of(tmp_path / "a.xlsx", content))


def test_zip_bomb_is_refused_by_its_directory(tmp_path: Path) -> None:
    path = by_hand(tmp_path / "a.xlsx", ONE_CELL, parts={"xl/media/image1.png": b"\0" * (40 << 20)})
    assert path.stat().st_size < 100_000
    assert "zip bomb" in message_for(path)


def test_zip_bomb_that_declares_a_small_size_is_refused_while_it_unpacks(tmp_path: Path) -> None:
    rows = ONE_CELL + "".join(f'<row r="{row}"/>' for row in range(2, 100_000))
    content = by_hand(tmp_path / "a.xlsx", rows).read_bytes()
    assert "larger than the zip directory declares" in message_for(
        file_of(tmp_path / "a.xlsx", patched_size(content, SHEET, 1000))
    )


def test_shared_texts_that_declare_a_small_size_are_refused(tmp_path: Path) -> None:
    texts = f'<sst xmlns="{MAIN}">' + "<si><t>x</t></si>" * 100_000 + "</sst>"
    content = by_hand(tmp_path / "a.xlsx", ONE_CELL, parts={"xl/sharedStrings.xml": texts}).read_bytes()
    assert "larger than the zip directory declares" in message_for(
        file_of(tmp_path / "a.xlsx", patched_size(content, "xl/sharedStrings.xml", 500))
    )


@pytest.mark.parametrize(
    "cell",
    [
        '<c r="A1"><v>28.25</v> r="I8" t="s"><v>0</v></c>',
        '<c r="A1"><v>1</v><v>2</v></c>',
        '<c r="A1"><v/><v>2</v></c>',
        '<c r="A1" t="inlineStr"><is><t>1</t></is><v>2</v></c>',
        '<c r="A1"><f>B1</f><v>1</v><v>2</v></c>',
    ],
)
def test_a_cell_with_two_values_is_refused(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, cell: str
) -> None:
    path = by_hand(tmp_path / "a.xlsx", f'<row r="1">{cell}</row>')
    assert "holds two values" in message_for(path)
    monkeypatch.setattr(xlsx, "STREAMED_BYTES", 0)
    assert "holds two values" in message_for(path)


@pytest.mark.parametrize("count", ["10000000000", "1e9", "&#57;9999999999", "-1"])
def test_shared_texts_that_say_they_are_more_than_fit_are_refused(tmp_path: Path, count: str) -> None:
    texts = f'<sst xmlns="{MAIN}" uniqueCount="{count}"><si><t>x</t></si></sst>'
    path = by_hand(tmp_path / "a.xlsx", ONE_CELL, parts={"xl/sharedStrings.xml": texts})
    assert "says that it holds" in message_for(path)


@pytest.mark.parametrize(
    "cell",
    [
        '<c r="XFD1048576" s="1"/>',
        '<c r="XFD1048576" t="s"/>',
        '<c r="XFD1048576"><v></v></c>',
        '<c r="XFD1048576" t="str"><v></v></c>',
        '<c r="XFD1048576" t="b"><v/></c>',
    ],
)
def test_cells_that_hold_nothing_do_not_widen_the_sheet(tmp_path: Path, cell: str) -> None:
    grid = open_grids(by_hand(tmp_path / "a.xlsx", f'{ONE_CELL}<row r="1048576">{cell}</row>'))[0]
    assert (grid.last_row, grid.last_column) == (1, 1)


def test_declared_total_is_limited(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(archive_module, "MAX_TOTAL_BYTES", 1000)
    assert "unpacks to more than" in message_for(by_hand(tmp_path / "a.xlsx", ONE_CELL))


def test_number_of_parts_is_limited(tmp_path: Path) -> None:
    parts: dict[str, str | bytes | None] = {f"x/{number}": "" for number in range(archive_module.MAX_PARTS)}
    assert "parts, more than" in message_for(by_hand(tmp_path / "a.xlsx", ONE_CELL, parts=parts))


@pytest.mark.parametrize("name", ["../../etc/passwd", "xl/../../a", "/etc/passwd", "C:/a", "..\\..\\a"])
def test_part_names_that_point_outside_are_refused(tmp_path: Path, name: str) -> None:
    assert "points outside the archive" in message_for(
        by_hand(tmp_path / "a.xlsx", ONE_CELL, parts={name: "x"})
    )


@pytest.mark.filterwarnings("ignore:Duplicate name")
def test_two_parts_of_one_name_are_refused(tmp_path: Path) -> None:
    path = by_hand(tmp_path / "a.xlsx", ONE_CELL)
    with zipfile.ZipFile(path, "a") as archive:
        archive.writestr(SHEET, "other")
    assert "two parts of the same name" in message_for(path)


def test_zip_encryption_is_named(tmp_path: Path) -> None:
    content = bytearray(by_hand(tmp_path / "a.xlsx", ONE_CELL).read_bytes())
    entry = content.rindex(SHEET.encode()) - 46
    content[entry + 8] |= 1
    assert "encrypted" in message_for(file_of(tmp_path / "a.xlsx", bytes(content)))


def test_unusual_compression_is_refused(tmp_path: Path) -> None:
    path = by_hand(tmp_path / "a.xlsx", ONE_CELL)
    with zipfile.ZipFile(path, "a", zipfile.ZIP_LZMA) as archive:
        archive.writestr("x", "y")
    assert "compression" in message_for(path)


@pytest.mark.parametrize("part", [SHEET, "xl/sharedStrings.xml", "xl/styles.xml", "xl/workbook.xml"])
def test_document_types_and_entities_are_refused(tmp_path: Path, part: str) -> None:
    path = by_hand(tmp_path / "plain.xlsx", ONE_CELL)
    with zipfile.ZipFile(path) as archive:
        content = archive.read(part).decode()
    entities = '<!DOCTYPE x [<!ENTITY a SYSTEM "file:///etc/passwd"><!ENTITY b "&a;&a;">]>'
    hostile = by_hand(tmp_path / "a.xlsx", ONE_CELL, parts={part: entities + content})
    assert "document type" in message_for(hostile)


@pytest.mark.parametrize("part", [SHEET, "xl/sharedStrings.xml", "xl/styles.xml", "xl/workbook.xml"])
def test_parts_that_are_no_xml_are_refused(tmp_path: Path, part: str) -> None:
    assert "damaged" in message_for(by_hand(tmp_path / "a.xlsx", ONE_CELL, parts={part: "no xml <"}))


@pytest.mark.parametrize("part", [SHEET, "xl/sharedStrings.xml"])
def test_other_encodings_than_utf8_are_refused(tmp_path: Path, part: str) -> None:
    path = by_hand(tmp_path / "plain.xlsx", ONE_CELL)
    with zipfile.ZipFile(path) as archive:
        content = archive.read(part).decode()
    wide = ('<?xml version="1.0" encoding="UTF-16"?>' + content).encode("utf-16")
    assert "UTF-" in message_for(by_hand(tmp_path / "a.xlsx", ONE_CELL, parts={part: wide}))


@pytest.mark.parametrize("part", ["xl/workbook.xml", "xl/_rels/workbook.xml.rels", SHEET])
def test_missing_parts_are_named(tmp_path: Path, part: str) -> None:
    message = message_for(by_hand(tmp_path / "a.xlsx", ONE_CELL, parts={part: None}))
    assert "no workbook" in message or "no worksheet" in message or f"the part {part} is missing" in message


def test_text_index_beyond_the_shared_texts_is_refused(tmp_path: Path) -> None:
    rows = '<row r="1"><c r="A1" t="s"><v>99999</v></c></row>'
    assert "shared string" in message_for(by_hand(tmp_path / "a.xlsx", rows))


@pytest.mark.parametrize("dimension", ["A1:XFD1048576", "A1:ZZZ99999999999", "B7:A1"])
def test_absurd_dimensions_cost_nothing(tmp_path: Path, dimension: str) -> None:
    around = f'<dimension ref="{dimension}"/>{{rows}}'
    grid = open_grids(by_hand(tmp_path / "a.xlsx", ONE_CELL, around=around))[0]
    assert grid.rows == [[5.0]]


@pytest.mark.parametrize("dimension", ["", "x", "1A"])
def test_dimensions_that_are_none_are_refused(tmp_path: Path, dimension: str) -> None:
    around = f'<dimension ref="{dimension}"/>{{rows}}'
    assert "sheet 'data'" in message_for(by_hand(tmp_path / "a.xlsx", ONE_CELL, around=around))


def test_stray_cell_in_the_last_corner_is_refused_before_it_takes_memory(tmp_path: Path) -> None:
    rows = ONE_CELL + '<row r="1048576"><c r="XFD1048576"><v>1</v></c></row>'
    message = message_for(by_hand(tmp_path / "a.xlsx", rows))
    assert "a.xlsx, data: the used range A1:XFD1048576 spans 17,179,869,184 cells" in message
    assert "towards XFD1048576" in message


def test_hidden_columns_to_the_end_of_time_are_cut(tmp_path: Path) -> None:
    around = '<cols><col min="2" max="99999999999" hidden="1"/></cols>{rows}'
    assert max(open_grids(by_hand(tmp_path / "a.xlsx", ONE_CELL, around=around))[0].hidden_columns) == 16_384


def test_a_part_is_streamed_to_its_declared_size(tmp_path: Path) -> None:
    archive = Archive(read_source(by_hand(tmp_path / "a.xlsx", ONE_CELL)))
    with zipfile.ZipFile(tmp_path / "a.xlsx") as reference:
        for name in reference.namelist():
            assert b"".join(archive.stream(name)) == reference.read(name)
    assert SHEET in archive.names()


def test_a_panic_of_the_bulk_reader_is_one_message(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    class PanicException(BaseException):
        """What the Rust library raises, by name; none of the broken files tried so far makes it do so."""

    def panic(*_: object) -> None:
        raise PanicException("index out of bounds")

    monkeypatch.setattr(xlsx._Sheet, "take", panic)
    assert "damaged: sheet 'data': index out of bounds" in message_for(by_hand(tmp_path / "a.xlsx", ONE_CELL))
