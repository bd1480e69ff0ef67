"""What is kept of a run beside its events, so that lists need not read them: made from the events, one after the other.

Everything here could be made again from `events`. Not here: accepting events (sync.py), the run's state (fieldkit.run).
"""

from __future__ import annotations

from sqlalchemy.orm import Session

from fieldkit.operations import notices, signatures
from fieldkit.operations.signatures import Checked
from fieldkit.operations.station import Station
from fieldkit.run.events import Event
from fieldkit.store.tables import Run, RunPicture, SignatureRow

#: kinds of event that say something about the run as a whole
TELLING = ("pictured", "ended", "voided", "reopened", "person-changed", "signed")


def begin(session: Session, event: Event, device: str) -> None:
    """Within the caller's transaction: the run that its first event makes."""
    body = event.body
    session.add(
        Run(
            id=event.head.run,
            chain=event.head.chain,
            device=device,
            sheet=body.sheet,
            procedure=body.procedure,
            edition=body.edition,
            site=body.site,
            cabinet=body.cabinet,
            tube=body.tube,
            recorder=event.head.by,
            started=event.head.at.wall,
            rehearsal=body.rehearsal,
        )
    )


def note(session: Session, station: Station, event: Event, checked: Checked | None) -> None:
    """Within the caller's transaction: what an accepted event says of its run.

    `checked` is what was found of a signature before; None where it was not looked at yet.
    """
    kind, body, seq = event.head.kind, event.body, event.head.seq
    if kind not in TELLING:
        return
    session.flush()
    run = session.get_one(Run, event.head.run)
    if kind == "pictured":
        if session.get(RunPicture, (run.id, body.sha256)) is None:
            session.add(RunPicture(run=run.id, sha256=body.sha256, seq=seq))
    elif kind in ("ended", "voided"):
        run.phase = "voided" if kind == "voided" else body.outcome
        run.ended, run.ended_seq = event.head.at.wall, seq
    elif kind == "reopened":
        run.signed_seq = None
    elif kind == "person-changed":
        run.recorder = body.to
    elif kind == "signed":
        _put_signature(session, run, event, checked or signatures.check(station, event, run.sheet))


def _put_signature(session: Session, run: Run, event: Event, found: Checked) -> None:
    """A signature that does not hold is recorded as such; the supervisor sees the record and what is wrong with it."""
    body, seq = event.body, event.head.seq
    session.add(
        SignatureRow(
            run=run.id,
            chain=event.head.chain,
            seq=seq,
            person=body.person,
            meaning=body.meaning,
            kid=found.kid,
            holds=found.holds,
            says=found.says,
        )
    )
    if not found.holds:
        says = f"The signature of {body.person} in event {seq} does not hold: {found.says}"
        notices.add(session, "signature", says, run.id)
    if body.meaning == "performed" and run.ended_seq is not None and body.person == run.recorder:
        run.signed_seq = seq
