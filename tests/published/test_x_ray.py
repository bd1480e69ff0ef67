"""X-rays against something outside the project; the source stands beside each check."""

from __future__ import annotations

import math
import random
import re

import numpy
import pytest
import xraylib
from published import LIBRARY, answer, call
from scipy import constants

from fieldkit.values import Fault

# Duane and Hunt. Source: CODATA 2022 through scipy.constants, in its own tables of conversion (eV to J, eV to 1/m);
# 1239.84 nm V, as textbooks print it (from memory).


def test_the_greatest_photon_has_the_energy_of_one_electron() -> None:
    joule = constants.value("electron volt-joule relationship")
    for volts in numpy.geomspace(1e3, 500e3, 200):
        assert call("photon_maximum", voltage=float(volts)) == pytest.approx(float(volts) * joule, rel=1e-12)


def test_the_shortest_wavelength_equals_the_tables_of_conversion() -> None:
    per_metre = constants.value("electron volt-inverse meter relationship")
    for volts in numpy.geomspace(1e3, 500e3, 200):
        got = call("minimum_wavelength", voltage=float(volts))
        assert got == pytest.approx(1 / (float(volts) * per_metre), rel=1e-9)
        assert got * 1e9 == pytest.approx(1239.84 / volts, rel=2e-6)
    assert call("minimum_wavelength", voltage=35e3) * 1e12 == pytest.approx(35.4, abs=0.05)


def test_energy_and_wavelength_belong_together() -> None:
    """Source: Bragg's law in silicon: xraylib's angle for a photon energy gives the wavelength, 2 d sin(angle)."""
    silicon = xraylib.Crystal_GetCrystal("Si")
    spacing = xraylib.Crystal_dSpacing(silicon, 1, 1, 1)  # in angstrom
    for volts in (5e3, 17e3, 35e3, 60e3, 120e3):
        energy = call("photon_maximum", voltage=volts) / constants.e / 1e3
        angle = xraylib.Bragg_angle(silicon, energy, 1, 1, 1)
        got = call("minimum_wavelength", voltage=volts) * 1e10
        assert got == pytest.approx(2 * spacing * math.sin(angle), rel=1e-5)


# Attenuation. Source: xraylib, whose cross-sections follow NIST XCOM; four values of NIST XCOM from memory.

ELEMENTS = {"aluminium": (13, 2.70), "iron": (26, 7.87), "copper": (29, 8.96), "lead": (82, 11.35)}


def coefficient(material: str, kiloelectronvolts: float) -> float:
    """Mass attenuation coefficient in cm2/g."""
    if material == "alumina":
        return float(xraylib.CS_Total_CP("Al2O3", kiloelectronvolts))
    return float(xraylib.CS_Total(ELEMENTS[material][0], kiloelectronvolts))


@pytest.mark.parametrize(
    ("material", "energy", "printed"),
    [("aluminium", 30, 1.128), ("copper", 30, 10.91), ("iron", 40, 3.629), ("lead", 40, 14.36)],
)
def test_the_library_that_is_leaned_on_has_the_values_of_nist(material: str, energy: float, printed: float) -> None:
    assert coefficient(material, energy) == pytest.approx(printed, rel=2e-3)


@pytest.mark.parametrize(("energy", "where"), [(35.0, "at 35 keV: "), (30.0, "At 30 keV: ")])
def test_the_coefficients_in_the_caution_are_those_of_nist(energy: float, where: str) -> None:
    text = " ".join(" ".join(LIBRARY.formulas["xray_transmission"].cautions).split())
    printed = re.findall(r"[0-9]+\.[0-9]+", text.split(where)[1])[:5]
    for material, value in zip(("aluminium", "alumina", "iron", "copper", "lead"), printed, strict=True):
        assert coefficient(material, energy) == pytest.approx(float(value), rel=3e-3), material


@pytest.mark.parametrize("material", list(ELEMENTS))
def test_transmission_equals_the_absorption_of_thin_layers_one_after_the_other(material: str) -> None:
    """Atoms and their cross-sections in barn, a million layers of which each takes its small share."""
    number, density = ELEMENTS[material]
    rnd = random.Random(number)
    for _ in range(50):
        energy, thickness = rnd.uniform(15, 100), 10 ** rnd.uniform(-5, -2)
        atoms = density * 1e6 / xraylib.AtomicWeight(number) * constants.N_A
        share = atoms * xraylib.CSb_Total(number, energy) * 1e-28 * thickness / 1e6
        left = (1 - share) ** 1_000_000
        fixed = {"attenuation": coefficient(material, energy) / 10, "density": density * 1e3}
        got = call("xray_transmission", **fixed, thickness=thickness)
        assert got == pytest.approx(left, rel=1e-5 + 1e6 * share**2)
        half = call("xray_half_value", **fixed)
        if half < 0.3:
            assert call("xray_transmission", **fixed, thickness=half) == pytest.approx(0.5, rel=1e-12)


@pytest.mark.parametrize(
    ("material", "density", "millimetres", "energy", "passes"),
    [
        ("iron", 7.87, 1, 35, 0.016),
        ("iron", 7.87, 1, 60, 0.39),
        ("copper", 8.96, 1, 35, 0.0018),
        ("lead", 11.35, 1, 35, 1e-10),
        ("alumina", 3.9, 5, 35, 0.34),
    ],
)
def test_what_passes_one_sheet(material: str, density: float, millimetres: float, energy: float, passes: float) -> None:
    """Holds what the cautions say: steel and lead stop 35 keV, a ceramic window does not."""
    fixed = {"attenuation": coefficient(material, energy) / 10, "density": density * 1e3}
    got = call("xray_transmission", **fixed, thickness=millimetres * 1e-3)
    assert got == pytest.approx(passes, rel=0.03)


@pytest.mark.parametrize(
    ("name", "arguments"),
    [
        ("photon_maximum", {"voltage": 35.0}),
        ("minimum_wavelength", {"voltage": 35.0}),
        ("xray_transmission", {"attenuation": 0.529, "density": 7.87e6, "thickness": 1e-3}),
    ],
)
def test_a_unit_that_slipped_is_caught(name: str, arguments: dict[str, float]) -> None:
    value = answer(name, **arguments)
    assert isinstance(value, Fault) and value.code == "out-of-range"
