"""Documents that can not stand without one that was refused: left out with it, and said so."""

from __future__ import annotations

from collections.abc import Iterator

from specflow.importers.sheets.intake import Intake
from specflow.model.base import Document, code_key
from specflow.model.finding import Severity
from specflow.model.nouns import NOUN_BY_NAME, NOUNS, Noun


def leave_out_orphans(intake: Intake) -> None:
    """Take out documents that refer to something neither the workbook nor the project gives, until none is left."""
    while orphans := [orphan for noun in NOUNS for orphan in _orphans(intake, noun)]:
        for noun, key, field, code, target in orphans:
            if intake.documents[noun.name].pop(key, None) is None:
                continue
            row = intake.codes[noun.name][key][1]
            column = next((column.key for column in row.layout.columns if column.fills == field), "")
            row.report(
                column,
                f"the {noun.title} {row.subject} is left out too, because the {target.title} {code} was refused",
                f"mend the {target.title} {code}",
                rule="workbook-left-out",
                severity=Severity.WARNING,
            )


def _orphans(intake: Intake, noun: Noun) -> Iterator[tuple[Noun, str, str, str, Noun]]:
    for key, document in intake.documents.get(noun.name, {}).items():
        for field, target in noun.links:
            for code in _codes(document, field):
                if not _stands(intake, target, code):
                    yield noun, key, field, code, NOUN_BY_NAME[target]


def _codes(document: Document, field: str) -> tuple[str, ...]:
    value = getattr(document, field)
    return () if value is None else (value,) if isinstance(value, str) else tuple(value)


def _stands(intake: Intake, noun: str, code: str) -> bool:
    key = code_key(code)
    return key in intake.documents.get(noun, {}) or key in intake.snapshot.documents.get(noun, {})
