"""README.md and DEVELOPERS.md: what they name is there, and what is there is named."""

from __future__ import annotations

import ast
import re
import tomllib
from pathlib import Path

import pytest

import specflow
from specflow.cli.commands import BY_NAME, COMMANDS

ROOT = Path(__file__).parent.parent
SOURCES = Path(specflow.__file__).parent
README = (ROOT / "README.md").read_text("utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text("utf-8")
PACKAGES = sorted(path.parent for path in SOURCES.rglob("__init__.py"))

#: Where a path in DEVELOPERS.md may begin: a line of the tour, or a step of a narration, leaves out what it has named.
_FROM = (
    ROOT,
    ROOT / "tests/benchmarks",
    *(
        SOURCES / name
        for name in (
            "",
            "model",
            "parameters",
            "workflows",
            "derive",
            "importers",
            "importers/readers",
            "importers/measured",
        )
    ),
)


def test_every_path_that_is_named_is_there() -> None:
    written = re.findall(r"`([\w./*<>]+(?:\.(?:py|md|json|toml|yaml)|/))(?::[^`]*)?`", DEVELOPERS)
    paths = [path for path in written if not re.search(r"[<>]|000N", path)]
    gone = [path for path in paths if not any([*base.glob(path)] for base in _FROM)]
    assert len(paths) > 50 and not gone


def test_every_package_stands_in_the_folder_tour_and_in_the_picture() -> None:
    tour, picture = DEVELOPERS.split("## Folder tour")[1].split("## One run")[0], DEVELOPERS.split("```")[1]
    for package in (path for path in PACKAGES if path.parent == SOURCES):
        assert f"`specflow/{package.name}/" in tour and re.search(rf"\b{package.name}\b", picture), package


def test_the_picture_has_the_layers_of_the_contract() -> None:
    settings = tomllib.loads((ROOT / "pyproject.toml").read_text("utf-8"))["tool"]["importlinter"]
    layers = [layer.split(" | ") for layer in settings["contracts"][0]["layers"]]
    drawn = [
        re.findall(r"\w+(?= \||\b)", line.split("   ")[0]) for line in DEVELOPERS.split("```")[1].splitlines()
    ]
    assert [set(one) for one in drawn if one] == [set(one) for one in layers]


def test_the_readme_lists_every_command_and_no_other() -> None:
    listed = re.findall(r"^\| `specflow (\w+)", README, re.MULTILINE)
    assert list(dict.fromkeys(listed)) and set(listed) == set(BY_NAME)
    assert len(COMMANDS) == len(BY_NAME)
    options = set(
        re.findall(r"`[^`\n]*?(--[a-z][a-z-]+)", README.split("## The commands")[1].split("Exit codes")[0])
    )
    known = {opt for entry in COMMANDS for one in entry.load().params for opt in one.opts}
    assert options - {"--verify"} and options <= known


@pytest.mark.parametrize("package", PACKAGES, ids=[str(path.relative_to(SOURCES)) for path in PACKAGES])
def test_what_a_package_says_of_itself_is_there(package: Path) -> None:
    words = ast.get_docstring(ast.parse((package / "__init__.py").read_text("utf-8"))) or ""
    assert words, "a package says what may live in it"
    named = {name.rstrip("/") for name in re.findall(r"``([a-z_]+\.py|[a-z_]+/)``", words)}
    assert {name for name in named if not (package / name).exists()} == set()
