"""Corrections by name, and derivations: results that a law made of raw tables.

Nothing of the first schema changes; older projects gain three empty tables.
"""

import sqlalchemy as sa
from alembic import op

revision = "0002"
down_revision = "0001"
branch_labels = None
depends_on = None


def upgrade() -> None:
    op.create_table(
        "correction",
        *leading_columns(),
        text("set_up", "the measurement set-up (copied from body)"),
        *trailing_columns("correction"),
        comment="one row for each correction table",
    )
    op.create_table(
        "derivation",
        *leading_columns(),
        sa.Column(
            "again_of_pk",
            sa.Integer,
            sa.ForeignKey(
                "derivation.pk", name="fk_derivation_again_of_pk", deferrable=True, initially="DEFERRED"
            ),
            nullable=True,
            comment="again_of: key of the derivation row",
        ),
        text("law", "the law that was applied (copied from body)"),
        text("parameter", "key of the parameter that it gives (copied from body)"),
        *trailing_columns("derivation"),
        comment="one row for each derivation",
    )
    op.create_index("ix_derivation_again_of_pk", "derivation", ["again_of_pk"])
    op.create_table(
        "derivation_inputs",
        integer("pk", "key of the derivation row"),
        sa.Column(
            "position",
            sa.Integer,
            autoincrement=False,
            nullable=False,
            comment="order within the field, from 0",
        ),
        integer("target_pk", "key of the evidence_table row"),
        sa.PrimaryKeyConstraint("pk", "position", name="pk_derivation_inputs"),
        sa.ForeignKeyConstraint(["pk"], ["derivation.pk"], name="fk_derivation_inputs_pk"),
        sa.ForeignKeyConstraint(["target_pk"], ["evidence_table.pk"], name="fk_derivation_inputs_target_pk"),
        comment="inputs of each derivation",
    )
    op.create_index("ix_derivation_inputs_target_pk", "derivation_inputs", ["target_pk"])


def downgrade() -> None:
    for table in ("derivation_inputs", "derivation", "correction"):
        op.drop_table(table)


def leading_columns() -> list[sa.Column]:
    """Return the columns that the table of every noun begins with."""
    return [
        sa.Column("pk", sa.Integer, autoincrement=False, comment="joins tables; never leaves the store"),
        text("code", "the id people use, NFC"),
        text("code_key", "the id without case: what makes it unique"),
        integer("revision", "revision of the document"),
    ]


def trailing_columns(name: str) -> list[sa.schema.SchemaItem]:
    """Return the columns that the table of every noun ends with, and its constraints."""
    return [
        integer("changed_at", "project revision of the last change"),
        integer("removed_at", "project revision that removed it; the id is never used again", nullable=True),
        text("body", "the document: JSON payload with its format number"),
        sa.PrimaryKeyConstraint("pk", name=f"pk_{name}"),
        sa.UniqueConstraint("code_key", name=f"uq_{name}_code_key"),
    ]


def text(name: str, comment: str) -> sa.Column:
    """Return a column of text."""
    return sa.Column(name, sa.Text, nullable=False, comment=comment)


def integer(name: str, comment: str, *, nullable: bool = False) -> sa.Column:
    """Return a column of whole numbers."""
    return sa.Column(name, sa.Integer, nullable=nullable, comment=comment)
