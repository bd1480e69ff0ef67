"""Bursts above a slow trend: scale, trend and tests against scipy, counts against what was put in."""

from __future__ import annotations

import math
import random
from typing import Any

import pytest
import scipy.stats

from fieldkit import fits
from fieldkit.fits import robust
from fieldkit.fits.bursts import NONE_SEEN

TIMES = [60.0 * k for k in range(1, 121)]


def slow(r: random.Random, law: str = "exponential", scatter: float = 0.03) -> list[float]:
    """A quiet current in uA over two hours."""
    falls = {"exponential": lambda t: 10 * math.exp(-t / 9000), "power": lambda t: 10 * 600 / t}
    return [falls[law](t) * math.exp(r.gauss(0, scatter)) for t in TIMES]


def code(got: dict[str, Any]) -> str | None:
    return got["refused"] and got["refused"]["code"]


def test_the_scale_is_that_of_scipy() -> None:
    """scipy.stats.median_abs_deviation, scaled to a normal distribution; its factor has more digits than 1.4826."""
    r = random.Random(61)
    for n in (1, 2, 5, 20, 21):
        x = [r.gauss(3, 2) for _ in range(n)]
        want = scipy.stats.median_abs_deviation(x, scale="normal")
        assert robust.deviation(x) == pytest.approx(want, rel=3e-5)


def test_the_trend_is_that_of_theil_and_sen() -> None:
    """scipy.stats.theilslopes: the slope; its intercept is the median of what the slope leaves ("joint")."""
    r = random.Random(62)
    for _ in range(30):
        x = sorted(r.uniform(0, 10) for _ in range(25))
        y = [3 - 0.4 * v + r.gauss(0, 1) + (20 if r.random() < 0.1 else 0) for v in x]
        want = scipy.stats.theilslopes(y, x, method="joint")
        slope, intercept = robust.trend(x, y)
        assert slope == pytest.approx(want.slope, rel=1e-12)
        assert intercept == pytest.approx(want.intercept, rel=1e-12)


@pytest.mark.parametrize("law", ["exponential", "power"])
def test_bursts_that_were_put_in_are_found_and_no_others(law: str) -> None:
    r = random.Random(63)
    for _ in range(20):
        y = slow(r, law)
        places = sorted(r.sample(range(2, 118, 4), 6))
        for i in places:
            y[i] *= r.uniform(1.6, 6)
        y[places[0] + 1] *= 2
        got = fits.bursts(TIMES, y)
        assert code(got) is None and got["trend"]["law"] == law
        assert [one["first"] for one in got["bursts"]] == places
        assert got["bursts"][0]["last"] == places[0] + 1
        assert got["value"] == pytest.approx(6 / got["hours"]) and got["hours"] == pytest.approx(119 / 60)
        assert got["u"] == pytest.approx(math.sqrt(6) / got["hours"])


def test_quiet_readings_seldom_have_bursts() -> None:
    """Monte Carlo: normal scatter without bursts, 300 times 40 readings; 5 robust deviations are passed by chance in 2 %."""
    r = random.Random(64)
    times = TIMES[:40]
    found = [len(fits.bursts(times, slow(r)[:40])["bursts"]) for _ in range(300)]
    assert sum(n > 0 for n in found) <= 6


def test_the_last_reading_can_be_a_burst() -> None:
    y = slow(random.Random(65))
    y[-1] *= 3
    assert [one["peak"] for one in fits.bursts(TIMES, y)["bursts"]] == [119]


def test_a_current_at_the_inhibit_is_a_burst_whatever_the_trend_says() -> None:
    """Its places are told even where there is no trend."""
    r = random.Random(66)
    y = [math.exp(r.gauss(0, 0.8)) for _ in TIMES]
    inhibit = sorted(y)[-3]
    got = fits.bursts(TIMES, y, inhibit)
    assert got["above"] == [i for i, v in enumerate(y) if v >= inhibit] and len(got["above"]) == 3
    assert {i for one in got["bursts"] for i in range(one["first"], one["last"] + 1)} >= set(got["above"])
    assert fits.bursts(TIMES[:3], [1.0, 30.0, 1.0], 20.0)["above"] == [1]


def test_none_seen_leaves_the_rate_that_a_count_of_none_allows() -> None:
    """scipy.stats.chi2: the upper 95 % bound of a count of none is half of chi-squared of 2 degrees of freedom."""
    assert NONE_SEEN == pytest.approx(scipy.stats.chi2.ppf(0.95, 2) / 2, rel=1e-12)
    got = fits.bursts(TIMES, slow(random.Random(67)))
    assert got["bursts"] == [] and got["value"] == 0 and got["u"] is None
    assert got["at_most"] == pytest.approx(NONE_SEEN / got["hours"])
    assert "No burst" in got["says"] and "95 % confidence" in got["says"]


def _with(places: list[int], factors: list[float], seed: int) -> dict[str, Any]:
    y = slow(random.Random(seed))
    for i, factor in zip(places, factors, strict=True):
        y[i] *= factor
    return fits.bursts(TIMES, y)


def test_rarer_is_told_by_the_times_and_smaller_by_the_peaks() -> None:
    """Kendall's z against scipy.stats.kendalltau's tau (no ties): z = tau n(n-1)/2 over the deviation of its count."""
    rarer = _with([2, 5, 9, 14, 22, 35, 60], [6, 5.5, 5, 4.5, 4, 3.5, 3], 68)
    assert (rarer["frequency"], rarer["height"]) == ("rarer", "smaller")
    assert "They get rarer. They get smaller." in rarer["says"]
    more = _with([60, 80, 95, 105, 112, 117], [2, 3, 4.5, 6, 8, 11], 69)
    assert (more["frequency"], more["height"]) == ("more often", "larger")
    steady = _with([10, 30, 50, 70, 90, 110], [2, 5, 4, 3, 6, 4.5], 70)
    assert (steady["frequency"], steady["height"]) == ("not clear", "not clear")
    few = _with([10, 50, 90], [3, 3, 3], 71)
    assert (few["frequency"], few["frequency_z"]) == ("too few", None)
    for got in (rarer, more, steady):
        peaks = [one["current"] for one in got["bursts"]]
        n = len(peaks)
        tau = scipy.stats.kendalltau(range(n), peaks).statistic
        assert got["height_z"] == pytest.approx(tau * n * (n - 1) / 2 / math.sqrt(n * (n - 1) * (2 * n + 5) / 18))


def test_the_test_of_times_has_the_deviation_it_says() -> None:
    """Exact: the average of N uniform times has variance 1/(12 N), by scipy.stats.uniform; z is linear in it."""
    assert scipy.stats.uniform.var() == pytest.approx(1 / 12)
    got = _with([2, 5, 9, 14, 22, 35, 60], [5] * 7, 72)
    mean = sum((TIMES[one["peak"]] - TIMES[0]) / (TIMES[-1] - TIMES[0]) for one in got["bursts"]) / 7
    assert got["frequency_z"] == pytest.approx((mean - 0.5) / math.sqrt(scipy.stats.uniform.var() / 7))


def test_zeros_are_left_out_and_said_and_too_many_refused() -> None:
    y = slow(random.Random(73))
    y[7], y[50] = 0.0, -0.1
    got = fits.bursts(TIMES, y)
    assert code(got) is None and got["left_out"] == [7, 50]
    assert got["z"][7] is None and "2 readings at zero or below are left out" in got["says"]
    assert code(fits.bursts(TIMES, [0.0] * 61 + y[61:])) == "mostly-zero"


def test_a_meter_that_shows_one_number_needs_its_uncertainty() -> None:
    y = [1.0] * 120
    assert code(fits.bursts(TIMES, y)) is None
    y[60] = 1.3
    assert code(fits.bursts(TIMES, y)) == "no-scatter"
    got = fits.bursts(TIMES, y, u=0.03)
    assert [one["peak"] for one in got["bursts"]] == [60]
    assert got["bursts"][0]["z"] == pytest.approx(math.log(1.3) / 0.03)
    assert fits.bursts(TIMES, y, u=0.1)["bursts"] == []


def test_order_and_number_of_readings_are_held() -> None:
    y = slow(random.Random(74))
    assert code(got := fits.bursts([*TIMES[:30], *TIMES[:90]], y)) == "not-rising" and got["refused"]["at"] == [30]
    assert code(fits.bursts(TIMES[:19], y[:19])) == "too-few"
    many = [60.0 * k for k in range(501)]
    assert code(fits.bursts(many, [1.0] * 501)) == "too-many"
