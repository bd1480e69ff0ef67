"""Do residuals run? Too few changes of sign along the settings mean that the curve has another shape than the fit.

Runs of equal sign among n1 positive and n2 negative ones in random order have mean 2 n1 n2 / n + 1 and variance
2 n1 n2 (2 n1 n2 - n) / (n**2 (n - 1)) (A. Wald, J. Wolfowitz, Ann. Math. Stat. 11 (1940) 147, from memory).
Twin: static/core/fits/runs.js.
"""

from __future__ import annotations

import itertools
import math

#: standard deviations below the mean from which the residuals run
TOO_FEW = -2.0


def z(x: list[float], residuals: list[float], floor: float) -> float | None:
    """How many standard deviations the count of runs is from its mean, along rising `x`.

    Residuals up to `floor` are rounding, and left out; None where there is nothing to count.
    """
    order = sorted(range(len(x)), key=lambda i: (x[i], i))
    signs = [residuals[i] > 0.0 for i in order if abs(residuals[i]) > floor]
    n = len(signs)
    above = sum(signs)
    pairs = 2.0 * above * (n - above)
    if n < 2 or pairs * (pairs - n) <= 0.0:
        return None
    runs = 1
    for before, now in itertools.pairwise(signs):
        runs += before != now
    deviation = math.sqrt(pairs * (pairs - n) / (float(n) * n * (n - 1)))
    return (runs - (pairs / n + 1.0)) / deviation


def run(x: list[float], residuals: list[float], floor: float) -> bool:
    found = z(x, residuals, floor)
    return found is not None and found < TOO_FEW
