"""Which instrument and which of its ranges a step is read with: what is proposed, what may be chosen instead.

    in_use(ctx, state, where, step, using)   the flat view of what is read with now, by proposal or as `using` asks
    offers(state, step, meter)               the instruments and ranges to choose from
    overdue(asked, meter, day)               why an overdue meter is not taken here; "" where it is

Proposed is the range last used with that instrument in this run (the knob stands there), else the smallest one that
holds the limits and the nameplate value, else the largest. Twin: static/core/ranges.js.
Not here: the flat view itself, whether a range serves (fieldkit.run.readings).
"""

from __future__ import annotations

from typing import Any

from fieldkit import values
from fieldkit.run import judge, names, readings, rows
from fieldkit.run.moves import State
from fieldkit.run.names import Context, Scope

Plain = dict[str, Any]


def in_use(ctx: Context, state: State, where: Scope, step: Plain | None, using: Plain | None = None) -> Plain | None:
    """The flat view of the range that a step is read with; None where it is read with no instrument of this run."""
    control = step["control"] if step else {}
    asked = readings.asked_of(control)
    chosen = using or {}
    one = readings.aboard(state, chosen.get("instrument")) or readings.aboard(state, readings.meter_of(state, asked))
    if one is None or step is None or control["control"] not in ("number", "prove"):
        return None
    named = chosen.get("range") or ""
    found = readings.range_of(one, named) if named else None
    return readings.flat(one, found or proposed(ctx, state, where, step, one))


def proposed(ctx: Context, state: State, where: Scope, step: Plain, one: Plain) -> Plain | None:
    """The range of an instrument that a step is probably read on."""
    control = step["control"]
    ranges = readings.usable(one, control["unit"]["symbol"])
    if len(ranges) < 2:
        return ranges[0] if ranges else None
    known = {found["name"]: found for found in ranges}
    for row in reversed(state["log"]):
        if row["instrument"] == one["id"] and row["range"] in known:
            return known[row["range"]]
    wanted = _wanted(ctx, where, control)
    ordered = readings.by_size(ranges)
    holding = [found for found in ordered if all(_holds(found, text) for text in wanted)] if wanted else []
    return holding[0] if holding else ordered[-1]


def _wanted(ctx: Context, where: Scope, control: Plain) -> list[str]:
    """What a range should hold: the limits (of a proof all of them) and the plate, else what is typical."""

    def bounds(limits: Plain | None, typical: Plain | None) -> Plain:
        shown = judge.bounds(limits, typical, control["unit"], None, None, lambda tree: names.value(ctx, where, tree))
        return shown or {}

    if control["control"] == "prove":
        sides = [bounds(limits, None) for _, _, limits in readings.proof_fields(control)]
        return [text for side in sides for text in (side.get("low"), side.get("high")) if text is not None]
    found = bounds(control.get("limits"), control.get("typical"))
    plate = (
        rows.shown(names.value(ctx, where, control["plate"]), control["unit"], None) if control.get("plate") else None
    )
    wanted = [text for text in (found.get("low"), found.get("high"), plate) if text is not None]
    return wanted or [text for text in (found.get("typical_low"), found.get("typical_high")) if text is not None]


def _holds(found: Plain, text: str) -> bool:
    """The value lies on the range."""
    meter, value = readings.with_range({}, found), values.dec(text)
    low, high = meter["low"], meter["high"]
    above = low is None or values.compare(value, values.dec(low)) >= 0
    return above and (high is None or values.compare(value, values.dec(high)) <= 0)


def offers(state: State, step: Plain | None, meter: Plain | None) -> Plain:
    """Names to choose from: `instruments` (a proof has its tester alone) and `ranges` of the one in use."""
    control = step["control"] if step else {}
    asked = readings.asked_of(control)
    if meter is None or asked is None:
        return {"instruments": [], "ranges": []}
    unit = control["unit"]["symbol"]
    meant = readings.meter_of(state, asked)
    found = [meant] if meant is not None else []
    if control["control"] == "number":
        found += [
            one["id"] for one in state["started"]["instruments"] if one["id"] != meant and _like(one, meter, unit)
        ]
    return {"instruments": found, "ranges": [one["name"] for one in readings.usable(meter, unit)]}


def _like(one: Plain, meter: Plain, unit: str) -> bool:
    """An instrument that reads the same, in the same unit."""
    return one["reads"] == meter["reads"] and any(found["unit"] == unit for found in one["ranges"])


def overdue(asked: Plain | None, meter: Plain | None, day: str) -> str:
    """Why a meter is not taken where the step takes none that is overdue; "" where it is."""
    if asked is None or meter is None or asked.get("overdue") != "refuse":
        return ""
    if not meter["calibrated_to"]:
        return f"No calibration of {meter['id']} is known, and this step takes no overdue meter. Use another one."
    if not judge.overdue(meter, day):
        return ""
    ran_out = f"The calibration of {meter['id']} ran out on {meter['calibrated_to']}"
    return f"{ran_out}, and this step takes no overdue meter. Use another one."
