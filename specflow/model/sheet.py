"""Layouts of the project workbook: one sheet a noun, described once, for the template, the reader and the manual."""

from __future__ import annotations

from typing import Self

from pydantic import Field, model_validator

from specflow.model.base import Document

#: What the first column says of a row that only shows how to fill the sheet in; such rows are not loaded.
EXAMPLE = "example"

#: The sheet of the template that explains the others; it is never read.
GUIDE = "How to fill this in"


class SheetColumn(Document):
    """A column of a sheet.

    ``aliases`` are other headers it is known by; ``required`` means that the sheet cannot be read without the column;
    ``field`` is the field of the document that it fills ("" when it has the same name as ``key``), with the part of it
    behind a dot where several columns fill one field (``source.issue``). ``choices`` are
    the words of its drop-down; a cell may hold others only where ``open_choices`` says so.
    """

    key: str
    title: str
    aliases: tuple[str, ...] = ()
    required: bool = False
    field: str = ""
    guidance: str = ""
    choices: tuple[str, ...] = ()
    open_choices: bool = False
    example: str = ""
    width: int = Field(default=16, ge=4, le=80)

    @property
    def fills(self) -> str:
        """The field of the document that this column fills."""
        return self.field or self.key


class SheetLayout(Document):
    """A sheet: the noun it holds, the names it is found by, its columns.

    ``more_examples`` are further example rows after the one made of the columns' examples, by column key.
    """

    noun: str
    title: str
    aliases: tuple[str, ...] = ()
    intro: str
    columns: tuple[SheetColumn, ...] = Field(min_length=1)
    more_examples: tuple[dict[str, str], ...] = ()

    @model_validator(mode="after")
    def _headers_are_single(self) -> Self:
        seen: dict[str, str] = {}
        for column in self.columns:
            for header in (column.title, *column.aliases):
                other = seen.setdefault(header_key(header), column.key)
                if other != column.key:
                    raise ValueError(
                        f"{self.title}: the header {header!r} names both {other} and {column.key}"
                    )
        return self

    @property
    def required(self) -> tuple[SheetColumn, ...]:
        """The columns without which the sheet cannot be read."""
        return tuple(column for column in self.columns if column.required)

    def column(self, key: str) -> SheetColumn:
        """Return the column of that key; KeyError when there is none."""
        for column in self.columns:
            if column.key == key:
                return column
        raise KeyError(key)

    def examples(self) -> tuple[dict[str, str], ...]:
        """Return the example rows, by column key."""
        return (
            {column.key: column.example for column in self.columns if column.example},
            *self.more_examples,
        )


def header_key(text: str) -> str:
    """Return what headers and sheet names are compared by: letters and digits, without case, blanks or punctuation."""
    return "".join(character for character in text.casefold() if character.isalnum())
