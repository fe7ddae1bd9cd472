"""The project itself: its name, its policies, and what a person may tune without touching code."""

from __future__ import annotations

from pydantic import Field

from specflow.model.base import Code, Document


class Policy(Document):
    """Rules of the house: thresholds and severities that are project data, not code.

    ``marginal_db`` flags a pass or fail without uncertainty that is nearer to the limit than this.
    ``keep_copies``: a copy of each attached file is kept in the project. ``severities`` override the built-in severity of a finding rule ("off" silences it).
    """

    second_review: bool = False
    keep_copies: bool = False
    marginal_db: float = Field(default=0.5, ge=0)
    marginal_relative: float = Field(default=0.05, ge=0)
    severities: dict[str, str] = Field(default_factory=dict)


class Project(Document):
    """What a project is called and the policy it keeps."""

    id: Code = "project"
    name: str
    description: str = ""
    invented: bool = False
    policy: Policy = Field(default_factory=Policy)
    revision: int = 1
