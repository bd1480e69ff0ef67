"""The units: every factor, offset and dimension against pint; spellings; the table that the kit carries.

Outside check: pint (an independent registry of units). dB and dBm are left out there: they are levels, with a
dimension of their own, which pint treats otherwise.
"""

from __future__ import annotations

from decimal import Decimal

import pint
import pytest

from fieldkit import units, values

#: how pint spells a unit, where it differs from ours
PINT = {
    "1": "dimensionless",
    "%": "percent",
    "uA": "microampere",
    "mohm": "milliohm",
    "kohm": "kiloohm",
    "Mohm": "megaohm",
    "d": "day",
    "L": "liter",
    "m2": "m**2",
    "cm2": "cm**2",
    "mm2": "mm**2",
    "m3": "m**3",
    "m3/s": "m**3/s",
    "m3/h": "m**3/hour",
    "L/s": "liter/s",
    "L/min": "liter/minute",
    "min": "minute",
    "h": "hour",
    "kg/m3": "kg/m**3",
    "g/cm3": "g/cm**3",
    "cm2/g": "cm**2/g",
    "degC": "kelvin",
    "A/m2": "A/m**2",
    "A/cm2": "A/cm**2",
    "W/m2": "W/m**2",
    "mW/cm2": "mW/cm**2",
    "A2s": "A**2*s",
    "Mohm/cm": "megaohm/cm",
    "ohm m": "ohm*m",
    "Mohm cm": "megaohm*cm",
    "Sv/h": "sievert/hour",
    "mSv/h": "millisievert/hour",
    "uSv/h": "microsievert/hour",
    "uS/cm": "microsiemens/cm",
    "S/m": "siemens/m",
    "deg": "degree",
    "perv": "A/V**1.5",
    "uperv": "microampere/V**1.5",
    "in": "inch",
    "gal/min": "gallon/minute",
    "Torr": "torr",
    "A s/Torr/L": "A*s/torr/liter",
    "A/m2/K2": "A/m**2/K**2",
    "A/cm2/K2": "A/cm**2/K**2",
    "A s": "A*s",
    "J s": "J*s",
    "uW/cm2": "microwatt/cm**2",
}
LEVELS = ("dB", "dBm")
BASES = {"kg": "[mass]", "m": "[length]", "s": "[time]", "A": "[current]", "K": "[temperature]"}


@pytest.fixture(scope="module")
def registry() -> pint.UnitRegistry:
    return pint.UnitRegistry()


@pytest.mark.parametrize("symbol", [s for s in units.UNITS if s not in LEVELS])
def test_factor_and_dimension_equal_pint(symbol: str, registry: pint.UnitRegistry) -> None:
    unit = units.UNITS[symbol]
    quantity = registry.Quantity(1, PINT.get(symbol, symbol)).to_base_units()
    assert float(unit.factor) == pytest.approx(quantity.magnitude, rel=1e-14)
    want = {BASES[b]: float(p) for b, p in zip(units.BASES, unit.dimension.powers, strict=True) if p}
    assert dict(quantity.dimensionality) == want


def test_the_celsius_scale_equals_pint(registry: pint.UnitRegistry) -> None:
    for text in ("-40", "0", "25.5", "70"):
        kelvin = registry.Quantity(float(text), "degC").to("kelvin").magnitude
        assert values.to_si(text, units.UNITS["degC"]) == pytest.approx(kelvin, abs=1e-12)


@pytest.mark.parametrize(
    ("written", "symbol"),
    [
        ("µA", "uA"),
        ("\u03bcA", "uA"),
        ("kΩ", "kohm"),
        ("\u2126", "ohm"),
        ("°C", "degC"),
        ("m³/s", "m3/s"),
        ("mW/cm²", "mW/cm2"),
        ("µSv/h", "uSv/h"),
        ("kV", "kV"),
        ("A/(Torr L/s)", "A s/Torr/L"),
        ("J/(kg K)", "J/kg/K"),
        ("A/(cm² K²)", "A/cm2/K2"),
        ("µperv", "uperv"),
    ],
)
def test_other_spellings_are_read(written: str, symbol: str) -> None:
    assert units.unit(written) is units.UNITS[symbol]


@pytest.mark.parametrize("written", ["KV", "C", "volt", "", "kv", "1/0", "kV ", "__class__"])
def test_what_is_no_unit_is_none(written: str) -> None:
    assert units.unit(written) is None


@pytest.mark.parametrize(
    ("written", "first"),
    [("Kv", "kV"), ("C", "degC"), ("volts", "V"), ("lpm", "L/min"), ("l/min", "L/min"), ("Ma", "mA")],
)
def test_near_symbols_are_proposed(written: str, first: str) -> None:
    assert first in units.near(written)[:2]


def test_conversions_there_and_back_give_the_text_again() -> None:
    for unit in units.UNITS.values():
        for text in ("0", "1", "27", "0.42", "12.5", "-3.75", "999999.5", "0.000123"):
            back = values.to_shown(values.to_si(text, unit), unit)
            assert Decimal(back) == Decimal(text), unit.symbol


def test_the_table_for_the_kit_holds_every_unit() -> None:
    table = units.table()
    assert set(table) == set(units.UNITS)
    want = {"factor": "0.000001", "offset": "0", "dimension": {"A": "1"}, "absolute": False, "shown": "µA"}
    assert table["uA"] == want
    assert table["degC"]["absolute"] is True
    assert table["degC"]["offset"] == "273.15"
