"""Receiving events from tablets: idempotent, resumable, nothing dropped, a receipt only for what is committed.

An event joins its chain when it is the next one and its `prev` is the head. One that came too early waits in `pending`;
one that cannot be accepted is kept with the reason and shown. The same key with other bytes is a fork: both are kept
and an administrator is told. Signatures are checked before the transaction begins, so that it stays short.
Not here: the wire (fieldkit.web.sync), what is kept of a run beside its events (derived.py), records (records.py).
"""

from __future__ import annotations

import json
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from sqlalchemy import select
from sqlalchemy.orm import Session

from fieldkit.errors import Refusal
from fieldkit.operations import derived, moment, notices, pictures, records, settings, signatures
from fieldkit.operations.devices import Tablet
from fieldkit.operations.signatures import Checked
from fieldkit.operations.station import Station
from fieldkit.run import events
from fieldkit.run.events import Event
from fieldkit.store.db import db, writing
from fieldkit.store.tables import Chain, EventRow, KeptEvent, PendingEvent, Receipt, Run, RunPicture
from fieldkit.trust import jws, keys, receipts

#: codes that mean somebody's bytes are not what they were: shown to an administrator
ALARMS = ("forked-chain", "broken-chain", "wrong-device", "another-chain")


@dataclass(frozen=True)
class Arrived:
    """One event as it came: its bytes, what could be read of it, and why it cannot be accepted, if so."""

    raw: bytes
    sha256: str
    seq: int | None
    event: Event | None
    code: str = ""
    says: str = ""


@dataclass(frozen=True)
class Kept:
    """An event that was not accepted, as the tablet is told."""

    seq: int | None
    code: str
    says: str


@dataclass(frozen=True)
class Accepted:
    """How far the chain is here now, and what of this batch was kept instead of accepted."""

    have: int
    head: str
    kept: tuple[Kept, ...]

    @property
    def forked(self) -> bool:
        return any(k.code == "forked-chain" for k in self.kept)


@dataclass
class _Work:
    """What one transaction works on."""

    session: Session
    station: Station
    tablet: Tablet
    run: str
    chain: str
    row: Chain | None
    at: str
    checked: Mapping[str, Checked]
    #: SHA-256 of what was kept of this chain before
    known_kept: set[str]
    kept: list[Kept] = field(default_factory=list)

    @property
    def next(self) -> int:
        return self.row.seq + 1 if self.row else 0


def read(text: str, run: str, chain: str, device: str) -> Arrived:
    """What there is to say about an event before its chain is looked at."""
    raw = text.encode("utf-8", "surrogatepass")
    sha256 = events.digest(raw)
    try:
        event = events.parse(raw)
    except Refusal as bad:
        return Arrived(raw, sha256, _seq(raw), None, bad.code, bad.sentence)
    head = event.head
    if head.run != run or head.chain != chain:
        says = f"Event {head.seq} is of run {head.run}, chain {head.chain}; it was sent as {run}, {chain}."
        return Arrived(raw, sha256, head.seq, event, "wrong-run", says)
    if chain.partition(".")[0] != device:
        return Arrived(
            raw, sha256, head.seq, event, "wrong-device", f"The chain {chain} is not of the tablet that sent it."
        )
    if head.seq < 0 or (head.seq == 0) != (head.kind == "run-started"):
        return Arrived(raw, sha256, head.seq, event, "damaged-event", f"Event {head.seq} cannot be a {head.kind}.")
    return Arrived(raw, sha256, head.seq, event)


def _seq(raw: bytes) -> int | None:
    try:
        seq = json.loads(raw)["seq"]
    except (ValueError, KeyError, TypeError, RecursionError):
        return None
    return seq if type(seq) is int and 0 <= seq < 2**31 else None


def accept(station: Station, tablet: Tablet, run: str, chain: str, texts: Iterable[str]) -> Accepted:
    """Take a batch of events of one chain, in any order, any of them again. Commits before it returns.

    A revoked tablet's events are kept, none is accepted. Raises nothing for a bad event: it is in `kept`.
    """
    arrived = [read(text, run, chain, tablet.id) for text in texts]
    if tablet.status != "admitted":
        says = f"The tablet was put out of use at {tablet.revoked}; what it sends waits for somebody to accept it."
        arrived = [Arrived(a.raw, a.sha256, a.seq, a.event, "revoked-device", says) for a in arrived]
    checked = _check_signatures(station, arrived, run)
    with writing() as session:
        row = session.get(Chain, (run, chain))
        query = select(KeptEvent.sha256).where(KeptEvent.run == run, KeptEvent.chain == chain)
        work = _Work(session, station, tablet, run, chain, row, moment.text(), checked, set(session.scalars(query)))
        _take(work, arrived)
        _follow(work)
        if work.row is not None:
            records.settle(session, run)
        have, head = (work.row.seq, work.row.head) if work.row else (-1, "")
    return Accepted(have, head, tuple(work.kept))


def _check_signatures(station: Station, arrived: list[Arrived], run: str) -> dict[str, Checked]:
    """sha256 -> what was found, for every readable signature of the batch."""
    signed = [a.event for a in arrived if a.event is not None and a.event.head.kind == "signed" and not a.code]
    if not signed:
        return {}
    sheet = next((a.event.body.sheet for a in arrived if a.event and a.event.head.kind == "run-started"), None)
    if sheet is None:
        row = db.session.get(Run, run)
        # a signature that comes before its run waits in `pending` and is checked when the gap closes
        if row is None:
            return {}
        sheet = row.sheet
    return {event.sha256: signatures.check(station, event, sheet) for event in signed}


def _take(work: _Work, arrived: list[Arrived]) -> None:
    have = _have(work, [a.seq for a in arrived if a.seq is not None])
    ordered = sorted(arrived, key=lambda a: (a.seq is None, a.seq or 0))
    for one in ordered:
        if one.seq is not None and have.get(one.seq) == one.sha256:
            continue
        if one.code:
            _keep(work, one, one.code, one.says)
        elif one.seq in have or (one.seq is not None and one.seq < work.next):
            says = (
                f"Event {one.seq} of this run is here already with other content. Both are kept; tell an administrator."
            )
            _keep(work, one, "forked-chain", says)
        elif one.seq == work.next:
            if _join(work, one):
                have[one.seq] = one.sha256
        elif one.seq is not None:
            _wait(work, one)


def _have(work: _Work, seqs: list[int]) -> dict[int, str]:
    """seq -> sha256 of accepted events among those asked for."""
    if not seqs or work.row is None:
        return {}
    query = select(EventRow.seq, EventRow.sha256).where(
        EventRow.run == work.run,
        EventRow.chain == work.chain,
        EventRow.seq >= min(seqs),
        EventRow.seq <= max(seqs),
    )
    return {seq: sha256 for seq, sha256 in work.session.execute(query)}


def _wait(work: _Work, one: Arrived) -> None:
    """Keep an event that came before its predecessor."""
    row = work.session.get(PendingEvent, (work.run, work.chain, one.seq))
    if row is None:
        work.session.add(
            PendingEvent(run=work.run, chain=work.chain, seq=one.seq, sha256=one.sha256, data=one.raw, received=work.at)
        )
        work.session.flush()
    elif row.sha256 != one.sha256:
        says = (
            f"Event {one.seq} of this run waits here already with other content. Both are kept; tell an administrator."
        )
        _keep(work, one, "forked-chain", says)


def _follow(work: _Work) -> None:
    """Join what waited, as far as the gap is closed now."""
    work.session.flush()
    while True:
        row = work.session.get(PendingEvent, (work.run, work.chain, work.next))
        if row is None:
            return
        one = read(row.data.decode("utf-8", "surrogatepass"), work.run, work.chain, work.tablet.id)
        work.session.delete(row)
        if one.code:
            _keep(work, one, one.code, one.says)
            return
        if not _join(work, one):
            return


def _join(work: _Work, one: Arrived) -> bool:
    """Accept the next event of the chain; False where it was kept instead."""
    event = one.event
    assert event is not None
    bad = _begin(work, event) if work.row is None else _check_link(work.row, event)
    if bad is not None:
        _keep(work, one, bad.code, bad.says)
        return False
    assert work.row is not None
    work.row.seq, work.row.head = event.head.seq, event.sha256
    work.session.add(
        EventRow(
            run=work.run,
            chain=work.chain,
            seq=event.head.seq,
            sha256=event.sha256,
            kind=event.head.kind,
            by=event.head.by,
            data=one.raw,
            received=work.at,
        )
    )
    if one.sha256 in work.known_kept:
        _settle_kept(work, one)
    derived.note(work.session, work.station, event, work.checked.get(event.sha256))
    return True


def _check_link(row: Chain, event: Event) -> Kept | None:
    if event.head.prev == row.head:
        return None
    says = f"Event {event.head.seq} does not follow from the one before it: it was changed. It is kept and shown."
    return Kept(event.head.seq, "broken-chain", says)


def _begin(work: _Work, event: Event) -> Kept | None:
    """The first event of a chain makes the run."""
    body = event.body
    if event.head.prev != body.sheet:
        return Kept(0, "broken-chain", "The first event does not stand on the sheet that it names. It is kept.")
    if work.session.get(Run, work.run) is not None:
        return Kept(
            0, "another-chain", "This run is recorded in another chain here already. This one is kept and shown."
        )
    derived.begin(work.session, event, work.tablet.id)
    work.row = Chain(run=work.run, id=work.chain, device=work.tablet.id, seq=-1, head=body.sheet)
    work.session.add(work.row)
    return None


def _keep(work: _Work, one: Arrived, code: str, says: str) -> None:
    work.kept.append(Kept(one.seq, code, says))
    work.known_kept.add(one.sha256)
    same = select(KeptEvent.id).where(
        KeptEvent.run == work.run,
        KeptEvent.chain == work.chain,
        KeptEvent.sha256 == one.sha256,
        KeptEvent.code == code,
    )
    if work.session.scalar(same) is not None:
        return
    work.session.add(
        KeptEvent(
            run=work.run,
            chain=work.chain,
            seq=one.seq,
            sha256=one.sha256,
            code=code,
            says=says,
            data=one.raw,
            device=work.tablet.id,
            received=work.at,
        )
    )
    if code in ALARMS:
        notices.add(work.session, code, says, f"{work.run} {work.chain}")
        if work.row is not None and work.row.device == work.tablet.id:
            work.row.alarm = code


def _settle_kept(work: _Work, one: Arrived) -> None:
    """The same bytes could not be read by an older fieldkit, and can now."""
    query = select(KeptEvent).where(
        KeptEvent.run == work.run, KeptEvent.chain == work.chain, KeptEvent.sha256 == one.sha256
    )
    for row in work.session.scalars(query):
        row.settled = work.at


def receipt(station: Station, run: str, chain: str) -> str | None:
    """The receipt for all of a chain that is committed, the same for the same head; None where that is nothing."""
    row = db.session.get(Chain, (run, chain))
    if row is None or row.seq < 0:
        return None
    store, seq, head = settings.store_id(), row.seq, row.head
    known = db.session.get(Receipt, (run, chain, seq, store))
    if known is not None:
        return known.jws
    at = moment.text()
    made = receipts.make(station.receipt, store=store, run=run, chain=chain, seq=seq, head=head, time=at)
    with writing() as session:
        known = session.get(Receipt, (run, chain, seq, store))
        if known is not None:
            return known.jws
        session.add(Receipt(run=run, chain=chain, seq=seq, store=store, head=head, jws=made, time=at))
    return made


def picture(station: Station, tablet: Tablet, sha256: str, data: bytes) -> str:
    """Take a picture of a tablet; gives its receipt. Sending it again is fine.

    Raises Refusal wrong-digest, not-a-picture, too-large.
    """
    made = pictures.prepare(data, sha256)
    with writing() as session:
        pictures.add(session, made, tablet.id)
        session.flush()
        for run in session.scalars(select(RunPicture.run).where(RunPicture.sha256 == sha256)):
            records.settle(session, run)
    claims = {"store": settings.store_id(), "sha256": sha256, "size": len(data), "time": moment.text()}
    return jws.sign(claims, station.receipt, receipts.TYPE, kid=keys.thumbprint(station.receipt_jwk))


def head(run: str, chain: str) -> tuple[int, str]:
    """How far a chain is here: (last seq, its SHA-256), or (-1, "")."""
    row = db.session.get(Chain, (run, chain))
    return (row.seq, row.head) if row else (-1, "")
