"""The next setting toward a target, from the last two settings and readings: a secant step that is never large.

x3 = x2 + (target - y2) (x2 - x1) / (y2 - y1), the change held to what is permitted, the setting to the permitted range.
It is advice: a person turns the knob, and may turn it less.

Checked against the published iterates of x**2 = 612 (from memory), scipy's brentq on a model of a grid-controlled tube
and the uncertainties package. Twin: static/core/fits/bounded_secant.js.
"""

from __future__ import annotations

import math
from typing import Any

from fieldkit.fits import columns, words
from fieldkit.fits.answer import Answer, answer
from fieldkit.fits.columns import Columns, Refused

#: a change of the reading below this many standard uncertainties is none
FLAT = 3.0


def bounded_secant(
    settings: Any,
    readings: Any,
    target: Any,
    most: Any,
    low: Any,
    high: Any,
    u: Any = None,
    sign: Any = None,
    inhibits: Any = None,
    resolution: Any = None,
    show: words.Show = words.plain,
) -> Answer:
    """The setting to try next, from the last two of `settings` and `readings`.

    `most` is the greatest permitted change, `low` to `high` the permitted range; `sign` 1 or -1 whether the reading is
    expected to rise or to fall with the setting (None: either). `inhibits` are readings that must stay clear of their
    trip levels now: {"name", "reading", "inhibit", "near"}, refused from `near` (a part, 0.8) of the inhibit on, in
    size. `resolution` is the least change that the setting can be given: the advice is whole multiples of it away from
    the present setting, rounded toward it.

    `value` is the advised setting, `change` its distance from the present one (never above `most`), `aim` where the
    straight line meets the target, `u` the aim's standard uncertainty, `slope` reading by setting, `clipped` None,
    "change", "low" or "high"; `there` is true where the reading is at the target within 2 u: then the value is the
    present setting.

    Refuses, in this order: bad-change, bad-range, bad-sign, bad-resolution, too-few (below 2) and what columns.read
    refuses, bad-inhibit, inhibit-near, outside-range, equal-settings, flat, contrary-slope, change-too-small,
    range-end.
    """
    show = words.guarded(show)
    keys = ("value", "u", "change", "aim", "slope", "clipped", "there", "target", "present")
    numbers: Answer = {"n": columns.count(readings)} | dict.fromkeys(keys)
    given = columns.read(("settings", "readings"), settings, readings, u, 2)
    bounds = _bounds(target, most, low, high, sign, resolution)
    near = _near(inhibits)
    for refused in (bounds, given, near):
        if isinstance(refused, Refused):
            return answer("bounded-secant", numbers, refused, str)
    assert isinstance(given, Columns) and isinstance(bounds, dict)
    now: dict[str, Any] = {"x1": given.x[-2], "y1": given.y[-2], "x2": given.x[-1], "y2": given.y[-1]}
    now |= {"u": None if given.u is None else (given.u[-1] if given.u[-1] > given.u[-2] else given.u[-2])}
    numbers |= {"target": bounds["target"], "present": now["x2"], "there": _there(now, bounds)}
    refused = _step(numbers, now, bounds, show)
    return answer("bounded-secant", numbers, refused, lambda: _says(numbers, now, bounds, show))


def _bounds(target: Any, most: Any, low: Any, high: Any, sign: Any, resolution: Any) -> dict[str, Any] | Refused:
    goal = columns.parameter("The target", target)
    change = columns.positive("The permitted change", most, "bad-change")
    ends = [
        columns.parameter(f"The {which} end of the permitted range", v)
        for which, v in (("lower", low), ("upper", high))
    ]
    least = None if resolution is None else columns.positive("The resolution", resolution, "bad-resolution")
    for one in (goal, change, *ends, least):
        if isinstance(one, Refused):
            return one
    if not ends[0] < ends[1]:  # type: ignore[operator]
        return Refused("bad-range", "The lower end of the permitted range is not below its upper end.")
    wanted = None if sign is None else columns.number(sign)
    if sign is not None and wanted != 1.0 and wanted != -1.0:
        return Refused("bad-sign", "The expected sign of the slope is 1 or -1.")
    return {"target": goal, "most": change, "low": ends[0], "high": ends[1], "sign": wanted, "least": least}


def _near(inhibits: Any) -> Refused | None:
    """Refuses where a reading is near its inhibit, or what is said of it is not clear."""
    if inhibits is None:
        return None
    if not isinstance(inhibits, list | tuple):
        return Refused("bad-inhibit", "The inhibits are not a list.")
    for one in inhibits:
        if not isinstance(one, dict) or not isinstance(one.get("name"), str):
            return Refused("bad-inhibit", "An inhibit has no name.")
        name = one["name"]
        reading = columns.parameter(f"The reading of {name}", one.get("reading"))
        level = columns.positive(f"The inhibit of {name}", one.get("inhibit"), "bad-inhibit")
        part = columns.positive(f"The nearness to the inhibit of {name}", one.get("near"), "bad-inhibit")
        for bad in (reading, level, part):
            if isinstance(bad, Refused):
                return Refused("bad-inhibit", bad.says)
        assert isinstance(reading, float) and isinstance(level, float) and isinstance(part, float)
        if part > 1.0:
            return Refused(
                "bad-inhibit", f"The nearness to the inhibit of {name} is above 1, which is the inhibit itself."
            )
        if abs(reading) >= part * level:
            return Refused(
                "inhibit-near",
                f"The reading of {name} is at {words.brief(100.0 * (abs(reading) / level), 3)} % of its inhibit; from "
                f"{words.brief(100.0 * part, 3)} % on no next setting is advised. Find out why first.",
            )
    return None


def _there(now: dict[str, Any], bounds: dict[str, Any]) -> bool:
    left = abs(bounds["target"] - now["y2"])
    return bool(left == 0.0 or (now["u"] is not None and left <= words.K * now["u"]))


def _step(numbers: Answer, now: dict[str, Any], bounds: dict[str, Any], show: words.Show) -> Refused | None:
    """Puts slope, aim and advised setting into `numbers`."""
    x1, y1, x2, y2, u = now["x1"], now["y1"], now["x2"], now["y2"], now["u"]
    if x2 < bounds["low"] or x2 > bounds["high"]:
        return Refused("outside-range", f"The present setting, {show('x', x2, None)}, is outside the permitted range.")
    if numbers["there"]:
        numbers |= {"value": x2, "change": 0.0}
        return None
    if x1 == x2:
        return Refused("equal-settings", "The last two settings are equal: they tell no slope.")
    rise = y2 - y1
    slope = numbers["slope"] = rise / (x2 - x1)
    if rise == 0.0 or (u is not None and abs(rise) < FLAT * u):
        size = "" if u is None else f", less than three of its standard uncertainties, {show('y', u, None)}"
        return Refused(
            "flat",
            f"The reading changed by {show('y', abs(rise), None)} only between the last two settings{size}: there is "
            "no slope to go by.",
        )
    if bounds["sign"] is not None and slope * bounds["sign"] < 0.0:
        did, expected = ("rose", "fall") if slope > 0.0 else ("fell", "rise")
        return Refused(
            "contrary-slope",
            f"The reading {did} with the setting, where it should {expected}: something else changed. Go back to the "
            "setting before, and find out what.",
        )
    share = (bounds["target"] - y2) / rise
    wanted = share * (x2 - x1)
    numbers["aim"] = x2 + wanted
    if u is not None:
        numbers["u"] = math.sqrt(share * share + (1.0 + share) * (1.0 + share)) * u / abs(slope)
    return _bound(numbers, wanted, x2, bounds, show)


def _bound(numbers: Answer, wanted: float, x2: float, bounds: dict[str, Any], show: words.Show) -> Refused | None:
    most = bounds["most"]
    change, clipped = wanted, None
    if abs(wanted) > most:
        change, clipped = (most if wanted > 0.0 else -most), "change"
    if x2 + change < bounds["low"]:
        change, clipped = bounds["low"] - x2, "low"
    elif x2 + change > bounds["high"]:
        change, clipped = bounds["high"] - x2, "high"
    value = _inside(x2, _whole(change, bounds["least"]), bounds)
    numbers["clipped"] = clipped
    if value == x2 and clipped != "low" and clipped != "high":
        return Refused("change-too-small", "The change is smaller than the setting can be given.")
    if value == x2:
        return Refused(
            "range-end",
            f"The present setting, {show('x', x2, None)}, is as far as is permitted, and the target lies beyond: the "
            f"line would meet it at {show('x', numbers['aim'], None)}.",
        )
    numbers |= {"value": value, "change": value - x2}
    return None


def _whole(change: float, least: float | None) -> float:
    """The change in whole steps of the setting, toward none; a billionth short of a step is that step."""
    if least is None:
        return change
    size = math.floor(abs(change) / least + 1e-9) * least
    return size if change > 0.0 else -size


def _inside(x2: float, change: float, bounds: dict[str, Any]) -> float:
    """x2 + change where neither the change nor the range is overstepped, not even by rounding."""
    most, low, high = bounds["most"], bounds["low"], bounds["high"]
    for less in (0.0, 2.220446049250313e-16, 4.440892098500626e-16):
        value: float = x2 + (change - less * (change + abs(x2) * (1.0 if change > 0.0 else -1.0)))
        if low <= value <= high and abs(value - x2) <= most:
            return value
    return x2


def _says(numbers: Answer, now: dict[str, Any], bounds: dict[str, Any], show: words.Show) -> str:
    if numbers["there"]:
        return (
            f"The reading, {show('y', now['y2'], now['u'])}, is at the target, {show('y', bounds['target'], None)}, as "
            "nearly as it can be read: leave the setting."
        )
    text = (
        f"Try {show('setting', numbers['value'], None)}. By the last two readings the slope is "
        f"{show('slope', numbers['slope'], None)}; a straight line through them meets the target, "
        f"{show('y', bounds['target'], None)}, at {show('x', numbers['aim'], numbers['u'])}."
    )
    if numbers["clipped"] == "change":
        text += f" The advice stops at the permitted change, {show('x', bounds['most'], None)}."
    elif numbers["clipped"] is not None:
        text += " The advice stops at the end of the permitted range."
    known = "" if numbers["u"] is not None else " The readings came without an uncertainty."
    return text + f"{known} It holds near these two settings only: read again after it."
