"""Which stretch of the axis a scale shows, as exact integers.

Limits plus a quarter of their distance each side, stretched to hold reading ± U; one-sided limits stand where the
same limit of a two-sided scale would, and the other end stays open. A reading too far off to stretch to is `far`, and
leaves the axis as it is: half a number, typed, is far off, and its limits should not jump with every key.
Twin: static/core/drawing/spread.js.
"""

from __future__ import annotations

from typing import Any, NamedTuple

from fieldkit.drawing.number import decimals, scaled

#: extra places, so that quarters, fifths and ticks stay whole
_EXTRA = 3


class Spread(NamedTuple):
    """All numbers times 10**places. `far` is "", "low" or "high"; `keep` the decimals of what was typed and limited."""

    places: int
    keep: int
    a: int
    b: int
    low: int | None
    high: int | None
    caution_low: int | None
    caution_high: int | None
    accept_low: int | None
    accept_high: int | None
    value: int | None
    u: int
    plate: int | None
    olds: tuple[int, ...]
    far: str


#: limits that rounding to a coarse meter's steps has crossed bound nothing, and are not drawn
_BOUNDS = ("low", "high", "caution_low", "caution_high", "accept_low", "accept_high")
_FIELDS = ("low", "high", "caution_low", "caution_high", "accept_low", "accept_high", "value", "u", "plate")


def spread(model: dict[str, Any], stretch: bool) -> Spread:
    """The axis for a scale's model; `stretch` False keeps limits where they are, for rows that compare."""
    olds = [o["value"] for o in model.get("olds") or ()]
    places = decimals(*[model.get(f) for f in _FIELDS], *olds) + _EXTRA
    keep = decimals(model.get("value"), model.get("low"), model.get("high"))
    n = {f: scaled(model.get(f), places) for f in _FIELDS}
    if n["low"] is not None and n["high"] is not None and n["low"] > n["high"]:
        n |= dict.fromkeys(_BOUNDS)
    low, high, value, u = n["low"], n["high"], n["value"], n["u"] or 0
    old = tuple(o for o in (scaled(text, places) for text in olds) if o is not None)
    a, b = _plain(low, high, value, u, n["plate"], old, 10**places)
    far = ""
    if value is not None:
        room = (b - a) * 2 // 3 if stretch else 0
        if value - u < a:
            far, a = ("", value - u - (b - a) // 20) if a - (value - u) <= room else ("low", a)
        elif value + u > b:
            far, b = ("", value + u + (b - a) // 20) if value + u - b <= room else ("high", b)
        if far and a <= value <= b:
            far = ""
    return Spread(
        places, keep, a, b, low, high, n["caution_low"], n["caution_high"], n["accept_low"], n["accept_high"],
        value, u, n["plate"], old, far,
    )  # fmt: skip


def _plain(
    low: int | None, high: int | None, value: int | None, u: int, plate: int | None, olds: tuple[int, ...], one: int
) -> tuple[int, int]:
    """The axis before any stretching."""
    around = max(abs(value or 0), 4 * u, one)
    if low is not None and high is not None:
        distance = abs(high - low) or around
        return min(low, high) - distance // 4, max(low, high) + distance // 4
    if high is not None:
        size = abs(high) or around
        return high - size, high + size // 5
    if low is not None:
        size = low * 3 // 5 if low > 0 else (-low or around)
        return low - size // 5, low + size
    marks = [m for m in (value, plate, *olds) if m is not None]
    if not marks:
        return 0, one
    size = max(max(abs(m) for m in marks) // 4, 4 * u, one // 10)
    return min(marks) - size, max(marks) + size
