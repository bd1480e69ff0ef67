"""Runs, events, receipts, records, and the fences around what is received."""

from __future__ import annotations

import sqlalchemy as sa
from alembic import op

from fieldkit.store.fences import triggers

revision = "0002"
down_revision = "0001"
branch_labels = None
depends_on = None

FENCED = ("events", "receipts", "signatures", "returns", "notices")
KEPT = ("kept", "records", "runs")


def upgrade() -> None:
    op.create_table(
        "events",
        sa.Column("run", sa.String(length=80), nullable=False),
        sa.Column("chain", sa.String(length=160), nullable=False),
        sa.Column("seq", sa.Integer(), nullable=False),
        sa.Column("sha256", sa.String(length=64), nullable=False),
        sa.Column("kind", sa.String(length=32), nullable=False),
        sa.Column("by", sa.String(length=32), nullable=False),
        sa.Column("data", sa.LargeBinary(), nullable=False),
        sa.Column("received", sa.String(length=32), nullable=False),
        sa.PrimaryKeyConstraint("run", "chain", "seq"),
        sa.UniqueConstraint("sha256"),
    )
    op.create_table(
        "kept",
        sa.Column("id", sa.Integer(), autoincrement=True, nullable=False),
        sa.Column("run", sa.String(length=80), nullable=False),
        sa.Column("chain", sa.String(length=160), nullable=False),
        sa.Column("seq", sa.Integer(), nullable=True),
        sa.Column("sha256", sa.String(length=64), nullable=False),
        sa.Column("code", sa.String(length=40), nullable=False),
        sa.Column("says", sa.Text(), nullable=False),
        sa.Column("data", sa.LargeBinary(), nullable=False),
        sa.Column("device", sa.String(length=64), nullable=False),
        sa.Column("received", sa.String(length=32), nullable=False),
        sa.Column("settled", sa.String(length=32), nullable=True),
        sa.PrimaryKeyConstraint("id"),
        sa.UniqueConstraint("run", "chain", "sha256", "code"),
    )
    op.create_index(op.f("ix_kept_run"), "kept", ["run"], unique=False)
    op.create_table(
        "notices",
        sa.Column("id", sa.Integer(), autoincrement=True, nullable=False),
        sa.Column("code", sa.String(length=40), nullable=False),
        sa.Column("says", sa.Text(), nullable=False),
        sa.Column("about", sa.String(length=200), nullable=False),
        sa.Column("time", sa.String(length=32), nullable=False),
        sa.PrimaryKeyConstraint("id"),
    )
    op.create_table(
        "pending",
        sa.Column("run", sa.String(length=80), nullable=False),
        sa.Column("chain", sa.String(length=160), nullable=False),
        sa.Column("seq", sa.Integer(), nullable=False),
        sa.Column("sha256", sa.String(length=64), nullable=False),
        sa.Column("data", sa.LargeBinary(), nullable=False),
        sa.Column("received", sa.String(length=32), nullable=False),
        sa.PrimaryKeyConstraint("run", "chain", "seq"),
    )
    op.create_table(
        "receipts",
        sa.Column("run", sa.String(length=80), nullable=False),
        sa.Column("chain", sa.String(length=160), nullable=False),
        sa.Column("seq", sa.Integer(), nullable=False),
        sa.Column("store", sa.String(length=64), nullable=False),
        sa.Column("head", sa.String(length=64), nullable=False),
        sa.Column("jws", sa.Text(), nullable=False),
        sa.Column("time", sa.String(length=32), nullable=False),
        sa.PrimaryKeyConstraint("run", "chain", "seq", "store"),
    )
    op.create_table(
        "run_pictures",
        sa.Column("run", sa.String(length=80), nullable=False),
        sa.Column("sha256", sa.String(length=64), nullable=False),
        sa.Column("seq", sa.Integer(), nullable=False),
        sa.PrimaryKeyConstraint("run", "sha256"),
    )
    op.create_index("ix_run_pictures_sha256", "run_pictures", ["sha256"], unique=False)
    op.create_table(
        "signatures",
        sa.Column("run", sa.String(length=80), nullable=False),
        sa.Column("chain", sa.String(length=160), nullable=False),
        sa.Column("seq", sa.Integer(), nullable=False),
        sa.Column("person", sa.String(length=32), nullable=False),
        sa.Column("meaning", sa.String(length=32), nullable=False),
        sa.Column("kid", sa.String(length=64), nullable=False),
        sa.Column("holds", sa.Boolean(), nullable=False),
        sa.Column("says", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("run", "chain", "seq"),
    )
    op.create_table(
        "chains",
        sa.Column("run", sa.String(length=80), nullable=False),
        sa.Column("id", sa.String(length=160), nullable=False),
        sa.Column("device", sa.String(length=64), nullable=False),
        sa.Column("seq", sa.Integer(), nullable=False),
        sa.Column("head", sa.String(length=64), nullable=False),
        sa.Column("alarm", sa.Text(), nullable=False),
        sa.ForeignKeyConstraint(
            ["device"],
            ["devices.id"],
        ),
        sa.PrimaryKeyConstraint("run", "id"),
    )
    op.create_table(
        "runs",
        sa.Column("id", sa.String(length=80), nullable=False),
        sa.Column("chain", sa.String(length=160), nullable=False),
        sa.Column("device", sa.String(length=64), nullable=False),
        sa.Column("sheet", sa.String(length=64), nullable=False),
        sa.Column("procedure", sa.String(length=120), nullable=False),
        sa.Column("edition", sa.Integer(), nullable=False),
        sa.Column("site", sa.String(length=64), nullable=False),
        sa.Column("cabinet", sa.String(length=64), nullable=False),
        sa.Column("tube", sa.String(length=64), nullable=False),
        sa.Column("recorder", sa.String(length=32), nullable=False),
        sa.Column("started", sa.String(length=40), nullable=False),
        sa.Column("rehearsal", sa.Boolean(), nullable=False),
        sa.Column("phase", sa.String(length=16), nullable=False),
        sa.Column("ended", sa.String(length=40), nullable=True),
        sa.Column("ended_seq", sa.Integer(), nullable=True),
        sa.Column("signed_seq", sa.Integer(), nullable=True),
        sa.ForeignKeyConstraint(
            ["device"],
            ["devices.id"],
        ),
        sa.PrimaryKeyConstraint("id"),
    )
    op.create_index(op.f("ix_runs_cabinet"), "runs", ["cabinet"], unique=False)
    op.create_index(op.f("ix_runs_procedure"), "runs", ["procedure"], unique=False)
    op.create_index(op.f("ix_runs_tube"), "runs", ["tube"], unique=False)
    op.create_table(
        "preparations",
        sa.Column("id", sa.String(length=40), nullable=False),
        sa.Column("run", sa.String(length=80), nullable=False),
        sa.Column("person", sa.String(length=32), nullable=False),
        sa.Column("kid", sa.String(length=64), nullable=False),
        sa.Column("head", sa.String(length=64), nullable=False),
        sa.Column("record", sa.LargeBinary(), nullable=False),
        sa.Column("pdf", sa.LargeBinary(), nullable=False),
        sa.Column("state", sa.LargeBinary(), nullable=False),
        sa.Column("created", sa.String(length=32), nullable=False),
        sa.ForeignKeyConstraint(
            ["person"],
            ["people.id"],
        ),
        sa.ForeignKeyConstraint(
            ["run"],
            ["runs.id"],
        ),
        sa.PrimaryKeyConstraint("id"),
    )
    op.create_table(
        "records",
        sa.Column("run", sa.String(length=80), nullable=False),
        sa.Column("state", sa.String(length=16), nullable=False),
        sa.Column("since", sa.String(length=32), nullable=False),
        sa.Column("record", sa.LargeBinary(), nullable=True),
        sa.Column("pdf", sa.LargeBinary(), nullable=True),
        sa.Column("pdf_sha256", sa.String(length=64), nullable=True),
        sa.Column("countersigned_by", sa.String(length=32), nullable=True),
        sa.Column("countersigned", sa.String(length=32), nullable=True),
        sa.ForeignKeyConstraint(
            ["countersigned_by"],
            ["people.id"],
        ),
        sa.ForeignKeyConstraint(
            ["run"],
            ["runs.id"],
        ),
        sa.PrimaryKeyConstraint("run"),
    )
    op.create_index(op.f("ix_records_state"), "records", ["state"], unique=False)
    op.create_table(
        "returns",
        sa.Column("id", sa.Integer(), autoincrement=True, nullable=False),
        sa.Column("run", sa.String(length=80), nullable=False),
        sa.Column("by", sa.String(length=32), nullable=False),
        sa.Column("reason", sa.Text(), nullable=False),
        sa.Column("seq", sa.Integer(), nullable=False),
        sa.Column("time", sa.String(length=32), nullable=False),
        sa.ForeignKeyConstraint(
            ["by"],
            ["people.id"],
        ),
        sa.ForeignKeyConstraint(
            ["run"],
            ["runs.id"],
        ),
        sa.PrimaryKeyConstraint("id"),
    )
    op.create_index(op.f("ix_returns_run"), "returns", ["run"], unique=False)
    for statement in triggers(op.get_bind().dialect.name, FENCED, KEPT):
        op.execute(statement)
