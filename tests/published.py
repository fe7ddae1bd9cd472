"""Where files that others published are found: those that may be copied, and a folder of those that may not.

Some published files have licences under which they are not copied into this project (``tests/data/README.md`` names
them). Whoever has them sets SPECFLOW_PUBLISHED_FILES to their folder; elsewhere the tests on them are skipped.
"""

from __future__ import annotations

import os
from pathlib import Path

VARIABLE = "SPECFLOW_PUBLISHED_FILES"
DATA = Path(__file__).parent / "data"
BESIDE = Path(os.environ.get(VARIABLE, "") or DATA / "not-copied")
WHY_SKIPPED = f"{VARIABLE} names no folder of the published files that may not be copied"
