"""Alembic's entry: runs the steps on the engine that fieldkit.store.migrate hands over, in one transaction."""

from __future__ import annotations

from alembic import context

from fieldkit.store import tables
from fieldkit.store.db import db

engine = context.config.attributes["engine"]

with engine.connect().execution_options(fieldkit_write=True) as connection:
    context.configure(connection=connection, target_metadata=db.metadata, transactional_ddl=True)
    with context.begin_transaction():
        context.run_migrations()
    connection.commit()

__all__ = ["tables"]
