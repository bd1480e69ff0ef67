"""When a falling current reaches its limit: against scipy and uncertainties, and the traps of extrapolation."""

from __future__ import annotations

import itertools
import math
import random
from typing import Any

import numpy
import pytest
import scipy.stats
import uncertainties
import uncertainties.umath

from fieldkit import fits
from fieldkit.fits import misfit, squares
from fieldkit.fits.columns import Columns

TIMES = [5.0 * k for k in range(1, 13)]


def falling(r: random.Random, scatter: float = 0.02) -> list[float]:
    return [80 * math.exp(-t / 18) * math.exp(r.gauss(0, scatter)) for t in TIMES]


def as_one_over(r: random.Random, scatter: float = 0.02) -> list[float]:
    return [80 * (5 / t) * math.exp(r.gauss(0, scatter)) for t in TIMES]


def code(got: dict[str, Any]) -> str | None:
    return got["refused"] and got["refused"]["code"]


@pytest.mark.parametrize("law", ["exponential", "power"])
def test_time_and_uncertainty_are_those_of_scipy_and_uncertainties(law: str) -> None:
    """Slope by scipy.stats.linregress on the logarithms; u(t) by the uncertainties package on numpy.polyfit's covariance."""
    r = random.Random(41)
    power = law == "power"
    for _ in range(100):
        y = as_one_over(r) if power else falling(r)
        x = numpy.log(TIMES) if power else numpy.array(TIMES)
        logs, middle = numpy.log(y), x.mean()
        got = (fits.power_time_to if power else fits.exponential_time_to)(TIMES, y, 2.0)
        slope = scipy.stats.linregress(x, logs)
        assert got["coefficients"][1] == pytest.approx(slope.slope, rel=1e-9)
        assert got["slope_u"] == pytest.approx(slope.stderr, rel=1e-9)
        coefficients, covariance = numpy.polyfit(x - middle, logs, 1, cov=True)
        b, a = uncertainties.correlated_values(coefficients, covariance)
        met = (math.log(2.0) - a) / b + middle
        want = uncertainties.umath.exp(met) if power else met
        assert got["value"] == pytest.approx(want.nominal_value, rel=1e-8)
        assert got["u"] == pytest.approx(want.std_dev, rel=1e-8)


def test_one_over_t_promises_too_early_by_an_exponential() -> None:
    """80 at 5 min falling as 1/t reaches 1 at 400 min exactly (arithmetic of the law); the exponential promises 101."""
    y = [80 * 5 / t for t in TIMES]
    got = fits.time_to(TIMES, y, 1.0)
    assert got["power"]["value"] == pytest.approx(400, rel=1e-9)
    assert got["exponential"]["value"] == pytest.approx(101, abs=0.5)
    assert (got["chosen"], got["clear"]) == ("power", True)
    assert code(got) == "beyond-span" and "400" in got["says"]
    assert code(got["exponential"]) == "slows-down"
    assert got["value"] == got["power"]["value"]


def test_an_exponential_is_met_where_it_was_made_to_be() -> None:
    """80 exp(-t/18) is at 1 at 18 ln 80 = 78.88 min: within k = 2 in about 95 % of 1000 simulated falls."""
    r = random.Random(42)
    true, inside, refused = 18 * math.log(80), 0, 0
    for _ in range(1000):
        got = fits.time_to(TIMES, falling(r), 1.0)
        assert got["chosen"] == "exponential" and got["clear"]
        inside += abs(got["value"] - true) <= 2 * got["u"]
        refused += got["refused"] is not None
    want = 1 - 2 * scipy.stats.t.sf(2, 10)
    assert inside / 1000 == pytest.approx(want, abs=4 * math.sqrt(want * (1 - want) / 1000))
    assert refused <= 30


def test_the_uncertainty_given_for_readings_counts() -> None:
    """Monte Carlo of the propagated uncertainty, an absolute one for all readings: within 5 %."""
    r = random.Random(43)
    true = [80 * math.exp(-t / 18) for t in TIMES]
    found = [
        fits.exponential_time_to(TIMES, [v + r.gauss(0, 0.05) for v in true], 1.0, u=0.05)["value"] for _ in range(3000)
    ]
    told = fits.exponential_time_to(TIMES, true, 1.0, u=0.05)["u"]
    assert told == pytest.approx(float(numpy.std(found)), rel=0.05)


@pytest.mark.parametrize("spans", [1.99, 2.01])
def test_nothing_is_told_beyond_twice_the_span(spans: float) -> None:
    """From the first reading; the span of the readings is 55."""
    limit = 80 * math.exp(-(5 + spans * 55) / 18)
    got = fits.exponential_time_to(TIMES, [80 * math.exp(-t / 18) for t in TIMES], limit)
    assert got["reach"] == pytest.approx(spans, rel=1e-9)
    assert code(got) == (None if spans < 2 else "beyond-span")
    assert got["value"] == pytest.approx(5 + spans * 55, rel=1e-9)


def test_beyond_the_last_reading_the_sentence_says_what_the_uncertainty_does_not() -> None:
    y = falling(random.Random(44))
    assert "says nothing about whether the current goes on" in fits.time_to(TIMES, y, 1.0)["says"]
    assert "says nothing" not in fits.time_to(TIMES, y, 20.0)["says"]


def test_a_current_that_settles_above_the_limit_is_not_promised() -> None:
    """Simulated: a leakage current under a fall; a limit below it is never met. At 1 % of scatter no time is told."""
    r = random.Random(45)
    for leak in (2.0, 5.0, 10.0):
        for time, scatter in itertools.product((6, 10, 15), (0.0, 0.005, 0.01)):
            y = [(80 * math.exp(-t / time) + leak) * math.exp(r.gauss(0, scatter)) for t in TIMES]
            assert code(fits.time_to(TIMES, y, 0.8 * leak)) in ("slows-down", "quickens", "beyond-span", "cannot-tell")


@pytest.mark.parametrize("n", [5, 8, 12, 24, 40])
def test_a_law_that_holds_is_seldom_said_not_to(n: int) -> None:
    """Monte Carlo: of 1500 sets of readings that follow the law not more than about 1 in 100 have a misfit above its limit."""
    r = random.Random(50 + n)
    above, variances = 0, []
    for _ in range(1500):
        x = [math.log(5.0 * k) for k in range(1, n + 1)]
        fit = squares.fit(Columns(x, [-v + r.gauss(0, 0.02) for v in x], None), 1)
        assert isinstance(fit, squares.Fit)
        ratio = misfit.ratio(x, fit)
        assert ratio is not None
        above += ratio > misfit.limit(n)
        variances.append(fit.s * fit.s / ratio)
    assert above <= 20
    assert sum(variances) / 1500 == pytest.approx(0.02**2, rel=0.06)


def test_laws_that_fit_alike_give_the_later_time_or_none() -> None:
    """A fall by a quarter only, with scatter of 3 %: either law fits, so the power law's later time is given."""
    r = random.Random(46)
    seen = set()
    for _ in range(60):
        y = [80 * math.exp(-t / 140) * math.exp(r.gauss(0, 0.03)) for t in TIMES[5:]]
        got = fits.time_to(TIMES[5:], y, 48.0)
        if got["clear"]:
            continue
        both = (got["exponential"], got["power"])
        if code(got) is None:
            assert got["value"] == max(one["value"] for one in both)
            assert "to be on the safe side" in got["says"]
        else:
            assert any(one["refused"] for one in both)
        seen.add(code(got))
    assert {None, "cannot-tell"} <= seen


def test_currents_without_a_logarithm_are_refused_with_their_places() -> None:
    y = falling(random.Random(47))
    y[3], y[10] = 0.0, -0.1
    got = fits.time_to(TIMES, y, 1.0)
    assert got["refused"]["code"] == "not-positive"
    assert got["refused"]["at"] == [3, 10]
    assert "4, 11 (counted from 1)" in got["says"]


def test_without_a_time_above_zero_only_one_law_can_be_tried_so_none_is_chosen() -> None:
    got = fits.time_to([t - 5 for t in TIMES], falling(random.Random(48)), 1.0)
    assert code(got) == "not-positive" and got["chosen"] is None
    assert got["exponential"]["value"] is not None


def test_no_clear_fall_gives_no_time() -> None:
    """scipy.stats: a fall by less than three of the slope's standard errors is refused, by more is not for that."""
    r = random.Random(49)
    seen = set()
    for _ in range(300):
        y = [20 * math.exp(-t / 400 + r.gauss(0, 0.05)) for t in TIMES]
        want = scipy.stats.linregress(TIMES, numpy.log(y))
        got = code(fits.exponential_time_to(TIMES, y, 10.0))
        assert (got == "not-falling") == (-want.slope <= 3 * want.stderr)
        seen.add(got == "not-falling")
    assert seen == {True, False}
    got = fits.time_to(TIMES, falling(r)[::-1], 1.0)
    assert got["value"] is None and code(got) == "not-falling"
