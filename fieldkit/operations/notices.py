"""What an administrator should see: alarms of sync and of sign-in. Added here, never taken away."""

from __future__ import annotations

from dataclasses import dataclass

from sqlalchemy import select
from sqlalchemy.orm import Session

from fieldkit.operations import moment
from fieldkit.store.db import db
from fieldkit.store.tables import Notice


@dataclass(frozen=True)
class Line:
    code: str
    says: str
    about: str
    time: str


def add(session: Session, code: str, says: str, about: str) -> None:
    """Within the caller's transaction; the same notice about the same thing stands once."""
    same = select(Notice.id).where(Notice.code == code, Notice.about == about[:200], Notice.says == says)
    if session.scalar(same) is None:
        session.add(Notice(code=code, says=says, about=about[:200], time=moment.text()))


def latest(count: int = 50) -> list[Line]:
    rows = db.session.scalars(select(Notice).order_by(Notice.id.desc()).limit(count))
    return [Line(row.code, row.says, row.about, row.time) for row in rows]
