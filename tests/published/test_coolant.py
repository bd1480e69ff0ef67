"""Water, the heat that it carries, and the balance, against the world; the source stands beside each check."""

from __future__ import annotations

import math
import random

import CoolProp.CoolProp as coolprop
import numpy
import pytest
from chemicals import iapws
from published import answer, call
from scipy.optimize import brentq

from fieldkit.values import Fault

LITRE_A_MINUTE = 1 / 60_000
#: m3/s; a US gallon is 3.785 411 784 L by definition
GALLON_A_MINUTE = 3.785411784 * LITRE_A_MINUTE
ZERO = 273.15

# Water. Sources: CoolProp, HEOS backend (IAPWS-95), and the package chemicals (IAPWS-95 and IAPWS-IF97), at 3 bar.


def _water(what: str, kelvin: float) -> float:
    return float(coolprop.PropsSI(what, "T", kelvin, "P", 3e5, "Water"))


def _if97(kelvin: float) -> tuple[float, float, float]:
    """Density, heat capacity and enthalpy by IAPWS-IF97, region 1, from the derivatives of its Gibbs energy."""
    tau, pi, gas = 1386 / kelvin, 3e5 / 16.53e6, 461.526
    capacity = -gas * tau**2 * iapws.iapws97_d2G_dtau2_region1(tau, pi)
    enthalpy = gas * kelvin * tau * iapws.iapws97_dG_dtau_region1(tau, pi)
    return iapws.iapws97_rho(kelvin, 3e5), capacity, enthalpy


def test_water_density_and_heat_capacity_equal_coolprop_between_the_rows_too() -> None:
    for kelvin in numpy.linspace(273.2, 373.15, 203):
        assert call("water_density", temperature=float(kelvin)) == pytest.approx(_water("D", kelvin), rel=6e-5)
        assert call("water_heat_capacity", temperature=float(kelvin)) == pytest.approx(_water("C", kelvin), rel=2.5e-4)


def test_water_density_and_heat_capacity_equal_the_two_standards_of_chemicals() -> None:
    """IAPWS-IF97 and IAPWS-95 differ by up to 0.06 % in heat capacity: that is the spread of the standards."""
    for kelvin in numpy.linspace(273.2, 373.1, 150):
        density, _, _, _, _, capacity, *_ = iapws.iapws95_properties(float(kelvin), 3e5)
        assert call("water_density", temperature=float(kelvin)) == pytest.approx(density, rel=6e-5)
        assert call("water_heat_capacity", temperature=float(kelvin)) == pytest.approx(capacity, rel=2.5e-4)
        density, capacity, _ = _if97(float(kelvin))
        assert call("water_density", temperature=float(kelvin)) == pytest.approx(density, rel=1e-4)
        assert call("water_heat_capacity", temperature=float(kelvin)) == pytest.approx(capacity, rel=1e-3)


# Heat. Sources: difference of enthalpy, which has no heat capacity in it, by IAPWS-95 and by IAPWS-IF97.


def test_water_heat_equals_the_difference_of_enthalpy() -> None:
    """The heat capacity at the mean temperature stands for its mean, which costs up to 0.1 % from 0 to 35 degC."""
    rnd = random.Random(11)
    for _ in range(200):
        flow, inlet = rnd.uniform(5, 200) * LITRE_A_MINUTE, ZERO + rnd.uniform(1, 60)
        outlet = inlet + rnd.uniform(2, 35)
        want = flow * _water("D", inlet) * (_water("H", outlet) - _water("H", inlet))
        for name in ("coolant_heat_water", "calorimetric_power"):
            assert call(name, flow=flow, inlet=inlet, outlet=outlet) == pytest.approx(want, rel=1e-3)
        other = flow * _if97(inlet)[0] * (_if97(outlet)[2] - _if97(inlet)[2])
        assert call("coolant_heat_water", flow=flow, inlet=inlet, outlet=outlet) == pytest.approx(other, rel=1.5e-3)


def test_water_heat_of_any_rise_and_of_any_fall_is_within_what_its_reference_says() -> None:
    rnd = random.Random(12)
    for _ in range(300):
        inlet, outlet = (ZERO + rnd.uniform(0.1, 100) for _ in range(2))
        want = _water("D", inlet) * (_water("H", outlet) - _water("H", inlet)) * 0.001
        assert call("coolant_heat_water", flow=0.001, inlet=inlet, outlet=outlet) == pytest.approx(want, rel=3e-3)


def test_water_heat_of_the_worked_case() -> None:
    """60 L/min from 35 to 45 degC: 41 535 W by IAPWS-IF97, computed once with another library."""
    got = call("coolant_heat_water", flow=0.001, inlet=308.15, outlet=318.15)
    assert got == pytest.approx(41_535, rel=2e-4)


def test_flow_needed_takes_up_just_the_heat_by_enthalpy() -> None:
    rnd = random.Random(13)
    for _ in range(200):
        heat, inlet = rnd.uniform(1e3, 2e5), ZERO + rnd.uniform(5, 60)
        outlet = inlet + rnd.uniform(2, 35)
        flow = call("coolant_flow_needed", heat=heat, inlet=inlet, outlet=outlet)
        assert flow * _water("D", inlet) * (_water("H", outlet) - _water("H", inlet)) == pytest.approx(heat, rel=1e-3)


def test_a_load_without_flow_has_no_power_and_no_number() -> None:
    """Source: common sense of the trade; a load whose water stands takes its power all the same, and boils."""
    stands = answer("calorimetric_power", flow=0.0, inlet=298.15, outlet=308.15)
    assert isinstance(stands, Fault) and stands.code == "out-of-range" and "flow is 0" in stands.says


@pytest.mark.parametrize("outlet", [308.15, 308.0, 273.15])
def test_flow_needed_without_a_rise_is_no_number(outlet: float) -> None:
    value = answer("coolant_flow_needed", heat=1e4, inlet=308.15, outlet=outlet)
    assert isinstance(value, Fault) and value.code == "out-of-range"
    assert "outlet must be warmer" in value.says


@pytest.mark.parametrize(
    ("shop", "flow", "rise"),
    [
        (264.0, GALLON_A_MINUTE, 1.0),
        (147.0, GALLON_A_MINUTE, 5 / 9),
        (69.7, LITRE_A_MINUTE, 1.0),
        # BTU/h of 1055.056 J
        (500.0 * 1055.056 / 3600, GALLON_A_MINUTE, 5 / 9),
    ],
)
def test_shop_rules_read_about_one_percent_high_for_water_at_40_degrees(shop: float, flow: float, rise: float) -> None:
    """Source: common practice, no source. kW by gal/min and K or degF, by L/min and K; BTU/h by gal/min and degF."""
    assert shop / call("coolant_heat_water", flow=flow, inlet=313.15, outlet=313.15 + rise) == pytest.approx(
        1.009, abs=0.004
    )


def test_test_load_power_is_as_uncertain_as_its_caution_says() -> None:
    """3.6 % at a rise of 10 K, from 1 % (density and heat capacity), 2 % (flow), 0.2 K (each thermometer).

    Source: the law of propagation (JCGM 100, 5.1.2) with derivatives taken numerically.
    """
    at = {"flow": 40 * LITRE_A_MINUTE, "inlet": 298.15, "outlet": 308.15}
    spread = {"flow": 0.02 * at["flow"], "inlet": 0.2, "outlet": 0.2}
    power = call("calorimetric_power", **at)
    parts = [0.01]
    for name, u in spread.items():
        up, down = (call("calorimetric_power", **(at | {name: at[name] + s * u})) for s in (1, -1))
        parts.append((up - down) / 2 / power)
    assert math.hypot(*parts) == pytest.approx(0.036, abs=0.0005)


# Balance. Source: conservation of energy; where the coolant's temperature ends by enthalpy (CoolProp), with air likewise.


def _outlet(fluid: str, mass_flow: float, inlet: float, heat: float) -> float:
    """Where a flow ends that takes up `heat`, by enthalpy."""

    def lacks(kelvin: float) -> float:
        taken = coolprop.PropsSI("H", "T", kelvin, "P", 3e5, fluid) - coolprop.PropsSI("H", "T", inlet, "P", 3e5, fluid)
        return float(mass_flow * taken - heat)

    return float(brentq(lacks, inlet, inlet + 60))


def test_balance_of_a_tube_whose_heat_all_goes_into_coolant_and_air_closes() -> None:
    rnd = random.Random(14)
    for _ in range(40):
        beam, rf = 34e3 * rnd.uniform(1, 2.2), rnd.uniform(5e3, 28e3)
        heater, magnet, air = 100.0, 300.0, 1500.0
        flow, inlet = rnd.uniform(60, 90) * LITRE_A_MINUTE, ZERO + rnd.uniform(20, 40)
        outlet = _outlet("Water", flow * _water("D", inlet), inlet, beam + heater + magnet - rf - air)
        given = {"beam_power": beam, "heater_power": heater, "magnet_power": magnet, "rf_power": rf, "air_heat": air}
        found = call("coolant_heat_water", flow=flow, inlet=inlet, outlet=outlet)
        assert call("balance_closure", coolant_heat=found, **given) == pytest.approx(0, abs=1e-3)
        # a kilowatt that went into the room is missing, and shows above zero
        missing = call("balance_closure", coolant_heat=found - 1000, **given)
        assert missing == pytest.approx(1000 / (beam + 400), abs=1e-3)


def test_balance_with_glycol_worked_out_as_water_finds_more_than_was_put_in() -> None:
    """75.2 kW in, 28 kW out as RF; half ethylene glycol in the loop, and the formula for water."""
    fluid = "INCOMP::MEG[0.5]"
    inlet, flow = ZERO + 30, 70 * LITRE_A_MINUTE
    outlet = _outlet(fluid, flow * float(coolprop.PropsSI("D", "T", inlet, "P", 3e5, fluid)), inlet, 47_200)
    given = {
        "beam_power": 74_800.0,
        "heater_power": 100.0,
        "magnet_power": 300.0,
        "rf_power": 28_000.0,
        "air_heat": 0.0,
    }
    as_water = call("coolant_heat_water", flow=flow, inlet=inlet, outlet=outlet)
    assert -0.12 < call("balance_closure", coolant_heat=as_water, **given) < -0.08
    mixture = call("coolant_heat_ethylene_glycol", flow=flow, inlet=inlet, outlet=outlet, mass_fraction=0.5)
    assert call("balance_closure", coolant_heat=mixture, **given) == pytest.approx(0, abs=1e-3)


def test_balance_of_nothing_is_no_number() -> None:
    nothing = {"beam_power": 0.0, "heater_power": 0.0, "magnet_power": 0.0}
    value = answer("balance_closure", rf_power=0.0, coolant_heat=1e3, air_heat=0.0, **nothing)
    assert isinstance(value, Fault) and value.code == "out-of-range"
