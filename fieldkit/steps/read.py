"""read: one reading, typed as text, judged against its limits."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.sheet.controls import Number
from fieldkit.sheet.model import Level
from fieldkit.sheet.parts import Condition, Meter, Unit
from fieldkit.steps import base, conditions, judged, words
from fieldkit.steps import limits as limits_words
from fieldkit.steps.base import Kind, Name, Piece
from fieldkit.steps.judged import Judged
from fieldkit.steps.meters import METER
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import Quantity, key


@dataclass(frozen=True, kw_only=True)
class Read(Judged):
    title: str = key(words.text, "what is read", required=True, name="read")
    unit: Unit = key(words.unit, "its unit; left out for a count", default=words.NO_UNIT)
    meter: Meter | None = key(METER, "the instrument")
    resolution: Quantity | None = key(words.quantity, "where the instrument's own does not count")


def control(written: Read, scope: Scope) -> Number:
    """The number control of a reading."""
    unit = written.unit
    plate = None if written.plate is None else scope.tree(written.plate, unit)
    found = limits_words.limits(written, unit, scope)
    if written.protects and found is None:
        scope.found.add(
            written.at("protects"), "no-limits", "protects stands here without limits", "write limits: as well"
        )
    if written.guarded and written.meter is None:
        remedy = "write meter: as well; a limit is guarded by the meter's uncertainty"
        scope.found.add(written.at("guarded"), "guarded-no-meter", "guarded limits stand here without a meter", remedy)
    return Number(
        unit=unit,
        meter=written.meter,
        resolution=resolution(written.resolution, unit, scope),
        limits=found,
        typical=limits_words.typical(written, unit, scope),
        plate=plate,
        protects=written.protects,
    )


def resolution(quantity: Quantity | None, unit: Unit, scope: Scope) -> str | None:
    """The resolution in the step's unit; a Problem where it is none."""
    if quantity is None:
        return None
    own = words.KELVIN if unit.symbol == "degC" and quantity.unit.symbol == "K" else quantity.unit
    if words.dimension(own).powers != words.dimension(unit).powers:
        message = f"the resolution is in {quantity.unit.symbol or 'no unit'}, the step in {unit.symbol or 'no unit'}"
        scope.found.add(quantity.place, "resolution-unit", message, f"write it in {unit.symbol or 'plain numbers'}")
        return None
    text = quantity.number if unit.symbol == "degC" else quantity.inside(unit)
    if float(text) <= 0:
        scope.found.add(
            quantity.place, "bad-resolution", "a resolution is above zero", "write the smallest step of the meter"
        )
        return None
    return text


def gate(written: Read, scope: Scope) -> tuple[Condition, ...]:
    """The step's own gate; a hand meter needs its place made safe."""
    opens = base.gate(written, scope, written.sets)
    if written.meter is not None and written.meter.hand_at:
        opens = conditions.distinct((*opens, conditions.place_safe(written.meter.hand_at)))
    return opens


def lower(written: Read, id_: str, scope: Scope, level: Level | None = None) -> Piece:
    ways = judged.ways(written, id_, scope, gate(written, scope), base.effects(written))
    step = base.make_step(id_, "read", written.title, control(written, scope), written, level)
    return Piece(id_, [step], ways.exits, ways.moves, ways.counters)


def names(written: Read, id_: str) -> tuple[Name, ...]:
    return (Name(id_, written.title, written.unit),)


KIND = Kind("read", Read, lower, "one reading against its limits", names)
