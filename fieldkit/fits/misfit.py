"""Does a fit leave more than the readings scatter? Then the readings follow another law.

The scatter without any law is told by neighbours: each reading less the straight line between the two beside it, scaled
to the variance of one (T. Gasser, L. Sroka, C. Jennen-Steinmetz, Biometrika 73 (1986) 625, from memory). The ratio of
the fit's s**2 to that is about 1 where the law holds. Of readings that do follow a straight line about 1 in 200 is
above the limit, 1 + 42 / n: own simulation, n from 5 to 40 (tests/fits/test_time_to.py).
Twin: static/core/fits/misfit.js.
"""

from __future__ import annotations

from fieldkit.fits.squares import Fit


def ratio(x: list[float], fit: Fit) -> float | None:
    """The variance about the fit by the variance between neighbours; None where the fit leaves nothing."""
    if fit.s == 0.0:
        return None
    order = sorted(range(fit.n), key=lambda i: (x[i], i))
    r, w = fit.residuals, fit.weights
    total, count = 0.0, 0
    for k in range(1, fit.n - 1):
        i, j, m = order[k - 1], order[k], order[k + 1]
        if not x[m] > x[i]:
            continue
        a = (x[m] - x[j]) / (x[m] - x[i])
        b = 1.0 - a
        off = a * r[i] + b * r[m] - r[j]
        total += off * off / (a * a / w[i] + b * b / w[m] + 1.0 / w[j])
        count += 1
    if count == 0:
        return None
    least = fit.floor * fit.floor
    scatter = total / count if total / count > least else least
    return fit.s * fit.s / scatter


def limit(n: int) -> float:
    return 1.0 + 42.0 / n


def above(x: list[float], fit: Fit) -> bool:
    """Whether the readings end above the fit: the last three, on average."""
    order = sorted(range(fit.n), key=lambda i: (x[i], i))
    total = 0.0
    for i in order[-3:]:
        total += fit.residuals[i]
    return total > 0.0
