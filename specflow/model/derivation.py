"""Derivations: a result that a law made of stored raw tables, with all that it was made from.

The derived values stand in an evidence table of their own, which names its derivation; the raw tables stay. A
derivation is a fact (who asked for which law, of which bytes); whether it still holds is concluded from what became
of its inputs.
"""

from __future__ import annotations

from typing import Self

from pydantic import Field, model_validator

from specflow.model.base import Code, Document
from specflow.model.parameter import QuantityIdentity


class InputColumn(Document):
    """A value column that a law read: of which table, as what (``role``), and the rows of it that were meant."""

    role: str
    table: Code
    column: str
    where: tuple[str, ...] = ()


class Covered(Document):
    """The range of a condition that derived values speak for: the raw data of every group of rows reached both ends.

    ``largest_gap`` is the largest between neighbouring raw values, in any group of rows. All in ``unit``. ``in_parts``:
    values over parts of a range speak for the whole together (the worst does; ripples over halves are none of it).
    """

    dimension: str
    low: float
    high: float
    largest_gap: float
    unit: str = ""
    in_parts: bool = False


class SettingSaid(Document):
    """A setting of a law as it was said, or its default."""

    name: str
    text: str


class Derivation(Document):
    """One law applied to stored tables.

    ``digests`` are those of the input tables at that time, in the order of ``inputs``. ``over`` is the range as said
    ("frequency: 17.7..20.2 GHz step 0.1 GHz"), ``where`` the rows that were chosen ("polarisation: H"). ``again_of`` is
    the derivation that this one repeats on newer inputs.
    """

    id: Code
    law: str
    law_version: int = Field(default=1, ge=1)
    inputs: tuple[Code, ...] = Field(min_length=1)
    digests: tuple[str, ...]
    columns: tuple[InputColumn, ...]
    over: tuple[str, ...] = ()
    where: tuple[str, ...] = ()
    settings: tuple[SettingSaid, ...] = ()
    gives: QuantityIdentity
    unit: str
    again_of: Code | None = None
    by: str = ""
    at: str = ""
    reason: str = ""
    revision: int = 1

    @model_validator(mode="after")
    def _inputs_are_told_once(self) -> Self:
        if len(self.digests) != len(self.inputs):
            raise ValueError(f"{len(self.inputs)} inputs have {len(self.digests)} digests")
        strange = {column.table for column in self.columns}.symmetric_difference(self.inputs)
        if strange:
            raise ValueError(f"inputs and columns do not name the same tables: {', '.join(sorted(strange))}")
        return self

    def setting(self, name: str) -> str:
        """Return a setting as it was said, "" when it was not."""
        return next((one.text for one in self.settings if one.name == name), "")

    @property
    def words(self) -> str:
        """Say it in one line: "worst of Gain over frequency 17.7..20.2 GHz"; a whole table by its ends."""
        many = len(self.columns) > 1
        names = [
            (f"{one.role} " if many and one.role != one.column else "")
            + one.column
            + (f" where {' and '.join(one.where)}" if one.where else "")
            for one in self.columns
        ]
        whole = len(names) > 4 and all(one.role == one.column for one in self.columns)
        of = f"{names[0]} ... {names[-1]} ({len(names)} columns)" if whole else ", ".join(names)
        over = f" over {' and '.join(self.over)}" if self.over else ""
        where = f" where {' and '.join(self.where)}" if self.where else ""
        said = ", ".join(f"{one.name} {one.text}" for one in self.settings if one.text)
        return f"{self.law} of {of}{over}{where}{f' ({said})' if said else ''}"
