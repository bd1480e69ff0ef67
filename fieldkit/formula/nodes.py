"""What each node of a formula tree does once it is made ready; the functions of the language are in functions.py.

A constant, a name, an argument of a formula, a choice, a column, the call of a formula with the ranges of its
arguments, a table. Each maker here reads what it can beforehand and gives a `Part`, or its `run`.

The twin is static/core/nodes.js, maker by maker. Not here: walking the tree and bounding it (evaluate.py).
"""

from __future__ import annotations

import math
from bisect import bisect_right
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from itertools import pairwise
from operator import itemgetter
from sys import float_info
from typing import Any

from fieldkit import values
from fieldkit.formula.functions import Run, Stop, Value
from fieldkit.values import Fault

#: where the columns stand among what names mean: under no name
COLUMNS: Any = object()

_LARGEST = float_info.max


@dataclass(frozen=True, slots=True)
class Part:
    """A node made ready."""

    run: Run
    #: it never gives anything but a number
    number: bool = False
    #: it always gives the same
    fixed: bool = False
    #: nodes below it, one below the other
    height: int = 0
    #: the name that it is, where the caller tells what names mean
    name: str | None = None


def stops(fault: Fault, height: int = 0) -> Part:
    """A part that gives nothing but a Fault."""

    def run(e: Any) -> Value:
        raise Stop(fault)

    return Part(run, True, True, height)


def constant(value: Value, height: int = 0) -> Part:
    return (
        stops(value, height) if isinstance(value, Fault) else Part(lambda e: value, type(value) is float, True, height)
    )


def named(name: str) -> Part:
    """What the caller's name means."""

    def run(e: Any) -> Value:
        try:
            v: Value = e[name]
        except KeyError:
            raise Stop(unknown(name)) from None
        kind = type(v)
        if kind is bool or kind is str or (kind is float and v - v == 0.0):  # type: ignore[operator]
            return v
        return _plain(name, v)

    return Part(run, name=name)


def _plain(name: str, found: Any) -> Value:
    """A meaning that is no plain double, flag or text: made one, or Stop."""
    if isinstance(found, Fault):
        raise Stop(found)
    if isinstance(found, bool | str):
        return found
    if isinstance(found, int | float) and abs(found) <= _LARGEST:
        return float(found)
    raise Stop(Fault("wrong-type", f"{name} is no number, text or flag."))


def argument(place: int) -> Part:
    """An argument inside the formula: checked when it was called, so a number."""
    return Part(itemgetter(place), True)


def number(part: Part, otherwise: Fault) -> Run:
    """The part as a number; the Fault `otherwise` where it gives something else."""
    return part.run if part.number else _within(part, -_LARGEST, _LARGEST, lambda value: otherwise)


def _within(part: Part, low: float, high: float, otherwise: Callable[[Value], Fault]) -> Run:
    """The part as a number from `low` to `high`; `otherwise` tells the Fault where it is something else."""
    inner, name = part.run, part.name

    def run(e: Any) -> float:
        v = inner(e)
        if type(v) is float and low <= v <= high:
            return v
        raise Stop(otherwise(v))

    def look(e: Any) -> float:
        try:
            v = e[name]
        except KeyError:
            raise Stop(unknown(str(name))) from None
        if type(v) is float and low <= v <= high:
            return v
        return run(e)

    return run if name is None else look


def choice(function: str, parts: list[Part]) -> Run:
    """if, holds, and, or: only what is needed for the answer is asked."""
    runs = [p.run for p in parts]
    wrong = Fault("wrong-type", f"{function} was given something that is no yes or no.")
    if function == "if":
        return _if(runs[0], runs[1], runs[2], wrong)
    if function == "holds":
        return _if(runs[0], runs[2], _not_held(runs[1]), wrong)
    return _every(runs, function == "and", wrong)


def chosen(function: str, parts: list[Part]) -> bool:
    """Whether a choice never gives anything but a number."""
    return (function == "if" and parts[1].number and parts[2].number) or (function == "holds" and parts[2].number)


def _if(condition: Run, held: Run, other: Run, wrong: Fault) -> Run:
    def run(e: Any) -> Value:
        flag = condition(e)
        if flag is True:
            return held(e)
        if flag is False:
            return other(e)
        raise Stop(wrong)

    return run


def _not_held(says: Run) -> Run:
    """What `holds` answers where its condition does not hold; `says` tells the person which one."""

    def run(e: Any) -> Value:
        text = says(e)
        if not isinstance(text, str):
            raise Stop(Fault("wrong-type", "holds has no sentence."))
        raise Stop(Fault("out-of-range", text))

    return run


def _every(runs: list[Run], until: bool, wrong: Fault) -> Run:
    """`until` where every flag is `until`, else the other; asks no further than the first that is not."""

    def run(e: Any) -> bool:
        for one in runs:
            flag = one(e)
            if flag is not until:
                if type(flag) is not bool:
                    raise Stop(wrong)
                return flag
        return until

    return run


def column(name: str) -> Run:
    """A column of the caller, as a tuple of doubles."""

    def run(e: Any) -> tuple[float, ...]:
        series = e[COLUMNS]
        if name not in series:
            raise Stop(no_column(name))
        found = series[name]
        if not isinstance(found, list | tuple) or not all(map(_finite, found)):
            raise Stop(Fault("wrong-type", f"{name} holds something that is no number."))
        return tuple(map(float, found))

    return run


def _finite(v: Any) -> bool:
    return isinstance(v, int | float) and not isinstance(v, bool) and abs(v) <= _LARGEST


def called(body: Run, given: list[Run]) -> Run:
    """A formula of the library, asked with its arguments."""
    match given:
        case [a]:
            return lambda e: body((a(e),))
        case [a, b]:
            return lambda e: body((a(e), b(e)))
        case [a, b, c]:
            return lambda e: body((a(e), b(e), c(e)))
        case [a, b, c, d]:
            return lambda e: body((a(e), b(e), c(e), d(e)))
    return lambda e: body(tuple([one(e) for one in given]))


def ranged(function: str, argument: Any, part: Part) -> Run:
    """One argument of a formula, held to the range for which the formula holds."""

    def outside(value: Value) -> Fault:
        return _outside(function, argument, value)

    low, high, whole = _range(argument) or (1.0, 0.0, False)
    free = part.number and low == -_LARGEST and high == _LARGEST
    run = part.run if free else _within(part, low, high, outside)

    def run_whole(e: Any) -> float:
        v: float = run(e)
        if v == math.floor(v):
            return v
        raise Stop(outside(v))

    return run_whole if whole else run


def _range(argument: Any) -> tuple[float, float, bool] | None:
    """Least, greatest, whole numbers only; None where the argument is damaged."""
    low, high = _decimal(argument, "low", -_LARGEST), _decimal(argument, "high", _LARGEST)
    factor, offset = _decimal(argument, "factor", None), _decimal(argument, "offset", None)
    whole = aspect(argument, "whole")
    if low is None or high is None or factor is None or offset is None or factor <= 0.0:
        return None
    return (low, high, whole is True) if whole is None or isinstance(whole, bool) else None


def _decimal(argument: Any, name: str, absent: float | None) -> float | None:
    """A decimal text of an argument as a number; None where it is damaged."""
    text = aspect(argument, name)
    if text is None:
        return absent
    found = values.number(text) if isinstance(text, str) else None
    return found if isinstance(found, float) else None


class _Scale:
    def __init__(self, argument: Any) -> None:
        self.factor = str(aspect(argument, "factor"))
        self.offset = str(aspect(argument, "offset"))


def _outside(function: str, argument: Any, value: Value) -> Fault:
    """Why a value will not do for an argument."""
    name, unit, limits = aspect(argument, "name"), aspect(argument, "unit"), _range(argument)
    if type(value) is not float:
        return Fault("wrong-type", f"{function}: {name} is no number.")
    if limits is None:
        return bad_tree()
    scale = _Scale(argument)
    after = "" if not isinstance(unit, str) or unit in ("", "1") else f" {unit}"
    says = f"{function}: {name} is {values.to_shown(value, scale)}{after}"
    low, high, _ = limits
    if low <= value <= high:
        return Fault("out-of-range", f"{says}; only whole numbers.")
    ends = [("from", low)] * (low != -_LARGEST) + [("to", high)] * (high != _LARGEST)
    span = " ".join(f"{word} {values.to_shown(end, scale)}" for word, end in ends)
    return Fault("out-of-range", f"{says}; the formula holds {span}{after}.")


def table(table: Any, asked: Run) -> Run:
    """Linear between neighbours; at a node exactly the node's value."""
    name = table["name"] if isinstance(table.get("name"), str) else "the table"
    xs, ys = _rising(table["x"]), _numbers(table["y"])
    if xs is None or ys is None or len(xs) != len(ys) or len(xs) < 2:
        return lambda e: _damaged(asked(e))
    low, high, last = xs[0], xs[-1], ys[-1]
    steps = [(xs[k], ys[k], xs[k + 1] - xs[k], ys[k + 1] - ys[k]) for k in range(len(xs) - 1)]

    def run(e: Any) -> float:
        at = asked(e)
        if not low <= at < high:
            if at == high:
                return last
            raise Stop(Fault("out-of-range", f"{name}: {values.round12(at)} is outside the table, in SI units."))
        x, y, dx, dy = steps[bisect_right(xs, at) - 1]
        v: float = y + dy * ((at - x) / dx)
        if v - v == 0.0:
            return v
        raise Stop(Fault("overflow", f"The result of {name} is too large."))

    return run


def _damaged(value: float) -> Value:
    raise Stop(bad_tree())


def _rising(texts: list[Any]) -> list[float] | None:
    found = _numbers(texts)
    return found if found is not None and all(a < b for a, b in pairwise(found)) else None


def _numbers(texts: list[Any]) -> list[float] | None:
    found = [values.number(t) if isinstance(t, str) else None for t in texts]
    good = [v for v in found if isinstance(v, float)]
    return good if len(good) == len(found) else None


def aspect(thing: Any, name: str) -> Any:
    """A part of a FormulaUsed or Argument, or of the same as plain JSON; None where it has none."""
    return thing.get(name) if isinstance(thing, Mapping) else getattr(thing, name, None)


def unknown(name: str) -> Fault:
    return Fault("unknown-name", f"There is no value named {name}.")


def no_column(name: str) -> Fault:
    return Fault("unknown-name", f"There is no column of numbers named {name}.")


def bad_tree() -> Fault:
    return Fault("bad-tree", "The formula in the sheet is damaged.")
