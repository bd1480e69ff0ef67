"""How one answer of a formula is shown: the unit that suits it, and the digits that it deserves.

    best = fitting(59400.0, WATT)             -> the unit kW: the greatest multiple of the SI unit that leaves 1 or more
    written = plain(59400.0, best, digits=6)  -> "59.4"

Decided: six significant digits, or the four to six to which a formula's own worked examples are held; digits before
the point are never rounded off; where more than five noughts would follow the point, an exponent as the language reads
it. Not here: what is computed (answer.py), readings and limits, which keep every digit that was typed (fieldkit.run).
"""

from __future__ import annotations

from dataclasses import replace
from decimal import Decimal
from fractions import Fraction

from fieldkit import units, values
from fieldkit.formula.entry import Formula
from fieldkit.units import Dimension, Unit

#: significant digits of an answer where nothing tells better
MOST_DIGITS = 6
LEAST_DIGITS = 4

#: powers of ten of the first digit from and up to which a number is written without an exponent
_PLAIN = range(-4, 10)

_RAISED = str.maketrans("-0123456789/", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹ᐟ")

_PREFIXES = ("p", "n", "u", "m", "k", "M", "G")


def coherent(dimension: Dimension) -> Unit:
    """The SI unit of a dimension: one of the known units, or its powers of the base units, like "kg m2 s-5".

    A temperature on a scale is in K here.
    """
    plain_powers = Dimension(dimension.powers)
    known = (u for u in units.UNITS.values() if u.dimension == plain_powers and u.factor == "1")
    found = next(known, None)
    if found is not None:
        return found
    words = plain_powers.words()
    return Unit(words, words.translate(_RAISED), "1", "0", plain_powers, Fraction(1))


def fitting(si: float, dimension: Dimension) -> Unit:
    """The SI unit or the decimal multiple of it in which `si` has the fewest digits before the point, one at least."""
    if dimension.absolute:
        return units.UNITS["degC"]
    base = coherent(dimension)
    symbols = [f"{prefix}{base.symbol}" for prefix in _PREFIXES]
    multiples = [u for s in symbols if (u := units.UNITS.get(s)) is not None and u.dimension == base.dimension]
    scale = sorted([base, *multiples], key=lambda u: u.exact, reverse=True)
    if si == 0.0 or base.symbol == "1":
        return base
    return next((u for u in scale if abs(Fraction(si)) >= u.exact), scale[-1])


def plain(si: float, unit: Unit, digits: int = MOST_DIGITS) -> str:
    """`si` in `unit` with so many significant digits, half to even, without trailing noughts: "41.54", "1.6e-19"."""
    exact = Decimal(values.to_shown(si, unit))
    if exact == 0:
        return "0"
    mantissa, _, power = f"{exact:.{digits - 1}e}".partition("e")
    # the power before and after rounding: 9999999999 keeps its digits, 0.000099999999 becomes 0.0001
    if exact.adjusted() not in _PLAIN and int(power) not in _PLAIN:
        return f"{values.to_text(values.trim(values.dec(mantissa)))}e{int(power)}"
    places = max(0, digits - 1 - int(power))
    return values.to_text(values.trim(values.dec(values.to_text(values.dec(f"{exact:f}"), places))))


def beside(si: float, u: float, unit: Unit, digits: int = MOST_DIGITS) -> str:
    """A value with its uncertainty, both in SI: "41.54 kW ± 0.83 kW", "25.0 °C ± 0.4 K".

    Two digits of the uncertainty at most, none finer than so many `digits` of the value; both end at one place, and
    have the same exponent, where one is needed.
    """
    value, size = Decimal(values.to_shown(si, unit)), Decimal(width(u, unit))
    power = max(x.adjusted() for x in (value, size) if x)
    power = 0 if power in _PLAIN else power
    places = max(0, digits - 1 - (value.scaleb(-power).adjusted() if value else 0))
    parts = values.beside(f"{value.scaleb(-power):f}", f"{size.scaleb(-power):f}", f"{0:.{places}f}")
    tail = f"e{power}" if power else ""
    return " ± ".join(with_unit(p + tail, of) for p, of in zip(parts, (unit, difference(unit)), strict=True))


def difference(unit: Unit) -> Unit:
    """The unit of a difference of two values in `unit`: K for degC, dB for dBm."""
    if unit.dimension.absolute:
        return units.UNITS["K"]
    return units.UNITS["dB"] if unit.symbol == "dBm" else unit


def width(si: float, unit: Unit) -> str:
    """A difference in SI as a decimal text, where values are shown in `unit`."""
    return values.to_shown(si, replace(unit, offset="0"))


def with_unit(number: str, unit: Unit) -> str:
    """ "41.54 kW", and a plain number alone."""
    return f"{number} {unit.shown}".strip()


def quantity(si_text: str, unit: Unit) -> str:
    """A decimal text in SI, such as the end of a range, in `unit` as it was meant: "0.5 mm"."""
    return values.to_shown(values.to_float(values.dec(si_text)), unit)


def digits(formula: Formula) -> int:
    """The significant digits to which the worked examples of a formula are held, within four to six."""
    held = [_held(Decimal(e.gives), Decimal(e.within), formula.unit) for e in formula.examples if not e.fault]
    return max([LEAST_DIGITS, *(min(MOST_DIGITS, count) for count in held)])


def _held(gives: Decimal, within: Decimal, unit: Unit) -> int:
    """How many digits of `gives` stand at or before the first digit of `within`, both in SI, as shown in `unit`."""
    step = within / Decimal(unit.factor)
    value = (gives - Decimal(unit.offset)) / Decimal(unit.factor)
    if not step or not value:
        return MOST_DIGITS if not step else 0
    return value.adjusted() - step.adjusted() + 1
