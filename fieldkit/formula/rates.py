"""How the answer of each function of the language changes with what it is given: the rules behind slopes.py.

A node, made ready, gives its value and its derivatives: {"beam_voltage": 2.2}, in SI, empty where nothing below it
changes. Each maker in MAKERS puts a function over its parts by the chain rule, summed over them from left to right.

Where two slopes meet in one point (equal parts of `min` and `max`, |0|, a node of a table, an `if` whose two sides
compare as equal and whose branches give one value) the steeper one counts, there and of each name, not of the whole
formula. Where there is no bound to a slope, `Steep` ends the differentiation; where there is no value, `Stop` does, and
evaluate.py says why.

The twin is static/core/rates.js, maker by maker. Not here: walking the tree (slopes.py).
To add a function: a line in MAKERS of both.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from operator import itemgetter
from typing import Any

from fieldkit.formula import elementary
from fieldkit.formula.functions import FUNCTIONS, Run, Stop
from fieldkit.values import Fault

Slopes = dict[str, float]
#: a node: value and derivatives, from what names mean and (inside a formula) how its arguments change
Look = Callable[[Any, Any], tuple[Any, Slopes]]

NONE: Slopes = {}
#: 2 / sqrt(pi)
_ERF = 1.1283791670955126


class Steep(Exception):
    """A slope without bound. Raised and caught within one differentiation."""


def lost() -> Stop:
    """There is no value; which Fault it is, the evaluation itself tells."""
    return Stop(Fault("bad-tree", ""))


def given(e: Any) -> Any:
    """A part that is already worked out."""
    return e


def scaled(factor: float, slopes: Slopes) -> Slopes:
    """The chain rule for one part."""
    found: Slopes = {}
    for name, slope in slopes.items():
        d = factor * slope
        if d - d != 0.0:
            raise Steep
        found[name] = d
    return found


def summed(found: Slopes, factor: float, slopes: Slopes) -> Slopes:
    """Adds a further part to `found`, which is changed; names in the order in which they are first met."""
    for name, slope in slopes.items():
        d = factor * slope
        total = found[name] + d if name in found else d
        if total - total != 0.0:
            raise Steep
        found[name] = total
    return found


def steeper(one: Slopes, other: Slopes) -> Slopes:
    """Of each name the steeper slope."""
    found = dict(one)
    for name, slope in other.items():
        if name not in found or abs(slope) > abs(found[name]):
            found[name] = slope
    return found


def _number(value: float | Fault) -> float:
    if isinstance(value, Fault):
        raise Steep
    return value


def _add(a: Look, b: Look) -> Look:
    def look(e: Any, g: Any) -> tuple[Any, Slopes]:
        x, p = a(e, g)
        y, q = b(e, g)
        v = x + y
        if v - v != 0.0:
            raise lost()
        if not q:
            return v, p
        return v, summed(dict(p), 1.0, q) if p else q

    return look


def _sub(a: Look, b: Look) -> Look:
    def look(e: Any, g: Any) -> tuple[Any, Slopes]:
        x, p = a(e, g)
        y, q = b(e, g)
        v = x - y
        if v - v != 0.0:
            raise lost()
        return v, summed(dict(p), -1.0, q) if q else p

    return look


def _mul(a: Look, b: Look) -> Look:
    def look(e: Any, g: Any) -> tuple[Any, Slopes]:
        x, p = a(e, g)
        y, q = b(e, g)
        v = x * y
        if v - v != 0.0:
            raise lost()
        if not q:
            return v, scaled(y, p) if p else NONE
        return v, summed(scaled(y, p), x, q) if p else scaled(x, q)

    return look


def _div(a: Look, b: Look) -> Look:
    def look(e: Any, g: Any) -> tuple[Any, Slopes]:
        x, p = a(e, g)
        y, q = b(e, g)
        if y == 0.0:
            raise lost()
        v = x / y
        if v - v != 0.0:
            raise lost()
        if not q:
            return v, scaled(1.0 / y, p) if p else NONE
        return v, summed(scaled(1.0 / y, p), -(v / y), q) if p else scaled(-(v / y), q)

    return look


_POWER = FUNCTIONS["pow"].make
assert _POWER is not None
_power: Run = _POWER(itemgetter(0), itemgetter(1))


def _pow(a: Look, b: Look) -> Look:
    def look(e: Any, g: Any) -> tuple[Any, Slopes]:
        x, p = a(e, g)
        y, q = b(e, g)
        v = _power((x, y))
        found = scaled(_by_base(x, y), p) if p else {}
        return v, summed(found, _by_exponent(x, y, v), q) if q else found

    return look


def _by_base(x: float, y: float) -> float:
    if y == 2.0:
        return 2.0 * x
    return y * _number(elementary.pow(x, y - 1.0)) if y != 0.0 else 0.0


def _by_exponent(x: float, y: float, v: float) -> float:
    if x == 0.0 and y > 0.0:
        return 0.0
    return v * _number(elementary.log(x))


def _average(*parts: Look) -> Look:
    run, share = _many("average", len(parts)), 1.0 / float(len(parts))

    def look(e: Any, g: Any) -> tuple[Any, Slopes]:
        found = [part(e, g) for part in parts]
        v = run([x for x, _ in found])
        total: Slopes = {}
        for _, slopes in found:
            summed(total, share, slopes)
        return v, total

    return look


def _end(name: str) -> Callable[..., Look]:
    """The least or the greatest; of equal ones the steeper."""

    def make(*parts: Look) -> Look:
        run = _many(name, len(parts))

        def look(e: Any, g: Any) -> tuple[Any, Slopes]:
            found = [part(e, g) for part in parts]
            v = run([x for x, _ in found])
            best = NONE
            for x, slopes in found:
                if x == v:
                    best = steeper(best, slopes) if best else slopes
            return v, best

        return look

    return make


def _many(name: str, count: int) -> Run:
    make = FUNCTIONS[name].make
    assert make is not None
    return make(*[itemgetter(k) for k in range(count)])


def _one(name: str, rate: Callable[[float, float], float]) -> Callable[..., Look]:
    """A function of one number, from its rate of change at x, where it is v."""
    make = FUNCTIONS[name].make
    assert make is not None
    run = make(given)

    def over(a: Look) -> Look:
        def look(e: Any, g: Any) -> tuple[Any, Slopes]:
            x, p = a(e, g)
            v = run(x)
            return v, scaled(rate(x, v), p) if p else NONE

        return look

    return over


def _sqrt(x: float, v: float) -> float:
    if v == 0.0:
        raise Steep
    return 0.5 / v


MAKERS: dict[str, Callable[..., Look]] = {
    "add": _add,
    "sub": _sub,
    "mul": _mul,
    "div": _div,
    "neg": _one("neg", lambda x, v: -1.0),
    "min": _end("min"),
    "max": _end("max"),
    "average": _average,
    "abs": _one("abs", lambda x, v: -1.0 if x < 0.0 else 1.0),
    "sqrt": _one("sqrt", _sqrt),
    "pow": _pow,
    "exp": _one("exp", lambda x, v: v),
    "log": _one("log", lambda x, v: 1.0 / x),
    "sin": _one("sin", lambda x, v: _number(elementary.cos(x))),
    "cos": _one("cos", lambda x, v: -_number(elementary.sin(x))),
    "atan": _one("atan", lambda x, v: 1.0 / (1.0 + x * x)),
    "erf": _one("erf", lambda x, v: _ERF * _number(elementary.exp(-(x * x)))),
}


def _only(k: int) -> list[tuple[int, float]]:
    return [(k, 1.0)]


#: derivatives of a function of a column by its places, from the column, the value and the index; of equal readings the
#: first stands for `lowest` and `highest`: all are as steep
COLUMNS: dict[str, Callable[[Sequence[float], float, Sequence[float]], list[tuple[int, float]]]] = {
    "at": lambda x, v, at: _only(int(at[0])),
    "first": lambda x, v, at: _only(0),
    "last": lambda x, v, at: _only(len(x) - 1),
    "lowest": lambda x, v, at: _only(x.index(v)),
    "highest": lambda x, v, at: _only(x.index(v)),
    "total": lambda x, v, at: [(k, 1.0) for k in range(len(x))],
    "mean": lambda x, v, at: [(k, 1.0 / float(len(x))) for k in range(len(x))],
}
