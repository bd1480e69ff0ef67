"""What a record is told besides its sheet and events; it travels inside, so that anybody can build the record again.

Not here: who finds these out (fieldkit.operations.review). Everything has a default that claims nothing.
"""

from __future__ import annotations

from pydantic import BaseModel, ConfigDict


class Piece(BaseModel):
    """Base of everything in a record: frozen, and a key that is not known is an error."""

    model_config = ConfigDict(extra="forbid", frozen=True)


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
