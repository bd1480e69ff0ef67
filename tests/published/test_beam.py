"""The beam against something outside the project; the source stands beside each check."""

from __future__ import annotations

import math
import random

import numpy
import pytest
from published import answer, call
from scipy import constants
from scipy.integrate import quad, solve_ivp
from scipy.optimize import brentq, minimize_scalar
from skrf.mathFunctions import mag_2_db10

from fieldkit.values import Fault

MASS, CHARGE, LIGHT = constants.m_e, constants.e, constants.c

# Child and Langmuir. Source: CODATA 2022 through scipy.constants; Poisson's equation integrated by scipy.


def test_child_langmuir_constant_equals_codata() -> None:
    k = 4 / 9 * constants.epsilon_0 * math.sqrt(2 * constants.e / constants.m_e)
    assert call("child_langmuir_density", voltage=1.0, gap=1.0) == pytest.approx(k, rel=1e-9)
    # 2.334e-6 A V^-1.5 as textbooks print it, quoted from memory
    assert k == pytest.approx(2.334e-6, rel=3e-4)


def voltage_by_poisson(density: float, gap: float) -> float:
    """d2V/dx2 = J / (eps0 v(V)) from V = 0, V' = 0 over the gap, without relativity."""
    slope = density / constants.epsilon_0 / math.sqrt(2 * CHARGE / MASS)

    def field(_x: float, state: numpy.ndarray) -> list[float]:
        return [state[1], slope / math.sqrt(state[0])]

    # near the cathode V = (9 slope / 4)^(2/3) x^(4/3), the only solution with V = V' = 0 there
    start = gap * 1e-4
    factor = (9 * slope / 4) ** (2 / 3)
    begin = [factor * start ** (4 / 3), 4 / 3 * factor * start ** (1 / 3)]
    return float(solve_ivp(field, (start, gap), begin, method="DOP853", rtol=1e-11, atol=1e-9).y[0][-1])


@pytest.mark.parametrize("volts", [100.0, 1_000.0, 15_000.0, 27_000.0, 35_000.0, 60_000.0])
@pytest.mark.parametrize("gap", [0.003, 0.015, 0.02, 0.05])
def test_poissons_equation_at_the_child_langmuir_density_returns_the_voltage(volts: float, gap: float) -> None:
    density = call("child_langmuir_density", voltage=volts, gap=gap)
    assert voltage_by_poisson(density, gap) == pytest.approx(volts, rel=1e-5)


@pytest.mark.parametrize(("kilovolts", "ratio"), [(30, 0.9938), (35, 0.9928), (40, 0.9918)])
def test_relativity_takes_less_than_one_per_cent_off_up_to_40_kv(kilovolts: float, ratio: float) -> None:
    """Holds the caution. Source: the relativistic integral of Jory and Trivelpiece 1969 (from memory) by scipy."""
    volts, gap = kilovolts * 1e3, 0.02
    gamma = 1 + CHARGE * volts / (MASS * LIGHT**2)
    integral = quad(lambda s: 4 * s**3 / (s**4 * (2 + s**4)) ** 0.25, 0, (gamma - 1) ** 0.25, epsabs=0)[0]
    relativistic = constants.epsilon_0 * MASS * LIGHT**3 / (2 * CHARGE * gap**2) * integral**2
    got = relativistic / call("child_langmuir_density", voltage=volts, gap=gap)
    assert got == pytest.approx(ratio, abs=1e-4)
    assert got == pytest.approx(1 - 3 / 28 * (gamma - 1), abs=2e-4)
    assert 0.99 < got < 1


# Perveance. Source: voltage and current of two klystron guns as published (a 115 kV klystron of a spallation source;
# MIT report PSFC/JA-03-1), whose microperv are arithmetic; a 350 kV gun of 2 microperv, from memory. Poisson's equation below
# is the outside evidence.


@pytest.mark.parametrize(("kilovolts", "amperes", "microperv"), [(115, 21, 0.538), (96, 40, 1.345), (350, 414, 2.00)])
def test_perveance_of_published_guns(kilovolts: float, amperes: float, microperv: float) -> None:
    assert call("perveance", current=amperes, voltage=kilovolts * 1e3) * 1e6 == pytest.approx(microperv, rel=1e-3)


def test_perveance_of_a_planar_gun_follows_from_poissons_equation() -> None:
    """The current that Poisson's equation allows through a disc, by root finding, has one perveance at all voltages."""
    area, gap = 12e-4, 0.02
    found = []
    for volts in (500.0, 5_000.0, 35_000.0):
        guess = volts**1.5 / gap**2
        density = brentq(lambda j: voltage_by_poisson(j, gap) - volts, 1e-6 * guess, 1e-5 * guess, rtol=1e-9)
        found.append(call("perveance", current=density * area, voltage=volts))
    assert found == pytest.approx([found[0]] * 3, rel=1e-4)
    assert found[0] == pytest.approx(2.334e-6 * area / gap**2, rel=4e-4)  # constant as printed, from memory


# Power. Source: a class-B stage taken through its cycle by quadrature; the textbook limits (a half wave at full swing
# gives pi/4 = 78.5 %, a class-A stage 50 %); optimisers of scipy.


def half_wave(peak: float, load: float) -> tuple[float, float]:
    """Average current and RF power of a half-wave current in a resonant load, by quadrature over one cycle."""
    average = quad(lambda x: max(0.0, peak * math.cos(x)), -math.pi, math.pi, points=[-math.pi / 2, math.pi / 2])[0]
    along = quad(lambda x: max(0.0, peak * math.cos(x)) * math.cos(x), -math.pi, math.pi, points=[-1.57, 1.57])[0]
    return average / (2 * math.pi), (along / math.pi) ** 2 * load / 2


def test_efficiency_of_textbook_stages() -> None:
    volts, peak = 30_000.0, 5.0
    average, power = half_wave(peak, volts / (peak / 2))
    assert call("beam_efficiency", rf_power=power, voltage=volts, current=average) == pytest.approx(math.pi / 4)
    # class A: the current swings from nothing to twice its average, the voltage from nothing to twice the supply
    got = call("beam_efficiency", rf_power=volts * 2.0 / 2, voltage=volts, current=2.0)
    assert got == pytest.approx(0.5)


def test_the_beams_power_is_found_again_in_rf_body_and_collector() -> None:
    rnd = random.Random(3)
    for _ in range(200):
        volts, amps = rnd.uniform(20e3, 40e3), rnd.uniform(0.5, 5)
        body = rnd.uniform(0, 0.1) * amps / 5
        rf = rnd.uniform(0, 0.6) * volts * amps
        parts = {"voltage": volts, "current": amps}
        collector = call("collector_dissipation", **parts, rf_power=rf, body_current=body)
        share = call("beam_efficiency", **parts, rf_power=rf)
        passed = call("beam_transmission", body_current=body, beam_current=amps)
        whole = call("beam_power", **parts)
        assert collector == pytest.approx(whole * (passed - share), rel=1e-9)
        assert collector + call("body_dissipation", voltage=volts, body_current=body) + rf == pytest.approx(whole)


def test_class_b_dissipation_equals_the_cycle_by_quadrature() -> None:
    volts, load = 34_000.0, 12_000.0
    full_current, full_power = half_wave(5.2, load)
    fixed = {"voltage": volts, "full_current": full_current, "full_power": full_power}
    for peak in numpy.linspace(0.0, 5.2, 14):
        average, power = half_wave(float(peak), load)
        got = call("class_b_dissipation", **fixed, power=min(power, full_power))
        assert got == pytest.approx(volts * average - power, rel=1e-8, abs=1e-3)


def test_with_an_idle_current_the_heat_is_more_than_class_b_says_below_full_drive() -> None:
    """Holds the caution. Source: the cosine of a class-AB stage that starts from an idle current, by quadrature."""
    volts, idle, load = 34_000.0, 0.5, 12_000.0

    def stage(swing: float) -> tuple[float, float]:
        wave = [max(0.0, idle + swing * math.cos(x)) for x in numpy.linspace(-math.pi, math.pi, 20_001)]
        along = [w * math.cos(x) for w, x in zip(wave, numpy.linspace(-math.pi, math.pi, 20_001), strict=True)]
        return float(numpy.mean(wave)), (2 * float(numpy.mean(along))) ** 2 * load / 2

    full_current, full_power = stage(4.8)
    fixed = {"voltage": volts, "full_current": full_current, "full_power": full_power}
    assert call("class_b_dissipation", **fixed, power=0.0) == 0
    for swing in (0.1, 0.5, 1.0, 2.0, 4.0):
        average, power = stage(swing)
        assert volts * average - power > call("class_b_dissipation", **fixed, power=power)


@pytest.mark.parametrize("efficiency", [0.2, 0.374, 0.45, 0.5, 0.55, 0.6, 0.7, 0.785, 0.95])
def test_the_worst_class_b_dissipation_is_the_greatest_of_all_drives(efficiency: float) -> None:
    """Source: the greatest value by scipy's bounded optimiser, and both ends."""
    fixed = {"voltage": 34e3, "full_current": 2.0, "full_power": 68e3 * efficiency}
    full = fixed["full_power"]
    best = minimize_scalar(lambda p: -call("class_b_dissipation", **fixed, power=p), bounds=(0, full), method="bounded")
    greatest = max(-best.fun, call("class_b_dissipation", **fixed, power=full))
    assert call("class_b_worst_dissipation", **fixed) == pytest.approx(greatest, rel=1e-6)
    if efficiency == 0.6:
        assert greatest / full == pytest.approx(0.694, abs=5e-4)


# Gain. Source: scikit-rf; the values that people of the trade know: 200 W to 28 kW is 21.46 dB (arithmetic).


def test_gain_equals_scikit_rf() -> None:
    rnd = random.Random(5)
    for _ in range(300):
        output, power = 10 ** rnd.uniform(-2, 5.6), 10 ** rnd.uniform(-5, 3.9)
        assert call("gain_db", output=output, input=power) == pytest.approx(mag_2_db10(output / power), abs=1e-9)
    assert call("gain_db", output=28e3, input=200.0) == pytest.approx(21.46, abs=5e-3)


# The triode's law. Source: root finding by scipy on the law written out here; with Va = 0 and the grid as anode the law
# is the planar diode's, which Poisson's equation holds above.


def test_triode_current_of_a_grid_close_to_a_planar_cathode_is_the_diodes() -> None:
    """A grid so fine that the beam voltage hardly reaches through: the diode of cathode and grid, by Poisson."""
    area, gap = 3e-4, 0.5e-3
    conductance = 2.334e-6 * area / gap**2  # constant as printed, from memory
    for volts in (20.0, 60.0, 150.0):
        density = brentq(lambda j: voltage_by_poisson(j, gap) - volts, 1.0, 1e6, rtol=1e-9)
        got = call("triode_current", conductance=conductance, grid_voltage=volts, beam_voltage=1e3, amplification=1e4)
        assert got == pytest.approx(density * area, rel=1.5 * 0.1 / volts + 5e-4)


def test_bias_step_and_conductance_solve_the_triodes_law() -> None:
    """0.30 to 0.50 A at 4e-3 A/V^1.5 needs 7.22 V; others at random, each against a root finder."""
    assert call("triode_bias_step", conductance=4e-3, from_current=0.3, to_current=0.5) == pytest.approx(7.22, abs=5e-3)
    rnd = random.Random(7)
    for _ in range(100):
        beam, mu, conductance = rnd.uniform(25e3, 38e3), rnd.uniform(150, 500), 10 ** rnd.uniform(-3.3, -1.5)
        fixed = {"conductance": conductance, "beam_voltage": beam, "amplification": mu}

        def short(volts: float, want: float, fixed: dict[str, float] = fixed) -> float:
            return call("triode_current", grid_voltage=volts, **fixed) - want

        one, two = rnd.uniform(0.05, 0.5), rnd.uniform(0.55, 2.0)
        cut_off = -beam / mu
        grids = [brentq(short, cut_off, cut_off + 400, args=(want,), xtol=1e-12) for want in (one, two)]
        step = call("triode_bias_step", conductance=conductance, from_current=one, to_current=two)
        assert step == pytest.approx(grids[1] - grids[0], rel=1e-7)
        found = call("triode_conductance", low_current=one, low_grid=grids[0], high_current=two, high_grid=grids[1])
        assert found == pytest.approx(conductance, rel=1e-7)


def test_below_cut_off_there_is_no_current() -> None:
    """Cut-off lies where the beam voltage over the amplification cancels the grid (any text on triodes)."""
    fixed = {"conductance": 4e-3, "beam_voltage": 34e3, "amplification": 272.0}
    assert call("triode_current", grid_voltage=-125.0, **fixed) == 0
    assert call("triode_current", grid_voltage=-500.0, **fixed) == 0
    assert call("triode_current", grid_voltage=-124.9, **fixed) > 0


# Emission. Source: the current of a free-electron gas over a barrier by quadrature; tungsten after Jones and Langmuir
# 1927 (from memory, 5 %, since constant and work function are a fit); the constant of the theory as printed, from memory.


@pytest.mark.parametrize("kelvin", [700.0, 1000.0, 1300.0, 2000.0, 2800.0])
@pytest.mark.parametrize("volts", [1.2, 2.0, 3.2, 4.5])
def test_emission_equals_the_free_electron_gas_over_the_barrier(kelvin: float, volts: float) -> None:
    """J = (e m k T / 2 pi^2 hbar^3) times the integral of ln(1 + exp(-E/kT)) from the work function upward."""
    heat = constants.k * kelvin
    integral = quad(lambda x: math.log1p(math.exp(-x)), volts * CHARGE / heat, math.inf, epsabs=0)[0]
    flux = CHARGE * MASS * heat**2 / (2 * math.pi**2 * constants.hbar**3) * integral
    ideal = call("richardson_constant")
    got = call("emission_density", temperature=kelvin, work_function=volts * CHARGE, constant=ideal)
    # the law takes x for ln(1 + x), which is right to half of x
    assert got == pytest.approx(flux, rel=1e-8 + math.exp(-volts * CHARGE / heat) / 2)


def test_the_constant_of_the_theory_as_printed() -> None:
    assert call("richardson_constant") == pytest.approx(1.20173e6, rel=1e-5)


@pytest.mark.parametrize(("kelvin", "printed"), [(2000, 1.00e-3), (2500, 0.298)])
def test_emission_of_tungsten(kelvin: float, printed: float) -> None:
    got = call("emission_density", temperature=float(kelvin), work_function=4.52 * CHARGE, constant=60.2e4)
    assert got / 1e4 == pytest.approx(printed, rel=0.05)


def test_emission_sensitivity_is_the_slope_in_logarithms() -> None:
    """Source: central differences on the emission itself; 19.9 at 1300 K and 2 eV."""
    for kelvin in (800.0, 1300.0, 2400.0):
        fixed = {"work_function": 2 * CHARGE, "constant": 1e6}
        up, down = (call("emission_density", temperature=kelvin * f, **fixed) for f in (1.0001, 0.9999))
        slope = math.log(up / down) / math.log(1.0001 / 0.9999)
        got = call("emission_sensitivity", temperature=kelvin, work_function=2 * CHARGE)
        assert got == pytest.approx(slope, rel=1e-6)
    assert call("emission_sensitivity", temperature=1300.0, work_function=2 * CHARGE) == pytest.approx(19.9, abs=0.05)


# Speed. Source: the equation of motion d(gamma v)/dt = e E / m integrated by scipy; 0.5482 at 100 kV and 0.6953 at
# 200 kV from tables of electron speed (from memory).


@pytest.mark.parametrize("volts", [100.0, 3_700.0, 35_000.0, 100_000.0, 500_000.0])
def test_speed_equals_the_equation_of_motion(volts: float) -> None:
    """A gap of 50 mm; place in gaps and time in flights of light over the gap, so that the event is found sharply."""
    gap = 0.05
    push = CHARGE * volts / gap / MASS / LIGHT * gap / LIGHT  # of gamma beta

    def moves(_t: float, state: numpy.ndarray) -> list[float]:
        return [state[1] / math.sqrt(1 + state[1] ** 2), push]

    def arrived(_t: float, state: numpy.ndarray) -> float:
        return float(state[0] - 1)

    arrived.terminal = True  # type: ignore[attr-defined]
    options = {"method": "DOP853", "rtol": 1e-11, "atol": 1e-13, "max_step": 1.0}
    solved = solve_ivp(moves, (0, 1000), [0.0, 0.0], events=arrived, **options)
    momentum = solved.y_events[0][0][1]
    assert call("electron_gamma", voltage=volts) == pytest.approx(math.sqrt(1 + momentum**2), rel=1e-9)
    assert call("electron_beta", voltage=volts) == pytest.approx(momentum / math.sqrt(1 + momentum**2), rel=1e-8)


@pytest.mark.parametrize(("kilovolts", "printed"), [(35, 0.3523), (100, 0.5482), (200, 0.6953)])
def test_speed_as_tables_print_it(kilovolts: float, printed: float) -> None:
    assert call("electron_beta", voltage=kilovolts * 1e3) == pytest.approx(printed, abs=1e-4)


# What cannot be: no number, but a fault that says so.

IMPOSSIBLE = [
    ("beam_efficiency", {"rf_power": 80e3, "voltage": 34e3, "current": 2.2}, "RF power"),
    ("beam_transmission", {"body_current": 0.05, "beam_current": 0.04}, "body current"),
    ("collector_dissipation", {"voltage": 34e3, "current": 1.0, "rf_power": 34e3, "body_current": 0.01}, "beam power"),
    ("class_b_dissipation", {"voltage": 34e3, "full_current": 2.0, "full_power": 40e3, "power": 41e3}, "full RF power"),
    ("class_b_worst_dissipation", {"voltage": 34e3, "full_current": 2.0, "full_power": 70e3}, "beam power"),
    (
        "triode_conductance",
        {"low_current": 0.3, "low_grid": -100.0, "high_current": 0.5, "high_grid": -105.0},
        "less negative",
    ),
    (
        "triode_conductance",
        {"low_current": 0.6, "low_grid": -110.0, "high_current": 0.5, "high_grid": -105.0},
        "larger current",
    ),
]


@pytest.mark.parametrize(("name", "arguments", "says"), IMPOSSIBLE)
def test_readings_that_cannot_be_together_give_a_fault(name: str, arguments: dict[str, float], says: str) -> None:
    value = answer(name, **arguments)
    assert isinstance(value, Fault) and value.code == "out-of-range"
    assert says in value.says


@pytest.mark.parametrize(
    ("name", "arguments"),
    [
        ("beam_efficiency", {"rf_power": 28.0, "voltage": 34.0, "current": 2.2}),
        ("beam_power", {"voltage": 34.0, "current": 2.2}),
        ("body_dissipation", {"voltage": 34.0, "body_current": 0.04}),
        ("collector_dissipation", {"voltage": 34.0, "current": 2.2, "rf_power": 0.0, "body_current": 0.04}),
        ("perveance", {"current": 21.0, "voltage": 34.0}),
        ("electron_beta", {"voltage": 34.0}),
        (
            "triode_current",
            {"conductance": 4e-3, "grid_voltage": 0.0, "beam_voltage": 34.0, "amplification": 272.0},
        ),
    ],
)
def test_kilovolts_given_as_volts_are_caught(name: str, arguments: dict[str, float]) -> None:
    value = answer(name, **arguments)
    assert isinstance(value, Fault) and value.code == "out-of-range"
    assert "voltage is 0.034 kV" in value.says
