"""Uncertainty carried through a formula, to first order (JCGM 100, 5.1 and 5.2).

What a value's uncertainty is made of is kept as contributions: {source: signed c u in SI}. A source is one reading
(its errors are its own) or one instrument whose readings share their error; so a result that is made of results counts
each reading once, and what shares an error adds with its sign before it is squared.

    own = contributions(gradient.of, {"beam_voltage": {"12": 310.0}, "idle": {"17": 0.004}})
    standard(own)        u = sqrt(sum of squares), in SI

The twin is static/core/spread.js. Not here: derivatives (slopes.py), what a meter makes uncertain (fieldkit.run.worth).
"""

from __future__ import annotations

import math
from collections.abc import Mapping

from fieldkit.values import Fault

Contributions = dict[str, float]


def contributions(of: Mapping[str, float], worth: Mapping[str, Mapping[str, float]]) -> Contributions:
    """Contributions of a result: derivatives by name, and the contributions of each name; a name without any is exact.

    Sources come in the order in which they are first met.
    """
    found: Contributions = {}
    for name, slope in of.items():
        for source, part in worth.get(name, {}).items():
            d = slope * part
            found[source] = found[source] + d if source in found else d
    return found


def standard(found: Mapping[str, float]) -> float | Fault:
    """The standard uncertainty: square root of the sum of squares, from left to right; too large to tell is a Fault."""
    # scaled by the largest, so that small and large contributions neither vanish nor overflow
    most = 0.0
    for part in found.values():
        if part - part != 0.0:
            return Fault("overflow", "The uncertainty is too large.")
        most = abs(part) if abs(part) > most else most
    if most == 0.0:
        return 0.0
    total = 0.0
    for part in found.values():
        total = total + (part / most) * (part / most)
    u = most * math.sqrt(total)
    return u if u - u == 0.0 else Fault("overflow", "The uncertainty is too large.")
