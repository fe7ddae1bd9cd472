"""Bad files on the command line: one message with place and remedy, exit code 2, and the project as it was."""

from __future__ import annotations

import shutil
import zipfile
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import Any

import pytest
from openpyxl import load_workbook
from openpyxl.worksheet.worksheet import Worksheet

from specflow.errors import ExitCode
from specflow.model.requirement import Requirement
from specflow.store import open_project
from tests.builders import project_workbook
from tests.cli.conftest import Command
from tests.cli.refusing import content, refused
from tests.importers.measured.make import book
from tests.importers.readers.workbooks import by_hand

HEADER = ["Item", "f (GHz)", "Gain (dB)"]
ROWS: list[list[Any]] = [HEADER, ["LNA-1", 27.5, 20.1], ["LNA-1", 28.5, 20.3]]
BLOCKS: list[dict[str, Any]] = [{"ID": "UT", "Name": "Invented terminal"}]
REQUIREMENT: dict[str, Any] = {"ID": "R-9", "Block": "UT", "Parameter": "eirp", "Limit": ">= 45 dBm"}


@pytest.fixture
def project(made_once: Path, tmp_path: Path) -> Path:
    """Return a project of blocks, items and one requirement, beside which the commands run."""
    return Path(shutil.copy(made_once / "terminal.specflow", tmp_path))


def bytes_of(path: Path, data: bytes) -> Path:
    """Write a file."""
    path.write_bytes(data)
    return path


def truncated(path: Path) -> Path:
    """Write a workbook, and cut it in half."""
    whole = book(path, ROWS).read_bytes()
    return bytes_of(path, whole[: len(whole) // 2])


OLD = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + b"\0" * 600
FILES: dict[str, tuple[Callable[[Path], Path], tuple[str, ...], str]] = {
    "missing": (lambda folder: folder / "none.xlsx", ("no such file", "check the path"), "none.xlsx"),
    "a folder": (lambda folder: folder, ("a folder", "name one workbook"), "files"),
    "empty": (lambda folder: bytes_of(folder / "a.xlsx", b""), ("empty", "export it again"), "a.xlsx"),
    "blank": (lambda folder: bytes_of(folder / "a.csv", b"\n \n"), ("blanks", "export it again"), "a.csv"),
    "truncated": (lambda folder: truncated(folder / "a.xlsx"), ("damaged", "copy the file again"), "a.xlsx"),
    "encrypted": (
        lambda folder: bytes_of(folder / "a.xlsx", OLD + "EncryptedPackage".encode("utf-16-le")),
        ("protected by a password", "without a password"),
        "a.xlsx",
    ),
    "old": (
        lambda folder: bytes_of(folder / "a.xlsx", OLD + "Workbook".encode("utf-16-le")),
        ("damaged", "save it as .xlsx"),
        "a.xlsx",
    ),
    "no workbook": (lambda folder: bytes_of(folder / "a.xlsx", b"\0\1\2"), ("no workbook", "save"), "a.xlsx"),
    "of another kind": (lambda folder: bytes_of(folder / "a.pdf", b"%PDF-1.7"), (".pdf", ".xlsx"), "a.pdf"),
    "without a cell": (lambda folder: book(folder / "a.xlsx", []), ("no cell", "check"), "a.xlsx"),
    "a zip bomb": (
        lambda folder: by_hand(
            folder / "a.xlsx", "", parts={"xl/worksheets/sheet1.xml": b"<worksheet>" + b" " * 120_000_000}
        ),
        ("zip bomb", "do not open it"),
        "a.xlsx",
    ),
}  # fmt: skip


@pytest.mark.parametrize("verb", ["load", "attach"])
@pytest.mark.parametrize("name", FILES)
def test_a_file_that_cannot_be_read(
    command: Command, project: Path, tmp_path: Path, verb: str, name: str
) -> None:
    make, words, place = FILES[name]
    folder = tmp_path / "files"
    folder.mkdir()
    path, before = make(folder), content(project)
    refused(command(verb, path, "--yes"), *words, place=place)
    assert content(project) == before


@dataclass(frozen=True)
class Measured:
    """A measurement workbook with something wrong in it, and what is said."""

    rows: Sequence[Sequence[Any]]
    words: tuple[str, ...]
    place: str
    change: Callable[[Worksheet], None] | None = None
    options: tuple[str, ...] = ()


def merge(sheet: Worksheet) -> None:
    """Merge the first two values."""
    sheet.merge_cells("C2:C3")


def hidden(sheet: Worksheet) -> None:
    """Hide the third row."""
    sheet.row_dimensions[3].hidden = True


def with_last(*cells: Any) -> list[list[Any]]:
    """Return the good rows and one more, row 4."""
    return [*ROWS, list(cells)]


MEASURED = {
    "an unknown unit": Measured(
        [["Item", "f (GHz)", "Gain (dBx)"], ROWS[1]], ("dBx", "nearest: dB"), "a.xlsx, data, C1"
    ),
    "a unit of another kind": Measured(
        [["Item", "f (GHz)", "NF (dBm)"], ROWS[1]], ("a ratio", "correct the header"), "a.xlsx, data, C1"
    ),
    "no unit": Measured([["Item", "f", "Gain (dB)"], ROWS[1]], ("without a unit",), "a.xlsx, data, B1"),
    "an unknown parameter": Measured(
        [["Item", "f (GHz)", "Zap (dB)"], ROWS[1]], ("names no parameter", "--state"), "a.xlsx, data, C1"
    ),
    "a missing sheet": Measured(ROWS, ("no sheet 'Gian'", "'data'"), "a.xlsx", options=("--sheet", "Gian")),
    "prose": Measured([["only prose"]], ("no measurement table", "headers"), "a.xlsx"),
    "headers only": Measured(ROWS[:1], ("no measurement table", "headers"), "a.xlsx"),
    "merged cells": Measured(ROWS, ("merged cells C2:C3", "--take-rest"), "data, C2", merge),
    "a formula without value": Measured(with_last("LNA-1", 29, "=B2"), ("never calculated", "mend"), "data, C4"),
    "an error cell": Measured(with_last("LNA-1", 29, "#REF!"), ("#REF!", "mend"), "data, C4"),
    "a hidden row": Measured(ROWS, ("the row is hidden", "show it"), "data, A3", hidden),
    "a date for a number": Measured(with_last("LNA-1", 29, datetime(2026, 3, 8)), ("a date or time",), "data, C4"),
    "NaN": Measured(with_last("LNA-1", 29, "NaN"), ("not a number", "mend"), "data, C4"),
    "Inf": Measured(with_last("LNA-1", 29, "-Inf"), ("not a number", "mend"), "data, C4"),
    "beyond all numbers": Measured(with_last("LNA-1", 29, "1e999"), ("too large", "mend"), "data, C4"),
    "NaN as a condition": Measured(with_last("LNA-1", "NaN", 20), ("not a number", "mend"), "data, B4"),
    "a statement that is none": Measured(ROWS, ("'blok'", "block"), "a.xlsx", options=("--state", "blok=LNA")),
    "a table to replace that is not there": Measured(ROWS, ("'EV-77'",), "", options=("--supersedes", "EV-77")),
    "a mapping that is not there": Measured(ROWS, ("No such file",), "m.toml", options=("--mapping", "m.toml")),
    "a mapping into no folder": Measured(
        ROWS, ("cannot be written", "check the folder"), "no/m.toml", options=("--propose-mapping", "no/m.toml")
    ),
    "a mapping on a file that is there": Measured(
        ROWS, ("a file of this name",), "a.xlsx", options=("--propose-mapping", "a.xlsx")
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", MEASURED)
def test_a_measurement_workbook_with_a_mistake(
    command: Command, project: Path, tmp_path: Path, name: str
) -> None:
    case, before = MEASURED[name], content(project)
    path = book(tmp_path / "a.xlsx", case.rows, change=case.change)
    refused(command("attach", path, "--yes", *case.options), *case.words, place=case.place)
    assert content(project) == before


@dataclass(frozen=True)
class Loaded:
    """A project workbook with something wrong in it, and what is said."""

    words: tuple[str, ...]
    place: str
    blocks: Sequence[dict[str, Any]] = ()
    requirements: Sequence[dict[str, Any]] = ()
    conditions: Sequence[dict[str, Any]] = ()
    prose: Sequence[dict[str, Any]] = ()
    change: Callable[[Worksheet], None] | None = None

    def write(self, path: Path) -> Path:
        """Write the workbook; ``change`` edits its sheet Requirements."""
        every = {
            "blocks": self.blocks, "requirements": self.requirements,
            "conditions": self.conditions, "prose": self.prose,
        }  # fmt: skip
        project_workbook(path, **{name: rows for name, rows in every.items() if rows})
        if self.change is not None:
            workbook = load_workbook(path)
            self.change(workbook["Requirements"])
            workbook.save(path)
        return path


def with_cell(words: tuple[str, ...], place: str, **cells: Any) -> Loaded:
    """Return a workbook of one requirement with other cells."""
    return Loaded(words, f"a.xlsx · Requirements · {place}", BLOCKS, [REQUIREMENT | cells])


def putting(text: str) -> Callable[[Worksheet], None]:
    """Return what puts something into the cell of the limit."""

    def put(sheet: Worksheet) -> None:
        sheet["D2"] = text

    return put


def hide_second(sheet: Worksheet) -> None:
    """Hide the second row."""
    sheet.row_dimensions[2].hidden = True


THOUSAND = ", ".join(str(number) for number in range(1, 1001))
LIMIT_CELL = "a.xlsx · Requirements · D2"
LOADED = {
    "an unknown unit": with_cell(("dBmm", "rejected"), "D2", Limit=">= 45 dBmm"),
    "a unit of another kind": with_cell(("GHz", "EIRP"), "D2", Limit=">= 45 GHz"),
    "an unknown parameter": with_cell(("eirpp",), "C2", Parameter="eirpp"),
    "a block that is not there": with_cell(("UTX",), "B2", Block="UTX"),
    "a date for a number": with_cell(("date",), "D2", Limit=datetime(2026, 3, 8)),
    "NaN": with_cell(("NaN",), "D2", Limit=">= NaN dBm"),
    "Inf": with_cell(("inf",), "D2", Limit="<= inf dBm"),
    "beyond all numbers": with_cell(("too large",), "D2", Limit=">= 1e999 dBm"),
    "a missing sheet": Loaded(("no sheet", "'Prose'", "Requirements"), "a.xlsx", prose=[{"Chapter": 1}]),
    "merged cells": Loaded(
        ("B2:B3 are merged",), "Requirements", BLOCKS, [REQUIREMENT, REQUIREMENT | {"ID": "R-8"}],
        change=lambda sheet: sheet.merge_cells("B2:B3"),
    ),
    "a formula without value": Loaded(
        ("without a stored value",), LIMIT_CELL, BLOCKS, [REQUIREMENT], change=putting("=1+44")
    ),
    "an error cell": Loaded(("#DIV/0!",), LIMIT_CELL, BLOCKS, [REQUIREMENT], change=putting("#DIV/0!")),
    "a hidden row": Loaded(("row 2 is hidden",), "Requirements", BLOCKS, [REQUIREMENT], change=hide_second),
    "an id twice": Loaded(("R-9 is given already",), "Requirements · A3", BLOCKS, [REQUIREMENT, REQUIREMENT]),
    "a circle in the tree": Loaded(
        ("A -> B -> A",), "Blocks", [*BLOCKS, {"ID": "A", "Parent": "B"}, {"ID": "B", "Parent": "A"}]
    ),
    "a billion points": Loaded(
        ("1,000,000,000 points",), "Conditions",
        conditions=[{"ID": "CS-1", "Dimension": f"axis_{axis}", "Required": THOUSAND} for axis in "abc"],
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", LOADED)
def test_a_project_workbook_with_a_mistake(
    command: Command, project: Path, tmp_path: Path, name: str
) -> None:
    case, before = LOADED[name], content(project)
    outcome = command("load", case.write(tmp_path / "a.xlsx"), "--yes")
    refused(outcome, *case.words, place=case.place)
    assert content(project) == before


def test_the_remedy_of_each_rejected_cell_stands_in_the_findings(
    command: Command, project: Path, tmp_path: Path
) -> None:
    rows = [REQUIREMENT | {"Limit": ">= 45 GHz"}, REQUIREMENT | {"ID": "R-8", "Limit": ">= 1e999 dBm"}]
    path = project_workbook(tmp_path / "a.xlsx", blocks=BLOCKS, requirements=rows)
    outcome = command("load", path, "--yes")
    refused(outcome, "2 rows or cells were rejected", "The first: the limit is in GHz", place="D2")
    assert "write the limit in a unit such as dBm" in outcome.out
    assert "write it as in '>= 45 dBm'" in outcome.out and "Requirements · D3" in outcome.out


def percent(sheet: Worksheet) -> None:
    """Show the values of column C in percent."""
    sheet["C2"].number_format = sheet["C3"].number_format = "0.0%"


def test_a_percent_cell_under_a_percent_header_is_read_as_it_is_shown(
    command: Command, project: Path, tmp_path: Path
) -> None:
    rows = [["Item", "f (GHz)", "PAE (%)"], ["LNA-1", 27.5, 0.305], ["LNA-1", 28.5, 0.31]]
    outcome = command("attach", book(tmp_path / "a.xlsx", rows, change=percent), "--yes")
    assert outcome.code == ExitCode.CLEAN and "0.305 is shown as 30.5 %" in outcome.out, outcome
    with open_project(project) as store:
        assert list(store.load().load_columns(["EV-1"])["EV-1"].values["PAE"].low) == pytest.approx(
            [30.5, 31.0]
        )


def test_a_percent_limit_is_read_as_it_is_shown(command: Command, project: Path, tmp_path: Path) -> None:
    def shown(sheet: Worksheet) -> None:
        sheet["D2"].number_format = "0%"

    case = Loaded((), "", BLOCKS, [REQUIREMENT | {"Parameter": "evm", "Limit": 0.08}], change=shown)
    outcome = command("load", case.write(tmp_path / "a.xlsx"), "--yes")
    assert outcome.code == ExitCode.CLEAN and "at most 8 %" in outcome.out, outcome
    with open_project(project) as store:
        requirement = store.load().find(Requirement, "R-9")
    assert requirement is not None and requirement.limit.text == "8 %"


@pytest.mark.parametrize("ending", [".xlsm", ".xlsx"])
@pytest.mark.parametrize("verb", ["attach", "load"])
def test_macros_are_said_and_never_run(
    command: Command, project: Path, tmp_path: Path, verb: str, ending: str
) -> None:
    if verb == "attach":
        plain = book(tmp_path / "plain.xlsx", ROWS)
    else:
        plain = project_workbook(tmp_path / "plain.xlsx", blocks=BLOCKS, requirements=[REQUIREMENT])
    path = (tmp_path / "macro.xlsx").with_suffix(ending)
    with zipfile.ZipFile(plain) as source, zipfile.ZipFile(path, "w") as copy:
        for name in source.namelist():
            copy.writestr(name, source.read(name))
        copy.writestr("xl/vbaProject.bin", b"\xcc" * 100)
    outcome = command(verb, path, "--yes")
    assert outcome.code == ExitCode.CLEAN, outcome
    assert "macros: they were not run" in outcome.out + outcome.err
    assert content(project)[0] == 3


def test_what_is_right_in_a_bad_file_is_stored_only_when_the_person_says_so(
    command: Command, project: Path, tmp_path: Path
) -> None:
    path = book(tmp_path / "a.xlsx", with_last("LNA-1", 29, "#N/A"))
    before = content(project)
    refused(command("attach", path, "--yes"), "#N/A", place="data, C4")
    refused(command("attach", path, "--dry-run"), "#N/A", place="data, C4")
    assert content(project) == before
    assert command("attach", path, "--yes", "--take-rest").code == ExitCode.CLEAN
    assert content(project)[0] == before[0] + 1
