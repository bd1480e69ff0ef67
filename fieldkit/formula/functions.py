"""Every function and operator of the formula language, one entry a line in FUNCTIONS.

Each entry says how many arguments it takes, whether a writer calls it by name or by an operator, whether its first
argument is a column of numbers, how its units behave (read by check.py) and how it is made ready: `make` takes the
parts of a call, each ready to run, and gives the whole, ready to run. A part runs on what names mean and gives a value;
where there is a Fault instead it raises `Stop`, which ends the evaluation. With `numbers` every part gives a number
(a finite double; evaluate.py sees to it), with `number` so does the whole; a column gives a tuple of them.

The twin is static/core/functions.js. To add one: an entry here, one there, rows in tests/vectors/formula/.
Not here: `if`, `and`, `or`, `holds` choose what is evaluated, so evaluate.py makes them; their entries have no `make`.
`holds` is not written in formulas: the library puts it round a tree for each condition that its entry requires.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any, Union

from fieldkit.formula import elementary
from fieldkit.values import Fault

Value = Union[float, bool, str, Fault]
#: a part of a tree made ready: gives its value out of what names mean
Run = Callable[[Any], Any]


class Stop(Exception):
    """The evaluation ends with a Fault. Raised and caught within one evaluation; nobody else sees it."""

    def __init__(self, fault: Fault) -> None:
        super().__init__(fault)
        self.fault = fault


@dataclass(frozen=True)
class Function:
    least: int
    #: None: any number
    most: int | None
    #: "operator": written + - < and so on; "call": written by its name; "column": by name, first argument a column
    way: str
    #: how units behave: a rule of check.py
    rule: str
    says: str
    make: Callable[..., Run] | None = None
    #: every part but a column must give a number
    numbers: bool = False
    #: it never gives anything but a number
    number: bool = False

    @property
    def spelled(self) -> bool:
        return self.way != "operator"

    @property
    def on_series(self) -> bool:
        return self.way == "column"

    def takes(self) -> str:
        if self.most is None:
            return f"{self.least} or more values"
        return f"{self.least} value{'' if self.least == 1 else 's'}"


def wrong_type(what: str) -> Fault:
    return Fault("wrong-type", f"{what} was given something that is no number.")


def _no_number(name: str, value: float | Fault) -> Stop:
    """Why `value`, which a function answered, is no finite number."""
    return Stop(value if isinstance(value, Fault) else Fault("overflow", f"The result of {name} is too large."))


# The four operators and the comparisons are what formulas are made of, so each is written out: v - v is 0 for every
# finite v, and NaN for an infinite one.


def _add(a: Run, b: Run) -> Run:
    def run(e: Any) -> float:
        v: float = a(e) + b(e)
        if v - v == 0.0:
            return v
        raise _no_number("add", v)

    return run


def _sub(a: Run, b: Run) -> Run:
    def run(e: Any) -> float:
        v: float = a(e) - b(e)
        if v - v == 0.0:
            return v
        raise _no_number("sub", v)

    return run


def _mul(a: Run, b: Run) -> Run:
    def run(e: Any) -> float:
        v: float = a(e) * b(e)
        if v - v == 0.0:
            return v
        raise _no_number("mul", v)

    return run


def _div(a: Run, b: Run) -> Run:
    def run(e: Any) -> float:
        x, y = a(e), b(e)
        if y == 0.0:
            raise Stop(Fault("divide-by-zero", "It would divide by zero."))
        v: float = x / y
        if v - v == 0.0:
            return v
        raise _no_number("div", v)

    return run


def _one(name: str, apply: Callable[[float], float | Fault]) -> Callable[..., Run]:
    """A function of one number."""

    def make(a: Run) -> Run:
        def run(e: Any) -> float:
            v = apply(a(e))
            if type(v) is float and v - v == 0.0:
                return v
            raise _no_number(name, v)

        return run

    return make


def _two(name: str, apply: Callable[[float, float], float | Fault]) -> Callable[..., Run]:
    """A function of two numbers."""

    def make(a: Run, b: Run) -> Run:
        def run(e: Any) -> float:
            v = apply(a(e), b(e))
            if type(v) is float and v - v == 0.0:
                return v
            raise _no_number(name, v)

        return run

    return make


def _many(name: str, apply: Callable[[Sequence[float]], float]) -> Callable[..., Run]:
    """A function of one number or more."""

    def make(*parts: Run) -> Run:
        def run(e: Any) -> float:
            v = apply([part(e) for part in parts])
            if v - v == 0.0:
                return v
            raise _no_number(name, v)

        return run

    return make


def _column(name: str, apply: Callable[[Sequence[float]], float]) -> Callable[..., Run]:
    """`apply` for a column that has numbers in it; an empty one has no answer yet."""

    def make(column: Run) -> Run:
        def run(e: Any) -> float:
            values = column(e)
            if not values:
                raise Stop(Fault("missing", f"{name} has no values yet."))
            v = apply(values)
            if v - v == 0.0:
                return v
            raise _no_number(name, v)

        return run

    return make


def _length(column: Run) -> Run:
    return lambda e: float(len(column(e)))


def _at(column: Run, index: Run) -> Run:
    def run(e: Any) -> float:
        values, place = column(e), index(e)
        if place != math.floor(place) or place < 0.0 or place >= len(values):
            raise Stop(Fault("out-of-range", f"There is no such place among {len(values)} values."))
        found: float = values[int(place)]
        return found

    return run


def _sqrt(x: float) -> float | Fault:
    return math.sqrt(x) if x >= 0.0 else Fault("domain", "The square root needs a number that is not below zero.")


def _total(values: Sequence[float]) -> float:
    """The plain sum from left to right: not math.fsum, which no other language has."""
    found = 0.0
    for v in values:
        found = found + v
    return found


def _average(values: Sequence[float]) -> float:
    return _total(values) / float(len(values))


def _equal(a: Run, b: Run, same: bool = True) -> Run:
    def run(e: Any) -> bool:
        x, y = a(e), b(e)
        if type(x) is not type(y):
            raise Stop(Fault("wrong-type", "Two values of different kinds were compared."))
        return (x == y) is same

    return run


def _not(a: Run) -> Run:
    def run(e: Any) -> bool:
        flag = a(e)
        if type(flag) is not bool:
            raise Stop(Fault("wrong-type", "not was given something that is no yes or no."))
        return not flag

    return run


def _operator(count: int, rule: str, says: str, make: Callable[..., Run], number: bool = True) -> Function:
    return Function(count, count, "operator", rule, says, make, True, number)


def _single(name: str, rule: str, says: str, apply: Any) -> Function:
    return Function(1, 1, "call", rule, says, _one(name, apply), True, True)


def _several(name: str, says: str, apply: Any) -> Function:
    return Function(1, None, "call", "same", says, _many(name, apply), True, True)


def _whole(name: str, rule: str, says: str, apply: Any) -> Function:
    return Function(1, 1, "column", rule, says, _column(name, apply), True, True)


FUNCTIONS: dict[str, Function] = {
    "add": _operator(2, "sum", "a + b", _add),
    "sub": _operator(2, "sum", "a - b", _sub),
    "mul": _operator(2, "times", "a * b", _mul),
    "div": _operator(2, "over", "a / b", _div),
    "neg": _operator(1, "difference", "-a", lambda a: lambda e: -a(e)),
    "lt": _operator(2, "order", "a < b", lambda a, b: lambda e: a(e) < b(e), False),
    "le": _operator(2, "order", "a <= b", lambda a, b: lambda e: a(e) <= b(e), False),
    "gt": _operator(2, "order", "a > b", lambda a, b: lambda e: a(e) > b(e), False),
    "ge": _operator(2, "order", "a >= b", lambda a, b: lambda e: a(e) >= b(e), False),
    "eq": Function(2, 2, "operator", "equal", "a = b", _equal),
    "ne": Function(2, 2, "operator", "equal", "a != b", lambda a, b: _equal(a, b, same=False)),
    "and": Function(2, None, "operator", "flags", "a and b"),
    "or": Function(2, None, "operator", "flags", "a or b"),
    "not": Function(1, 1, "operator", "flags", "not a", _not),
    "if": Function(3, 3, "call", "choose", "if(condition, a, b): a where it holds, else b"),
    "holds": Function(3, 3, "operator", "choose", "a where the condition holds, else out-of-range with a text"),
    "min": _several("min", "min(a, b, ...): the least", min),
    "max": _several("max", "max(a, b, ...): the greatest", max),
    "average": _several("average", "average(a, b, ...): their mean", _average),
    "abs": _single("abs", "difference", "abs(a): without its sign", abs),
    "sqrt": _single("sqrt", "root", "sqrt(a): the square root", _sqrt),
    "pow": Function(2, 2, "call", "power", "pow(a, b): a ^ b", _two("pow", elementary.pow), True, True),
    "exp": _single("exp", "number", "exp(a): e to the power a", elementary.exp),
    "log": _single("log", "number", "log(a): the natural logarithm", elementary.log),
    "sin": _single("sin", "number", "sin(a): a in rad", elementary.sin),
    "cos": _single("cos", "number", "cos(a): a in rad", elementary.cos),
    "atan": _single("atan", "number", "atan(a): the angle in rad whose tangent is a", elementary.atan),
    "erf": _single("erf", "number", "erf(a): the error function", elementary.erf),
    "length": Function(1, 1, "column", "number-of", "length(x): how many values x has", _length, True, True),
    "at": Function(2, 2, "column", "pick", "at(x, n): the value number n of x, counted from 0", _at, True, True),
    "first": _whole("first", "pick", "first(x): the first value of x", lambda x: x[0]),
    "last": _whole("last", "pick", "last(x): the latest value of x", lambda x: x[-1]),
    "lowest": _whole("lowest", "pick", "lowest(x): the least value of x", min),
    "highest": _whole("highest", "pick", "highest(x): the greatest value of x", max),
    "total": _whole("total", "total", "total(x): the sum of x", _total),
    "mean": _whole("mean", "pick", "mean(x): the mean of x", _average),
}
