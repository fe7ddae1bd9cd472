"""Rules about waivers, nonconformances and decisions of the board."""

from __future__ import annotations

from collections.abc import Iterator

from specflow.model.base import code_key
from specflow.model.decision import Approval, Nonconformance, Waiver
from specflow.model.requirement import Requirement
from specflow.model.verdict import CloseOut, Compliance
from specflow.rules.base import Found
from specflow.rules.facts import Facts


def waiver_exceeded(facts: Facts) -> Iterator[Found]:
    """A waiver was approved and does not cover what fails (any more).

    Why: everybody believes the shortfall is accepted, and it is not.
    Fails: it permits 19 dB until May; the reading is 18.5 dB, or it is June.
    Passes: the waiver is in date, for this revision, and covers every failing point.
    Do: mend the item, or ask for a waiver that covers what was measured.
    """
    for requirement, status in facts.judged:
        if status.waivers_exceeded:
            related = tuple(one.id for one in facts.waivers.get(code_key(requirement.id), ()))
            yield Found(
                requirement.id, "; ".join(status.waivers_exceeded), origin=requirement.origin, related=related
            )


def waiver_requested(facts: Facts) -> Iterator[Found]:
    """A waiver is requested and not decided.

    Why: until the decision the shortfall stands as failing.
    Fails: the state of the waiver is "requested".
    Passes: it is approved, rejected or closed.
    Do: bring it to the board before the next review.
    """
    for waiver in facts.snapshot.all(Waiver):
        if waiver.state == "requested":
            since = f" since {waiver.requested_on}" if waiver.requested_on else ""
            message = f"the {waiver.kind} from {waiver.requirement} ({waiver.permitted}) waits for a decision{since}"
            yield Found(waiver.id, message, origin=waiver.origin, related=(waiver.requirement,))


def unbounded_waiver(facts: Facts) -> Iterator[Found]:
    """An approved waiver names no end or no approver.

    Why: an acceptance without a bound outlives its reason; one without a name binds nobody, and covers nothing.
    Fails: approved, without a date on which it runs out.
    Passes: it names who approved it and when it runs out.
    Do: add the approver and the date, or the event by a date that is sure to cover it.
    """
    for waiver in facts.snapshot.all(Waiver):
        lacking = [
            word
            for word, value in (
                ("approver", waiver.approver),
                ("date on which it runs out", waiver.expires_on),
            )
            if not value
        ]
        if waiver.state == "approved" and lacking:
            message = f"approved, with no {' and no '.join(lacking)}"
            yield Found(waiver.id, message, origin=waiver.origin, related=(waiver.requirement,))


def idle_waiver(facts: Facts) -> Iterator[Found]:
    """An approved waiver has nothing left to cover.

    Why: what was mended should not stay excused: the next specimen could hide behind it.
    Fails: the requirement is met by all its evidence and the waiver is still approved.
    Passes: a point fails that it covers, or it is closed.
    Do: close the waiver.
    """
    for requirement, status in facts.judged:
        if status.compliance is Compliance.COMPLIANT:
            for waiver in facts.waivers.get(code_key(requirement.id), ()):
                if waiver.state == "approved":
                    message = f"{requirement.id} is met; the {waiver.kind} covers nothing"
                    yield Found(waiver.id, message, origin=waiver.origin, related=(requirement.id,))


def failing_without_report(facts: Facts) -> Iterator[Found]:
    """A requirement fails and no nonconformance report is open or decided.

    Why: a fail without a report is forgotten, or erased by a better run.
    Fails: two points fail and no report names the requirement.
    Passes: a report names it, whatever was decided; or an approved waiver covers what fails.
    Do: write a nonconformance report that names the requirement and the failing points.
    """
    for requirement, status in facts.judged:
        fails = status.n_failing > 0 and not status.waived_by
        if fails and code_key(requirement.id) not in facts.reports:
            message = "fails, and no nonconformance report names it"
            yield Found(requirement.id, message, origin=requirement.origin)


def open_report(facts: Facts) -> Iterator[Found]:
    """A nonconformance report is open although nothing fails.

    Why: it keeps the requirement open; or the fail it was about has been covered up.
    Fails: the report is open and every point of its requirement is proved.
    Passes: the report is closed, or the requirement still fails.
    Do: close the report with its disposition, or find where the failing reading went.
    """
    for report in facts.snapshot.all(Nonconformance):
        requirement = facts.snapshot.find(Requirement, report.requirement)
        status = facts.status(requirement) if requirement is not None else None
        if report.state == "open" and status is not None and status.compliance is Compliance.COMPLIANT:
            message = f"open, while {report.requirement} is met by all its evidence"
            yield Found(report.id, message, origin=report.origin, related=(status.requirement,))


def overtaken_decision(facts: Facts) -> Iterator[Found]:
    """The board closed a requirement that is open by what is computed now.

    Why: a change after the review has undone what was signed.
    Fails: closed in May; in June a new reading fails.
    Passes: what is computed still supports the decision.
    Do: bring it to the board again, with what changed.
    """
    latest: dict[str, Approval] = {}
    for approval in sorted(facts.snapshot.all(Approval), key=lambda one: one.on):
        latest[code_key(approval.requirement)] = approval
    for requirement, status in facts.judged:
        decision = latest.get(code_key(requirement.id))
        if decision is not None and decision.decision == "closed" and status.close_out is CloseOut.OPEN:
            message = f"closed by {decision.by} on {decision.on}; now open: {status.close_out_reason}"
            if decision.requirement_revision < requirement.revision:
                message += (
                    f" (decided on revision {decision.requirement_revision}, now {requirement.revision})"
                )
            yield Found(requirement.id, message, origin=requirement.origin, related=(decision.id,))
