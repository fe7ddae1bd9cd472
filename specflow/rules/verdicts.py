"""Rules about what the evidence says: failing, marginal, undecided, contradicting, without weight."""

from __future__ import annotations

from collections.abc import Iterator

from specflow.model.base import code_key
from specflow.model.evidence import Supersession
from specflow.model.origin import Origin
from specflow.model.requirement import Requirement, RuleName
from specflow.model.verdict import PointResults, RequirementStatus, Verdict
from specflow.rules.base import Found
from specflow.rules.facts import FAILS, Facts, shown
from specflow.rules.words import amount, at_point, counted, interval, listed


def failing(facts: Facts) -> Iterator[Found]:
    """A governing reading misses the limit, and no waiver covers it.

    Why: what was built does not do what was promised.
    Fails: the gain is 19.4 dB at 30 GHz, at least 20 dB is required.
    Passes: every governing reading meets the limit, or an approved waiver covers what fails.
    Do: find the cause; mend and test again, write a nonconformance report, or ask for a waiver.
    """
    for requirement, status in facts.judged:
        if status.n_failing and not status.waived_by:
            yield Found(
                requirement.id, _fails_words(requirement, status, facts), origin=_origin(status, facts)
            )


def _fails_words(requirement: Requirement, status: RequirementStatus, facts: Facts) -> str:
    words = f"{status.n_failing} of {counted(status.n, 'point')} fail"
    worst = status.governing
    if worst is not None and worst.verdict in FAILS:
        words += f"; worst{at_point(worst.words, worst.item)}: {_margin(worst.margin, worst.unit)}"
    reports = facts.reports.get(code_key(requirement.id), ())
    return words + (f"; report {listed([one.id for one in reports])}" if reports else "; no report yet")


def _margin(margin: float, unit: str) -> str:
    return "no margin" if margin != margin else f"margin {amount(margin, unit, signed=True)}"


def _origin(status: RequirementStatus, facts: Facts) -> Origin | None:
    return facts.origin(status.governing.record if status.governing is not None else None)


def marginal(facts: Facts) -> Iterator[Found]:
    """A reading is nearer to the limit than its uncertainty.

    Why: with the limit inside the uncertainty, a pass is nearly a coin toss.
    Fails: 20.1 dB with U = 0.4 dB against at least 20 dB.
    Passes: 21 dB with U = 0.4 dB; without uncertainty the threshold of the project stands for U.
    Do: reduce the uncertainty, measure again, or take the risk knowingly with a guarded rule.
    """
    for requirement, status in facts.judged:
        if status.marginal:
            smallest = status.smallest_margin
            message = "a reading is nearer to the limit than its uncertainty, or than the project allows without one"
            if smallest is not None:
                where = at_point(smallest.words, smallest.item)
                message += f"; smallest margin {amount(smallest.margin, smallest.unit, signed=True)}{where}"
            record = smallest.record if smallest is not None else None
            yield Found(requirement.id, message, origin=facts.origin(record))


def undecidable(facts: Facts) -> Iterator[Found]:
    """The guard band leaves no reading that could pass.

    Why: the measurement cannot decide the limit, however good the item is.
    Fails: 54 ± 0.5 dBm with U = 0.6 dB under the guarded rule.
    Passes: the guard band is narrower than half the tolerance.
    Do: use a better set-up, or agree another decision rule.
    """
    yield from _with_verdict(facts, Verdict.UNDECIDABLE, "the guard band is wider than half the tolerance")


def insufficient(facts: Facts) -> Iterator[Found]:
    """Fewer items, runs or values than the requirement demands.

    Why: a statistic of too few values proves nothing about the population.
    Fails: a 95/95 limit with three readings.
    Passes: as many values as the limit asks for.
    Do: take the readings that are missing.
    """
    yield from _with_verdict(facts, Verdict.INSUFFICIENT, "fewer values than the limit asks for")


def inconclusive(facts: Facts) -> Iterator[Found]:
    """A reading neither meets nor misses the limit for certain.

    Why: evidence is there and still decides nothing; it is easily taken for proof.
    Fails: "< -80 dBm" against at most -87 dBm; or an input of the limit is missing.
    Passes: "< -90 dBm" against at most -87 dBm.
    Do: measure with a lower floor, or state what the message says is missing.
    """
    yield from _with_verdict(facts, Verdict.INCONCLUSIVE)


def _with_verdict(facts: Facts, verdict: Verdict, why: str = "") -> Iterator[Found]:
    for requirement, status in facts.defined:
        points = [
            (results, point)
            for activity in status.activities
            if (results := shown(activity)) is not None
            for point in results.points_with(verdict)
        ]
        if points:
            results, point = points[0]
            said = [words for activity in status.activities for words in activity.why]
            where = at_point(facts.point(requirement, point), results.item)
            reason = "; ".join(said[:2]) or why or _reading(requirement, results, point)
            message = f"{counted(len(points), 'point')} {verdict.words}, first{where}: {reason}"
            yield Found(requirement.id, message, origin=facts.origin(facts.governing(results, point)))


def _reading(requirement: Requirement, results: PointResults, point: int) -> str:
    low, high = float(results.value_low[point]), float(results.value_high[point])
    return f"the reading is {interval(low, high, requirement.limit.unit)}, the limit {requirement.limit.text}"


def no_uncertainty(facts: Facts) -> Iterator[Found]:
    """The decision rule needs the uncertainty and the evidence has none.

    Why: without it no guard band can be formed and nothing is decided.
    Fails: a guarded rule, and a table without uncertainty.
    Passes: the uncertainty stands in a column or in the register; or the rule is simple acceptance.
    Do: add the set-up to the uncertainty register, or state the uncertainty in the mapping.
    """
    for requirement, status in facts.defined:
        if not _needs_uncertainty(requirement):
            continue
        lacking = [
            (results, point)
            for activity in status.activities
            for results in activity.items.values()
            for point in results.without_uncertainty
        ]
        if lacking:
            origin = facts.origin(facts.governing(*lacking[0]))
            message = f"the {requirement.decision_rule.name.value} rule needs the uncertainty; " + (
                f"{counted(len(lacking), 'point')} without"
            )
            yield Found(requirement.id, message, origin=origin)


def _needs_uncertainty(requirement: Requirement) -> bool:
    rule = requirement.decision_rule
    guarded = rule.name is not RuleName.SIMPLE and rule.guard_factor > 0
    return guarded or rule.greatest_uncertainty is not None


def reverify(facts: Facts) -> Iterator[Found]:
    """What was measured has changed since.

    Why: the result is of a build, firmware or procedure that is no longer the one in question.
    Fails: the amplifier was changed in May, its gain was measured in April.
    Passes: it was measured again after the change, or the change does not touch the gain.
    Do: measure the points again that lost their proof, or correct the change record if it names too much.
    """
    for requirement, status in facts.defined:
        if status.stale:
            said = [words for activity in status.activities for words in activity.why if "changed" in words]
            message = f"{status.k} of {status.n} points proved; stale evidence stands at others"
            yield Found(requirement.id, f"{message}: {listed(said, 2)}" if said else message)


def superseded_fail(facts: Facts) -> Iterator[Found]:
    """A failing reading was replaced by another that does not name it.

    Why: a later pass must not erase an earlier fail: what was done about it has to be written down.
    Fails: a retest supersedes the table in which 30 GHz failed, and names no discrepancy report.
    Passes: the supersession names the report and its disposition; or nothing in the earlier table fails.
    Do: name the discrepancy report and its disposition in the supersession.
    """
    bare = [one for one in facts.snapshot.all(Supersession) if not one.names_fail]
    for requirement, status in facts.defined if bare else ():
        for activity in status.activities:
            for results in activity.items.values():
                yield from _superseded(requirement, results, bare, facts)


def _superseded(
    requirement: Requirement, results: PointResults, bare: list[Supersession], facts: Facts
) -> Iterator[Found]:
    for point in results.points_with(*FAILS):
        record = facts.governing(results, point)
        for one in bare:
            if record is None or code_key(one.earlier) != code_key(record.table):
                continue
            if one.rows is None or record.row in one.rows:
                where = at_point(facts.point(requirement, point), results.item)
                message = f"the fail{where} is superseded by {one.later}, which names no discrepancy report"
                yield Found(requirement.id, message, origin=facts.origin(record), related=(one.id,))


def no_credit(facts: Facts) -> Iterator[Found]:
    """Evidence passes and may not prove its point.

    Why: it shows progress, and a table that counts it shows more than is proved.
    Fails: a breadboard passes where qualification hardware is asked for.
    Passes: the item is of the hardware type, and the method and stage are those planned.
    Do: repeat it on hardware and at a stage that earn credit, or plan the activity so that this earns it.
    """
    for requirement, status in facts.defined:
        for activity in status.activities:
            results = shown(activity)
            if results is None or status.stale or not activity.why:
                continue
            idle = len(results.without_credit)
            if idle:
                message = f"{counted(idle, 'point')} of {activity.activity} pass without credit: "
                yield Found(requirement.id, message + listed(activity.why, 2), related=(activity.activity,))
