"""The setting at which readings fell by a stated part from their plateau: the knee of emission by heater voltage.

The plateau's reference is the median of the readings at the highest settings (three of them, or as many as are asked
for): a single bad one does not move it. The crossing is a straight line between the two readings on either side of it;
nothing is extrapolated. The uncertainty is that of the readings, through the slope there: of both readings, and of the
reference, a median of k readings having sqrt(pi / 2k) of the uncertainty of one. Readings are taken as independent,
which is on the safe side for an error that all share. That of the setting's own meter comes on top.

Checked against scipy's brentq on a model of emission, the uncertainties package and a Monte Carlo. What part of a fall
is a knee, and how long to hold each setting, is common practice without a source. Twin:
static/core/fits/knee_crossing.js.
"""

from __future__ import annotations

import math
from typing import Any

from fieldkit.fits import columns, robust, words
from fieldkit.fits.answer import Answer, answer
from fieldkit.fits.columns import Columns, Refused

#: readings at the highest settings whose median is the reference
PLATEAU = 3
HALF_PI = 1.5707963267948966


def knee_crossing(
    settings: Any,
    readings: Any,
    fall: Any,
    u: Any = None,
    plateau: Any = PLATEAU,
    hold: Any = None,
    show: words.Show = words.plain,
) -> Answer:
    """The highest setting at which `readings` have fallen by the part `fall` (0.05 for 5 %) from their plateau.

    `value` is the setting, `u` its standard uncertainty (None without one for the readings); `reference` the plateau,
    `level` the reading looked for, `between` the two settings, `step` their distance, `slope` reading by setting there,
    `fallen` the greatest fall seen, `plateau` how many readings the reference is of, `hold` the seconds at each
    setting as given: a fast sweep makes the knee look lower than it is, so the sentence tells it.

    Refuses: bad-fall, too-few (below the plateau and one), no-plateau (its readings spread over more than half the fall
    looked for, or are not above zero), no-crossing, equal-settings, rises-again, and whatever columns.read refuses.
    """
    show = words.guarded(show)
    keys = ("value", "u", "reference", "level", "between", "step", "slope", "fallen", "fall", "plateau", "hold")
    numbers: Answer = {"n": columns.count(readings)} | dict.fromkeys(keys)
    part = _part(fall)
    count = columns.whole("The number of readings of the plateau", plateau, PLATEAU)
    held = None if hold is None else columns.positive("The holding time", hold, "bad-hold")
    given = columns.read(("settings", "readings"), settings, readings, u, (count if isinstance(count, int) else 0) + 1)
    for refused in (part, count, held, given):
        if isinstance(refused, Refused):
            return answer("knee-crossing", numbers, refused, str)
    assert isinstance(part, float) and isinstance(count, int) and isinstance(given, Columns)
    numbers |= {"fall": part, "plateau": count, "hold": held}
    order = sorted(range(len(given.x)), key=lambda i: (-given.x[i], i))
    top = [given.y[i] for i in order[:count]]
    reference = robust.median(top)
    numbers |= {"reference": reference, "level": (1.0 - part) * reference}
    refused = _no_plateau(top, reference, part)
    if refused is None:
        numbers["fallen"] = 1.0 - _least(given.y) / reference
        refused = _cross(numbers, given, order, show)
    return answer("knee-crossing", numbers, refused, lambda: _says(numbers, show))


def _part(fall: Any) -> float | Refused:
    part = columns.parameter("The fall looked for", fall)
    if isinstance(part, Refused):
        return Refused("bad-fall", part.says)
    if 0.0 < part < 1.0:
        return part
    return Refused("bad-fall", "The fall looked for is a part between 0 and 1: 0.05 for 5 %.")


def _least(y: list[float]) -> float:
    found = y[0]
    for value in y:
        found = value if value < found else found
    return found


def _no_plateau(top: list[float], reference: float, part: float) -> Refused | None:
    if reference <= 0.0:
        return Refused("no-plateau", "The readings at the highest settings are not above zero.")
    low, high = _least(top), -_least([-v for v in top])
    if high - low > part / 2.0 * reference:
        return Refused(
            "no-plateau",
            f"No plateau: the {len(top)} readings at the highest settings differ by "
            f"{words.brief(100.0 * (high - low) / reference, 2)} %, more than half of the fall looked for. "
            "Start from a higher setting, or wait until the reading has settled.",
        )
    return None


def _cross(numbers: Answer, given: Columns, order: list[int], show: words.Show) -> Refused | None:
    """Puts the first crossing from the plateau down into `numbers`."""
    level = numbers["level"]
    after = next((k for k, i in enumerate(order) if given.y[i] <= level), None)
    if after is None:
        return Refused(
            "no-crossing",
            f"No knee found: the greatest fall seen is {words.brief(100.0 * numbers['fallen'], 2)} %, of "
            f"{_percent(numbers['fall'])} looked for.",
        )
    i, j = order[after - 1], order[after]
    high, low, above, below = given.x[i], given.x[j], given.y[i], given.y[j]
    numbers |= {"between": [low, high], "step": high - low}
    if high == low:
        return Refused(
            "equal-settings",
            f"The readings on both sides of the fall were taken at one setting, {show('x', low, None)}.",
            [i, j],
        )
    slope = (above - below) / (high - low)
    share = (above - level) / (above - below)
    numbers |= {"slope": slope, "value": high + share * (low - high)}
    if given.u is not None:
        parts = (
            (1.0 - share) * given.u[i],
            share * given.u[j],
            (1.0 - numbers["fall"]) * _of_reference(numbers, given, order),
        )
        numbers["u"] = math.sqrt(parts[0] * parts[0] + parts[1] * parts[1] + parts[2] * parts[2]) / slope
    again = [k for k in order[after + 1 :] if given.y[k] > level + (0.0 if given.u is None else words.K * given.u[k])]
    if again:
        return Refused(
            "rises-again",
            f"Below {show('x', low, None)} the reading rises again over the level looked for: there is more than one "
            "crossing. Wait at each setting until the reading has settled.",
            again,
        )
    return None


def _of_reference(numbers: Answer, given: Columns, order: list[int]) -> float:
    """The standard uncertainty of the plateau's median: of the worst of its readings."""
    count = numbers["plateau"]
    worst = -_least([-given.u[i] for i in order[:count]]) if given.u is not None else 0.0
    return worst * math.sqrt(HALF_PI / count)


def _percent(part: float) -> str:
    return f"{words.brief(100.0 * part, 3)} %"


def _says(numbers: Answer, show: words.Show) -> str:
    low, high = numbers["between"]
    hold = numbers["hold"]
    held = (
        "How long each setting was held is not told: a fast sweep makes the knee look lower than it is."
        if hold is None
        else f"Each setting was held {words.brief(hold)} s; a faster sweep makes the knee look lower than it is."
    )
    known = "" if numbers["u"] is not None else " The readings came without an uncertainty, so this has none."
    return (
        f"Down by {_percent(numbers['fall'])} at {show('x', numbers['value'], numbers['u'])}, on a straight line "
        f"between {show('x', high, None)} and {show('x', low, None)}. The plateau is "
        f"{show('y', numbers['reference'], None)}, the median of {numbers['plateau']} readings at the highest settings."
        f"{known} {held}"
    )
