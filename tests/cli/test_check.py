"""``specflow check`` and ``specflow rules``: what they print, and how they end."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from specflow.errors import ExitCode
from specflow.rules import RULES
from tests.builders import project_workbook
from tests.cli.conftest import Command


@pytest.fixture
def project(command: Command, tmp_path: Path) -> Path:
    """A project of one requirement of which nothing is proved and no test is planned."""
    command("init", "harbour", "--no-template")
    workbook = project_workbook(
        tmp_path / "reqs.xlsx",
        blocks=[{"ID": "UT", "Name": "Terminal"}],
        requirements=[{"ID": "R-1", "Block": "UT", "Parameter": "gain", "Limit": ">= 20 dB"}],
    )
    command("load", workbook, "--yes")
    return tmp_path


@pytest.mark.usefixtures("project")
def test_it_lists_findings_and_ends_with_one_when_they_are_grave(command: Command) -> None:
    outcome = command("check", "--as-of", "2026-06-01")
    assert outcome.code == ExitCode.FINDINGS
    rules = {line.split()[1] for line in outcome.out.splitlines()[2:] if line.strip()}
    assert rules == {"no-conditions", "not-planned"}
    assert (
        "2 findings (0 error, 2 warning, 0 info); 2 at warning or above; judged as of 2026-06-01"
        in outcome.err
    )


@pytest.mark.usefixtures("project")
def test_a_higher_threshold_ends_clean_and_shows_the_same(command: Command) -> None:
    low, high = command("check"), command("check", "--at-or-above", "error")
    assert (low.code, high.code) == (ExitCode.FINDINGS, ExitCode.CLEAN)
    assert low.out == high.out


@pytest.mark.usefixtures("project")
def test_only_the_rules_named_are_shown_and_counted(command: Command) -> None:
    outcome = command("check", "--rule", "Not-Planned")
    assert outcome.code == ExitCode.FINDINGS
    assert "there is no evidence at any of 1 required point" in outcome.out
    assert "no-conditions" not in outcome.out
    quiet = command("check", "--rule", "failing")
    assert (quiet.code, quiet.out) == (ExitCode.CLEAN, "")


def test_at_a_gate_findings_weigh_as_the_policy_has_it_there(command: Command, project: Path) -> None:
    refused = command("check", "--gate", "CDR")
    assert refused.code == ExitCode.BAD_INPUT and "the policy says nothing of a gate 'CDR'" in refused.err
    settings = [
        {"Name": "Severity of not-planned at CDR", "Value": "error"},
        {"Name": "Severity of no-conditions at CDR", "Value": "info"},
    ]
    assert (
        command("load", project_workbook(project / "p.xlsx", project=settings), "--yes").code
        == ExitCode.CLEAN
    )
    at = command("check", "--gate", "cdr", "--at-or-above", "error")
    assert at.code == ExitCode.FINDINGS and "(1 error, 0 warning, 1 info)" in at.err and " for CDR" in at.err
    assert command("check", "--at-or-above", "error").code == ExitCode.CLEAN


@pytest.mark.usefixtures("project")
def test_explaining_adds_why_and_what_to_do(command: Command) -> None:
    assert "Plan an activity" not in command("check").out
    explained = command("check", "--explain").out
    assert "Plan an activity" in explained
    assert "nobody books the chamber" in explained


@pytest.mark.usefixtures("project")
def test_json_has_all_parts_of_a_finding(command: Command) -> None:
    outcome = command("check", "--json", "--rule", "not-planned", "--as-of", "2026-06-01")
    assert outcome.code == ExitCode.FINDINGS
    data = json.loads(outcome.out)
    assert data["as_of"] == "2026-06-01"
    assert data["totals"] == {"error": 0, "warning": 1, "info": 0}
    assert data["grave"] == 1
    (finding,) = data["findings"]
    assert (finding["rule"], finding["severity"], finding["subject"]) == ("not-planned", "warning", "R-1")
    assert finding["origin"]["file"] == "reqs.xlsx"


@pytest.mark.usefixtures("project")
@pytest.mark.parametrize(
    ("words", "message", "hint"),
    [
        (("--at-or-above", "fatal"), "there is no severity 'fatal'", "info, warning, error"),
        (("--rule", "unverifed"), "there is no rule 'unverifed'", "did you mean unverified"),
        (("--as-of", "June"), "'June' is not a date", "YYYY-MM-DD"),
    ],
)
def test_bad_options_are_refused_with_what_would_do(
    command: Command, words: tuple[str, ...], message: str, hint: str
) -> None:
    outcome = command("check", *words)
    assert (outcome.code, outcome.out) == (ExitCode.BAD_INPUT, "")
    assert message in outcome.err
    assert hint in outcome.err


def test_the_catalogue_lists_every_rule(command: Command) -> None:
    outcome = command("rules")
    assert outcome.code == ExitCode.CLEAN
    listed = [line.split()[0] for line in outcome.out.splitlines()[2:] if line.strip()]
    assert listed == [rule.code for rule in RULES]
    assert [one["rule"] for one in json.loads(command("rules", "--json").out)] == listed


def test_one_rule_is_explained(command: Command) -> None:
    outcome = command("rules", "Failing")
    assert outcome.code == ExitCode.CLEAN
    for words in (
        "error",
        "What was built does not do",
        "19.4 dB at 30 GHz",
        "an approved waiver",
        "Find the cause",
    ):
        assert words in outcome.out
    data = json.loads(command("rules", "failing", "--json").out)
    assert (data["code"], data["severity"], data["noun"]) == ("failing", "error", "requirement")


def test_codes_of_findings_that_no_rule_makes_are_explained_in_a_line(command: Command) -> None:
    outcome = command("rules", "Workbook-No-Unit")
    assert outcome.code == ExitCode.CLEAN and "A limit has no unit" in outcome.out
    data = json.loads(command("rules", "attach-looks-slipped", "--json").out)
    assert data["code"] == "attach-looks-slipped" and "decimal" in data["title"]
    assert "budget" in command("rules", "requirement-in-use").out


def test_an_unknown_rule_is_refused_with_what_is_near(command: Command) -> None:
    outcome = command("rules", "faling")
    assert (outcome.code, outcome.out) == (ExitCode.BAD_INPUT, "")
    assert "did you mean failing" in outcome.err


@pytest.mark.parametrize("words", [("status",), ("check",), ("history",), ("trace", "R-1")])
def test_a_command_that_reads_leaves_only_the_project_file(
    command: Command, project: Path, words: tuple[str, ...]
) -> None:
    before = sorted(path.name for path in project.iterdir())
    assert command(*words).code in (ExitCode.CLEAN, ExitCode.FINDINGS)
    assert sorted(path.name for path in project.iterdir()) == before == ["harbour.specflow", "reqs.xlsx"]
