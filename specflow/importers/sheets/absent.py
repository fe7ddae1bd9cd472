"""What an earlier state of the workbook gave and this one does not: it stays in the project, and that is said."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping

from specflow.importers.sheets.intake import Intake
from specflow.model.base import Document, code_key
from specflow.model.finding import Finding, Severity
from specflow.model.nouns import NOUN_BY_NAME, Noun
from specflow.model.origin import Origin

_MOST_NAMED = 8
_ELSE = "nothing is removed from a project by deleting its row"
_REQUIREMENT = (
    "where it no longer applies, fill in 'Not applicable: reason' and approver; load --remove-gone removes it"
)


def note_absent(intake: Intake, file: str, sheets: Mapping[str, str]) -> None:
    """Report, one finding a noun, the documents that an earlier load of this workbook gave and this one does not.

    ``sheets`` names the nouns to look at, with the worksheet that was read for each. An earlier state of
    the workbook is a file of the same name, or one of which this workbook gives more than half the documents again.
    """
    for name, sheet in sheets.items():
        noun = NOUN_BY_NAME[name]
        gone = _gone(intake, noun, file)
        if gone:
            intake.findings.append(_finding(noun, gone, file, sheet))


def _gone(intake: Intake, noun: Noun, file: str) -> list[str]:
    codes = intake.codes.get(noun.name, {})
    stored: dict[str, list[str]] = {}
    for document in intake.snapshot.all(noun.document):
        origin: Origin | None = getattr(document, "origin", None)
        if origin is not None and not getattr(document, "shorthand", False):
            stored.setdefault(origin.file, []).append(_code(noun, document))
    given = Counter({one: sum(code_key(code) in codes for code in ids) for one, ids in stored.items()})
    earlier = [one for one, ids in stored.items() if one == file or 2 * given[one] > len(ids)]
    return [code for one in earlier for code in stored[one] if code_key(code) not in codes]


def _code(noun: Noun, document: Document) -> str:
    return str(getattr(document, noun.id_field))


def _finding(noun: Noun, gone: list[str], file: str, sheet: str) -> Finding:
    named = ", ".join(gone[:_MOST_NAMED]) + (", ..." if len(gone) > _MOST_NAMED else "")
    one = len(gone) == 1
    return Finding(
        rule="workbook-row-gone",
        severity=Severity.WARNING,
        subject=gone[0] if one else noun.title,
        subject_kind=noun.name,
        message=f"{named} ({noun.title}) came from this workbook and {'is' if one else 'are'} not in it any more; "
        f"{'it stays' if one else 'they stay'} in the project",
        remedy=(
            "write the row again under its id (an id that was changed is a new one); "
            + (_REQUIREMENT if noun.name == "requirement" else _ELSE)
        ),
        related=tuple(gone),
        origin=Origin(file=file, sheet=sheet),
    )
