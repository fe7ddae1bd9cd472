"""Rules about the plan: is a verification planned, and is it planned for the requirement as it is now."""

from __future__ import annotations

from collections.abc import Iterator

from specflow.model.base import code_key
from specflow.rules.base import Found
from specflow.rules.facts import Facts, has_no_evidence
from specflow.rules.words import counted


def not_planned(facts: Facts) -> Iterator[Found]:
    """No verification activity is planned.

    Why: without method, stage and hardware nobody books the chamber, and any test counts as proof.
    Fails: R-1 has only the default activity that every requirement is given.
    Passes: one activity at least is planned for it, or it is met by lower-level closure alone.
    Do: plan an activity: method, stage, tier and the hardware that earns credit.
    """
    for requirement, status in facts.defined:
        if not facts.is_planned(requirement):
            message = "no verification is planned"
            if has_no_evidence(status):  # one cause, one finding: ``unverified`` is about what was planned
                message += f", and there is no evidence at any of {counted(status.n, 'required point')}"
            yield Found(requirement.id, message, origin=requirement.origin)


def outdated_activity(facts: Facts) -> Iterator[Found]:
    """An activity was planned for an earlier revision of its requirement.

    Why: method, criteria or set-up may not fit the limit or the conditions as they are now.
    Fails: the test was planned for revision 1; the requirement is at revision 2.
    Passes: the activity names the present revision.
    Do: look the plan through and load it again for the present revision.
    """
    for requirement, _ in facts.judged:
        for activity in facts.snapshot.activities_of.get(code_key(requirement.id), ()):
            if activity.planned and activity.requirement_revision < requirement.revision:
                message = (
                    f"planned for revision {activity.requirement_revision} of {requirement.id}, "
                    f"now it is {requirement.revision}"
                )
                yield Found(activity.id, message, origin=activity.origin, related=(requirement.id,))
