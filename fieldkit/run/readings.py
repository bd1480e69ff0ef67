"""What a reading, a proof, a result or a wait is made of: instrument and range, resolution, limits, values.

Twin: static/core/readings.js. Used before the answer (fieldkit.run.progress) and for it (fieldkit.run.answers).
Not here: the verdict (fieldkit.run.judge), which range is proposed (fieldkit.run.ranges).
"""

from __future__ import annotations

from typing import Any

from fieldkit import values
from fieldkit.run import clock, judge, names, rows, worth
from fieldkit.run.moves import State
from fieldkit.run.names import Context, Scope
from fieldkit.values import Dec, Fault

Plain = dict[str, Any]


#: what a flat view has of its range, beside the range's name
RANGE = ("unit", "low", "high", "resolution", "percent", "digits", "percent_of_range")


def aboard(state: State, name: str | None) -> Plain | None:
    """The instrument as the run's first event carries it, with all its ranges."""
    started = state["started"]
    return next((one for one in started["instruments"] if one["id"] == name), None) if started and name else None


def instrument(state: State, name: str | None, range_: str = "") -> Plain | None:
    """The flat view of one range of an instrument of this run; None where the run carries no such instrument.

    Where it has no such range everything that a range has is None: its accuracy is not known.
    """
    one = aboard(state, name)
    return None if one is None else flat(one, range_of(one, range_))


def range_of(one: Plain, name: str) -> Plain | None:
    """The range of that name; "" is the only one of an instrument that has one."""
    if name == "" and len(one["ranges"]) == 1:
        return dict(one["ranges"][0])
    return next((dict(found) for found in one["ranges"] if found["name"] == name), None)


def flat(one: Plain, found: Plain | None) -> Plain:
    """An instrument with the figures of one of its ranges, as fieldkit.run.judge wants it."""
    kept = {key: one[key] for key in ("id", "reads", "certificate", "calibrated_on", "interval_months", "temperature")}
    due = one["calibrated_to"] or clock.months_later(one["calibrated_on"], one["interval_months"])
    return with_range({**kept, "calibrated_to": due, "ranges": one["ranges"]}, found)


def with_range(meter: Plain, found: Plain | None) -> Plain:
    """The same instrument on another range. A text that is no number says nothing."""
    if found is None:
        return {**meter, "range": None, **dict.fromkeys(RANGE)}
    figures = {key: _figure(found[key], key in ("low", "high")) for key in RANGE[1:]}
    return {**meter, "range": found["name"], "unit": found["unit"], **figures}


def _figure(text: str | None, signed: bool = True) -> str | None:
    number = None if text is None else values.number(text)
    return text if isinstance(number, float) and (signed or number >= 0) else None


def usable(one: Plain, unit: str) -> list[Plain]:
    """The ranges that read in a unit; all of them where none does."""
    return [found for found in one["ranges"] if found["unit"] == unit] or list(one["ranges"])


def meter_of(state: State, meter: Plain | None) -> str | None:
    """The instrument that a step's meter means in this run."""
    if meter is None:
        return None
    if meter["instrument"]:
        return str(meter["instrument"])
    return state["started"]["meters"].get(meter["role"]) if state["started"] else None


def asked_of(control: Plain) -> Plain | None:
    """The meter that a step asks for: a reading's, or the tester of a proof."""
    return control.get("meter") or control.get("tester")


def resolution_of(control: Plain, meter: Plain | None) -> str | None:
    """The step's own resolution, else that of the range in use where it reads in the step's unit."""
    if control["resolution"] is not None:
        return str(control["resolution"])
    if meter is not None and meter["unit"] == control["unit"]["symbol"]:
        return None if meter["resolution"] is None else str(meter["resolution"])
    return None


def bounds(
    ctx: Context, where: Scope, control: Plain, meter: Plain | None, limits: Plain | None = None
) -> Plain | None:
    """The limits of a number or result (or `limits`, of a point) as they are shown and applied now.

    Where the range in use is too coarse for them, or ends before them, it says which one to use instead.
    """
    found = _bounds(ctx, where, control, meter, limits)
    if found is None or meter is None or not meter.get("range") or not (found["coarse"] or found["reach"]):
        return found
    use = f": use {_instead(ctx, where, control, meter, limits)}"
    return {**found, **{key: found[key] + use for key in ("coarse", "reach") if found[key]}}


def _bounds(ctx: Context, where: Scope, control: Plain, meter: Plain | None, limits: Plain | None) -> Plain | None:
    own = control["limits"] if limits is None else limits
    typical = control.get("typical") if limits is None else None
    resolution = resolution_of(control, meter)
    return judge.bounds(own, typical, control["unit"], resolution, meter, lambda tree: names.value(ctx, where, tree))


def _instead(ctx: Context, where: Scope, control: Plain, meter: Plain, limits: Plain | None) -> str:
    """The smallest range of the same instrument that the limits can be judged on."""
    for other in by_size([found for found in meter["ranges"] if found["unit"] == control["unit"]["symbol"]]):
        judged = _bounds(ctx, where, control, with_range(meter, other), limits)
        if judged is not None and not judged["coarse"] and not judged["reach"]:
            return f"the {other['name']} range"
    return "another meter"


def by_size(ranges: list[Plain]) -> list[Plain]:
    """Ranges from the smallest full scale to the largest; one without an upper end is the largest."""
    ordered: list[tuple[Dec | None, Plain]] = []
    for found in ranges:
        size = None if _figure(found["high"]) is None else worth.full_scale(with_range({}, found))
        place = len(ordered)
        while place and _smaller(size, ordered[place - 1][0]):
            place -= 1
        ordered.insert(place, (size, found))
    return [found for _, found in ordered]


def _smaller(a: Dec | None, b: Dec | None) -> bool:
    return a is not None and (b is None or values.compare(a, b) < 0)


def plain(text: str) -> str:
    """A typed number as plain decimal text, with its decimals."""
    typed = values.typed(text)
    if not isinstance(typed, Dec):
        raise ValueError(text)
    return values.to_text(typed)


def si_text(text: str, unit: Plain) -> str:
    """The exact SI value of a typed number, as decimal text."""
    scaled = values.mul(values.dec(plain(text)), values.dec(unit["factor"]))
    return values.to_text(values.trim(values.add(scaled, values.dec(unit["offset"]))))


def result_text(ctx: Context, where: Scope, control: Plain) -> tuple[str, str, str]:
    """A result now: its SI value (12 digits), its text in the unit, the sentence of a fault (then both are empty)."""
    si = names.value(ctx, where, control["value"])
    if isinstance(si, Fault):
        return "", "", si.says
    text = rows.shown(si, control["unit"], control["resolution"])
    return ("", "", "It is no number.") if text is None else (values.round12(si), text, "")


def proof_fields(control: Plain) -> list[tuple[str, str, Plain]]:
    """What a proof asks for, in order: field of the event, title, limits."""
    known = (control["known_source"], control["known"])
    points = [("points." + p["name"], p["title"], p["limits"]) for p in control["points"]]
    return [("before", *known), *points, ("after", *known)]


def waited(ctx: Context, where: Scope, control: Plain) -> Plain | None:
    """What a wait has counted: texts of least, greatest and needed seconds, and `left`; None before it has begun."""
    least = where.names.get(control["clock"])
    head, _, rest = control["clock"].partition(":")
    greatest = where.names.get(f"{'oldest' if head == 'age' else 'oldest-since'}:{rest}", least)
    needed = names.value(ctx, where, control["least"])
    if not isinstance(least, float) or not isinstance(needed, float) or not isinstance(greatest, float):
        return None
    texts = {"least": values.fixed(least, 3), "greatest": values.fixed(greatest, 3), "needed": values.fixed(needed, 3)}
    return {"texts": texts, "left": max(0.0, needed - least)}
