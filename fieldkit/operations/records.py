"""When a run becomes a record that waits for a supervisor, and what a tablet is told of its runs.

Not here: building, returning and countersigning a record (review.py).
"""

from __future__ import annotations

from dataclasses import dataclass

from sqlalchemy import func, select
from sqlalchemy.orm import Session

from fieldkit.operations import moment
from fieldkit.store.db import db
from fieldkit.store.tables import Person, Picture, RecordRow, Return, Run, RunPicture


def missing_pictures(session: Session, run: str) -> list[str]:
    """Pictures that the run's events name and that have not arrived."""
    query = (
        select(RunPicture.sha256)
        .outerjoin(Picture, Picture.sha256 == RunPicture.sha256)
        .where(RunPicture.run == run, Picture.sha256.is_(None))
        .order_by(RunPicture.seq)
    )
    return list(session.scalars(query))


def settle(session: Session, run: str) -> None:
    """Within the caller's transaction: let the run's record wait for a supervisor if everything of it is here.

    Everything is: the end, the recorder's signature after it, and every picture. A returned record waits again when a
    signature came after its return. A countersigned record stays as it is.
    """
    row = session.get(Run, run)
    if row is None or row.ended_seq is None or row.signed_seq is None or row.signed_seq < row.ended_seq:
        return
    if missing_pictures(session, run):
        return
    record = session.get(RecordRow, run)
    if record is None:
        session.add(RecordRow(run=run, state="waiting", since=moment.text()))
    elif record.state == "returned":
        returned_at = session.scalar(select(func.max(Return.seq)).where(Return.run == run))
        if returned_at is None or row.signed_seq > returned_at:
            record.state, record.since = "waiting", moment.text()


@dataclass(frozen=True)
class Returned:
    run: str
    reason: str
    by: str
    by_name: str
    time: str
    #: the run's last event here when it was returned; what was recorded after it answers the return
    seq: int


@dataclass(frozen=True)
class Stands:
    """A run of this tablet whose record waits or is countersigned."""

    run: str
    by: str
    by_name: str
    time: str


@dataclass(frozen=True)
class Inbox:
    returned: list[Returned]
    received: list[Stands]
    countersigned: list[Stands]


def inbox(device: str) -> Inbox:
    """What became of the runs of a tablet."""
    made = Inbox([], [], [])
    query = select(RecordRow, Run).join(Run, Run.id == RecordRow.run).where(Run.device == device).order_by(Run.id)
    names = {row.id: row.name for row in db.session.scalars(select(Person))}
    for record, run in db.session.execute(query):
        if record.state == "returned":
            last = db.session.scalar(select(Return).where(Return.run == run.id).order_by(Return.id.desc()))
            if last is not None:
                name = names.get(last.by, last.by)
                made.returned.append(Returned(run.id, last.reason, last.by, name, last.time, last.seq))
        elif record.state == "countersigned":
            by = record.countersigned_by or ""
            made.countersigned.append(Stands(run.id, by, names.get(by, by), record.countersigned or record.since))
        else:
            made.received.append(Stands(run.id, "", "", record.since))
    return made
