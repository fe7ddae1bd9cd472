"""Verification plans: what shorthand columns plan, and the default activity of a requirement nobody planned for."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.model.base import code_key
from specflow.model.block import HardwareType
from specflow.model.origin import Origin
from specflow.model.requirement import Activity, Method, Requirement, Stage

#: What the row of a requirement says of its activities; the rest stays as the project has it.
_STATED = (
    "requirement",
    "requirement_revision",
    "method",
    "stage",
    "tier",
    "credit_from",
    "planned",
    "shorthand",
)


@dataclass(frozen=True, slots=True)
class StatedPlan:
    """What the columns Method, Stage and Hardware of a requirement say."""

    methods: tuple[Method, ...]
    stage: Stage
    hardware: HardwareType


def stated_plan(row: SheetRow) -> StatedPlan:
    """Read the shorthand columns of a requirement."""
    return StatedPlan(
        tuple(found for word in row.words("method") if (found := row.choose("method", word, Method))),
        row.choice("stage", Stage, Stage.QUALIFICATION),
        row.choice("hardware", HardwareType, HardwareType.ENGINEERING),
    )


def note_plan(plan: StatedPlan, requirement: Requirement, row: SheetRow, intake: Intake) -> None:
    """Note the activities that a plan makes: one a method, none where the column Method is empty."""
    if row.has("method"):
        intake.shorthand[code_key(requirement.id)] = [
            _of_row(
                requirement, row.origin("method"), method=method, stage=plan.stage, credit_from=plan.hardware
            )
            for method in plan.methods
        ]


def _of_row(requirement: Requirement, origin: Origin | None, **fields: object) -> Activity:
    """Return an activity planned by its requirement's row; its id is given later."""
    return Activity.model_validate(
        {
            "id": requirement.id,
            "requirement": requirement.id,
            "tier": requirement.tier,
            "shorthand": True,
            "origin": origin,
            **fields,
        }
    )


def complete_plans(intake: Intake) -> None:
    """Give each requirement of the workbook its activities.

    Rows of the sheet Activities stand, in this workbook or loaded before; without any, the shorthand of the
    requirement's own row; without that, what the project has already, and for a new requirement one activity that is
    not planned yet. What the row had planned and no longer does is proposed for removal.
    """
    by_rows: dict[str, list[Activity]] = {}
    for activity in intake.given(Activity):
        by_rows.setdefault(code_key(activity.requirement), []).append(activity)
    for requirement in intake.given(Requirement):
        _complete(requirement, by_rows.get(code_key(requirement.id), []), intake)


def _complete(requirement: Requirement, rows: Sequence[Activity], intake: Intake) -> None:
    key = code_key(requirement.id)
    stated = intake.shorthand.get(key)
    given = {code_key(activity.id) for activity in rows}
    stored = [one for one in intake.snapshot.activities_of.get(key, ()) if code_key(one.id) not in given]
    own = [one for one in stored if one.shorthand]
    standing = [*rows, *(one for one in stored if not one.shorthand and one.planned)]
    if standing:
        _compare(requirement, stated or (), {one.method for one in standing}, intake)
        if rows or stated is not None:
            intake.removals.extend(own)
    elif stated or not stored or (stated is not None and any(one.planned for one in own)):
        wanted = stated or [_of_row(requirement, requirement.origin, planned=False)]
        _replace(requirement, wanted, own, intake)
    else:
        _keep(requirement, own, intake)


def _keep(requirement: Requirement, own: Sequence[Activity], intake: Intake) -> None:
    """Let what the row had planned follow its revision; the workbook says nothing else of it."""
    revision = intake.due_revision(requirement)
    for activity in own:
        if activity.planned and activity.requirement_revision != revision:
            intake.add(
                activity.model_copy(update={"requirement_revision": revision}), ("requirement_revision",)
            )


def _replace(
    requirement: Requirement, wanted: Sequence[Activity], own: Sequence[Activity], intake: Intake
) -> None:
    """Lay what the row plans over what it had planned: the same method first, the rest in order."""
    left = list(own)
    same = [_take(left, activity.method) for activity in wanted]
    revision = intake.due_revision(requirement)
    taken = {code_key(activity.id) for activity in own}
    for activity, known in zip(wanted, same, strict=True):
        known = known or (left.pop(0) if left else None)
        code = known.id if known is not None else _free_code(requirement, taken, intake)
        taken.add(code_key(code))
        fields = {"id": code, "requirement_revision": revision}
        intake.add(activity.model_copy(update=fields), _STATED)
    intake.removals.extend(left)


def _take(left: list[Activity], method: Method) -> Activity | None:
    """Take the activity of that method out of the list."""
    found = next((one for one in left if one.planned and one.method is method), None)
    if found is not None:
        left.remove(found)
    return found


def _free_code(requirement: Requirement, taken: set[str], intake: Intake) -> str:
    """Return the first id of the requirement's activities that nothing has or had."""
    used = (
        taken | intake.codes.get("activity", {}).keys() | intake.snapshot.removed.get("activity", frozenset())
    )
    number = 1
    while (key := code_key(f"{requirement.id}/A{number}")) in used or intake.snapshot.find(Activity, key):
        number += 1
    return f"{requirement.id}/A{number}"


def _compare(
    requirement: Requirement, shorthand: Sequence[Activity], planned: set[Method], intake: Intake
) -> None:
    """Say where the requirement's own row plans a method that its activities do not have."""
    lacking = [activity.method.value for activity in shorthand if activity.method not in planned]
    if lacking:
        _, row, _ = intake.codes["requirement"][code_key(requirement.id)]
        intake.note(
            row,
            "method",
            f"the method {', '.join(lacking)} is in no row of the sheet Activities for {requirement.id}; they count",
            "add the activity there, or empty this cell",
            rule="workbook-plans-differ",
        )
