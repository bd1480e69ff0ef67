"""Mixtures of water and glycol against the world; the source stands beside each check. Fractions by mass but where said."""

from __future__ import annotations

import random

import CoolProp.CoolProp as coolprop
import numpy
import pytest
from chemicals.dippr import EQ105
from published import answer, call

from fieldkit.values import Fault

ZERO = 273.15
GALLON_A_MINUTE = 3.785411784 / 60_000
#: by glycol: CoolProp's names of the two correlations, the first by mass, the second (ASHRAE) by volume
GLYCOLS = {"ethylene_glycol": ("MEG", "AEG"), "propylene_glycol": ("MPG", "APG")}
#: what the reference of each formula states as its residual
RESIDUAL = {
    "ethylene_glycol": {"density": 5e-5, "heat_capacity": 2e-4},
    "propylene_glycol": {"density": 6e-5, "heat_capacity": 2e-4},
}
WHAT = {"density": "D", "heat_capacity": "C"}


def _of(glycol: str, what: str, kelvin: float, fraction: float, *, by: int = 0) -> float:
    return float(coolprop.PropsSI(what, "T", kelvin, "P", 3e5, f"INCOMP::{GLYCOLS[glycol][by]}[{fraction}]"))


def _mass(glycol: str, volume_fraction: float) -> float:
    return call(f"{glycol}_mass_fraction", volume_fraction=volume_fraction)


# Density and heat capacity. Source: CoolProp, INCOMP::MEG and INCOMP::MPG (Melinder 2010), by mass.


@pytest.mark.parametrize("glycol", GLYCOLS)
@pytest.mark.parametrize("what", WHAT)
def test_the_fit_keeps_to_its_source_over_the_whole_range(glycol: str, what: str) -> None:
    """43 temperatures times 37 fractions, none of them a point of the fit but the corners."""
    for kelvin in numpy.linspace(273.16, 353.15, 43):
        for fraction in numpy.linspace(0, 0.6, 37):
            got = call(f"{glycol}_{what}", temperature=float(kelvin), mass_fraction=float(fraction))
            assert got == pytest.approx(_of(glycol, WHAT[what], kelvin, fraction), rel=RESIDUAL[glycol][what])


@pytest.mark.parametrize(
    ("name", "most"),
    [
        ("ethylene_glycol_density", 1.1e-3),
        ("ethylene_glycol_heat_capacity", 2.0e-3),
        ("propylene_glycol_density", 3.5e-4),
        ("propylene_glycol_heat_capacity", 1.35e-3),
    ],
)
def test_without_glycol_it_differs_from_water_by_what_its_caution_says(name: str, most: float) -> None:
    """Source: CoolProp, HEOS backend (IAPWS-95), at 3 bar."""
    what = "D" if name.endswith("density") else "C"
    differ = []
    for kelvin in numpy.linspace(273.16, 353.15, 81):
        water = float(coolprop.PropsSI(what, "T", kelvin, "P", 3e5, "Water"))
        differ.append(abs(call(name, temperature=float(kelvin), mass_fraction=0.0) / water - 1))
    assert 0.7 * most < max(differ) < most


#: density (kg/m3), heat capacity (J/(kg K)), kW for 1 US gal/min and 1 K; computed once with CoolProp 8.0.0
TABLE = {
    ("ethylene_glycol", 0.2): [(20, 1024.1, 3896, 0.2517), (40, 1016.4, 3933, 0.2522), (60, 1006.2, 3969, 0.2520)],
    ("ethylene_glycol", 0.3): [(20, 1038.0, 3718, 0.2435), (40, 1028.8, 3775, 0.2450), (60, 1017.5, 3829, 0.2458)],
    ("ethylene_glycol", 0.4): [(20, 1051.9, 3519, 0.2335), (40, 1041.4, 3598, 0.2364), (60, 1029.1, 3670, 0.2383)],
    ("ethylene_glycol", 0.5): [(20, 1064.9, 3312, 0.2225), (40, 1053.4, 3413, 0.2268), (60, 1040.5, 3503, 0.2300)],
    ("propylene_glycol", 0.2): [(20, 1014.8, 3977, 0.2546), (40, 1006.4, 4019, 0.2552), (60, 995.6, 4061, 0.2551)],
    ("propylene_glycol", 0.3): [(20, 1023.8, 3857, 0.2491), (40, 1013.4, 3910, 0.2500), (60, 1001.2, 3962, 0.2503)],
    ("propylene_glycol", 0.4): [(20, 1032.3, 3707, 0.2414), (40, 1020.1, 3771, 0.2427), (60, 1006.3, 3834, 0.2434)],
    ("propylene_glycol", 0.5): [(20, 1039.1, 3530, 0.2314), (40, 1025.4, 3607, 0.2333), (60, 1010.5, 3683, 0.2348)],
}


@pytest.mark.parametrize(("glycol", "fraction"), TABLE)
def test_the_table_of_one_gallon_a_minute_and_one_kelvin(glycol: str, fraction: float) -> None:
    for celsius, density, capacity, kilowatts in TABLE[glycol, fraction]:
        at = {"temperature": ZERO + celsius, "mass_fraction": fraction}
        assert call(f"{glycol}_density", **at) == pytest.approx(density, abs=0.12)
        assert call(f"{glycol}_heat_capacity", **at) == pytest.approx(capacity, abs=1.5)
        between = {"inlet": ZERO + celsius - 0.05, "outlet": ZERO + celsius + 0.05}
        heat = call(f"coolant_heat_{glycol}", flow=GALLON_A_MINUTE, mass_fraction=fraction, **between)
        assert heat / 0.1 == pytest.approx(1000 * kilowatts, abs=0.15)


# A second, independent correlation. Source: CoolProp, INCOMP::AEG and INCOMP::APG (ASHRAE's tables), by volume.


@pytest.mark.parametrize("glycol", GLYCOLS)
def test_the_tables_of_ashrae_agree_from_10_to_50_percent_by_volume(glycol: str) -> None:
    """From 10 degC: 1 % of density, 2 % of heat capacity, once the fraction by volume is turned into one by mass."""
    for volume in numpy.linspace(0.1, 0.5, 15):
        mass = _mass(glycol, float(volume))
        for kelvin in numpy.linspace(283.15, 353.15, 15):
            at = {"temperature": float(kelvin), "mass_fraction": mass}
            assert call(f"{glycol}_density", **at) == pytest.approx(_of(glycol, "D", kelvin, volume, by=1), rel=0.01)
            capacity = call(f"{glycol}_heat_capacity", **at)
            assert capacity == pytest.approx(_of(glycol, "C", kelvin, volume, by=1), rel=0.02)


@pytest.mark.parametrize(
    ("glycol", "density", "capacity"), [("ethylene_glycol", 0.011, 0.029), ("propylene_glycol", 0.008, 0.007)]
)
def test_the_tables_of_ashrae_differ_by_what_the_references_say(glycol: str, density: float, capacity: float) -> None:
    differ: dict[str, list[float]] = {"density": [], "heat_capacity": []}
    for volume in numpy.linspace(0.1, 0.573, 20):
        for kelvin in numpy.linspace(273.25, 353.15, 20):
            at = {"temperature": float(kelvin), "mass_fraction": _mass(glycol, float(volume))}
            for name, values in differ.items():
                values.append(abs(_of(glycol, WHAT[name], kelvin, volume, by=1) / call(f"{glycol}_{name}", **at) - 1))
    assert 0.85 * density < max(differ["density"]) < density
    assert 0.85 * capacity < max(differ["heat_capacity"]) < capacity


@pytest.mark.parametrize(
    ("fahrenheit", "pounds"),
    [
        (40, [63.61, 64.66, 65.66, 66.59, 67.47]),
        (80, [63.19, 64.21, 65.17, 66.05, 66.90]),
        (110, [62.79, 63.77, 64.70, 65.56, 66.37]),
        (140, [62.30, 63.25, 64.15, 64.98, 65.75]),
        (170, [61.72, 62.64, 63.51, 64.31, 65.05]),
    ],
)
def test_density_of_ethylene_glycol_by_volume_as_ashrae_prints_it(fahrenheit: float, pounds: list[float]) -> None:
    """Source: ASHRAE Fundamentals, density of ethylene glycol at 10 to 50 % by volume, lb/ft3 (table seen reprinted)."""
    for volume, density in zip((0.1, 0.2, 0.3, 0.4, 0.5), pounds, strict=True):
        mass = _mass("ethylene_glycol", volume)
        got = call("ethylene_glycol_density", temperature=(fahrenheit + 459.67) / 1.8, mass_fraction=mass)
        assert got == pytest.approx(density * 0.45359237 / 0.3048**3, rel=0.01)


def test_specific_gravity_of_propylene_glycol_by_volume_as_a_handbook_prints_it() -> None:
    """Source: Lange's Handbook of Chemistry, 15th edition, table 5.13 (seen): at 15.6 degC, for 5 to 50 % by volume."""
    gravity = [1.004, 1.006, 1.012, 1.017, 1.020, 1.024, 1.028, 1.032, 1.037, 1.040]
    water = float(coolprop.PropsSI("D", "T", ZERO + 15.6, "P", 101325, "Water"))
    for volume, printed in zip(numpy.linspace(0.05, 0.5, 10), gravity, strict=True):
        mass = _mass("propylene_glycol", float(volume))
        got = call("propylene_glycol_density", temperature=ZERO + 15.6, mass_fraction=mass)
        assert got / water == pytest.approx(printed, abs=0.005)


# Fractions by volume and by mass.


#: kg/mol, and coefficients of the equation of Perry's Chemical Engineers' Handbook, 8th edition, table 2-32 (mol/m3), as
#: the package chemicals carries them
PURE = {
    "ethylene_glycol": (62.068e-3, 1315, 0.25125, 720, 0.21868),
    "propylene_glycol": (76.094e-3, 1092.3, 0.26106, 626, 0.20459),
}


@pytest.mark.parametrize("glycol", PURE)
def test_mass_fraction_is_that_of_two_weighed_volumes(glycol: str) -> None:
    """Source: densities at 20 degC, of the pure glycol by Perry's handbook, of water by CoolProp."""
    molar, *coefficients = PURE[glycol]
    pure = molar * EQ105(293.15, *coefficients)
    water = float(coolprop.PropsSI("D", "T", 293.15, "P", 101325, "Water"))
    for volume in numpy.linspace(0, 1, 41):
        weighed = volume * pure / (volume * pure + (1 - volume) * water)
        assert _mass(glycol, float(volume)) == pytest.approx(weighed, abs=5e-4)


def test_mass_fraction_of_the_published_example() -> None:
    """Source: a supplier's sheet after ASHRAE Fundamentals 1993 (seen): 277.6 of 1000 gallons for 30 % by weight."""
    assert _mass("ethylene_glycol", 0.2776) == pytest.approx(0.300, abs=2e-4)


@pytest.mark.parametrize(("glycol", "upto", "kelvin"), [("ethylene_glycol", 0.3, 1.0), ("propylene_glycol", 0.55, 0.5)])
def test_both_fractions_of_one_mixture_freeze_at_one_temperature(glycol: str, upto: float, kelvin: float) -> None:
    """Source: freezing temperatures of CoolProp's two correlations, one by mass, one by volume."""
    for volume in numpy.linspace(0.15, upto, 9):
        by_mass = _of(glycol, "T_freeze", 300, _mass(glycol, float(volume)))
        assert by_mass == pytest.approx(_of(glycol, "T_freeze", 300, volume, by=1), abs=kelvin)


# Heat. Source: difference of enthalpy, which has no heat capacity in it.


def _enthalpy_heat(glycol: str, inlet: float, outlet: float, fraction: float, *, by: int = 0) -> float:
    """Watts that one litre a second takes up."""
    mass_flow = 0.001 * _of(glycol, "D", inlet, fraction, by=by)
    return mass_flow * (_of(glycol, "H", outlet, fraction, by=by) - _of(glycol, "H", inlet, fraction, by=by))


@pytest.mark.parametrize(("glycol", "any_rise"), [("ethylene_glycol", 3e-3), ("propylene_glycol", 2e-3)])
def test_heat_equals_the_difference_of_enthalpy(glycol: str, any_rise: float) -> None:
    rnd = random.Random(21)
    for _ in range(300):
        inlet, outlet, fraction = ZERO + rnd.uniform(0.1, 75), ZERO + rnd.uniform(0.1, 80), rnd.uniform(0, 0.6)
        if abs(outlet - inlet) < 1:
            continue
        got = call(f"coolant_heat_{glycol}", flow=0.001, inlet=inlet, outlet=outlet, mass_fraction=fraction)
        within = 1e-3 if abs(outlet - inlet) < 40 else any_rise
        assert got == pytest.approx(_enthalpy_heat(glycol, inlet, outlet, fraction), rel=within)


@pytest.mark.parametrize("glycol", GLYCOLS)
def test_heat_agrees_with_the_tables_of_ashrae(glycol: str) -> None:
    rnd = random.Random(22)
    for _ in range(100):
        volume, inlet = rnd.uniform(0.1, 0.5), ZERO + rnd.uniform(5, 50)
        outlet = inlet + rnd.uniform(5, 25)
        at = {"inlet": inlet, "outlet": outlet, "mass_fraction": _mass(glycol, volume)}
        want = _enthalpy_heat(glycol, inlet, outlet, volume, by=1)
        assert call(f"coolant_heat_{glycol}", flow=0.001, **at) == pytest.approx(want, rel=0.02)


@pytest.mark.parametrize("glycol", GLYCOLS)
def test_flow_needed_takes_up_just_the_heat_by_enthalpy(glycol: str) -> None:
    rnd = random.Random(23)
    for _ in range(100):
        heat, inlet, fraction = rnd.uniform(1e3, 2e5), ZERO + rnd.uniform(1, 50), rnd.uniform(0, 0.6)
        outlet = inlet + rnd.uniform(2, 30)
        at = {"inlet": inlet, "outlet": outlet, "mass_fraction": fraction}
        flow = call(f"coolant_flow_needed_{glycol}", heat=heat, **at)
        assert flow / 0.001 * _enthalpy_heat(glycol, inlet, outlet, fraction) == pytest.approx(heat, rel=1.2e-3)
    value = answer(f"coolant_flow_needed_{glycol}", heat=1e4, inlet=310.0, outlet=310.0, mass_fraction=0.3)
    assert isinstance(value, Fault) and value.code == "out-of-range" and "warmer" in value.says


@pytest.mark.parametrize(("glycol", "high"), [("ethylene_glycol", 1.164), ("propylene_glycol", 1.131)])
def test_the_shop_rule_reads_high_with_half_glycol(glycol: str, high: float) -> None:
    """Source: 0.264 kW for 1 gal/min and 1 K, common practice, no source, over CoolProp's density and heat capacity."""
    at = {"inlet": ZERO + 39.5, "outlet": ZERO + 40.5, "mass_fraction": 0.5}
    assert 264.0 / call(f"coolant_heat_{glycol}", flow=GALLON_A_MINUTE, **at) == pytest.approx(high, abs=0.002)


@pytest.mark.parametrize(("glycol", "low", "high"), [("ethylene_glycol", 1.13, 1.185), ("propylene_glycol", 1.1, 1.14)])
def test_the_formula_for_water_reads_high_with_half_glycol_by_what_the_cautions_say(
    glycol: str, low: float, high: float
) -> None:
    """Source: CoolProp, both liquids by enthalpy."""
    for inlet in (ZERO + 20, ZERO + 40, ZERO + 55):
        water = call("coolant_heat_water", flow=0.001, inlet=inlet, outlet=inlet + 5)
        assert low < water / _enthalpy_heat(glycol, inlet, inlet + 5, 0.5) < high
