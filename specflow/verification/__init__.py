"""Verification: from evidence and limits to verdicts, points proved, compliance and close-out.

Where things live:

- ``evaluate`` the entrance; ``workspace`` what many requirements share; ``status`` one requirement as a whole
- ``standing`` may a record count; ``comparable`` may it be compared; ``records`` the readings of one quantity, stacked
- ``readings`` readings judged against the limit; ``bandwidths`` masks that state theirs
- ``credit`` rank and credit of evidence; ``points`` what governs each point, by item; ``conflicts`` contradictions
- ``activity`` k of n and the governing point; ``assessment`` all activities of one requirement
- ``applicability``, ``waiving``, ``decisions`` what people decided; ``compliance`` and ``closeout`` what follows
- ``lower_level`` requirements met by their children; ``unmatched`` evidence that serves nothing

Everything is computed from a snapshot and a date; nothing is stored, and no file is read here.
"""

from specflow.verification.evaluate import evaluate

__all__ = ["evaluate"]
