"""The heater against something outside the project; the source stands beside each check."""

from __future__ import annotations

import math
import random

import numpy
import pytest
from published import answer, call
from scipy.integrate import solve_ivp
from scipy.interpolate import CubicSpline
from scipy.optimize import brentq

from fieldkit.values import Fault

# Power. Source: scipy has none; the identity P = I^2 R ties power and resistance of a heater together.


def test_heater_power_is_current_squared_times_resistance() -> None:
    power = call("heater_power", voltage=6.3, current=9.8)
    resistance = call("heater_resistance", voltage=6.3, current=9.8)
    assert power == pytest.approx(9.8**2 * resistance, rel=1e-14)
    assert call("beam_power", voltage=34e3, current=2.2) == pytest.approx(74_800.0, rel=1e-14)


# Tungsten. Source: resistivity in micro-ohm cm, 300 to 3600 K by 100 K, Forsythe and Worthing 1925, as two public files
# print it alike; White and Minges 1997 as Tolias quotes it (arXiv 1703.06302), an independent table; the rules that
# students' laboratories use, T = 300 (R/R300)^0.83 and the cubic in the resistivity, both from memory.

ROW = [5.65, 8.06, 10.56, 13.23, 16.09, 19.00, 21.94, 24.93, 27.94, 30.98, 34.08, 37.19, 40.36, 43.55, 46.78, 50.05,
       53.35, 56.67, 60.06, 63.48, 66.91, 70.39, 73.91, 77.49, 81.04, 84.70, 88.33, 92.04, 95.76, 99.54, 103.3, 107.2,
       111.1, 115.0]  # fmt: skip
KELVINS = [300.0 + 100 * k for k in range(34)]


def white_and_minges(kelvin: float) -> float:
    return -0.968 + 1.9274e-2 * kelvin + 7.826e-6 * kelvin**2 - 1.8517e-9 * kelvin**3 + 2.079e-13 * kelvin**4


@pytest.mark.parametrize(("kelvin", "printed"), list(zip(KELVINS, ROW, strict=True)))
def test_tungsten_equals_the_published_row_both_ways(kelvin: float, printed: float) -> None:
    assert call("tungsten_ratio", temperature=kelvin) * 5.65 == pytest.approx(printed, rel=1e-6)
    assert call("tungsten_temperature", ratio=round(printed / 5.65, 6)) == pytest.approx(kelvin, abs=1e-6)


def test_between_the_rows_tungsten_keeps_to_a_smooth_curve() -> None:
    """Source: scipy's cubic spline through the row. The straight lines stay within 0.22 %, which is 1 K."""
    smooth = CubicSpline(KELVINS, [r / 5.65 for r in ROW])
    apart = []
    for kelvin in numpy.linspace(300, 3600, 1001):
        apart.append(call("tungsten_ratio", temperature=float(kelvin)) / float(smooth(kelvin)) - 1)
        back = call("tungsten_temperature", ratio=min(max(float(smooth(kelvin)), 1.0), 20.353982))
        assert back == pytest.approx(kelvin, abs=1.0)
    assert max(map(abs, apart)) < 0.0022


def test_tungsten_against_the_newer_table() -> None:
    """Holds the cautions: the newer ratio is up to 6 % more, 3 % at 1400 K, and gives 33 K less there."""
    for kelvin in numpy.linspace(400, 3600, 65):
        newer = white_and_minges(float(kelvin)) / white_and_minges(300.0)
        assert -0.06 < call("tungsten_ratio", temperature=float(kelvin)) / newer - 1 < 0
        assert call("tungsten_ratio", temperature=float(kelvin)) * 5.65 == pytest.approx(
            white_and_minges(float(kelvin)), rel=0.03
        )
    at = 6.582301
    newer = brentq(lambda t: white_and_minges(t) / white_and_minges(300.0) - at, 1000, 2000)
    assert call("tungsten_temperature", ratio=at) - newer == pytest.approx(33, abs=1)
    assert white_and_minges(1400.0) / white_and_minges(300.0) / at == pytest.approx(1.03, abs=2e-3)


def test_tungsten_against_the_rules_of_the_laboratory() -> None:
    for kelvin in numpy.linspace(1000, 2500, 31):
        ratio = call("tungsten_ratio", temperature=float(kelvin))
        assert 300 * ratio**0.83 == pytest.approx(kelvin, rel=0.035)
    for kelvin in numpy.linspace(500, 3600, 63):
        rho = 5.65 * call("tungsten_ratio", temperature=float(kelvin))
        assert 103 + 38.1 * rho - 0.095 * rho**2 + 2.48e-4 * rho**3 == pytest.approx(kelvin, rel=0.015)


def test_heater_temperature_takes_the_room_into_account() -> None:
    """Source: the newer table for the resistance of the cold heater, which the row does not cover below 300 K."""
    for room in range(10, 46):
        cold = 0.1 * white_and_minges(room + 273.15) / white_and_minges(300.0)
        for kelvin, printed in zip(KELVINS[6:20], ROW[6:20], strict=True):
            got = call(
                "heater_temperature",
                cold_resistance=cold,
                cold_temperature=room + 273.15,
                hot_resistance=0.1 * printed / 5.65,
            )
            assert got == pytest.approx(kelvin, rel=1e-3)


# Switching on. Source: a tungsten heater with heat capacity that radiates, through its warm-up by scipy: its current is
# greatest at the first moment, and a series resistance as computed keeps it at the limit.


@pytest.mark.parametrize(("volts", "cold", "limit"), [(6.3, 0.0957, 15.0), (6.3, 0.0957, 30.0), (12.0, 0.2, 25.0)])
def test_inrush_is_the_greatest_current_of_the_warm_up(volts: float, cold: float, limit: float) -> None:
    series = call("inrush_series_resistance", voltage=volts, cold_resistance=cold, limit=limit)
    for extra, greatest in ((0.0, call("inrush_current", voltage=volts, cold_resistance=cold)), (series, limit)):

        def current(kelvin: float, extra: float = extra) -> float:
            return volts / (extra + cold * float(numpy.interp(kelvin, KELVINS, ROW)) / 5.65)

        def warms(_t: float, state: numpy.ndarray, current=current) -> list[float]:
            kelvin = float(state[0])
            resistance = cold * float(numpy.interp(kelvin, KELVINS, ROW)) / 5.65
            lost = 63.0 * (kelvin**4 - 300**4) / 1400**4
            return [(current(kelvin) ** 2 * resistance - lost) / 0.5]

        path = solve_ivp(warms, (0, 60), [300.0], rtol=1e-8, max_step=1.0).y[0]
        currents = [current(float(k)) for k in path]
        assert max(currents) == pytest.approx(greatest, rel=1e-9)
        assert currents[0] == max(currents) and currents[-1] < 0.9 * currents[0]


def test_inrush_of_the_worked_case() -> None:
    """Hot 0.630 ohm at 1400 K by the published row: cold 0.0957 ohm, 65.8 A, 0.324 ohm to hold 15 A."""
    hot = call("heater_resistance", voltage=6.3, current=10.0)
    cold = hot / call("tungsten_ratio", temperature=1400.0)
    assert cold == pytest.approx(0.0957, abs=5e-5)
    assert call("inrush_current", voltage=6.3, cold_resistance=cold) == pytest.approx(65.8, abs=0.05)
    found = call("inrush_series_resistance", voltage=6.3, cold_resistance=cold, limit=15.0)
    assert found == pytest.approx(0.324, abs=5e-4)


def test_no_series_resistance_where_none_is_needed() -> None:
    """Source: Kirchhoff's law solved by a root finder where the free inrush is above the limit; nothing elsewhere."""
    rnd = random.Random(13)
    for _ in range(300):
        volts, cold, limit = rnd.uniform(1, 50), rnd.uniform(0.01, 10), rnd.uniform(0.2, 150)
        found = call("inrush_series_resistance", voltage=volts, cold_resistance=cold, limit=limit)
        if call("inrush_current", voltage=volts, cold_resistance=cold) <= limit:
            assert found == 0
        else:
            solved = brentq(lambda r, v=volts, c=cold, a=limit: v - a * (r + c), 0, 1000, xtol=1e-13)
            assert found == pytest.approx(solved, rel=1e-6, abs=1e-9)


# Warm-up. Source: NIST Statistical Reference Datasets Misra1a and BoxBOD (readings and certified values from memory;
# that the certified sum of squares comes out to ten digits says that they are remembered rightly).

MISRA1A = (
    [77.6, 114.9, 141.1, 190.8, 239.9, 289.0, 332.8, 378.4, 434.8, 477.3, 536.8, 593.1, 689.1, 760.0],
    [10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02, 44.82, 50.76, 55.05, 61.01, 66.40, 75.47, 81.78],
    (2.3894212918e2, 5.5015643181e-4, 1.2455138894e-1),
)
BOXBOD = ([1.0, 2, 3, 5, 7, 10], [109.0, 149, 149, 191, 213, 224], (2.1380940889e2, 5.4723748542e-1, 1.1680088766e3))


@pytest.mark.parametrize(("x", "y", "certified"), [MISRA1A, BOXBOD])
def test_warm_up_reproduces_nist(x: list[float], y: list[float], certified: tuple[float, float, float]) -> None:
    scale, rate, squares = certified
    model = [scale * call("warm_up_fraction", time=t, time_constant=1 / rate) for t in x]
    assert sum((a - b) ** 2 for a, b in zip(y, model, strict=True)) == pytest.approx(squares, rel=1e-9)


def test_warm_up_equals_the_differential_equation() -> None:
    """Source: dT/dt = (Tf - T)/tau by scipy; 63.2, 95 and 99 % at 1, 2.996 and 4.605 time constants."""
    times = numpy.linspace(0, 1500, 31)
    solved = solve_ivp(lambda _t, s: (1 - s) / 240.0, (0, 1500), [0.0], t_eval=times, rtol=1e-11, atol=1e-13)
    for time, want in zip(times, solved.y[0], strict=True):
        assert call("warm_up_fraction", time=float(time), time_constant=240.0) == pytest.approx(float(want), abs=1e-9)
    for share, constants in ((1 - 1 / math.e, 1.0), (0.95, 2.996), (0.99, 4.605)):
        assert call("warm_up_fraction", time=constants * 60, time_constant=60.0) == pytest.approx(share, abs=1e-4)


def test_readings_that_cannot_be_a_hot_heater_give_a_fault() -> None:
    thousandfold = answer("heater_resistance", voltage=6.3, current=9.8e-3)
    assert isinstance(thousandfold, Fault) and "current is 0.0098 A" in thousandfold.says
    fixed = {"cold_temperature": 293.15}
    exchanged = answer("heater_temperature", cold_resistance=0.63, hot_resistance=0.0957, **fixed)
    assert isinstance(exchanged, Fault) and "above the cold one" in exchanged.says
    melted = answer("heater_temperature", cold_resistance=0.0957, hot_resistance=0.0957 * 30, **fixed)
    assert isinstance(melted, Fault) and melted.code == "out-of-range" and "ratio" in melted.says
