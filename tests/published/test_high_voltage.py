"""High voltage against something outside the project; the source stands beside each check."""

from __future__ import annotations

from typing import Any

import numpy
import pytest
from published import answer, call
from scipy.integrate import quad, solve_ivp
from scipy.optimize import brentq

from fieldkit.values import Fault

# Discharge. Source: the differential equation C dV/dt = -V/R, integrated by scipy.


def decays(resistance: float, capacitance: float) -> Any:
    return lambda _t, v: -v / (resistance * capacitance)


def reached(end: float) -> Any:
    """An event of solve_ivp: the voltage has fallen to `end`."""

    def event(_t: float, v: numpy.ndarray) -> float:
        return float(v[0] - end)

    event.terminal = True  # type: ignore[attr-defined]
    return event


def time_to(start: float, end: float, resistance: float, capacitance: float) -> float:
    """Seconds from `start` to `end`, by the differential equation."""
    span = (0, 50 * resistance * capacitance)
    how: Any = {"events": reached(end), "rtol": 1e-11, "atol": 1e-9, "method": "DOP853"}
    return float(solve_ivp(decays(resistance, capacitance), span, [start], **how).t_events[0][0])


@pytest.mark.parametrize(
    ("start", "end", "resistance", "capacitance"),
    [(35e3, 50.0, 2e6, 4e-6), (32e3, 200.0, 12e6, 4e-6), (27e3, 60.0, 0.5e6, 1e-6), (38e3, 1000.0, 100e6, 2e-6)],
)
def test_discharge_time_equals_the_differential_equation(
    start: float, end: float, resistance: float, capacitance: float
) -> None:
    expected = time_to(start, end, resistance, capacitance)
    time = call("discharge_time", initial=start, safe=end, resistance=resistance, capacitance=capacitance)
    assert time == pytest.approx(expected, rel=1e-6)
    left = call("discharge_voltage", initial=start, resistance=resistance, capacitance=capacitance, time=time)
    assert left == pytest.approx(end, rel=1e-9)


def test_a_capacitor_below_the_safe_voltage_needs_no_wait_and_one_just_above_nearly_none() -> None:
    """Source: the same equation has no crossing where it starts below; from just above, the wait is RC times dV/V."""
    below = call("discharge_time", initial=400.0, safe=500.0, resistance=2e6, capacitance=4e-6)
    above = call("discharge_time", initial=500.5, safe=500.0, resistance=2e6, capacitance=4e-6)
    assert below == 0.0
    assert above == pytest.approx(time_to(500.5, 500.0, 2e6, 4e-6), rel=1e-4)


@pytest.mark.parametrize(
    ("slip", "argument"),
    [
        ({"initial": 32.0}, "initial is 0.032 kV"),
        ({"safe": 50e3}, "safe is 50000 V"),
        ({"initial": 0.0}, "initial is 0"),
    ],
)
def test_a_thousandfold_slip_never_says_that_there_is_nothing_to_wait_for(
    slip: dict[str, float], argument: str
) -> None:
    """Source: common sense of the trade; 32 V for 32 kV, or 50 kV for 50 V, must not read as a wait of 0 s."""
    given = {"initial": 32e3, "safe": 50.0, "resistance": 2e6, "capacitance": 4e-6} | slip
    got = answer("discharge_time", **given)
    assert isinstance(got, Fault) and got.code == "out-of-range" and argument in got.says


def test_the_greatest_tolerances_make_the_wait_as_much_longer_as_the_caution_says() -> None:
    """10 % of capacitance and 5 % of bleeder: 16 % longer. Source: the differential equation, as above."""
    worst = time_to(32e3, 50.0, 1.05 * 2e6, 1.10 * 4e-6)
    found = call("discharge_time", initial=32e3, safe=50.0, resistance=2e6, capacitance=4e-6)
    assert worst / found == pytest.approx(1.16, abs=0.006)


def test_the_measured_time_constant_is_the_slope_of_the_logarithm_of_a_simulated_decay() -> None:
    """Source: a decay integrated by scipy, read at nine times, its logarithm fitted with a line by numpy."""
    resistance, capacitance = 2.2e6, 3.6e-6
    times = numpy.linspace(0, 24, 9)
    read = solve_ivp(decays(resistance, capacitance), (0, 24), [33e3], t_eval=times, rtol=1e-11, atol=1e-9).y[0]
    slope, _ = numpy.polyfit(times, numpy.log(read), 1)
    for first, second in ((0, 8), (2, 3), (4, 7)):
        took = float(times[second] - times[first])
        constant = call("discharge_constant", initial=float(read[first]), left=float(read[second]), time=took)
        assert constant == pytest.approx(-1 / slope, rel=1e-6)


def test_a_voltage_that_does_not_fall_has_no_time_constant() -> None:
    """Source: common sense of the trade; an open bleeder or a supply still on must never look like a number."""
    for left in (30e3, 31e3):
        got = answer("discharge_constant", initial=30e3, left=left, time=10.0)
        assert isinstance(got, Fault) and got.code == "out-of-range"


@pytest.mark.parametrize(
    ("start", "end", "capacitance", "limit"),
    [(35e3, 50.0, 4e-6, 300.0), (27e3, 60.0, 1e-6, 5.0), (38e3, 50.0, 40e-6, 60.0)],
)
def test_the_largest_bleeder_is_the_root_of_the_differential_equation(
    start: float, end: float, capacitance: float, limit: float
) -> None:
    """Source: the resistance at which the integrated discharge takes just the time allowed, found by scipy's brentq."""
    root = brentq(lambda r: time_to(start, end, r, capacitance) - limit, 1e3, 1e9, xtol=10, rtol=1e-9)
    largest = call("bleeder_largest", initial=start, safe=end, capacitance=capacitance, time=limit)
    assert largest == pytest.approx(root, rel=1e-6)


# Energy and power. Source: the bleeder's power over the whole discharge, integrated by scipy.


def test_stored_energy_is_what_the_bleeder_turns_into_heat() -> None:
    """Source: the bleeder's power V^2/R integrated over the whole discharge by scipy."""
    start, resistance, capacitance = 35e3, 2e6, 4e-6
    tau = resistance * capacitance

    def both(_t: float, state: numpy.ndarray) -> list[float]:
        return [-state[0] / tau, state[0] ** 2 / resistance]

    heat = solve_ivp(both, (0, 60 * tau), [start, 0.0], rtol=1e-11, atol=1e-9, method="DOP853").y[1][-1]
    assert call("stored_energy", capacitance=capacitance, voltage=start) == pytest.approx(heat, rel=1e-7)


@pytest.mark.parametrize(("start", "resistance", "capacitance"), [(35e3, 2e6, 4e-6), (28e3, 11e6, 12e-6)])
def test_bleeder_power_over_the_discharge_is_the_energy_of_charging_by_small_steps(
    start: float, resistance: float, capacitance: float
) -> None:
    """Source: the capacitor's energy as charge carried up in small steps, V dq, summed by scipy."""
    tau = resistance * capacitance
    how: Any = {"dense_output": True, "rtol": 1e-11, "atol": 1e-9}
    solved = solve_ivp(decays(resistance, capacitance), (0, 60 * tau), [start], **how)

    def power(time: float) -> float:
        return call("bleeder_power", voltage=abs(float(solved.sol(time)[0])), resistance=resistance)

    heat = sum(quad(power, a * tau, b * tau, limit=200)[0] for a, b in ((0, 2), (2, 8), (8, 40)))
    carried = quad(lambda q: q / capacitance, 0, start * capacitance)[0]
    assert heat == pytest.approx(carried, rel=1e-6)
