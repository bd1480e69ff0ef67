"""The units that formulas and readings know: symbol, what is shown, factor and offset to SI, dimension.

A symbol is plain ASCII as a writer types it (`uA`, `ohm`, `degC`, `m3/s`); `shown` is what people see (µA, Ω, °C,
m³/s). µA, μA, Ω, kΩ, °C and the like are also read. `degC` is an absolute temperature; a difference is written in K.
Levels in dB and dBm have a dimension of their own: they are added to each other, never to watts.

Not here: conversions of values (fieldkit.values.to_si, to_shown). To add a unit: one line in `_LINES`; a test holds
every line against pint, so its pint expression goes there too.
"""

from __future__ import annotations

import difflib
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from fieldkit import values

#: the last is the unit, whichever it is, of a formula that takes any (see ANY)
BASES = ("kg", "m", "s", "A", "K", "dB", "any")


@dataclass(frozen=True)
class Dimension:
    """Powers of BASES. `absolute` marks a temperature on a scale, which is not a difference of temperatures."""

    powers: tuple[Fraction, ...]
    absolute: bool = False

    def times(self, other: Dimension) -> Dimension:
        return Dimension(tuple(a + b for a, b in zip(self.powers, other.powers, strict=True)))

    def over(self, other: Dimension) -> Dimension:
        return Dimension(tuple(a - b for a, b in zip(self.powers, other.powers, strict=True)))

    def to_power(self, power: Fraction) -> Dimension:
        return Dimension(tuple(a * power for a in self.powers))

    def same_powers(self, other: Dimension) -> bool:
        return self.powers == other.powers

    def words(self) -> str:
        """How to name it to a writer: "V" where one of the units has it, else its powers, like "kg m2 s-3"."""
        if self.absolute:
            return "degC"
        if self == ANY.dimension:
            return "any unit"
        for symbol, unit in UNITS.items():
            if unit.dimension == self and unit.factor == "1":
                return "a plain number" if symbol == "1" else symbol
        return " ".join(f"{base}{'' if p == 1 else p}" for base, p in zip(BASES, self.powers, strict=True) if p)

    def to_json(self) -> dict[str, str]:
        return {base: str(p) for base, p in zip(BASES, self.powers, strict=True) if p}


@dataclass(frozen=True)
class Unit:
    """si = written * factor + offset, both decimal strings; `exact` is the factor as a fraction."""

    symbol: str
    shown: str
    factor: str
    offset: str
    dimension: Dimension
    exact: Fraction


def dimension(**powers: int) -> Dimension:
    """A dimension by its powers: dimension(kg=1, m=2, s=-3, A=-1) is that of the volt."""
    return Dimension(tuple(Fraction(powers.get(base, 0)) for base in BASES))


NUMBER = dimension()
_VOLT = dimension(kg=1, m=2, s=-3, A=-1)
_AMPERE = dimension(A=1)
_WATT = dimension(kg=1, m=2, s=-3)
_OHM = dimension(kg=1, m=2, s=-3, A=-2)
_FARAD = dimension(kg=-1, m=-2, s=4, A=2)
_SECOND = dimension(s=1)
_FLOW = dimension(m=3, s=-1)
_KELVIN = dimension(K=1)
_PASCAL = dimension(kg=1, m=-1, s=-2)
_HERTZ = dimension(s=-1)
_JOULE = dimension(kg=1, m=2, s=-2)
_TESLA = dimension(kg=1, s=-2, A=-1)
_METRE = dimension(m=1)
_AREA = dimension(m=2)
_LEVEL = dimension(dB=1)
_DENSITY = dimension(kg=1, m=-3)
_HEAT = dimension(m=2, s=-2, K=-1)
#: of perveance: A / V^1.5
_PERV = _AMPERE.over(_VOLT.to_power(Fraction(3, 2)))
_EMISSION = dimension(A=1, m=-2, K=-2)

#: exact by the definition of the ampere (SI, 2019), of the torr and of the inch
_ELECTRON_VOLT = Fraction("1.602176634e-19")
_TORR = Fraction(101_325, 760)
_INCH = Fraction("0.0254")
_GALLON = 231 * _INCH**3

_PI = Fraction("3.14159265358979323846264338327950288")

#: symbol, shown, factor, dimension
_LINES: tuple[tuple[str, str, str | Fraction, Dimension], ...] = (
    ("1", "", "1", NUMBER),
    ("%", "%", "0.01", NUMBER),
    ("V", "V", "1", _VOLT),
    ("kV", "kV", "1000", _VOLT),
    ("mV", "mV", "0.001", _VOLT),
    ("A", "A", "1", _AMPERE),
    ("mA", "mA", "0.001", _AMPERE),
    ("uA", "µA", "0.000001", _AMPERE),
    ("nA", "nA", "0.000000001", _AMPERE),
    ("W", "W", "1", _WATT),
    ("kW", "kW", "1000", _WATT),
    ("mW", "mW", "0.001", _WATT),
    ("ohm", "Ω", "1", _OHM),
    ("mohm", "mΩ", "0.001", _OHM),
    ("kohm", "kΩ", "1000", _OHM),
    ("Mohm", "MΩ", "1000000", _OHM),
    ("F", "F", "1", _FARAD),
    ("uF", "µF", "0.000001", _FARAD),
    ("nF", "nF", "0.000000001", _FARAD),
    ("pF", "pF", "0.000000000001", _FARAD),
    ("F/m", "F/m", "1", _FARAD.over(_METRE)),
    ("perv", "perv", "1", _PERV),
    ("uperv", "µperv", "0.000001", _PERV),
    ("s", "s", "1", _SECOND),
    ("ms", "ms", "0.001", _SECOND),
    ("us", "µs", "0.000001", _SECOND),
    ("ns", "ns", "0.000000001", _SECOND),
    ("min", "min", "60", _SECOND),
    ("h", "h", "3600", _SECOND),
    ("d", "d", "86400", _SECOND),
    ("Hz", "Hz", "1", _HERTZ),
    ("kHz", "kHz", "1000", _HERTZ),
    ("MHz", "MHz", "1000000", _HERTZ),
    ("GHz", "GHz", "1000000000", _HERTZ),
    ("m", "m", "1", _METRE),
    ("cm", "cm", "0.01", _METRE),
    ("mm", "mm", "0.001", _METRE),
    ("um", "µm", "0.000001", _METRE),
    ("nm", "nm", "0.000000001", _METRE),
    ("pm", "pm", "0.000000000001", _METRE),
    ("in", "in", _INCH, _METRE),
    ("ft", "ft", 12 * _INCH, _METRE),
    ("m2", "m²", "1", _AREA),
    ("cm2", "cm²", "0.0001", _AREA),
    ("mm2", "mm²", "0.000001", _AREA),
    ("m3", "m³", "1", dimension(m=3)),
    ("L", "L", "0.001", dimension(m=3)),
    ("m/s", "m/s", "1", dimension(m=1, s=-1)),
    ("m3/s", "m³/s", "1", _FLOW),
    ("m3/h", "m³/h", Fraction(1, 3600), _FLOW),
    ("L/s", "L/s", "0.001", _FLOW),
    ("L/min", "L/min", Fraction(1, 60_000), _FLOW),
    ("gal/min", "gal/min", _GALLON / 60, _FLOW),
    ("kg", "kg", "1", dimension(kg=1)),
    ("g", "g", "0.001", dimension(kg=1)),
    ("kg/m3", "kg/m³", "1", _DENSITY),
    ("g/cm3", "g/cm³", "1000", _DENSITY),
    ("cm2/g", "cm²/g", "0.1", dimension(kg=-1, m=2)),
    ("kg/s", "kg/s", "1", dimension(kg=1, s=-1)),
    ("J", "J", "1", _JOULE),
    ("kJ", "kJ", "1000", _JOULE),
    ("mJ", "mJ", "0.001", _JOULE),
    ("eV", "eV", _ELECTRON_VOLT, _JOULE),
    ("keV", "keV", 1000 * _ELECTRON_VOLT, _JOULE),
    ("J/kg/K", "J/(kg K)", "1", _HEAT),
    ("kJ/kg/K", "kJ/(kg K)", "1000", _HEAT),
    ("K", "K", "1", _KELVIN),
    ("K/kW", "K/kW", "0.001", _KELVIN.over(_WATT)),
    ("Pa", "Pa", "1", _PASCAL),
    ("kPa", "kPa", "1000", _PASCAL),
    ("bar", "bar", "100000", _PASCAL),
    ("mbar", "mbar", "100", _PASCAL),
    ("Torr", "Torr", _TORR, _PASCAL),
    ("A s/Torr/L", "A/(Torr L/s)", 1000 / _TORR, _AMPERE.over(_PASCAL).over(_FLOW)),
    ("T", "T", "1", _TESLA),
    ("mT", "mT", "0.001", _TESLA),
    ("A/m2", "A/m²", "1", dimension(A=1, m=-2)),
    ("A/cm2", "A/cm²", "10000", dimension(A=1, m=-2)),
    ("A/m2/K2", "A/(m² K²)", "1", _EMISSION),
    ("A/cm2/K2", "A/(cm² K²)", "10000", _EMISSION),
    ("A s", "A s", "1", dimension(A=1, s=1)),
    ("J s", "J s", "1", _JOULE.times(_SECOND)),
    ("J/K", "J/K", "1", _JOULE.over(_KELVIN)),
    ("W/m2", "W/m²", "1", dimension(kg=1, s=-3)),
    ("mW/cm2", "mW/cm²", "10", dimension(kg=1, s=-3)),
    ("uW/cm2", "µW/cm²", "0.01", dimension(kg=1, s=-3)),
    ("A2s", "A²s", "1", dimension(A=2, s=1)),
    ("ohm/m", "Ω/m", "1", _OHM.over(_METRE)),
    ("Mohm/cm", "MΩ/cm", "100000000", _OHM.over(_METRE)),
    ("ohm m", "Ω m", "1", _OHM.times(_METRE)),
    ("Mohm cm", "MΩ cm", "10000", _OHM.times(_METRE)),
    ("S/m", "S/m", "1", NUMBER.over(_OHM).over(_METRE)),
    ("uS/cm", "µS/cm", "0.0001", NUMBER.over(_OHM).over(_METRE)),
    ("Sv/h", "Sv/h", Fraction(1, 3600), dimension(m=2, s=-3)),
    ("mSv/h", "mSv/h", Fraction(1, 3_600_000), dimension(m=2, s=-3)),
    ("uSv/h", "µSv/h", Fraction(1, 3_600_000_000), dimension(m=2, s=-3)),
    ("rad", "rad", "1", NUMBER),
    ("deg", "°", _PI / 180, NUMBER),
    ("dB", "dB", "1", _LEVEL),
    ("dBm", "dBm", "1", _LEVEL),
)


def _decimal(exact: Fraction) -> str:
    """The fraction as a plain decimal: exact where it ends, else 30 significant digits, far beyond a double's 17."""
    bottom = exact.denominator
    ends = next((p for p in range(40) if 10**p % bottom == 0), None)
    places = ends if ends is not None else 30 + len(str(bottom)) - len(str(exact.numerator))
    return values.to_text(values.trim(values.Dec(round(exact * 10**places), places)))


def _unit(symbol: str, shown: str, factor: str | Fraction, dim: Dimension, offset: str = "0") -> Unit:
    exact = Fraction(factor)
    return Unit(symbol, shown, _decimal(exact), offset, dim, exact)


UNITS: dict[str, Unit] = {line[0]: _unit(*line) for line in _LINES}
#: the one unit with an offset: a temperature on the Celsius scale
UNITS["degC"] = _unit("degC", "°C", "1", Dimension(_KELVIN.powers, absolute=True), "273.15")

#: what a formula's argument takes when any unit will do, the same for all such arguments, and a difference of such
#: values; never a unit of a value, so no symbol of UNITS
ANY = Unit("any", "", "1", "0", dimension(any=1), Fraction(1))
ANY_DIFFERENCE = Unit("any difference", "", "1", "0", dimension(any=1), Fraction(1))

#: other spellings that are read, by what they become
_READ_AS = {"\u00b5": "u", "\u03bc": "u", "\u2126": "ohm", "\u03a9": "ohm", "°C": "degC", "²": "2", "³": "3"}
_READ_AS |= {"A/(Torr L/s)": "A s/Torr/L", "J/(kg K)": "J/kg/K", "A/(m2 K2)": "A/m2/K2", "A/(cm2 K2)": "A/cm2/K2"}


def plain(symbol: str) -> str:
    """The ASCII spelling of `symbol`: "µA" and "μA" become "uA", "kΩ" becomes "kohm", "°C" becomes "degC"."""
    for other, ours in _READ_AS.items():
        symbol = symbol.replace(other, ours)
    return symbol


def unit(symbol: str) -> Unit | None:
    """The unit that `symbol` names, in any spelling that is read; None where there is none (see `near`)."""
    return UNITS.get(plain(symbol))


def near(symbol: str) -> list[str]:
    """The known symbols most like `symbol`, best first, for "write one of"; at most four."""
    want = plain(symbol)
    same = [s for s in UNITS if s.lower() == want.lower()]
    common = {"ohms": "ohm", "volt": "V", "volts": "V", "amp": "A", "amps": "A", "watt": "W", "watts": "W"}
    common |= {"c": "degC", "°": "degC", "sec": "s", "second": "s", "seconds": "s", "hour": "h", "hours": "h"}
    common |= {"minute": "min", "minutes": "min", "l/min": "L/min", "lpm": "L/min", "percent": "%", "r": "ohm"}
    named = [common[want.lower()]] if want.lower() in common else []
    close = difflib.get_close_matches(want, UNITS, n=4, cutoff=0.5)
    return list(dict.fromkeys([*same, *named, *close]))[:4]


def shown(symbol: str) -> str:
    """The unit as people read it; what is no unit stays as it is."""
    found = unit(symbol)
    return found.shown if found else symbol


def table() -> dict[str, dict[str, Any]]:
    """All units as plain JSON for the kit: {symbol: {factor, offset, dimension, absolute, shown}}."""
    return {
        symbol: {
            "factor": u.factor,
            "offset": u.offset,
            "dimension": u.dimension.to_json(),
            "absolute": u.dimension.absolute,
            "shown": u.shown,
        }
        for symbol, u in UNITS.items()
    }
