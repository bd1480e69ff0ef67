"""The ion pump against something outside the project; the source stands beside each check."""

from __future__ import annotations

import math
from typing import Any

import numpy
import pint
import pytest
from published import answer, call
from scipy import constants
from scipy.integrate import quad, solve_ivp

from fieldkit.values import Fault

UNITS = pint.UnitRegistry()
TORR = UNITS("torr").to("Pa").magnitude
LITRE = 1e-3
PER_TORR_LITRE = 1 / (TORR * LITRE)  # 1 A per (Torr L/s), in SI
MINUTE = 60.0

# Pressure. Sources: pint for torr and litre; the ideal gas with the constants of scipy, one charge for each molecule.


@pytest.mark.parametrize("microampere", [0.05, 1.0, 30.0, 2000.0])
@pytest.mark.parametrize(("sensitivity", "speed"), [(15.0, 2.0), (10.0, 8.0), (20.0, 0.2), (12.5, 60.0)])
def test_pump_pressure_equals_the_same_sum_in_pint(microampere: float, sensitivity: float, speed: float) -> None:
    current = UNITS.Quantity(microampere, "uA")
    expected = current / (UNITS.Quantity(sensitivity, "A/(torr*L/s)") * UNITS.Quantity(speed, "L/s"))
    got = call(
        "pump_pressure",
        current=microampere * 1e-6,
        sensitivity=sensitivity * PER_TORR_LITRE,
        speed=speed * LITRE,
    )
    assert got == pytest.approx(expected.to("Pa").magnitude, rel=1e-12)


def test_one_torr_is_the_published_number_of_pascals() -> None:
    """Source: 1 Torr = 101325/760 Pa by definition, 133.322 Pa in tables; pint agrees."""
    assert pytest.approx(101325 / 760, rel=1e-6) == TORR
    shown = call("pump_pressure", current=1e-6, sensitivity=15 * PER_TORR_LITRE, speed=2 * LITRE) / 133.322
    assert shown == pytest.approx(3.33e-8, rel=2e-3)


def test_the_basis_of_the_sensitivity_is_5_24_ampere_for_a_torr_litre_per_second_of_single_charges() -> None:
    """Source: molecules in a cubic metre by the gas law, and by Loschmidt's constant at 0 degC and 1 atm (CODATA)."""
    by_gas_law = TORR / (constants.k * 295.15)
    loschmidt = constants.physical_constants["Loschmidt constant (273.15 K, 101.325 kPa)"][0]
    by_loschmidt = loschmidt * (TORR / constants.atm) * (273.15 / 295.15)
    assert by_gas_law == pytest.approx(by_loschmidt, rel=1e-9)
    single = by_loschmidt * LITRE * constants.e
    assert single == pytest.approx(5.24, abs=0.005)
    molecules = 1e9  # pumped each second by 2 L/s: the pressure is what holds that many in 2 L
    expected = molecules * constants.k * 295.15 / (2 * LITRE)
    charges = 15 / single
    assert charges == pytest.approx(2.86, abs=0.005)
    got = call(
        "pump_pressure",
        current=molecules * charges * constants.e,
        sensitivity=15 * PER_TORR_LITRE,
        speed=2 * LITRE,
    )
    assert got == pytest.approx(expected, rel=1e-9)


# Pump-down. Sources: a volume pumped at constant speed, integrated by scipy; for the power law, gas let go by a wall with
# all energies of binding alike likely (a sum of exponentials gives 1/t), and diffusion out of a slab (a series gives
# 1/sqrt(t)); these two are textbook models of outgassing, from memory, summed numerically here.


def test_the_exponential_is_a_volume_pumped_at_constant_speed() -> None:
    volume, speed, sensitivity = 3 * LITRE, 0.004 * LITRE, 15 * PER_TORR_LITRE
    times = numpy.array([0.0, 60.0, 600.0, 3000.0])
    how: Any = {"t_eval": times, "rtol": 1e-11, "atol": 1e-16}
    pressure = solve_ivp(lambda _t, p: -speed * p / volume, (0, 3000), [1e-4], **how).y[0]
    initial = sensitivity * speed * pressure[0]
    for time, now in zip(times, pressure, strict=True):
        got = call("pump_down_exponential", initial=initial, time_constant=volume / speed, time=float(time))
        assert got == pytest.approx(sensitivity * speed * now, rel=1e-8)


def from_a_wall(time: float) -> float:
    """Gas let go at `time` by places with time constants from a nanosecond to ages, all decades alike."""
    return float(quad(lambda x: math.exp(-x - time * math.exp(-x)), math.log(1e-9), math.log(1e15), limit=2000)[0])


def from_a_slab(time: float) -> float:
    """Gas out of a slab by diffusion, long before it is empty: the Fourier series, in units of its own time constant."""
    n = numpy.arange(4000)
    return float(numpy.exp(-((2 * n + 1) ** 2) * time).sum())


@pytest.mark.parametrize("minutes", [6.0, 20.0, 100.0, 400.0])
def test_gas_from_a_wall_falls_with_the_first_power(minutes: float) -> None:
    ratio = from_a_wall(minutes * MINUTE) / from_a_wall(5 * MINUTE)
    got = call("pump_down_power", current=80e-6, at=5 * MINUTE, exponent=1.0, time=minutes * MINUTE)
    assert got == pytest.approx(80e-6 * ratio, rel=1e-6)
    back = call("pump_down_time_power", current=80e-6, at=5 * MINUTE, exponent=1.0, limit=80e-6 * ratio)
    assert back == pytest.approx(minutes * MINUTE, rel=1e-6)


@pytest.mark.parametrize("minutes", [6.0, 20.0, 100.0])
def test_gas_out_of_a_slab_falls_with_the_root(minutes: float) -> None:
    unit = 1e-5  # of the slab's time constant to the minute
    ratio = from_a_slab(minutes * unit) / from_a_slab(5 * unit)
    got = call("pump_down_power", current=80e-6, at=5 * MINUTE, exponent=0.5, time=minutes * MINUTE)
    assert got == pytest.approx(80e-6 * ratio, rel=1e-6)


def test_an_exponential_through_readings_that_fall_as_1_over_t_promises_far_too_early() -> None:
    """Source: a line through the logarithms by numpy; 101 min promised where the readings themselves take 400 min."""
    times = numpy.arange(5.0, 61.0, 5.0)
    slope, start = numpy.polyfit(times, numpy.log(400.0 / times), 1)
    fitted = {"initial": math.exp(start) * 1e-6, "time_constant": -MINUTE / slope}
    promised = call("pump_down_time_exponential", limit=1e-6, **fitted)
    assert promised / MINUTE == pytest.approx(101.0, abs=0.5)
    assert call("pump_down_exponential", time=promised, **fitted) == pytest.approx(1e-6, rel=1e-9)
    reached = call("pump_down_time_power", current=80e-6, at=5 * MINUTE, exponent=1.0, limit=1e-6)
    assert reached / MINUTE == pytest.approx(400.0, rel=1e-9)
    there = call("pump_down_power", current=80e-6, at=5 * MINUTE, exponent=1.0, time=promised)
    assert there > 3.9e-6, "where the exponential promises 1 uA there are still 4"


def test_the_time_to_a_limit_is_the_crossing_of_the_integrated_pump_down() -> None:
    """Source: crossing found by scipy's event while it integrates dI/dt = -I/tau."""

    def crossed(_t: float, i: numpy.ndarray) -> float:
        return float(i[0] - 1e-6)

    crossed.terminal = True  # type: ignore[attr-defined]
    how: Any = {"events": crossed, "rtol": 1e-11, "atol": 1e-18}
    solved = solve_ivp(lambda _t, i: -i / 1200.0, (0, 20_000), [80e-6], **how)
    got = call("pump_down_time_exponential", initial=80e-6, limit=1e-6, time_constant=1200.0)
    assert got == pytest.approx(solved.t_events[0][0], rel=1e-7)


def test_a_current_already_below_the_limit_needs_no_wait() -> None:
    """Source: the curves only fall, so they cross no limit above their start."""
    assert call("pump_down_time_exponential", initial=0.5e-6, limit=1e-6, time_constant=1200.0) == 0.0
    assert call("pump_down_time_power", current=0.5e-6, at=300.0, exponent=1.0, limit=1e-6) == 300.0


def test_the_power_law_says_nothing_of_the_time_before_the_reading() -> None:
    """Source: the law has a pole at zero; towards it the number would be without meaning."""
    got = answer("pump_down_power", current=80e-6, at=300.0, exponent=1.0, time=200.0)
    assert isinstance(got, Fault) and got.code == "out-of-range"
