"""A run as it was received: its sheet, its events, and the state that they fold to. Reading only."""

from __future__ import annotations

import json
from dataclasses import dataclass
from typing import Any

from sqlalchemy import select

from fieldkit.errors import Refusal
from fieldkit.operations import moment, procedures, records
from fieldkit.run import events, state
from fieldkit.run.events import Event
from fieldkit.sheet.model import Sheet
from fieldkit.store.db import db
from fieldkit.store.tables import Chain, EventRow, KeptEvent, Picture, Run, RunPicture, SignatureRow


@dataclass(frozen=True)
class KeptLine:
    """An event that was kept instead of accepted, with the text that came, as far as it is text."""

    seq: int | None
    code: str
    says: str
    text: str
    device: str
    received: str
    settled: str | None


@dataclass(frozen=True)
class Loaded:
    """A run with everything of it that is here."""

    row: Run
    sheet: Sheet
    sheet_bytes: bytes
    source: bytes
    events: list[Event]
    #: fieldkit.run.state.fold of the events
    state: dict[str, Any]
    signatures: list[SignatureRow]
    kept: list[KeptLine]
    #: code of what is wrong with the chain, "" where nothing is
    alarm: str
    #: pictures that are named and have not arrived
    missing: list[str]


def raw_events(run: str) -> list[bytes]:
    """The bytes of a run's accepted events, in order."""
    query = (
        select(EventRow.data)
        .join(Run, (Run.id == EventRow.run) & (Run.chain == EventRow.chain))
        .where(EventRow.run == run)
        .order_by(EventRow.seq)
    )
    return list(db.session.scalars(query))


def load(run: str) -> Loaded:
    """Raises Refusal not-found where the run or its sheet is not here, damaged-sheet, unknown-version."""
    row = db.session.get(Run, run)
    if row is None:
        raise Refusal("not-found", f"The run {run} is not here.")
    sheet, sheet_bytes, source = procedures.sheet(row.sheet)
    parsed = [events.parse(raw) for raw in raw_events(run)]
    chain = db.session.get_one(Chain, (run, row.chain))
    signatures = select(SignatureRow).where(SignatureRow.run == run).order_by(SignatureRow.seq)
    return Loaded(
        row=row,
        sheet=sheet,
        sheet_bytes=sheet_bytes,
        source=source,
        events=parsed,
        state=state.fold(sheet, parsed),
        signatures=list(db.session.scalars(signatures)),
        kept=kept(run),
        alarm=chain.alarm,
        missing=records.missing_pictures(db.session(), run),
    )


def kept(run: str | None = None) -> list[KeptLine]:
    """What was kept instead of accepted, of one run or of all, latest last."""
    query = select(KeptEvent).order_by(KeptEvent.id)
    if run is not None:
        query = query.where(KeptEvent.run == run)
    return [
        KeptLine(r.seq, r.code, r.says, r.data.decode("utf-8", "replace"), r.device, r.received, r.settled)
        for r in db.session.scalars(query)
    ]


def pictures(run: str) -> dict[str, bytes]:
    """SHA-256 as the events name it -> the clean JPEG made here, for every picture of the run that has arrived."""
    query = (
        select(Picture.sha256, Picture.data)
        .join(RunPicture, RunPicture.sha256 == Picture.sha256)
        .where(RunPicture.run == run)
        .order_by(RunPicture.seq)
    )
    return {sha256: data for sha256, data in db.session.execute(query)}


@dataclass(frozen=True)
class Line:
    """A run as a list shows it."""

    run: str
    procedure: str
    edition: int
    cabinet: str
    tube: str
    recorder: str
    started: str
    phase: str
    ended: str | None
    seq: int
    alarm: str


def everything() -> list[Line]:
    """Every run that has begun to arrive, latest start first."""
    query = select(Run, Chain).join(Chain, (Chain.run == Run.id) & (Chain.id == Run.chain))
    found = [
        Line(
            row.id,
            row.procedure,
            row.edition,
            row.cabinet,
            row.tube,
            row.recorder,
            row.started,
            row.phase,
            row.ended,
            chain.seq,
            chain.alarm,
        )
        for row, chain in db.session.execute(query)
    ]
    return sorted(found, key=lambda line: (moment.order(line.started), line.run), reverse=True)


def ended_body(run: Run) -> dict[str, Any] | None:
    """The body of the run's `ended` event; None while it is open, or where it was voided."""
    if run.ended_seq is None:
        return None
    row = db.session.get_one(EventRow, (run.id, run.chain, run.ended_seq))
    if row.kind != "ended":
        return None
    body: dict[str, Any] = json.loads(row.data)["body"]
    return body
