"""The crowbar and its test wire against something outside the project; the source stands beside each check."""

from __future__ import annotations

import math
from collections.abc import Callable
from itertools import pairwise
from typing import Any

import numpy
import pytest
from chemicals import MW, Hfus, Tm, heat_capacity
from fluids.piping import t_from_gauge
from published import answer, call
from scipy.integrate import quad, simpson, solve_ivp
from scipy.interpolate import CubicSpline

from fieldkit.values import Fault

# Let-through. Source: the circuit's own differential equation, integrated by scipy: capacitor, resistance and a leak of
# inductance in series; the square of the current is integrated along with it.


def discharge(voltage: float, capacitance: float, resistance: float, inductance: float, until: float) -> Any:
    """Voltage, current and let-through of the series circuit from t = 0 to `until`."""

    def rates(_t: float, state: numpy.ndarray) -> list[float]:
        v, i, _ = state
        return [-i / capacitance, (v - resistance * i) / inductance, i * i]

    first = [voltage, 0.0, 0.0]
    return solve_ivp(rates, (0, until), first, method="Radau", rtol=1e-8, atol=1e-8, dense_output=True)


@pytest.mark.parametrize("inductance", [1e-5, 1e-3, 2e-2])
@pytest.mark.parametrize(("voltage", "capacitance", "resistance"), [(35e3, 4e-6, 50.0), (28e3, 10e-6, 20.0)])
def test_the_whole_let_through_is_that_of_the_circuit_with_any_inductance(
    voltage: float, capacitance: float, resistance: float, inductance: float
) -> None:
    slowest = max(resistance * capacitance, 2 * inductance / resistance)
    seen = discharge(voltage, capacitance, resistance, inductance, 25 * slowest).y[2][-1]
    got = call("crowbar_action", voltage=voltage, capacitance=capacitance, resistance=resistance)
    assert got == pytest.approx(seen, rel=1e-5)


@pytest.mark.parametrize("delay", [1e-6, 10e-6, 100e-6, 400e-6])
def test_the_let_through_up_to_the_firing_is_that_of_the_circuit(delay: float) -> None:
    voltage, capacitance, resistance = 35e3, 4e-6, 50.0
    seen = discharge(voltage, capacitance, resistance, 1e-9, delay).y[2][-1]
    given = {"voltage": voltage, "capacitance": capacitance, "resistance": resistance, "delay": delay}
    assert call("crowbar_action_fired", **given) == pytest.approx(seen, rel=1e-3)
    slower = discharge(voltage, capacitance, resistance, 1e-3, delay).y[2][-1]
    if delay <= 100e-6:
        assert call("crowbar_action_fired", **given) > slower, "inductance lets less through within a short delay"


def test_the_peak_is_nearly_reached_with_little_inductance_and_never_passed() -> None:
    times = numpy.linspace(0, 50e-6, 2000)
    peaks = [float(discharge(35e3, 4e-6, 50.0, h, 50e-6).sol(times)[1].max()) for h in (1e-7, 1e-5, 1e-3)]
    highest = call("surge_current", voltage=35e3, resistance=50.0)
    assert highest > peaks[0] > peaks[1] > peaks[2]
    assert peaks[0] == pytest.approx(highest, rel=2e-3)


@pytest.mark.parametrize("arc", [0.2, 1.0, 5.0])
def test_the_arc_takes_its_share_of_the_energy(arc: float) -> None:
    """Source: charge by charge, voltage on the arc times current, integrated by scipy."""
    voltage, capacitance, rest = 35e3, 4e-6, 50.0
    solved = discharge(voltage, capacitance, rest + arc, 1e-5, 25 * (rest + arc) * capacitance)
    times = numpy.linspace(0, solved.t[-1], 40_001)
    current = solved.sol(times)[1]
    taken = numpy.trapezoid(current * (arc * current), times)
    action = call("crowbar_action", voltage=voltage, capacitance=capacitance, resistance=rest + arc)
    assert call("arc_energy", action=action, resistance=arc) == pytest.approx(taken, rel=1e-3)
    whole = call("stored_energy", capacitance=capacitance, voltage=voltage)
    assert call("arc_energy", action=action, resistance=arc) == pytest.approx(whole * arc / (rest + arc), rel=1e-12)


@pytest.mark.parametrize("cycles", [1, 3, 5])
def test_the_follow_on_let_through_is_the_square_of_a_sine_over_whole_cycles(cycles: int) -> None:
    """Source: a sine of 50 Hz with the RMS value given, squared and integrated by scipy."""
    rms, time = 320.0, cycles * 0.020
    square = quad(lambda t: 2 * (rms * math.sin(2 * math.pi * 50 * t)) ** 2, 0, time, limit=200)[0]
    assert call("follow_on_action", current=rms, time=time) == pytest.approx(square, rel=1e-9)


# Wire gauges. Source: the AWG table of the fluids library.


@pytest.mark.parametrize("gauge", range(0, 37))
def test_wire_gauges_equal_the_table_of_fluids(gauge: int) -> None:
    assert call("awg_diameter", gauge=gauge) == pytest.approx(t_from_gauge(gauge, schedule="AWG"), abs=2e-6)


def test_there_is_no_half_gauge() -> None:
    """Source: ASTM B258 has whole gauges in this range (from memory)."""
    got = answer("awg_diameter", gauge=30.5)
    assert isinstance(got, Fault) and got.code == "out-of-range"


# Copper. Sources: heat capacity of the solid as NIST's Shomate equation, as JANAF's table (1998) and as Perry's table
# 2-151 have it, melting point and heat of fusion, all out of the chemicals library. Resistivity up to the melting point:
# R. A. Matula, J. Phys. Chem. Ref. Data 8 (1979) 1147, pure copper, in 1e-8 ohm m (a public transcription was seen).

CAS = "7440-50-8"
MELTS = Tm(CAS)
MOLAR = MW(CAS) / 1000
DENSITY = 8960.0  # kg/m3 at 20 degC, CRC Handbook of Chemistry and Physics (the chemicals library's table has it)
MATULA = CubicSpline(
    [273.15, 293, 300, 350, 400, 500, 600, 700, 800, 900, 1000, 1100, 1200, 1300, 1357.6],
    [1.543, 1.678, 1.725, 2.063, 2.402, 3.090, 3.792, 4.514, 5.262, 6.041, 6.858, 7.717, 8.626, 9.592, 10.171],
)
AWG_36 = 0.127e-3

Curve = Callable[[float], float]


def shomate(kelvin: float) -> float:
    """J/(kg K) by NIST's Shomate equation; used a little below its 298 K too, where the ambient is colder."""
    a, b, c, d, e = heat_capacity.WebBook_Shomate_coefficients[CAS][0][0][2:]
    return float(a + b * kelvin + c * kelvin**2 + d * kelvin**3 + e / kelvin**2) / MOLAR


def perry(kelvin: float) -> float:
    row = heat_capacity.Cp_dict_PerryI[CAS]["c"]
    return float(row["Const"] + row["Lin"] * kelvin) * 4.184 / MOLAR


def janaf() -> Curve:
    kelvins, molar = heat_capacity.Cp_dict_JANAF_solid[CAS]
    return lambda t: float(numpy.interp(t, kelvins, molar)) / MOLAR


def iacs(kelvin: float) -> float:
    """Ohm m of annealed copper of 100 % IACS, alpha = 0.00393 per K at 20 degC (IEC 60028)."""
    return 1.7241e-8 * (1 + 0.00393 * (kelvin - 293.15))


def measured(kelvin: float) -> float:
    return float(MATULA(kelvin)) * 1e-8


def impure(kelvin: float) -> float:
    """Matula's copper with as much impurity as brings it to 100 % IACS at 20 degC (Matthiessen's rule)."""
    return measured(kelvin) + 1.7241e-8 - measured(293.15)


def up_to_melting(curve: Curve, ambient: float) -> float:
    """The integral of a curve over temperature up to the melting point, by scipy's Simpson rule in steps of 0.3 K."""
    kelvins = numpy.linspace(ambient, MELTS, 4001)
    return float(simpson([curve(float(t)) for t in kelvins], x=kelvins))


def action(heat: Curve, resistivity: Curve, ambient: float) -> float:
    """A2s/m4 up to the melting point."""
    return up_to_melting(lambda t: DENSITY * heat(t) / resistivity(t), ambient)


def area(diameter: float) -> float:
    return math.pi * diameter**2 / 4


@pytest.mark.parametrize("celsius", [-20, 0, 25, 60, 80])
@pytest.mark.parametrize("diameter", [0.05e-3, AWG_36, 0.3e-3])
def test_the_action_to_melt_is_the_adiabatic_integral(diameter: float, celsius: float) -> None:
    """Within 0.05 % by NIST's heat capacity, 0.1 % by JANAF's, 0.5 % by Perry's."""
    ambient = round(273.15 + celsius, 2)
    got = call("wire_action_to_melt", diameter=diameter, ambient=ambient) / area(diameter) ** 2
    assert got == pytest.approx(action(shomate, iacs, ambient), rel=5e-4)
    assert got == pytest.approx(action(janaf(), iacs, ambient), rel=1e-3)
    assert got == pytest.approx(action(perry, iacs, ambient), rel=5e-3)


@pytest.mark.parametrize("celsius", [-20, 0, 25, 60, 80])
def test_measured_resistivity_up_to_melting_gives_one_to_three_percent_less(celsius: float) -> None:
    ambient = round(273.15 + celsius, 2)
    got = call("wire_action_to_melt", diameter=AWG_36, ambient=ambient) / area(AWG_36) ** 2
    for resistivity in (measured, impure):
        assert 0.01 < 1 - action(shomate, resistivity, ambient) / got < 0.035


def onderdonk(melts: float, ambient: float, constant: float) -> float:
    """A2s/m4; `constant` in the units of the circular mil, temperatures in degC."""
    circular_mil = area(25.4e-6)
    return constant * math.log10((melts - ambient) / (234 + ambient) + 1) / circular_mil**2


def test_onderdonk_gives_nine_percent_less_and_the_cable_makers_form_eleven() -> None:
    """Source: Onderdonk's equation with 1/33 and ICEA P-32-382 with 0.0297, both as publications print them."""
    got = call("wire_action_to_melt", diameter=AWG_36, ambient=298.15) / area(AWG_36) ** 2
    assert 1 - onderdonk(1084.62, 25, 1 / 33) / got == pytest.approx(0.09, abs=0.003)
    assert 1 - onderdonk(1084.62, 25, 0.0297) / got == pytest.approx(0.11, abs=0.003)


@pytest.mark.parametrize("celsius", [-20, 25, 80])
@pytest.mark.parametrize(("diameter", "length"), [(AWG_36, 0.3), (0.08e-3, 0.15), (0.5e-3, 2.0)])
def test_the_energy_to_melt_is_mass_times_the_integral_of_heat_capacity(
    diameter: float, length: float, celsius: float
) -> None:
    ambient = round(273.15 + celsius, 2)
    mass = DENSITY * area(diameter) * length
    given = {"diameter": diameter, "length": length, "ambient": ambient}
    got = call("wire_energy_to_melt", **given)
    assert got == pytest.approx(mass * up_to_melting(shomate, ambient), rel=1e-4)
    assert got == pytest.approx(mass * up_to_melting(janaf(), ambient), rel=2e-4)
    assert got == pytest.approx(mass * up_to_melting(perry, ambient), rel=7e-3)
    through = call("wire_energy_to_melt_through", **given) - got
    assert through == pytest.approx(mass * Hfus(CAS) / MOLAR, rel=1e-3)


@pytest.mark.parametrize("current", [200.0, 2000.0])
def test_a_wire_heated_step_by_step_melts_at_that_action_and_that_energy(current: float) -> None:
    """Source: the heat equation of the wire, m c dT/dt = I^2 R(T), integrated by scipy up to the melting point."""
    length, ambient = 0.3, 298.15
    mass, ohms = DENSITY * area(AWG_36) * length, length / area(AWG_36)

    def rates(_t: float, state: numpy.ndarray) -> list[float]:
        heating = current**2 * ohms * iacs(state[0])
        return [heating / (mass * shomate(state[0])), heating]

    def melts(_t: float, state: numpy.ndarray) -> float:
        return float(state[0] - MELTS)

    melts.terminal = True  # type: ignore[attr-defined]
    solved = solve_ivp(rates, (0, 1), [ambient, 0.0], events=melts, rtol=1e-9, atol=1e-9)
    given = {"diameter": AWG_36, "ambient": ambient}
    assert call("wire_action_to_melt", **given) == pytest.approx(current**2 * solved.t[-1], rel=2e-3)
    assert call("wire_energy_to_melt", length=length, **given) == pytest.approx(solved.y[1][-1], rel=1e-3)


def test_the_wire_tells_a_dead_crowbar_from_a_working_one() -> None:
    """Source: let-through of the circuit by scipy against the wire's action by quadrature; the sense of the test."""
    dead = discharge(35e3, 4e-6, 50.0, 1e-5, 25 * 200e-6).y[2][-1]
    fired = discharge(35e3, 4e-6, 50.0, 1e-5, 10e-6).y[2][-1]
    melts = action(shomate, iacs, 298.15) * area(AWG_36) ** 2
    assert fired < melts < dead
    given = {"voltage": 35e3, "capacitance": 4e-6, "resistance": 50.0}
    ours = call("wire_action_to_melt", diameter=AWG_36, ambient=298.15)
    assert call("crowbar_action_fired", delay=10e-6, **given) < ours < call("crowbar_action", **given)


# Steady current. Source: a published table of fuse wire, copper column, current in A and diameter in inches, all rows
# (an engineering firm's page of fuse equations; its text was seen).

TABLE = """
1 0.0021  2 0.0034  3 0.0044  4 0.0053  5 0.0062  10 0.0098  15 0.0129  20 0.0156  25 0.0181  30 0.0205  35 0.0227
40 0.0248  45 0.0268  50 0.0288  60 0.0325  70 0.036  80 0.0394  90 0.0426  100 0.0457  120 0.0516  140 0.0572
160 0.0625  180 0.0676  200 0.0725  225 0.0784  250 0.0841  275 0.0897  300 0.095
""".split()


@pytest.mark.parametrize(("current", "inches"), list(zip(TABLE[::2], TABLE[1::2], strict=True)))
def test_preece_current_fits_the_published_table_within_its_rounding(current: str, inches: str) -> None:
    low, high = (call("preece_current", diameter=(float(inches) + e) * 0.0254) for e in (-5e-5, 5e-5))
    assert low <= float(current) <= high


def test_preece_current_rises_with_the_diameter_over_its_whole_range() -> None:
    """Source: a thicker wire stands more; and 2^1.5 for twice the diameter, as the law says in words."""
    diameters = numpy.geomspace(0.02e-3, 5e-3, 60)
    values = [call("preece_current", diameter=float(d)) for d in diameters]
    assert all(a < b for a, b in pairwise(values))
    assert call("preece_current", diameter=2e-3) / call("preece_current", diameter=1e-3) == pytest.approx(8**0.5)
