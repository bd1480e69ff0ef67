"""The constants against something outside the project; the source stands beside each check.

Source: scipy.constants, which carries CODATA 2022 from scipy 1.15 on, the oldest that the tests take. A later scipy may
carry a later CODATA: the charge, h, k and c are exact by the SI of 2019 and stay as they are, the electron's mass and the
permittivity are measured and move within a few standard uncertainties, 1e-9 of the value.
"""

from __future__ import annotations

import math

import pytest
from published import LIBRARY, call
from scipy import constants

EXACT = {
    "elementary_charge": "elementary charge",
    "light_speed": "speed of light in vacuum",
    "planck_constant": "Planck constant",
    "boltzmann_constant": "Boltzmann constant",
}
MEASURED = {"electron_mass": "electron mass", "vacuum_permittivity": "vacuum electric permittivity"}


def test_every_constant_is_checked_here() -> None:
    here = {name for name, formula in LIBRARY.formulas.items() if formula.subject == "constants"}
    assert here == {*EXACT, *MEASURED}


@pytest.mark.parametrize(("name", "codata"), EXACT.items())
def test_constants_that_define_the_si_are_equal_to_the_last_digit(name: str, codata: str) -> None:
    value, unit, uncertainty = constants.physical_constants[codata]
    assert uncertainty == 0
    assert call(name) == value, unit


@pytest.mark.parametrize(("name", "codata"), MEASURED.items())
def test_measured_constants_are_within_their_uncertainty(name: str, codata: str) -> None:
    value, unit, uncertainty = constants.physical_constants[codata]
    assert 0 < uncertainty < 1e-9 * value
    assert call(name) == pytest.approx(value, rel=1e-9), unit


def test_the_fine_structure_constant_follows_from_five_of_them() -> None:
    """alpha = e^2 / (2 eps0 h c), which CODATA gives for itself: a slip in any of the powers of ten would show."""
    alpha = call("elementary_charge") ** 2 / (
        2 * call("vacuum_permittivity") * call("planck_constant") * call("light_speed")
    )
    assert alpha == pytest.approx(constants.alpha, rel=2e-9)


def test_the_rest_energy_of_the_electron_is_511_kev() -> None:
    energy = call("electron_mass") * call("light_speed") ** 2 / call("elementary_charge")
    assert energy == pytest.approx(constants.value("electron mass energy equivalent in MeV") * 1e6, rel=2e-9)


def test_the_radiation_constant_follows_from_boltzmann_planck_and_light() -> None:
    """sigma = 2 pi^5 k^4 / (15 h^3 c^2), which CODATA gives for itself."""
    k, h, c = call("boltzmann_constant"), call("planck_constant"), call("light_speed")
    assert 2 * math.pi**5 * k**4 / (15 * h**3 * c**2) == pytest.approx(constants.sigma, rel=1e-9)
