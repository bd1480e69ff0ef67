"""Coolant against something outside the project; the source stands beside each check."""

from __future__ import annotations

import random

import CoolProp.CoolProp as coolprop
import numpy
import pytest
from published import call

# Water. Source: CoolProp, HEOS backend (IAPWS-95), at 3 bar.


def _water(what: str, kelvin: float) -> float:
    return float(coolprop.PropsSI(what, "T", kelvin, "P", 3e5, "Water"))


def test_water_density_and_heat_capacity_equal_coolprop_between_the_rows_too() -> None:
    for kelvin in numpy.linspace(273.2, 373.15, 203):
        assert call("water_density", temperature=float(kelvin)) == pytest.approx(_water("D", kelvin), rel=1e-4)
        assert call("water_heat_capacity", temperature=float(kelvin)) == pytest.approx(_water("C", kelvin), rel=3e-4)


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
        assert call("coolant_heat_water", flow=flow, inlet=inlet, outlet=outlet) == pytest.approx(want, rel=1e-3)


def test_water_heat_of_the_worked_case() -> None:
    """60 L/min from 35 to 45 degC: 41 535 W by IAPWS-IF97, computed once with another library."""
    got = call("coolant_heat_water", flow=60 / 60_000, inlet=308.15, outlet=318.15)
    assert got == pytest.approx(41_535, rel=2e-4)
