"""People, tablets, registers, sheets and pictures, and the fences around what is received."""

from __future__ import annotations

import sqlalchemy as sa
from alembic import op

from fieldkit.store.fences import triggers

revision = "0001"
down_revision = None
branch_labels = None
depends_on = None

FENCED = ("sources", "sheets", "blobs", "pictures")
KEPT = ("people", "person_keys", "devices")


def upgrade() -> None:
    op.create_table(
        "blobs",
        sa.Column("sha256", sa.String(length=64), nullable=False),
        sa.Column("media", sa.String(length=80), nullable=False),
        sa.Column("data", sa.LargeBinary(), nullable=False),
        sa.PrimaryKeyConstraint("sha256"),
    )
    op.create_table(
        "devices",
        sa.Column("id", sa.String(length=64), nullable=False),
        sa.Column("name", sa.String(length=120), nullable=False),
        sa.Column("jwk", sa.Text(), nullable=False),
        sa.Column("status", sa.String(length=16), nullable=False),
        sa.Column("created", sa.String(length=32), nullable=False),
        sa.Column("revoked", sa.String(length=32), nullable=True),
        sa.Column("revoked_why", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id"),
    )
    op.create_table(
        "instruments",
        sa.Column("id", sa.String(length=64), nullable=False),
        sa.Column("data", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id"),
    )
    op.create_table(
        "misses",
        sa.Column("key", sa.String(length=200), nullable=False),
        sa.Column("count", sa.Integer(), nullable=False),
        sa.Column("last", sa.String(length=32), nullable=False),
        sa.PrimaryKeyConstraint("key"),
    )
    op.create_table(
        "people",
        sa.Column("id", sa.String(length=32), nullable=False),
        sa.Column("login", sa.String(length=64), nullable=False),
        sa.Column("name", sa.String(length=120), nullable=False),
        sa.Column("roles", sa.Text(), nullable=False),
        sa.Column("password", sa.Text(), nullable=False),
        sa.Column("active", sa.Boolean(), nullable=False),
        sa.Column("created", sa.String(length=32), nullable=False),
        sa.PrimaryKeyConstraint("id"),
        sa.UniqueConstraint("login"),
    )
    op.create_table(
        "pictures",
        sa.Column("sha256", sa.String(length=64), nullable=False),
        sa.Column("original", sa.LargeBinary(), nullable=False),
        sa.Column("data", sa.LargeBinary(), nullable=False),
        sa.Column("data_sha256", sa.String(length=64), nullable=False),
        sa.Column("media", sa.String(length=40), nullable=False),
        sa.Column("width", sa.Integer(), nullable=False),
        sa.Column("height", sa.Integer(), nullable=False),
        sa.Column("source", sa.String(length=64), nullable=False),
        sa.Column("received", sa.String(length=32), nullable=False),
        sa.PrimaryKeyConstraint("sha256"),
    )
    op.create_table(
        "settings",
        sa.Column("name", sa.String(length=64), nullable=False),
        sa.Column("value", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("name"),
    )
    op.create_table(
        "sites",
        sa.Column("id", sa.String(length=64), nullable=False),
        sa.Column("data", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id"),
    )
    op.create_table(
        "sources",
        sa.Column("sha256", sa.String(length=64), nullable=False),
        sa.Column("procedure", sa.String(length=120), nullable=False),
        sa.Column("data", sa.LargeBinary(), nullable=False),
        sa.Column("added", sa.String(length=32), nullable=False),
        sa.PrimaryKeyConstraint("sha256"),
    )
    op.create_table(
        "cabinets",
        sa.Column("id", sa.String(length=64), nullable=False),
        sa.Column("site", sa.String(length=64), nullable=False),
        sa.Column("data", sa.Text(), nullable=False),
        sa.ForeignKeyConstraint(
            ["site"],
            ["sites.id"],
        ),
        sa.PrimaryKeyConstraint("id"),
    )
    op.create_table(
        "enrolments",
        sa.Column("id", sa.String(length=40), nullable=False),
        sa.Column("person", sa.String(length=32), nullable=False),
        sa.Column("device", sa.String(length=64), nullable=True),
        sa.Column("person_jwk", sa.Text(), nullable=False),
        sa.Column("proof", sa.Text(), nullable=False),
        sa.Column("status", sa.String(length=16), nullable=False),
        sa.Column("created", sa.String(length=32), nullable=False),
        sa.Column("decided", sa.String(length=32), nullable=True),
        sa.Column("decided_by", sa.String(length=32), nullable=True),
        sa.Column("note", sa.Text(), nullable=False),
        sa.Column("kid", sa.String(length=64), nullable=True),
        sa.ForeignKeyConstraint(
            ["decided_by"],
            ["people.id"],
        ),
        sa.ForeignKeyConstraint(
            ["device"],
            ["devices.id"],
        ),
        sa.ForeignKeyConstraint(
            ["person"],
            ["people.id"],
        ),
        sa.PrimaryKeyConstraint("id"),
    )
    op.create_index(op.f("ix_enrolments_status"), "enrolments", ["status"], unique=False)
    op.create_table(
        "person_keys",
        sa.Column("kid", sa.String(length=64), nullable=False),
        sa.Column("person", sa.String(length=32), nullable=False),
        sa.Column("device", sa.String(length=64), nullable=True),
        sa.Column("certificate", sa.Text(), nullable=False),
        sa.Column("jwk", sa.Text(), nullable=False),
        sa.Column("issued", sa.String(length=32), nullable=False),
        sa.Column("revoked", sa.String(length=32), nullable=True),
        sa.ForeignKeyConstraint(
            ["device"],
            ["devices.id"],
        ),
        sa.ForeignKeyConstraint(
            ["person"],
            ["people.id"],
        ),
        sa.PrimaryKeyConstraint("kid"),
    )
    op.create_index(op.f("ix_person_keys_person"), "person_keys", ["person"], unique=False)
    op.create_table(
        "sessions",
        sa.Column("id", sa.String(length=64), nullable=False),
        sa.Column("person", sa.String(length=32), nullable=False),
        sa.Column("created", sa.String(length=32), nullable=False),
        sa.Column("seen", sa.String(length=32), nullable=False),
        sa.ForeignKeyConstraint(
            ["person"],
            ["people.id"],
        ),
        sa.PrimaryKeyConstraint("id"),
    )
    op.create_index(op.f("ix_sessions_person"), "sessions", ["person"], unique=False)
    op.create_table(
        "sheets",
        sa.Column("sha256", sa.String(length=64), nullable=False),
        sa.Column("procedure", sa.String(length=120), nullable=False),
        sa.Column("edition", sa.Integer(), nullable=False),
        sa.Column("source", sa.String(length=64), nullable=False),
        sa.Column("data", sa.LargeBinary(), nullable=False),
        sa.Column("added", sa.String(length=32), nullable=False),
        sa.ForeignKeyConstraint(
            ["source"],
            ["sources.sha256"],
        ),
        sa.PrimaryKeyConstraint("sha256"),
    )
    op.create_index(op.f("ix_sheets_procedure"), "sheets", ["procedure"], unique=False)
    op.create_table(
        "releases",
        sa.Column("procedure", sa.String(length=120), nullable=False),
        sa.Column("sheet", sa.String(length=64), nullable=False),
        sa.Column("proved", sa.Boolean(), nullable=False),
        sa.Column("released", sa.String(length=32), nullable=False),
        sa.Column("released_by", sa.String(length=32), nullable=False),
        sa.ForeignKeyConstraint(
            ["sheet"],
            ["sheets.sha256"],
        ),
        sa.PrimaryKeyConstraint("procedure"),
    )
    op.create_table(
        "tubes",
        sa.Column("id", sa.String(length=64), nullable=False),
        sa.Column("cabinet", sa.String(length=64), nullable=True),
        sa.Column("data", sa.Text(), nullable=False),
        sa.ForeignKeyConstraint(
            ["cabinet"],
            ["cabinets.id"],
        ),
        sa.PrimaryKeyConstraint("id"),
    )
    op.create_table(
        "nameplates",
        sa.Column("id", sa.Integer(), autoincrement=True, nullable=False),
        sa.Column("tube", sa.String(length=64), nullable=False),
        sa.Column("values", sa.Text(), nullable=False),
        sa.Column("photograph", sa.String(length=64), nullable=True),
        sa.Column("entered_by", sa.String(length=32), nullable=False),
        sa.Column("entered", sa.String(length=32), nullable=False),
        sa.Column("second_by", sa.String(length=32), nullable=True),
        sa.Column("second", sa.String(length=32), nullable=True),
        sa.Column("state", sa.String(length=16), nullable=False),
        sa.Column("note", sa.Text(), nullable=False),
        sa.ForeignKeyConstraint(
            ["entered_by"],
            ["people.id"],
        ),
        sa.ForeignKeyConstraint(
            ["photograph"],
            ["pictures.sha256"],
        ),
        sa.ForeignKeyConstraint(
            ["second_by"],
            ["people.id"],
        ),
        sa.ForeignKeyConstraint(
            ["tube"],
            ["tubes.id"],
        ),
        sa.PrimaryKeyConstraint("id"),
    )
    op.create_index(op.f("ix_nameplates_tube"), "nameplates", ["tube"], unique=False)
    for statement in triggers(op.get_bind().dialect.name, FENCED, KEPT):
        op.execute(statement)
