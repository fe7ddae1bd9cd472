"""Layouts of the project workbook: one sheet a noun, described once, for the template, the reader and the manual."""

from __future__ import annotations

from collections.abc import Collection
from typing import Self

from pydantic import Field, model_validator

from specflow.model.base import Document

#: What the first column says of a row that only shows how to fill the sheet in; such rows are not loaded.
EXAMPLE = "example"

#: The sheet of the template that explains the others; it is never read.
GUIDE = "How to fill this in"


class SheetColumn(Document):
    """A column of a sheet.

    Found by: ``title`` and ``aliases``; ``also`` are headers that usually mean another column, and this one where that
    column is there under another name. ``required``: the sheet cannot be read without it, unless it has one of the
    columns named by ``instead``.

    Gives: ``field`` of the document ("" when it is called like ``key``), with the part of it behind a dot where several
    columns fill one field (``source.issue``).

    Shows: ``guidance``, ``example`` and ``choices``, the words of its drop-down (with ``open_choices`` a cell may hold
    others). Columns that are read but not offered have ``in_template`` off.
    """

    key: str
    title: str
    aliases: tuple[str, ...] = ()
    also: tuple[str, ...] = ()
    required: bool = False
    instead: tuple[str, ...] = ()
    field: str = ""
    guidance: str = ""
    choices: tuple[str, ...] = ()
    open_choices: bool = False
    in_template: bool = True
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

    @property
    def offered(self) -> tuple[SheetColumn, ...]:
        """The columns that the template has."""
        return tuple(column for column in self.columns if column.in_template)

    def lacking(self, found: Collection[str]) -> tuple[SheetColumn, ...]:
        """Return the required columns that are neither among ``found`` (keys) nor replaced by one that is."""
        return tuple(
            column
            for column in self.required
            if column.key not in found and not any(other in found for other in column.instead)
        )

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
