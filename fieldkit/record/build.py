"""The record of a run from its sheet, its events and what is known besides: one pure function, the same bytes anywhere.

    build(sheet, events, context) -> Record        raises ValueError where the first event starts no run

An open run gives a record too, so that the desk can show what has come so far. Nothing is left out: what the fold
disagrees with stands in `chain.disagree` and leads the attention list.
"""

from __future__ import annotations

import functools
import hashlib
from collections.abc import Iterable
from pathlib import Path
from typing import Literal

from fieldkit.record import attention, basis, course, isolation, lanes, readings, summary, words
from fieldkit.record.context import Context
from fieldkit.record.frame import Frame, frame
from fieldkit.record.model import Head, Record, Review
from fieldkit.run.events import Event
from fieldkit.sheet.model import Sheet

VERIFY = (
    "Save this file and, separately, the certificate of the station’s signing authority (PEM).",
    "Run: fieldkit verify FILE --ca CERTIFICATE. It answers each question by itself and has one bottom line.",
    "It checks the seal and the countersignature, that both cover the whole file, each person’s signature, the chain "
    "of events, every verdict again from the sheet and the events inside, and the text of these pages.",
    "Any PDF reader that checks signatures shows the seal and the countersignature once that certificate is trusted.",
)


@functools.cache
def code() -> str:
    """SHA-256 over what decides how a run becomes a record: the modules of the record, of the run and of values."""
    digest, root = hashlib.sha256(), Path(__file__).parents[1]
    for path in [*sorted((root / "record").glob("*.py")), *sorted((root / "run").glob("*.py")), root / "values.py"]:
        digest.update(path.name.encode() + b"\0" + path.read_bytes())
    return digest.hexdigest()


def build(sheet: Sheet, events: Iterable[Event], context: Context) -> Record:
    """The record of `events` on `sheet`."""
    run = frame(sheet, events, context)
    head = _head(run)
    judged = readings.readings(run)
    review = _review(run)
    lists = attention.Lists(
        readings=judged,
        deviations=readings.deviations(run),
        corrections=course.corrections(run),
        locks=isolation.locks(run),
        earths=isolation.earths(run),
        signatures=basis.signatures(run),
        safe=course.safe(run),
        chain=basis.chain(run),
        review=review,
    )
    counted = summary.counts(run, judged)
    stop = _stop(run)
    before, after = lanes.before(run), lanes.after(run)
    return Record(
        head=head,
        summary=summary.full(head, counted, stop),
        short=summary.short(head, counted, stop),
        counts=counted,
        before=before,
        after=after,
        before_says=lanes.says(before),
        after_says=lanes.says(after),
        lanes=lanes.lanes(run),
        from_second=run.second(run.events[0]),
        to_second=words.second(run.last, run.first),
        attention=attention.attention(run, lists),
        readings=judged,
        formulas=readings.formulas(run),
        deviations=lists.deviations,
        retakes=readings.retakes(run),
        corrections=lists.corrections,
        locks=lists.locks,
        earths=lists.earths,
        proofs=isolation.proofs(run),
        waits=course.waits(run),
        holds=course.holds(run),
        people=course.people(run),
        cautions=course.cautions(run),
        remarks=course.remarks(run),
        trips=course.trips(run),
        gaps=course.gaps(run),
        safe=lists.safe,
        choices=course.choices(run),
        pictures=course.pictures(run),
        signatures=lists.signatures,
        review=review,
        instruments=basis.instruments(run),
        givens=basis.givens(run),
        log=course.log(run),
        chain=lists.chain,
        next_person=sheet.next_person,
        verify=VERIFY,
        context=context,
    )


def _head(run: Frame) -> Head:
    started, first = run.started, run.events[0]
    ended = run.of("ended", "voided")
    outcome, reason = _outcome(run)
    closed = ended[0]["at"]["wall"] if ended else ""
    zones = [words.zone(run.first)]
    if closed and words.zone(closed) not in zones:
        zones.append(words.zone(closed))
    return Head(
        station=run.context.station,
        site=started["site"],
        site_name=started["site_name"],
        cabinet=started["cabinet"],
        tube=started["tube"],
        tube_says=run.context.tube_says,
        run=first["run"],
        procedure=run.sheet.procedure,
        edition=run.sheet.edition,
        title=run.sheet.title,
        purpose=run.sheet.purpose,
        sheet=started["sheet"],
        proved=run.context.proved,
        rehearsal=started["rehearsal"],
        outcome=outcome,
        outcome_reason=reason,
        recorder=first["by"],
        recorder_name=run.name(first["by"]),
        present=tuple(run.name(p) for p in started["present"]),
        tablet=started["tablet"]["name"],
        started=run.first,
        ended=closed,
        started_utc=words.utc(run.first),
        ended_utc=words.utc(closed) if closed else "",
        zone=", then ".join(zones),
        day=words.day(run.first),
        from_time=words.time(run.first),
        to_time=words.time(closed) if closed else "",
    )


def _outcome(run: Frame) -> tuple[Literal["open", "done", "stopped", "voided"], str]:
    voided = run.of("voided")
    if voided:
        return "voided", voided[-1]["body"]["reason"]
    ended = run.of("ended")
    if not ended:
        return "open", ""
    body = ended[0]["body"]
    return ("done" if body["outcome"] == "done" else "stopped"), body["reason"]


def _stop(run: Frame) -> str:
    """Why the run was stopped, to stand inside a sentence."""
    stop = run.final["stop"]
    why = stop["why"] if stop else ""
    return why[:1].lower() + why[1:].removesuffix(".") if why and not why.isupper() else why


def _review(run: Frame) -> Review | None:
    """What the supervisor who is to countersign did in the run itself."""
    who = run.context.reviewer
    if who is None:
        return None
    allowed = [e for e in run.of("went-on") if e["body"]["authority"] == who.id]
    says = ""
    if allowed:
        many = words.count(len(allowed), "deviation")
        says = f"{who.name} allowed {many} in this run and countersigns it as well."
    return Review(person=who.id, name=who.name, both=bool(allowed), says=says)
