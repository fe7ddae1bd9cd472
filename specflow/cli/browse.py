"""``specflow browse``: look at the project in the terminal."""

from __future__ import annotations

import sys

from specflow.cli.options import AsOfOption, ProjectOption, judged_on, open_store
from specflow.errors import SpecflowError


def browse(project: ProjectOption = "", as_of: AsOfOption = "") -> None:
    """Browse the requirements in the terminal.

    A tree of all requirements with their states, and the card of the one under the cursor: limit, points proved, margin
    bar, proof grid, and its trail up to the system and down to the cell. The keys are shown; ? explains them. What
    others store meanwhile is shown by itself.
    """
    # The terminal library draws on stderr, so that too must be a terminal.
    if not all(stream.isatty() for stream in (sys.stdin, sys.stdout, sys.stderr)):
        raise SpecflowError("browse needs a terminal", hint="specflow status prints the same figures")
    from specflow.tui.app import BrowseApp
    from specflow.workflows.browse import Browsing

    with open_store(project, read_only=True) as store:
        browsing = Browsing(store, judged_on(as_of))
        BrowseApp(browsing.load, browsing.revision).run()
