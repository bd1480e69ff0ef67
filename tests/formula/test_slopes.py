"""Derivatives: equal to forty-digit differences and to the uncertainties package; what they are at a kink."""

from __future__ import annotations

import math
import random
from typing import Any

import by_mpmath
import pytest
from library_points import LIBRARY, call, points
from uncertainties import ufloat, umath

from fieldkit.formula import evaluate, parse, slopes, spread
from fieldkit.values import Fault


def gradient(text: str, names: dict[str, Any], series: dict[str, Any] | None = None) -> slopes.Gradient:
    return slopes.prepare(parse.parse(text, LIBRARY.signatures()), LIBRARY.used(LIBRARY.formulas)).gradient(
        names, series or {}
    )


def of(text: str, names: dict[str, Any], series: dict[str, Any] | None = None) -> dict[str, float]:
    found = gradient(text, names, series).of
    assert isinstance(found, dict), found
    return found


# Outside: forty digits, by an evaluator of its own (tests/support/by_mpmath.py) and mpmath's differences


def _inside(name: str, count: int) -> list[dict[str, float]]:
    """Points at which the formula has an answer and bounded slopes, off its ends."""
    arguments = LIBRARY.formulas[name].arguments
    ready = slopes.prepare(call(name), LIBRARY.used([name]))
    found = []
    for row in points(name, 4000):
        names = {a.name: v for a, v in zip(arguments, row, strict=True)}
        ends = [t for a in arguments for t in (a.low, a.high) if t is not None and float(t) == names[a.name]]
        if not ends and isinstance(ready.gradient(names).of, dict):
            found.append(names)
        if len(found) == count:
            return found
    raise AssertionError(f"{name}: only {len(found)} points have derivatives")


@pytest.mark.parametrize("name", [n for n, f in LIBRARY.formulas.items() if f.arguments])
def test_derivatives_are_those_of_forty_digits(name: str) -> None:
    """Source: mpmath, differences from both sides. Where they differ (nodes of tables) ours is about the steeper: two
    tables may be at a node at once, and of each the steeper segment is taken."""
    used, tree = LIBRARY.used([name]), call(name)
    ready = slopes.prepare(tree, used)
    for names in _inside(name, 8):
        found = ready.gradient(names)
        assert isinstance(found.of, dict) and isinstance(found.value, float)
        for by, got in found.of.items():
            sides = [by_mpmath.slope(tree, names, by, used, side) for side in (-1, 1)]
            want = max(sides, key=abs)
            # a slope that is a small difference of large ones is right to a part of the value's own change
            least = 1e-13 * abs(found.value / names[by]) if names[by] else 1e-13
            kink = 1e-3 if sides[0] != pytest.approx(sides[1], rel=1e-12) else 1e-9
            assert got == pytest.approx(want, rel=kink, abs=max(least, 1e-300)), (names, by, sides)


HAND = {
    "beam_efficiency": lambda rf_power, voltage, current: rf_power / (voltage * current),
    "perveance": lambda current, voltage: current / voltage**1.5,
    "gain_db": lambda output, input: 10 * umath.log10(output / input),
    "class_b_dissipation": lambda voltage, full_current, full_power, power: (
        voltage * full_current * umath.sqrt(power / full_power) - power
    ),
    "combiner_reject": lambda power_1, power_2, phase_error: (
        (power_1 + power_2 - 2 * umath.sqrt(power_1 * power_2) * umath.cos(phase_error)) / 2
    ),
    "erp": lambda power, line_loss, gain_dbd: power * 10 ** ((gain_dbd - line_loss) / 10),
    "discharge_voltage": lambda initial, resistance, capacitance, time: (
        initial * umath.exp(-time / (resistance * capacitance))
    ),
    "discharge_time": lambda initial, safe, resistance, capacitance: (
        resistance * capacitance * umath.log(initial / safe) if initial.n > safe.n else initial * 0
    ),
    "copper_resistance": lambda resistance, from_temperature, to_temperature: (
        resistance * (to_temperature - 38.65) / (from_temperature - 38.65)
    ),
    "vswr": lambda forward, reflected: (1 + umath.sqrt(reflected / forward)) / (1 - umath.sqrt(reflected / forward)),
    "warm_up_fraction": lambda time, time_constant: 1 - umath.exp(-time / time_constant),
    "mismatch_loss": lambda vswr: -10 * umath.log10(1 - ((vswr - 1) / (vswr + 1)) ** 2),
    "conformance_probability_below": lambda value, uncertainty, high: (
        (1 + umath.erf((high - value) / (uncertainty * math.sqrt(2)))) / 2
    ),
    "xray_transmission": lambda attenuation, density, thickness: umath.exp(-attenuation * density * thickness),
}


@pytest.mark.parametrize("name", HAND)
def test_uncertainties_are_those_of_the_library_of_that_name(name: str) -> None:
    """Source: the uncertainties package, with the formula written out by hand."""
    ready = slopes.prepare(call(name), LIBRARY.used([name]))
    rnd = random.Random(name)
    for names in _inside(name, 12):
        u = {n: abs(v) * rnd.uniform(0.001, 0.02) for n, v in names.items()}
        given = {n: ufloat(v, u[n]) for n, v in names.items()}
        want, found = HAND[name](**given), ready.gradient(names)
        assert isinstance(found.of, dict)
        assert found.value == pytest.approx(want.nominal_value, rel=1e-9, abs=1e-9)
        for n, d in found.of.items():
            assert d == pytest.approx(want.derivatives[given[n]], rel=1e-7, abs=1e-12), (names, n)
        parts = spread.contributions(found.of, {n: {n: own} for n, own in u.items()})
        assert spread.standard(parts) == pytest.approx(want.std_dev, rel=1e-7, abs=1e-12)


def test_names_that_are_met_twice_count_once() -> None:
    """Source: uncertainties, which follows each variable through."""
    x, y = ufloat(3.0, 0.1), ufloat(4.0, 0.2)
    want = x * y - x / (x + y) + x**2
    found = of("x * y - x / (x + y) + x ^ 2", {"x": 3.0, "y": 4.0})
    assert found == pytest.approx({"x": want.derivatives[x], "y": want.derivatives[y]}, rel=1e-14)


# What the docstring says of kinks and bounds; expectations by hand


@pytest.mark.parametrize(
    ("text", "names", "want"),
    [
        ("max(0, x)", {"x": 0.0}, {"x": 1.0}),
        ("max(x, 0)", {"x": 0.0}, {"x": 1.0}),
        ("max(0, 3 * x, x)", {"x": 0.0}, {"x": 3.0}),
        ("max(0, x)", {"x": -1.0}, {}),
        ("min(x, y)", {"x": 2.0, "y": 2.0}, {"x": 1.0, "y": 1.0}),
        ("min(2 * x, x - y)", {"x": 1.0, "y": -1.0}, {"x": 2.0, "y": -1.0}),
        ("min(x, y)", {"x": 2.0, "y": 2.5}, {"x": 1.0}),
        ("abs(x)", {"x": 0.0}, {"x": 1.0}),
        ("abs(x)", {"x": -0.5}, {"x": -1.0}),
        ("if(x <= 0, 0, 5 * x)", {"x": 0.0}, {"x": 5.0}),
        ("if(x < 0, 0, 5 * x)", {"x": 0.0}, {"x": 5.0}),
        ("if(x > 0, 5 * x, -8 * x)", {"x": 0.0}, {"x": -8.0}),
        ("if(x >= 0, 5 * x, x)", {"x": 1.0}, {"x": 5.0}),
        ("if(x <= 0, 2 * x, 5 * x + 1)", {"x": 0.0}, {"x": 2.0}),
        ("if(x <= 0, x, 1 / x)", {"x": 0.0}, {"x": 1.0}),
        ("x ^ 2", {"x": 0.0}, {"x": 0.0}),
        ("x ^ 1.5", {"x": 0.0}, {"x": 0.0}),
        ("x ^ 1", {"x": 0.0}, {"x": 1.0}),
        ("x ^ y", {"x": 2.0, "y": 3.0}, {"x": 12.0, "y": 8.0 * math.log(2.0)}),
        ("x ^ y", {"x": 0.0, "y": 2.0}, {"x": 0.0, "y": 0.0}),
        ("x ^ 3", {"x": -2.0}, {"x": 12.0}),
        ("exp(x) * sin(y)", {"x": 1.0, "y": 0.0}, {"x": 0.0, "y": math.e}),
        ("atan(x) + erf(x)", {"x": 0.0}, {"x": 1.0 + 2.0 / math.sqrt(math.pi)}),
        ("erf(x) + atan(x)", {"x": 1e200}, {"x": 0.0}),
        ("average(x, y, 3, x)", {"x": 1.0, "y": 2.0}, {"x": 0.5, "y": 0.25}),
        ("if(flag, x, y) + if(not flag, x, 2)", {"x": 1.0, "y": 2.0, "flag": True}, {"x": 1.0}),
        ("2 + 3", {}, {}),
    ],
)
def test_slopes_by_hand(text: str, names: dict[str, Any], want: dict[str, float]) -> None:
    found = of(text, names)
    assert found == pytest.approx(want, rel=1e-15)
    assert set(found) == set(want)


@pytest.mark.parametrize(
    ("text", "names"),
    [
        ("sqrt(x)", {"x": 0.0}),
        ("sqrt(x * y)", {"x": 0.0, "y": 0.0}),
        ("sqrt(x ^ 2)", {"x": 0.0}),
        ("x ^ 0.5", {"x": 0.0}),
        ("x ^ y", {"x": 0.0, "y": 0.0}),
        ("(-2) ^ y", {"y": 3.0}),
        ("if(x <= 0, 0, sqrt(x))", {"x": 0.0}),
        ("x / y", {"x": 1e-300, "y": 5e-324}),
        ("vswr(forward=f, reflected=r)", {"f": 1000.0, "r": 0.0}),
    ],
)
def test_a_slope_without_bound_is_a_fault_and_the_value_stands(text: str, names: dict[str, float]) -> None:
    found = gradient(text, names)
    tree = parse.parse(text, LIBRARY.signatures())
    assert found.value == evaluate.evaluate(tree, names, {}, LIBRARY.used(LIBRARY.formulas))
    assert isinstance(found.value, float)
    assert isinstance(found.of, Fault) and found.of.code == "domain"
    assert found.of.says == "The result changes without bound at this value, so it has no uncertainty."


def test_a_constant_at_a_steep_place_is_no_steep_slope() -> None:
    assert of("x + sqrt(0)", {"x": 1.0}) == {"x": 1.0}


def test_a_fault_is_the_answer_to_both() -> None:
    found = gradient("x / y", {"x": 1.0, "y": 0.0})
    assert found.value == found.of == Fault("divide-by-zero", "It would divide by zero.")
    lost = Fault("missing", "Not read yet.")
    assert gradient("2 * x", {"x": lost}) == slopes.Gradient(lost, lost)


def test_at_a_node_of_a_table_the_steeper_segment_counts() -> None:
    table = {"table": {"name": "t", "of": {"name": "x"}, "x": ["0", "1", "3", "4"], "y": ["0", "2", "-4", "-4"]}}
    ready = slopes.prepare(table)
    for x, want in ((0.0, 2.0), (0.5, 2.0), (1.0, -3.0), (2.0, -3.0), (3.0, -3.0), (3.5, 0.0), (4.0, 0.0)):
        assert ready.gradient({"x": x}).of == {"x": want}, x


@pytest.mark.parametrize(
    ("text", "want"),
    [
        ("mean(ion)", {f"ion[{k}]": 0.25 for k in range(4)}),
        ("total(ion) * 2", {f"ion[{k}]": 2.0 for k in range(4)}),
        ("last(ion) / first(ion)", {"ion[3]": 1 / 8.0, "ion[0]": -1 / 64.0}),
        ("highest(ion) - lowest(ion)", {"ion[0]": 1.0, "ion[3]": -1.0}),
        ("at(ion, 1) * length(ion)", {"ion[1]": 4.0}),
        ("at(ion, x)", {"ion[2]": 1.0}),
        ("log(mean(ion)) * x", {**{f"ion[{k}]": 2 / 18.0 for k in range(4)}, "x": math.log(4.5)}),
    ],
)
def test_a_column_by_its_places(text: str, want: dict[str, float]) -> None:
    assert of(text, {"x": 2.0}, {"ion": [8.0, 5.0, 4.0, 1.0]}) == pytest.approx(want, rel=1e-15)


def test_of_equal_readings_of_a_column_one_counts() -> None:
    assert of("lowest(ion)", {}, {"ion": [2.0, 1.0, 1.0]}) == {"ion[1]": 1.0}


def test_what_is_given_back_may_be_changed() -> None:
    ready = slopes.prepare({"name": "x"})
    first = ready.gradient({"x": 1.0}).of
    assert isinstance(first, dict)
    first["x"] = 7.0
    assert ready.gradient({"x": 1.0}).of == {"x": 1.0}


# Contributions


def test_what_shares_an_error_adds_before_it_is_squared() -> None:
    """JCGM 100, 5.2.2 note 1: with r = +1 the terms add linearly; with none, in quadrature."""
    difference = of("a - b", {"a": 5.0, "b": 3.0})
    apart = spread.contributions(difference, {"a": {"reading 1": 0.3}, "b": {"reading 2": 0.4}})
    together = spread.contributions(difference, {"a": {"M-1/20 V": 0.3}, "b": {"M-1/20 V": 0.4}})
    assert spread.standard(apart) == pytest.approx(0.5, rel=1e-15)
    assert spread.standard(together) == pytest.approx(0.1, rel=1e-15)


def test_a_result_of_results_counts_each_reading_once() -> None:
    """Source: uncertainties, by one expression. Power and efficiency of one beam voltage, then their product."""
    readings = {"v": (34e3, 100.0), "i": (2.2, 0.01), "rf": (28e3, 300.0)}
    worth: dict[str, dict[str, float]] = {n: {f"reading {n}": u} for n, (_, u) in readings.items()}
    names = {n: x for n, (x, _) in readings.items()}
    for name, text in (("power", "v * i"), ("efficiency", "rf / power"), ("again", "efficiency * power / v")):
        found = gradient(text, names)
        assert isinstance(found.of, dict) and isinstance(found.value, float)
        names[name] = found.value
        worth[name] = spread.contributions(found.of, worth)
    v, i, rf = (ufloat(*readings[n]) for n in ("v", "i", "rf"))
    power = v * i
    want = rf / power * power / v
    assert spread.standard(worth["efficiency"]) == pytest.approx((rf / power).std_dev, rel=1e-14)
    assert spread.standard(worth["again"]) == pytest.approx(want.std_dev, rel=1e-14)


@pytest.mark.parametrize(
    ("parts", "want"),
    [
        ({}, 0.0),
        ({"a": 0.0, "b": -0.0}, 0.0),
        ({"a": -3e-200, "b": 4e-200}, 5e-200),
        ({"a": 3e200, "b": 4e200}, 5e200),
    ],
)
def test_sums_neither_vanish_nor_overflow(parts: dict[str, float], want: float) -> None:
    assert spread.standard(parts) == pytest.approx(want, rel=1e-15, abs=0)


@pytest.mark.parametrize(
    "parts", [{"a": math.inf}, {"a": math.nan}, {"a": 1.0, "b": math.nan}, {"a": 1.7e308, "b": 1.7e308}]
)
def test_a_sum_too_large_to_tell_is_a_fault(parts: dict[str, float]) -> None:
    found = spread.standard(parts)
    assert isinstance(found, Fault) and found.code == "overflow"
