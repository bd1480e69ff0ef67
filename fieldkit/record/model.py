"""The record of a run: plain frozen data, "record/1". What a supervisor reads, what the PDF prints, what verify compares.

Every number is a decimal string in the unit beside it; `at` is a time as the tablet wrote it (local, with its offset),
`time` the same as printed (14:29:31). Lists are in the order of the run unless said otherwise. `context` holds what is
known outside the events, so that anybody with the sheet and the events can build the same record again.
Not here: how it is built (build.py), what deserves attention (attention.py), where it is printed (sections.py).
To add something that a record says: a field here, its lines in build.py or a module beside it, a golden record.
"""

from __future__ import annotations

import hashlib
import json
from typing import Any, Literal

from pydantic import BaseModel, ConfigDict, ValidationError

from fieldkit.errors import Refusal

VERSION = "record/1"


class Piece(BaseModel):
    model_config = ConfigDict(extra="forbid", frozen=True)


# ---- what is known outside the events --------------------------------------------------------------------------------


class Check(Piece):
    """What came of checking one signature event."""

    seq: int
    holds: bool
    kid: str
    says: str = ""


class Returned(Piece):
    by_name: str
    reason: str
    time: str
    #: the last event that was there when it was returned
    seq: int


class KeptEvent(Piece):
    """An event that the server could not accept: kept, shown, not part of the chain."""

    seq: int | None
    code: str
    says: str


class LastRun(Piece):
    """The same reading in the tube's run before this one."""

    text: str
    unit: str
    run: str
    day: str


class Reviewer(Piece):
    id: str
    name: str


class Context(Piece):
    """What `build` is told besides sheet and events."""

    station: str
    #: "inductive output tube, 17 200 heater hours"
    tube_says: str = ""
    #: person id -> name, for ids that the events do not name
    names: dict[str, str] = {}
    #: the safety proof of this edition exists
    proved: bool = False
    checks: tuple[Check, ...] = ()
    kept: tuple[KeptEvent, ...] = ()
    #: what is wrong with the chain, in the server's words; "" when nothing is
    alarm: str = ""
    returns: tuple[Returned, ...] = ()
    last_run: dict[str, LastRun] = {}
    #: the supervisor for whom the record is made ready to countersign
    reviewer: Reviewer | None = None
    received: str = ""
    app: str = ""


# ---- the record ------------------------------------------------------------------------------------------------------


class Head(Piece):
    station: str
    site: str
    site_name: str
    cabinet: str
    tube: str
    tube_says: str
    run: str
    procedure: str
    edition: int
    title: str
    purpose: str
    sheet: str
    proved: bool
    rehearsal: bool
    outcome: Literal["open", "done", "stopped", "voided"]
    outcome_reason: str
    recorder: str
    recorder_name: str
    #: names of those present at the start; one name means alone
    present: tuple[str, ...]
    tablet: str
    started: str
    ended: str
    started_utc: str
    ended_utc: str
    #: "+01:00"; two where the tablet's zone changed
    zone: str
    day: str
    from_time: str
    to_time: str


class Counts(Piece):
    steps_done: int
    steps: int
    readings: int
    passed: int
    conditional: int
    #: failed, and accepted as a deviation
    deviations: int
    #: failed, and taken again
    retaken: int
    #: failed, and neither
    failed: int
    not_judged: int
    events: int


class SourceLine(Piece):
    source: str
    title: str
    state: str
    says: str


class Span(Piece):
    """From when a source was in a state; `second` counts from midnight of the run's first day."""

    second: int
    state: str
    warming: bool = False
    decay: bool = False
    seq: int


class Lane(Piece):
    source: str
    title: str
    short: str
    spans: tuple[Span, ...]


class Limits(Piece):
    """As shown and applied: rounded inward. `says` is the limits in words."""

    low: str | None = None
    high: str | None = None
    low_name: str = ""
    high_name: str = ""
    caution_low: str | None = None
    caution_high: str | None = None
    accept_low: str | None = None
    accept_high: str | None = None
    guarded: bool = False
    says: str = ""


class OldValue(Piece):
    """A value that a correction replaced; it stays visible, struck through."""

    text: str
    seq: int
    reason: str
    by_name: str
    time: str


class Pointer(Piece):
    """A hollow pointer on the scale: as found, last run, an earlier try."""

    name: str
    value: str


class Reading(Piece):
    seq: int
    at: str
    time: str
    by_name: str
    step: str
    number: str
    title: str
    level: str
    #: which value of a proof: "tester before", a point's title, "tester after"; "" for a plain reading
    part: str = ""
    #: as typed, and as a plain decimal
    text: str
    value: str
    unit: str
    u: str | None
    limits: Limits | None
    plate: str | None
    pointers: tuple[Pointer, ...] = ()
    old: tuple[OldValue, ...] = ()
    #: distance to the nearest limit, negative outside
    margin: str | None
    #: the same in units of U, one decimal; None without U
    margin_u: str | None
    verdict: str
    reason: str
    near: bool
    untypical: bool
    overdue: bool
    protects: bool
    instrument: str | None
    words: str
    #: number of the deviation that accepted it
    deviation: int | None = None
    #: it failed and was taken again
    retaken: bool = False
    #: how many tries came before this one
    tries_before: int = 0
    #: an instrument reading, or a result worked out
    kind: Literal["reading", "result", "proof"] = "reading"
    formulas: tuple[str, ...] = ()


class FormulaLine(Piece):
    """A library formula used: what it means, and its published source."""

    name: str
    meaning: str
    reference: str


class Deviation(Piece):
    n: int
    seq: int
    at: str
    time: str
    step: str
    number: str
    title: str
    value: str
    unit: str
    limits: str
    says: str
    reason: str
    under: str
    authority: str
    authority_name: str


class Retake(Piece):
    """Why a step was gone through again."""

    seq: int
    time: str
    number: str
    title: str
    reason: str
    by_name: str


class Correction(Piece):
    seq: int
    of_seq: int
    at: str
    time: str
    step: str
    number: str
    title: str
    #: which value of the event: "" for its text
    part: str
    old: str
    new: str
    unit: str
    reason: str
    by_name: str
    #: whole seconds between the entry and its correction
    after_s: int


class LockLine(Piece):
    point: str
    sources: tuple[str, ...]
    lock: str
    tag: str
    holder_name: str
    #: "" for a lock that was on before this run; its own run is in `from_run`
    on_seq: int | None
    on_time: str
    from_run: str
    off_seq: int | None
    off_time: str
    off_by: str
    #: the checks of taking off another person's lock
    checks: tuple[str, ...] = ()
    second: str = ""
    left_on: bool


class EarthLine(Piece):
    stick: str
    point: str
    source: str
    on_seq: int | None
    on_time: str
    from_run: str
    off_seq: int | None
    off_time: str
    left_on: bool


class Proof(Piece):
    seq: int
    at: str
    time: str
    by_name: str
    number: str
    title: str
    instrument: str
    known_source: str
    verdict: str
    #: one line a value, in order: tester before, points, tester after
    values: tuple[str, ...]


class Wait(Piece):
    seq: int
    time: str
    number: str
    title: str
    #: seconds, decimal strings: asked for, counted by the lesser clock, by the greater
    least: str
    counted: str
    greatest: str
    says: str
    flag: str


class Hold(Piece):
    seq: int
    time: str
    number: str
    title: str
    statement: str
    who: str
    name: str


class Note(Piece):
    """A remark, a trip, a pause, a choice, an act, people in or out, a caution: one line with who and when."""

    seq: int
    at: str
    time: str
    by_name: str
    number: str
    title: str
    says: str


class Picture(Piece):
    seq: int
    at: str
    time: str
    by_name: str
    number: str
    title: str
    note: str
    sha256: str
    width: int
    height: int


class Signature(Piece):
    seq: int
    person: str
    name: str
    role: str
    meaning: str
    statement: str
    #: as the person signed it
    time: str
    kid: str
    #: last event that it covers
    covers: int
    holds: bool
    says: str


class InstrumentLine(Piece):
    id: str
    reads: str
    unit: str
    range: str
    resolution: str
    accuracy: str
    calibrated_to: str
    certificate: str
    #: it took a reading of this run
    used: bool
    overdue: bool


class GivenLine(Piece):
    name: str
    meaning: str
    value: str
    unit: str
    source: str


class Disagreement(Piece):
    """Where the server's recomputation differs from what the tablet recorded."""

    seq: int
    code: str
    says: str


class Chain(Piece):
    chains: tuple[str, ...]
    count: int
    head: str
    #: every event follows the one before it
    whole: bool
    disagree: tuple[Disagreement, ...]


class Scale(Piece):
    """A model for fieldkit.drawing.scale and tiny, as they take it."""

    value: str | None
    u: str | None
    unit: str
    low: str | None
    high: str | None
    low_name: str
    high_name: str
    caution_low: str | None
    caution_high: str | None
    accept_low: str | None
    accept_high: str | None
    plate: str | None
    olds: tuple[Pointer, ...]
    verdict: str
    why: str
    says: str


class Attention(Piece):
    """One thing that deserves attention, numbered in the order of weight."""

    n: int
    code: str
    #: the word in the tag: "Deviation", "Conditional pass", ...
    tag: str
    #: dev (red), con (yellow), "" (frame only)
    tone: Literal["dev", "con", ""]
    title: str
    value: str
    unit: str
    #: a value that was struck through
    struck: str
    says: str
    by: str
    seq: int
    second: int
    #: lane of the drawing that its balloon points at
    lane: int
    scale: Scale | None = None


class Review(Piece):
    """What the countersigning supervisor's own part in the run was."""

    person: str
    name: str
    #: the same supervisor allowed deviations in this run
    both: bool
    says: str


class LogLine(Piece):
    """One event as one line, in order: the whole run."""

    seq: int
    at: str
    time: str
    by_name: str
    kind: str
    number: str
    title: str
    says: str
    sha256: str


class Record(Piece):
    fieldkit: Literal["record/1"] = "record/1"
    head: Head
    #: how the run went, with the date, and without it
    summary: str
    short: str
    counts: Counts
    before: tuple[SourceLine, ...]
    after: tuple[SourceLine, ...]
    before_says: str
    after_says: str
    lanes: tuple[Lane, ...]
    from_second: int
    to_second: int
    attention: tuple[Attention, ...]
    readings: tuple[Reading, ...]
    formulas: tuple[FormulaLine, ...]
    deviations: tuple[Deviation, ...]
    retakes: tuple[Retake, ...]
    corrections: tuple[Correction, ...]
    locks: tuple[LockLine, ...]
    earths: tuple[EarthLine, ...]
    proofs: tuple[Proof, ...]
    waits: tuple[Wait, ...]
    holds: tuple[Hold, ...]
    people: tuple[Note, ...]
    cautions: tuple[Note, ...]
    remarks: tuple[Note, ...]
    trips: tuple[Note, ...]
    #: pauses, resumptions, changed clocks, storage found short
    gaps: tuple[Note, ...]
    safe: tuple[Note, ...]
    choices: tuple[Note, ...]
    pictures: tuple[Picture, ...]
    signatures: tuple[Signature, ...]
    review: Review | None
    instruments: tuple[InstrumentLine, ...]
    givens: tuple[GivenLine, ...]
    log: tuple[LogLine, ...]
    chain: Chain
    next_person: str
    #: how to check this record, in order
    verify: tuple[str, ...]
    context: Context


def to_bytes(record: Record) -> bytes:
    """record.json: UTF-8, keys sorted, no spaces, defaults written out; the same record gives the same bytes."""
    data = record.model_dump(mode="json")
    return json.dumps(data, ensure_ascii=False, sort_keys=True, separators=(",", ":")).encode()


def digest(data: bytes) -> str:
    return hashlib.sha256(data).hexdigest()


def from_bytes(data: bytes) -> Record:
    """The record in `data`. Raises Refusal unknown-version or damaged-record, naming what is wrong."""
    try:
        raw: Any = json.loads(data)
    except (ValueError, RecursionError) as exc:
        raise Refusal("damaged-record", f"This is not a record: {exc}.") from exc
    found = raw.get("fieldkit") if isinstance(raw, dict) else None
    if found != VERSION:
        raise Refusal("unknown-version", f"Record version {found!r} is not known here ({VERSION} is). Update fieldkit.")
    try:
        return Record.model_validate(raw)
    except ValidationError as exc:
        first = exc.errors()[0]
        where = ".".join(str(p) for p in first["loc"])
        raise Refusal("damaged-record", f"The record is damaged at {where}: {first['msg']}.") from exc
