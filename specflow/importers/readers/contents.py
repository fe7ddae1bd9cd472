"""What a file is by its content. Its ending may lie: instruments save web pages and plain text as .xls."""

from __future__ import annotations

import zipfile
from enum import StrEnum
from io import BytesIO

from specflow.errors import FileError
from specflow.importers.readers.source import Source

_OLE = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"
_OLD_BINARY = (b"\x09\x08\x10\x00", b"\x09\x08\x08\x00", b"\x09\x04\x06\x00", b"\x09\x02\x06\x00")
_ENCRYPTED = "EncryptedPackage".encode("utf-16-le")
_BOOKS = tuple(name.encode("utf-16-le") for name in ("Workbook", "Book"))
_XML_SPREADSHEET = b"urn:schemas-microsoft-com:office:spreadsheet"


class Content(StrEnum):
    """The kinds of content that are read."""

    XLSX = "a workbook (.xlsx)"
    XLS = "a workbook of the old binary format (.xls)"
    ODS = "an OpenDocument spreadsheet (.ods)"
    HTML = "a web page with tables"
    TEXT = "text"


def content_of(source: Source) -> Content:
    """Raises FileError, with a remedy, for content that is certainly none of these."""
    head = source.content[:4096]
    if head.startswith(b"PK"):
        return _zipped(source)
    if head.startswith(_OLE):
        return _compound(source)
    if head.startswith(_OLD_BINARY):
        return Content.XLS
    text = _as_text(head)
    start = text.lstrip(b"\xef\xbb\xbf \t\r\n").lower()
    if _XML_SPREADSHEET in text:
        raise _refusal(source, "this is a spreadsheet as XML text", "open it and save it as .xlsx")
    if start.startswith((b"<!doctype html", b"<html", b"<table", b"<head", b"<body", b"<meta")):
        return Content.HTML
    if start.startswith(b"<?xml"):
        if b"<html" in start or b"<table" in start:
            return Content.HTML
        raise _refusal(source, "this is XML text, not a table", "open it and save it as .xlsx or .csv")
    return Content.TEXT


def _as_text(head: bytes) -> bytes:
    if head.startswith((b"\xff\xfe", b"\xfe\xff")):
        return head.decode("utf-16", "replace").encode()
    return head


def _zipped(source: Source) -> Content:
    try:
        with zipfile.ZipFile(BytesIO(source.content)) as archive:
            names = set(archive.namelist())
    except Exception:  # a damaged directory: the reader of workbooks says what is wrong with it
        return Content.XLSX
    if "xl/workbook.bin" in names:
        raise _refusal(source, "this is a binary workbook (.xlsb)", "save it as .xlsx")
    if "xl/workbook.xml" not in names and "content.xml" in names:
        return Content.ODS
    return Content.XLSX


def _compound(source: Source) -> Content:
    if _ENCRYPTED in source.content:
        hint = "open it and save it without a password"
        raise _refusal(source, "the workbook is protected by a password", hint)
    if any(name in source.content for name in _BOOKS):
        return Content.XLS
    what = "there is no workbook in this file of an older office program: it is another document, or damaged"
    raise _refusal(source, what, "copy it again, or open it and save its tables as .xlsx")


def _refusal(source: Source, message: str, hint: str) -> FileError:
    return FileError(message, where=source.name, hint=hint)
