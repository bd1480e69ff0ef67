"""The clock of a run: what two clocks together allow to be said about how long something lasted.

A running timer (`mono`, milliseconds since `boot`) and the wall clock stand in every event. Over one boot the
*least* time is what the running timer counted, the *greatest* is the greater of the two. Across a change of boot
the least time is nothing, until a `states-confirmed` says what held through the gap. Totals are whole
milliseconds inside, and texts of seconds with three decimals in the state. Twin: static/core/clock.js.
Not here: what a gap does to facts, proofs and waits (fieldkit.run.state).
"""

from __future__ import annotations

import math
import re
from typing import Any

#: A gap longer than this is a pause: what was known has to be confirmed again. Milliseconds.
PAUSE_MS = 120_000
#: The two clocks may part by this much before it counts as a changed clock. Milliseconds.
SLACK_MS = 2_000
#: What a gap that nobody can tell (another boot, the wall clock set back) counts for greatest times: at least a day.
UNTOLD_MS = 86_400_000

_WALL = re.compile(r"^(\d{4})-(\d\d)-(\d\d)T(\d\d):(\d\d):(\d\d)(?:\.(\d{1,9}))?(Z|[+-]\d\d:\d\d)$", re.ASCII)
_MONO = re.compile(r"^(\d{1,13})(?:\.\d+)?$", re.ASCII)
_SECONDS = re.compile(r"^(-?)(\d{1,12})(?:\.(\d{1,3})\d*)?$", re.ASCII)
_DAY = re.compile(r"^(\d{4})-(\d\d)-(\d\d)$", re.ASCII)
_MONTHS = (31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31)


def wall_ms(text: Any) -> int | None:
    """Milliseconds since 1970 of an ISO time with its offset; None where it is no such time."""
    found = _WALL.match(text) if isinstance(text, str) else None
    if not found:
        return None
    year, month, day, hour, minute, second = (int(found.group(i)) for i in range(1, 7))
    if not 1 <= month <= 12 or hour > 23 or minute > 59 or second > 59:
        return None
    if not 1 <= day <= _longest(year, month):
        return None
    millis = int(((found.group(7) or "") + "000")[:3])
    zone = found.group(8)
    offset = 0
    if zone != "Z":
        offset = int(zone[1:3]) * 60 + int(zone[4:6])
        offset = -offset if zone[0] == "-" else offset
    return ((_days(year, month, day) * 24 + hour) * 60 + minute - offset) * 60_000 + second * 1000 + millis


def _longest(year: int, month: int) -> int:
    """How many days the month has."""
    leap = year % 4 == 0 and (year % 100 != 0 or year % 400 == 0)
    return 29 if month == 2 and leap else _MONTHS[month - 1]


def months_later(date: Any, months: Any) -> str | None:
    """The date so many months after a date (YYYY-MM-DD), the day clipped to the month's end; None where it is none.

    A calibration of 31 August with an interval of 6 months is valid to the end of 28 (or 29) February.
    """
    found = _DAY.match(date) if isinstance(date, str) else None
    if not found or isinstance(months, bool) or not isinstance(months, int) or months < 0:
        return None
    year, month, day = (int(found.group(i)) for i in (1, 2, 3))
    if year < 1 or not 1 <= month <= 12 or not 1 <= day <= _longest(year, month):
        return None
    passed_months = month - 1 + months
    year, month = year + passed_months // 12, passed_months % 12 + 1
    return f"{year:04d}-{month:02d}-{min(day, _longest(year, month)):02d}" if year <= 9999 else None


def _days(year: int, month: int, day: int) -> int:
    """Days since 1970-01-01 in the Gregorian calendar, years from March so that the leap day comes last."""
    y = year - 1 if month <= 2 else year
    era = y // 400
    of_era = y - era * 400
    of_year = (153 * (month - 3 if month > 2 else month + 9) + 2) // 5 + day - 1
    return era * 146_097 + of_era * 365 + of_era // 4 - of_era // 100 + of_year - 719_468


def mono_ms(text: Any) -> int | None:
    """Whole milliseconds of the running timer; None where it is no such number."""
    found = _MONO.match(text) if isinstance(text, str) else None
    return int(found.group(1)) if found else None


def seconds(ms: int) -> str:
    """Milliseconds as seconds with three decimals: -1500 is "-1.500"."""
    size = -ms if ms < 0 else ms
    return f"{'-' if ms < 0 else ''}{size // 1000}.{size % 1000:03d}"


def millis(text: Any) -> int | None:
    """The inverse of `seconds`, also for "900" as a person states it; None where it is no such number."""
    found = _SECONDS.match(text) if isinstance(text, str) else None
    if not found:
        return None
    size = int(found.group(2)) * 1000 + int(((found.group(3) or "") + "000")[:3])
    return -size if found.group(1) else size


def begin(at: dict[str, Any]) -> dict[str, Any]:
    """The clock at the first event of a run."""
    return {
        "least": "0.000",
        "greatest": "0.000",
        "wall": at["wall"],
        "mono": at["mono"],
        "boot": at["boot"],
        "gaps": 0,
        "changed": False,
        "owed": "0.000",
    }


def passed(clock: dict[str, Any], at: dict[str, Any]) -> dict[str, Any]:
    """What passed since the last event: least and greatest, what the least leaves out, what is odd.

    `out` is the time that only the wall clock saw (milliseconds), None where it cannot be told; `moved` says that
    the wall clock was set back, `ahead` that it ran ahead of the running timer by more than the slack.
    """
    wall_a, wall_b = wall_ms(clock["wall"]), wall_ms(at["wall"])
    d_wall = wall_b - wall_a if wall_a is not None and wall_b is not None else 0
    mono_a, mono_b = mono_ms(clock["mono"]), mono_ms(at["mono"])
    if at["boot"] == clock["boot"]:
        d_mono = max(0, mono_b - mono_a) if mono_a is not None and mono_b is not None else 0
        return {
            "least": d_mono,
            "greatest": max(d_mono, d_wall),
            "out": max(0, d_wall - d_mono),
            "boot": False,
            "moved": d_wall < d_mono - SLACK_MS,
            "ahead": d_wall > d_mono + SLACK_MS,
        }
    return {
        "least": 0,
        "greatest": max(d_wall if d_wall >= 0 else UNTOLD_MS, mono_b or 0),
        "out": d_wall if d_wall >= 0 else None,
        "boot": True,
        "moved": d_wall < 0,
        "ahead": False,
    }


def away(passed: dict[str, Any]) -> bool:
    """Away for longer than a moment, or nobody can tell: a `resumed` or `clock-changed` says so first."""
    return bool(passed["boot"]) or passed["out"] is None or passed["out"] > PAUSE_MS


def advance(clock: dict[str, Any], at: dict[str, Any]) -> dict[str, Any]:
    """The clock after an event at `at`."""
    step = passed(clock, at)
    return {
        "least": seconds(_total(clock["least"]) + step["least"]),
        "greatest": seconds(_total(clock["greatest"]) + step["greatest"]),
        "wall": at["wall"],
        "mono": at["mono"],
        "boot": at["boot"],
        "gaps": clock["gaps"] + (1 if step["boot"] else 0),
        "changed": clock["changed"] or step["moved"],
        "owed": clock["owed"],
    }


def now(clock: dict[str, Any] | None, at: dict[str, Any]) -> tuple[int, int]:
    """Totals (least, greatest) in milliseconds since the run's first event, at the moment `at`."""
    if clock is None:
        return (0, 0)
    step = passed(clock, at)
    return (_total(clock["least"]) + step["least"], _total(clock["greatest"]) + step["greatest"])


def owe(clock: dict[str, Any], more: int | None) -> dict[str, Any]:
    """The clock, owing `more` milliseconds that a resume check may grant; None: nothing may be granted any more."""
    if more is None or clock["owed"] is None:
        return {**clock, "owed": None}
    return {**clock, "owed": seconds(_total(clock["owed"]) + more)}


def day(wall: Any) -> str:
    """The date on the wall, where the tablet is: what calibration dates are compared with."""
    return wall[:10] if isinstance(wall, str) else ""


def ceil_ms(of: float) -> int:
    """Seconds as whole milliseconds, rounded up."""
    return math.ceil(of * 1000.0)


def spoken(ms: int) -> str:
    """A time as a person says it, rounded up so that it never promises too early: "6 min 18 s", "1 h 2 min"."""
    whole = -(-ms // 1000) if ms > 0 else 0
    if whole >= 3600:
        whole = -(-whole // 60) * 60
    hours, minutes, left = whole // 3600, whole // 60 % 60, whole % 60
    if hours:
        return f"{hours} h {minutes} min" if minutes else f"{hours} h"
    if minutes:
        return f"{minutes} min {left} s" if left else f"{minutes} min"
    return f"{left} s"


def _total(text: str) -> int:
    found = millis(text)
    return 0 if found is None else found
