"""The time at which a fitted fall of a current reaches a limit: what the exponential and the power law share.

Twin: static/core/fits/reach.js.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

from fieldkit.fits import columns, misfit, squares, words
from fieldkit.fits.answer import Answer, answer
from fieldkit.fits.columns import Columns, Refused
from fieldkit.fits.logs import e_to, ln
from fieldkit.fits.squares import Fit

FEWEST = 5
#: the slope must be this many of its standard uncertainties below zero
CLEAR_FALL = 3.0
#: how far from the first reading the answer is trusted, in spans of the readings
SPANS = 2.0


@dataclass(frozen=True)
class Fall:
    """A law of falling: what its fit is called, whether the line is against ln t, and its name in a sentence."""

    fit: str
    of_log: bool
    law: str


FALLS = {
    "exponential": Fall("exponential-time-to", False, "an exponential fall"),
    "power": Fall("power-time-to", True, "a fall as a power of time"),
}


def reach(fall: Fall, times: Any, currents: Any, limit: Any, u: Any, show: words.Show) -> Answer:
    """`value` is the time at which the fit is at `limit`, `u` its standard uncertainty; both also where it refuses,
    as far as they can be computed.

    Coefficients, covariance, s and residuals are those of ln I against t, or ln t. `span` is [first, last] time;
    `reach` is how many spans after the first reading the limit is met; `misfit` how much more the fit
    leaves than the readings scatter (misfit.ratio; about 1 where the law holds); `slope_u` the slope's standard
    uncertainty.

    Refuses: bad-limit, not-positive (a current, or a time of the power law, at zero or below: its places are told;
    who leaves readings out says so), too-few (below 5), no-spread, not-falling (the slope is not three of its standard
    uncertainties below zero), already-below, slows-down and quickens (a misfit above its limit), beyond-span
    (twice the span from the first reading).
    """
    show = words.guarded(show)
    empty: Answer = dict.fromkeys(("value", "u", "limit", "span", "reach", "misfit", "slope_u"))
    level = columns.positive("The limit", limit, "bad-limit")
    given = columns.read(("times", "currents"), times, currents, u, FEWEST)
    logged = given if isinstance(given, Refused) else _logs(fall, given)
    fit = logged if isinstance(logged, Refused) else squares.fit(logged, 1, "times")
    for bad in (level, given, logged, fit):
        if isinstance(bad, Refused):
            return answer(fall.fit, empty | squares.numbers(None, columns.count(currents)), bad, str)
    assert isinstance(level, float) and isinstance(given, Columns) and isinstance(logged, Columns)
    assert isinstance(fit, Fit)
    first, last = given.x[0], given.x[0]
    for t in given.x:
        first, last = (t if t < first else first), (t if t > last else last)
    numbers = empty | squares.numbers(fit, fit.n)
    numbers |= {"limit": level, "span": [first, last], "misfit": misfit.ratio(logged.x, fit)}
    numbers["slope_u"] = math.sqrt(fit.variance([0.0, 1.0]))
    if fit.local[1] < 0.0:
        numbers |= _met(fall, fit, ln(level), first, last)
    refused = _refused(numbers, fit, misfit.above(logged.x, fit), show)
    return answer(fall.fit, numbers, refused, lambda: _says(fall, numbers, fit, show))


def _logs(fall: Fall, given: Columns) -> Columns | Refused:
    """ln I with its uncertainty u / I, against t or ln t."""
    refused = columns.not_positive("currents", given.y)
    if refused is None and fall.of_log:
        refused = columns.not_positive("times", given.x)
    if refused is not None:
        return refused
    u = None if given.u is None else [v / y for v, y in zip(given.u, given.y, strict=True)]
    return Columns([ln(t) for t in given.x] if fall.of_log else given.x, [ln(y) for y in given.y], u)


def _met(fall: Fall, fit: Fit, level: float, first: float, last: float) -> Answer:
    """Where the falling line is at `level`."""
    slope = fit.local[1]
    z = (level - fit.local[0]) / slope
    deviation = math.sqrt(fit.variance([-1.0 / slope, -z / slope]))
    time = fit.centre + z
    if fall.of_log:
        time = e_to(time)
        deviation = time * deviation
    return {"value": time, "u": deviation, "reach": (time - first) / (last - first)}


def _refused(numbers: Answer, fit: Fit, slower: bool, show: words.Show) -> Refused | None:
    first, last = numbers["span"]
    time, limit = numbers["value"], show("y", numbers["limit"], None)
    if not -fit.local[1] > CLEAR_FALL * numbers["slope_u"]:
        return Refused("not-falling", "The current does not clearly fall over these readings. Read on.")
    if numbers["reach"] < 0.0:
        return Refused("already-below", f"By this fit the current was below {limit} before the first reading.")
    promised = f"By this law the current would be at {limit} at {show('x', time, None)}"
    if numbers["misfit"] is not None and numbers["misfit"] > misfit.limit(fit.n):
        if slower:
            return Refused("slows-down", f"{promised}, but the fall slows down against it: it may never get there.")
        return Refused("quickens", f"{promised}, but the fall quickens against it: it may be there much sooner.")
    if not numbers["reach"] <= SPANS:
        until = show("x", first + (time - first) / SPANS, None)
        return Refused(
            "beyond-span",
            f"{promised}: too far beyond the readings from {show('x', first, None)} to {show('x', last, None)} to be "
            f"trusted. Read on until about {until}.",
        )
    return None


def _says(fall: Fall, numbers: Answer, fit: Fit, show: words.Show) -> str:
    first, last = numbers["span"]
    scatter = words.brief(100.0 * (e_to(fit.s) - 1.0), 2)
    text = (
        f"At {show('y', numbers['limit'], None)} at {show('x', numbers['value'], numbers['u'])}, by {fall.law} through "
        f"{fit.n} readings from {show('x', first, None)} to {show('x', last, None)}; they scatter by {scatter} % about "
        "it."
    )
    if numbers["reach"] > 1.0:
        text += (
            " That is beyond the last reading: the uncertainty is that of the scatter, and says nothing about "
            "whether the current goes on falling so."
        )
    return text + words.few(fit.freedom)
