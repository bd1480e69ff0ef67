"""Engine, session and transactions: how anything is read from or written to the database.

Reading is `db.session` as Flask-SQLAlchemy gives it. Writing is `with writing() as session:` and nothing else: one
operation, one transaction, one writer at a time on either database (BEGIN IMMEDIATE on SQLite, an advisory lock on
PostgreSQL), so a check made inside it still holds when it commits. Both need an application context.
Not here: the tables (fieldkit.store.tables), and what may not be changed (fieldkit.store.fences).
"""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any

from flask import Flask
from flask_sqlalchemy import SQLAlchemy
from sqlalchemy import Connection, Engine, event, text
from sqlalchemy.orm import DeclarativeBase, Session


class Base(DeclarativeBase):
    pass


# Rows are forgotten at every commit and rollback (SQLAlchemy's default): with that switched off a check inside the next
# transaction would be made on an older copy, and updates were lost when it was tried.
db = SQLAlchemy(model_class=Base)

if TYPE_CHECKING:
    Model = Base
else:
    Model = db.Model

#: seconds that a writer waits for the writer before it
BUSY_SECONDS = 10
#: one number for the whole program: PostgreSQL writers queue on it as SQLite's do on the file
WRITER_LOCK = 0x6669656C


def journal(version: tuple[int, int, int]) -> tuple[str, str]:
    """(journal mode, synchronous) for an SQLite library `version`.

    Write-ahead logging can lose committed writes in 3.7.0 to 3.51.2 when two connections write and checkpoint at once
    (sqlite.org/wal.html, "the WAL-reset bug"); fixed in 3.51.3 and in 3.50.7 of the 3.50 line. Elsewhere the rollback
    journal is used, with EXTRA so that the directory entry is synced too. FULL syncs every commit: a receipt may
    only be given for what a power cut cannot take.
    """
    if version >= (3, 51, 3) or (version[:2] == (3, 50) and version[2] >= 7):
        return "wal", "FULL"
    return "delete", "EXTRA"


#: what PRAGMA synchronous answers for a name
SYNCHRONOUS = {"FULL": 2, "EXTRA": 3}


class WrongPragma(RuntimeError):
    """SQLite did not take a setting that the safety of stored records depends on."""


def set_pragmas(connection: sqlite3.Connection) -> None:
    """Set and read back what every connection needs. Raises WrongPragma naming the one that was not taken."""
    connection.isolation_level = None
    mode, synchronous = journal(sqlite3.sqlite_version_info)
    connection.execute(f"PRAGMA busy_timeout = {BUSY_SECONDS * 1000}")
    connection.execute(f"PRAGMA journal_mode = {mode}")
    connection.execute(f"PRAGMA synchronous = {synchronous}")
    connection.execute("PRAGMA foreign_keys = ON")
    connection.execute("PRAGMA trusted_schema = OFF")
    wanted = {
        "busy_timeout": BUSY_SECONDS * 1000,
        "journal_mode": mode,
        "synchronous": SYNCHRONOUS[synchronous],
        "foreign_keys": 1,
    }
    for name, value in wanted.items():
        found = connection.execute(f"PRAGMA {name}").fetchone()[0]
        if found != value:
            raise WrongPragma(
                f"SQLite keeps {name} at {found!r}, {value!r} is needed; put the data folder on a local disk"
            )


def listen(engine: Engine) -> None:
    """Attach what every connection and transaction of `engine` needs."""
    if engine.dialect.name != "sqlite":
        return

    @event.listens_for(engine, "connect")
    def _connect(connection: Any, _record: Any) -> None:
        set_pragmas(connection)

    @event.listens_for(engine, "begin")
    def _begin(connection: Connection) -> None:
        write = connection.get_execution_options().get("fieldkit_write", False)
        # a reader that turns writer fails at once under load, whatever the timeout: so writers say so first
        connection.exec_driver_sql("BEGIN IMMEDIATE" if write else "BEGIN")


def start(app: Flask, url: str) -> None:
    """Bind the database at `url` to `app`."""
    app.config["SQLALCHEMY_DATABASE_URI"] = url
    app.config.setdefault("SQLALCHEMY_ENGINE_OPTIONS", {"pool_size": 12, "max_overflow": 24})
    db.init_app(app)
    with app.app_context():
        listen(db.engine)


@contextmanager
def writing() -> Iterator[Session]:
    """One writing transaction: committed when the block ends, rolled back when it raises.

    Ends a read that was open on this session, so that nothing read earlier is trusted. Nesting is the caller's fault.
    """
    session: Session = db.session()
    if session.info.get("writing"):
        raise RuntimeError("an operation was called inside another one's transaction")
    session.rollback()
    session.info["writing"] = True
    try:
        connection = session.connection(execution_options={"fieldkit_write": True})
        if connection.dialect.name == "postgresql":
            connection.execute(text("SELECT pg_advisory_xact_lock(:lock)"), {"lock": WRITER_LOCK})
        yield session
        session.commit()
    except BaseException:
        session.rollback()
        raise
    finally:
        session.info.pop("writing", None)
