"""Numbers inside the sentences of fits, and what every sentence says of few readings.

A fit does not know units: `show(axis, value, u)` makes the text of a number, and whoever knows the unit gives one.
`axis` is "x" (settings, times), "setting" (one to be set: all its digits), "y" (readings, currents) or "slope" (y per
x); `u` is a standard uncertainty, or None. `plain` is the one without a unit. Twin: static/core/fits/words.js.
"""

from __future__ import annotations

from collections.abc import Callable

from fieldkit import values

Show = Callable[[str, float, float | None], str]

LARGEST = 1e30
#: an uncertainty below this part of the number is rounding
NOTHING = 1e-12
#: the house's coverage factor
K = 2
#: with fewer readings than this beyond the coefficients, k = 2 covers clearly less than 95 %: Student's t is 2.23 at 10
FEW = 10


def significant(x: float, count: int) -> str:
    """`x` with `count` significant digits, and at least those before the point."""
    text = values.round12(x)
    whole, _, part = text.removeprefix("-").partition(".")
    if text == "0":
        keep = 0
    elif whole == "0":
        keep = len(part) - len(part.lstrip("0")) + count
    else:
        keep = count - len(whole) if count > len(whole) else 0
    return values.to_text(values.dec(text), keep)


def brief(x: float, count: int = 4) -> str:
    """The same without trailing zeros."""
    if not abs(x) <= LARGEST:
        return "a number too large to tell"
    return values.to_text(values.trim(values.dec(significant(x, count))))


def plain(axis: str, value: float, u: float | None = None) -> str:
    """A number without a unit; with its expanded uncertainty, k = 2, where there is one."""
    if axis == "setting":
        return brief(value, 12)
    if u is None or K * u <= NOTHING * abs(value):
        return brief(value)
    wide = significant(K * u, 2)
    return f"{values.fixed(value, values.decimals(wide))} ± {wide} (k = {K})"


def guarded(show: Show) -> Show:
    """`show` that is never asked for a number that is none: a refused fit may have one before it is taken out."""

    def text(axis: str, value: float, u: float | None) -> str:
        if value - value != 0.0:
            return "a number too large to tell"
        return show(axis, value, u if u is not None and u - u == 0.0 else None)

    return text


def few(freedom: int) -> str:
    """What is added where the readings are few."""
    if freedom >= FEW:
        return ""
    return f" Few readings: {freedom} more than the fit has coefficients, so k = {K} covers less than 95 %."
