"""The preview of an attached file as report tables: what every front end shows."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Any

from specflow.importers.measurements import MeasuredTable, Role
from specflow.model.report import CellTone, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.workflows.attach import AttachPreview
from specflow.workflows.attach_derived import PlannedTable, planned_result

_FEW_SETTINGS = 3
_QUIET = (Role.INDEX, Role.REMARK, Role.NOT_READ, Role.STATED_LIMIT, Role.STATED_VERDICT)


def preview_tables(preview: AttachPreview) -> list[ReportTable]:
    """Return the tables of a preview: for each table how it was understood, what is asked, what is rejected."""
    tables: list[ReportTable] = []
    for place, table in enumerate(preview.measurements.tables):
        tables.append(_recognised(preview, place, table))
        if table.questions:
            tables.append(_questions(table))
        if table.rejected:
            tables.append(_rejected(table))
        if preview.planned.get(place):
            tables.append(_planned(preview.planned[place]))
    return tables


def preview_lines(preview: AttachPreview) -> list[str]:
    """Return what is to be said about the file as a whole, line by line."""
    lines = [*preview.measurements.skipped]
    lines += [f"{finding.message} ({finding.remedy})" if finding.remedy else finding.message
              for finding in preview.measurements.findings]  # fmt: skip
    for document in preview.mapping_documents:
        lines.append(
            f"stored with the values: the mapping, kept as {document.id}; files of this layout are then recognised"
        )
    for place, code in preview.known.items():
        lines.append(
            f"{preview.measurements.tables[place].place}: unchanged, its values are stored as {code}"
        )
    for found in preview.replacements.values():
        lines += [one.words() for one in found]
    return lines


def preview_sentence(preview: AttachPreview) -> str:
    """Return the counts in one sentence."""
    new = preview.new_tables
    if preview.is_unchanged:
        return f"{preview.path.name}: unchanged, nothing to add"
    parts = [f"{len(new)} new table{'s' * (len(new) != 1)}", f"{preview.values} values"]
    made = preview.new_derived
    parts += [f"{made} derived table{'s' * (made != 1)}"] if made else []
    failed = [one for tables in preview.planned.values() for one in tables if one.failure]
    parts += [f"{len(failed)} not derived ({failed[0].plan.law}: {failed[0].failure})"] if failed else []
    questions = sum(len(table.questions) for table in preview.unresolved)
    parts += [f"{questions} open question{'s' * (questions != 1)}"] if questions else []
    parts += [f"{preview.rejected_cells} rejected"] if preview.rejected_cells else []
    return f"{preview.path.name}: {', '.join(parts)}"


def preview_as_json(preview: AttachPreview) -> dict[str, Any]:
    """Return a preview as data for scripts."""
    return {
        "file": preview.path.name,
        "sha256": preview.measurements.file.sha256,
        "unchanged": preview.is_unchanged,
        "values": preview.values,
        "rejected": preview.rejected_cells,
        "skipped": list(preview.measurements.skipped),
        "findings": [finding.model_dump(mode="json") for finding in preview.measurements.findings],
        "tables": [
            _table_json(preview, place, table) for place, table in enumerate(preview.measurements.tables)
        ],
    }


def _table_json(preview: AttachPreview, place: int, table: MeasuredTable) -> dict[str, Any]:
    return {
        "sheet": table.sheet,
        "place": table.place,
        "title": table.title,
        "layout": table.layout_key,
        "mapping": table.mapping_from,
        "rows": table.rows,
        "values": table.values,
        "blank": dict(table.blank),
        "stored_as": preview.known.get(place, ""),
        "columns": [
            {
                "header": one.header,
                "cell": one.cell,
                "role": one.role.value,
                "meaning": one.meaning,
                "reason": one.reason,
            }
            for one in table.recognised
        ],
        "questions": [
            {"header": one.header, "cell": one.cell, "what": one.what, "remedy": one.remedy} for one in table.questions
        ],
        "rejected": [one.model_dump() for one in table.rejected],
        "notes": list(table.notes),
        "not_used": list(table.unused),
        "derived": [
            {"quantity": one.plan.quantity.model_dump(), "law": one.plan.law, "of": one.plan.shown, "for": one.plan.why,
             "result": planned_result(one)}
            for one in preview.planned.get(place, ())
        ],
        "replaces": [
            {"table": one.earlier, "rows": len(one.rows), "differing": one.differing}
            for one in preview.replacements.get(place, ())
        ],
    }  # fmt: skip


def _recognised(preview: AttachPreview, place: int, table: MeasuredTable) -> ReportTable:
    where = " ".join(filter(None, [table.sheet, table.place]))
    facts = [f"{table.rows} rows, {table.values} values"]
    facts += [f"mapping: {table.mapping_from}"] if table.mapping_from else []
    facts += [f"{count} blank ({reason})" for reason, count in table.blank.items()]
    facts += [f"stored as {preview.known[place]}"] if place in preview.known else []
    rows = [
        _row(
            one.cell or one.header,
            (one.cell, one.header, one.role.value, one.meaning, one.reason),
            _tone(one.role),
        )
        for one in table.recognised
    ]
    intro = "; ".join(facts) + "".join(f"\n· {note}" for note in (*table.notes, *_unused(table.unused)))
    return _table("columns", f"{where}: {table.title or 'table'}", intro,
                  ("Cell", "Header", "Role", "Meaning", "Why"), rows)  # fmt: skip


def _unused(settings: Sequence[str]) -> list[str]:
    """One line about the settings from which nothing was taken: all of them where they are few, else their keys."""
    if len(settings) <= _FEW_SETTINGS:
        return [f"not used: {one}" for one in settings]
    keys = ", ".join(one.partition(": ")[2].partition(" = ")[0] for one in settings)
    return [f"{len(settings)} settings beside the table were not used: {keys} (their values: --json)"]


def _tone(role: Role) -> CellTone:
    if role is Role.UNRESOLVED:
        return CellTone.BAD
    return CellTone.QUIET if role in _QUIET else CellTone.PLAIN


def _questions(table: MeasuredTable) -> ReportTable:
    rows = [
        _row(one.cell or one.what, (one.cell, one.what, one.remedy), CellTone.BAD) for one in table.questions
    ]
    return _table(
        "questions",
        "To settle",
        "Nothing of this table is stored before.",
        ("Cell", "Question", "What settles it"),
        rows,
    )


def _rejected(table: MeasuredTable) -> ReportTable:
    rows = [_row(one.cell, (one.cell, one.text, one.reason), CellTone.DOUBTFUL) for one in table.rejected]
    return _table(
        "rejected",
        "Rejected",
        f"{table.rejected_cells} cells (or rows) hold something that cannot be evidence.",
        ("Cell", "Text", "Reason"),
        rows,
    )


def _planned(planned: Sequence[PlannedTable]) -> ReportTable:
    rows = [
        _row(
            one.plan.quantity.parameter,
            (one.plan.quantity.parameter.replace("_", " "), one.plan.quantity.plane, one.plan.law, one.plan.shown,
             one.plan.why, planned_result(one)),
            CellTone.BAD if one.failure else CellTone.PLAIN,
        )
        for one in planned
    ]  # fmt: skip
    intro = "The raw data are stored as recorded; these are made of them, each a table that names its law."
    return _table("derived", "Derived", intro, ("Quantity", "Plane", "Law", "Of", "For", "Result"), rows)


def _table(key: str, title: str, intro: str, titles: Sequence[str], rows: Iterable[ReportRow]) -> ReportTable:
    columns = tuple(ReportColumn(key=title.casefold().replace(" ", "_"), title=title) for title in titles)
    return ReportTable(key=key, title=title, intro=intro, columns=columns, rows=tuple(rows))


def _row(id: str, texts: Sequence[str], tone: CellTone) -> ReportRow:
    return ReportRow(id=id, cells=tuple(ReportCell(text=text, tone=tone) for text in texts))
