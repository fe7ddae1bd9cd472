"""The shared texts of a workbook, in the spelling that bulk reading gives them."""

from __future__ import annotations

import re
from collections.abc import Iterable
from xml.parsers import expat

_ESCAPED = re.compile(r"_x([0-9A-Fa-f]{4})_")


def plain_text(text: str, preserve: bool) -> str:
    """A text of a workbook: blanks around it count where ``xml:space`` says so; ``_x000D_`` is one character
    (ECMA-376 part 1, 22.9.2.19 ST_Xstring)."""
    text = text if preserve else text.strip(" \t\r\n")
    return _ESCAPED.sub(lambda code: chr(int(code[1], 16)), text) if "_x" in text else text


def read_shared_texts(pieces: Iterable[bytes]) -> list[str]:
    """The texts in order; phonetic readings are left out, runs of rich text are joined. Raises ExpatError."""
    reader = _SharedTexts()
    for piece in pieces:
        reader.parser.Parse(piece, False)
    reader.parser.Parse(b"", True)
    return reader.texts


class _SharedTexts:
    def __init__(self) -> None:
        self.texts: list[str] = []
        self._runs: list[str] = []
        self._text: list[str] | None = None
        self._preserve = False
        self._phonetic = False
        self.parser = expat.ParserCreate()
        self.parser.buffer_text = True
        self.parser.StartElementHandler = self._start
        self.parser.EndElementHandler = self._end
        self.parser.CharacterDataHandler = self._characters

    def _start(self, name: str, attributes: dict[str, str]) -> None:
        match name.rpartition(":")[2]:
            case "si":
                self._runs = []
            case "rPh":
                self._phonetic = True
            case "t" if not self._phonetic:
                self._text, self._preserve = [], attributes.get("xml:space") == "preserve"

    def _characters(self, text: str) -> None:
        if self._text is not None:
            self._text.append(text)

    def _end(self, name: str) -> None:
        match name.rpartition(":")[2]:
            case "t" if self._text is not None:
                self._runs.append(plain_text("".join(self._text), self._preserve))
                self._text = None
            case "rPh":
                self._phonetic = False
            case "si":
                self.texts.append("".join(self._runs))
