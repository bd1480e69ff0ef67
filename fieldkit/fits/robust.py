"""Medians, and what is built of them: a scale and a straight line that a few outliers do not move.

Checked against scipy.stats.median_abs_deviation and theilslopes. Twin: static/core/fits/robust.js.
"""

from __future__ import annotations

#: a normal distribution's standard deviation by its median absolute deviation
MAD_TO_SIGMA = 1.4826


def median(x: list[float]) -> float:
    """The middle one, or the average of the two in the middle; `x` has one at least."""
    order = sorted(x)
    half = len(order) // 2
    if len(order) % 2 == 1:
        return order[half] + 0.0
    return (order[half - 1] + order[half]) / 2.0 + 0.0


def deviation(x: list[float]) -> float:
    """1.4826 times the median distance from the median."""
    middle = median(x)
    return MAD_TO_SIGMA * median([abs(v - middle) for v in x])


def trend(x: list[float], y: list[float]) -> tuple[float, float]:
    """Slope and intercept: the median slope of all pairs (H. Theil 1950, P. K. Sen 1968, from memory), and the median
    of what it leaves. `x` rises."""
    slopes = []
    for j in range(1, len(x)):
        for i in range(j):
            slopes.append((y[j] - y[i]) / (x[j] - x[i]))
    slope = median(slopes)
    return slope, median([b - slope * a for a, b in zip(x, y, strict=True)])
