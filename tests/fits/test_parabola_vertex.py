"""The minimum of a sweep: its value and uncertainty against libraries and a Monte Carlo, and each refusal."""

from __future__ import annotations

import math
import random
from typing import Any

import numpy
import pytest
import uncertainties

from fieldkit import fits

#: a sweep of magnet current: 17 settings from 22 A to 30 A
SWEEP = [22 + 0.5 * k for k in range(17)]


def body(r: random.Random, scatter: float = 0.0005, least: float = 26.3, bend: float = 0.0011) -> list[float]:
    """Simulated body current in A, a parabola with scatter."""
    return [0.012 + bend * (v - least) ** 2 + r.gauss(0, scatter) for v in SWEEP]


def code(got: dict[str, Any]) -> str | None:
    return got["refused"] and got["refused"]["code"]


def test_the_vertex_and_its_uncertainty_are_those_of_the_uncertainties_package() -> None:
    """numpy.polyfit about the middle of the sweep with its covariance, propagated by the uncertainties package; of even
    steps, and of steps that grow, where b and c are correlated."""
    r = random.Random(31)
    for k in range(100):
        settings = SWEEP if k % 2 else [22 + 8 * (j / 16) ** 1.6 for j in range(17)]
        y = [0.012 + 0.0011 * (v - 26.3) ** 2 + r.gauss(0, 0.0005) for v in settings]
        coefficients, covariance = numpy.polyfit(numpy.array(settings) - 26, y, 2, cov=True)
        c, b, a = uncertainties.correlated_values(coefficients, covariance)
        vertex = -b / (2 * c)
        least = a + b * vertex + c * vertex * vertex
        got = fits.parabola_vertex(settings, y)
        assert got["value"] - 26 == pytest.approx(vertex.nominal_value, rel=1e-8, abs=1e-10)
        assert got["u"] == pytest.approx(vertex.std_dev, rel=1e-8)
        assert got["minimum"] == pytest.approx(least.nominal_value, rel=1e-8)
        assert got["u_minimum"] == pytest.approx(least.std_dev, rel=1e-8)


def test_the_uncertainty_is_the_scatter_of_many_sweeps() -> None:
    """Monte Carlo of 4000 sweeps, the readings' uncertainty given: standard deviation of the vertex within 5 %."""
    r = random.Random(32)
    found = [fits.parabola_vertex(SWEEP, body(r), u=0.0005) for _ in range(4000)]
    spread = numpy.std([got["value"] for got in found])
    assert numpy.mean([got["value"] for got in found]) == pytest.approx(26.3, abs=4 * spread / math.sqrt(4000))
    told = fits.parabola_vertex(SWEEP, body(r, 1e-9), u=0.0005)["u"]
    assert told == pytest.approx(spread, rel=0.05)


def test_few_good_sweeps_are_refused() -> None:
    """Monte Carlo: of 1500 simulated sweeps that are parabolas not more than 2 % are said to be none."""
    r = random.Random(33)
    assert sum(code(fits.parabola_vertex(SWEEP, body(r))) is not None for _ in range(1500)) <= 30


def test_the_bottom_is_where_the_fit_is_within_two_deviations_of_its_least() -> None:
    got = fits.parabola_vertex(SWEEP, body(random.Random(34)))
    a, b, c = got["coefficients"]
    for end in got["bottom"]:
        assert a + b * end + c * end * end == pytest.approx(got["minimum"] + 2 * got["s"], rel=1e-9)
    assert got["bottom"][0] < got["value"] < got["bottom"][1]


@pytest.mark.parametrize(
    ("low", "high", "advised", "clipped"),
    [
        (None, None, None, None),
        (24, 28, None, None),
        (27, 28, 27, "low"),
        (23, 25.5, 25.5, "high"),
        (None, 26, 26, "high"),
    ],
)
def test_the_advice_stays_in_the_permitted_window_and_says_so(low: Any, high: Any, advised: Any, clipped: Any) -> None:
    got = fits.parabola_vertex(SWEEP, body(random.Random(35)), low=low, high=high)
    assert got["advised"] == (got["value"] if advised is None else advised)
    assert got["clipped"] == clipped
    assert ("outside the permitted range" in got["says"]) is (clipped is not None)
    assert got["value"] == pytest.approx(26.3, abs=0.1)


def test_each_refusal_still_gives_what_a_plot_draws() -> None:
    """Section by section: no minimum, outside the sweep, few readings beside it, too uncertain, another shape."""
    r = random.Random(36)
    cases = {
        "not-a-minimum": [-v for v in body(r)],
        "vertex-outside": body(r, 0.0002, 21.0),
        "few-beside": body(r, 0.0002, 23.1),
        "too-uncertain": body(r, 0.0005, 26.3, 0.00002),
        "residuals-run": [0.012 + 0.004 * max(0.0, abs(v - 26.3) - 2.5) for v in SWEEP],
    }
    for want, y in cases.items():
        got = fits.parabola_vertex(SWEEP, y, low=20, high=40)
        assert code(got) == want
        assert got["advised"] is None
        assert len(got["coefficients"]) == 3 and len(got["residuals"]) == 17
    assert code(fits.parabola_vertex(SWEEP[:9], body(r)[:9])) == "too-few"


def test_a_third_of_the_step_is_the_bound_of_the_uncertainty() -> None:
    """The same scatter on steps of half the size: refused once u is a third of the step."""
    r = random.Random(37)
    seen = set()
    for bend in [0.00005 * 1.15**k for k in range(20)]:
        got = fits.parabola_vertex(SWEEP, body(r, 0.0005, 26.3, bend))
        if code(got) in (None, "too-uncertain"):
            assert (code(got) is None) == (got["u"] < 0.5 / 3)
            seen.add(code(got))
    assert seen == {None, "too-uncertain"}
