"""The first schema: a table a noun, links, arrays of evidence, history.

Released migrations are never edited, and never import specflow: history must not change when the code does.
"""

import sqlalchemy as sa
from alembic import op

revision = "0001"
down_revision = None
branch_labels = None
depends_on = None


def upgrade() -> None:
    create_noun_tables()
    create_other_tables()


def create_noun_tables() -> None:
    noun_table(
        "project",
        "project",
        attribute("name", "what the project is called"),
    )
    noun_table(
        "parameter",
        "parameter",
        attribute("title", "the parameter in words"),
        attribute("unit", "canonical unit"),
    )
    noun_table(
        "block",
        "block",
        link("block", "parent", "block", itself=True),
        attribute("name", "the block in words"),
        attribute("tier", "system, assembly or block"),
        attribute("owner", "who answers for the block"),
    )
    noun_table(
        "item",
        "item",
        link("item", "block", "block", nullable=False),
        link("item", "built_into", "item", itself=True),
        attribute("serial", "serial number"),
        attribute("hardware_type", "breadboard, engineering, qualification or production"),
    )
    noun_table(
        "conditions_set",
        "conditions set",
        attribute("title", "the conditions set in words"),
    )
    noun_table(
        "condition_map",
        "condition map",
        link("condition_map", "block", "block"),
    )
    noun_table(
        "declared_value",
        "declared value",
        attribute("name", "how limits refer to the value"),
    )
    noun_table(
        "uncertainty",
        "uncertainty register line",
        attribute("set_up", "the measurement set-up"),
        attribute("parameter", "key of the parameter it is for"),
    )
    noun_table(
        "requirement",
        "requirement",
        link("requirement", "block", "block", nullable=False),
        link("requirement", "conditions", "conditions_set"),
        attribute("title", "the requirement in a few words"),
        attribute("tier", "system, assembly or block"),
        attribute("owner", "who answers for the requirement"),
        attribute("parameter", "key of the parameter that is limited"),
        attribute("limit_text", "the limit as typed"),
    )
    link_table("requirement", "requirement", "parents", "requirement")
    noun_table(
        "activity",
        "activity",
        link("activity", "requirement", "requirement", nullable=False),
        attribute("method", "verification method"),
        attribute("stage", "verification stage"),
        attribute("tier", "tier at which it is done"),
    )
    noun_table(
        "budget",
        "budget",
        link("budget", "conditions", "conditions_set"),
        attribute("title", "the budget in words"),
        attribute("law", "how contributions combine"),
    )
    link_table("budget", "budget", "requirements", "requirement")
    noun_table(
        "allocation",
        "allocation",
        link("allocation", "parent", "requirement", nullable=False),
        link("allocation", "child", "requirement", nullable=False),
        link("allocation", "budget", "budget"),
        attribute("state", "proposed, agreed or baselined"),
    )
    noun_table(
        "mapping",
        "mapping",
        attribute("title", "the layout in words"),
        attribute("layout_key", "shape of the layout"),
    )
    noun_table(
        "evidence_file",
        "evidence file",
        attribute("name", "file name as received"),
        attribute("sha256", "digest of the bytes as received, hexadecimal"),
    )
    noun_table(
        "evidence_table",
        "evidence table",
        link("evidence_table", "file", "evidence_file", nullable=False),
        link("evidence_table", "block", "block", nullable=False),
        link("evidence_table", "requirement", "requirement"),
        link("evidence_table", "mapping", "mapping"),
        attribute("sheet", "sheet of the file"),
        attribute("title", "title found above the table"),
        attribute("method", "verification method"),
        attribute("stage", "verification stage"),
    )
    noun_table(
        "supersession",
        "supersession",
        link("supersession", "earlier", "evidence_table", nullable=False),
        link("supersession", "later", "evidence_table", nullable=False),
    )
    noun_table(
        "withdrawal",
        "withdrawal",
        link("withdrawal", "table", "evidence_table", nullable=False),
    )
    noun_table(
        "item_change",
        "change record",
        link("item_change", "block", "block", nullable=False),
        link("item_change", "item", "item"),
    )
    noun_table(
        "nonconformance",
        "nonconformance",
        link("nonconformance", "requirement", "requirement"),
        link("nonconformance", "table", "evidence_table"),
        attribute("state", "open or closed"),
    )
    noun_table(
        "waiver",
        "waiver",
        link("waiver", "requirement", "requirement", nullable=False),
        link("waiver", "nonconformance", "nonconformance"),
        attribute("state", "requested, approved, rejected, lapsed or closed"),
    )
    noun_table(
        "disposition",
        "disposition",
        attribute("rule", "the rule that reported"),
        attribute("subject", "id it was reported about"),
    )
    noun_table(
        "declared_split",
        "declared split",
        link("declared_split", "requirement", "requirement", nullable=False),
    )
    noun_table(
        "baseline",
        "baseline",
        attribute("title", "the baseline in words"),
        attribute("gate", "the review it was frozen for"),
    )
    noun_table(
        "approval",
        "approval",
        link("approval", "requirement", "requirement", nullable=False),
        link("approval", "baseline", "baseline"),
        attribute("decision", "closed or kept open"),
    )


def create_other_tables() -> None:
    op.create_table(
        "project_state",
        sa.Column("pk", sa.Integer, autoincrement=False, comment="always 1: there is one row"),
        text("uuid", "tells this project from copies of others"),
        text("created_at", "UTC, ISO 8601"),
        integer("revision", "grows by one with every accepted set of changes"),
        sa.PrimaryKeyConstraint("pk", name="pk_project_state"),
        comment="what is true of the project as a whole",
    )
    op.create_table(
        "history",
        sa.Column("pk", sa.Integer, autoincrement=False, comment="order of the changes"),
        integer("project_revision", "project revision the change made"),
        text("at", "when: UTC, ISO 8601"),
        text("by", "who accepted the change"),
        text("reason", "why, in words"),
        text("noun", "noun of the document"),
        text("code", "id of the document"),
        text("code_key", "the id without case"),
        text("action", "add, edit or remove"),
        integer("base_revision", "revision of the document that the change was made from", nullable=True),
        text("fields", "fields that differ, with what it means: JSON list"),
        text("before", "payload before, JSON; null for an added document", nullable=True),
        text("after", "payload after, JSON; null for a removed document", nullable=True),
        sa.PrimaryKeyConstraint("pk", name="pk_history"),
        comment="every change ever accepted; rows are only added",
    )
    op.create_index("ix_history_project_revision", "history", ["project_revision"])
    op.create_index("ix_history_code_key", "history", ["code_key"])
    op.create_table(
        "evidence_column",
        integer("evidence_table_pk", "key of the evidence_table row"),
        sa.Column(
            "position",
            sa.Integer,
            autoincrement=False,
            nullable=False,
            comment="order within the table, from 0",
        ),
        text("role", "condition, low, high, u, source_row, item, date or extra"),
        text("name", "dimension, value column or extra column; empty where role says all"),
        text("unit", "unit of a numeric condition"),
        text("dtype", "<f8: float64, <i4: int32 (numbers, or codes into labels)"),
        text("labels", "words that the codes stand for, JSON list; null for numbers", nullable=True),
        integer("rows", "number of entries"),
        text("sha256", "digest of data, hexadecimal"),
        data("the entries, little-endian"),
        sa.PrimaryKeyConstraint("evidence_table_pk", "position", name="pk_evidence_column"),
        foreign_key("evidence_column", "evidence_table_pk", "evidence_table"),
        sa.UniqueConstraint(
            "evidence_table_pk", "role", "name", name="uq_evidence_column_evidence_table_pk_role_name"
        ),
        comment="the arrays of evidence tables, one row a column",
    )
    op.create_table(
        "file_copy",
        integer("evidence_file_pk", "key of the evidence_file row"),
        data("the bytes as received"),
        sa.PrimaryKeyConstraint("evidence_file_pk", name="pk_file_copy"),
        foreign_key("file_copy", "evidence_file_pk", "evidence_file"),
        comment="kept copies of evidence files, where one was wanted",
    )
    op.create_table(
        "baseline_content",
        integer("baseline_pk", "key of the baseline row"),
        data("canonical bytes of the frozen project"),
        sa.PrimaryKeyConstraint("baseline_pk", name="pk_baseline_content"),
        foreign_key("baseline_content", "baseline_pk", "baseline"),
        comment="what baselines froze",
    )


def noun_table(name: str, title: str, *columns: sa.Column) -> None:
    """Create the table of a noun, with the columns that all of them have."""
    op.create_table(
        name,
        sa.Column("pk", sa.Integer, autoincrement=False, comment="joins tables; never leaves the store"),
        text("code", "the id people use, NFC"),
        text("code_key", "the id without case: what makes it unique"),
        integer("revision", "revision of the document"),
        *columns,
        integer("changed_at", "project revision of the last change"),
        integer("removed_at", "project revision that removed it; the id is never used again", nullable=True),
        text("body", "the document: JSON payload with its format number"),
        sa.PrimaryKeyConstraint("pk", name=f"pk_{name}"),
        sa.UniqueConstraint("code_key", name=f"uq_{name}_code_key"),
        comment=f"one row for each {title}",
    )
    for column in columns:
        if column.name.endswith("_pk"):
            op.create_index(f"ix_{name}_{column.name}", name, [column.name])


def link_table(name: str, title: str, field: str, target: str) -> None:
    """Create the table of a link field that holds several codes."""
    table = f"{name}_{field}"
    op.create_table(
        table,
        integer("pk", f"key of the {name} row"),
        sa.Column(
            "position",
            sa.Integer,
            autoincrement=False,
            nullable=False,
            comment="order within the field, from 0",
        ),
        integer("target_pk", f"key of the {target} row"),
        sa.PrimaryKeyConstraint("pk", "position", name=f"pk_{table}"),
        foreign_key(table, "pk", name),
        foreign_key(table, "target_pk", target),
        comment=f"{field} of each {title}",
    )
    op.create_index(f"ix_{table}_target_pk", table, ["target_pk"])


def link(table: str, field: str, target: str, *, nullable: bool = True, itself: bool = False) -> sa.Column:
    """Return the column of a link field that holds one code."""
    points_to = sa.ForeignKey(
        f"{target}.pk",
        name=f"fk_{table}_{field}_pk",
        deferrable=itself or None,
        initially="DEFERRED" if itself else None,
    )
    return sa.Column(
        f"{field}_pk", sa.Integer, points_to, nullable=nullable, comment=f"{field}: key of the {target} row"
    )


def attribute(name: str, comment: str) -> sa.Column:
    """Return the column of an attribute kept for whoever browses the database."""
    return text(name, f"{comment} (copied from body)")


def text(name: str, comment: str, *, nullable: bool = False) -> sa.Column:
    """Return a column of text."""
    return sa.Column(name, sa.Text, nullable=nullable, comment=comment)


def integer(name: str, comment: str, *, nullable: bool = False) -> sa.Column:
    """Return a column of whole numbers."""
    return sa.Column(name, sa.Integer, nullable=nullable, comment=comment)


def data(comment: str) -> sa.Column:
    """Return the column ``data``, of bytes."""
    return sa.Column("data", sa.LargeBinary, nullable=False, comment=comment)


def foreign_key(table: str, column: str, target: str) -> sa.ForeignKeyConstraint:
    """Return a foreign key by the naming convention."""
    return sa.ForeignKeyConstraint([column], [f"{target}.pk"], name=f"fk_{table}_{column}")


def downgrade() -> None:
    for table in (
        "baseline_content",
        "file_copy",
        "evidence_column",
        "history",
        "project_state",
        "budget_requirements",
        "requirement_parents",
        "approval",
        "baseline",
        "declared_split",
        "disposition",
        "waiver",
        "nonconformance",
        "item_change",
        "withdrawal",
        "supersession",
        "evidence_table",
        "evidence_file",
        "mapping",
        "allocation",
        "budget",
        "activity",
        "requirement",
        "uncertainty",
        "declared_value",
        "condition_map",
        "conditions_set",
        "item",
        "block",
        "parameter",
        "project",
    ):
        op.drop_table(table)
