"""Exact decimal arithmetic for drawings: decimal strings as integers, positions in tenths of a pixel.

Twin: static/core/drawing/number.js. Not here: reading what a person typed (fieldkit.values).
"""

from __future__ import annotations

import re

_DECIMAL = re.compile(r"([+-]?)([0-9]+)(?:\.([0-9]*))?(?:[eE]([+-]?[0-9]{1,3}))?")
#: no drawing needs more digits; a longer number is cut, never trusted
_MOST_DIGITS = 40


def parts(text: str | None) -> tuple[int, int] | None:
    """(mantissa, decimals) of a decimal string, so that value = mantissa / 10**decimals; None if it is not one."""
    if text is None:
        return None
    found = _DECIMAL.fullmatch(str(text).strip().replace("\u2212", "-").replace(",", "."))
    if found is None:
        return None
    sign, whole, fraction, power = found[1], found[2], found[3] or "", int(found[4] or "0")
    if len(whole) > _MOST_DIGITS or abs(power) > _MOST_DIGITS:
        return None
    fraction = fraction[:_MOST_DIGITS]
    mantissa, decimals = int(whole + fraction), len(fraction) - power
    if decimals < 0:
        mantissa, decimals = mantissa * 10 ** (-decimals), 0
    return (-mantissa if sign == "-" else mantissa), decimals


def decimals(*texts: str | None) -> int:
    """The most decimals that any of the numbers has."""
    return max([0, *(p[1] for p in map(parts, texts) if p is not None)])


def scaled(text: str | None, places: int) -> int | None:
    """The number times 10**places, exactly; `places` is at least its decimals. None stays None."""
    p = parts(text)
    return None if p is None else p[0] * 10 ** (places - p[1])


def ratio(a: int, b: int) -> int:
    """a / b to the nearest integer, halves up; b is positive."""
    return (2 * a + b) // (2 * b)


def px(tenths: int) -> str:
    """Tenths of a pixel as SVG writes them: 123 is 12.3, 120 is 12, -5 is -0.5."""
    whole, tenth = divmod(abs(tenths), 10)
    return ("-" if tenths < 0 else "") + str(whole) + (f".{tenth}" if tenth else "")


def shown(value: int, places: int, keep: int) -> str:
    """value / 10**places with `keep` decimals (halves away from zero), with a true minus sign, for a person."""
    size = ratio(abs(value), 10 ** (places - keep)) if places > keep else abs(value) * 10 ** (keep - places)
    digits = str(size).rjust(keep + 1, "0")
    text = digits if keep == 0 else digits[:-keep] + "." + digits[-keep:]
    return ("\u2212" if value < 0 and size else "") + text


def text(value: str | None) -> str:
    """A number as typed, with a true minus sign and a point."""
    return "" if value is None else str(value).strip().replace(",", ".").replace("-", "\u2212")


def wide(words: str, size: int) -> int:
    """About how wide `words` are at `size` px, in tenths of a pixel: 0.56 of the size a character."""
    return len(words) * size * 56 // 10
