"""The zip container of a workbook, opened with suspicion: nothing is decompressed before its directory is sane."""

from __future__ import annotations

import io
import struct
import zipfile
import zlib
from collections.abc import Iterator
from xml.etree.ElementTree import Element, ParseError

from defusedxml import DefusedXmlException
from defusedxml.ElementTree import fromstring

from specflow.errors import FileError
from specflow.importers.readers.source import Source

MAX_PARTS = 10_000
MAX_PART_BYTES = 768 * 1024 * 1024
MAX_TOTAL_BYTES = 1536 * 1024 * 1024
MAX_SMALL_PART_BYTES = 64 * 1024 * 1024
MAX_RATIO = 250  # the deflate limit is about 1030; sheets of equal rows reach 60 to 100
RATIO_FREE_BYTES = 8 * 1024 * 1024  # below this a high ratio harms nobody

_CHUNK = 2 * 1024 * 1024
_LOCAL_HEADER = struct.Struct("<4s5H3L2H")
_FORBIDDEN = (b"<!DOCTYPE", b"<!ENTITY")


class Archive:
    """The parts of a workbook by name."""

    def __init__(self, source: Source) -> None:
        """Raises FileError when the directory cannot be read or declares something hostile."""
        self.name = source.name
        self._content = source.content
        try:
            with zipfile.ZipFile(io.BytesIO(source.content)) as directory:
                parts = directory.infolist()
        except (zipfile.BadZipFile, NotImplementedError, ValueError, OverflowError, struct.error) as error:
            raise self.damaged(f"its zip directory cannot be read ({error})") from error
        self._parts = {part.filename: part for part in parts}
        self._check_directory(parts)

    def __contains__(self, part: str) -> bool:
        return part in self._parts

    def names(self) -> list[str]:
        """Names of all parts, in the order of the directory."""
        return list(self._parts)

    def damaged(self, what: str) -> FileError:
        """The error for content that contradicts itself."""
        return FileError(
            f"the workbook is damaged: {what}",
            where=self.name,
            hint="copy the file again, or open and save it in a spreadsheet program",
        )

    def size(self, part: str) -> int:
        """How many bytes a part unpacks to, as the directory declares."""
        return self._info(part).file_size

    def stream(self, part: str) -> Iterator[bytes]:
        """The content of a part in pieces of at most two MiB; never more than its directory entry declares."""
        total, checksum = 0, 0
        info = self._info(part)
        for piece in self._pieces(info):
            total += len(piece)
            if total > info.file_size:
                raise self.hostile(f"{part} is larger than the zip directory declares")
            checksum = zlib.crc32(piece, checksum)
            yield piece
        if total != info.file_size or checksum != info.CRC:
            raise self.damaged(f"{part} fails its checksum")

    def read(self, part: str) -> bytes:
        """The whole of a small part (styles, relations, notes)."""
        if self._info(part).file_size > MAX_SMALL_PART_BYTES:
            raise self.hostile(f"{part} is larger than {MAX_SMALL_PART_BYTES >> 20} MiB")
        return b"".join(self.stream(part))

    def xml(self, part: str) -> Element:
        """A small part as elements; document types and entities are refused."""
        content = self.read(part)
        try:
            element: Element = fromstring(content, forbid_dtd=True)
        except (ParseError, DefusedXmlException, ValueError, LookupError) as error:
            if isinstance(error, DefusedXmlException):
                raise self.hostile(f"{part} declares a document type or entities") from error
            raise self.damaged(f"{part} is no well-formed XML ({error})") from error
        return element

    def check_text(self, part: str) -> None:
        """Read a large part through once: checksum, true size, UTF-8, no document type."""
        tail = b""
        for piece in self.stream(part):
            if not tail and piece.startswith((b"\xff\xfe", b"\xfe\xff", b"\x00<", b"<\x00")):
                raise self.damaged(f"{part} is not UTF-8")
            window = tail + piece
            if any(mark in window for mark in _FORBIDDEN):
                raise self.hostile(f"{part} declares a document type or entities")
            tail = window[-16:]

    def hostile(self, what: str) -> FileError:
        """The error for content that no spreadsheet program writes."""
        return FileError(
            f"refused for safety: {what}",
            where=self.name,
            hint="do not open it; if you trust its origin, save it again in a spreadsheet program",
        )

    def _info(self, part: str) -> zipfile.ZipInfo:
        if part not in self._parts:
            raise self.damaged(f"the part {part} is missing")
        return self._parts[part]

    def _check_directory(self, parts: list[zipfile.ZipInfo]) -> None:
        if len(parts) > MAX_PARTS:
            raise self.hostile(f"the archive has {len(parts)} parts, more than {MAX_PARTS}")
        if len(self._parts) != len(parts):
            raise self.hostile("the archive holds two parts of the same name")
        if sum(part.file_size for part in parts) > MAX_TOTAL_BYTES:
            raise self.hostile(f"it unpacks to more than {MAX_TOTAL_BYTES >> 20} MiB (zip bomb)")
        for part in parts:
            self._check_part(part)

    def _check_part(self, part: zipfile.ZipInfo) -> None:
        segments = part.filename.replace("\\", "/").split("/")
        if ".." in segments or segments[0] == "" or ":" in segments[0]:
            raise self.hostile(f"the part name {part.filename!r} points outside the archive")
        if part.flag_bits & 0x1:
            raise FileError(
                "the parts of the workbook are encrypted", where=self.name, hint="save it without a password"
            )
        if part.compress_type not in (zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED):
            raise self.hostile(f"{part.filename} uses a compression that workbooks do not use")
        ratio = part.file_size / max(part.compress_size, 1)
        bomb = part.file_size > RATIO_FREE_BYTES and ratio > MAX_RATIO
        if part.file_size > MAX_PART_BYTES or bomb:
            size = part.file_size >> 20
            raise self.hostile(
                f"{part.filename} unpacks to {size} MiB, {ratio:.0f} times its size (zip bomb)"
            )

    def _pieces(self, info: zipfile.ZipInfo) -> Iterator[bytes]:
        """Inflate by hand: ``zipfile`` stops at the declared size, other readers of the same bytes may not."""
        packed = self._packed(info)
        if info.compress_type == zipfile.ZIP_STORED:
            yield from (bytes(packed[at : at + _CHUNK]) for at in range(0, len(packed), _CHUNK))
            return
        inflate = zlib.decompressobj(-zlib.MAX_WBITS)
        place, waiting = 0, b""
        try:
            while not inflate.eof:
                if not waiting:
                    waiting, place = bytes(packed[place : place + 65536]), place + 65536
                piece = inflate.decompress(waiting, _CHUNK)
                if not piece and not waiting and not inflate.eof:
                    raise self.damaged(f"{info.filename} ends too early")
                yield piece
                waiting = inflate.unconsumed_tail
        except zlib.error as error:
            raise self.damaged(f"{info.filename} cannot be unpacked") from error

    def _packed(self, info: zipfile.ZipInfo) -> memoryview:
        start = info.header_offset
        header = self._content[start : start + _LOCAL_HEADER.size]
        if len(header) < _LOCAL_HEADER.size or not header.startswith(b"PK\x03\x04"):
            raise self.damaged(f"the entry of {info.filename} is not where the directory says")
        fields = _LOCAL_HEADER.unpack(header)
        begin = start + _LOCAL_HEADER.size + fields[-2] + fields[-1]
        return memoryview(self._content)[begin : begin + info.compress_size]
