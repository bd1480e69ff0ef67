"""Where a sweep has its minimum: the vertex of a parabola, as of body current against magnet current.

x* = -b / 2c; its uncertainty by the gradient on the covariance. The curve of a real tube is a parabola near its minimum
only, so the fit refuses where the readings do not show one: rules of own judgement, each with its code.

Checked against NIST StRD Pontius, numpy.polyfit, the uncertainties package and a Monte Carlo; runs against the count
of all orders. Twin: static/core/fits/parabola_vertex.js.
"""

from __future__ import annotations

import math
from typing import Any

from fieldkit.fits import columns, runs, squares, words
from fieldkit.fits.answer import Answer, answer
from fieldkit.fits.columns import Columns, Refused
from fieldkit.fits.logs import ratio
from fieldkit.fits.squares import Fit

#: readings on each side of the minimum
BESIDE = 5
FEWEST = 2 * BESIDE
#: the vertex must be known to this part of a step
PART_OF_STEP = 3.0

Window = tuple[float | None, float | None]


def parabola_vertex(
    x: Any, y: Any, u: Any = None, low: Any = None, high: Any = None, show: words.Show = words.plain
) -> Answer:
    """The setting `x` at which `y` is least, and the advised one, which is inside the permitted window low to high.

    `value` is the vertex, `advised` the same clipped to the window (None where refused), `clipped` "low", "high" or
    None; `minimum` the fitted y there; `bottom` the interval of the sweep whose fitted y is below the minimum + 2 s;
    `step` the average step; `beside` how many readings lie below and above the vertex; `runs` their z.

    Refuses: bad-window, too-few (below 10), no-spread, not-a-minimum, vertex-outside, few-beside, too-uncertain,
    residuals-run, and whatever columns.read refuses.
    """
    show = words.guarded(show)
    numbers: Answer = dict.fromkeys(
        ("value", "u", "advised", "clipped", "minimum", "u_minimum", "bottom", "swept", "step", "beside", "runs")
    )
    window = _window(low, high)
    given = columns.read(("settings", "readings"), x, y, u, FEWEST)
    fit = given if isinstance(given, Refused) else squares.fit(given, 2)
    numbers |= {"window": None if isinstance(window, Refused) else list(window)}
    if isinstance(given, Refused) or isinstance(fit, Refused) or isinstance(window, Refused):
        bad = next(r for r in (window, given, fit) if isinstance(r, Refused))
        return answer("parabola-vertex", numbers | squares.numbers(None, columns.count(y)), bad, str)
    numbers |= squares.numbers(fit, fit.n)
    numbers |= {"swept": [fit.low, fit.high], "step": _step(given.x, fit)}
    numbers |= {"runs": runs.z(given.x, fit.residuals, fit.floor)}
    bend = fit.local[2]
    if not bend > 0.0:
        flat = Refused(
            "not-a-minimum",
            "No minimum found: the readings do not bend upward over the sweep. Sweep a wider range, or look for what "
            "else changed.",
        )
        return answer("parabola-vertex", numbers, flat, str)
    z = -fit.local[1] / (2.0 * bend)
    numbers |= _found(given, fit, z, window)
    refused = _refused(numbers, given, fit, show)
    if refused is not None:
        numbers |= {"advised": None, "clipped": None}
    return answer("parabola-vertex", numbers, refused, lambda: _says(numbers, fit, show))


def _window(low: Any, high: Any) -> Window | Refused:
    least = None if low is None else columns.parameter("The lower end of the permitted range", low)
    most = None if high is None else columns.parameter("The upper end of the permitted range", high)
    if isinstance(least, Refused):
        return Refused("bad-window", least.says)
    if isinstance(most, Refused):
        return Refused("bad-window", most.says)
    if least is not None and most is not None and least >= most:
        return Refused("bad-window", "The lower end of the permitted range is not below its upper end.")
    return least, most


def _step(x: list[float], fit: Fit) -> float:
    """The average step between different settings."""
    return (fit.high - fit.low) / (len(set(x)) - 1)


def _found(given: Columns, fit: Fit, z: float, window: Window) -> Answer:
    """The vertex at `z` from the centre, and what belongs to it."""
    bend, vertex = fit.local[2], fit.centre + z
    low, high = window
    advised, clipped = vertex, None
    if low is not None and vertex < low:
        advised, clipped = low, "low"
    elif high is not None and vertex > high:
        advised, clipped = high, "high"
    half = math.sqrt(ratio(2.0 * fit.s, bend))
    left, right = vertex - half, vertex + half
    return {
        "value": vertex,
        "u": math.sqrt(fit.variance([0.0, -1.0 / (2.0 * bend), -z / bend])),
        "advised": advised,
        "clipped": clipped,
        "minimum": fit.at(z),
        "u_minimum": math.sqrt(fit.variance([1.0, z, z * z])),
        "bottom": [left if left > fit.low else fit.low, right if right < fit.high else fit.high],
        "beside": [sum(v < vertex for v in given.x), sum(v > vertex for v in given.x)],
    }


def _refused(numbers: Answer, given: Columns, fit: Fit, show: words.Show) -> Refused | None:
    vertex, step = numbers["value"], numbers["step"]
    below, above = numbers["beside"]
    if vertex <= fit.low or vertex >= fit.high:
        side = "lower" if vertex <= fit.low else "higher"
        return Refused(
            "vertex-outside",
            f"No minimum found: it seems to lie at {side} settings than the sweep from {show('x', fit.low, None)} to "
            f"{show('x', fit.high, None)}. Sweep further that way, inside the permitted range.",
        )
    if below < BESIDE or above < BESIDE:
        return Refused(
            "few-beside",
            f"No minimum found: {below} readings lie below it and {above} above; it needs {BESIDE} on each side.",
        )
    if not numbers["u"] * PART_OF_STEP < step:
        return Refused(
            "too-uncertain",
            f"No minimum found: its standard uncertainty, {show('x', numbers['u'], None)}, is not below a third of the "
            f"step, {show('x', step, None)}. The bottom is too flat for the scatter of the readings.",
        )
    if runs.run(given.x, fit.residuals, fit.floor):
        return Refused(
            "residuals-run",
            "No minimum found: the readings have another shape than a parabola, for they lie above and below it in "
            "long runs. Sweep closer around the lowest reading.",
        )
    return None


def _says(numbers: Answer, fit: Fit, show: words.Show) -> str:
    left, right = numbers["bottom"]
    text = f"The minimum is at {show('x', numbers['value'], numbers['u'])}, by a parabola through {fit.n} readings."
    if numbers["clipped"] is not None:
        end = "lower" if numbers["clipped"] == "low" else "upper"
        text += (
            f" That is outside the permitted range: the advice is its {end} end, {show('x', numbers['advised'], None)}."
        )
    return (
        text
        + f" From {show('x', left, None)} to {show('x', right, None)} the fit is within two standard deviations of "
        f"the scatter ({show('y', fit.s, None)}) above its lowest. The uncertainty holds as far as the curve is a "
        f"parabola, between {show('x', fit.low, None)} and {show('x', fit.high, None)} only." + words.few(fit.freedom)
    )
