"""Writes the example's workbooks. Run it after a change and commit what it writes: python examples/make_example.py

All data are invented. The same script gives the same bytes each run (see ``workbooks.py``).
"""

from __future__ import annotations

import sys
from pathlib import Path

from ferry_specification import specification_sheets
from workbooks import write_book

HERE = Path(__file__).parent


def make(folder: Path = HERE) -> None:
    """Write all files below ``folder``."""
    write_book(folder / "ferry" / "ferry-requirements.xlsx", "Harbour ferry terminal", specification_sheets())


if __name__ == "__main__":
    make(Path(sys.argv[1]) if len(sys.argv) > 1 else HERE)
