"""Fences around what was received: rows that are added and never changed or removed, held three times over.

The primary or unique key refuses a second row under the same name, the session guard refuses an update or a delete
before it reaches the database, and a trigger in the database refuses whatever goes round the session.
To fence a table: add its class to FENCED, and its name in a migration that calls `triggers`.
"""

from __future__ import annotations

from typing import Any

from sqlalchemy import event
from sqlalchemy.orm import ORMExecuteState, Session

from fieldkit.store import tables
from fieldkit.store.db import db

FENCED = (
    tables.Source,
    tables.SheetRow,
    tables.Blob,
    tables.EventRow,
    tables.Picture,
    tables.Receipt,
    tables.SignatureRow,
    tables.Return,
    tables.Notice,
)
#: rows that may change and are never removed
KEPT = (tables.Person, tables.PersonKey, tables.Device, tables.KeptEvent, tables.RecordRow, tables.Run)

FENCED_NAMES = tuple(t.__tablename__ for t in FENCED)
KEPT_NAMES = tuple(t.__tablename__ for t in KEPT)


class Fenced(RuntimeError):
    """Somebody tried to change or remove what may only be added."""


def _refuse_flush(session: Session, _context: Any, _instances: Any) -> None:
    for row in session.deleted:
        if isinstance(row, FENCED + KEPT):
            raise Fenced(f"{type(row).__tablename__} rows are never removed")
    for row in session.dirty:
        if isinstance(row, FENCED) and session.is_modified(row):
            raise Fenced(f"{type(row).__tablename__} rows are never changed")


def _refuse_bulk(state: ORMExecuteState) -> None:
    if not (state.is_update or state.is_delete):
        return
    name = getattr(getattr(state.statement, "table", None), "name", "")
    if name in FENCED_NAMES or (state.is_delete and name in KEPT_NAMES):
        raise Fenced(f"{name} rows are never changed or removed")


def guard() -> None:
    """Put the session guard on; calling it again changes nothing."""
    for name, rule in (("before_flush", _refuse_flush), ("do_orm_execute", _refuse_bulk)):
        if not event.contains(db.session, name, rule):
            event.listen(db.session, name, rule)


def triggers(dialect: str, fenced: tuple[str, ...], kept: tuple[str, ...]) -> list[str]:
    """The statements that make the database itself refuse. Raises ValueError for a database that is not supported."""
    if dialect not in ("sqlite", "postgresql"):
        raise ValueError(f"no fences are known for {dialect}; SQLite and PostgreSQL are supported")
    made = [] if dialect == "sqlite" else [_FUNCTION]
    for table in (*fenced, *kept):
        for verb in ("UPDATE", "DELETE") if table in fenced else ("DELETE",):
            made.append(_trigger(dialect, table, verb))
    return made


_FUNCTION = """CREATE OR REPLACE FUNCTION fieldkit_refuse() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN RAISE EXCEPTION '% rows are never changed or removed', TG_TABLE_NAME; END $$"""


def _trigger(dialect: str, table: str, verb: str) -> str:
    name = f"fence_{table}_{verb.lower()}"
    if dialect == "sqlite":
        return (
            f"CREATE TRIGGER {name} BEFORE {verb} ON {table} "
            f"BEGIN SELECT RAISE(ABORT, '{table} rows are never changed or removed'); END"
        )
    # a row trigger does not see TRUNCATE, so the statement trigger below is made with the DELETE one
    truncate = (
        f"; CREATE TRIGGER fence_{table}_truncate BEFORE TRUNCATE ON {table} EXECUTE FUNCTION fieldkit_refuse()"
        if verb == "DELETE"
        else ""
    )
    return f"CREATE TRIGGER {name} BEFORE {verb} ON {table} FOR EACH ROW EXECUTE FUNCTION fieldkit_refuse(){truncate}"
