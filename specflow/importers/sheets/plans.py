"""Verification plans: what shorthand columns plan, and the default activity of a requirement nobody planned for."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.model.base import code_key
from specflow.model.block import HardwareType
from specflow.model.requirement import Activity, Method, Requirement, Stage


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
    """Note the activities that a plan makes: one a method."""
    intake.shorthand[code_key(requirement.id)] = [
        Activity(
            id=f"{requirement.id}/A{number}",
            requirement=requirement.id,
            method=method,
            stage=plan.stage,
            tier=requirement.tier,
            credit_from=plan.hardware,
            origin=row.origin("method"),
        )
        for number, method in enumerate(plan.methods, start=1)
    ]


def complete_plans(intake: Intake) -> None:
    """Give each requirement of the workbook its activities.

    Rows of the sheet Activities stand; without any, the shorthand of the requirement's own row; without that, what
    the project has already, and for a new requirement one activity that is not planned yet.
    """
    planned: dict[str, set[Method]] = {}
    for activity in intake.given(Activity):
        planned.setdefault(code_key(activity.requirement), set()).add(activity.method)
    for requirement in intake.given(Requirement):
        key = code_key(requirement.id)
        activities = intake.shorthand.get(key, [])
        if key in planned:
            _compare(requirement, activities, planned[key], intake)
            continue
        if not activities and key not in intake.snapshot.activities_of:
            activities = [
                Activity(
                    id=f"{requirement.id}/A1",
                    requirement=requirement.id,
                    tier=requirement.tier,
                    planned=False,
                    origin=requirement.origin,
                )
            ]
        for activity in activities:
            intake.add(activity, ("requirement", "method", "stage", "tier", "credit_from", "planned"))


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
