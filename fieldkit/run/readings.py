"""What a reading, a proof, a result or a wait is made of: instrument, resolution, limits, values.

Twin: static/core/readings.js. Used before the answer (fieldkit.run.progress) and for it (fieldkit.run.answers).
Not here: the verdict (fieldkit.run.judge).
"""

from __future__ import annotations

from typing import Any

from fieldkit import values
from fieldkit.run import judge, names, rows
from fieldkit.run.moves import State
from fieldkit.run.names import Context, Scope
from fieldkit.values import Fault

Plain = dict[str, Any]


def instrument(state: State, name: str | None) -> Plain | None:
    """The instrument as the run's first event carries it."""
    started = state["started"]
    return next((one for one in started["instruments"] if one["id"] == name), None) if started and name else None


def meter_of(state: State, meter: Plain | None) -> str | None:
    """The instrument that a step's meter means in this run."""
    if meter is None:
        return None
    if meter["instrument"]:
        return str(meter["instrument"])
    return state["started"]["meters"].get(meter["role"]) if state["started"] else None


def resolution_of(control: Plain, meter: Plain | None) -> str | None:
    """The step's own resolution, else the instrument's where it reads in the step's unit."""
    if control["resolution"] is not None:
        return str(control["resolution"])
    if meter is not None and meter["unit"] == control["unit"]["symbol"]:
        return str(meter["resolution"])
    return None


def bounds(
    ctx: Context, where: Scope, control: Plain, meter: Plain | None, limits: Plain | None = None
) -> Plain | None:
    """The limits of a number or result (or `limits`, of a point) as they are shown and applied now."""
    own = control["limits"] if limits is None else limits
    typical = control.get("typical") if limits is None else None
    resolution = resolution_of(control, meter)
    return judge.bounds(own, typical, control["unit"], resolution, meter, lambda tree: names.value(ctx, where, tree))


def si_text(text: str, unit: Plain) -> str:
    """The exact SI value of a typed number, as decimal text."""
    typed = values.typed(text)
    if not isinstance(typed, values.Dec):
        raise ValueError(text)
    return values.to_text(
        values.trim(values.add(values.mul(typed, values.dec(unit["factor"])), values.dec(unit["offset"])))
    )


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
