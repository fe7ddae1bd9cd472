"""The intake: what a workbook gives so far: documents, the codes met, findings and echoes.

References are checked against both the workbook and what the project has already; every code of the workbook is
registered before any row is read, so that sheets and rows may stand in any order.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import TypeVar, cast

from specflow.changes import due_revision
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.spelling import near
from specflow.model.base import Document, code_key
from specflow.model.finding import Finding, Severity
from specflow.model.nouns import NOUN_BY_DOCUMENT
from specflow.model.origin import Origin
from specflow.model.parameter import Parameter
from specflow.model.requirement import Activity, Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary

D = TypeVar("D", bound=Document)

_MOST_SEARCHES = 200  # a search compares with every id of the project: 10 ms at 2,000 ids


@dataclass
class Intake:
    """Collects what the sheets of one workbook give.

    ``dictionary`` grows by the workbook's own parameters. ``documents`` maps noun → code key → document, ``codes``
    noun → code key → the code as written, its row and its column. ``shorthand`` holds, by requirement key, the
    activities that the requirement's own row plans (none where its column Method is empty). ``removals`` are stored
    documents that the workbook no longer wants. ``folder`` is where files named in cells are looked for.
    """

    snapshot: Snapshot
    dictionary: Dictionary
    findings: list[Finding] = field(default_factory=list)
    echoes: dict[str, str] = field(default_factory=dict)
    places: dict[str, dict[str, Origin]] = field(default_factory=dict)
    documents: dict[str, dict[str, Document]] = field(default_factory=dict)
    codes: dict[str, dict[str, tuple[str, SheetRow, str]]] = field(default_factory=dict)
    shorthand: dict[str, list[Activity]] = field(default_factory=dict)
    removals: list[Document] = field(default_factory=list)
    folder: Path | None = None
    _nearest: dict[tuple[str, str], str] = field(default_factory=dict)

    def register(
        self, kind: type[Document], code: str, row: SheetRow, column: str, *, grouped: bool = False
    ) -> None:
        """Note that the workbook gives this code; a code given twice (whatever the case) is refused.

        ``grouped``: rows of one sheet that follow each other may share a code.
        """
        noun = NOUN_BY_DOCUMENT[kind]
        codes = self.codes.setdefault(noun.name, {})
        written, first, place = codes.setdefault(code_key(code), (code, row, column))
        if first is row or (grouped and first.grid is row.grid):
            return
        there = first.origin(place)
        spelled = "" if written == code else f", written {written}"
        row.fault(
            column,
            f"the {noun.title} id {code} is given already in {there.sheet or there.file} {there.cell}{spelled}",
            "give one of the two another id (ids are compared without case), or delete the row that is a copy",
            rule="workbook-duplicate-id",
            related=(written,),
        )

    def free_code(self, kind: type[Document], stem: str) -> str:
        """Return the first of stem1, stem2 ... that this workbook does not give yet and that was never removed."""
        noun = NOUN_BY_DOCUMENT[kind].name
        codes, gone = self.codes.get(noun, {}), self.snapshot.removed.get(noun, frozenset())
        number = 1
        while (key := code_key(f"{stem}{number}")) in codes or key in gone:
            number += 1
        return f"{stem}{number}"

    def due_revision(self, requirement: Requirement) -> int:
        """Return the revision that a requirement has once the workbook is accepted."""
        before = self.snapshot.find(Requirement, requirement.id)
        return due_revision(before, requirement) or requirement.revision

    def extend_dictionary(self) -> None:
        """Let the dictionary know the workbook's own parameters."""
        own = {code_key(parameter.key): parameter for parameter in self.given(Parameter)}
        self.dictionary = Dictionary({**self.dictionary.by_key, **own})

    def echo(self, code: str, sentence: str) -> None:
        """Say back how something was understood."""
        self.echoes[code] = "; ".join(filter(None, (self.echoes.get(code, ""), sentence)))

    def place(self, code: str, part: str, origin: Origin) -> None:
        """Note the cell of a part of a document, by what messages call the part; the first one counts."""
        self.places.setdefault(code, {}).setdefault(part, origin)

    def add(self, document: Document, stated: Iterable[str] = ()) -> None:
        """Take a document. What no column of the sheet states stays as the project has it.

        ``stated`` names fields, or parts of a field behind a dot. A part that is not stated, but follows from another
        cell (a bandwidth from the unit of the limit), counts as stated.
        """
        noun = NOUN_BY_DOCUMENT[type(document)]
        code = getattr(document, noun.id_field)
        before = self.snapshot.find(type(document), code)
        if before is not None:
            document = _laid_over(document, before, {noun.id_field, "origin", *stated})
        self.documents.setdefault(noun.name, {})[code_key(code)] = document

    def find(self, kind: type[D], code: str | None) -> D | None:
        """Return the document of that code, from the workbook if it has one, else from the project."""
        if code is None:
            return None
        given = self.documents.get(NOUN_BY_DOCUMENT[kind].name, {}).get(code_key(code))
        return cast("D", given) if given is not None else self.snapshot.find(kind, code)

    def given(self, kind: type[D]) -> Sequence[D]:
        """Return the documents of the workbook, in the order met."""
        return cast("Sequence[D]", list(self.documents.get(NOUN_BY_DOCUMENT[kind].name, {}).values()))

    def all(self, kind: type[D]) -> Sequence[D]:
        """Return the documents of the project with those of the workbook laid over them."""
        noun = NOUN_BY_DOCUMENT[kind].name
        merged = {**self.snapshot.documents.get(noun, {}), **self.documents.get(noun, {})}
        return cast("Sequence[D]", list(merged.values()))

    def spelling(self, kind: type[Document], code: str) -> str | None:
        """Return the code as its own document writes it, None where neither workbook nor project has it."""
        noun = NOUN_BY_DOCUMENT[kind]
        given = self.codes.get(noun.name, {}).get(code_key(code))
        if given is not None:
            return given[0]
        stored = self.snapshot.find(kind, code)
        return None if stored is None else str(getattr(stored, noun.id_field))

    def link(self, row: SheetRow, column: str, kind: type[Document], code: str) -> str:
        """Return the code as its document writes it; an unknown one is a finding with the nearest spellings."""
        spelled = self.spelling(kind, code)
        if spelled is None:
            noun = NOUN_BY_DOCUMENT[kind]
            row.fault(
                column,
                f"there is no {noun.title} {code}" + self._near(kind, code),
                f"write the id of a {noun.title} of the project, or add it to this workbook",
                rule="workbook-unknown-reference",
            )
        return spelled or code

    def reference(self, row: SheetRow, column: str, kind: type[Document]) -> str | None:
        """Return the code in one cell, checked with ``link``; None where the cell is empty."""
        code = row.text(column)
        return self.link(row, column, kind, code) if code else None

    def references(self, row: SheetRow, column: str, kind: type[Document]) -> tuple[str, ...]:
        """Return the codes in one cell, separated by commas, semicolons or line breaks, each checked."""
        return tuple(self.link(row, column, kind, code) for code in row.words(column))

    def note(
        self, row: SheetRow, column: str, message: str, remedy: str = "", *, rule: str, why: str = ""
    ) -> None:
        """Report something that does not stop the row: a default that was taken, a doubtful statement."""
        row.report(column, message, remedy, rule=rule, severity=Severity.WARNING, why=why)

    def has_found(self, rule: str) -> bool:
        """Whether that rule reported anything so far."""
        return any(finding.rule == rule for finding in self.findings)

    def _near(self, kind: type[Document], code: str) -> str:
        """The nearest ids; looked for once a code, because a sheet may repeat one mistake a thousand times."""
        asked = (NOUN_BY_DOCUMENT[kind].name, code_key(code))
        if asked not in self._nearest:
            few = len(self._nearest) < _MOST_SEARCHES
            self._nearest[asked] = near(code, self._spellings(kind)) if few else ""
        return self._nearest[asked]

    def _spellings(self, kind: type[Document]) -> list[str]:
        noun = NOUN_BY_DOCUMENT[kind]
        stored = [str(getattr(one, noun.id_field)) for one in self.snapshot.all(kind)]
        return [*stored, *(code for code, *_ in self.codes.get(noun.name, {}).values())]


def _laid_over(document: D, before: D, stated: set[str]) -> D:
    """The document with what it does not state as it was before."""
    kept: dict[str, object] = {}
    for name in set(type(document).model_fields) - stated:
        was, now = getattr(before, name), getattr(document, name)
        parts = {path.partition(".")[2] for path in stated if path.startswith(f"{name}.")}
        if not parts:
            kept[name] = was
        elif isinstance(was, Document) and isinstance(now, Document):
            kept[name] = _parts_laid_over(now, was, parts)
    return document.model_copy(update=kept)


def _parts_laid_over(now: Document, was: Document, stated: set[str]) -> Document:
    fields = type(now).model_fields
    silent = [name for name in fields if name not in stated and getattr(now, name) == fields[name].default]
    return now.model_copy(update={name: getattr(was, name) for name in silent})
