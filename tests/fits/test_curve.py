"""Formulas fitted to readings: against NIST's certified values, scipy, the straight line and simulation; what is refused.

Sources beside each check. NIST StRD is certified to 11 digits; scipy.optimize.curve_fit is MINPACK; numpy.
"""

from __future__ import annotations

import math
import random
from typing import Any

import curves
import numpy
import pytest
import scipy.optimize
import strd_curves

from fieldkit import fits


def _fit(text: str, x: list[float], y: list[float], start: dict[str, float], along: str = "x", **more: Any) -> Any:
    pairs = [[name, value] for name, value in start.items()]
    return fits.curve(x, y, curves.tree(text), along, pairs, formulas=curves.USED, **more)


@pytest.mark.parametrize("start", [0, 1])
@pytest.mark.parametrize("name", strd_curves.SETS)
def test_certified_values_of_nist_from_both_starts(name: str, start: int) -> None:
    """NIST StRD: parameters, their standard deviations and the residual one, asked for to 1e-6; all come to 1e-8."""
    data = strd_curves.SETS[name]
    values = {f"b{k + 1}": v for k, v in enumerate(data.starts[start])}
    got = _fit(data.formula, data.x, data.y, values)
    assert got["refused"] is None, got["says"]
    assert got["coefficients"] == pytest.approx(data.parameters, rel=1e-8, abs=0)
    assert got["deviations"] == pytest.approx(data.deviations, rel=1e-8, abs=0)
    assert got["s"] == pytest.approx(data.s, rel=1e-8, abs=0)
    assert (got["n"], got["freedom"]) == (len(data.x), len(data.x) - len(values))
    assert (got["value"], got["u"]) == (got["coefficients"][0], got["deviations"][0])
    if (name, start) == ("MGH17", 0):
        # along a bent valley: NIST's first start is meant to be far off
        assert got["iterations"] > 300
    else:
        assert got["iterations"] <= 25


def _warm_up(r: random.Random, noise: float, n: int = 20) -> tuple[list[float], list[float]]:
    x = [30.0 * k for k in range(1, n + 1)]
    return x, [9.8 * (1 - math.exp(-t / 240.0)) + r.gauss(0, noise) for t in x]


SCIPY: dict[str, Any] = {
    "a * (1 - exp(-(b * x)))": lambda x, a, b: a * (1 - numpy.exp(-b * x)),
    "a * exp(-(b * x)) + c": lambda x, a, b, c: a * numpy.exp(-b * x) + c,
    "a + b * sqrt(x) + c * x": lambda x, a, b, c: a + b * numpy.sqrt(x) + c * x,
    "a * atan(b * x)": lambda x, a, b: a * numpy.arctan(b * x),
}


@pytest.mark.parametrize("weighted", [False, True])
@pytest.mark.parametrize("text", SCIPY)
def test_parameters_and_covariance_are_those_of_scipy(text: str, weighted: bool) -> None:
    """Source: scipy.optimize.curve_fit; with uncertainties its absolute_sigma, where ours are the larger."""
    r = random.Random(text)
    for _ in range(8):
        x, y = _warm_up(r, 0.05)
        u = [r.uniform(0.5, 1.0) for _ in x] if weighted else None
        start = {"a": 9.0, "b": 0.01, "c": 0.1}
        start = {name: start[name] for name in SCIPY[text].__code__.co_varnames[1 : SCIPY[text].__code__.co_argcount]}
        got = _fit(text, x, y, start, u=u)
        want, covariance = scipy.optimize.curve_fit(
            SCIPY[text],
            numpy.array(x),
            y,
            list(start.values()),
            sigma=u,
            absolute_sigma=weighted,
            xtol=1e-14,
            ftol=1e-14,
        )
        assert got["refused"] is None, got["says"]
        assert got["coefficients"] == pytest.approx(want.tolist(), rel=1e-5, abs=1e-7)
        assert numpy.array(got["covariance"]) == pytest.approx(covariance, rel=1e-4, abs=1e-9)
        if not weighted:
            assert got["s"] ** 2 * (len(x) - len(start)) == pytest.approx(
                sum(v * v for v in got["residuals"]), rel=1e-12
            )


def test_a_straight_line_is_that_of_line() -> None:
    """Source: fits.line, which is held by Norris; here by quite another way."""
    r = random.Random(3)
    for _ in range(50):
        x = [r.uniform(-5, 5) for _ in range(12)]
        y = [2 - 0.3 * v + r.gauss(0, 0.2) for v in x]
        u = r.choice([None, 0.4, [r.uniform(0.1, 0.4) for _ in x]])
        got, want = _fit("a + b * x", x, y, {"a": 0.0, "b": 1.0}, u=u), fits.line(x, y, u)
        assert got["coefficients"] == pytest.approx(want["coefficients"], rel=1e-9)
        assert numpy.array(got["covariance"]) == pytest.approx(numpy.array(want["covariance"]), rel=1e-9)
        assert got["s"] == pytest.approx(want["s"], rel=1e-9)
        assert got["u_reading"] == want["u_reading"]
        assert got["residuals"] == pytest.approx(want["residuals"], abs=1e-9)


def test_its_uncertainty_is_how_much_simulated_warm_ups_differ() -> None:
    """Source: simulation. Time constants of 400 warm-ups scatter by what each of them says, within 10 %."""
    r = random.Random(4)
    found = []
    for _ in range(400):
        x, y = _warm_up(r, 0.05)
        got = _fit("scale * warm_up_fraction(time=x, time_constant=tau)", x, y, {"tau": 200.0, "scale": 9.0})
        assert got["refused"] is None
        found.append((got["value"], got["u"]))
    taus, us = zip(*found, strict=True)
    assert numpy.mean(taus) == pytest.approx(240.0, abs=1.0)
    assert numpy.std(taus, ddof=1) == pytest.approx(numpy.mean(us), rel=0.1)


def test_a_meter_worse_than_the_scatter_counts() -> None:
    r = random.Random(6)
    x, y = _warm_up(r, 0.01)
    start = {"b": 0.005, "a": 9.0}
    close, coarse = (_fit("a * (1 - exp(-(b * x)))", x, y, start, u=u) for u in (None, 0.5))
    assert coarse["u_reading"] == 0.5
    assert coarse["coefficients"] == pytest.approx(close["coefficients"], rel=1e-9)
    assert coarse["u"] == pytest.approx(close["u"] * 0.5 / close["s"], rel=1e-9)


def test_scales_of_readings_and_settings_do_not_matter() -> None:
    """A current in A or in uA, a time in s or in days: the same fit."""
    r = random.Random(7)
    x, y = _warm_up(r, 0.05)
    plain = _fit("a * (1 - exp(-(b * x)))", x, y, {"a": 9.0, "b": 0.005})
    for up, along in ((1e-12, 1.0), (1e9, 1e-6), (1e-9, 1e12)):
        start = {"a": 9.0 * up, "b": 0.005 / along}
        got = _fit("a * (1 - exp(-(b * x)))", [v * along for v in x], [v * up for v in y], start)
        assert got["refused"] is None, got["says"]
        assert got["coefficients"][0] == pytest.approx(plain["coefficients"][0] * up, rel=1e-7)
        assert got["deviations"][1] == pytest.approx(plain["deviations"][1] / along, rel=1e-7)


def test_readings_without_scatter_have_no_uncertainty_and_no_trouble() -> None:
    x = [10.0 * k for k in range(1, 9)]
    got = _fit("a * exp(-(b * x))", x, [3.0 * math.exp(-0.02 * v) for v in x], {"a": 1.0, "b": 0.05})
    assert got["refused"] is None
    assert got["coefficients"] == pytest.approx([3.0, 0.02], rel=1e-10)
    assert got["s"] == got["u"] == 0.0


def test_other_names_and_formulas_of_the_library_may_stand_in_it() -> None:
    x = [1.0, 2.0, 3.0, 4.0, 5.0]
    got = _fit("a * k * x", x, [2.1, 3.9, 6.2, 7.8, 10.1], {"a": 1.0}, known={"k": 4.0, "a": 99.0})
    assert got["value"] == pytest.approx(0.25 * numpy.dot(x, [2.1, 3.9, 6.2, 7.8, 10.1]) / numpy.dot(x, x), rel=1e-9)


X, Y = [1.0, 2.0, 3.0, 4.0, 5.0], [3.0, 5.1, 7.0, 9.0, 11.0]
REFUSED: dict[str, tuple[str, Any]] = {
    "too few": ("too-few", lambda: _fit("a + b * x", X[:3], Y[:3], {"a": 0.0, "b": 1.0})),
    "no names": ("bad-parameter", lambda: _fit("a + b * x", X, Y, {})),
    "the setting as a parameter": ("bad-parameter", lambda: _fit("a + b * x", X, Y, {"a": 0.0, "x": 1.0})),
    "a start that is no number": ("bad-parameter", lambda: _fit("a + b * x", X, Y, {"a": math.nan, "b": 1.0})),
    "nine parameters": ("bad-parameter", lambda: _fit("a + b * x", X, Y, {f"p{k}": 1.0 for k in range(9)})),
    "a reading that is none": ("not-a-number", lambda: _fit("a + b * x", X, [*Y[:4], None], {"a": 0.0, "b": 1.0})),
    "a name unknown": ("formula-fault", lambda: _fit("a + b * x * other", X, Y, {"a": 0.0, "b": 1.0})),
    "no answer at the start": ("formula-fault", lambda: _fit("sqrt(a - x) + b", X, Y, {"a": 3.5, "b": 0.0})),
    "outside the range of a formula of the library": (
        "formula-fault",
        lambda: _fit("warm_up_fraction(time=x, time_constant=a)", X, Y, {"a": -1.0}),
    ),
    "too large": ("overflow", lambda: _fit("a * exp(b * x)", X, Y, {"a": 1.0, "b": 100.0})),
    "a parameter without a part": ("singular", lambda: _fit("a + b * x + 0 * c", X, Y, {"a": 0.0, "b": 1.0, "c": 1.0})),
    "two that do the same": ("singular", lambda: _fit("(a + b) * x", X, Y, {"a": 0.0, "b": 1.0})),
    "one without a part, alone": ("singular", lambda: _fit("2 * x + 0 * a", X, Y, {"a": 0.0})),
    "a law that these readings are not": ("no-convergence", lambda: _fit("a / (b + x)", X, Y, {"a": 1.0, "b": 1.0})),
}


@pytest.mark.parametrize("case", REFUSED)
def test_what_is_refused_says_why(case: str) -> None:
    code, ask = REFUSED[case]
    got = ask()
    assert got["refused"] is not None and got["refused"]["code"] == code, got
    assert got["says"] == got["refused"]["says"]
    assert got["u"] is got["covariance"] is None
    searched = code in ("singular", "no-convergence")
    assert (got["coefficients"] is not None) is searched


def test_what_is_refused_names_the_place_or_the_parameter() -> None:
    assert REFUSED["no answer at the start"][1]()["refused"]["at"] == [3]
    assert "has no answer at reading 4: The square root needs" in REFUSED["no answer at the start"][1]()["says"]
    assert REFUSED["a parameter without a part"][1]()["says"].startswith("At these readings c makes no difference that")
    assert REFUSED["one without a part, alone"][1]()["says"].startswith("At these readings a makes no difference. ")


def test_a_step_into_what_has_no_answer_is_taken_back() -> None:
    """The first step goes beyond the square root's domain; the fit ends inside it all the same."""
    x = [1.0, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0]
    y = [10 * math.sqrt(7.05 - v) for v in x]
    got = _fit("b * sqrt(a - x)", x, y, {"a": 30.0, "b": 1.0})
    assert got["refused"] is None, got["says"]
    assert got["coefficients"] == pytest.approx([7.05, 10.0], rel=1e-8)


def test_the_sentence_tells_each_parameter_with_its_uncertainty() -> None:
    data = strd_curves.MISRA1A
    got = _fit(data.formula, data.x, data.y, {"b1": 250.0, "b2": 0.0005})
    assert got["says"] == (
        "b1 is 238.9 ± 5.4 (k = 2), b2 is 0.000550 ± 0.000015 (k = 2): of a formula through 14 readings from 77.6 to "
        "760; they scatter by 0.1019 about it (one standard deviation)."
    )
