"""A supervisor's work on a record: list, look, return with a reason, countersign in two requests. No request objects.

Who recorded a run never countersigns it. Who allowed a deviation in it may, and the record then says so. What is
countersigned is the record as it was prepared for that supervisor: another event in between means preparing again.
Not here: what a record says (fieldkit.record), its pages and signatures (fieldkit.pdf), receiving runs (sync.py).
"""

from __future__ import annotations

import datetime as dt
import hashlib
from dataclasses import dataclass

from sqlalchemy import delete, func, select
from sqlalchemy.orm import Session

from fieldkit.errors import Refusal
from fieldkit.operations import moment, records, runs
from fieldkit.operations.actor import Actor, require
from fieldkit.operations.dossier import Dossier, dossier, originals
from fieldkit.operations.station import Station
from fieldkit.pdf import countersign, render, seal
from fieldkit.pdf.countersign import Prepared
from fieldkit.pdf.render import Files, Paper
from fieldkit.record import model
from fieldkit.record.context import Reviewer
from fieldkit.store.db import db, writing
from fieldkit.store.tables import EventRow, Person, PersonKey, Preparation, RecordRow, Return, Run
from fieldkit.trust import authority, certificates, seals

#: a file that was prepared and not signed within this time is prepared anew
PREPARED_FOR = dt.timedelta(hours=1)


@dataclass(frozen=True)
class Line:
    """A record as a list shows it. `state`: waiting, returned, countersigned; "open" for a run that is not over."""

    run: str
    state: str
    since: str
    procedure: str
    edition: int
    cabinet: str
    tube: str
    recorder: str
    recorder_name: str
    started: str
    rehearsal: bool
    #: who countersigned, or who returned it and why
    by_name: str
    reason: str


@dataclass(frozen=True)
class Ready:
    """A file prepared for one supervisor's key, as their browser gets it."""

    id: str
    to_sign: bytes
    #: the gap that the signature will fill: these bytes of the file are not under the digest
    start: int
    end: int
    #: SHA-256 and length of the sealed file that the prepared one begins with
    sealed: str
    length: int
    pdf_sha256: str
    kid: str


def lines() -> list[Line]:
    """Every run whose record waits, was returned or is countersigned, and every open one; oldest first."""
    names = {p.id: p.name for p in db.session.scalars(select(Person))}
    query = select(Run, RecordRow).outerjoin(RecordRow, RecordRow.run == Run.id)
    found = []
    for run, record in db.session.execute(query):
        by, reason = _by(record, names) if record is not None else ("", "")
        state = record.state if record is not None else "open" if run.phase == "open" else "arriving"
        found.append(
            Line(
                run=run.id,
                state=state,
                since=record.since if record is not None else run.started,
                procedure=run.procedure,
                edition=run.edition,
                cabinet=run.cabinet,
                tube=run.tube,
                recorder=run.recorder,
                recorder_name=names.get(run.recorder, run.recorder),
                started=run.started,
                rehearsal=run.rehearsal,
                by_name=by,
                reason=reason,
            )
        )
    return sorted(found, key=lambda line: (moment.order(line.since), line.run))


def _by(record: RecordRow, names: dict[str, str]) -> tuple[str, str]:
    if record.state == "countersigned":
        who = record.countersigned_by or ""
        return names.get(who, who), ""
    if record.state == "returned":
        last = db.session.scalar(select(Return).where(Return.run == record.run).order_by(Return.id.desc()))
        if last is not None:
            return names.get(last.by, last.by), last.reason
    return "", ""


def refusal(actor: Actor, found: Dossier) -> Refusal | None:
    """Why this person may not countersign or return this record; None where they may."""
    if not actor.may("supervisor"):
        return Refusal("not-allowed", "A supervisor countersigns records.")
    if actor.id in found.recorders:
        return Refusal("recorded-it", "You recorded in this run, so another supervisor reviews it.")
    if found.state != "waiting":
        says = {
            "countersigned": "This record is countersigned already.",
            "returned": "This record was returned; it waits for the technician.",
            "open": "This run is not over.",
        }
        return Refusal("not-waiting", says.get(found.state, "Not everything of this run has arrived yet."))
    return None


def unsound(found: Dossier) -> Refusal | None:
    """Why nobody may countersign the record as it is; it can still be returned."""
    if found.record.context.alarm or not found.record.chain.whole:
        return Refusal("broken-chain", "The chain of events is not whole. Return the record, or ask an administrator.")
    bad = [s for s in found.record.signatures if not s.holds]
    if bad:
        return Refusal(
            "bad-signature", f"The signature of {bad[0].name} does not hold, so this cannot be countersigned."
        )
    return None


def return_run(actor: Actor, run: str, reason: str) -> None:
    """Return a waiting record to its recorder, with the reason. Supervisor who recorded nothing in it.

    Raises Refusal no-reason, not-waiting, recorded-it, not-allowed, not-found.
    """
    require(actor, "supervisor")
    if not reason.strip():
        raise Refusal("no-reason", "Say what is to be put right; the technician reads it on the tablet.")
    bad = refusal(actor, dossier(run))
    if bad is not None:
        raise bad
    with writing() as session:
        record = _waiting(session, run)
        seq = session.scalar(select(func.max(EventRow.seq)).where(EventRow.run == run)) or 0
        session.add(Return(run=run, by=actor.id, reason=reason.strip(), seq=seq, time=moment.text()))
        record.state, record.since = "returned", moment.text()
        session.execute(delete(Preparation).where(Preparation.run == run))


def _waiting(session: Session, run: str) -> RecordRow:
    record = session.get(RecordRow, run)
    if record is None or record.state != "waiting":
        raise Refusal("not-waiting", "This record is no longer waiting. Load the page again.")
    return record


def prepare(actor: Actor, station: Station, run: str, kid: str, paper: Paper = "A4") -> Ready:
    """Render, seal and prepare the record for the supervisor's key `kid`; nothing of the record changes yet.

    Raises Refusal as `refusal`, broken-chain, bad-signature, unknown-key, and those of fieldkit.pdf.
    """
    require(actor, "supervisor")
    found = dossier(run, Reviewer(id=actor.id, name=actor.name))
    for bad in (refusal(actor, found), unsound(found)):
        if bad is not None:
            raise bad
    key = db.session.get(PersonKey, kid)
    if key is None or key.person != actor.id or key.revoked is not None:
        raise Refusal("unknown-key", "This browser's key is not one of yours that is in use. Make a new one.")
    sealed = _sealed(station, found, paper)
    certificate, issuer = certificates.from_pem(key.certificate), authority.certificate(station.trust)
    made = countersign.prepare(sealed, certificate, issuer, moment.now())
    ready = Ready(
        id=moment.fresh("preparation"),
        to_sign=made.to_sign,
        start=made.start,
        end=made.end,
        sealed=made.sealed,
        length=made.length,
        pdf_sha256=hashlib.sha256(made.pdf).hexdigest(),
        kid=kid,
    )
    _keep(actor, found, ready, made)
    return ready


def _sealed(station: Station, found: Dossier, paper: Paper) -> bytes:
    attached = Files(
        sheet=found.sheet_bytes,
        events=runs.raw_events(found.run),
        procedure=found.source,
        authority=station.authority_pem,
        pictures=originals(found.run),
    )
    pages = render.render(found.record, attached, paper)
    return seal.seal(pages.pdf, seals.load(station.trust), moment.now())


def _keep(actor: Actor, found: Dossier, ready: Ready, made: Prepared) -> None:
    """Store what was prepared; older preparations of this person for this run, and forgotten ones, go."""
    line, _, _ = made.to_bytes().partition(b"\n")
    old = moment.text(moment.now() - PREPARED_FOR)
    with writing() as session:
        session.execute(delete(Preparation).where(Preparation.created < old))
        session.execute(delete(Preparation).where(Preparation.run == found.run, Preparation.person == actor.id))
        session.add(
            Preparation(
                id=ready.id,
                run=found.run,
                person=actor.id,
                kid=ready.kid,
                head=found.record.chain.head,
                record=model.to_bytes(found.record),
                pdf=made.pdf,
                state=line,
                created=moment.text(),
            )
        )


def _preparation(actor: Actor, preparation: str) -> Preparation:
    row = db.session.get(Preparation, preparation)
    if row is None or row.person != actor.id:
        raise Refusal("not-found", "What was prepared is no longer here. Prepare it again.")
    return row


def prepared_pdf(actor: Actor, preparation: str) -> bytes:
    """The file that waits for this supervisor's signature, so that they can read and check it. Raises not-found."""
    require(actor, "supervisor")
    return _preparation(actor, preparation).pdf


def finish(actor: Actor, preparation: str, signature: bytes) -> str:
    """Put the supervisor's 64-byte signature in and keep the countersigned file; gives the run.

    Raises Refusal not-found, bad-signature, changed-meanwhile, not-waiting.
    """
    require(actor, "supervisor")
    row = _preparation(actor, preparation)
    run, head, record_bytes, kid = row.run, row.head, row.record, row.kid
    signed = countersign.finish(Prepared.from_bytes(row.state + b"\n" + row.pdf), signature)
    with writing() as session:
        record = _waiting(session, run)
        if _head(session, run) != head:
            raise Refusal("changed-meanwhile", "More of this run arrived since it was prepared. Look at it again.")
        key = session.get(PersonKey, kid)
        if key is None or key.revoked is not None:
            raise Refusal("unknown-key", "This key was revoked meanwhile.")
        record.state, record.since = "countersigned", moment.text()
        record.record, record.pdf, record.pdf_sha256 = record_bytes, signed, hashlib.sha256(signed).hexdigest()
        record.countersigned_by, record.countersigned = actor.id, record.since
        session.execute(delete(Preparation).where(Preparation.run == run))
    return run


def _head(session: Session, run: str) -> str:
    """SHA-256 of the run's last accepted event."""
    row = session.get_one(Run, run)
    query = (
        select(EventRow.sha256).where(EventRow.run == run, EventRow.chain == row.chain).order_by(EventRow.seq.desc())
    )
    return session.scalars(query.limit(1)).first() or ""


def countersigned_pdf(actor: Actor, run: str) -> bytes:
    """The countersigned file. Raises Refusal not-found."""
    require(actor, "supervisor", "administrator", "technician")
    row = db.session.get(RecordRow, run)
    if row is None or row.pdf is None:
        raise Refusal("not-found", "This record is not countersigned yet, so there is no file.")
    return row.pdf


def missing(run: str) -> list[str]:
    """Pictures that are named and have not arrived."""
    return records.missing_pictures(db.session(), run)
