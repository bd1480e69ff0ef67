"""How a record says times, numbers and lists. English; pure functions of text.

Times are the tablet's own (local, with the offset that it wrote); the UTC of the same moment stands beside them where
two clocks could be confused. Not here: the sentence of a reading (fieldkit.run.judge), of a drawing (fieldkit.drawing).
"""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Sequence

MONTHS = (
    "January", "February", "March", "April", "May", "June",
    "July", "August", "September", "October", "November", "December",
)  # fmt: skip

#: a source's state as a record says it
STATES = {
    "off": "off",
    "on": "on",
    "standby": "at standby",
    "cut-off": "at cut-off",
    "locked": "locked, not proved",
    "proved": "locked and proved dead",
    "earthed": "earthed",
    "unknown": "not known",
}


def day(at: str) -> str:
    """31 July 2026; what stands there where it is no date."""
    try:
        made = dt.date.fromisoformat(at[:10])
    except ValueError:
        return at[:10]
    return f"{made.day} {MONTHS[made.month - 1]} {made.year}"


def time(at: str) -> str:
    """14:29:31, as the tablet's clock showed it."""
    return at[11:19]


def minute(at: str) -> str:
    return at[11:16]


def zone(at: str) -> str:
    """+01:00; Z is said as +00:00."""
    tail = at[19:]
    for sign in "+-":
        if sign in tail:
            return sign + tail.partition(sign)[2]
    return "+00:00"


def utc(at: str) -> str:
    """2026-07-31T13:29:31Z; empty where it is no time."""
    try:
        made = dt.datetime.fromisoformat(at)
    except ValueError:
        return ""
    if made.tzinfo is None:
        return ""
    return made.astimezone(dt.UTC).strftime("%Y-%m-%dT%H:%M:%SZ")


def second(at: str, first: str) -> int:
    """Seconds from the midnight before `first` to `at`, both by the tablet's clock."""
    try:
        days = (dt.date.fromisoformat(at[:10]) - dt.date.fromisoformat(first[:10])).days
        return days * 86400 + int(at[11:13]) * 3600 + int(at[14:16]) * 60 + int(at[17:19])
    except ValueError:
        return 0


def between(first: str, last: str) -> int:
    """Whole seconds from one time to another, 0 where one of them is no time."""
    try:
        gap = dt.datetime.fromisoformat(last) - dt.datetime.fromisoformat(first)
    except (ValueError, TypeError):
        return 0
    return int(gap.total_seconds())


def spoken(seconds: int) -> str:
    """14 s; 15 min 20 s; 1 h 5 min."""
    hours, minutes, left = seconds // 3600, seconds // 60 % 60, seconds % 60
    if hours:
        return f"{hours} h {minutes} min" if minutes else f"{hours} h"
    if minutes:
        return f"{minutes} min {left} s" if left else f"{minutes} min"
    return f"{left} s"


def whole(text: str | None) -> int:
    """A decimal text of seconds as whole seconds, down."""
    return int(float(text)) if text else 0


def listed(words: Sequence[str]) -> str:
    """a, b and c."""
    if len(words) < 2:
        return "".join(words)
    return ", ".join(words[:-1]) + " and " + words[-1]


def count(n: int, one: str, many: str = "") -> str:
    """1 reading, 3 readings."""
    return f"{n} {one if n == 1 else many or one + 's'}"


def first_up(words: str) -> str:
    return words[:1].upper() + words[1:]


def sentence(words: str) -> str:
    """With a capital and a full stop; empty stays empty."""
    words = words.strip()
    if not words:
        return ""
    return first_up(words) + ("" if words[-1] in ".!?”" else ".")


_MINUS = re.compile(r"(?<![\w-])-(?=[0-9])", re.ASCII)


def quoted(reason: str) -> str:
    """What a person wrote, in quotation marks, as the end of a sentence."""
    return f"“{reason}”" + ("" if reason[-1:] in tuple(".!?") else ".")


def minus(text: str) -> str:
    """Text for a person: a true minus sign before numbers; hyphens in names and dates stay."""
    return _MINUS.sub("−", text)


def printed(text: str, symbol: str, shown: str) -> str:
    """A sentence of the judgement as printed: true minus signs, curled apostrophes, the unit as people read it."""
    if symbol and symbol != shown:
        text = re.sub(rf"(?<=[0-9] ){re.escape(symbol)}(?![\w])", shown, text)
    return minus(text).replace("'", "’")


def number(text: str) -> str:
    """A number as typed, as plain decimal text: point for comma, a true minus as a hyphen, no spaces."""
    return text.strip().replace("−", "-").replace(",", ".").replace(" ", "").lstrip("+")
