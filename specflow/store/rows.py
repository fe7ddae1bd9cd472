"""The tables. One table a noun, all of one pattern, and the few tables that are no nouns.

A noun's table holds the code, the document as a payload (``body``), real foreign keys for its links and, for whoever
looks into the file with a database browser, a few attributes as columns. The attributes are copies, written from
the document and never read back. Integer keys join tables and never leave the store.
"""

from __future__ import annotations

from types import NoneType
from typing import get_args, get_origin

from sqlalchemy import Column, ForeignKey, Integer, LargeBinary, MetaData, Table, Text, UniqueConstraint

from specflow.model.nouns import NOUNS, Noun

metadata = MetaData(
    naming_convention={
        "pk": "pk_%(table_name)s",
        "fk": "fk_%(table_name)s_%(column_0_name)s",
        "uq": "uq_%(table_name)s_%(column_0_N_name)s",
        "ix": "ix_%(table_name)s_%(column_0_N_name)s",
    }
)

#: Noun -> attributes kept as text columns too: (column, path in the document, what it is).
ATTRIBUTES: dict[str, tuple[tuple[str, str, str], ...]] = {
    "project": (("name", "name", "what the project is called"),),
    "parameter": (("title", "title", "the parameter in words"), ("unit", "unit", "canonical unit")),
    "block": (
        ("name", "name", "the block in words"),
        ("tier", "tier", "system, assembly or block"),
        ("owner", "owner", "who answers for the block"),
    ),
    "item": (
        ("serial", "serial", "serial number"),
        ("hardware_type", "hardware_type", "breadboard, engineering, qualification or production"),
    ),
    "conditions_set": (("title", "title", "the conditions set in words"),),
    "declared_value": (("name", "name", "how limits refer to the value"),),
    "uncertainty": (
        ("set_up", "set_up", "the measurement set-up"),
        ("parameter", "parameter", "key of the parameter it is for"),
    ),
    "correction": (("set_up", "set_up", "the measurement set-up"),),
    "requirement": (
        ("title", "title", "the requirement in a few words"),
        ("tier", "tier", "system, assembly or block"),
        ("owner", "owner", "who answers for the requirement"),
        ("parameter", "quantity.parameter", "key of the parameter that is limited"),
        ("limit_text", "limit.text", "the limit as typed"),
    ),
    "activity": (
        ("method", "method", "verification method"),
        ("stage", "stage", "verification stage"),
        ("tier", "tier", "tier at which it is done"),
    ),
    "budget": (("title", "title", "the budget in words"), ("law", "law", "how contributions combine")),
    "allocation": (("state", "state", "proposed, agreed or baselined"),),
    "mapping": (
        ("title", "title", "the layout in words"),
        ("layout_key", "layout_key", "shape of the layout"),
    ),
    "evidence_file": (
        ("name", "name", "file name as received"),
        ("sha256", "sha256", "digest of the bytes as received, hexadecimal"),
    ),
    "evidence_table": (
        ("sheet", "sheet", "sheet of the file"),
        ("title", "title", "title found above the table"),
        ("method", "method", "verification method"),
        ("stage", "stage", "verification stage"),
    ),
    "derivation": (
        ("law", "law", "the law that was applied"),
        ("parameter", "gives.parameter", "key of the parameter that it gives"),
    ),
    "nonconformance": (("state", "state", "open or closed"),),
    "waiver": (("state", "state", "requested, approved, rejected, lapsed or closed"),),
    "disposition": (
        ("rule", "rule", "the rule that reported"),
        ("subject", "subject", "id it was reported about"),
    ),
    "baseline": (
        ("title", "title", "the baseline in words"),
        ("gate", "gate", "the review it was frozen for"),
    ),
    "approval": (("decision", "decision", "closed or kept open"),),
}


def holds_many(noun: Noun, field: str) -> bool:
    """Return whether a link field holds a tuple of codes rather than one."""
    return get_origin(noun.document.model_fields[field].annotation) is tuple


def _may_be_none(noun: Noun, field: str) -> bool:
    return NoneType in get_args(noun.document.model_fields[field].annotation)


def _link_column(noun: Noun, field: str, target: str) -> Column[int]:
    # Within one table a document may be stored before the one it points to, so those links are looked at last.
    itself = target == noun.name
    return Column(
        f"{field}_pk",
        ForeignKey(f"{target}.pk", deferrable=itself or None, initially="DEFERRED" if itself else None),
        nullable=_may_be_none(noun, field),
        index=True,
        comment=f"{field}: key of the {target} row",
    )


def _noun_table(noun: Noun) -> Table:
    links = [_link_column(noun, field, target) for field, target in noun.links if not holds_many(noun, field)]
    attributes = [
        Column(name, Text, nullable=False, comment=f"{comment} (copied from body)")
        for name, _, comment in ATTRIBUTES.get(noun.name, ())
    ]
    return Table(
        noun.name,
        metadata,
        Column(
            "pk",
            Integer,
            primary_key=True,
            autoincrement=False,
            comment="joins tables; never leaves the store",
        ),
        Column("code", Text, nullable=False, comment="the id people use, NFC"),
        Column(
            "code_key", Text, nullable=False, unique=True, comment="the id without case: what makes it unique"
        ),
        Column("revision", Integer, nullable=False, comment="revision of the document"),
        *links,
        *attributes,
        Column("changed_at", Integer, nullable=False, comment="project revision of the last change"),
        Column("removed_at", Integer, comment="project revision that removed it; the id is never used again"),
        Column("body", Text, nullable=False, comment="the document: JSON payload with its format number"),
        comment=f"one row for each {noun.title}",
    )


def _link_table(noun: Noun, field: str, target: str) -> Table:
    return Table(
        f"{noun.name}_{field}",
        metadata,
        Column("pk", ForeignKey(f"{noun.name}.pk"), primary_key=True, comment=f"key of the {noun.name} row"),
        Column(
            "position",
            Integer,
            primary_key=True,
            autoincrement=False,
            comment="order within the field, from 0",
        ),
        Column(
            "target_pk",
            ForeignKey(f"{target}.pk"),
            nullable=False,
            index=True,
            comment=f"key of the {target} row",
        ),
        comment=f"{field} of each {noun.title}",
    )


TABLES: dict[str, Table] = {noun.name: _noun_table(noun) for noun in NOUNS}

LINK_TABLES: dict[tuple[str, str], Table] = {
    (noun.name, field): _link_table(noun, field, target)
    for noun in NOUNS
    for field, target in noun.links
    if holds_many(noun, field)
}

project_state = Table(
    "project_state",
    metadata,
    Column("pk", Integer, primary_key=True, autoincrement=False, comment="always 1: there is one row"),
    Column("uuid", Text, nullable=False, comment="tells this project from copies of others"),
    Column("created_at", Text, nullable=False, comment="UTC, ISO 8601"),
    Column("revision", Integer, nullable=False, comment="grows by one with every accepted set of changes"),
    comment="what is true of the project as a whole",
)

history = Table(
    "history",
    metadata,
    Column("pk", Integer, primary_key=True, autoincrement=False, comment="order of the changes"),
    Column(
        "project_revision", Integer, nullable=False, index=True, comment="project revision the change made"
    ),
    Column("at", Text, nullable=False, comment="when: UTC, ISO 8601"),
    Column("by", Text, nullable=False, comment="who accepted the change"),
    Column("reason", Text, nullable=False, comment="why, in words"),
    Column("noun", Text, nullable=False, comment="noun of the document"),
    Column("code", Text, nullable=False, comment="id of the document"),
    Column("code_key", Text, nullable=False, index=True, comment="the id without case"),
    Column("action", Text, nullable=False, comment="add, edit or remove"),
    Column("base_revision", Integer, comment="revision of the document that the change was made from"),
    Column("fields", Text, nullable=False, comment="fields that differ, with what it means: JSON list"),
    Column("before", Text, comment="payload before, JSON; null for an added document"),
    Column("after", Text, comment="payload after, JSON; null for a removed document"),
    comment="every change ever accepted; rows are only added",
)

evidence_column = Table(
    "evidence_column",
    metadata,
    Column(
        "evidence_table_pk",
        ForeignKey("evidence_table.pk"),
        primary_key=True,
        comment="key of the evidence_table row",
    ),
    Column(
        "position", Integer, primary_key=True, autoincrement=False, comment="order within the table, from 0"
    ),
    Column(
        "role",
        Text,
        nullable=False,
        comment="condition, low, high, u, source_row, item, date or extra",
    ),
    Column(
        "name",
        Text,
        nullable=False,
        comment="dimension, value column or extra column; empty where role says all",
    ),
    Column("unit", Text, nullable=False, comment="unit of a numeric condition"),
    Column("dtype", Text, nullable=False, comment="<f8: float64, <i4: int32 (numbers, or codes into labels)"),
    Column("labels", Text, comment="words that the codes stand for, JSON list; null for numbers"),
    Column("rows", Integer, nullable=False, comment="number of entries"),
    Column("sha256", Text, nullable=False, comment="digest of data, hexadecimal"),
    Column("data", LargeBinary, nullable=False, comment="the entries, little-endian"),
    UniqueConstraint("evidence_table_pk", "role", "name"),
    comment="the arrays of evidence tables, one row a column",
)

file_copy = Table(
    "file_copy",
    metadata,
    Column(
        "evidence_file_pk",
        ForeignKey("evidence_file.pk"),
        primary_key=True,
        comment="key of the evidence_file row",
    ),
    Column("data", LargeBinary, nullable=False, comment="the bytes as received"),
    comment="kept copies of evidence files, where one was wanted",
)

baseline_content = Table(
    "baseline_content",
    metadata,
    Column("baseline_pk", ForeignKey("baseline.pk"), primary_key=True, comment="key of the baseline row"),
    Column("data", LargeBinary, nullable=False, comment="canonical bytes of the frozen project"),
    comment="what baselines froze",
)
