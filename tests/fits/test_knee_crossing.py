"""The knee of emission: against a root of the model, a Monte Carlo and the uncertainties package, and each refusal."""

from __future__ import annotations

import math
import random
from typing import Any

import numpy
import pytest
import scipy.optimize
import uncertainties

from fieldkit import fits

SETTINGS = [6.5 - 0.1 * k for k in range(16)]


def emission(volts: float) -> float:
    """A model of emission against heater voltage: space-charge limited 0.5 A above, temperature limited below.

    1/I**8 = 1/I_SCL**8 + 1/I_TL**8 (after J. R. M. Vaughan, IEEE Trans. ED-33 (1986) 1925, from
    memory); the limited branch goes as V**8: a temperature that goes as V**0.385 under Richardson's law.
    """
    limited = 0.5 * (volts / 5.4) ** 8
    return (0.5**-8 + limited**-8) ** (-1 / 8)


def code(got: dict[str, Any]) -> str | None:
    return got["refused"] and got["refused"]["code"]


@pytest.mark.parametrize("fall", [0.03, 0.05, 0.1, 0.2])
def test_the_crossing_is_that_of_the_model(fall: float) -> None:
    """scipy.optimize.brentq on the model, whose plateau is what three readings at the top have: within 0.2 %."""
    got = fits.knee_crossing(SETTINGS, [emission(v) for v in SETTINGS], fall)
    top = emission(SETTINGS[1])
    want = scipy.optimize.brentq(lambda v: emission(v) - (1 - fall) * top, 4.5, 6.5)
    assert got["value"] == pytest.approx(want, rel=0.002)
    assert got["between"][0] < want < got["between"][1]
    assert got["step"] == pytest.approx(0.1)


def test_the_order_of_the_readings_is_no_matter() -> None:
    r = random.Random(51)
    pairs = [(v, emission(v)) for v in SETTINGS]
    want = fits.knee_crossing([v for v, _ in pairs], [i for _, i in pairs], 0.05)
    for _ in range(5):
        r.shuffle(pairs)
        got = fits.knee_crossing([v for v, _ in pairs], [i for _, i in pairs], 0.05)
        assert (got["value"], got["slope"]) == (want["value"], want["slope"])


def test_the_uncertainty_is_that_of_the_uncertainties_package() -> None:
    """Both readings and the reference as independent variables of x1 + (L - y1)(x2 - x1)/(y2 - y1)."""
    y = [emission(v) for v in SETTINGS]
    for u in (0.001, [0.001 + 0.0001 * k for k in range(16)]):
        got = fits.knee_crossing(SETTINGS, y, 0.05, u=u, plateau=5)
        after = next(k for k, v in enumerate(y) if v < got["level"])
        each = u if isinstance(u, list) else [u] * 16
        one, two = (uncertainties.ufloat(y[k], each[k]) for k in (after - 1, after))
        level = 0.95 * uncertainties.ufloat(got["reference"], max(each[:5]) * math.sqrt(math.pi / 10))
        x1, x2 = SETTINGS[after - 1], SETTINGS[after]
        want = x1 + (level - one) * (x2 - x1) / (two - one)
        assert got["value"] == pytest.approx(want.nominal_value, rel=1e-12)
        assert got["u"] == pytest.approx(want.std_dev, rel=1e-8)


def test_the_uncertainty_covers_the_scatter_of_many_sweeps() -> None:
    """Monte Carlo of 3000 sweeps, crossing well below the plateau: told within 12 % and not below, as a median of three
    readings is a little better than its rule for many."""
    r = random.Random(52)
    found = [
        fits.knee_crossing(SETTINGS, [emission(v) + r.gauss(0, 0.002) for v in SETTINGS], 0.2, u=0.002)
        for _ in range(3000)
    ]
    assert {code(got) for got in found} == {None}
    spread = float(numpy.std([got["value"] for got in found]))
    told = float(numpy.mean([got["u"] for got in found]))
    assert 0.98 * spread < told < 1.12 * spread


def test_one_bad_reading_at_the_top_does_not_move_the_reference() -> None:
    y = [emission(v) for v in SETTINGS]
    want = fits.knee_crossing(SETTINGS, y, 0.1)
    y[1] = 0.52
    got = fits.knee_crossing(SETTINGS, y, 0.1)
    assert got["value"] == pytest.approx(want["value"], rel=1e-3)
    assert code(got) is None


def test_hold_time_and_missing_uncertainty_are_said() -> None:
    y = [emission(v) for v in SETTINGS]
    assert "held 240 s" in fits.knee_crossing(SETTINGS, y, 0.05, hold=240)["says"]
    bare = fits.knee_crossing(SETTINGS, y, 0.05)
    assert bare["u"] is None
    assert "How long each setting was held is not told" in bare["says"] and "without an uncertainty" in bare["says"]


def test_each_refusal() -> None:
    y = [emission(v) for v in SETTINGS]
    dip = [*y[:6], 0.4, *y[7:]]
    assert code(fits.knee_crossing(SETTINGS[:8], y[:8], 0.05)) == "no-crossing"
    assert code(fits.knee_crossing(SETTINGS[9:], y[9:], 0.05)) == "no-plateau"
    assert code(fits.knee_crossing(SETTINGS, [0.0] * 16, 0.05)) == "no-plateau"
    assert code(got := fits.knee_crossing(SETTINGS, dip, 0.05)) == "rises-again" and 7 in got["refused"]["at"]
    assert code(fits.knee_crossing(SETTINGS[:3], y[:3], 0.05)) == "too-few"
    for fall in (0, 1, 5, -0.05, None, "5 %"):
        assert code(fits.knee_crossing(SETTINGS, y, fall)) == "bad-fall"
    held = fits.knee_crossing([6.0, 5.9, 5.8, 5.7, 5.7], [1.0, 1.0, 1.0, 1.0, 0.5], 0.1)
    assert code(held) == "equal-settings" and held["refused"]["at"] == [3, 4]


def test_noise_about_the_level_is_no_second_crossing() -> None:
    """Readings back over the level by less than k = 2 of their uncertainty do not count."""
    y = [1.0, 1.0, 1.0, 0.97, 0.949, 0.951, 0.93]
    settings = [6.0 - 0.1 * k for k in range(7)]
    assert code(fits.knee_crossing(settings, y, 0.05, u=0.001)) is None
    assert code(fits.knee_crossing(settings, y, 0.05)) == "rises-again"
