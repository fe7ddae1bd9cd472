"""What a report was made from, so that the same command can make it again; and what it must not be taken for."""

from __future__ import annotations

import platform
from collections.abc import Iterator
from importlib.metadata import version

from specflow import __version__
from specflow.model.evidence import EvidenceFile
from specflow.model.origin import Origin
from specflow.model.report import ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.parameters import Dictionary

CAUTION = (
    "Status here is engineering evidence, not a certificate. Regulatory approval, RF exposure assessment and the "
    "safety of high-power or high-voltage test set-ups follow local regulations and licensed or accredited practice."
)
EXPOSURE_CAUTION = (
    "Radiated power: keep people out of the main beam and inside the distances that a qualified exposure assessment "
    "gives; local regulations and licensed practice decide."
)
INVENTED = (
    "The data of this project is invented for demonstration; it describes no real product, company or person."
)

LIBRARIES = ("numpy", "pydantic", "sqlalchemy", "openpyxl", "python-calamine", "xlsxwriter")


def about_facts(snapshot: Snapshot, results: Results) -> tuple[tuple[str, str], ...]:
    """Return the facts that pin the content: cut-off, project revision, versions. No clock is read."""
    facts = [
        ("Project", snapshot.project.name),
        ("Judged as of", results.as_of),
        ("Project revision", str(snapshot.revision)),
        ("Evidence received up to", _cut_off(snapshot)),
        ("specflow", __version__),
        ("Python", platform.python_version()),
    ]
    facts.extend((library, version(library)) for library in LIBRARIES)
    return tuple(facts)


def _cut_off(snapshot: Snapshot) -> str:
    return max((file.received_at for file in snapshot.all(EvidenceFile)), default="no evidence yet")


def cautions(snapshot: Snapshot, dictionary: Dictionary) -> tuple[str, ...]:
    """Return the cautions that this project calls for."""
    lines = [CAUTION]
    if any(is_radiated(requirement, dictionary) for requirement in snapshot.requirements):
        lines.append(EXPOSURE_CAUTION)
    if snapshot.project.invented:
        lines.append(INVENTED)
    return tuple(lines)


def is_radiated(requirement: Requirement, dictionary: Dictionary) -> bool:
    """Whether the requirement is on radiated power, and so calls for the exposure caution."""
    parameter = dictionary.get(requirement.quantity.parameter)
    return parameter is not None and parameter.radiated


def about_table(snapshot: Snapshot, results: Results, dictionary: Dictionary) -> ReportTable:
    """Return facts, input files with their hashes, and cautions as one table."""
    pairs = [*about_facts(snapshot, results), *input_files(snapshot)]
    pairs.extend(("Caution", line) for line in cautions(snapshot, dictionary))
    return ReportTable(
        key="about",
        title="About this report",
        columns=(
            ReportColumn(key="name", title="What", width=28),
            ReportColumn(key="value", title="Value", width=110),
        ),
        rows=tuple(
            ReportRow(id=name, cells=(ReportCell(text=name), ReportCell(text=value))) for name, value in pairs
        ),
    )


def input_files(snapshot: Snapshot) -> Iterator[tuple[str, str]]:
    """Give the files that the project was made from: the workbooks that documents came from, and all evidence."""
    workbooks = {
        (origin.file, origin.sha256): None
        for documents in snapshot.documents.values()
        for document in documents.values()
        if isinstance(origin := getattr(document, "origin", None), Origin)
    }
    for name, sha256 in sorted(workbooks):
        yield "Input workbook", f"{name}, SHA-256 {sha256}" if sha256 else name
    for file in snapshot.all(EvidenceFile):
        yield f"Evidence file {file.id}", f"{file.name}, {file.size} bytes, SHA-256 {file.sha256}"
