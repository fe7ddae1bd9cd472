"""The docket of one evaluation: all requirements to be judged, opened some at a time and assessed when asked for."""

from __future__ import annotations

from collections.abc import Iterable
from itertools import islice

from specflow.errors import ConditionsError, ExpressionError
from specflow.model.base import code_key
from specflow.model.requirement import Requirement
from specflow.verification.abreast import judge_abreast
from specflow.verification.assessment import Assessment, assess
from specflow.verification.case import Case, open_case, required_activities
from specflow.verification.workspace import Workspace

#: So many cases are opened at a time: enough to be judged abreast, few enough to be held beside each other.
AT_ONCE = 256


class Docket:
    """Requirements in the order in which they are likely to be asked for; each is assessed once."""

    def __init__(self, requirements: Iterable[Requirement], workspace: Workspace) -> None:
        self._workspace = workspace
        self._waiting = {code_key(one.id): one for one in requirements}
        self._open: dict[str, Case | ConditionsError | ExpressionError] = {}

    def assess(self, requirement: Requirement) -> Assessment:
        """Judge all evidence of a requirement. ConditionsError or ExpressionError when its points cannot be had."""
        key = code_key(requirement.id)
        if key not in self._open:
            self._open_from(key, requirement)
        case = self._open.pop(key)
        if isinstance(case, Exception):
            raise case
        return assess(case, self._workspace)

    def _open_from(self, key: str, requirement: Requirement) -> None:
        """Open a case and the next ones that wait, and judge those that are alike."""
        self._waiting.pop(key, None)
        keys = list(islice(self._waiting, AT_ONCE - 1))
        chosen = {key: requirement, **{one: self._waiting.pop(one) for one in keys}}
        opened = {one: self._opened(asked) for one, asked in chosen.items()}
        judge_abreast([case for case in opened.values() if isinstance(case, Case)], self._workspace)
        self._open |= opened

    def _opened(self, requirement: Requirement) -> Case | ConditionsError | ExpressionError:
        activities = required_activities(requirement, self._workspace.snapshot)
        try:
            return open_case(requirement, activities, self._workspace)
        except (ConditionsError, ExpressionError) as error:
            return error  # raised when the requirement is asked for, if it ever is
