"""What a fit takes in: columns of numbers, their standard uncertainty, parameters; or why they cannot be used.

A number is finite, and zero or between 1e-30 and 1e30 in size: then no product in a fit overflows or loses its last
digits. An uncertainty is one number for all readings or one for each, above zero; None where it is not known.
Twin: static/core/fits/columns.js.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Any

LARGEST = 1e30
SMALLEST = 1e-30
MOST = 1_000_000
#: a span of settings below this part of their size is no span
NO_SPAN = 1e-12


@dataclass(frozen=True)
class Refused:
    """Why a fit is not given: a stable code, a sentence, and the places (from 0) of the readings that are at fault."""

    code: str
    says: str
    at: list[int] = field(default_factory=list)

    def to_json(self) -> dict[str, Any]:
        return {"code": self.code, "says": self.says, "at": self.at}


@dataclass(frozen=True)
class Columns:
    """Settings or times, readings, and the standard uncertainty of each reading."""

    x: list[float]
    y: list[float]
    u: list[float] | None


def number(x: Any) -> float | None:
    """A finite double; None for all else."""
    if isinstance(x, bool) or not isinstance(x, int | float):
        return None
    try:
        value = float(x)
    except OverflowError:
        return None
    return value + 0.0 if value - value == 0.0 else None


def _too_far(value: float) -> bool:
    size = abs(value)
    return size > LARGEST or 0.0 < size < SMALLEST


def parameter(what: str, x: Any) -> float | Refused:
    """A number that is not a column; `what` stands first in the sentence."""
    value = number(x)
    if value is None:
        return Refused("not-a-number", f"{what} is not a number.")
    if _too_far(value):
        return Refused("out-of-range", f"{what} is too large or too small to compute with.")
    return value


def positive(what: str, x: Any, code: str) -> float | Refused:
    """A parameter above zero."""
    value = parameter(what, x)
    if isinstance(value, Refused) or value > 0.0:
        return value
    return Refused(code, f"{what} is not above zero.")


def whole(what: str, x: Any, least: int) -> int | Refused:
    """A whole number from `least` to a million."""
    value = parameter(what, x)
    if isinstance(value, Refused):
        return value
    if value != math.floor(value) or value < least or value > MOST:
        return Refused("out-of-range", f"{what} is not a whole number from {least} to {MOST}.")
    return int(value)


def _column(names: str, given: Any) -> list[float] | Refused:
    if not isinstance(given, list | tuple):
        return Refused("not-a-column", f"The {names} are not a column of numbers.")
    found: list[float] = []
    for i, x in enumerate(given):
        value = parameter(f"Number {i + 1} of the {names}", x)
        if isinstance(value, Refused):
            return Refused(value.code, value.says, [i])
        found.append(value)
    return found


def _uncertainty(u: Any, n: int) -> list[float] | Refused | None:
    if u is None:
        return None
    found = _column("uncertainties", u if isinstance(u, list | tuple) else [u] * n)
    if isinstance(found, Refused):
        return found
    if len(found) != n:
        return Refused("unequal-lengths", f"There are {len(found)} uncertainties for {n} readings.")
    for i, value in enumerate(found):
        if value <= 0.0:
            return Refused("bad-uncertainty", f"The uncertainty of reading {i + 1} is not above zero.", [i])
    return found


def read(names: tuple[str, str], x: Any, y: Any, u: Any, least: int) -> Columns | Refused:
    """The columns of a fit that needs `least` readings; `names` are their plurals: ("settings", "readings")."""
    xs = _column(names[0], x)
    if isinstance(xs, Refused):
        return xs
    ys = _column(names[1], y)
    if isinstance(ys, Refused):
        return ys
    if len(xs) != len(ys):
        return Refused("unequal-lengths", f"There are {len(xs)} {names[0]} for {len(ys)} {names[1]}.")
    us = _uncertainty(u, len(ys))
    if isinstance(us, Refused):
        return us
    if len(xs) < least:
        return Refused("too-few", f"Too few {names[1]}: {len(xs)}, and this needs at least {least}.")
    return Columns(xs, ys, us)


def spread(names: str, x: list[float]) -> tuple[float, float] | Refused:
    """The least and the greatest of a column; refused where they are equal, or nearly."""
    low, high = x[0], x[0]
    for value in x:
        low = value if value < low else low
        high = value if value > high else high
    size = -low if -low > high else high
    if high - low <= NO_SPAN * size:
        return Refused("no-spread", f"The {names} are all equal, or nearly.")
    return low, high


def not_positive(names: str, x: list[float]) -> Refused | None:
    """Refuses a column that has no logarithm, with the places."""
    at = [i for i, value in enumerate(x) if value <= 0.0]
    if not at:
        return None
    places = ", ".join(str(i + 1) for i in at)
    return Refused(
        "not-positive",
        f"These {names} are zero or below, and have no logarithm: {places} (counted from 1). "
        "Leave them out, and say so, or read again.",
        at,
    )


def count(given: Any) -> int:
    """How many readings there are, whatever they are."""
    return len(given) if isinstance(given, list | tuple) else 0
