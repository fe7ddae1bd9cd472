"""Write the compliance report: a workbook, a page, csv or JSON. The same project gives the same bytes."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import date
from pathlib import Path

from specflow.errors import SpecflowError
from specflow.exporters import WRITERS, writer
from specflow.exporters.files import write_file
from specflow.model.budget import Budget
from specflow.model.report import Report, ReportPicture, ReportTable
from specflow.reports.about import about_table, cautions
from specflow.reports.evidence import evidence_table
from specflow.reports.findings import by_subject, findings_table
from specflow.reports.matrix import compliance_matrix
from specflow.reports.origins import OriginFinder
from specflow.reports.points import POINT_COLUMNS, points_count, points_table
from specflow.reports.status import in_tree_order, summary_table
from specflow.reports.trace_pictures import trace_pictures
from specflow.store import ProjectStore
from specflow.workflows.budget_parts import BudgetParts, budget_parts
from specflow.workflows.evaluate_project import Evaluation, evaluate_project

TABLES = ("summary", "matrix", "points", "evidence", "findings", "budgets", "about")
MOST_TRACES_ON_A_PAGE = 40  # drawings of raw data; every one stands in the terminal, on the card
MOST_POINTS_ON_A_PAGE = 20_000  # a browser lays out no more rows than this in reasonable time


@dataclass(frozen=True, slots=True)
class Export:
    """A rendered report: its bytes, and the name it has when nobody gives one."""

    content: bytes
    file_name: str
    tables: Sequence[tuple[str, int]]


def export_report(
    store: ProjectStore, as_of: date, format: str = "xlsx", *, tables: Sequence[str] = ()
) -> Export:
    """Judge the project and render its compliance report, all tables or those named.

    SpecflowError for an unknown format or table.
    """
    rendering = writer(format)
    unknown = [name for name in tables if name not in TABLES]
    if unknown:
        raise SpecflowError(f"there is no table {unknown[0]!r}", hint=f"tables: {', '.join(TABLES)}")
    evaluation = evaluate_project(store, as_of)
    report = compliance_report(evaluation, tables or _there(evaluation, format), format)
    name = re.sub(r"[^\w.-]+", "-", evaluation.snapshot.project.name).strip("-.") or "project"
    return Export(
        rendering.render(report),
        f"{name}-compliance{rendering.extension}",
        [(table.title, len(table.rows)) for table in report.tables],
    )


def _there(evaluation: Evaluation, format: str) -> Sequence[str]:
    """Return the tables when none is asked for: budgets only where there are any; csv has room for one, the matrix."""
    if format == "csv":
        return ("matrix",)
    return [name for name in TABLES if name != "budgets" or evaluation.snapshot.all(Budget)]


def compliance_report(evaluation: Evaluation, tables: Sequence[str] = TABLES, format: str = "json") -> Report:
    """Return the tables of the report for one format.

    On a page very many points are left out, saying where they are; in a workbook budgets are worksheets that calculate.
    """
    snapshot, results = evaluation.snapshot, evaluation.results
    found: list[ReportTable] = []
    budgets = BudgetParts()
    for name in tables:
        if name == "budgets":
            budgets = budget_parts(evaluation, for_workbook=format == "xlsx")
            found.extend(budgets.tables)
        else:
            found.append(_table(name, evaluation, for_page=format == "html"))
    return Report(
        title=f"{snapshot.project.name}: compliance",
        subtitle=f"judged as of {results.as_of}, project revision {snapshot.revision}",
        cautions=cautions(snapshot, evaluation.dictionary),
        tables=tuple(found),
        pictures=(*budgets.pictures, *(_traces(evaluation, tables) if format == "html" else ())),
        sheets=budgets.sheets,
    )


def _traces(evaluation: Evaluation, tables: Sequence[str]) -> Iterator[ReportPicture]:
    """Give the raw data behind requirements, above the table of evidence."""
    if "evidence" not in tables:
        return
    finder = OriginFinder(evaluation.snapshot)
    left = MOST_TRACES_ON_A_PAGE
    for requirement in in_tree_order(evaluation.snapshot)[0]:
        status = evaluation.results.of(requirement.id)
        for picture in trace_pictures(requirement, status, evaluation.snapshot, finder)[:left]:
            left -= 1
            title = f"{requirement.id}: {picture.title}"
            yield ReportPicture(table="evidence", picture=picture.model_copy(update={"title": title}))


def _table(name: str, evaluation: Evaluation, *, for_page: bool) -> ReportTable:
    snapshot, results, dictionary = evaluation.snapshot, evaluation.results, evaluation.dictionary
    requirements, depths = in_tree_order(snapshot)
    match name:
        case "summary":
            return summary_table(results, requirements)
        case "matrix":
            return compliance_matrix(snapshot, results, evaluation.findings, dictionary, requirements, depths)
        case "points":
            count = points_count(results, requirements)
            if for_page and count > MOST_POINTS_ON_A_PAGE:
                return _elsewhere(count)
            return points_table(snapshot, results, requirements)
        case "evidence":
            return evidence_table(snapshot, results)
        case "findings":
            return findings_table(by_subject(evaluation.findings))
        case _:
            return about_table(snapshot, results, dictionary)


def _elsewhere(count: int) -> ReportTable:
    intro = (
        f"{count} required points are too many for a page. They are all in the workbook and in csv: "
        "specflow export --format xlsx, or specflow export --format csv --table points."
    )
    return ReportTable(key="points", title="Required points", intro=intro, columns=POINT_COLUMNS[:1], rows=())


def write_export(export: Export, path: Path, *, overwrite: bool = False) -> None:
    """Write the bytes to a file, whole or not at all.

    FileError when the file exists and may not be overwritten, or cannot be written.
    """
    remedy = "say --overwrite, or name another file with -o"
    write_file(path, export.content, overwrite=overwrite, remedy=remedy)


def format_for(path: str, format: str) -> str:
    """Return the format asked for, else that of the file's name, else the workbook."""
    if format:
        return format
    ending = Path(path).suffix.lower().removeprefix(".")
    return ending if ending in WRITERS else "xlsx"
