"""What keeps a previewed file from being stored: open questions, rejected cells, earlier rows that say otherwise."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from specflow.errors import DocumentError
from specflow.model.base import code_key
from specflow.model.bench_sheet import MARK, NOTHING_FILLED_IN
from specflow.model.evidence import EvidenceTable
from specflow.model.finding import Severity
from specflow.workflows.attach_preview import AttachPreview, Decision
from specflow.workflows.earlier_tables import Replacement
from specflow.workflows.kept_copy import keeps_copy
from specflow.workflows.subjects import not_found


def check_acceptable(preview: AttachPreview, decision: Decision) -> Mapping[int, Sequence[Replacement]]:
    """Return the replacements that the person named; raises DocumentError when the preview may not be accepted so."""
    _refuse_unsettled(preview, decision)
    keeps_copy(preview, asked=decision.keep)
    return _refuse_unsaid(preview, decision)


def _refuse_unsettled(preview: AttachPreview, decision: Decision) -> None:
    where = preview.path.name
    if not preview.measurements.tables:
        faults = [one for one in preview.measurements.findings if one.severity is Severity.ERROR]
        blank = next((one for one in faults if one.rule == NOTHING_FILLED_IN), None)
        raise DocumentError(
            blank.message if blank else "no measurement table was found",
            where=where,
            hint=blank.remedy if blank else "; ".join(preview.measurements.skipped),
        )
    if preview.unresolved and (not decision.take_rest or not preview.new_tables):
        table = preview.unresolved[0]
        first = table.questions[0]
        count = sum(len(one.questions) for one in preview.unresolved)
        open_ones = _counted(count, "question is open", "questions are open")
        raise DocumentError(
            f"{open_ones}; nothing was stored. {'It' if count == 1 else 'The first'}: {first.what}",
            where=", ".join(filter(None, [where, table.sheet, first.cell])),
            hint=first.remedy,
        )
    if preview.rejected_cells and not decision.take_rest:
        counted = _counted(preview.rejected_cells, "cell or row is", "cells or rows are")
        place, reason = _first_rejected(preview)
        raise DocumentError(
            f"{counted} rejected; nothing was stored. "
            f"{'It' if preview.rejected_cells == 1 else 'The first'}: {reason}",
            where=", ".join(filter(None, [where, *place])),
            hint="mend them in the file, or say --take-rest to store the rest; what is left out stays a finding",
        )
    faults = [one for one in preview.measurements.findings if one.severity is Severity.ERROR]
    if faults and not decision.take_rest:
        raise DocumentError(
            f"{faults[0].message}; nothing was stored",
            where=where,
            hint=f"{faults[0].remedy}, or say --take-rest",
        )
    empty = [table for table in preview.measurements.tables if table.document is None and not table.questions]
    if empty and not preview.new_tables and not preview.known:
        raise DocumentError("no row of the table is left to store", where=f"{where}, {empty[0].place}",
                            hint="see the rejected rows")  # fmt: skip


def _first_rejected(preview: AttachPreview) -> tuple[tuple[str, ...], str]:
    """Return sheet and cell of what is rejected first, and why."""
    for place, table in enumerate(preview.measurements.tables):
        if place not in preview.known and table.rejected:
            return (table.sheet, table.rejected[0].cell), table.rejected[0].reason
    return (), "see the preview"


def _counted(count: int, one: str, many: str) -> str:
    return f"{count} {one if count == 1 else many}"


def _is_filled_in_further(preview: AttachPreview, place: int, one: Replacement) -> bool:
    """Whether a table is a test sheet that was stored half-filled, with all of its rows as they were and more.

    Then it takes the place of the earlier one without a word: nothing else was said about any value.
    """
    earlier = preview.snapshot.find(EvidenceTable, one.earlier)
    later = preview.measurements.tables[place].document
    if earlier is None or later is None or one.differing or len(one.rows) != one.earlier_rows:
        return False
    layout = later.how_read.layout
    return layout.startswith(MARK) and layout == earlier.how_read.layout


def _refuse_unsaid(preview: AttachPreview, decision: Decision) -> Mapping[int, Sequence[Replacement]]:
    """Return the replacements that the person named; refuse where values differ and nothing was said."""
    wanted = {code_key(name) for name in decision.supersedes}
    named: dict[int, list[Replacement]] = {}
    seen: set[str] = set()
    for place, found in preview.replacements.items():
        for one in found:
            seen.add(code_key(one.earlier))
            if code_key(one.earlier) in wanted or _is_filled_in_further(preview, place, one):
                named.setdefault(place, []).append(one)
            elif one.differing and not decision.beside:
                raise DocumentError(
                    f"{one.words()}; it was not said which holds",
                    where=preview.path.name,
                    hint=f"--supersedes {one.earlier} replaces them, --beside lets both stand",
                )
    for name in decision.supersedes:
        if preview.snapshot.find(EvidenceTable, name) is None:
            known = [table.id for table in preview.snapshot.tables]
            raise not_found(
                "evidence table", name, known, listing="specflow export --table evidence lists them"
            )
        if code_key(name) not in seen:
            raise DocumentError(
                f"no row of {preview.path.name} has the identity of a row of {name}",
                where=name,
                hint="rows are the same when block, quantities, item, conditions with their units, set-up and "
                "performer are; see the preview. An earlier run that was found wrong: specflow withdraw",
            )
    if decision.resolves and not named:
        raise DocumentError("--resolves names a fail, but nothing is superseded", where=preview.path.name,
                            hint="say --supersedes EV-… too")  # fmt: skip
    return named
