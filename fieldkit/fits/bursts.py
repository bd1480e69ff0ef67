"""Bursts of a current above its slow trend, as of an ion pump during conditioning: how many, and do they get rarer?

The trend is a robust straight line of ln I against t, or against ln t where that leaves less (robust.trend); a reading
more than 5 robust standard deviations (1.4826 MAD) above it, or at the inhibit and more, belongs to a burst; such
readings side by side are one burst. Whether bursts get rarer is Laplace's test of their times (D. R. Cox and
P. A. W. Lewis 1966, from memory), whether they get smaller Kendall's of their peaks; both tell at two standard
deviations.

Checked against scipy.stats (median_abs_deviation, theilslopes, kendalltau, chi2) and a Monte Carlo. Twin:
static/core/fits/bursts.js.
"""

from __future__ import annotations

import math
from typing import Any

from fieldkit.fits import columns, robust, words
from fieldkit.fits.answer import Answer, answer
from fieldkit.fits.columns import Columns, Refused
from fieldkit.fits.logs import e_to, ln
from fieldkit.fits.squares import ROUNDING, max_size

FEWEST = 20
#: the trend looks at every pair
MOST = 500
#: robust standard deviations above the trend
HIGH = 5.0
#: bursts from which a change in their times or sizes is looked for
ENOUGH = 4
CLEAR = 2.0
#: with none seen, the rate below which a count of none has a chance of 5 %: -ln 0.05
NONE_SEEN = 2.995732273553991
HOUR = 3600.0


def bursts(times: Any, currents: Any, inhibit: Any = None, u: Any = None, show: words.Show = words.plain) -> Answer:
    """Counts bursts in `currents` at rising `times` in seconds; `inhibit` is the current at which the supply trips.

    `value` is bursts per hour and `u` its standard uncertainty, sqrt(count) / hours (None without bursts: then
    `at_most` is what 95 % confidence leaves). `bursts` are {"first", "last", "peak": places from 0, "current", "z"};
    `above` the places at the inhibit and more; `left_out` those at zero or below, which have no logarithm; `z` by
    reading; `trend` {"law", "slope", "intercept"} of ln I; `scale` the robust standard deviation of ln I, or what `u`
    makes of it, if that is more; `frequency` "rarer", "more often", "not clear" or "too few", by `frequency_z`;
    `height` "smaller", "larger", "not clear" or "too few", by `height_z`.

    Refuses: bad-inhibit, not-rising, mostly-zero, too-few (below 20 above zero), too-many (above 500), no-scatter,
    no-spread, and whatever columns.read refuses.
    """
    show = words.guarded(show)
    keys = ("value", "u", "at_most", "hours", "inhibit", "above", "left_out", "trend", "scale", "z", "bursts")
    numbers: Answer = {"n": columns.count(currents)} | dict.fromkeys(keys)
    numbers |= dict.fromkeys(("frequency", "frequency_z", "height", "height_z"))
    level = None if inhibit is None else columns.positive("The inhibit", inhibit, "bad-inhibit")
    given = columns.read(("times", "currents"), times, currents, u, 1)
    for refused in (level, given):
        if isinstance(refused, Refused):
            return answer("bursts", numbers, refused, str)
    assert isinstance(given, Columns)
    above = [i for i, y in enumerate(given.y) if isinstance(level, float) and y >= level]
    left_out = [i for i, y in enumerate(given.y) if y <= 0.0]
    numbers |= {"inhibit": level, "above": above, "left_out": left_out}
    refused = _unusable(given, left_out) or _scaled(numbers, given)
    if refused is None:
        _counted(numbers, given)
    return answer("bursts", numbers, refused, lambda: _says(numbers, given, show))


def _unusable(given: Columns, left_out: list[int]) -> Refused | None:
    back = [i for i in range(1, len(given.x)) if not given.x[i] > given.x[i - 1]]
    if back:
        return Refused("not-rising", f"Time {back[0] + 1} is not later than the one before it.", back)
    kept = len(given.y) - len(left_out)
    if len(left_out) > kept:
        return Refused(
            "mostly-zero", f"{len(left_out)} of {len(given.y)} readings are zero or below: there is no trend.", left_out
        )
    if kept < FEWEST:
        return Refused("too-few", f"Too few readings above zero: {kept}, and this needs at least {FEWEST}.")
    if kept > MOST:
        return Refused("too-many", f"Too many readings: {kept}, and this takes {MOST} at most. Give the last {MOST}.")
    spread = columns.spread("times", given.x)
    return spread if isinstance(spread, Refused) else None


def _scaled(numbers: Answer, given: Columns) -> Refused | None:
    """Puts trend, scale and z into `numbers`."""
    kept = [i for i, y in enumerate(given.y) if y > 0.0]
    y = [ln(given.y[i]) for i in kept]
    t = [given.x[i] for i in kept]
    law, slope, intercept, left = _trend("exponential", t, y)
    scale = robust.deviation(left)
    if t[0] > 0.0:
        other = _trend("power", [ln(v) for v in t], y)
        if robust.deviation(other[3]) < scale:
            law, slope, intercept, left = other
            scale = robust.deviation(left)
    if given.u is not None:
        meter = robust.median([given.u[i] / given.y[i] for i in kept])
        scale = meter if meter > scale else scale
    numbers |= {"trend": {"law": law, "slope": slope, "intercept": intercept}, "scale": scale}
    floor = ROUNDING * max_size(y)
    if scale <= floor:
        if max_size(left) > floor:
            return Refused(
                "no-scatter",
                "More than half of the readings lie exactly on the trend, so nothing tells how much a reading "
                "scatters. Give the standard uncertainty of the readings.",
            )
        left = [0.0] * len(left)
    z: list[float | None] = [None] * len(given.y)
    for i, r in zip(kept, left, strict=True):
        z[i] = r / scale if scale > floor else 0.0
    numbers["z"] = z
    return None


def _trend(law: str, x: list[float], y: list[float]) -> tuple[str, float, float, list[float]]:
    slope, intercept = robust.trend(x, y)
    return law, slope, intercept, [b - (intercept + slope * a) for a, b in zip(x, y, strict=True)]


def _counted(numbers: Answer, given: Columns) -> None:
    """Puts the bursts, their rate and its change into `numbers`."""
    z, n = numbers["z"], len(given.y)
    found: list[dict[str, Any]] = []
    before = False
    for i in range(n):
        high = i in numbers["above"] or (z[i] is not None and z[i] > HIGH)
        if high and not before:
            found.append({"first": i, "last": i, "peak": i, "current": given.y[i], "z": z[i]})
        elif high:
            one = found[-1]
            one["last"] = i
            if given.y[i] > one["current"]:
                one |= {"peak": i, "current": given.y[i], "z": z[i]}
        before = high
    span = given.x[-1] - given.x[0]
    hours, count = span / HOUR, len(found)
    numbers |= {"bursts": found, "hours": hours, "value": count / hours}
    if count == 0:
        numbers["at_most"] = NONE_SEEN / hours
    else:
        numbers["u"] = math.sqrt(count) / hours
    numbers |= {"frequency": "too few", "height": "too few"}
    if count < ENOUGH:
        return
    middle = 0.0
    for one in found:
        middle += (given.x[one["peak"]] - given.x[0]) / span
    numbers["frequency_z"] = (middle / count - 0.5) * math.sqrt(12.0 * count)
    numbers["height_z"] = _kendall([one["current"] for one in found])
    numbers["frequency"] = _word(numbers["frequency_z"], "rarer", "more often")
    numbers["height"] = _word(numbers["height_z"], "smaller", "larger")


def _kendall(x: list[float]) -> float:
    """The count of rising pairs less that of falling ones, in its standard deviations if the order were by chance."""
    score = 0
    for j in range(1, len(x)):
        for i in range(j):
            score += (x[j] > x[i]) - (x[j] < x[i])
    n = float(len(x))
    return score / math.sqrt(n * (n - 1.0) * (2.0 * n + 5.0) / 18.0)


def _word(z: float, less: str, more: str) -> str:
    if z < -CLEAR:
        return less
    return more if z > CLEAR else "not clear"


#: what is said of the change of the bursts
_FREQUENCY = {
    "rarer": "They get rarer.",
    "more often": "They come more often.",
    "not clear": "Whether they get rarer is not clear yet.",
    "too few": "",
}
_HEIGHT = {
    "smaller": " They get smaller.",
    "larger": " They get larger.",
    "not clear": " Whether they get smaller is not clear yet.",
    "too few": "",
}


def _says(numbers: Answer, given: Columns, show: words.Show) -> str:
    count, hours = len(numbers["bursts"]), words.brief(numbers["hours"], 3)
    high = words.brief(100.0 * (e_to(HIGH * numbers["scale"]) - 1.0), 2)
    rule = f"readings more than {high} % above the trend ({HIGH:.0f} robust standard deviations)"
    if numbers["inhibit"] is not None:
        rule += f", or at the inhibit of {show('y', numbers['inhibit'], None)}"
    if count == 0:
        text = (
            f"No burst in {hours} h, by {len(given.y)} readings: with 95 % confidence fewer than "
            f"{words.brief(numbers['at_most'], 2)} per hour."
        )
    else:
        noun = "burst" if count == 1 else "bursts"
        text = f"{count} {noun} in {hours} h; per hour: {words.plain('rate', numbers['value'], numbers['u'])}."
        text += f" {_FREQUENCY[numbers['frequency']]}".rstrip() + _HEIGHT[numbers["height"]]
    text += f" Counted are {rule}. What happens between two readings is not seen."
    if numbers["left_out"]:
        text += f" {len(numbers['left_out'])} readings at zero or below are left out of the trend."
    return text
