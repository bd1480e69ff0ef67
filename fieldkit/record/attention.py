"""What deserves a supervisor's attention, one rule a function, in the order of weight.

A rule takes the frame and the lists already built and gives items without numbers; `attention` numbers them. To add a
rule: a function, its line in RULES where its weight puts it, a test in tests/record/test_attention.py.
Not here: any verdict. A rule points; the person decides.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from decimal import Decimal
from typing import Any

from fieldkit.record import course, lanes, summary, words
from fieldkit.record.frame import Frame, titled
from fieldkit.record.lines import Chain, Correction, Deviation, EarthLine, LockLine, Note, Reading, Signature
from fieldkit.record.model import Attention, Review, Scale
from fieldkit.run import readings

#: a reading that moved by more than this part of its limits' distance since the last run is shown (own choice)
MOVED = Decimal("0.25")


@dataclass(frozen=True)
class Lists:
    """What the rules look at besides the frame."""

    readings: tuple[Reading, ...]
    deviations: tuple[Deviation, ...]
    corrections: tuple[Correction, ...]
    locks: tuple[LockLine, ...]
    earths: tuple[EarthLine, ...]
    signatures: tuple[Signature, ...]
    safe: tuple[Note, ...]
    chain: Chain
    review: Review | None


Rule = Callable[[Frame, Lists], Iterator[Attention]]


def attention(frame: Frame, lists: Lists) -> tuple[Attention, ...]:
    """Everything that deserves attention, numbered from 1; one reading stands once, under its weightiest rule."""
    found: list[Attention] = []
    seen: set[tuple[int, str]] = set()
    for rule in RULES:
        for item in rule(frame, lists):
            about = (item.seq, item.title) if item.scale is not None else (item.seq, item.code + item.title)
            if about in seen:
                continue
            seen.add(about)
            found.append(item.model_copy(update={"n": len(found) + 1}))
    return tuple(found)


def _item(frame: Frame, code: str, tag: str, title: str, says: str, seq: int, **more: Any) -> Attention:
    event = next((e for e in frame.events if e["seq"] == seq), frame.events[-1])
    step = more.pop("step", event["body"].get("step") or "")
    lane = lanes.lane_of(frame, step, seq, more.pop("source", ""))
    return Attention(
        n=0,
        code=code,
        tag=tag,
        title=title,
        says=says,
        seq=seq,
        tone=more.pop("tone", ""),
        value=more.pop("value", ""),
        unit=more.pop("unit", ""),
        struck=more.pop("struck", ""),
        by=more.pop("by", ""),
        second=frame.second(event),
        lane=lane,
        **more,
    )


def _of(frame: Frame, code: str, tag: str, r: Reading, tone: str = "", by: str = "", says: str = "") -> Attention:
    """An item about a reading: its own sentence without the value, its scale, the last run."""
    body = r.words.partition(": ")[2] or r.words
    last = next((f"Last run {words.minus(p.value)} {r.unit}." for p in r.pointers if p.name == "last run"), "")
    title = ", ".join(p for p in (titled(r.title, r.level), r.part) if p)
    return _item(
        frame,
        code,
        tag,
        title,
        says or words.sentence(body),
        r.seq,
        tone=tone,
        value=words.minus(r.value or r.text),
        unit=r.unit,
        by=" ".join(p for p in (by, last) if p),
        scale=scale(r),
        step=r.step,
    )


def scale(r: Reading) -> Scale:
    """The reading as fieldkit.drawing takes it."""
    limits = r.limits
    return Scale(
        value=r.value,
        u=r.u,
        unit=r.unit,
        low=limits.low if limits else None,
        high=limits.high if limits else None,
        low_name=limits.low_name if limits else "",
        high_name=limits.high_name if limits else "",
        caution_low=limits.caution_low if limits else None,
        caution_high=limits.caution_high if limits else None,
        accept_low=limits.accept_low if limits else None,
        accept_high=limits.accept_high if limits else None,
        plate=r.plate,
        olds=r.pointers,
        verdict=r.verdict,
        why=r.reason,
        says=r.words,
    )


def disagreement(frame: Frame, lists: Lists) -> Iterator[Attention]:
    """The server's recomputation of the run is not what the tablet recorded."""
    for d in lists.chain.disagree:
        title = frame.rows.get(d.seq, {}).get("title") or f"Event {d.seq}"
        yield _item(frame, "disagreement", "Disagrees", title, d.says, d.seq, tone="dev", by=f"Event {d.seq}.")


def chain(frame: Frame, lists: Lists) -> Iterator[Attention]:
    if not lists.chain.whole:
        says = frame.context.alarm or "An event does not follow the one before it."
        yield _item(frame, "chain", "Chain broken", "Chain of events", says, frame.events[-1]["seq"], tone="dev")


def kept(frame: Frame, lists: Lists) -> Iterator[Attention]:
    """Events that arrived and could not be accepted."""
    last = frame.events[-1]["seq"]
    for k in frame.context.kept:
        title = "Event not accepted" if k.seq is None else f"Event {k.seq} not accepted"
        yield _item(
            frame, "kept", "Kept aside", title, k.says, last, tone="dev", by="It is kept and not part of the run."
        )


def signature(frame: Frame, lists: Lists) -> Iterator[Attention]:
    for s in lists.signatures:
        if not s.holds:
            title = f"Signature of {s.name}, {s.meaning}"
            yield _item(frame, "signature", "Signature", title, words.sentence(s.says), s.seq, tone="dev")


def deviation(frame: Frame, lists: Lists) -> Iterator[Attention]:
    by_seq = {r.seq: r for r in lists.readings if r.deviation is not None or r.kind == "proof"}
    for d in lists.deviations:
        under = f" Under: {d.under}." if d.under else ""
        by = f"{d.authority_name} {d.time[:5]}: {words.quoted(d.reason)}{under}"
        r = by_seq.get(d.seq)
        if r is not None:
            yield _of(frame, "deviation", "Deviation", r, "dev", by)
        else:
            yield _item(frame, "deviation", "Deviation", d.title, words.sentence(d.says), d.seq, tone="dev", by=by)


def both(frame: Frame, lists: Lists) -> Iterator[Attention]:
    """The supervisor who countersigns allowed a deviation in the same run."""
    if lists.review is not None and lists.review.both:
        seq = lists.deviations[0].seq if lists.deviations else frame.events[-1]["seq"]
        yield _item(frame, "both", "Same supervisor", lists.review.name, lists.review.says, seq)


def stopped(frame: Frame, lists: Lists) -> Iterator[Attention]:
    stop = frame.final["stop"]
    if stop:
        title = frame.rows.get(stop["seq"], {}).get("title") or "The run"
        yield _item(frame, "stopped", "Stopped", title, words.sentence(stop["why"]), stop["seq"], tone="dev")


def made_safe(frame: Frame, lists: Lists) -> Iterator[Attention]:
    if lists.safe:
        first = lists.safe[0]
        done = sum(e["kind"] == "safe-step-done" for e in frame.events)
        says = f"{words.sentence(first.says)} {words.count(done, 'line')} of the list recorded."
        yield _item(
            frame, "make-safe", "Made safe", "Make safe", says, first.seq, by=f"{first.by_name} {first.time[:5]}."
        )


def people_in(frame: Frame, lists: Lists) -> Iterator[Attention]:
    """Somebody was signed in at a place when the run ended: nobody has said that they came out."""
    for place, people in frame.final["hands"].items() if frame.of("ended", "voided") else ():
        if people:
            says = f"{words.listed([frame.name(p) for p in people])} signed in at the {place}, and not counted out."
            yield _item(frame, "people-in", "Not counted out", place, says, frame.events[-1]["seq"], tone="dev")


def lock_on(frame: Frame, lists: Lists) -> Iterator[Attention]:
    """A lock or an earth that is still on at the end; while a run goes on that is as it should be."""
    if not frame.of("ended", "voided"):
        return
    last = frame.events[-1]["seq"]
    for lock in lists.locks:
        if lock.left_on:
            says = f"On {lock.point} ({words.listed(lock.sources)}) since {lock.on_time}, held by {lock.holder_name}."
            seq, source = lock.on_seq or last, lock.sources[0] if lock.sources else ""
            yield _item(frame, "lock-on", "Lock still on", f"Lock {lock.lock}", says, seq, source=source)
    for earth in lists.earths:
        if earth.left_on:
            says = f"On {earth.point} since {earth.on_time}."
            seq, source = earth.on_seq or last, earth.source
            yield _item(frame, "earth-on", "Earth still on", f"Stick {earth.stick}", says, seq, source=source)


def exception(frame: Frame, lists: Lists) -> Iterator[Attention]:
    """A lock that another person than its holder took off."""
    for lock in lists.locks:
        if lock.checks and lock.off_seq is not None:
            says = f"{lock.holder_name}’s lock was taken off by {lock.off_by} with {lock.second}. " + "; ".join(
                lock.checks
            )
            yield _item(
                frame, "lock-exception", "Another’s lock", f"Lock {lock.lock}", words.sentence(says), lock.off_seq
            )


def failed(frame: Frame, lists: Lists) -> Iterator[Attention]:
    for r in lists.readings:
        if r.verdict in ("fail", "conditional fail") and r.deviation is None and not r.retaken:
            yield _of(frame, "failed", words.first_up(r.verdict), r, "dev", _then(frame, r))


def _then(frame: Frame, r: Reading) -> str:
    """What followed a fail: the way that the procedure itself lays down for it, and why it was taken."""
    row = frame.rows[r.seq]
    move = frame.index.moves.get(row["move"] or "") or {}
    label = str(move.get("label") or "").replace("{level}", r.level)
    if not label:
        return ""
    met = summary.met(frame, r)
    says = f"Then, as the procedure lays down: {label[:1].lower()}{label[1:]}" if met else f"Then: {label}"
    reason = f" {r.by_name} {r.time[:5]}: {words.quoted(row['reason'])}" if row["reason"] else ""
    return words.sentence(says) + reason


def trip(frame: Frame, lists: Lists) -> Iterator[Attention]:
    for note in course.trips(frame):
        by = f"{note.by_name} {note.time[:5]}."
        yield _item(
            frame, "trip", note.title, note.says.partition(".")[0], note.says.partition(". ")[2], note.seq, by=by
        )


def retaken(frame: Frame, lists: Lists) -> Iterator[Attention]:
    reasons = {e["body"]["step"]: e["body"]["reason"] for e in frame.of("went-on") if e["body"]["reason"]}
    for r in lists.readings:
        if r.retaken and r.verdict in ("fail", "conditional fail"):
            reason = frame.rows[r.seq]["reason"] or reasons.get(r.step, "")
            by = f"{r.by_name} {r.time[:5]}: {words.quoted(reason)}" if reason else f"{r.by_name} {r.time[:5]}."
            yield _of(frame, "retaken", "Fail, taken again", r, "", by)


def conditional(frame: Frame, lists: Lists) -> Iterator[Attention]:
    for r in lists.readings:
        if r.verdict == "conditional pass":
            yield _of(frame, "conditional", "Conditional pass", r, "con")


def undecided(frame: Frame, lists: Lists) -> Iterator[Attention]:
    """There are limits, and this meter or the sheet could not decide."""
    for r in lists.readings:
        if r.verdict == "not judged" and r.limits is not None:
            yield _of(frame, "not-judged", "Not judged", r, "", says=words.sentence(r.reason))


def near(frame: Frame, lists: Lists) -> Iterator[Attention]:
    for r in lists.readings:
        if r.near:
            yield _of(frame, "near", "Near a limit", r)


def untypical(frame: Frame, lists: Lists) -> Iterator[Attention]:
    for r in lists.readings:
        if r.untypical:
            yield _of(frame, "untypical", "Unusual", r)


def moved(frame: Frame, lists: Lists) -> Iterator[Attention]:
    """A reading that is far from where it was in the tube's last run."""
    for r in lists.readings:
        last = next((p.value for p in r.pointers if p.name == "last run"), None)
        if last is None or r.limits is None:
            continue
        low, high = r.limits.low, r.limits.high
        distance = Decimal(high) - Decimal(low) if low and high else abs(Decimal(low or high or "0"))
        change = Decimal(r.value) - Decimal(last)
        if distance and abs(change) > MOVED * distance:
            way = "up" if change > 0 else "down"
            says = (
                f"{words.first_up(way)} {abs(change)} {r.unit} since the last run, more than a quarter of its limits."
            )
            yield _of(frame, "moved", "Changed", r, says=says)


def overdue(frame: Frame, lists: Lists) -> Iterator[Attention]:
    """One item a meter whose calibration had run out, at its first reading."""
    seen = set()
    for r in lists.readings:
        if r.overdue and r.instrument not in seen:
            seen.add(r.instrument)
            meter = readings.instrument(frame.final, r.instrument)
            due = meter["calibrated_to"] if meter else ""
            says = f"The calibration of {r.instrument} ran out on {words.day(due or '')}; the verdicts stand."
            yield _item(
                frame, "overdue", "Meter overdue", r.instrument or "", says, r.seq, by=f"First read at {r.time[:5]}."
            )


def correction(frame: Frame, lists: Lists) -> Iterator[Attention]:
    for c in lists.corrections:
        title = f"{c.title}, {c.part}" if c.part else c.title
        yield _item(
            frame,
            "correction",
            "Correction",
            title,
            f"Put right after {words.spoken(c.after_s)}: {words.quoted(c.reason)}",
            c.seq,
            struck=words.minus(c.old),
            value=words.minus(c.new),
            unit=c.unit,
            by=f"{c.by_name} {c.time[:5]}.",
            step=c.step,
        )


def clock(frame: Frame, lists: Lists) -> Iterator[Attention]:
    for e in frame.of("clock-changed"):
        open_step = frame.index.steps.get(frame.before(e)["node"])
        title = open_step["title"] if open_step else "The tablet’s clock"
        step = open_step["id"] if open_step else ""
        yield _item(frame, "clock", "Clock", title, course.clock_says(e["body"]), e["seq"], step=step)


def gap(frame: Frame, lists: Lists) -> Iterator[Attention]:
    """The tablet was away for longer than a moment, or a wait was counted across a gap."""
    for e in frame.of("resumed"):
        if frame.after(e)["phase"] == "confirm" and e["body"]["cause"] != "pause":
            body = e["body"]
            says = f"The tablet was away for {words.spoken(abs(words.whole(body['wall_s'])))} ({body['cause']})."
            yield _item(frame, "gap", "Gap", "Tablet away", says, e["seq"])
    for wait in course.waits(frame):
        if wait.flag:
            says = words.sentence(f"{wait.says}, {wait.flag}" if wait.says else wait.flag)
            yield _item(frame, "wait-flag", "Wait", wait.title, says, wait.seq)


def storage(frame: Frame, lists: Lists) -> Iterator[Attention]:
    for note in course.gaps(frame):
        if note.title == "Storage found short":
            yield _item(frame, "storage", "Storage", note.title, note.says, note.seq)


def returned(frame: Frame, lists: Lists) -> Iterator[Attention]:
    """It was returned before; what was asked for stands beside what came."""
    last = frame.events[-1]["seq"]
    for r in frame.context.returns:
        by = f"{r.by_name}, {words.day(r.time)}."
        yield _item(frame, "returned", "Returned before", "Record", words.quoted(r.reason), min(r.seq, last), by=by)


RULES: tuple[Rule, ...] = (
    disagreement,
    chain,
    kept,
    signature,
    deviation,
    both,
    failed,
    stopped,
    made_safe,
    people_in,
    lock_on,
    exception,
    trip,
    retaken,
    conditional,
    undecided,
    near,
    untypical,
    moved,
    correction,
    overdue,
    clock,
    gap,
    storage,
    returned,
)
