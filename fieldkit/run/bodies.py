"""Bodies of events: what each of the closed set carries. EVENTS lists them in the order of DEVELOPERS.md.

To add an event: a class here and one line in EVENTS, one line in static/core/events.js, one arm in each
fieldkit.run.answers or arms and its twin, one frozen sample in tests/vectors/events/. Numbers that a person typed are
strings as typed. Not here: the envelope around a body, reading and writing (fieldkit.run.events).
"""

from __future__ import annotations

from typing import Literal

from pydantic import BaseModel, ConfigDict

from fieldkit.run.instruments import Instrument
from fieldkit.sheet.parts import SourceState


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
    """One reading. `range` names the range of the instrument that was used; "" is the only one that it has."""

    text: str
    unit: str
    instrument: str | None = None
    range: str = ""


class PointRead(Body):
    name: str
    text: str


class Proved(Answer):
    instrument: str
    before: str
    points: tuple[PointRead, ...]
    after: str
    range: str = ""


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
