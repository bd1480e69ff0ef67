"""What a number is worth: the uncertainty that a meter gives a reading, and a value as it is shown with its own.

The error of a range is taken as rectangular, of half-width a = percent of reading + digits of the resolution +
percent of full scale (the larger of |low| and |high|): u = a / sqrt(3) (JCGM 100, 4.3.7). People see U = 2 u.
A result brings its own U, under "u" of what stands for its meter. Twin: static/core/worth.js.
Not here: how the two are rounded (fieldkit.values.beside), limits and verdicts (fieldkit.run.judge), what a result's u
is made of (fieldkit.run.results).
"""

from __future__ import annotations

import math
from typing import Any

from fieldkit import values
from fieldkit.values import Dec

Plain = dict[str, Any]
_HUNDREDTH = Dec(1, 2)


def half(reading: str, meter: Plain | None, unit: str) -> Dec | None:
    """The half-width of a meter's error at a reading, in its unit; None where its accuracy is not known."""
    if meter is None or meter["unit"] != unit:
        return None
    try:
        percent, digits = values.dec(meter["percent"]), values.dec(meter["digits"])
        of_range = values.dec(meter.get("percent_of_range") or "0")
        step, size = values.dec(meter["resolution"]), values.magnitude(values.dec(reading))
    except (TypeError, ValueError):
        return None
    found = values.add(values.mul(values.mul(percent, _HUNDREDTH), size), values.mul(digits, step))
    if of_range.digits == 0:
        return found
    full = full_scale(meter)
    return None if full is None else values.add(found, values.mul(values.mul(of_range, _HUNDREDTH), full))


def full_scale(of: Plain) -> Dec | None:
    """The larger of |low| and |high| of a range; None where neither is known."""
    ends = [values.magnitude(values.dec(of[side])) for side in ("low", "high") if of.get(side) is not None]
    if len(ends) == 2:
        return ends[0] if values.compare(ends[0], ends[1]) > 0 else ends[1]
    return ends[0] if ends else None


def expanded(reading: str, meter: Plain | None, unit: str) -> str | None:
    """U (k = 2) at a reading, in its unit, 12 digits; None where the accuracy is not known."""
    if meter is not None and "u" in meter:
        return None if meter["u"] is None else str(meter["u"])
    found = half(reading, meter, unit)
    return None if found is None else values.round12(2.0 * values.to_float(found) / math.sqrt(3.0))


def standard(reading: str, meter: Plain | None, unit: Plain) -> str | None:
    """u of a reading in SI, 12 digits; None where the accuracy is not known."""
    found = half(reading, meter, unit["symbol"])
    if found is None:
        return None
    return values.round12(values.to_float(values.mul(found, values.dec(unit["factor"]))) / math.sqrt(3.0))


def shown(text: str, u: str | None, resolution: str | None) -> str:
    """A value with its U, rounded by values.beside: "41.54 ± 0.83"; alone where U is none or not known."""
    if u is None or values.dec(u).digits == 0:
        return text
    return " ± ".join(values.beside(text, u, resolution))


def rounded(u: str, resolution: str | None) -> str:
    """U alone, as `shown` shows it."""
    return values.beside("0", u, resolution)[1]
