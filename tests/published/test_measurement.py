"""Uncertainty and conformity against something outside the project; the source stands beside each check."""

from __future__ import annotations

import math
import random

import pytest
from published import answer, call
from scipy import stats

from fieldkit.values import Fault

# Expanded uncertainty. Source: scipy.stats.norm, the interval that holds a share of a Gaussian.


@pytest.mark.parametrize("share", [0.90, 0.95, 0.9545, 0.99, 0.9973])
def test_expanded_uncertainty_is_half_the_interval_of_its_coverage(share: float) -> None:
    for uncertainty in (1e-6, 0.0193, 12.0, 3.5e4):
        low, high = stats.norm.interval(share, scale=uncertainty)
        coverage = float(stats.norm.ppf((1 + share) / 2))
        assert call("expanded_uncertainty", uncertainty=uncertainty, coverage=coverage) == pytest.approx(
            (high - low) / 2, rel=1e-12
        )


def test_expanded_uncertainty_of_the_end_gauge() -> None:
    """Source: GUM H.1, u = 32 nm, 16 degrees of freedom, t(99 %) = 2.92, U = 93 nm: from memory."""
    assert float(stats.t.ppf(0.995, 16)) == pytest.approx(2.92, abs=0.005)
    got = call("expanded_uncertainty", uncertainty=32e-9, coverage=float(stats.t.ppf(0.995, 16)))
    assert got == pytest.approx(93e-9, abs=0.6e-9)


# Instruments. Sources: GUM 4.3.7, a voltmeter of 14e-6 of reading and 2e-6 of its 1 V range at 0.928571 V: 15 uV, u =
# 8.7 uV (from memory); standard deviation of a rectangular distribution by scipy.stats.


def test_instrument_of_the_guide() -> None:
    arguments = {"reading": 0.928571, "percent": 14e-6, "digits": 2.0, "resolution": 1e-6}
    assert call("instrument_limit", **arguments) == pytest.approx(15e-6, abs=0.05e-6)
    assert call("instrument_uncertainty", **arguments) == pytest.approx(8.7e-6, abs=0.05e-6)


def test_instrument_uncertainty_is_that_of_a_rectangle() -> None:
    rnd = random.Random(21)
    for _ in range(100):
        arguments = {
            "reading": rnd.uniform(-100, 100),
            "percent": rnd.uniform(0, 0.05),
            "digits": float(rnd.randrange(1, 20)),
            "resolution": 10.0 ** rnd.randrange(-4, 1),
        }
        width = call("instrument_limit", **arguments)
        spread = float(stats.uniform(-width, 2 * width).std())
        assert call("instrument_uncertainty", **arguments) == pytest.approx(spread, rel=1e-12)
        turned = call("instrument_limit", **(arguments | {"reading": -arguments["reading"]}))
        assert turned == width > 0, "a negative reading has the same limit"


def test_a_percent_without_its_sign_is_caught() -> None:
    """Source: a plain 0.5 is 50 %, and no meter of this trade is that bad (common practice, no source)."""
    for percent in (0.5, 1.0, 2.0):
        for name in ("instrument_limit", "instrument_uncertainty"):
            plain = answer(name, reading=32e3, percent=percent, digits=1.0, resolution=100.0)
            assert isinstance(plain, Fault) and plain.code == "out-of-range" and "percent is" in plain.says


# Conformity. Sources: JCGM 106:2012, its examples (from memory); scipy.stats.norm.


def test_conformance_equals_the_examples_of_the_guide() -> None:
    """Zener diode 0.92, bursting strength 0.99, motor oil 0.66: JCGM 106:2012, from memory."""
    assert call("conformance_probability_below", value=-5.47, uncertainty=0.05, high=-5.40) == pytest.approx(
        0.92, abs=5e-3
    )
    assert call("conformance_probability_above", value=509.7, uncertainty=8.6, low=490.0) == pytest.approx(
        0.99, abs=5e-3
    )
    oil = call("conformance_probability", value=13.6, uncertainty=1.8, low=12.5, high=16.3)
    assert oil == pytest.approx(0.66, abs=5e-3)


def test_conformance_equals_scipy() -> None:
    rnd = random.Random(22)
    for _ in range(500):
        value, uncertainty = rnd.uniform(-50, 50), 10 ** rnd.uniform(-3, 2)
        low = value + rnd.uniform(-6, 4) * uncertainty
        high = low + rnd.uniform(0.01, 8) * uncertainty
        law = stats.norm(value, uncertainty)
        both = {"value": value, "uncertainty": uncertainty}
        got = call("conformance_probability", **both, low=low, high=high)
        assert got == pytest.approx(float(law.cdf(high) - law.cdf(low)), abs=1e-12)
        assert call("conformance_probability_below", **both, high=high) == pytest.approx(
            float(law.cdf(high)), abs=1e-12
        )
        assert call("conformance_probability_above", **both, low=low) == pytest.approx(float(law.sf(low)), abs=1e-12)


def test_limits_the_wrong_way_round_and_no_uncertainty_have_no_answer() -> None:
    for low, high in ((16.3, 12.5), (13.0, 13.0)):
        turned = answer("conformance_probability", value=13.6, uncertainty=1.8, low=low, high=high)
        assert isinstance(turned, Fault) and turned.code == "out-of-range" and "below the upper" in turned.says
    for name, limits in [
        ("conformance_probability", {"low": 12.5, "high": 16.3}),
        ("conformance_probability_below", {"high": 16.3}),
        ("conformance_probability_above", {"low": 12.5}),
    ]:
        exact = answer(name, value=13.6, uncertainty=0.0, **limits)
        assert isinstance(exact, Fault) and exact.code == "out-of-range" and "above zero" in exact.says


# Guard bands. Source: ILAC-G8:09/2019, table 1, greatest risk of a wrong pass (from memory, and as public texts repeat
# it); and the same risk by scipy.stats.norm at the guarded limit.


@pytest.mark.parametrize(("ratio", "printed"), [(0.0, 0.50), (0.83, 0.05), (1.0, 0.025), (1.5, 0.0016), (3.0, 1e-6)])
def test_at_the_guarded_limit_the_risk_is_that_of_the_table(ratio: float, printed: float) -> None:
    limit, expanded = 70.0, 1.5
    upper = call("guarded_limit", limit=limit, uncertainty=expanded, ratio=ratio)
    lower = call("guarded_lower_limit", limit=limit, uncertainty=expanded, ratio=ratio)
    over = float(stats.norm.sf(limit, upper, expanded / 2))
    under = float(stats.norm.cdf(limit, lower, expanded / 2))
    assert over == pytest.approx(under, rel=1e-9)
    # U is twice the standard uncertainty, so the guard band is 2 r standard uncertainties wide
    assert over == pytest.approx(float(stats.norm.sf(2 * ratio)), rel=1e-9)
    # the table prints "below"; the true risk is a little less, never less than half of it but for 3 (1 ppm: 1e-9)
    assert over <= printed
    assert over > printed * (0.5 if ratio < 3 else 5e-4)
    pass_rightly = call("conformance_probability_below", value=upper, uncertainty=expanded / 2, high=limit)
    assert pass_rightly == pytest.approx(1 - over, abs=1e-12)
    assert call("conformance_probability_above", value=lower, uncertainty=expanded / 2, low=limit) == pytest.approx(
        1 - under, abs=1e-12
    )


def test_guard_bands_lie_inside_the_limits() -> None:
    rnd = random.Random(23)
    for _ in range(100):
        arguments = {
            "limit": rnd.uniform(-1e4, 1e4),
            "uncertainty": rnd.uniform(0.01, 100),
            "ratio": rnd.uniform(0.01, 3),
        }
        assert call("guarded_limit", **arguments) < arguments["limit"] < call("guarded_lower_limit", **arguments)
        middle = (call("guarded_limit", **arguments) + call("guarded_lower_limit", **arguments)) / 2
        assert math.isclose(middle, arguments["limit"], rel_tol=1e-12, abs_tol=1e-9)
