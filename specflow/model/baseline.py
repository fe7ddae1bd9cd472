"""Baselines: a frozen, hashed copy of the whole project for a review. The bytes are kept beside the document."""

from __future__ import annotations

from specflow.model.base import Code, Document


class Baseline(Document):
    """A baseline as listed; ``content_sha256`` is over the canonical bytes that the store keeps."""

    id: Code
    title: str = ""
    gate: str = ""
    created_at: str
    created_by: str = ""
    project_revision: int
    content_sha256: str
    size: int
    note: str = ""
    revision: int = 1
