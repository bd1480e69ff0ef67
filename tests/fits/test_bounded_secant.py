"""The next setting: published iterates, a model of a tube, and that no bound is ever overstepped."""

from __future__ import annotations

import math
import random
from typing import Any

import pytest
import scipy.optimize
import uncertainties

from fieldkit import fits


def code(got: dict[str, Any]) -> str | None:
    return got["refused"] and got["refused"]["code"]


def idle(bias: float) -> float:
    """A toy of a grid-controlled tube: I = G (Vg + Va/mu)**1.5 (3/2 law of a triode, textbook), 34 kV, mu 340, in A."""
    return 4e-3 * max(0.0, bias + 34_000 / 340) ** 1.5


def test_the_iterates_are_the_published_ones() -> None:
    """The secant method for x**2 = 612 from 10 and 30: 22.8, 24.545455, 24.746544 (from memory, an encyclopaedia's
    example); the root 24.738634 by scipy.optimize.brentq."""
    x, y = [10.0, 30.0], [100.0, 900.0]
    for want in (22.8, 24.545455, 24.746544):
        got = fits.bounded_secant(x, y, 612, 1000, 0, 100)
        assert got["value"] == pytest.approx(want, abs=5e-7)
        x, y = [*x, got["value"]], [*y, got["value"] ** 2]
    root = scipy.optimize.brentq(lambda v: v * v - 612, 10, 30)
    assert fits.bounded_secant(x, y, 612, 1000, 0, 100)["value"] == pytest.approx(root, abs=1e-4)


def test_a_toy_tube_reaches_its_idle_current_in_five_steps() -> None:
    """From 0.30 A with a first trial of 1 V, at most 2 V a step, to 0.500 A within the meter's 1 mA; the bias needed by
    scipy.optimize.brentq on the model. Five settings after the first reading, the trial among them."""
    start = scipy.optimize.brentq(lambda v: idle(v) - 0.30, -99, -20)
    end = scipy.optimize.brentq(lambda v: idle(v) - 0.50, -99, -20)
    assert end - start == pytest.approx(7.22, abs=0.01)
    x, y = [start, start + 1.0], [idle(start), idle(start + 1.0)]
    steps = 1
    while not (got := fits.bounded_secant(x, y, 0.5, 2.0, -99, -20, u=0.0005, sign=1))["there"]:
        assert code(got) is None
        assert abs(got["value"] - x[-1]) <= 2.0
        assert got["value"] <= end + 0.05
        x, y = [*x, got["value"]], [*y, idle(got["value"])]
        steps += 1
        assert steps < 10
    assert steps == 5
    assert y[-1] == pytest.approx(0.5, abs=0.001)
    assert "leave the setting" in got["says"]


def test_the_aim_and_its_uncertainty_are_those_of_the_uncertainties_package() -> None:
    r = random.Random(81)
    for _ in range(100):
        x1, y1, slope, u = r.uniform(-90, -80), r.uniform(0.2, 0.4), r.uniform(0.01, 0.1), r.uniform(1e-4, 1e-3)
        x2 = x1 + r.choice([-1, 1]) * r.uniform(0.5, 2)
        y2 = y1 + slope * (x2 - x1)
        one, two = uncertainties.ufloat(y1, u), uncertainties.ufloat(y2, u)
        want = x2 + (0.5 - two) * (x2 - x1) / (two - one)
        got = fits.bounded_secant([x1, x2], [y1, y2], 0.5, 0.5, -200, 0, u=u)
        assert got["aim"] == pytest.approx(want.nominal_value, rel=1e-9)
        assert got["u"] == pytest.approx(want.std_dev, rel=1e-7)


def test_the_permitted_change_and_range_are_never_overstepped() -> None:
    """10,000 random cases: not by a rounding of the last digit either, and never away from the target."""
    r = random.Random(82)
    advised = 0
    for _ in range(10_000):
        size = 10 ** r.uniform(-3, 3)
        x = [r.uniform(-1, 1) * size, r.uniform(-1, 1) * size]
        y = [r.uniform(-1, 1), r.uniform(-1, 1)]
        most = size * 10 ** r.uniform(-6, 1)
        low, high = sorted((x[1] - r.random() * size, x[1] + r.random() * size))
        target = r.uniform(-3, 3)
        resolution = r.choice([None, most / 3.3])
        got = fits.bounded_secant(x, y, target, most, low, high, resolution=resolution)
        if code(got) is not None:
            assert got["value"] is None
            continue
        advised += 1
        assert abs(got["value"] - x[1]) <= most
        assert low <= got["value"] <= high
        assert (got["value"] - x[1]) * (target - y[1]) * got["slope"] > 0
        if resolution is not None:
            steps = abs(got["value"] - x[1]) / resolution
            assert steps == pytest.approx(round(steps), abs=1e-6)
    assert advised > 7000


def test_a_rounding_that_oversteps_is_taken_back_and_the_advice_kept() -> None:
    """0.1 + 0.2 is 0.30000000000000004 in doubles, a change above 0.2: the double below it is advised."""
    assert (0.1 + 0.2) - 0.1 > 0.2
    for present, target, want in ((0.1, 9.0, 0.3), (-0.1, -9.0, -0.3)):
        got = fits.bounded_secant([0.0, present], [0.0, present], target, 0.2, -1, 1)
        assert got["value"] == pytest.approx(want, rel=4e-16)
        assert abs(got["value"] - present) <= 0.2
        assert got["clipped"] == "change"


def test_what_stopped_the_advice_is_said() -> None:
    x, y = [10.0, 30.0], [100.0, 900.0]
    cases = {None: (1000, 0), "change": (2, 0), "low": (1000, 25)}
    for want, (most, low) in cases.items():
        got = fits.bounded_secant(x, y, 612, most, low, 100)
        assert got["clipped"] == want
        assert got["value"] == {None: 22.8, "change": 28, "low": 25}[want]
        assert ("stops at" in got["says"]) is (want is not None)
    assert fits.bounded_secant(x, y, 5000, 1000, 0, 100)["clipped"] == "high"


def test_whole_steps_of_the_setting_are_rounded_toward_the_present_one() -> None:
    """Decimal arithmetic by hand: 0.3 of change in steps of 0.1 is 0.3, in steps of 0.2 it is 0.2, of 0.4 none."""
    for resolution, want in ((0.1, 5.3), (0.2, 5.2), (0.4, None)):
        got = fits.bounded_secant([4.0, 5.0], [1.0, 2.0], 9.0, 0.3, 0, 10, resolution=resolution)
        assert got["value"] == (None if want is None else pytest.approx(want, abs=1e-12))
    assert code(got) == "change-too-small"


@pytest.mark.parametrize("u", [0.001, 0.01])
def test_a_slope_is_flat_below_three_uncertainties(u: float) -> None:
    for rise, flat in ((2.99 * u, True), (3.01 * u, False), (-2.99 * u, True), (0.0, True)):
        assert (code(fits.bounded_secant([1, 2], [0.3, 0.3 + rise], 0.9, 1, -9, 9, u=u)) == "flat") is flat


def test_a_contrary_slope_is_refused() -> None:
    x, rising = [1.0, 2.0], [0.3, 0.4]
    assert code(fits.bounded_secant(x, rising, 0.5, 1, 0, 9, sign=-1)) == "contrary-slope"
    assert code(fits.bounded_secant(x, rising, 0.5, 1, 0, 9, sign=1)) is None
    assert code(fits.bounded_secant(x, rising, 0.5, 1, 0, 9)) is None
    assert code(fits.bounded_secant(x, rising[::-1], 0.5, 1, 0, 9, sign=1)) == "contrary-slope"


def test_an_inhibit_that_is_near_stops_all_advice() -> None:
    """From the part that the caller gives, in size: a grid current may have either sign. It stops "leave it" as well."""

    def asked(reading: Any, near: Any = 0.8, y: float = 0.4) -> dict[str, Any]:
        body = {"name": "body current", "reading": 0.01, "inhibit": 0.05, "near": 0.8}
        grid = {"name": "grid current", "reading": reading, "inhibit": 0.03, "near": near}
        return fits.bounded_secant([1, 2], [0.3, y], 0.5, 1, 0, 9, u=0.001, inhibits=[body, grid])

    assert code(asked(0.0239)) is None and code(asked(-0.0239)) is None
    assert code(asked(0.0241)) == code(asked(-0.0241)) == code(asked(0.0241, y=0.5)) == "inhibit-near"
    assert "grid current is at 80.3 % of its inhibit" in asked(0.0241)["says"]
    assert code(asked(0.02, near=0.6)) == "inhibit-near"
    assert code(asked(None)) == code(asked(0.01, near=80)) == "bad-inhibit"


def test_other_refusals() -> None:
    y = [0.3, 0.4]
    assert code(fits.bounded_secant([2, 2], y, 0.5, 1, 0, 9)) == "equal-settings"
    assert code(fits.bounded_secant([1, 10], y, 0.5, 1, 0, 9)) == "outside-range"
    assert code(fits.bounded_secant([8, 9], y, 0.5, 1, 0, 9)) == "range-end"
    assert code(fits.bounded_secant([8], [0.3], 0.5, 1, 0, 9)) == "too-few"
    assert code(fits.bounded_secant([1, 2], y, 0.5, 0, 0, 9)) == "bad-change"
    assert code(fits.bounded_secant([1, 2], y, 0.5, 1, 9, 0)) == "bad-range"
    assert code(fits.bounded_secant([1, 2], y, math.nan, 1, 0, 9)) == "not-a-number"
