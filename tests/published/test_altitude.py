"""Factors of altitude against something outside the project; the source stands beside each check."""

from __future__ import annotations

import math

import pytest
from CoolProp.CoolProp import PropsSI
from fluids.atmosphere import ATMOSPHERE_1976
from published import answer, call

from fieldkit.values import Fault


def pressure(altitude: float) -> float:
    """Pa at an altitude in the 1976 standard atmosphere, by the fluids library."""
    return float(ATMOSPHERE_1976(altitude).P)


HEIGHTS = [float(h) for h in range(0, 5001, 250)]

# The exponential factors. Source: with exponent 1 they stand for the ratio of air pressures, here by the 1976 standard
# atmosphere of the fluids library; the published example of 1.13 at 2000 m (guide to switchgear, text seen).


@pytest.mark.parametrize("altitude", HEIGHTS)
def test_the_factor_from_sea_level_is_the_ratio_of_pressures(altitude: float) -> None:
    """Within 0.6 % up to 4000 m, 1.6 % up to 5000 m."""
    got = call("altitude_factor_60071", altitude=altitude, exponent=1.0)
    assert got == pytest.approx(pressure(0.0) / pressure(altitude), rel=7e-3 if altitude <= 4000 else 1.6e-2)


@pytest.mark.parametrize("altitude", HEIGHTS)
def test_the_factor_from_1000_m_is_the_ratio_of_pressures_above_and_one_below(altitude: float) -> None:
    got = call("altitude_factor_62271", altitude=altitude, exponent=1.0)
    expected = max(1.0, pressure(1000.0) / pressure(altitude))
    assert got == pytest.approx(expected, rel=1e-2 if altitude <= 4000 else 1.9e-2)
    assert got >= 1.0


def test_the_published_example_of_switchgear_at_2000_m() -> None:
    assert round(call("altitude_factor_62271", altitude=2000.0, exponent=1.0), 2) == 1.13


@pytest.mark.parametrize("exponent", [0.5, 0.75, 0.9, 1.0])
@pytest.mark.parametrize("altitude", [500.0, 1500.0, 3200.0, 5000.0])
def test_the_exponent_is_a_power_of_the_ratio_of_pressures(altitude: float, exponent: float) -> None:
    """Source: the ratio of pressures by the fluids library, to the power m (IEC 60071-2 as published)."""
    ratio = pressure(0.0) / pressure(altitude)
    got = call("altitude_factor_60071", altitude=altitude, exponent=exponent)
    assert got == pytest.approx(ratio**exponent, rel=1.6e-2)
    above = max(1.0, pressure(1000.0) / pressure(altitude)) ** exponent
    assert call("altitude_factor_62271", altitude=altitude, exponent=exponent) == pytest.approx(above, rel=1.9e-2)


# The table of IEC 60664-1:2020, table A.2 (as an open-source program carries it; rows from 3000 m).

ROWS = {2000: 1.00, 3000: 1.14, 4000: 1.29, 5000: 1.48, 6000: 1.70, 7000: 1.95, 8000: 2.25, 9000: 2.62, 10000: 3.02}


@pytest.mark.parametrize(("altitude", "factor"), ROWS.items())
def test_the_rows_of_the_clearance_table_are_as_published_and_fit_the_standard_atmosphere(
    altitude: int, factor: float
) -> None:
    """Within 1.6 % of the ratio of pressures against 2000 m (80 kPa), by the fluids library; worst at 9000 m."""
    assert call("altitude_factor_60664", altitude=float(altitude)) == pytest.approx(factor, rel=1e-12)
    assert factor == pytest.approx(pressure(2000.0) / pressure(float(altitude)), rel=1.6e-2)


@pytest.mark.parametrize("altitude", [float(h) for h in range(2050, 10000, 150)])
def test_between_the_rows_the_clearance_factor_lies_on_the_safe_side_of_the_pressure(altitude: float) -> None:
    """Source: ratio of pressures by the fluids library below, the next row of the published table above."""
    got = call("altitude_factor_60664", altitude=altitude)
    assert pressure(2000.0) / pressure(altitude) <= got <= ROWS[1000 * math.ceil(altitude / 1000)]


@pytest.mark.parametrize("altitude", [0.0, 900.0, 1999.0, 2000.0])
def test_up_to_2000_m_a_clearance_is_not_corrected(altitude: float) -> None:
    """Source: IEC 60664-1 counts its clearances as good up to 2000 m (as published)."""
    assert call("altitude_factor_60664", altitude=altitude) == 1.0


# The pitfall. Source: the three ratios of pressure, by the fluids library.


def test_three_standards_give_three_factors_at_one_place() -> None:
    sea, switchgear = (
        call("altitude_factor_60071", altitude=2000.0, exponent=1.0),
        call("altitude_factor_62271", altitude=2000.0, exponent=1.0),
    )
    low_voltage = call("altitude_factor_60664", altitude=2000.0)
    for got, reference in ((sea, 0.0), (switchgear, 1000.0), (low_voltage, 2000.0)):
        assert got == pytest.approx(pressure(reference) / pressure(2000.0), rel=5e-3)
    assert [round(x, 2) for x in (sea, switchgear, low_voltage)] == [1.28, 1.13, 1.00]


@pytest.mark.parametrize("name", ["altitude_factor_60071", "altitude_factor_62271"])
def test_below_sea_level_and_above_5000_m_there_is_no_factor(name: str) -> None:
    """Source: below 1 it would shorten a distance; above 5000 m the law is more than 1.6 % off the air (fluids)."""
    assert math.exp(6000 / 8150) < 0.98 * pressure(0.0) / pressure(6000.0)
    for altitude in (-100.0, 6000.0):
        got = answer(name, altitude=altitude, exponent=1.0)
        assert isinstance(got, Fault) and got.code == "out-of-range"


# Density of the air. Source: air as a real gas in CoolProp.


@pytest.mark.parametrize("kilopascal", [55, 70, 85, 101.3, 108])
@pytest.mark.parametrize("celsius", [-30, 0, 20, 45])
def test_relative_air_density_is_that_of_air_in_coolprop(kilopascal: float, celsius: float) -> None:
    here = PropsSI("D", "P", kilopascal * 1e3, "T", 273.15 + celsius, "Air")
    reference = PropsSI("D", "P", 101.3e3, "T", 293.15, "Air")
    got = call("relative_air_density", pressure=kilopascal * 1e3, temperature=273.15 + celsius)
    assert got == pytest.approx(here / reference, rel=2e-3)
