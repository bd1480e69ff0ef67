"""Values that belong to the whole server: its store id, the station's name, the least app version.

The store id says which history of the database this is: it changes when a backup is restored, so that tablets know
to compare what they have with what is here.
"""

from __future__ import annotations

from sqlalchemy.orm import Session

from fieldkit.operations import moment
from fieldkit.store.db import db, writing
from fieldkit.store.tables import Setting


def get(name: str, default: str = "") -> str:
    row = db.session.get(Setting, name)
    return row.value if row else default


def put(session: Session, name: str, value: str) -> None:
    """Within the caller's transaction."""
    row = session.get(Setting, name)
    if row is None:
        session.add(Setting(name=name, value=value))
    else:
        row.value = value


def store_id() -> str:
    """The id of this history of the database, made at the first call."""
    known = get("store")
    if known:
        return known
    with writing() as session:
        row = session.get(Setting, "store")
        if row is None:
            row = Setting(name="store", value=moment.fresh("store"))
            session.add(row)
        return row.value
