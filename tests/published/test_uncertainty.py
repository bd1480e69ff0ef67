"""Uncertainty carried through formulas, against something outside the project; the source stands beside each check.

Sources: JCGM 100 (the GUM), examples H.1 and H.2, whose printed answers are quoted from memory; the packages GTC and
uncertainties; Monte Carlo (JCGM 101) with each formula written again in numpy.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any, NamedTuple

import CoolProp.CoolProp as coolprop
import GTC
import numpy
import pytest
from library_points import LIBRARY, call
from scipy import special, stats
from uncertainties import ufloat

from fieldkit.formula import parse, slopes, spread

#: a name's value, and what its uncertainty is made of, by source
Readings = dict[str, tuple[float, dict[str, float]]]


class Worked(NamedTuple):
    value: float
    parts: dict[str, float]
    u: float


def work_out(tree: dict[str, Any] | str, readings: Readings) -> Worked:
    """A formula as a run works it out: derivatives, contributions by source, their sum."""
    made = parse.parse(tree, LIBRARY.signatures()) if isinstance(tree, str) else tree
    found = slopes.prepare(made, LIBRARY.used(LIBRARY.formulas)).gradient({n: v for n, (v, _) in readings.items()})
    assert isinstance(found.value, float) and isinstance(found.of, dict)
    parts = spread.contributions(found.of, {n: own for n, (_, own) in readings.items()})
    u = spread.standard(parts)
    assert isinstance(u, float)
    return Worked(found.value, parts, u)


def correlation(a: Worked, b: Worked) -> float:
    """Of two results, through the sources that they share (JCGM 100, F.1.2.3)."""
    return sum(part * b.parts.get(source, 0.0) for source, part in a.parts.items()) / (a.u * b.u)


# H.1, the end gauge. Inputs and printed answers from memory: 50.000 838 mm, u 32 nm, 16 degrees of freedom, U(99 %) 93 nm.

#: source: degrees of freedom
GAUGE_FREEDOM = {"standard": 18, "repeated": 24, "comparator, random": 5, "comparator, systematic": 8, "dalpha": 50,
                 "dtheta": 2, "bed": math.inf, "cycle": math.inf, "alpha": math.inf}  # fmt: skip
GAUGE: Readings = {
    "standard": (50.000623e-3, {"standard": 25e-9}),
    "more": (215e-9, {"repeated": 5.8e-9, "comparator, random": 3.9e-9, "comparator, systematic": 6.7e-9}),
    "dalpha": (0.0, {"dalpha": 1e-6 / math.sqrt(3)}),
    "theta": (-0.1, {"bed": 0.2, "cycle": 0.5 / math.sqrt(2)}),
    "alpha": (11.5e-6, {"alpha": 2e-6 / math.sqrt(3)}),
    "dtheta": (0.0, {"dtheta": 0.05 / math.sqrt(3)}),
}
GAUGE_LAW = "standard + more - standard * (dalpha * theta + alpha * dtheta)"


def freedom(parts: dict[str, float], of: dict[str, float]) -> float:
    """Welch and Satterthwaite (JCGM 100, G.4.1)."""
    return sum(p * p for p in parts.values()) ** 2 / sum(p**4 / of[source] for source, p in parts.items())


def test_end_gauge_of_the_guide() -> None:
    """GUM H.1 from memory; Student's t from scipy. A value with three sources of its own is the sum of them."""
    got = work_out(GAUGE_LAW, GAUGE)
    assert got.value == pytest.approx(50.000838e-3, abs=0.5e-9)
    assert got.u == pytest.approx(32e-9, abs=0.5e-9)
    nu = freedom(got.parts, GAUGE_FREEDOM)
    assert math.floor(nu) == 16
    assert got.u * float(stats.t.ppf(0.995, math.floor(nu))) == pytest.approx(93e-9, abs=0.6e-9)
    assert {name: abs(d) * 1e9 for name, d in got.parts.items()} == pytest.approx(
        {"standard": 25, "repeated": 5.8, "comparator, random": 3.9, "comparator, systematic": 6.7, "bed": 0, "cycle": 0,
         "dalpha": 2.9, "alpha": 0, "dtheta": 16.6}, abs=0.06,
    )  # fmt: skip


def test_end_gauge_is_that_of_gtc() -> None:
    """Source: GTC, with the same components and degrees of freedom."""
    given = {
        name: sum((GTC.ureal(0.0, u, GAUGE_FREEDOM[s]) for s, u in own.items()), v) for name, (v, own) in GAUGE.items()
    }
    standard, theta = given["standard"], given["theta"]
    want = standard + given["more"] - standard * (given["dalpha"] * theta + given["alpha"] * given["dtheta"])
    got = work_out(GAUGE_LAW, GAUGE)
    assert (got.value, got.u) == pytest.approx((want.x, want.u), rel=1e-12)
    assert freedom(got.parts, GAUGE_FREEDOM) == pytest.approx(want.df, rel=1e-9)


def test_first_order_leaves_out_what_the_guide_adds_by_the_second() -> None:
    """GUM H.1.7 (from memory): 34 nm with the second order. Simulation agrees with that, and ours stays at 32 nm."""
    rnd = numpy.random.default_rng(1)
    drawn = {n: v + sum(rnd.normal(0, u, 400_000) for u in own.values()) for n, (v, own) in GAUGE.items()}
    lengths = drawn["more"] - drawn["standard"] * (drawn["dalpha"] * drawn["theta"] + drawn["alpha"] * drawn["dtheta"])
    simulated = math.hypot(float(numpy.std(lengths)), 25e-9)
    assert simulated == pytest.approx(34e-9, abs=0.5e-9)
    assert 0.92 < work_out(GAUGE_LAW, GAUGE).u / simulated < 0.95


# H.2, resistance and reactance, measured together five times. Readings and printed answers from memory.

VOLTS = (5.007, 4.994, 5.005, 4.990, 4.999)
AMPERES = (19.663e-3, 19.639e-3, 19.640e-3, 19.685e-3, 19.678e-3)
RADIANS = (1.0456, 1.0438, 1.0468, 1.0428, 1.0433)
IMPEDANCE = {"R": "v / i * cos(phase)", "X": "v / i * sin(phase)", "Z": "v / i"}


def _mean(observed: tuple[float, ...]) -> tuple[float, dict[str, float]]:
    """A mean whose error is shared, set by set, with what was read at the same time (JCGM 100, 5.2.3)."""
    n, mean = len(observed), math.fsum(observed) / len(observed)
    return mean, {f"set {k + 1}": (x - mean) / math.sqrt(n * (n - 1)) for k, x in enumerate(observed)}


def _impedance() -> dict[str, Worked]:
    readings: Readings = {"v": _mean(VOLTS), "i": _mean(AMPERES), "phase": _mean(RADIANS)}
    return {name: work_out(text, readings) for name, text in IMPEDANCE.items()}


def test_means_read_together_are_correlated_through_the_sets_that_they_share() -> None:
    """GUM table H.2 from memory: u 3.2 mV, 9.5 uA, 0.75 mrad; r(V, I) -0.36, r(V, phase) 0.86, r(I, phase) -0.65."""
    means = {n: work_out({"name": n}, {n: _mean(of)}) for n, of in (("v", VOLTS), ("i", AMPERES), ("p", RADIANS))}
    assert [m.u for m in means.values()] == pytest.approx([3.2e-3, 9.5e-6, 0.75e-3], rel=0.01)
    got = [correlation(means[a], means[b]) for a, b in (("v", "i"), ("v", "p"), ("i", "p"))]
    assert got == pytest.approx([-0.36, 0.86, -0.65], abs=0.006)
    assert got[0] == pytest.approx(float(numpy.corrcoef(VOLTS, AMPERES)[0, 1]), rel=1e-9)


def test_impedance_of_the_guide() -> None:
    """GUM table H.4 from memory: 127.732 +- 0.071, 219.847 +- 0.295, 254.260 +- 0.236 ohm; r -0.588, -0.485, 0.993."""
    got = _impedance()
    assert [w.value for w in got.values()] == pytest.approx([127.732, 219.847, 254.260], abs=0.0006)
    assert [w.u for w in got.values()] == pytest.approx([0.071, 0.295, 0.236], abs=0.001)
    pairs = [correlation(got[a], got[b]) for a, b in (("R", "X"), ("R", "Z"), ("X", "Z"))]
    assert pairs == pytest.approx([-0.588, -0.485, 0.993], abs=0.001)


def test_impedance_is_that_of_gtc() -> None:
    """Source: GTC, from the same five sets."""
    v, i, phase = GTC.type_a.multi_estimate_real((VOLTS, AMPERES, RADIANS))
    want = {"R": v / i * GTC.cos(phase), "X": v / i * GTC.sin(phase), "Z": v / i}
    got = _impedance()
    for name, one in want.items():
        assert (got[name].value, got[name].u) == pytest.approx((one.x, one.u), rel=1e-9)
    for a, b in (("R", "X"), ("R", "Z"), ("X", "Z")):
        assert correlation(got[a], got[b]) == pytest.approx(GTC.get_correlation(want[a], want[b]), rel=1e-9)


def test_a_result_of_results_keeps_their_correlation() -> None:
    """Z out of R and X has the same uncertainty as Z out of voltage and current: nothing is counted twice."""
    got = _impedance()
    again = work_out(
        "sqrt(r ^ 2 + x ^ 2)", {"r": (got["R"].value, got["R"].parts), "x": (got["X"].value, got["X"].parts)}
    )
    assert (again.value, again.u) == pytest.approx((got["Z"].value, got["Z"].u), rel=1e-9)
    apart = math.hypot(got["R"].value * got["R"].u, got["X"].value * got["X"].u) / got["Z"].value
    assert apart > 1.05 * again.u


# The two worked cases of the trade: source, the uncertainties package, and the quadrature of the relative parts.


def test_calorimetric_power() -> None:
    """1 % of heat capacity, 2 % of flow, 0.2 K at each end of 10 K: 3.61 %. One thermometer's error shared: 2.24 %."""
    readings: Readings = {
        "capacity": (4.15e6, {"capacity": 4.15e4}),
        "flow": (1e-3, {"reading 1": 2e-5}),
        "inlet": (308.15, {"reading 2": 0.2}),
        "outlet": (318.15, {"reading 3": 0.2}),
    }
    law = "capacity * flow * (outlet - inlet)"
    got = work_out(law, readings)
    c, q, low, high = (ufloat(v, *own.values()) for v, own in readings.values())
    assert got.u == pytest.approx((c * q * (high - low)).std_dev, rel=1e-12)
    assert got.u / got.value == pytest.approx(0.0361, abs=5e-5)
    shared = readings | {n: (readings[n][0], {"T-3/100 degC": 0.2}) for n in ("inlet", "outlet")}
    assert work_out(law, shared).u / got.value == pytest.approx(math.hypot(0.01, 0.02), rel=1e-9)


def test_efficiency() -> None:
    """28 kW of 34 kV and 2.2 A, 3 % of power, 1 % of voltage and of current: 3.32 %, by uncertainties and by hand."""
    readings: Readings = {
        "rf_power": (28e3, {"reading 1": 840.0}),
        "voltage": (34e3, {"reading 2": 340.0}),
        "current": (2.2, {"reading 3": 0.022}),
    }
    got = work_out(call("beam_efficiency"), readings)
    rf, v, i = (ufloat(x, *own.values()) for x, own in readings.values())
    assert got.u == pytest.approx((rf / (v * i)).std_dev, rel=1e-12)
    assert got.u / got.value == pytest.approx(0.0332, abs=5e-5)


# Monte Carlo. Readings are rectangular, as an instrument's limits are (JCGM 100, 4.3.7); the formulas are written again.

_KELVIN = numpy.linspace(273.16, 372.0, 400)
_DENSITY = numpy.array([coolprop.PropsSI("D", "T", t, "P", 3e5, "Water") for t in _KELVIN])
_CAPACITY = numpy.array([coolprop.PropsSI("C", "T", t, "P", 3e5, "Water") for t in _KELVIN])


def _coolant_heat(flow: Any, inlet: Any, outlet: Any) -> Any:
    density = numpy.interp(inlet, _KELVIN, _DENSITY)
    return flow * density * numpy.interp((inlet + outlet) / 2, _KELVIN, _CAPACITY) * (outlet - inlet)


def _combiner_reject(power_1: Any, power_2: Any, phase_error: Any) -> Any:
    waves = numpy.sqrt(power_1) - numpy.sqrt(power_2) * numpy.exp(1j * phase_error)
    return numpy.abs(waves) ** 2 / 2


def _vswr(forward: Any, reflected: Any) -> Any:
    reflection = numpy.sqrt(reflected / forward)
    return (1 + reflection) / (1 - reflection)


class Drawn(NamedTuple):
    law: Callable[..., Any]
    #: value and half-width of each argument
    readings: dict[str, tuple[float, float]]


DRAWN = {
    "beam_efficiency": Drawn(
        lambda rf_power, voltage, current: rf_power / (voltage * current),
        {"rf_power": (28e3, 1400.0), "voltage": (34e3, 600.0), "current": (2.2, 0.04)},
    ),
    "perveance": Drawn(
        lambda current, voltage: current / voltage**1.5, {"current": (21.0, 0.5), "voltage": (115e3, 3e3)}
    ),
    "discharge_voltage": Drawn(
        lambda initial, resistance, capacitance, time: initial * numpy.exp(-time / (resistance * capacitance)),
        {"initial": (35e3, 400.0), "resistance": (2e6, 4e4), "capacitance": (20e-6, 5e-7), "time": (40.0, 0.5)},
    ),
    "discharge_time": Drawn(
        lambda initial, safe, resistance, capacitance: resistance * capacitance * numpy.log(initial / safe),
        {"initial": (35e3, 400.0), "safe": (50.0, 2.0), "resistance": (2e6, 4e4), "capacitance": (4e-6, 2e-7)},
    ),
    "vswr": Drawn(_vswr, {"forward": (50e3, 2e3), "reflected": (200.0, 15.0)}),
    "combiner_reject": Drawn(
        _combiner_reject, {"power_1": (30e3, 300.0), "power_2": (27e3, 300.0), "phase_error": (0.262, 0.02)}
    ),
    "erp": Drawn(
        lambda power, line_loss, gain_dbd: power * 10 ** ((gain_dbd - line_loss) / 10),
        {"power": (60e3, 1800.0), "line_loss": (1.2, 0.1), "gain_dbd": (14.0, 0.2)},
    ),
    "copper_resistance": Drawn(
        lambda resistance, from_temperature, to_temperature: (
            resistance * (234.5 + to_temperature - 273.15) / (234.5 + from_temperature - 273.15)
        ),
        {"resistance": (1.2, 0.01), "from_temperature": (293.15, 1.0), "to_temperature": (333.15, 2.0)},
    ),
    "conformance_probability_below": Drawn(
        lambda value, uncertainty, high: special.ndtr((high - value) / uncertainty),
        {"value": (48.0, 0.2), "uncertainty": (1.5, 0.1), "high": (50.0, 0.1)},
    ),
    "coolant_heat_water": Drawn(_coolant_heat, {"flow": (1e-3, 2e-5), "inlet": (308.35, 0.3), "outlet": (318.35, 0.3)}),
}


@pytest.mark.parametrize("name", DRAWN)
def test_monte_carlo_agrees_within_three_percent(name: str) -> None:
    """Source: a million draws of each reading, through the formula written again in numpy."""
    law, given = DRAWN[name]
    rnd = numpy.random.default_rng(20260804)
    drawn = law(**{n: rnd.uniform(x - a, x + a, 1_000_000) for n, (x, a) in given.items()})
    got = work_out(call(name), {n: (x, {n: a / math.sqrt(3)}) for n, (x, a) in given.items()})
    assert got.u == pytest.approx(float(numpy.std(drawn)), rel=0.03)
    assert got.value == pytest.approx(float(numpy.mean(drawn)), abs=0.1 * got.u)


@pytest.mark.parametrize(
    ("name", "shared"),
    [("coolant_heat_water", ("inlet", "outlet")), ("copper_resistance", ("from_temperature", "to_temperature"))],
)
def test_monte_carlo_agrees_where_readings_share_their_error(name: str, shared: tuple[str, str]) -> None:
    """Source: the same, with one draw for the two readings of one instrument."""
    law, given = DRAWN[name]
    rnd = numpy.random.default_rng(20260805)
    error = {n: rnd.uniform(-a, a, 1_000_000) for n, (_, a) in given.items()}
    error[shared[1]] = error[shared[0]] * given[shared[1]][1] / given[shared[0]][1]
    drawn = law(**{n: x + error[n] for n, (x, _) in given.items()})
    worth = {n: {"one" if n in shared else n: a / math.sqrt(3)} for n, (_, a) in given.items()}
    got = work_out(call(name), {n: (x, worth[n]) for n, (x, _) in given.items()})
    assert got.u == pytest.approx(float(numpy.std(drawn)), rel=0.03)
    apart = work_out(call(name), {n: (x, {n: a / math.sqrt(3)}) for n, (x, a) in given.items()})
    assert apart.u > 1.1 * got.u
