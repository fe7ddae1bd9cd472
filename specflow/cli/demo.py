"""``specflow demo``: the example, built and judged in one go."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from specflow.cli.console import progress, put, say

if TYPE_CHECKING:
    from specflow.workflows.demo import Demo

FolderArgument = Annotated[Path, typer.Argument(help="Where to build it.")]
AgainOption = Annotated[bool, typer.Option("--again", help="Build the demo anew in a folder that holds one.")]


def demo(folder: FolderArgument = Path("specflow-demo"), again: AgainOption = False) -> None:
    """Build the example in a folder and run the whole job on it.

    A Ka-band terminal for harbour ferries, all data invented: about 60 requirements, three measurement workbooks and a
    simulation, with faults that the tool finds. Takes some seconds, and ends by saying what it made and what to try.
    """
    from specflow.workflows.demo import build_demo

    with progress("building the example") as step:

        def tell(text: str) -> None:
            say(text)
            step(text[:40])

        made = build_demo(folder, tell, again=again)
    say()
    say(f"Made in {made.folder} (all data invented):")
    for path in made.files:
        put(str(path))
    say(_next_steps(made))


def _next_steps(made: Demo) -> str:
    from specflow.workflows.demo import AS_OF, EXPORTS

    return f"""
Open {made.folder / EXPORTS[1]} in a browser, or try (cd {made.folder} first):
  specflow status --as-of {AS_OF}                where each requirement stands
  specflow status UT-EIRP-1 --as-of {AS_OF}      a failing corner: which point, by how much, on which item
  specflow trace UT-EIRP-1 --as-of {AS_OF}       up to the system, down to file, sheet and cell
  specflow check --as-of {AS_OF}                 what the rules find, and what to do about it
  specflow budget B-RX-GT                           a budget at its worst point: who eats the margin
  specflow browse                                   the same in the terminal
README.md lists the traps that were set in these files, and what the tool says to each.
{_budget_line(made)}
Status here is engineering evidence, not a certificate."""


def _budget_line(made: Demo) -> str:
    """Say how the budget of the example that is nearest to its limit stands."""
    from specflow.workflows.show_budget import nearest_budget

    return nearest_budget(made.evaluation.snapshot, made.evaluation.dictionary)
