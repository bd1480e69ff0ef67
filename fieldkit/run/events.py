"""Events: the closed set of things that can happen in a run, and their exact wire form.

An event is a UTF-8 JSON object made on the tablet; its bytes are stored and hashed as made, never re-serialised:

    {"v": 1, "run": "0731-B2-2", "chain": "<device>.<epoch>", "seq": 0, "prev": "<sha256 of the bytes before>",
     "kind": "read", "by": "<person id>", "at": {"wall": "2026-07-31T14:31:07.123+01:00", "mono": "81234.5",
     "boot": "<id>"}, "app": "0.1.0", "body": {...}}

`prev` of seq 0 is the sheet's SHA-256. `mono` is milliseconds of the monotonic clock since `boot`. Numbers
that a person typed are strings as typed. To add an event: a class here, one line in EVENTS, one arm in each
fold (fieldkit.run.state and static/core/state.js), one frozen sample in tests/vectors/events/. An old version
is lifted by UPCASTS when it is read; the stored bytes stay as they are.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Callable
from typing import Any, Literal

from pydantic import BaseModel, ConfigDict, ValidationError

from fieldkit.errors import Refusal
from fieldkit.sheet.parts import SourceState

VERSION = 1


class Body(BaseModel):
    model_config = ConfigDict(extra="forbid", frozen=True)


class GivenValue(Body):
    """A given as the register has it: texts (one, or the rungs of a ladder), the unit, and where it came from."""

    texts: tuple[str, ...]
    unit: str = ""
    source: str


class Person(Body):
    id: str
    name: str
    roles: tuple[str, ...]


class Instrument(Body):
    """What an instrument was at the time: accuracy is percent of reading plus digits of the resolution."""

    id: str
    reads: str
    unit: str
    low: str | None = None
    high: str | None = None
    resolution: str
    percent: str = "0"
    digits: str = "0"
    calibrated_to: str | None = None
    certificate: str = ""


class LockOnBoard(Body):
    point: str
    sources: tuple[str, ...]
    lock: str
    tag: str = ""
    holder: str
    holder_name: str = ""
    run: str
    since: str


class EarthOnBoard(Body):
    stick: str
    point: str
    source: str
    run: str
    since: str


class Earlier(Body):
    """An earlier finished run on the same tube that an `after` of the sheet was checked against."""

    procedure: str
    run: str
    ended: str
    outcome: str


class Tablet(Body):
    device: str
    name: str
    installed: bool
    persisted: bool
    probe: str
    agent: str = ""


class RunStarted(Body):
    sheet: str
    procedure: str
    edition: int
    site: str
    site_name: str
    cabinet: str
    tube: str
    #: name -> value, every given of the sheet
    givens: dict[str, GivenValue]
    #: role in the cabinet -> instrument id
    meters: dict[str, str]
    instruments: tuple[Instrument, ...]
    #: place -> sources that reach it, from the cabinet's register
    places: dict[str, tuple[str, ...]]
    people: tuple[Person, ...]
    #: ids of those present; one id means alone
    present: tuple[str, ...]
    locks: tuple[LockOnBoard, ...] = ()
    earths: tuple[EarthOnBoard, ...] = ()
    earlier: tuple[Earlier, ...] = ()
    tablet: Tablet
    kit: str
    #: a rehearsal is marked everywhere and is no record of real work
    rehearsal: bool = False


class StatesDeclared(Body):
    """The energy states as found, against the sheet and the lock board, before anything opens."""

    states: dict[str, SourceState]
    #: seconds for which a source has been in its state, as the person states it (decimal string)
    ages: dict[str, str] = {}
    board_seen: bool
    #: locks found on the cabinet that the board did not show, named with their holders
    locks: tuple[LockOnBoard, ...] = ()


class Answer(Body):
    """Base of what answers a step: which step, and the move it takes (None: it waits for the person's choice)."""

    step: str
    move: str | None = None


class Acknowledged(Answer):
    """A caution was read to everyone named."""

    heard: tuple[str, ...]


class Confirmed(Answer):
    pass


class Read(Answer):
    text: str
    unit: str
    instrument: str | None = None


class PointRead(Body):
    name: str
    text: str


class Proved(Answer):
    instrument: str
    before: str
    points: tuple[PointRead, ...]
    after: str


class Locked(Answer):
    point: str
    lock: str
    tag: str
    holder: str


class Check(Body):
    """One of the three checks of the exception: holder not reachable, not on site, told before return."""

    name: Literal["not on site", "tried to reach", "told before return"]
    how: str


class Unlocked(Answer):
    """A lock taken off by `who` (its holder, or under the exception another), whose signature event follows at once."""

    point: str
    lock: str
    who: str
    checks: tuple[Check, ...] = ()
    #: the second person of the exception
    second: str | None = None


class Earthed(Answer):
    stick: str
    point: str


class Lifted(Answer):
    stick: str
    point: str


class Chosen(Answer):
    value: str


class Released(Answer):
    """A hold point, released by `who`, whose signature event follows at once."""

    who: str
    statement: str


class Pictured(Answer):
    """A picture was taken; for a step, or beside one (`step` is then where the run stood, `move` None)."""

    sha256: str
    media: Literal["image/jpeg"]
    width: int
    height: int
    size: int
    note: str = ""


class Remarked(Answer):
    text: str


class WorkedOut(Answer):
    """A derived value as the tablet computed it, 12 significant digits in SI; recomputed by everyone later."""

    value: str


class Waited(Answer):
    pass


class PeopleCounted(Answer):
    place: str
    way: Literal["in", "out"]
    names: tuple[str, ...]


class WentOn(Body):
    """The person picked a move after a reading: again, deviation, stop, or one of several plain ones."""

    step: str
    move: str
    reason: str = ""
    #: the supervisor who allowed a deviation; their signature event follows at once
    authority: str | None = None
    #: "maker's letter", "station's rule 12"
    under: str = ""


class Corrected(Body):
    """The text of an earlier event was wrong. `field`: "text", "before", "after", "points.<name>", "lock"."""

    seq: int
    field: str
    text: str
    reason: str
    move: str | None = None


class SafeBegun(Body):
    why: str = ""


class SafeStepDone(Body):
    item: str
    #: False when it was so already
    done: bool = True


class SafeEnded(Body):
    remark: str = ""


class TripRecorded(Body):
    indicator: str
    level: str = ""
    done: str
    #: reading on an indicator, as typed
    kind: Literal["trip", "odd"]


class Paused(Body):
    reason: str = ""


class Resumed(Body):
    """After a gap: reload, sleep, killed browser, pause. `wall_s` and `mono_s` are what passed by each clock."""

    cause: Literal["pause", "reload", "sleep", "trip"]
    wall_s: str
    mono_s: str | None = None


class StatesConfirmed(Body):
    """The resume check: each source as it is now; `unbroken` names those that held through the gap."""

    states: dict[str, SourceState]
    unbroken: tuple[str, ...]


class ClockChanged(Body):
    wall_s: str
    mono_s: str


class PersonChanged(Body):
    to: str


class StorageFound(Body):
    """The tablet's own storage was found short or damaged and was restored from its copy."""

    lost: int
    restored: int
    note: str = ""


class Ended(Body):
    """The run is over. `outcome` done: at "@end"; stopped: made safe or abandoned with a reason."""

    outcome: Literal["done", "stopped"]
    reason: str = ""
    states: dict[str, SourceState]
    locks: tuple[LockOnBoard, ...]
    earths: tuple[EarthOnBoard, ...]


class Voided(Body):
    reason: str


class Reopened(Body):
    """A returned run was taken up again; only corrections, remarks and pictures may follow, then a signature."""

    reason: str
    returned_by: str


class Signed(Body):
    """A person's compact JWS (ES256, x5c) over the head: `seq`-1 of this event. See DEVELOPERS.md, "Signatures"."""

    person: str
    meaning: Literal["performed", "witnessed", "released", "allowed", "unlocked", "handed over"]
    jws: str


#: kind on the wire -> model, in the order of DEVELOPERS.md
EVENTS: dict[str, type[Body]] = {
    "run-started": RunStarted,
    "states-declared": StatesDeclared,
    "acknowledged": Acknowledged,
    "confirmed": Confirmed,
    "read": Read,
    "proved": Proved,
    "locked": Locked,
    "unlocked": Unlocked,
    "earthed": Earthed,
    "lifted": Lifted,
    "chosen": Chosen,
    "released": Released,
    "pictured": Pictured,
    "remarked": Remarked,
    "worked-out": WorkedOut,
    "waited": Waited,
    "people-counted": PeopleCounted,
    "went-on": WentOn,
    "corrected": Corrected,
    "safe-begun": SafeBegun,
    "safe-step-done": SafeStepDone,
    "safe-ended": SafeEnded,
    "trip-recorded": TripRecorded,
    "paused": Paused,
    "resumed": Resumed,
    "states-confirmed": StatesConfirmed,
    "clock-changed": ClockChanged,
    "person-changed": PersonChanged,
    "storage-found": StorageFound,
    "ended": Ended,
    "voided": Voided,
    "reopened": Reopened,
    "signed": Signed,
}

#: (kind, version) -> body of the next version; stored bytes are never touched
UPCASTS: dict[tuple[str, int], Callable[[dict[str, Any]], dict[str, Any]]] = {}


class At(Body):
    wall: str
    mono: str
    boot: str


class Envelope(Body):
    v: int
    run: str
    chain: str
    seq: int
    prev: str
    kind: str
    by: str
    at: At
    app: str
    body: dict[str, Any]


class Event(Body):
    """A parsed event beside the bytes it came from."""

    head: Envelope
    body: Any
    sha256: str
    raw: bytes


def plain(event: Event) -> dict[str, Any]:
    """The event as plain JSON values, defaults written out: what the fold reads, here and on the tablet."""
    head = event.head
    return {
        "seq": head.seq,
        "kind": head.kind,
        "by": head.by,
        "at": {"wall": head.at.wall, "mono": head.at.mono, "boot": head.at.boot},
        "run": head.run,
        "chain": head.chain,
        "prev": head.prev,
        "sha256": event.sha256,
        "body": event.body.model_dump(mode="json"),
    }


def next_event(
    state: dict[str, Any], kind: str, body: dict[str, Any], by: str, at: dict[str, str], app: str
) -> dict[str, Any]:
    """The envelope of the event that follows `state`, ready for `to_text`; the caller hashes and stores that text."""
    return {
        "v": VERSION,
        "run": state["run"],
        "chain": state["chain"],
        "seq": state["seq"] + 1,
        "prev": state["head"],
        "kind": kind,
        "by": by,
        "at": {"wall": at["wall"], "mono": at["mono"], "boot": at["boot"]},
        "app": app,
        "body": body,
    }


def to_text(envelope: dict[str, Any]) -> str:
    """One event as compact JSON in the order of its keys. Made once, by whoever makes the event; never remade."""
    return json.dumps(envelope, ensure_ascii=False, separators=(",", ":"), allow_nan=False)


def digest(raw: bytes) -> str:
    """SHA-256 of an event's bytes: its name, and the next one's `prev`."""
    return hashlib.sha256(raw).hexdigest()


def read_body(kind: str, body: dict[str, Any]) -> Body:
    """A body as its model has it. Strict: "1" is no number and 1 no flag, as on the tablet. Raises ValidationError."""
    return EVENTS[kind].model_validate_json(json.dumps(body), strict=True)


def _no_constant(name: str) -> Any:
    raise ValueError(f"{name} is not JSON")


def _no_duplicates(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    found = dict(pairs)
    if len(found) != len(pairs):
        raise ValueError("a key stands twice")
    return found


def parse(raw: bytes) -> Event:
    """The event in `raw`. Raises Refusal damaged-event or unknown-version; the caller keeps the bytes either way."""
    try:
        data = json.loads(raw.decode("utf-8", "strict"), parse_constant=_no_constant, object_pairs_hook=_no_duplicates)
        head = Envelope.model_validate_json(json.dumps(data), strict=True)
    except (ValueError, RecursionError) as exc:
        raise Refusal("damaged-event", f"This is not an event: {str(exc).splitlines()[0]}.") from exc
    body, v = head.body, head.v
    while v < VERSION and (head.kind, v) in UPCASTS:
        body, v = UPCASTS[head.kind, v](body), v + 1
    if v != VERSION or head.kind not in EVENTS:
        raise Refusal(
            "unknown-version",
            f"Event {head.seq} is {head.kind!r} version {head.v}, which is not known here. Update fieldkit.",
        )
    try:
        return Event(head=head, body=read_body(head.kind, body), sha256=digest(raw), raw=raw)
    except ValidationError as exc:
        first = exc.errors()[0]
        where = ".".join(str(p) for p in first["loc"])
        raise Refusal(
            "damaged-event", f"Event {head.seq} ({head.kind}) is damaged at {where}: {first['msg']}."
        ) from exc
