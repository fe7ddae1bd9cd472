"""What is known of one table while it is read: meanings, rows, and what has to be asked or said."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from specflow.importers.measured.cells import Rows
from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.context import Context
from specflow.importers.measured.mapping import LayoutMapping
from specflow.importers.measured.rejects import Rejects
from specflow.importers.measured.result import Question, Role
from specflow.importers.measured.stated import Stated
from specflow.importers.measured.tables import FoundTable
from specflow.model.finding import Finding


@dataclass
class TableWork:
    """A table with everything that is collected about it; ``rows`` int32 are the rows that are read."""

    table: FoundTable
    context: Context
    mapping: LayoutMapping
    stated: Stated
    rejects: Rejects
    meanings: tuple[ColumnMeaning, ...] = ()
    questions: list[Question] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)
    findings: list[Finding] = field(default_factory=list)
    rows: Rows = field(default_factory=lambda: np.zeros(0, np.int32))

    def of(self, *roles: Role) -> list[ColumnMeaning]:
        """The columns of these roles."""
        return [meaning for meaning in self.meanings if meaning.role in roles]

    def ask(self, header: str, cell: str, what: str, remedy: str) -> None:
        """Ask something that is about no column in particular, or about its cells."""
        self.questions.append(Question(header, cell, what, remedy))
