"""What an answer can be: numbers as typed, exact decimals, numbers rounded and printed, named error values.

    typed("12,5")                    -> Dec          what a person wrote, exactly; or a Refusal that says what to write
    dec("0.58")                      -> Dec          a decimal string that the program made
    compare, add, sub, mul, magnitude, to_text       exact decimal arithmetic, for judging readings as they were typed
    round12(x), fixed(x, 3)          -> text         a float's exact binary value, rounded half to even
    inward("0.588", "0.01", "high")  -> "0.58"       a limit rounded to the safe side
    beside("41.5432", "0.83", None)  -> "41.54", "0.83"   a value and its uncertainty, as they are shown
    to_si("27", kv), to_shown(x, kv)                 between what is shown and SI

Decided: one separator, `,` or `.`; a digit before and after it (".5" and "5." are refused: a lone point is easily
lost); a sign may be + - or U+2212; leading zeros are kept as instruments show them; at most 15 digits. Printed numbers
are plain decimals without exponent, at any magnitude, with "-" as the sign and never "-0".

The twin is static/core/values.js, same names; tests/vectors/values/ holds them together. Not here: units
(fieldkit.units), judgement (fieldkit.run.judge).
"""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass
from functools import lru_cache
from typing import Protocol

from fieldkit.errors import Refusal

#: every code that a Fault can have
FAULTS = (
    "divide-by-zero",
    "overflow",
    "out-of-range",
    "missing",
    "wrong-type",
    "domain",
    "unknown-name",
    "unknown-function",
    "too-deep",
    "bad-tree",
)

MAX_DIGITS = 15

_SPACES = frozenset(
    " \t\n\r\x0b\x0c\u00a0\u2000\u2001\u2002\u2003\u2004\u2005\u2006\u2007\u2008\u2009\u200a\u202f\u3000"
)
_SIGNS = "+-\u2212"
_PLAIN = re.compile(r"-?[0-9]+(\.[0-9]+)?")
_EXPONENT = re.compile("[+\\-\u2212]?[0-9]+([.,][0-9]+)?[eE][+\\-\u2212]?[0-9]*")


@dataclass(frozen=True)
class Fault:
    """The answer of a formula that has none: a code out of FAULTS, and a sentence. A value, never raised."""

    code: str
    says: str


@dataclass(frozen=True)
class Dec:
    """An exact decimal: digits / 10**scale. Trailing zeros are kept, so 6.30 has scale 2. Compare with `compare`."""

    digits: int
    scale: int


class Scaled(Protocol):
    """What a unit must have here: si = shown * factor + offset, as decimal strings."""

    @property
    def factor(self) -> str: ...
    @property
    def offset(self) -> str: ...


def typed(text: str) -> Dec | Refusal:
    """The number that a person wrote, exactly; or, returned and not raised, a Refusal that says what to write."""
    refusal = _refused(text)
    if refusal is not None:
        return Refusal(*refusal)
    return dec(text.replace(",", ".").replace("\u2212", "-").removeprefix("+"))


def _refused(text: str) -> tuple[str, str] | None:
    if text == "":
        return "nothing-typed", "Nothing is written here. Write the number that the instrument shows."
    if any(c in _SPACES for c in text):
        return "space", "There is a space in it. Write the number without spaces, like 1200.5."
    if any(ord(c) > 127 and unicodedata.category(c) == "Nd" for c in text):
        return "other-digits", "These are other digits. Write it with the digits 0 to 9."
    if sum(c in ".," for c in text) > 1:
        return "two-separators", "There is more than one point or comma. Write one at most, like 1234.5."
    if _EXPONENT.fullmatch(text):
        return "exponent", "It has an exponent. Write all its digits, as the meter shows them."
    if any(c in "'\u2019_" for c in text):
        return "thousands", "It has a mark between thousands. Write the digits alone, like 1234.5."
    if any(c in _SIGNS for c in text[1:]):
        return "sign", "The sign is not in front. Write one sign at most, as the first character, like -87.5."
    if any(c not in "0123456789.," + _SIGNS for c in text) or not any(c in "0123456789" for c in text):
        return "not-a-number", "This is no number. Write digits only, without the unit, like 12.5."
    body = text.lstrip(_SIGNS)
    if body[0] in ".,":
        return "no-digit-before", f"There is no digit before the point. Write 0{body}."
    if body[-1] in ".,":
        return "no-digit-after", f"There is no digit after the point. Write {body[:-1]} or {body}0."
    if sum(c in "0123456789" for c in text) > MAX_DIGITS:
        return "too-many-digits", f"It has more than {MAX_DIGITS} digits. Write what the instrument shows."
    return None


def dec(text: str) -> Dec:
    """The decimal that a program-made text spells: "-12.50". Raises ValueError on anything else."""
    if not _PLAIN.fullmatch(text):
        raise _no_decimal(text)
    whole, _, part = text.partition(".")
    return Dec(int(whole + part), len(part))


def _no_decimal(text: str) -> ValueError:
    return ValueError(f"not a plain decimal: {text!r:.60}")


def _aligned(a: Dec, b: Dec) -> tuple[int, int, int]:
    scale = max(a.scale, b.scale)
    return a.digits * 10 ** (scale - a.scale), b.digits * 10 ** (scale - b.scale), scale


def compare(a: Dec, b: Dec) -> int:
    """-1 where a < b, 0 where they are equal (6.3 and 6.30 are), 1 where a > b."""
    x, y, _ = _aligned(a, b)
    return (x > y) - (x < y)


def add(a: Dec, b: Dec) -> Dec:
    x, y, scale = _aligned(a, b)
    return Dec(x + y, scale)


def sub(a: Dec, b: Dec) -> Dec:
    x, y, scale = _aligned(a, b)
    return Dec(x - y, scale)


def mul(a: Dec, b: Dec) -> Dec:
    return Dec(a.digits * b.digits, a.scale + b.scale)


def magnitude(a: Dec) -> Dec:
    """The number without its sign."""
    return Dec(abs(a.digits), a.scale)


def to_text(a: Dec, decimals: int | None = None) -> str:
    """Plain decimal text with the number's own decimals, or with `decimals` of them, rounded half to even."""
    if decimals is None:
        return _point(a.digits, a.scale)
    if decimals >= a.scale:
        return _point(a.digits * 10 ** (decimals - a.scale), decimals)
    return _point(_divide_even(a.digits, 10 ** (a.scale - decimals)), decimals)


def trim(a: Dec) -> Dec:
    """The same number without trailing zeros after the point."""
    digits, scale = a.digits, a.scale
    while scale > 0 and digits % 10 == 0:
        digits, scale = digits // 10, scale - 1
    return Dec(digits, scale)


def decimals(text: str) -> int:
    """How many decimals a decimal text has: 2 for "0.01"."""
    return dec(text).scale


def to_float(a: Dec) -> float:
    """The nearest double. Raises OverflowError beyond the range of doubles."""
    return a.digits / 10**a.scale


def number(text: str) -> float | Fault:
    """The nearest double to a plain decimal text; a Fault for any other text. Never raises."""
    if len(text) > 1000 or not _PLAIN.fullmatch(text):
        return Fault("bad-tree", "A number in the formula is not a plain decimal.")
    value = float(text)
    if value in (float("inf"), float("-inf")):
        return Fault("overflow", "The number is too large.")
    return value


def round12(x: float) -> str:
    """Twelve significant digits of the exact binary value of `x`, half to even, as plain decimal text.

    Trailing zeros are left off ("0.588"). Raises ValueError for infinities and NaN: no formula gives them.
    """
    return _round_ratio(*_ratio(x), 12)


def fixed(x: float, places: int) -> str:
    """`x` with `places` decimals, its exact binary value rounded half to even. Raises ValueError as round12 does."""
    top, bottom = _ratio(x)
    return _point(_divide_even(top * 10**places, bottom), places)


def _ratio(x: float) -> tuple[int, int]:
    try:
        return x.as_integer_ratio()
    except (OverflowError, ValueError) as exc:
        raise ValueError(f"{x} has no digits") from exc


def _divide_even(top: int, bottom: int) -> int:
    """top / bottom to the nearest integer, ties to even; bottom > 0."""
    whole, rest = divmod(top, bottom)
    if rest * 2 > bottom or (rest * 2 == bottom and whole % 2 == 1):
        whole += 1
    return whole


def _round_ratio(top: int, bottom: int, count: int) -> str:
    """top / bottom with `count` significant digits, without trailing zeros; bottom > 0."""
    if top == 0:
        return "0"
    size = abs(top)
    # number of digits before the point: a first guess, then exact
    ahead = len(str(size)) - len(str(bottom))
    ahead += 1 if _at_least(size, bottom, ahead) else 0
    scale = count - ahead
    digits = _divide_even(size * 10**scale, bottom) if scale >= 0 else _divide_even(size, bottom * 10**-scale)
    while digits % 10 == 0:
        digits, scale = digits // 10, scale - 1
    if scale < 0:
        digits, scale = digits * 10**-scale, 0
    return _point(-digits if top < 0 else digits, scale)


def _at_least(size: int, bottom: int, power: int) -> bool:
    """size / bottom >= 10**power."""
    return size >= bottom * 10**power if power >= 0 else size * 10**-power >= bottom


def _point(digits: int, scale: int) -> str:
    body = str(abs(digits)).rjust(scale + 1, "0")
    if scale:
        body = body[:-scale] + "." + body[-scale:]
    return "-" + body if digits < 0 else body


def inward(text: str, resolution: str | None, side: str) -> str:
    """A limit rounded to the resolution, to the safe side: a "low" limit up, a "high" limit down.

    `text` and `resolution` are decimal texts in the same unit. Without a resolution (None or zero) the limit stays as
    it is. Raises ValueError for another side.
    """
    if side not in ("low", "high"):
        raise ValueError(f"side is {side!r}; it is low or high")
    limit = dec(text)
    if resolution is None or dec(resolution).digits == 0:
        return text
    step = magnitude(dec(resolution))
    top, unit, _ = _aligned(limit, step)
    count = top // unit if side == "high" else -(-top // unit)
    return _point(count * step.digits, step.scale)


def beside(text: str, u: str, resolution: str | None) -> tuple[str, str]:
    """A value and its uncertainty as they stand beside each other: "41.54", "0.83".

    The uncertainty has two significant digits at most, and none finer than the resolution; the value ends at the same
    place (JCGM 100, 7.2.6). Halves go to even. One step of the place stands for less than that: never nothing. Where
    there is no uncertainty at all ("0"), the value stays as it is.
    """
    size = magnitude(dec(u))
    if size.digits == 0:
        return text, "0"
    place = _second_place(size)
    if resolution is not None:
        place = max(place, -decimals(resolution))
    return _at_place(_steps(dec(text), place), place), _at_place(max(1, _steps(size, place)), place)


def _second_place(size: Dec) -> int:
    """The power of ten of the second significant digit, as it is once rounded there: 0.0996 is 0.10."""
    place = len(str(size.digits)) - size.scale - 2
    return place + 1 if _steps(size, place) >= 100 else place


def _steps(a: Dec, place: int) -> int:
    """How many times a power of ten goes into a number, to the nearest, ties to even."""
    return _divide_even(a.digits * 10 ** max(0, -place), 10 ** (max(0, place) + a.scale))


def _at_place(count: int, place: int) -> str:
    """So many of a power of ten, with the decimals that it has."""
    return _point(count, -place) if place < 0 else _point(count * 10**place, 0)


def to_shown(si: float, unit: Scaled) -> str:
    """An SI value in `unit`, twelve significant digits: (si - offset) / factor, computed exactly and rounded once.

    Where the unit has an offset, the SI value is rounded to twelve digits first: 273.15 K, which no double holds
    exactly, is 0 degC and not a millionth of a millionth below it.
    """
    offset, factor = dec(unit.offset), dec(unit.factor)
    if offset.digits == 0:
        top, bottom = _ratio(si)
    else:
        less = sub(dec(round12(si)), offset)
        top, bottom = less.digits, 10**less.scale
    return _round_ratio(top * 10**factor.scale, bottom * factor.digits, 12)


def to_si(text: str, unit: Scaled) -> float:
    """A decimal text in `unit` as SI: text * factor + offset, computed exactly and rounded once to a double."""
    if not _PLAIN.fullmatch(text):
        raise _no_decimal(text)
    whole, _, part = text.partition(".")
    top, more, bottom = _whole(unit.factor, unit.offset, len(part))
    return (int(whole + part) * top + more) / bottom


@lru_cache(maxsize=2048)
def _whole(factor: str, offset: str, scale: int) -> tuple[int, int, int]:
    """top, more, bottom, so that digits / 10**scale in the unit are (digits * top + more) / bottom in SI."""
    one = mul(Dec(1, scale), dec(factor))
    top, more, common = _aligned(one, dec(offset))
    return top, more, 10**common
