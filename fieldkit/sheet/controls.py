"""Controls: the closed set of things a person can be asked. DEVELOPERS.md lists them with their events.

Each is one model here, one template in templates/controls/, one module in static/tablet/controls/, one arm in
fieldkit.run. A step kind (fieldkit.steps) lowers to these; it is rare that one is added.
"""

from __future__ import annotations

from typing import Annotated, Literal, Union

from pydantic import Field

from fieldkit.sheet.parts import Limits, Meter, Part, Tree, Typical, Unit

SIGNALS = ("DANGER", "WARNING", "CAUTION", "NOTICE")


class Caution(Part):
    """Read aloud, then press and hold. Order of words: hazard, consequence, how to avoid it (ANSI Z535)."""

    control: Literal["caution"] = "caution"
    signal: Literal["DANGER", "WARNING", "CAUTION", "NOTICE"]
    hazard: str
    consequence: str
    avoid: tuple[str, ...]


class Confirm(Part):
    """An act that the person says is done. `held` asks for press and hold (irreversible, or spoken aloud)."""

    control: Literal["confirm"] = "confirm"
    button: str = "Done"
    held: bool = False


class Number(Part):
    """One reading, typed as text."""

    control: Literal["number"] = "number"
    unit: Unit
    meter: Meter | None = None
    #: overrides the instrument's; in the unit, decimal string
    resolution: str | None = None
    limits: Limits | None = None
    typical: Typical | None = None
    #: nameplate value drawn as a chain line
    plate: Tree | None = None
    #: people are protected by this reading: only `pass` counts as passing
    protects: bool = False


class Point(Part):
    """One place where deadness is proved, and which sources that shows."""

    name: str
    title: str
    limits: Limits


class Prove(Part):
    """Prove dead: tester on a known source, every point, tester on the known source again; one control, one event.

    Read first with both hands free, entered afterwards. Any value that fails makes the whole proof fail.
    """

    control: Literal["prove"] = "prove"
    unit: Unit
    tester: Meter
    known_source: str
    known: Limits
    points: tuple[Point, ...]
    resolution: str | None = None


class Lock(Part):
    control: Literal["lock"] = "lock"
    #: isolating point as the cabinet's register names it
    point: str
    sources: tuple[str, ...]
    ask: str = ""


class Unlock(Part):
    """Taken off by its holder's passphrase, or by the three checks with a second person."""

    control: Literal["unlock"] = "unlock"
    point: str
    sources: tuple[str, ...]


class Earth(Part):
    control: Literal["earth"] = "earth"
    stick: str
    point: str
    source: str


class Lift(Part):
    control: Literal["lift"] = "lift"
    stick: str
    point: str
    source: str


class Option(Part):
    value: str
    label: str
    text: str = ""


class Choice(Part):
    control: Literal["choice"] = "choice"
    options: tuple[Option, ...]


class Hold(Part):
    """Only another person than the recorder releases it, with their own passphrase."""

    control: Literal["hold"] = "hold"
    statement: str
    by: Literal["second person", "supervisor"] = "second person"


class Picture(Part):
    control: Literal["picture"] = "picture"
    of: str
    required: bool = True


class Remark(Part):
    control: Literal["remark"] = "remark"
    required: bool = False


class Result(Part):
    """A derived value, shown with its limits; the person sees it and goes on."""

    control: Literal["result"] = "result"
    value: Tree
    unit: Unit
    resolution: str
    limits: Limits | None = None
    typical: Typical | None = None
    plate: Tree | None = None
    #: names of library formulas used, for the reference line
    formulas: tuple[str, ...] = ()
    protects: bool = False
    #: its uncertainty is worked out of that of its readings; a sheet made before that keeps its meaning
    spread: bool = False


class Wait(Part):
    """A least time, counted from an event, that gates the next step. `clock` as in Condition."""

    control: Literal["wait"] = "wait"
    clock: str
    least: Tree
    #: what the wait depends on, confirmed again after a gap; a source name
    depends: str | None = None
    why: str = ""


class People(Part):
    """Hands in at a place by name, or everyone out by name and counted."""

    control: Literal["people"] = "people"
    place: str
    way: Literal["in", "out"]


Control = Annotated[
    Union[
        Caution, Confirm, Number, Prove, Lock, Unlock, Earth, Lift, Choice, Hold, Picture, Remark, Result, Wait, People
    ],
    Field(discriminator="control"),
]

#: in the order in which DEVELOPERS.md lists them
CONTROLS = {
    "caution": Caution,
    "confirm": Confirm,
    "number": Number,
    "prove": Prove,
    "lock": Lock,
    "unlock": Unlock,
    "earth": Earth,
    "lift": Lift,
    "choice": Choice,
    "hold": Hold,
    "picture": Picture,
    "remark": Remark,
    "result": Result,
    "wait": Wait,
    "people": People,
}
