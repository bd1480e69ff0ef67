"""The library's formulas against something outside the project; the source stands beside each check.

Every formula is evaluated as a sheet does it: the compiled tree, in SI, through fieldkit.formula.evaluate.
"""

from __future__ import annotations

import math
import random
from collections.abc import Callable
from pathlib import Path
from typing import Any

import CoolProp.CoolProp as coolprop
import numpy
import pytest
from scipy import constants
from scipy.integrate import solve_ivp

from fieldkit.files import folder
from fieldkit.formula import library
from fieldkit.formula.evaluate import evaluate
from fieldkit.values import Fault

LIBRARY = library.load(Path(folder("procedures")) / "formulas")


def _call(name: str, **arguments: float) -> float:
    order = LIBRARY.signatures()[name]
    tree = {"call": name, "of": [{"name": a} for a in order]}
    value = evaluate(tree, arguments, {}, LIBRARY.used([name]))
    assert isinstance(value, float), value
    return value


def test_the_library_reads_without_a_problem() -> None:
    assert LIBRARY.problems == ()
    assert len(LIBRARY.formulas) >= 11


# Child and Langmuir. Source: CODATA 2022 through scipy.constants; Poisson's equation integrated by scipy.


def test_child_langmuir_constant_equals_codata() -> None:
    k = 4 / 9 * constants.epsilon_0 * math.sqrt(2 * constants.e / constants.m_e)
    assert _call("child_langmuir_density", voltage=1.0, gap=1.0) == pytest.approx(k, rel=1e-9)
    # 2.334e-6 A V^-1.5 as textbooks print it, quoted from memory
    assert k == pytest.approx(2.334e-6, rel=3e-4)


@pytest.mark.parametrize(("volts", "gap"), [(35_000.0, 0.02), (1_000.0, 0.01), (27_000.0, 0.015), (60_000.0, 0.05)])
def test_poissons_equation_at_the_child_langmuir_density_returns_the_voltage(volts: float, gap: float) -> None:
    """An independent route: d2V/dx2 = J / (eps0 v(V)) from V = 0, V' = 0 over the gap must end at the voltage."""
    density = _call("child_langmuir_density", voltage=volts, gap=gap)
    slope = density / constants.epsilon_0 / math.sqrt(2 * constants.e / constants.m_e)

    def field(_x: float, state: numpy.ndarray) -> list[float]:
        return [state[1], slope / math.sqrt(state[0])]

    # near the cathode V = (9 slope / 4)^(2/3) x^(4/3), the only solution with V = V' = 0 there
    start = gap * 1e-4
    factor = (9 * slope / 4) ** (2 / 3)
    begin = [factor * start ** (4 / 3), 4 / 3 * factor * start ** (1 / 3)]
    solved = solve_ivp(field, (start, gap), begin, method="DOP853", rtol=1e-11, atol=1e-9)
    assert solved.y[0][-1] == pytest.approx(volts, rel=1e-5)


# Copper. Source: published multipliers for copper wire, 25 degC = 1 (75, 100 and 200 degC as printed; 130 degC is
# printed 1.404, truncated from 1.4046; publications seen when the check values were gathered); IEC 60028
# alpha = 0.00393 per K at 20 degC; and the factor 1 + 0.00323 (t - 75) from 75 degC that wiring tables use (National
# Electrical Code chapter 9, from memory).


@pytest.mark.parametrize(("celsius", "printed"), [(75, 1.193), (100, 1.289), (200, 1.674), (130, 1.404)])
def test_copper_resistance_equals_published_multipliers(celsius: float, printed: float) -> None:
    got = _call("copper_resistance", resistance=1.0, from_temperature=298.15, to_temperature=273.15 + celsius)
    assert got == pytest.approx(printed, abs=1e-3)


@pytest.mark.parametrize("celsius", range(-40, 201, 20))
def test_copper_resistance_equals_the_temperature_coefficients(celsius: float) -> None:
    at20 = _call("copper_resistance", resistance=5.0, from_temperature=293.15, to_temperature=273.15 + celsius)
    assert at20 / 5.0 == pytest.approx(1 + 0.00393 * (celsius - 20), rel=1e-3)
    at75 = _call("copper_resistance", resistance=5.0, from_temperature=348.15, to_temperature=273.15 + celsius)
    assert at75 / 5.0 == pytest.approx(1 + 0.00323 * (celsius - 75), rel=1e-3)


# Discharge. Source: the differential equation C dV/dt = -V/R, integrated by scipy.


@pytest.mark.parametrize(
    ("start", "end", "resistance", "capacitance"),
    [(35e3, 50.0, 2e6, 4e-6), (32e3, 200.0, 12e6, 4e-6), (27e3, 60.0, 0.5e6, 1e-6), (38e3, 1000.0, 100e6, 2e-6)],
)
def test_discharge_time_equals_the_differential_equation(
    start: float, end: float, resistance: float, capacitance: float
) -> None:
    def falls(_t: float, v: numpy.ndarray) -> Any:
        return -v / (resistance * capacitance)

    def reached(_t: float, v: numpy.ndarray) -> float:
        return float(v[0] - end)

    reached.terminal = True  # type: ignore[attr-defined]
    tau = resistance * capacitance
    solved = solve_ivp(falls, (0, 50 * tau), [start], events=reached, rtol=1e-11, atol=1e-9, method="DOP853")
    time = _call("discharge_time", initial=start, safe=end, resistance=resistance, capacitance=capacitance)
    assert time == pytest.approx(solved.t_events[0][0], rel=1e-6)
    left = _call("discharge_voltage", initial=start, resistance=resistance, capacitance=capacitance, time=time)
    assert left == pytest.approx(end, rel=1e-9)


def test_stored_energy_is_what_the_bleeder_turns_into_heat() -> None:
    """Source: the bleeder's power V^2/R integrated over the whole discharge by scipy."""
    start, resistance, capacitance = 35e3, 2e6, 4e-6
    tau = resistance * capacitance

    def both(_t: float, state: numpy.ndarray) -> list[float]:
        return [-state[0] / tau, state[0] ** 2 / resistance]

    heat = solve_ivp(both, (0, 60 * tau), [start, 0.0], rtol=1e-11, atol=1e-9, method="DOP853").y[1][-1]
    assert _call("stored_energy", capacitance=capacitance, voltage=start) == pytest.approx(heat, rel=1e-7)


# Water. Source: CoolProp, HEOS backend (IAPWS-95), at 3 bar.


def _water(what: str, kelvin: float) -> float:
    return float(coolprop.PropsSI(what, "T", kelvin, "P", 3e5, "Water"))


def test_water_density_and_heat_capacity_equal_coolprop_between_the_rows_too() -> None:
    for kelvin in numpy.linspace(273.2, 373.15, 203):
        assert _call("water_density", temperature=float(kelvin)) == pytest.approx(_water("D", kelvin), rel=1e-4)
        assert _call("water_heat_capacity", temperature=float(kelvin)) == pytest.approx(_water("C", kelvin), rel=3e-4)


def test_water_heat_equals_the_difference_of_enthalpy() -> None:
    """An independent route: mass flow at the meter times the enthalpy taken up, no heat capacity in it.

    The heat capacity at the mean temperature stands for its mean, which costs up to 0.1 % from 0 to 35 degC.
    """
    rnd = random.Random(11)
    for _ in range(200):
        flow, inlet = rnd.uniform(5, 200) / 60_000, 273.15 + rnd.uniform(1, 60)
        outlet = inlet + rnd.uniform(2, 35)
        enthalpy = _water("H", outlet) - _water("H", inlet)
        want = flow * _water("D", inlet) * enthalpy
        assert _call("coolant_heat_water", flow=flow, inlet=inlet, outlet=outlet) == pytest.approx(want, rel=1e-3)


def test_water_heat_of_the_worked_case() -> None:
    """60 L/min from 35 to 45 degC: 41 535 W by IAPWS-IF97, computed once with another library."""
    got = _call("coolant_heat_water", flow=60 / 60_000, inlet=308.15, outlet=318.15)
    assert got == pytest.approx(41_535, rel=2e-4)


# Power. Source: scipy has none; the identity P = I^2 R ties power and resistance of a heater together.


def test_heater_power_is_current_squared_times_resistance() -> None:
    power = _call("heater_power", voltage=6.3, current=9.8)
    resistance = _call("heater_resistance", voltage=6.3, current=9.8)
    assert power == pytest.approx(9.8**2 * resistance, rel=1e-14)
    assert _call("beam_power", voltage=34e3, current=2.2) == pytest.approx(74_800.0, rel=1e-14)


@pytest.mark.parametrize("name", list(LIBRARY.formulas))
def test_outside_its_range_a_formula_names_the_argument_and_the_range(name: str) -> None:
    formula = LIBRARY.formulas[name]
    tree = {"call": name, "of": [{"name": a.name} for a in formula.arguments]}
    inside = {a.name: (float(a.low or "0") + float(a.high or "1")) / 2 for a in formula.arguments}
    assert isinstance(evaluate(tree, inside, {}, LIBRARY.used([name])), float)
    for argument in formula.arguments:
        sides: dict[str, Callable[[], float]] = {}
        if argument.low is not None:
            sides["low"] = lambda a=argument: float(a.low) - 1e-3 * abs(float(a.high or a.low)) - 1e-9
        if argument.high is not None:
            sides["high"] = lambda a=argument: float(a.high) * 1.001 + 1e-9
        assert sides, f"{argument.name} of {name} has no range"
        for outside in sides.values():
            value = evaluate(tree, inside | {argument.name: outside()}, {}, LIBRARY.used([name]))
            assert isinstance(value, Fault) and value.code == "out-of-range"
            assert argument.name in value.says and argument.unit.shown in value.says
