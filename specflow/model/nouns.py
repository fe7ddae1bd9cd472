"""The one list of stored nouns: which document class stands behind each, in an order in which links can be kept."""

from __future__ import annotations

from dataclasses import dataclass

from specflow.model.base import Document
from specflow.model.baseline import Baseline
from specflow.model.block import Block, Item
from specflow.model.budget import Allocation, Budget
from specflow.model.conditions import ConditionMap, ConditionsSet
from specflow.model.correction import Correction
from specflow.model.decision import Approval, DeclaredSplit, Disposition, Nonconformance, Waiver
from specflow.model.declared import DeclaredValue, UncertaintyEntry
from specflow.model.derivation import Derivation
from specflow.model.evidence import (
    EvidenceFile,
    EvidenceTable,
    ItemChange,
    Supersession,
    TableMapping,
    Withdrawal,
)
from specflow.model.parameter import Parameter
from specflow.model.project import Project
from specflow.model.requirement import Activity, Requirement


@dataclass(frozen=True, slots=True)
class Noun:
    """A stored noun: ``name`` is its table and its key in exchange files, ``title`` what people call it.

    ``id_field`` is the field that holds the code; ``links`` name the fields that hold codes of other nouns, with
    the noun they point to (a field may hold one code, None, or a tuple of codes).
    """

    name: str
    title: str
    document: type[Document]
    id_field: str = "id"
    links: tuple[tuple[str, str], ...] = ()


NOUNS: tuple[Noun, ...] = (
    Noun("project", "project", Project),
    Noun("parameter", "parameter", Parameter, "key"),
    Noun("block", "block", Block, links=(("parent", "block"),)),
    Noun("item", "item", Item, links=(("block", "block"), ("built_into", "item"))),
    Noun("conditions_set", "conditions set", ConditionsSet),
    Noun("condition_map", "condition map", ConditionMap, links=(("block", "block"),)),
    Noun("declared_value", "declared value", DeclaredValue),
    Noun("uncertainty", "uncertainty register line", UncertaintyEntry),
    Noun("correction", "correction table", Correction),
    Noun(
        "requirement",
        "requirement",
        Requirement,
        links=(("parents", "requirement"), ("block", "block"), ("conditions", "conditions_set")),
    ),
    Noun("activity", "activity", Activity, links=(("requirement", "requirement"),)),
    Noun(
        "budget", "budget", Budget, links=(("requirements", "requirement"), ("conditions", "conditions_set"))
    ),
    Noun(
        "allocation",
        "allocation",
        Allocation,
        links=(("parent", "requirement"), ("child", "requirement"), ("budget", "budget")),
    ),
    Noun("mapping", "mapping", TableMapping),
    Noun("evidence_file", "evidence file", EvidenceFile),
    Noun(
        "evidence_table",
        "evidence table",
        EvidenceTable,
        links=(
            ("file", "evidence_file"),
            ("block", "block"),
            ("requirement", "requirement"),
            ("mapping", "mapping"),
        ),
    ),
    Noun(
        "derivation",
        "derivation",
        Derivation,
        links=(("inputs", "evidence_table"), ("again_of", "derivation")),
    ),
    Noun(
        "supersession",
        "supersession",
        Supersession,
        links=(("earlier", "evidence_table"), ("later", "evidence_table")),
    ),
    Noun("withdrawal", "withdrawal", Withdrawal, links=(("table", "evidence_table"),)),
    Noun("item_change", "change record", ItemChange, links=(("block", "block"), ("item", "item"))),
    Noun(
        "nonconformance",
        "nonconformance",
        Nonconformance,
        links=(("requirement", "requirement"), ("table", "evidence_table")),
    ),
    Noun(
        "waiver",
        "waiver",
        Waiver,
        links=(("requirement", "requirement"), ("nonconformance", "nonconformance")),
    ),
    Noun("disposition", "disposition", Disposition),
    Noun("declared_split", "declared split", DeclaredSplit, links=(("requirement", "requirement"),)),
    Noun("baseline", "baseline", Baseline),
    Noun(
        "approval",
        "approval",
        Approval,
        links=(("requirement", "requirement"), ("baseline", "baseline")),
    ),
)

NOUN_BY_NAME = {noun.name: noun for noun in NOUNS}
NOUN_BY_DOCUMENT = {noun.document: noun for noun in NOUNS}
