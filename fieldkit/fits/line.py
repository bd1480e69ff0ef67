"""A straight line y = a + b x by least squares: its slope, and everything a plot needs.

Checked against NIST StRD Norris, scipy.stats.linregress and numpy.polyfit. Twin: static/core/fits/line.js.
"""

from __future__ import annotations

import math
from typing import Any

from fieldkit.fits import columns, squares, words
from fieldkit.fits.answer import Answer, answer
from fieldkit.fits.columns import Refused

FEWEST = 4


def line(x: Any, y: Any, u: Any = None, show: words.Show = words.plain) -> Answer:
    """The line through `y` against `x`. `value` is the slope in y's unit per x's, `u` its standard uncertainty.

    Refuses: too-few (below 4), no-spread, and whatever columns.read refuses.
    """
    show = words.guarded(show)
    given = columns.read(("settings", "readings"), x, y, u, FEWEST)
    fit = given if isinstance(given, Refused) else squares.fit(given, 1)
    if isinstance(fit, Refused):
        return answer("line", {"value": None, "u": None} | squares.numbers(None, columns.count(y)), fit, str)
    slope, deviation = fit.local[1], math.sqrt(fit.variance([0.0, 1.0]))

    def says() -> str:
        return (
            f"The slope is {show('slope', slope, deviation)}, of a straight line through {fit.n} readings from "
            f"{show('x', fit.low, None)} to {show('x', fit.high, None)}; they scatter by "
            f"{show('y', fit.s, None)} about it (one standard deviation)." + words.few(fit.freedom)
        )

    return answer("line", {"value": slope, "u": deviation} | squares.numbers(fit, fit.n), None, says)
