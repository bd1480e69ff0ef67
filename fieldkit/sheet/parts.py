"""The small parts that controls and moves are made of: units, quantities, limits, conditions, effects.

All numbers are decimal strings; all formula trees are in plain SI. Not here: what any of it means while a
run goes on (fieldkit.run), and where it comes from (fieldkit.steps).
"""

from __future__ import annotations

from typing import Annotated, Any, Literal

from pydantic import AfterValidator, BaseModel, ConfigDict, Field

from fieldkit.formula import ast


class Part(BaseModel):
    """Base of everything in a sheet: frozen, and a key that is not known is an error."""

    model_config = ConfigDict(extra="forbid", frozen=True, populate_by_name=True)


def _is_tree(value: dict[str, Any]) -> dict[str, Any]:
    ast.from_json(value)
    return value


#: A formula tree in the JSON form of fieldkit.formula.ast.
Tree = Annotated[dict[str, Any], AfterValidator(_is_tree)]

#: Isolable sources take all of these; `cut-off` is bias holding the beam off, `standby` a heater at standby volts.
SourceState = Literal["off", "on", "standby", "cut-off", "locked", "proved", "earthed", "unknown"]
SOURCE_STATES = ("off", "on", "standby", "cut-off", "locked", "proved", "earthed", "unknown")


class Unit(Part):
    """A unit, and how to get to SI: si = written * factor + offset (both decimal strings).

    `symbol` is plain ASCII as in the registers ("uA", "degC", "" for a plain number); `shown` is for people.
    """

    symbol: str
    shown: str = ""
    factor: str = "1"
    offset: str = "0"


class Limits(Part):
    """Where a reading must lie. Trees give SI; the run rounds them to 12 digits, then inward to the resolution."""

    low: Tree | None = None
    high: Tree | None = None
    #: where each limit comes from, in words: "nameplate", "0.5 x ion inhibit"
    low_name: str = ""
    high_name: str = ""
    #: edges of the caution band, inside the limits; a reading beyond them deserves attention, the verdict stays
    caution_low: Tree | None = None
    caution_high: Tree | None = None
    #: guarded acceptance: the limit is pulled in by the expanded uncertainty of the reading (ILAC-G8)
    guarded: bool = False


class Typical(Part):
    """The range that common practice expects; a reading outside it is warned about, never judged by it."""

    low: Tree | None = None
    high: Tree | None = None
    note: str = "common practice, no source"


class Meter(Part):
    """Which instrument: a role in the cabinet's register ("heater_volts"), or one named instrument ("HV-2")."""

    role: str | None = None
    instrument: str | None = None
    #: a hand meter is held at a place, so the rules for hands apply; a panel meter is read from outside
    hand_at: str | None = None
    #: a reading whose calibration has run out is taken and flagged, or not taken at all
    overdue: Literal["take", "refuse"] = "take"
    #: all readings on one range of it share their error, so that it adds up in a result, or cancels
    correlated: bool = False


class Condition(Part):
    """One reason a move may not open yet. `says` completes "Opens when ..." for the person.

    For a wait, `clock` names the counted seconds ("age:heater", "since:heater_on") and `least` the seconds
    needed, so that the remaining time can be shown; `tree` is then ge(clock, least).
    """

    says: str
    tree: Tree
    clock: str | None = None
    least: Tree | None = None


class Count(Part):
    """A bounded counter moved by a move: `by` is added, or `to` is set (exactly one of them)."""

    counter: str
    by: int | None = None
    to: int | None = None


class Effects(Part):
    """What taking a move does to the plant as the run believes it to be."""

    sets: dict[str, SourceState] = Field(default_factory=dict)
    shows: tuple[str, ...] = ()
    clears: tuple[str, ...] = ()
    counts: tuple[Count, ...] = ()
    #: place -> "in" or "out"
    hands: dict[str, Literal["in", "out"]] = Field(default_factory=dict)


class Given(Part):
    """A value known before the run: a number with its unit, levels (a list of numbers in that unit), or a text."""

    name: str
    origin: Literal["tube", "cabinet", "site"]
    kind: Literal["number", "levels", "text"]
    unit: Unit | None = None
    #: plausible range in the unit, decimal strings; a given outside it is refused at the start of a run
    between: tuple[str, str] | None = None
    meaning: str = ""


class Source(Part):
    """One energy source, in the order of its lane. Following sources are computed, never locked."""

    name: str
    title: str
    short: str
    isolable: bool = True
