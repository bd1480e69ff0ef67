"""Conductivity of coolant water against the world; the source stands beside each check."""

from __future__ import annotations

import csv
import math
from pathlib import Path

import chemicals
import numpy
import pytest
from chemicals import iapws
from published import answer, call

from fieldkit.values import Fault

ZERO = 273.15
#: S/m in one uS/cm
MICRO = 1e-4
DATA = Path(chemicals.__file__).parent / "Electrolytes"

# Conductance of salts at infinite dilution. Source: McCleskey 2011 (J. Chem. Eng. Data 56, 317), 5 to 90 degC, as the
# package chemicals carries its coefficients.


def _coefficients() -> dict[str, tuple[float, float, float]]:
    with (DATA / "McCleskey Electrical Conductivity.tsv").open(encoding="utf-8", newline="") as file:
        rows = csv.DictReader(file, delimiter="\t")
        return {r["formula"]: (float(r["c1"]), float(r["c2"]), float(r["c3"])) for r in rows}


COEFFICIENTS = _coefficients()


def _conductance(salt: str, celsius: float) -> float:
    """S m2/mol of the salt at infinite dilution."""
    a, b, c = COEFFICIENTS[salt]
    return (a * celsius**2 + b * celsius + c) * 1e-4


# Ionisation constant, as -log10 of molalities. Sources: IAPWS R11 (Bandura and Lvov 2006); Marshall and Franck 1981, as the
# CRC Handbook prints it for saturated water (table seen).


def _iapws(kelvin: float, density: float) -> float:
    rho = density / 1000
    q = rho * math.exp(-0.864671 + 8659.19 / kelvin - 22786.2 / kelvin**2 * rho ** (2 / 3))
    gas = 0.61415 + 48251.33 / kelvin - 67707.93 / kelvin**2 + 10102100 / kelvin**3
    cluster = math.log10(1 + q) - q / (q + 1) * rho * (0.642044 - 56.8534 / kelvin - 0.375754 * rho)
    return -12 * cluster + gas + 2 * math.log10(18.015268 / 1000)


def test_the_ionisation_constant_used_here_meets_its_check_value() -> None:
    """Source: the check of the release at 600 K and 0.7 g/cm3, as the package thermo quotes it."""
    assert _iapws(600, 700) == pytest.approx(11.203153, abs=1e-6)


#: by temperature in degC
MARSHALL = {
    5: 14.727, 10: 14.528, 15: 14.340, 20: 14.163, 25: 13.995, 30: 13.836, 35: 13.685, 40: 13.542, 45: 13.405, 50: 13.275,
    55: 13.152, 60: 13.034, 65: 12.921, 70: 12.814, 75: 12.712, 80: 12.613, 85: 12.520, 90: 12.428, 95: 12.345, 100: 12.265,
}  # fmt: skip


def _pure(celsius: float, ions: float, minus_log: float | None = None) -> float:
    """S/m of pure water: both of its ions, as many as the ionisation constant says, with the conductance `ions`."""
    kelvin = celsius + ZERO
    density = iapws.iapws95_rhol_sat(kelvin)
    exponent = _iapws(kelvin, density) if minus_log is None else minus_log
    return 10 ** (-exponent / 2) * density * ions


def _water_ions(celsius: float) -> float:
    """S m2/mol of H+ and OH- together, by the law of independent ions."""
    return _conductance("HCl", celsius) + _conductance("NaOH", celsius) - _conductance("NaCl", celsius)


# The water's own conductivity.


@pytest.mark.parametrize(("celsius", "published", "within"), [(25, 18.18, 0.001), (100, 1.29, 0.005)])
def test_pure_water_has_its_published_resistivity(celsius: float, published: float, within: float) -> None:
    """Source: Light and others 2005, Mohm cm. The formula was brought to these two; that it meets them is its first duty."""
    got = call("water_conductivity", temperature=celsius + ZERO)
    assert 1e-6 / (got / 100) == pytest.approx(published, rel=within)


def test_pure_water_at_25_degrees_by_ionisation_and_by_the_ions_of_a_handbook() -> None:
    """Sources: Kw of IAPWS; H+ 349.65 and OH- 198.0 S cm2/mol of the CRC Handbook, as chemicals carries them."""
    with (DATA / "CRC conductivity infinite dilution.tsv").open(encoding="utf-8", newline="") as file:
        crc = {r["Formula"]: float(r["lambda"]) for r in csv.DictReader(file, delimiter="\t")}
    want = _pure(25, crc["H+"] + crc["OH-"])
    assert call("water_conductivity", temperature=25 + ZERO) == pytest.approx(want, rel=0.004)


def test_pure_water_keeps_to_the_ionisation_constant_over_the_whole_range() -> None:
    """Source: Kw of IAPWS (Bandura and Lvov 2006), conductances of McCleskey 2011; used beyond 5 and 90 degC too."""
    for celsius in numpy.linspace(0.02, 100, 101):
        want = _pure(float(celsius), _water_ions(float(celsius)))
        assert call("water_conductivity", temperature=float(celsius) + ZERO) == pytest.approx(want, rel=0.01)


@pytest.mark.parametrize("celsius", MARSHALL)
def test_pure_water_is_within_the_spread_of_the_published_constants(celsius: int) -> None:
    want = _pure(celsius, _water_ions(celsius), MARSHALL[celsius])
    assert call("water_conductivity", temperature=celsius + ZERO) == pytest.approx(want, rel=0.02)


@pytest.mark.parametrize(("celsius", "percent"), [(1, 7.3), (25, 5.2), (99, 2.4)])
def test_pure_water_changes_with_temperature_as_its_caution_says(celsius: float, percent: float) -> None:
    """Source: the same from the ionisation constant, by a difference of one kelvin either way."""
    lower, upper = (_pure(celsius + d, _water_ions(celsius + d)) for d in (-0.5, 0.5))
    assert 100 * math.log(upper / lower) == pytest.approx(percent, abs=0.25)
    lower, upper = (call("water_conductivity", temperature=celsius + d + ZERO) for d in (-0.5, 0.5))
    assert 100 * math.log(upper / lower) == pytest.approx(percent, abs=0.25)


# What the meter would read at 25 degC.


def test_pure_water_at_any_temperature_stays_pure_water() -> None:
    for celsius in numpy.linspace(0.02, 80, 81):
        read = _pure(float(celsius), _water_ions(float(celsius)))
        got = call("conductivity_at_25", conductivity=read, temperature=float(celsius) + ZERO)
        assert got == pytest.approx(0.05501 * MICRO, rel=0.02)


@pytest.mark.parametrize("celsius", [10.0, 20.0, 25.0, 30.0, 40.0])
def test_a_trace_of_salt_is_seen_at_any_temperature(celsius: float) -> None:
    """1 ug/L of NaCl brings 18.18 down to 17.5 Mohm cm at 25 degC. Source: Light and others 2005 (text seen).

    What a cell reads at other temperatures: McCleskey 2011 and the ionisation constant of IAPWS.
    """
    amount = 1e-6 / 58.44e-3  # mol/m3
    read = _pure(celsius, _water_ions(celsius)) + amount * _conductance("NaCl", celsius)
    got = call("conductivity_at_25", conductivity=read, temperature=celsius + ZERO)
    assert 1e-6 / (got / 100) == pytest.approx(17.5, rel=0.008)


@pytest.mark.parametrize(
    ("salt", "celsius", "high", "within"),
    [
        ("NaCl", 5, 0.022, 0.004),
        ("NaCl", 10, 0.007, 0.004),
        ("NaCl", 40, 0.021, 0.004),
        ("NaCl", 60, 0.066, 0.006),
        ("NaCl", 80, 0.121, 0.006),
        ("HCl", 40, -0.063, 0.006),
    ],
)
def test_salts_come_out_as_far_off_as_the_caution_says(salt: str, celsius: float, high: float, within: float) -> None:
    """Source: McCleskey 2011, far above the water's own conductivity."""
    per_salt = 100 * MICRO / _conductance(salt, 25)
    got = call("conductivity_at_25", conductivity=per_salt * _conductance(salt, celsius), temperature=celsius + ZERO)
    # the linear form divides by less than the salt's own curve: the answer is high
    assert got / (100 * MICRO) - 1 == pytest.approx(high, abs=within)


def test_salts_between_5_and_40_degrees_are_within_what_the_caution_says() -> None:
    for celsius in numpy.linspace(5, 40, 71):
        read = 1000 * MICRO * _conductance("NaCl", float(celsius)) / _conductance("NaCl", 25)
        got = call("conductivity_at_25", conductivity=read, temperature=float(celsius) + ZERO)
        assert got == pytest.approx(1000 * MICRO, rel=0.025)


@pytest.mark.parametrize("celsius", [0.0, 10.0, 25.0, 40.0, 80.0])
def test_what_is_below_the_water_itself_is_no_number(celsius: float) -> None:
    """Source: no water conducts less than its own ions make it (Kw of IAPWS, McCleskey 2011)."""
    own = _pure(max(celsius, 0.02), _water_ions(celsius))
    value = answer("conductivity_at_25", conductivity=0.88 * own, temperature=celsius + ZERO)
    assert isinstance(value, Fault) and value.code == "out-of-range"
    assert "purest water" in value.says
    assert isinstance(answer("conductivity_at_25", conductivity=0.95 * own, temperature=celsius + ZERO), float)
