"""Least squares for a straight line or a parabola, by orthogonal polynomials, with everything that follows from it.

Settings are centred and scaled before any square, and each polynomial is orthogonal to those before it (G. E. Forsythe,
J. SIAM 5 (1957) 74, from memory), so nothing is inverted and NIST's Norris and Pontius come out to 1e-9 and better.

Uncertainty. Without one for the readings, their scatter about the fit tells it: s**2 = sum w r**2 / (n - p). With one,
readings are weighted by 1/u**2 (weights of average 1), and the variance of a reading is the larger of s**2 and what
the given uncertainties say: a scatter smaller than the meter's uncertainty does not make the meter better, and one
that is larger is believed. Readings are taken as independent.
Twin: static/core/fits/squares.js.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

from fieldkit.fits import words
from fieldkit.fits.columns import Columns, Refused, spread

#: squared length of a polynomial, as part of n, below which the settings do not determine it
NO_LENGTH = 1e-24
#: residuals below this part of the largest reading are rounding
ROUNDING = 1e-13


@dataclass(frozen=True)
class Fit:
    """A fitted polynomial in z = x - centre, and in x; all coefficients constant first."""

    n: int
    freedom: int
    low: float
    high: float
    centre: float
    local: list[float]
    #: of each orthogonal polynomial: the variance of its coefficient, and itself in z
    parts: list[tuple[float, list[float]]]
    s: float
    u_reading: float | None
    residuals: list[float]
    weights: list[float]
    #: a residual below this is rounding
    floor: float

    def variance(self, gradient: list[float]) -> float:
        """Of a quantity with this gradient by the coefficients in z."""
        total = 0.0
        for variance, part in self.parts:
            slope = 0.0
            for g, c in zip(gradient, part, strict=True):
                slope += g * c
            total += variance * (slope * slope)
        return total

    def at(self, z: float) -> float:
        value = 0.0
        for c in reversed(self.local):
            value = value * z + c
        return value


def fit(columns: Columns, degree: int, names: str = "settings") -> Fit | Refused:
    """The polynomial of degree 1 or 2 through `columns`; refused where the settings do not determine it."""
    n, x = len(columns.x), columns.x
    ends = spread(names, x)
    if isinstance(ends, Refused):
        return ends
    weights, u_reading = weigh(columns.u, n)
    centre = total(x) / n
    reach = max_size([v - centre for v in x])
    basis = _basis([(v - centre) / reach for v in x], weights, degree, NO_LENGTH * n)
    if basis is None:
        return Refused("no-spread", f"There are too few different {names} for this fit: it needs {degree + 1}.")
    left = list(columns.y)
    found: list[float] = []
    for values, length, _ in basis:
        size = total([w * r * v for w, r, v in zip(weights, left, values, strict=True)]) / length
        left = [r - size * v for r, v in zip(left, values, strict=True)]
        found.append(size)
    freedom = n - degree - 1
    floor = ROUNDING * max_size(columns.y)
    s_squared = total([w * r * r for w, r in zip(weights, left, strict=True)]) / freedom
    s_squared = s_squared if s_squared > floor * floor else 0.0
    variance = s_squared
    if u_reading is not None and u_reading * u_reading > variance:
        variance = u_reading * u_reading
    in_z = [_by_reach(polynomial, reach) for _, _, polynomial in basis]
    local = [0.0] * (degree + 1)
    for size, part in zip(found, in_z, strict=True):
        local = [a + size * b for a, b in zip(local, part, strict=True)]
    parts = [(variance / length, part) for (_, length, _), part in zip(basis, in_z, strict=True)]
    return Fit(n, freedom, *ends, centre, local, parts, math.sqrt(s_squared), u_reading, left, weights, floor)


def numbers(found: Fit | None, n: int) -> dict[str, Any]:
    """What every least-squares fit tells; nulls where there is none."""
    if found is None:
        keys = ("coefficients", "covariance", "s", "u_reading", "residuals")
        return {"n": n, "freedom": None, "few": None} | dict.fromkeys(keys)
    moved = [(variance, _moved(part, found.centre)) for variance, part in found.parts]
    places = range(len(moved))
    covariance = [[total([v * p[i] * p[j] for v, p in moved]) for j in places] for i in places]
    return {
        "n": n,
        "freedom": found.freedom,
        "few": found.freedom < words.FEW,
        "coefficients": _moved(found.local, found.centre),
        "covariance": covariance,
        "s": found.s,
        "u_reading": found.u_reading,
        "residuals": found.residuals,
    }


def max_size(x: list[float]) -> float:
    """The greatest magnitude."""
    found = 0.0
    for value in x:
        found = abs(value) if abs(value) > found else found
    return found


def total(x: list[float]) -> float:
    """The sum from left to right; the built-in one rounds otherwise."""
    found = 0.0
    for value in x:
        found += value
    return found


def weigh(u: list[float] | None, n: int) -> tuple[list[float], float | None]:
    """Weights of average 1, and the uncertainty of a reading of weight 1."""
    if u is None:
        return [1.0] * n, None
    shared = n / total([1.0 / (v * v) for v in u])
    return [shared / (v * v) for v in u], math.sqrt(shared)


Basis = list[tuple[list[float], float, list[float]]]


def _basis(t: list[float], weights: list[float], degree: int, least: float) -> Basis | None:
    """Orthogonal polynomials at `t`: values, squared length, coefficients in t padded to the degree."""
    ones = [1.0] * len(t)
    length = total(weights)
    first = total([w * v for w, v in zip(weights, t, strict=True)]) / length
    line = [v - first for v in t]
    squared = total([w * v * v for w, v in zip(weights, line, strict=True)])
    if squared <= least:
        return None
    rest = [0.0] * (degree - 1)
    basis = [(ones, length, [1.0, 0.0, *rest]), (line, squared, [-first, 1.0, *rest])]
    if degree == 1:
        return basis
    second = total([w * v * v * q for w, v, q in zip(weights, line, t, strict=True)]) / squared
    back = squared / length
    bow = [(q - second) * v - back for v, q in zip(line, t, strict=True)]
    bowed = total([w * v * v for w, v in zip(weights, bow, strict=True)])
    if bowed <= least:
        return None
    return [*basis, (bow, bowed, [first * second - back, -(first + second), 1.0])]


def _by_reach(part: list[float], reach: float) -> list[float]:
    """A polynomial in t = z / reach as one in z."""
    found, power = [], 1.0
    for c in part:
        found.append(c / power)
        power = power * reach
    return found


def _moved(part: list[float], centre: float) -> list[float]:
    """A polynomial in z = x - centre as one in x."""
    if len(part) == 2:
        return [part[0] - part[1] * centre, part[1]]
    a, b, c = part
    return [(c * centre - b) * centre + a, b - 2.0 * c * centre, c]
