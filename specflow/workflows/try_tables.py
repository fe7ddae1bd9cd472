"""A trial as report tables and as data."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

from specflow.budgets.trial import BudgetEffect, BudgetState, LimitState
from specflow.model.report import ReportCell, ReportRow, ReportTable
from specflow.reports.figures import margin, text
from specflow.workflows.allocate_tables import plain_row, table
from specflow.workflows.try_change import StatusEffect, Trial


def trial_tables(trial: Trial) -> list[ReportTable]:
    """Return the margins, allocations and states that would change."""
    tables = [_margins(trial.budgets)]
    if trial.allocations:
        tables.append(_allocations(trial))
    tables.append(statuses_table(trial.statuses))
    return tables


def _margins(effects: Sequence[BudgetEffect]) -> ReportTable:
    rows = [row for effect in effects for row in _effect_rows(effect)]
    intro = "" if rows else "no margin of a budget would change"
    titles = ("Budget", "Requirement", "Margin", "Then", "Worst case", "Would be", "At", "Closure")
    return table("margins", "Margins that would change", intro, titles, rows)


def _effect_rows(effect: BudgetEffect) -> list[ReportRow]:
    after = effect.after
    closure = after.error or after.closure if after is not None else "removed"
    limits = effect.limits or (("", None, None),)
    return [
        ReportRow(
            id=effect.budget,
            cells=(
                text(effect.budget),
                text(name),
                _margin(first),
                _margin(second),
                _worst(first),
                _worst(second),
                text(_place(first, second)),
                text(closure),
            ),
        )
        for name, first, second in limits
    ]


def _margin(state: LimitState | None) -> ReportCell:
    return text("") if state is None else margin(state.margin, state.unit)


def _worst(state: LimitState | None) -> ReportCell:
    return text("") if state is None else margin(state.worst_case, state.unit)


def _place(first: LimitState | None, second: LimitState | None) -> str:
    words = [state.words for state in (first, second) if state is not None and state.words]
    return " → ".join(dict.fromkeys(words))


def _allocations(trial: Trial) -> ReportTable:
    rows = [
        plain_row(
            one.allocation,
            one.allocation,
            one.child,
            one.limit,
            one.proposed or ("" if one.difference else "the same"),
            one.difference,
            one.why,
        )
        for one in trial.allocations
    ]
    titles = ("Allocation", "Requirement", "Carries", "Would get", "Difference", "Why")
    return table("allocations", "Allocations that would follow no longer", "", titles, rows)


def statuses_table(effects: Sequence[StatusEffect]) -> ReportTable:
    """Return the requirements whose status would change, before and after."""
    rows = [
        ReportRow(
            id=one.requirement,
            cells=(
                text(one.requirement),
                text(_moves(*one.label)),
                text(_moves(*one.proved)),
                margin(one.margin[0], one.unit),
                margin(one.margin[1], one.unit),
            ),
        )
        for one in effects
    ]
    intro = "" if rows else "no status would change"
    titles = ("Requirement", "State", "Proved", "Guarded margin", "Then")
    return table("statuses", "Status that would change", intro, titles, rows)


def _moves(before: str, after: str) -> str:
    return before if before == after else f"{before} → {after}"


def alternatives_table(states: Sequence[BudgetState], requirement: str) -> ReportTable:
    """Return budgets of one requirement side by side."""
    rows = [
        ReportRow(
            id=state.budget,
            cells=(
                text(state.budget),
                text(state.law),
                text(state.positions),
                _margin(state.limit(requirement)),
                _worst(state.limit(requirement)),
                text(_place(None, state.limit(requirement))),
                text(_others(state, requirement)),
                text(state.error or state.closure or "no allocation yet"),
            ),
        )
        for state in states
    ]
    intro = "" if rows else "no budget serves it"
    titles = ("Budget", "Law", "Positions", "Margin", "Worst case", "Worst at", "Other limits", "Closure")
    return table("alternatives", f"Budgets of {requirement}", intro, titles, rows)


def _others(state: BudgetState, requirement: str) -> str:
    kept = [one for one in state.limits if one.requirement.casefold() != requirement.casefold()]
    return ", ".join(f"{one.requirement} {one.margin:+.3g} {one.unit}" for one in kept)


def trial_as_json(trial: Trial) -> dict[str, Any]:
    """Return a trial as data for scripts."""
    return {
        "changes": [
            change.model_dump(mode="json", include={"noun", "id", "action", "fields"})
            for change in trial.changes
        ],
        "budgets": [
            {"budget": one.budget, "before": _state(one.before), "after": _state(one.after)}
            for one in trial.budgets
        ],
        "allocations": [
            {
                "allocation": one.allocation,
                "requirement": one.child,
                "limit": one.limit,
                "proposed": one.proposed,
                "difference": one.difference,
                "why": one.why,
            }
            for one in trial.allocations
        ],
        "statuses": statuses_as_json(trial.statuses),
        "notes": list(trial.notes),
    }


def alternatives_as_json(states: Sequence[BudgetState]) -> list[dict[str, Any] | None]:
    """Return budgets side by side as data."""
    return [_state(state) for state in states]


def _state(state: BudgetState | None) -> dict[str, Any] | None:
    if state is None:
        return None
    return {
        "budget": state.budget,
        "law": state.law,
        "positions": state.positions,
        "limits": [
            {
                "requirement": one.requirement,
                "margin": _plain(one.margin),
                "worst_case": _plain(one.worst_case),
                "unit": one.unit,
                "at": one.words,
                "closes": one.closes,
            }
            for one in state.limits
        ],
        "closes": state.closes,
        "closure": state.closure,
        "error": state.error,
    }


def _plain(value: float) -> float | None:
    return value if math.isfinite(value) else None


def statuses_as_json(effects: Sequence[StatusEffect]) -> list[dict[str, Any]]:
    """Return the requirements whose status would change as data for scripts."""
    return [
        {
            "requirement": one.requirement,
            "label": list(one.label),
            "proved": list(one.proved),
            "margin": [_plain(value) for value in one.margin],
            "unit": one.unit,
        }
        for one in effects
    ]
