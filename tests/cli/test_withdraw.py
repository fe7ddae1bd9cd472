"""``specflow withdraw`` as a person runs it: what counts no more, what stays, and what is refused."""

from __future__ import annotations

import json
from collections.abc import Sequence
from pathlib import Path

import pytest

from specflow.errors import ExitCode
from specflow.model.evidence import EvidenceTable, Withdrawal
from specflow.store import open_project
from tests.builders import (
    a_block,
    a_conditions_set,
    a_dimension,
    a_project,
    a_requirement,
    adding,
    an_evidence_file,
    an_evidence_table,
    an_item,
    at_least,
    some_columns,
    some_evidence,
)
from tests.cli.conftest import Command

WHY = ("--reason", "cable was loose")


@pytest.fixture
def project(tmp_path: Path) -> Path:
    """Make a project with two runs at two temperatures: EV-1 is low at 25 °C, EV-2 is right."""
    from specflow.store import create_project

    warm = a_dimension("temperature_ambient", "°C", values=(25.0, 85.0), tolerance=2)
    documents = (a_block(), an_item(), a_conditions_set("CS", warm), a_requirement(limit=at_least(20)))
    file = an_evidence_file()
    path = tmp_path / "p.specflow"
    with create_project(path, a_project()) as store:
        store.apply(adding(*documents, file), by="A. B.")
        for code, gain in (("EV-1", [19.0, 21.0]), ("EV-2", [22.0, 21.5])):
            table = an_evidence_table(code, rows=2, conditions=())
            conditions = some_columns(temperature_ambient=[25.0, 85.0])
            arrays = some_evidence({"Gain": gain}, conditions=conditions)
            store.apply(adding(table), columns={code: arrays}, by="A. B.")
    return path


def proved(command: Command) -> str:
    return str(json.loads(command("status", "--json").out)["status"][0]["proved"])


def stored(project: Path) -> Sequence[Withdrawal]:
    with open_project(project, read_only=True) as store:
        return store.load().all(Withdrawal)


def test_the_rows_at_a_condition_count_no_more_and_stay_stored(command: Command, project: Path) -> None:
    assert proved(command) == "1 of 2"
    done = command("withdraw", "EV-1", "--where", "temperature_ambient 25 °C", *WHY, "--yes", "--by", "A. B.")
    assert done.code == ExitCode.CLEAN
    assert "R-1" in done.out and "1 of 2 → 2 of 2" in done.out
    assert "1 of 2 rows of EV-1 would be withdrawn: cable was loose" in done.err
    assert proved(command) == "2 of 2"
    [withdrawal] = stored(project)
    assert (withdrawal.rows, withdrawal.reason, withdrawal.by) == ((0,), "cable was loose", "A. B.")
    with open_project(project, read_only=True) as store:
        assert store.load().find(EvidenceTable, "EV-1") is not None
    assert "cable was loose" in command("history", withdrawal.id).out


def test_a_whole_table_is_withdrawn_once(command: Command, project: Path) -> None:
    assert command("withdraw", "ev-1", *WHY, "-y").code == ExitCode.CLEAN
    assert stored(project)[0].rows is None
    again = command("withdraw", "EV-1", *WHY, "-y")
    assert again.code == ExitCode.BAD_INPUT
    assert "WD-1 withdrew this before" in again.err


def test_a_dry_run_stores_nothing(command: Command, project: Path) -> None:
    done = command("withdraw", "EV-1", *WHY, "--dry-run", "--json")
    told = json.loads(done.out)
    assert (told["withdrawal"], told["rows"]) == ("WD-1", 2)
    assert told["statuses"][0]["proved"] == ["1 of 2", "2 of 2"]
    assert "nothing was stored" in done.err and not stored(project)


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (("EV-9", *WHY), "EV-9"),
        (("EV-1",), "a withdrawal needs its reason"),
        (("EV-1", "--reason", " "), "a withdrawal needs its reason"),
        (("EV-1", "--where", "temperature_ambient 40 °C", *WHY), "no row of EV-1 is at"),
        (("EV-1", "--where", "colour", *WHY), "colour"),
    ],
)
def test_what_cannot_be_withdrawn_is_refused(
    command: Command, project: Path, words: Sequence[str], told: str
) -> None:
    done = command("withdraw", *words, "--yes")
    assert done.code == ExitCode.BAD_INPUT
    assert told in done.err and "Traceback" not in done.err
    assert not stored(project)
