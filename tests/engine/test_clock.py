"""The clock: frozen cases for both engines, and the reading of times against the standard library."""

from __future__ import annotations

import json
import random
from datetime import UTC, date, datetime, timedelta, timezone
from typing import Any

import pytest
import run_driver as drive
from dateutil.relativedelta import relativedelta
from run_twin import Twin

from fieldkit.run import clock

VECTORS: dict[str, Any] = json.loads((drive.VECTORS / "clock" / "clock.json").read_text())
NAMES = [name for name in VECTORS if name != "runs"]


@pytest.mark.parametrize("name", NAMES)
def test_texts_and_times_are_read_as_frozen_by_both(name: str, twin: Twin) -> None:
    for case in VECTORS[name]:
        assert getattr(clock, name)(case["of"]) == case["is"], case
        assert twin.call(f"clock.{name}", case["of"]) == case["is"], case


@pytest.mark.parametrize("case", VECTORS["runs"], ids=lambda c: c["why"])
def test_totals_are_as_frozen_in_both(case: dict[str, Any], twin: Twin) -> None:
    kept = clock.begin(case["at"][0])
    assert twin.call("clock.begin", case["at"][0]) == kept
    for at, want in zip(case["at"][1:], case["is"], strict=True):
        assert clock.passed(kept, at) == twin.call("clock.passed", kept, at) == want["passed"]
        assert list(clock.now(kept, at)) == twin.call("clock.now", kept, at) == want["now"]
        assert clock.advance(kept, at) == twin.call("clock.advance", kept, at) == want["clock"]
        kept = want["clock"]


def test_the_least_time_never_exceeds_the_greatest() -> None:
    rng = random.Random(7)
    kept = clock.begin({"wall": "2026-07-31T09:00:00.000+01:00", "mono": "0", "boot": "a"})
    wall = datetime(2026, 7, 31, 9, tzinfo=timezone(timedelta(hours=1)))
    for _ in range(2000):
        wall += timedelta(milliseconds=rng.randrange(-10_000, 50_000))
        boot = kept["boot"] if rng.random() < 0.9 else rng.choice("abc")
        mono = str((clock.mono_ms(kept["mono"]) or 0) + rng.randrange(-50, 50_000))
        at = {"wall": wall.isoformat(timespec="milliseconds"), "mono": mono, "boot": boot}
        step = clock.passed(kept, at)
        assert 0 <= step["least"] <= step["greatest"]
        kept = clock.advance(kept, at)
        assert (clock.millis(kept["least"]) or 0) <= (clock.millis(kept["greatest"]) or 0)


def test_wall_times_agree_with_the_standard_library() -> None:
    # outside check: datetime of CPython, over two centuries and every kind of offset
    rng = random.Random(3)
    for _ in range(2000):
        zone = timezone(timedelta(minutes=rng.randrange(-14 * 60, 14 * 60)))
        found = datetime(1970, 1, 1, tzinfo=zone) + timedelta(milliseconds=rng.randrange(-(10**12), 6 * 10**12))
        text = found.isoformat(timespec="milliseconds")
        assert clock.wall_ms(text) == round((found - datetime(1970, 1, 1, tzinfo=UTC)) / timedelta(milliseconds=1))


def test_seconds_and_millis_are_inverse() -> None:
    rng = random.Random(5)
    for ms in [0, -1, 999, *(rng.randrange(-(10**12), 10**12) for _ in range(500))]:
        assert clock.millis(clock.seconds(ms)) == ms


def test_months_are_counted_as_dateutil_counts_them(twin: Twin) -> None:
    # outside check: relativedelta of python-dateutil, whose day is clipped to the end of a shorter month
    rng = random.Random(11)
    first, last = date(1900, 1, 1).toordinal(), date(2200, 12, 31).toordinal()
    days = [date.fromordinal(rng.randrange(first, last)) for _ in range(3000)]
    days += [
        date(year, month, day) for year in (1900, 2000, 2023, 2024) for month in (1, 3, 5, 8, 12) for day in (28, 31)
    ]
    for day in days:
        months = rng.randrange(0, 240)
        want = (day + relativedelta(months=months)).isoformat()
        assert clock.months_later(day.isoformat(), months) == want
        assert twin.call("clock.months_later", day.isoformat(), months) == want


@pytest.mark.parametrize(
    "date_", ["", "2026-7-1", "2026-02-29", "2026-13-01", "0000-01-01", "2026-07-31T10:00", None, 20260731]
)
def test_what_is_no_date_has_no_later_one(date_: Any, twin: Twin) -> None:
    assert clock.months_later(date_, 12) is None
    assert twin.call("clock.months_later", date_, 12) is None


@pytest.mark.parametrize("months", [-1, 1.5, None, "12", True, 10**6])
def test_what_is_no_number_of_months_gives_no_date(months: Any, twin: Twin) -> None:
    assert clock.months_later("2026-07-31", months) is None
    assert twin.call("clock.months_later", "2026-07-31", months) is None
