"""Verification: from evidence and limits to verdicts, points proved, compliance and close-out.

Where things live:

- ``evaluate`` the entrance; ``workspace`` what many requirements share; ``status`` one requirement as a whole
- ``case`` what one requirement is judged by; ``docket`` opens cases some at a time; ``abreast`` judges those that are
  alike in one go
- ``standing`` may a record count; ``changed`` what a change record touches; ``dates`` when people decided
- ``comparable`` may it be compared; ``residuals`` readings near an instrument's floor
- ``records`` the readings of one quantity, tables stacked (``stacking``); ``map_choice`` whose conditions they state
- ``limit_inputs`` what a limit is evaluated at; ``readings`` readings judged against it; ``judging`` by its shape,
  ``grouped`` where other readings count too; ``populations`` statistics of many values; ``sweeps`` masks over an
  axis of the evidence's own; ``spectrum`` what a bandwidth does to a reading, ``bandwidths`` limits that state
  theirs; ``model_range`` validated models
- ``credit`` rank and credit of evidence; ``grid`` which readings weigh at each point and item; ``points`` what governs
  there; ``conflicts`` contradictions
- ``alternatives`` limits with members on different quantities, put together
- ``activity`` k of n and the governing point; ``assessment`` all activities of one requirement
- ``applicability``, ``waiving``, ``splits``, ``decisions`` what people decided
- ``compliance`` and ``closeout`` what follows
- ``lower_level`` requirements met by their children; ``unmatched`` evidence that serves nothing

Everything is computed from a snapshot and a date; nothing is stored, and no file is read here.
"""

from specflow.verification.evaluate import evaluate

__all__ = ["evaluate"]
