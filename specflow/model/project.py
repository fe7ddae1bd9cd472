"""The project itself: its name, its policies, and what a person may tune without touching code."""

from __future__ import annotations

from collections.abc import Mapping

from pydantic import Field

from specflow.model.base import Code, Document, code_key


class Policy(Document):
    """Rules of the house: thresholds and severities that are project data, not code.

    ``marginal_db`` flags a pass or fail without uncertainty that is nearer to the limit than this.
    ``keep_copies``: a copy of each attached file is kept in the project. ``severities`` override the built-in severity
    of a finding rule ("off" silences it); ``gates`` do so, by the name of a review gate, when one is checked for.
    """

    second_review: bool = False
    keep_copies: bool = False
    marginal_db: float = Field(default=0.5, ge=0)
    marginal_relative: float = Field(default=0.05, ge=0)
    severities: dict[str, str] = Field(default_factory=dict)
    gates: dict[str, dict[str, str]] = Field(default_factory=dict)

    def severities_at(self, gate: str) -> Mapping[str, str]:
        """Return the severities by the code of a rule that hold at a review gate; "" is no gate in particular."""
        named = {code_key(name): own for name, own in self.gates.items()}
        return {**_by_key(self.severities), **_by_key(named.get(code_key(gate), {}))}


def _by_key(severities: Mapping[str, str]) -> dict[str, str]:
    return {code_key(rule): severity for rule, severity in severities.items()}


class Project(Document):
    """What a project is called and the policy it keeps."""

    id: Code = "project"
    name: str
    description: str = ""
    invented: bool = False
    policy: Policy = Field(default_factory=Policy)
    revision: int = 1
