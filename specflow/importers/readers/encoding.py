"""The bytes of a text file as text, and what had to be done for it."""

from __future__ import annotations

import codecs
import re

from specflow.errors import FileError
from specflow.importers.readers.source import Source

_MARKS = (
    (codecs.BOM_UTF8, "utf-8-sig"),
    (codecs.BOM_UTF32_LE, "utf-32"),
    (codecs.BOM_UTF32_BE, "utf-32"),
    (codecs.BOM_UTF16_LE, "utf-16"),
    (codecs.BOM_UTF16_BE, "utf-16"),
)
_SAMPLE = 4096
_INSIDE_NUMBER = re.compile(r"(?<=[0-9.eE+\-])\0+(?=[0-9.eE+\-])")
_DIGIT = re.compile("[0-9]")
_FIELD_WITH_NUL = re.compile(r"(?<![^\s,;|\"])[^\s,;|\"\0]*\0[^\s,;|\"]*")
_FIELD_WITH_NUL_AND_COMMA = re.compile(r"(?<![^\s;|\"])[^\s;|\"\0]*\0[^\s;|\"]*")
_INSIDE_NUMBER_WITH_COMMA = re.compile(r"(?<=[0-9.,eE+\-])\0+(?=[0-9.,eE+\-])")


def decode(source: Source, keep_nuls: bool = False) -> tuple[str, list[str]]:
    """The text with ``\\n`` at line ends and without NUL, and notes on everything that was not plain UTF-8.

    ``keep_nuls`` leaves the NULs to the caller, who knows better what parts the fields. Raises FileError for content
    that is no text.
    """
    notes: list[str] = []
    text = _decode(source, notes)
    if nuls := text.count("\0"):
        text = text if keep_nuls else without_nuls(text, True)
        notes.append(f"{nuls} NUL characters were left out")
    text = text.replace("\r\n", "\n").replace("\r", "\n")
    if marks := text.count("\n\ufeff"):
        text = text.replace("\n\ufeff", "\n")
        notes.append(f"{marks} byte-order marks inside the text were left out")
    sample = text[:_SAMPLE]
    control = sum(character < " " and character not in "\0\t\n\x0b\x0c\x1a\x1b" for character in sample)
    if control > len(sample) // 50:
        raise FileError(
            "this is no text file", where=source.name, hint="export the table as csv or save it as .xlsx"
        )
    return text, notes


def without_nuls(text: str, comma_parts: bool) -> str:
    """The text without NUL. Those with which instruments pad fields stand at the ends of fields, in most of the lines;
    inside a number, or at the end of one in a file that pads nothing else, NUL may have taken the place of a digit, and
    becomes U+FFFD, which no number contains."""
    inside = _INSIDE_NUMBER if comma_parts else _INSIDE_NUMBER_WITH_COMMA
    fields = _FIELD_WITH_NUL if comma_parts else _FIELD_WITH_NUL_AND_COMMA
    text = inside.sub("\ufffd", text)
    if "\0" in text and not _is_padded(text):
        text = fields.sub(_doubted, text)
    return text.replace("\0", "")


def _doubted(match: re.Match[str]) -> str:
    """A field with NUL at an end, which is doubtful where it is a number: ``12.\\0``."""
    bare = match[0].replace("\0", "")
    is_number = _DIGIT.search(bare) is not None and not bare.strip("0123456789.,+-eE")
    return match[0].replace("\0", "\ufffd") if is_number else bare


def _is_padded(text: str) -> bool:
    """Whether most of the lines that hold a digit hold NUL, too."""
    lines = [line for line in text.split("\n") if _DIGIT.search(line)]
    return 2 * sum("\0" in line for line in lines) > len(lines)


def _decode(source: Source, notes: list[str]) -> str:
    content = source.content
    encoding = next((name for mark, name in _MARKS if content.startswith(mark)), _unmarked_utf16(content))
    try:
        text = content.decode(encoding or "utf-8")
    except UnicodeDecodeError as error:
        if encoding:
            raise FileError(
                f"the text breaks off or is damaged: it should be {encoding.removesuffix('-sig')}",
                where=source.name,
                hint="export the file again",
            ) from error
        return _decode_lines(content, notes)
    if encoding and encoding != "utf-8-sig":
        notes.append(f"the text was read as {encoding.upper()}")
    return text


def _decode_lines(content: bytes, notes: list[str]) -> str:
    """Text that is not UTF-8 throughout: files to which several programs wrote hold lines of both encodings."""
    lines, others, utf8 = [], 0, 0
    for line in content.split(b"\n"):
        try:
            lines.append(line.decode())
            utf8 += not line.isascii()
        except UnicodeDecodeError:
            # five bytes have no meaning in Windows-1252: they become U+FFFD, which no number contains
            lines.append(line.decode("cp1252", "replace"))
            others += 1
    if utf8:
        notes.append(f"{others} lines are not UTF-8, as others are; they were read as Windows-1252")
    else:
        notes.append("the text is not UTF-8; it was read as Windows-1252")
    return "\n".join(lines)


def _unmarked_utf16(content: bytes) -> str | None:
    """UTF-16 without a mark: every other byte is NUL (single NULs are dirt that instruments leave)."""
    sample = content[:_SAMPLE]
    half = len(sample) // 2
    if half and sample[1::2].count(0) > 0.9 * half and sample[::2].count(0) < 0.1 * half:
        return "utf-16-le"
    if half and sample[::2].count(0) > 0.9 * half and sample[1::2].count(0) < 0.1 * half:
        return "utf-16-be"
    return None
