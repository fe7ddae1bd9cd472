"""Rules about a requirement by itself: can it be judged, does it apply, and how far is it proved."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import islice

from specflow.errors import ExpressionError
from specflow.limits import expression_names, parse_condition
from specflow.limits.tree import states_bandwidth
from specflow.model.declared import DeclaredValue
from specflow.model.requirement import Requirement
from specflow.model.verdict import ActivityResult, PointResults, RequirementStatus
from specflow.rules.base import Found
from specflow.rules.facts import Facts, has_no_evidence, shown
from specflow.rules.words import MOST_LISTED, counted, listed


def unverified(facts: Facts) -> Iterator[Found]:
    """A verification is planned, and no evidence at all stands at any required point.

    Why: a limit without evidence is a hope; it closes no review and hides the risk until late.
    Fails: R-1 limits the gain at three frequencies and no table holds a gain of that block there.
    Passes: one reading stands at one of the three frequencies (that is then partially verified); or nothing is planned.
    Do: attach a result file; where one is attached, look among the mismatches why it does not serve.
    """
    for requirement, status in facts.defined:
        if has_no_evidence(status) and facts.is_planned(requirement):
            near = [
                f"{one.column} of {one.table} does not count: {one.what}"
                for one in status.mismatches
                if one.column
            ]
            words = "; ".join([f"no evidence at any of {counted(status.n, 'required point')}", *near[:1]])
            yield Found(requirement.id, words, origin=requirement.origin)


def partially_verified(facts: Facts) -> Iterator[Found]:
    """Some required points are not proved.

    Why: a result at room temperature and mid band does not show that the corners are met.
    Fails: evidence proves two of three required frequencies; at 30 GHz there is none.
    Passes: every required point has a governing reading that passes and counts.
    Do: measure at the points named, or show in the conditions set why they are not required.
    """
    for requirement, status in facts.defined:
        missing = status.n - status.k - status.n_failing
        if status.standing and missing > 0:
            where = _unproved(requirement, status, facts)
            words = (
                f"{status.k} of {status.n} points proved, {status.n_failing} failing, {missing} not proved"
            )
            yield Found(requirement.id, f"{words}: {where}" if where else words, origin=requirement.origin)


def _unproved(requirement: Requirement, status: RequirementStatus, facts: Facts) -> str:
    """Name the first unproved points, with their items where several must prove it, and say how many more there are."""
    places = [
        (results.item, point)
        for activity in status.activities
        for results in _proving(requirement, activity, facts)
        for point in results.unproved
    ]
    first = list(islice(dict.fromkeys(places), MOST_LISTED))
    item_is_said = requirement.provers.rule != "any one"
    named = [
        f"({at})" for item, point in first if (at := _place(requirement, item, point, facts, item_is_said))
    ]
    more = len(places) - len(named)  # a point that two activities lack counts for both, as it does in n
    words = ", ".join(named) + (f" and {more} more" if named and more else "")
    absent = _absent(requirement, status, facts)
    return "; ".join(part for part in (words, f"nothing of item {listed(absent)}" if absent else "") if part)


def _place(requirement: Requirement, item: str, point: int, facts: Facts, item_is_said: bool) -> str:
    words = facts.point(requirement, point)
    return f"{words}, item {item}" if words and item_is_said and item else words


def _proving(requirement: Requirement, activity: ActivityResult, facts: Facts) -> list[PointResults]:
    """Return the points of the items that must prove an activity: those named, or the one that is shown."""
    if requirement.provers.rule != "each of":
        results = shown(activity)
        return [] if results is None else [results]
    return [activity.items[name] for name in facts.named_items(requirement) if name in activity.items]


def _absent(requirement: Requirement, status: RequirementStatus, facts: Facts) -> list[str]:
    """Return the items that must prove the requirement and of which an activity has nothing."""
    if requirement.provers.rule != "each of" or requirement.provers.may_complete_each_other:
        return []
    names = facts.named_items(requirement)
    return [name for name in names if any(name not in activity.items for activity in status.activities)]


def cannot_be_judged(facts: Facts) -> Iterator[Found]:
    """The requirement cannot be judged at all.

    Why: it silently drops out of every count unless somebody is told.
    Fails: the exclusions of its conditions set leave no point to prove.
    Passes: the conditions set expands into points and the limit can be evaluated there.
    Do: correct the conditions set or the limit as the message says.
    """
    for requirement, status in facts.defined:
        if not status.activities:
            why = status.remarks[0] if status.remarks else "its limit or conditions cannot be evaluated"
            yield Found(requirement.id, why, origin=requirement.origin)


def unknown_parameter(facts: Facts) -> Iterator[Found]:
    """The requirement limits a parameter that the dictionary does not know.

    Why: without its kind, unit and better direction no sheet column is recognised as evidence of it.
    Fails: R-1 limits "gian"; no parameter of that name exists.
    Passes: R-1 limits "gain", or the project has a parameter of its own of that name.
    Do: correct the name, or add the parameter to the project with its unit.
    """
    hints: dict[str, str] = {}
    for requirement, _ in facts.judged:
        name = requirement.quantity.parameter
        if facts.dictionary.get(name) is None:
            if name not in hints:
                near = " or ".join(one.key for one in facts.dictionary.suggest(name))
                hints[name] = f"did you mean {near}?" if near else ""
            yield Found(requirement.id, f"{name!r} is no known parameter", hints[name], requirement.origin)


def bandwidth_not_stated(facts: Facts) -> Iterator[Found]:
    """The limit is on a quantity that means nothing without a bandwidth, and states none.

    Why: the same noise reads 30 dB more in 1 MHz than in 1 kHz; no evidence can be compared.
    Fails: spurious emissions of at most -30 dBm, in no bandwidth.
    Passes: at most -30 dBm in 1 MHz, or a density such as -90 dBm/Hz.
    Do: state the measurement bandwidth in the requirement or in its limit.
    """
    for requirement, _ in facts.defined:
        parameter = facts.dictionary.get(requirement.quantity.parameter)
        if parameter is None or not parameter.needs_bandwidth:
            continue
        if requirement.quantity.bandwidth_hz is None and not states_bandwidth(requirement.limit.tree):
            message = f"{parameter.title} is limited to {requirement.limit.text}, in no stated bandwidth"
            yield Found(requirement.id, message, origin=requirement.origin)


def unapproved_tailoring(facts: Facts) -> Iterator[Found]:
    """Said to be not applicable, but nobody approved that.

    Why: a requirement that anyone may strike out is no requirement; until approved it binds.
    Fails: R-1 gives a reason why it does not apply and names no approver.
    Passes: the reason stands with the name of the person who approved it.
    Do: name the approver, or take the reason out.
    """
    for requirement, _ in facts.judged:
        if requirement.not_applicable_reason and not requirement.not_applicable_approver:
            message = f"said to be not applicable ({requirement.not_applicable_reason}), approved by nobody"
            yield Found(requirement.id, message, origin=requirement.origin)


def undecided_applicability(facts: Facts) -> Iterator[Found]:
    """Whether the requirement applies cannot be decided.

    Why: it counts as applicable until it can be, and may be proved for nothing or be missing in a report.
    Fails: R-1 applies where "has_tracking > 0.5", and no declared value has that name.
    Passes: the declared value is in the project, whatever it says.
    Do: declare the values named, or correct the expression.
    """
    declared = {value.name for value in facts.snapshot.all(DeclaredValue)}
    for requirement, _ in facts.judged:
        if not requirement.applicability:
            continue
        try:
            missing = sorted(expression_names(parse_condition(requirement.applicability)) - declared)
        except ExpressionError as error:
            message = f"the applicability {requirement.applicability!r} cannot be read: {error.message}"
            yield Found(requirement.id, message, origin=requirement.origin)
            continue
        if missing:
            message = (
                f"the applicability {requirement.applicability!r} needs {', '.join(missing)}, not declared"
            )
            yield Found(requirement.id, message, origin=requirement.origin)
