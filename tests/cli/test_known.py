"""``specflow known`` as a person runs it."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from specflow.errors import ExitCode
from tests.budgets import receiver
from tests.builders import (
    a_quantity,
    a_value_column,
    adding,
    an_evidence_file,
    an_evidence_table,
    an_item,
    some_columns,
    some_evidence,
)
from tests.cli.conftest import Command

AS_OF = ("--as-of", "2026-06-01")


@pytest.fixture
def project(tmp_path: Path) -> Path:
    """Make the receiver project with one measured amplifier."""
    column = a_value_column("NF", quantity=a_quantity("noise_figure"))
    table = an_evidence_table("EV-1", block="LNA", values=(column,), conditions=())
    temperatures = some_columns(temperature_ambient=[-30.0, 20.0, 55.0])
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        store.apply(
            adding(an_evidence_file(), an_item("LNA-1"), table),
            columns={"EV-1": some_evidence({"NF": (1.0, 1.1, 1.3)}, conditions=temperatures)},
            by="A. Invented",
        )
    return tmp_path / "rx.specflow"


def test_margins_and_sources_are_shown(command: Command, project: Path) -> None:
    done = command("known", "RX", *AS_OF)
    assert done.code == ExitCode.CLEAN
    assert "test on earlier hardware: EV-1 NF, 1 item" in done.out
    assert "SYS-NF" in done.out and "may not be multiplied" in done.out


def test_json_and_recording(command: Command, project: Path) -> None:
    told = json.loads(command("known", "RX", *AS_OF, "--json", "--record", "--yes").out)
    assert told["recorded"] == ["EV-2", "EV-3"] and told["tables"] == ["EV-1"]
    line = next(one for one in told["lines"] if (one["block"], one["parameter"]) == ("LNA", "noise_figure"))
    assert [one["value"] for one in line["places"]] == [1.0, 1.1, 1.3]
    assert "EV-2" in command("trace", "SYS-NF", *AS_OF).out


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (("XX",), "there is no budget"),
        (("RX", "--serial", "Q"), "there is no item"),
        (("RX", "--confidence", "2"), "no confidence"),
    ],
)
def test_bad_input_is_one_message(
    command: Command, project: Path, words: tuple[str, ...], message: str
) -> None:
    done = command("known", *words)
    assert done.code == ExitCode.BAD_INPUT and message in done.err
