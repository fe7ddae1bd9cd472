"""A draft: what an import proposes, before anybody accepted it: documents, tables with their arrays, and findings."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from specflow.model.base import Document
from specflow.model.evidence import EvidenceColumns
from specflow.model.finding import Finding
from specflow.model.origin import Origin


@dataclass(frozen=True)
class Draft:
    """Documents in the order met, arrays by evidence table id, findings about what could not be read.

    ``echoes`` are the sentences that say back what was understood, by document id ("at least 45 dBm"). ``removals`` are
    stored documents that are no longer wanted, because what made them says so. ``places`` are the cells of the parts of
    a document, by its id and by what messages call the part.
    """

    documents: Sequence[Document] = ()
    columns: Mapping[str, EvidenceColumns] = field(default_factory=dict)
    findings: Sequence[Finding] = ()
    echoes: Mapping[str, str] = field(default_factory=dict)
    removals: Sequence[Document] = ()
    places: Mapping[str, Mapping[str, Origin]] = field(default_factory=dict)
