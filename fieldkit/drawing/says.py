"""The sentence of each drawing: what a screen reader gets. Twin: static/core/drawing/says.js."""

from __future__ import annotations

from typing import Any, NamedTuple

from fieldkit.drawing.number import parts, ratio, scaled, shown, text
from fieldkit.drawing.spread import Spread, spread

#: a source's state as a person says it
STATES = {
    "off": "off",
    "on": "on",
    "standby": "at standby",
    "cut-off": "at cut-off",
    "locked": "locked, not proved",
    "proved": "locked and proved dead",
    "earthed": "locked, proved dead and earthed",
    "unknown": "unknown",
}
_TIMES = (
    "",
    "",
    "twice",
    "three times",
    "four times",
    "five times",
    "six times",
    "seven times",
    "eight times",
    "nine times",
)


class Near(NamedTuple):
    """The nearest limit, how far, and the word for it: margin, over by, under by."""

    limit: int
    size: str
    word: str
    distance: int


def nearest(s: Spread) -> Near | None:
    """The limit that the margin is measured to; None without a reading or without limits."""
    if s.value is None:
        return None
    if s.low is not None and s.value < s.low:
        return Near(s.low, shown(s.low - s.value, s.places, s.keep), "under by", s.low - s.value)
    if s.high is not None and s.value > s.high:
        return Near(s.high, shown(s.value - s.high, s.places, s.keep), "over by", s.value - s.high)
    found = [(abs(s.value - limit), limit) for limit in (s.low, s.high) if limit is not None]
    if not found:
        return None
    distance, limit = min(found)
    return Near(limit, shown(distance, s.places, s.keep), "margin", distance)


def limits(model: dict[str, Any]) -> str:
    """The limits in words: 6.10 to 6.50 V; at least 40 L/min; at most 5 µA; "" without any."""
    low, high, unit = text(model.get("low")), text(model.get("high")), model.get("unit", "")
    said = f"{low} to {high}" if low and high else f"at least {low}" if low else f"at most {high}" if high else ""
    return f"{said} {unit}".strip() if said else ""


def scale(model: dict[str, Any]) -> str:
    """Value, inside or above or below, margin, meter; why a verdict is conditional; then the hollow pointers."""
    if model.get("says"):
        return str(model["says"])
    unit = model.get("unit", "")
    olds = "".join(f" {_first(o['name'])} {text(o['value'])} {unit}".rstrip() + "." for o in model.get("olds") or ())
    return _judged(model, unit) + olds


def _first(words: str) -> str:
    return words[:1].upper() + words[1:]


def _judged(model: dict[str, Any], unit: str) -> str:
    said, s = limits(model), spread(model, True)
    if s.value is None:
        return f"No reading yet; limits {said}." if said else "No reading yet; no limits."
    value = f"{text(model.get('value'))} {unit}".strip()
    meter = f"{text(model.get('u'))} {unit}".strip() if s.u else ""
    if model.get("verdict") == "not judged":
        return f"{value}: not judged, {model.get('why') or 'no limits'}."
    near = nearest(s)
    if near is None:
        return f"{value}, no limits" + (f", meter ±{meter}." if meter else ".")
    size = f"{near.size} {unit}".strip()
    if near.word == "margin":
        both = "" if s.low is not None and s.high is not None else "the limit of "
        return f"{value}: inside {both}{said}, " + _inside(size, meter, near.distance < s.u)
    word, limit = ("above", model.get("high")) if near.word == "over by" else ("below", model.get("low"))
    out = f"{value}: {word} {text(limit)} {unit}".strip() + f" by {size}"
    if not meter:
        return out + "."
    if near.distance < s.u:
        return f"{out}, which is smaller than the meter’s ±{meter}."
    times = ratio(near.distance, s.u)
    return f"{out}, {_TIMES[times]} the meter’s ±{meter}." if 2 <= times < len(_TIMES) else f"{out}, meter ±{meter}."


def _inside(size: str, meter: str, small: bool) -> str:
    if not meter:
        return f"margin {size}."
    return (
        f"but the margin of {size} is smaller than the meter’s ±{meter}."
        if small
        else f"margin {size}, meter ±{meter}."
    )


def clock(seconds: int) -> str:
    """Seconds as a person reads them: 6:18, or 1 h 05 min from an hour on."""
    if seconds >= 3600:
        return f"{seconds // 3600} h {seconds % 3600 // 60:02d} min"
    return f"{seconds // 60}:{seconds % 60:02d}"


def whole(seconds: str | None, up: bool = False) -> int:
    """A decimal string of seconds as whole ones: down, or up for what is left; nothing below 0."""
    p = parts(seconds)
    if p is None:
        return 0
    n = scaled(seconds, p[1]) or 0
    return max(0, -(-n // 10 ** p[1]) if up else n // 10 ** p[1])


def wait(model: dict[str, Any]) -> str:
    """How much of a least time has passed."""
    elapsed, least = whole(model.get("elapsed")), whole(model.get("least"), True)
    passed = f"{clock(elapsed)} of at least {clock(least)} has passed"
    return f"{passed}, {clock(least - elapsed)} left." if elapsed < least else f"{passed}."


def rails(model: dict[str, Any]) -> str:
    """What each lane is, and what it becomes."""
    said = []
    for lane in model["lanes"]:
        before, after = lane["before"], lane.get("after") or lane["before"]
        extra = ", warming" if lane.get("warming") else ", stored charge going" if lane.get("decay") else ""
        will = "will be" if model.get("planned") or model.get("coming") else "then"
        said.append(
            f"{lane['title']} {STATES[before]}{extra}" + (f", {will} {STATES[after]}" if after != before else "")
        )
    return "; ".join(said) + "."


def hour(seconds: int) -> str:
    """Seconds of the day as 14:05; past midnight it starts again."""
    return f"{seconds // 3600 % 24:02d}:{seconds // 60 % 60:02d}"


def timeline(model: dict[str, Any]) -> str:
    """Every source with its states and when it entered them."""
    said = []
    for lane in model["lanes"]:
        spans = lane["spans"]
        if not spans:
            continue
        run = [f"{lane['title']} {STATES[spans[0]['state']]}"]
        run += [
            f"{STATES[x['state']]} from {hour(x['at'])}"
            for x, old in zip(spans[1:], spans, strict=False)
            if x["state"] != old["state"]
        ]
        said.append(", then ".join(run))
    return f"Energy from {hour(model['from'])} to {hour(model['to'])}. " + ". ".join(said) + "."
