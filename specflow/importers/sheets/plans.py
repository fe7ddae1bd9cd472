"""Verification plans: what shorthand columns plan, and the default activity of a requirement nobody planned for."""

from __future__ import annotations

from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.model.base import code_key
from specflow.model.block import HardwareType
from specflow.model.requirement import Activity, Method, Requirement, Stage


def plan_in_row(row: SheetRow, requirement: Requirement, intake: Intake) -> None:
    """Note the activities that the columns Method, Stage and Hardware of a requirement plan: one a method."""
    methods = [found for word in row.words("method") if (found := row.choose("method", word, Method))]
    stage = row.choice("stage", Stage, Stage.QUALIFICATION)
    hardware = row.choice("hardware", HardwareType, HardwareType.ENGINEERING)
    intake.shorthand[code_key(requirement.id)] = [
        Activity(
            id=f"{requirement.id}/A{number}",
            requirement=requirement.id,
            method=method,
            stage=stage,
            tier=requirement.tier,
            credit_from=hardware,
            origin=row.origin("method"),
        )
        for number, method in enumerate(methods, start=1)
    ]


def complete_plans(intake: Intake) -> None:
    """Give each requirement of the workbook its activities.

    Rows of the sheet Activities stand; without any, the shorthand of the requirement's own row; without that, what
    the project has already, and for a new requirement one activity that is not planned yet.
    """
    planned = {code_key(activity.requirement) for activity in intake.given(Activity)}
    for requirement in intake.given(Requirement):
        key = code_key(requirement.id)
        if key in planned:
            continue
        activities = intake.shorthand.get(key, [])
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
