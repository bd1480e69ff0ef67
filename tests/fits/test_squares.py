"""Lines and parabolas by least squares, against NIST's certified values, numpy and scipy.

Sources beside each check. NIST StRD (Norris, Pontius) is certified to 15 digits; the rest are independent libraries.
"""

from __future__ import annotations

import itertools
import math
import random
from typing import Any

import numpy
import pytest
import scipy.stats
import strd

from fieldkit import fits
from fieldkit.fits import runs, squares, words
from fieldkit.fits.columns import Columns


def _scattered(r: random.Random, n: int = 12) -> tuple[list[float], list[float]]:
    x = sorted(r.uniform(-3, 9) * 10 ** r.randint(-3, 3) for _ in range(n))
    return x, [2.5 - 1.7 * v + r.gauss(0, 0.3 * abs(x[-1] - x[0])) for v in x]


@pytest.mark.parametrize(("data", "fit"), [(strd.norris(), fits.line), (strd.pontius(), fits.parabola_vertex)])
def test_certified_values_of_nist(data: strd.Certified, fit: Any) -> None:
    """NIST StRD Norris and Pontius: coefficients, their standard deviations, the residual standard deviation to 1e-9."""
    got = fit(data.x, data.y)
    assert got["n"] == len(data.x) == (36 if fit is fits.line else 40)
    assert got["coefficients"] == pytest.approx(data.coefficients, rel=1e-9, abs=0)
    deviations = [math.sqrt(got["covariance"][i][i]) for i in range(len(data.coefficients))]
    assert deviations == pytest.approx(data.deviations, rel=1e-9, abs=0)
    assert got["s"] == pytest.approx(data.s, rel=1e-9, abs=0)


def test_a_line_is_that_of_scipy() -> None:
    """scipy.stats.linregress: slope, intercept and both standard errors."""
    r = random.Random(21)
    for _ in range(200):
        x, y = _scattered(r)
        got, want = fits.line(x, y), scipy.stats.linregress(x, y)
        assert got["value"] == pytest.approx(want.slope, rel=1e-9)
        assert got["u"] == pytest.approx(want.stderr, rel=1e-9)
        assert got["coefficients"][0] == pytest.approx(want.intercept, rel=1e-8)
        assert math.sqrt(got["covariance"][0][0]) == pytest.approx(want.intercept_stderr, rel=1e-9)


@pytest.mark.parametrize("degree", [1, 2])
def test_coefficients_and_covariance_are_those_of_numpy(degree: int) -> None:
    """numpy.polyfit with its covariance from the scatter, highest power first."""
    r = random.Random(22)
    for _ in range(100):
        x = [r.uniform(-4, 6) for _ in range(14)]
        y = [1 + v - 0.4 * v * v + r.gauss(0, 0.5) for v in x]
        fit = squares.fit(Columns(x, y, None), degree)
        assert isinstance(fit, squares.Fit)
        got = squares.numbers(fit, len(x))
        coefficients, covariance = numpy.polyfit(x, y, degree, cov=True)
        assert got["coefficients"] == pytest.approx(coefficients[::-1].tolist(), rel=1e-8)
        assert numpy.array(got["covariance"]) == pytest.approx(covariance[::-1, ::-1], rel=1e-8)
        assert got["residuals"] == pytest.approx(y - numpy.polyval(coefficients, x), abs=1e-9)


@pytest.mark.parametrize("degree", [1, 2])
def test_readings_weigh_by_their_uncertainty(degree: int) -> None:
    """numpy.polyfit with weights 1/u: its unscaled covariance where the readings scatter less than told, else scaled."""
    r = random.Random(23)
    seen = set()
    for _ in range(60):
        x = [0.5 * k for k in range(15)]
        u = [r.uniform(0.05, 0.6) for _ in x]
        factor = r.choice([0.5, 3.0])
        y = [2 - v + 0.2 * (degree - 1) * v * v + r.gauss(0, factor * e) for v, e in zip(x, u, strict=True)]
        fit = squares.fit(Columns(x, y, u), degree)
        assert isinstance(fit, squares.Fit) and fit.u_reading is not None
        told = fit.s < fit.u_reading
        seen.add(told)
        weights = 1 / numpy.array(u)
        want, covariance = numpy.polyfit(x, y, degree, w=weights, cov="unscaled" if told else True)
        got = squares.numbers(fit, len(x))
        assert got["coefficients"] == pytest.approx(want[::-1].tolist(), rel=1e-8)
        assert numpy.array(got["covariance"]) == pytest.approx(covariance[::-1, ::-1], rel=1e-8)
    assert seen == {True, False}


def test_k_of_two_covers_about_what_it_promises() -> None:
    """Monte Carlo: the true slope lies within k = 2 in about 95 % of the cases, by Student's t for 22 degrees of freedom."""
    r = random.Random(24)
    x = [float(k) for k in range(24)]
    inside = sum(
        abs(got["value"] - 0.7) <= 2 * got["u"]
        for got in (fits.line(x, [0.7 * v + r.gauss(0, 1) for v in x]) for _ in range(2000))
    )
    want = 1 - 2 * scipy.stats.t.sf(2, 22)
    assert inside / 2000 == pytest.approx(want, abs=4 * math.sqrt(want * (1 - want) / 2000))


def test_few_readings_are_told() -> None:
    """Student's t: with 10 readings beyond the coefficients k = 2 still covers 92.7 %, with 4 it covers 88.4 %."""
    assert 2 * scipy.stats.t.cdf(2, words.FEW) - 1 > 0.92
    x = [float(k) for k in range(12)]
    y = [v + (-1) ** k * 0.1 for k, v in enumerate(x)]
    assert (got := fits.line(x, y))["few"] is False and "Few readings" not in got["says"]
    assert (got := fits.line(x[:6], y[:6]))["few"] is True and "Few readings: 4 more" in got["says"]
    assert fits.line(x[:3], y[:3])["refused"]["code"] == "too-few"


def test_runs_have_the_mean_and_deviation_of_all_orders() -> None:
    """Every order of 4 positive and 5 negative residuals, counted: the z of the number of runs has mean 0, variance 1."""
    x = [float(k) for k in range(9)]
    found = []
    for places in itertools.combinations(range(9), 4):
        z = runs.z(x, [1.0 if k in places else -1.0 for k in range(9)], 0.0)
        assert z is not None
        found.append(z)
    assert sum(found) / len(found) == pytest.approx(0, abs=1e-12)
    assert sum(z * z for z in found) / len(found) == pytest.approx(1, rel=1e-12)


def test_residuals_that_are_rounding_are_no_runs() -> None:
    assert runs.z([1.0, 2.0, 3.0, 4.0], [1e-17, 1e-17, -1e-17, -1e-17], 1e-16) is None
    x = [0.1 * k for k in range(20)]
    assert fits.parabola_vertex(x, [3.7 * (v - 1.0) * (v - 1.0) + 0.3 for v in x])["refused"] is None


@pytest.mark.parametrize("offset", [0.0, 1e3, 1e6])
def test_a_far_zero_of_the_settings_costs_no_digits(offset: float) -> None:
    """The vertex of the same readings moved along by an exact amount moves by that amount."""
    r = random.Random(25)
    x = [0.5 * k for k in range(17)]
    y = [(v - 4.3) ** 2 + r.gauss(0, 0.1) for v in x]
    near, far = fits.parabola_vertex(x, y), fits.parabola_vertex([v + offset for v in x], y)
    assert far["value"] - offset == pytest.approx(near["value"], abs=1e-9)
    assert far["u"] == pytest.approx(near["u"], rel=1e-9)
