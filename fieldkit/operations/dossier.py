"""Everything about one run that a reviewer looks at: its record, built now, and where it stands. Reading only.

The record's context (names, checks of signatures, the tube's last run, what was kept aside) is gathered here.
"""

from __future__ import annotations

import json
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

from sqlalchemy import func, select

from fieldkit import __version__
from fieldkit.errors import Refusal
from fieldkit.operations import moment, runs, settings
from fieldkit.operations.runs import Loaded
from fieldkit.record import build, model, words
from fieldkit.record.context import Check, Context, KeptEvent, LastRun, Returned, Reviewer
from fieldkit.record.model import Record
from fieldkit.run.events import Event
from fieldkit.store.db import db
from fieldkit.store.tables import EventRow, Person, Picture, RecordRow, Release, Return, Run, RunPicture, Tube


@dataclass(frozen=True)
class Dossier:
    """One run with its record. `state`: open, arriving, waiting, returned, countersigned.

    A countersigned run's record is the one that was signed, as it is in the file.
    """

    run: str
    state: str
    since: str
    record: Record
    #: everybody who recorded in the run
    recorders: frozenset[str]
    sheet_bytes: bytes
    source: bytes
    missing: tuple[str, ...]
    countersigned_by: str
    countersigned: str
    pdf_sha256: str
    #: events that arrived after the countersignature; they are not in the file
    later: int


def dossier(run: str, reviewer: Reviewer | None = None, as_received: bool = False) -> Dossier:
    """The run with its record; with `as_received` built from all its events, even after countersigning.

    Raises Refusal not-found, damaged-sheet, unknown-version.
    """
    loaded = runs.load(run)
    row = db.session.get(RecordRow, run)
    names = {p.id: p.name for p in db.session.scalars(select(Person))}
    signed = None if as_received else _signed(row)
    made = signed or build.build(loaded.sheet, loaded.events, _context(loaded, names, reviewer))
    by = (row.countersigned_by if row else None) or ""
    return Dossier(
        run=run,
        state=row.state if row else "open" if loaded.row.phase == "open" else "arriving",
        since=row.since if row else loaded.row.started,
        record=made,
        recorders=frozenset([*loaded.state["recorders"], *(e.head.by for e in loaded.events)]),
        sheet_bytes=loaded.sheet_bytes,
        source=loaded.source,
        missing=tuple(loaded.missing),
        countersigned_by=names.get(by, by),
        countersigned=(row.countersigned if row else None) or "",
        pdf_sha256=(row.pdf_sha256 if row else None) or "",
        later=max(0, len(loaded.events) - made.chain.count),
    )


def _signed(row: RecordRow | None) -> Record | None:
    """The record that was countersigned; None where none was, or its version is not known here any more."""
    if row is None or row.state != "countersigned" or row.record is None:
        return None
    try:
        return model.from_bytes(row.record)
    except Refusal:
        return None


def _context(loaded: Loaded, names: dict[str, str], reviewer: Reviewer | None) -> Context:
    run = loaded.row
    release = db.session.get(Release, run.procedure)
    received = db.session.scalar(select(func.max(EventRow.received)).where(EventRow.run == run.id))
    returns = db.session.scalars(select(Return).where(Return.run == run.id).order_by(Return.id))
    return Context(
        station=settings.get("station"),
        tube_says=_tube(run.tube),
        names={p: names[p] for p in sorted(_mentioned(loaded.events)) if p in names},
        proved=release is not None and release.proved and release.sheet == run.sheet,
        checks=tuple(Check(seq=s.seq, holds=s.holds, kid=s.kid, says=s.says) for s in loaded.signatures),
        kept=tuple(KeptEvent(seq=k.seq, code=k.code, says=k.says) for k in loaded.kept if k.settled is None),
        alarm=loaded.alarm,
        returns=tuple(
            Returned(by_name=names.get(r.by, r.by), reason=r.reason, time=r.time, seq=r.seq) for r in returns
        ),
        last_run=_last_run(run),
        reviewer=reviewer,
        received=received or "",
        app=__version__,
    )


def _mentioned(events: Iterable[Event]) -> set[str]:
    """Every person id in the events."""
    found: set[str] = set()
    for event in events:
        body: dict[str, Any] = event.body.model_dump()
        found.add(event.head.by)
        for key in ("who", "authority", "returned_by", "to", "holder", "second", "person"):
            if isinstance(body.get(key), str):
                found.add(body[key])
        for key in ("heard", "names", "present"):
            found |= set(body.get(key) or ())
    return found


def _tube(serial: str) -> str:
    """What the register says of the tube, in a few words; "" where it does not know it."""
    row = db.session.get(Tube, serial)
    if row is None:
        return ""
    data = json.loads(row.data)
    hours = str(data.get("hours") or "")
    kind = str(data.get("kind") or "tube").replace("-", " ")
    return f"{kind}, {hours} heater hours" if hours else kind


def _last_run(run: Run) -> dict[str, LastRun]:
    """The values of the same procedure's last finished run on this tube, by step."""
    query = (
        select(Run)
        .where(Run.tube == run.tube, Run.procedure == run.procedure, Run.id != run.id, Run.rehearsal.is_(False))
        .where(Run.phase.in_(("done", "stopped")))
    )
    # as moments: the tablets' texts may have different offsets from UTC
    begun = [(moment.order(one.started), one.id, one) for one in db.session.scalars(query)]
    earlier = [one for one in begun if one[0] < moment.order(run.started)]
    before = max(earlier)[2] if earlier else None
    if before is None or run.rehearsal:
        return {}
    try:
        loaded = runs.load(before.id)
    except Refusal:
        # its sheet is of a version that is not known here: nothing is compared with it
        return {}
    day = words.day(before.started)
    return {
        step: LastRun(text=v["text"], unit=v["unit"], run=before.id, day=day)
        for step, v in loaded.state["values"].items()
        if v["text"]
    }


def originals(run: str) -> dict[str, bytes]:
    """The run's pictures as the tablet made them, by the hash that people signed for."""
    query = (
        select(Picture.sha256, Picture.original)
        .join(RunPicture, RunPicture.sha256 == Picture.sha256)
        .where(RunPicture.run == run)
        .order_by(RunPicture.seq)
    )
    return {sha256: data for sha256, data in db.session.execute(query)}
