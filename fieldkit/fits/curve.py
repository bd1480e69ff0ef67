"""A formula fitted to readings: the parameters that bring it closest, by least squares, and how sure they are.

Levenberg and Marquardt's way (SIAM J. 11 (1963) 431) with J. J. More's scaling (1978; both from memory): steps are
short where the formula bends much, and become Gauss and Newton's near the end. Derivatives are those of
formula.slopes, each step a least squares by reflections (triangle.py). It is over when the residuals stand square on
everything that the parameters can do, to 1e-8 of their scatter (D. M. Bates, D. G. Watts 1981, from memory).

Checked against NIST StRD Misra1a, BoxBOD, DanWood, MGH17 and Chwirut2. Uncertainty as in squares.py, to first order: it
says nothing about whether the formula is the right one. Twin: static/core/fits/curve.js.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from fieldkit.fits import columns, squares, triangle, words
from fieldkit.fits.answer import Answer, answer
from fieldkit.fits.columns import Columns, Refused
from fieldkit.fits.triangle import Triangle
from fieldkit.formula import slopes
from fieldkit.values import Fault

#: parameters at most
MOST = 8
#: times that the formula is tried at all readings
TRIES = 1500
#: how square the residuals must stand, and how square is enough where no step comes closer
CLOSE, ENOUGH = 1e-8, 1e-4
#: a step below this part of the readings is none
NO_STEP = 1e-15
#: a parameter of which less than this part is left beside the others is not told from them
NOT_TOLD = 1e-10
#: damping: at the start, at the least, and where there is no step any more
DAMPING, LEAST, NO_MORE = 1e-2, 1e-15, 1e30

_NAME = re.compile("[a-z][a-z0-9_]{0,59}")
Names = dict[str, Any]


@dataclass(frozen=True)
class Place:
    """The formula at some parameters: what is left of each reading, how that changes, the sum of squares; weighted."""

    at: list[float]
    left: list[float]
    rows: list[list[float]]
    size: float


@dataclass(frozen=True)
class Found:
    """Where the search ended: the last place, its triangle (of scaled columns) and scales, and steps taken."""

    place: Place
    three: Triangle
    scales: list[float]
    steps: int
    refused: Refused | None


def curve(
    x: Any,
    y: Any,
    tree: Any,
    along: Any,
    start: Any,
    u: Any = None,
    known: Any = None,
    formulas: Any = None,
    show: words.Show = words.plain,
) -> Answer:
    """The formula `tree` of the setting named `along` and the parameters named in `start`, through `y` against `x`.

    `start` is [[name, starting value], ...], at most 8; `known` gives all other names, `formulas` the formulas of the
    library that the tree calls. Everything is in SI. `coefficients`, `deviations` (standard uncertainties) and
    `covariance` are in the order of `names`; `value` and `u` are those of the first. In the sentence a parameter's
    number is shown by show("parameter NAME", value, u).

    Refuses: bad-parameter, too-few (two more readings than parameters), formula-fault (no answer, or a slope without
    bound, at the starting values), no-convergence, singular (a parameter is not told from the others), overflow, and
    whatever columns.read refuses.
    """
    show = words.guarded(show)
    named = _parameters(along, start)
    given = columns.read(("settings", "readings"), x, y, u, 1 if isinstance(named, Refused) else len(named) + 2)
    for bad in (named, given):
        if isinstance(bad, Refused):
            return answer("curve", _numbers(columns.count(y)), bad, str)
    assert not isinstance(named, Refused) and isinstance(given, Columns)
    names = list(named)
    weights, u_reading = squares.weigh(given.u, len(given.y))
    look = _look(tree, along, names, known, formulas, given, weights)
    first = look(list(named.values()))
    if isinstance(first, Refused):
        return answer("curve", _numbers(len(given.y)) | {"names": names}, first, str)
    found = _search(look, first, given, weights)
    numbers = _numbers(len(given.y)) | _told(found, names, given, weights, u_reading)
    return answer("curve", numbers, _refused(found, names, numbers), lambda: _says(numbers, given, show))


def _parameters(along: Any, start: Any) -> dict[str, float] | Refused:
    """Starting values by name."""
    if not isinstance(along, str) or not _NAME.fullmatch(along):
        return Refused("bad-parameter", "The setting has no name that a formula can use.")
    if not isinstance(start, list | tuple) or not 1 <= len(start) <= MOST:
        return Refused("bad-parameter", f"The parameters are not a list of 1 to {MOST} names with starting values.")
    found: dict[str, float] = {}
    for k, one in enumerate(start):
        if not isinstance(one, list | tuple) or len(one) != 2:
            return Refused("bad-parameter", f"Parameter {k + 1} is not a name with a starting value.")
        name = one[0]
        if not isinstance(name, str) or not _NAME.fullmatch(name) or name == along or name in found:
            return Refused("bad-parameter", f"Parameter {k + 1} has no name of its own that a formula can use.")
        value = columns.parameter(f"The starting value of {name}", one[1])
        if isinstance(value, Refused):
            return Refused("bad-parameter", value.says)
        found[name] = value
    return found


Look = Callable[[list[float]], "Place | Refused"]


def _look(
    tree: Any, along: str, names: list[str], known: Any, formulas: Any, given: Columns, weights: list[float]
) -> Look:
    """The formula at all readings, for parameters; Refused where it has no answer at one of them."""
    ready = slopes.prepare(tree, formulas if isinstance(formulas, dict) else None)
    others: Names = known if isinstance(known, dict) else {}
    roots = [math.sqrt(w) for w in weights]

    def look(at: list[float]) -> Place | Refused:
        meant: Names = {**others, **dict(zip(names, at, strict=True))}
        left: list[float] = []
        rows: list[list[float]] = []
        size = 0.0
        for i, root in enumerate(roots):
            meant[along] = given.x[i]
            found = ready.gradient(meant)
            if isinstance(found.of, Fault):
                return _no_answer(i, found.of.says)
            if type(found.value) is not float:
                return _no_answer(i, "It gives no number.")
            left.append(root * (given.y[i] - found.value))
            rows.append([root * found.of.get(name, 0.0) for name in names])
            size += left[i] * left[i]
        spread = size
        for row in rows:
            for d in row:
                spread += d * d
        if spread - spread != 0.0:
            return Refused("overflow", "With these starting values a number in this fit is too large to compute with.")
        return Place(at, left, rows, size)

    return look


def _no_answer(i: int, says: str) -> Refused:
    return Refused(
        "formula-fault", f"With these starting values the formula has no answer at reading {i + 1}: {says}", [i]
    )


def _search(look: Look, place: Place, given: Columns, weights: list[float]) -> Found:
    n, m = len(place.at), len(given.y)
    floor = squares.ROUNDING * squares.max_size(given.y)
    reach = math.sqrt(squares.total([w * v * v for w, v in zip(weights, given.y, strict=True)]))
    scales, damping, steps, tries = [0.0] * n, DAMPING, 0, 0
    while True:
        scales = [_longer(scale, place.rows, j) for j, scale in enumerate(scales)]
        rows = [[d / s if s > 0.0 else 0.0 for d, s in zip(row, scales, strict=True)] for row in place.rows]
        three = triangle.reduced(rows, place.left)
        told = [q * q for q, new in zip(three.right, three.new(), strict=True) if new >= NOT_TOLD]
        square = squares.total(told) * (m - n)
        size = place.size if place.size > m * floor * floor else 0.0
        if size == 0.0 or square <= CLOSE * CLOSE * n * size:
            return Found(place, three, scales, steps, None)
        while True:
            if tries == TRIES:
                return Found(place, three, scales, steps, _astray(f"after {tries} tries it is not at its end"))
            change, foreseen = triangle.damped(three, damping)
            if squares.max_size(change) <= NO_STEP * reach or damping > NO_MORE:
                over = square <= ENOUGH * ENOUGH * n * size
                return Found(place, three, scales, steps, None if over else _astray("no step comes closer"))
            tries += 1
            new = look([p + c / s if s > 0.0 else p for p, c, s in zip(place.at, change, scales, strict=True)])
            if isinstance(new, Place) and new.size < place.size:
                damping = _eased(damping, place.size - new.size, foreseen)
                place, steps = new, steps + 1
                break
            damping = damping * 4.0


def _longer(scale: float, rows: list[list[float]], j: int) -> float:
    """The greatest length that a column has had."""
    length = math.sqrt(squares.total([row[j] * row[j] for row in rows]))
    return length if length > scale else scale


def _eased(damping: float, gained: float, foreseen: float) -> float:
    """Less damping after a step that gained what was foreseen, more after one that gained a quarter of it or less."""
    if gained > 0.75 * foreseen:
        return damping / 10.0 if damping / 10.0 > LEAST else LEAST
    return damping * 2.0 if gained < 0.25 * foreseen else damping


def _astray(why: str) -> Refused:
    return Refused(
        "no-convergence",
        f"No parameters were found that fit: {why}. Start nearer, or take a formula with fewer parameters.",
    )


def _told(found: Found, names: list[str], given: Columns, weights: list[float], u_reading: float | None) -> Answer:
    """What the end of the search says; no uncertainty where it is none, or a parameter is not told from the others."""
    place, n, m = found.place, len(names), len(given.y)
    floor = squares.ROUNDING * squares.max_size(given.y)
    s_squared = place.size / (m - n)
    s_squared = s_squared if s_squared > floor * floor else 0.0
    numbers: Answer = {
        "value": place.at[0],
        "freedom": m - n,
        "few": m - n < words.FEW,
        "names": names,
        "coefficients": place.at,
        "s": math.sqrt(s_squared),
        "u_reading": u_reading,
        "residuals": [r / math.sqrt(w) for r, w in zip(place.left, weights, strict=True)],
        "iterations": found.steps,
    }
    if found.refused is not None or min(found.three.new()) < NOT_TOLD:
        return numbers
    variance = s_squared
    if u_reading is not None and u_reading * u_reading > variance:
        variance = u_reading * u_reading
    covariance = triangle.covariance(found.three, found.scales)
    covariance = [[variance * c for c in row] for row in covariance]
    deviations = [math.sqrt(covariance[i][i]) for i in range(n)]
    return numbers | {"u": deviations[0], "deviations": deviations, "covariance": covariance}


def _refused(found: Found, names: list[str], numbers: Answer) -> Refused | None:
    if found.refused is not None or numbers["covariance"] is not None:
        return found.refused
    new = found.three.new()
    name = names[found.three.order[new.index(min(new))]]
    beside = "" if len(names) == 1 else " that the other parameters do not"
    return Refused(
        "singular",
        f"At these readings {name} makes no difference{beside}. Start nearer, or read at more, and other, settings.",
    )


def _numbers(n: int) -> Answer:
    keys = ("value", "u", "freedom", "few", "names", "coefficients", "deviations", "covariance")
    return {"n": n} | dict.fromkeys((*keys, "s", "u_reading", "residuals", "iterations"))


def _says(numbers: Answer, given: Columns, show: words.Show) -> str:
    low, high = given.x[0], given.x[0]
    for t in given.x:
        low, high = (t if t < low else low), (t if t > high else high)
    each = [
        f"{name} is {show(f'parameter {name}', value, u)}"
        for name, value, u in zip(numbers["names"], numbers["coefficients"], numbers["deviations"], strict=True)
    ]
    return (
        f"{', '.join(each)}: of a formula through {numbers['n']} readings from {show('x', low, None)} to "
        f"{show('x', high, None)}; they scatter by {show('y', numbers['s'], None)} about it (one standard deviation)."
        + words.few(numbers["freedom"])
    )
