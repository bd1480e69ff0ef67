"""The record of a run: plain frozen data, "record/1". What a supervisor reads, the PDF prints and verify compares.

Lists are in the order of the run unless said otherwise; their lines are in lines.py. `context` holds what is known
outside the events, so that anybody with the sheet and the events can build the same record again.
Not here: how it is built (build.py), what deserves attention (attention.py), where it is printed (sections.py).
To add something that a record says: a field here, its lines in a module beside it, the golden record anew.
"""

from __future__ import annotations

import hashlib
import json
from typing import Any, Literal

from pydantic import ValidationError

from fieldkit.errors import Refusal
from fieldkit.record.context import Context, Piece
from fieldkit.record.lines import (
    Chain,
    Correction,
    Deviation,
    EarthLine,
    FormulaLine,
    GivenLine,
    Hold,
    InstrumentLine,
    Lane,
    LockLine,
    LogLine,
    Note,
    Picture,
    Pointer,
    Proof,
    Reading,
    Retake,
    Signature,
    SourceLine,
    Wait,
)

VERSION = "record/1"


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
    #: failed, and the procedure's own way for it was taken
    met: int = 0
    #: failed, and none of these
    failed: int
    not_judged: int
    events: int


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


def from_bytes(data: bytes, lenient: bool = False) -> Record:
    """The record in `data`. Raises Refusal unknown-version or damaged-record, naming what is wrong.

    Lenient: a key that this fieldkit does not know, of a later one, is passed over.
    """
    try:
        raw: Any = json.loads(data)
    except (ValueError, RecursionError) as exc:
        raise Refusal("damaged-record", f"This is not a record: {exc}.") from exc
    found = raw.get("fieldkit") if isinstance(raw, dict) else None
    if found != VERSION:
        raise Refusal("unknown-version", f"Record version {found!r} is not known here ({VERSION} is). Update fieldkit.")
    try:
        return Record.model_validate(raw, extra="ignore" if lenient else None)
    except ValidationError as exc:
        first = exc.errors()[0]
        where = ".".join(str(p) for p in first["loc"])
        raise Refusal("damaged-record", f"The record is damaged at {where}: {first['msg']}.") from exc
