"""Every function and operator of the formula language, one entry a line in FUNCTIONS.

Each entry says how many arguments it takes, whether a writer calls it by name or by an operator, whether its first
argument is a column of numbers, how its units behave (read by check.py) and what it does. `apply` gets values that are
no Faults: doubles, flags, texts; a column comes as a tuple of doubles. It answers with a value or a Fault.

The twin is static/core/functions.js. To add one: an entry here, one there, rows in tests/vectors/formula/.
Not here: `if`, `and`, `or`, `holds` choose what is evaluated, so evaluate.py does them; their entries have no `apply`.
`holds` is not written in formulas: the library puts it round a tree for each condition that its entry requires.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Union

from fieldkit.formula import elementary
from fieldkit.values import Fault

Value = Union[float, bool, str, Fault]


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
    apply: Callable[..., Value] | None = None

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


def _numbers(name: str, apply: Callable[..., Value]) -> Callable[..., Value]:
    """`apply` for numbers only; a result beyond the range of doubles is an overflow."""

    def checked(*of: Any) -> Value:
        if not all(type(v) is float for v in of):
            return wrong_type(name)
        value = apply(*of)
        if type(value) is float and math.isinf(value):
            return Fault("overflow", f"The result of {name} is too large.")
        return value

    return checked


def _div(a: float, b: float) -> Value:
    return a / b if b != 0.0 else Fault("divide-by-zero", "It would divide by zero.")


def _sqrt(a: float) -> Value:
    return math.sqrt(a) if a >= 0.0 else Fault("domain", "The square root needs a number that is not below zero.")


def _least(*of: float) -> float:
    found = of[0]
    for v in of[1:]:
        found = v if v < found else found
    return found


def _most(*of: float) -> float:
    found = of[0]
    for v in of[1:]:
        found = v if v > found else found
    return found


def _total(*of: float) -> float:
    """The plain sum from left to right: not math.fsum, which no other language has."""
    found = 0.0
    for v in of:
        found = found + v
    return found


def _average(*of: float) -> float:
    return _total(*of) / float(len(of))


def _equal(a: Value, b: Value) -> Value:
    if type(a) is not type(b):
        return Fault("wrong-type", "Two values of different kinds were compared.")
    return a == b


def _unequal(a: Value, b: Value) -> Value:
    same = _equal(a, b)
    return same if isinstance(same, Fault) else not same


def _not(a: Value) -> Value:
    return not a if type(a) is bool else Fault("wrong-type", "not was given something that is no yes or no.")


def _column(name: str, apply: Callable[..., Value]) -> Callable[..., Value]:
    """`apply` for a column that has numbers in it; an empty one has no answer yet."""

    def checked(column: tuple[float, ...]) -> Value:
        if not column:
            return Fault("missing", f"{name} has no values yet.")
        return _numbers(name, apply)(*column)

    return checked


def _at(column: tuple[float, ...], index: Value) -> Value:
    if type(index) is not float:
        return wrong_type("at")
    if index != math.floor(index) or index < 0.0 or index >= len(column):
        return Fault("out-of-range", f"There is no such place among {len(column)} values.")
    return column[int(index)]


def _numeric(name: str, least: int, most: int | None, way: str, rule: str, says: str, apply: Any) -> Function:
    return Function(least, most, way, rule, says, _numbers(name, apply))


FUNCTIONS: dict[str, Function] = {
    "add": _numeric("add", 2, 2, "operator", "sum", "a + b", lambda a, b: a + b),
    "sub": _numeric("sub", 2, 2, "operator", "sum", "a - b", lambda a, b: a - b),
    "mul": _numeric("mul", 2, 2, "operator", "times", "a * b", lambda a, b: a * b),
    "div": _numeric("div", 2, 2, "operator", "over", "a / b", _div),
    "neg": _numeric("neg", 1, 1, "operator", "difference", "-a", lambda a: -a),
    "lt": _numeric("lt", 2, 2, "operator", "order", "a < b", lambda a, b: a < b),
    "le": _numeric("le", 2, 2, "operator", "order", "a <= b", lambda a, b: a <= b),
    "gt": _numeric("gt", 2, 2, "operator", "order", "a > b", lambda a, b: a > b),
    "ge": _numeric("ge", 2, 2, "operator", "order", "a >= b", lambda a, b: a >= b),
    "eq": Function(2, 2, "operator", "equal", "a = b", _equal),
    "ne": Function(2, 2, "operator", "equal", "a != b", _unequal),
    "and": Function(2, None, "operator", "flags", "a and b"),
    "or": Function(2, None, "operator", "flags", "a or b"),
    "not": Function(1, 1, "operator", "flags", "not a", _not),
    "if": Function(3, 3, "call", "choose", "if(condition, a, b): a where it holds, else b"),
    "holds": Function(3, 3, "operator", "choose", "a where the condition holds, else out-of-range with a text"),
    "min": _numeric("min", 1, None, "call", "same", "min(a, b, ...): the least", _least),
    "max": _numeric("max", 1, None, "call", "same", "max(a, b, ...): the greatest", _most),
    "average": _numeric("average", 1, None, "call", "same", "average(a, b, ...): their mean", _average),
    "abs": _numeric("abs", 1, 1, "call", "difference", "abs(a): without its sign", abs),
    "sqrt": _numeric("sqrt", 1, 1, "call", "root", "sqrt(a): the square root", _sqrt),
    "pow": _numeric("pow", 2, 2, "call", "power", "pow(a, b): a ^ b", elementary.pow),
    "exp": _numeric("exp", 1, 1, "call", "number", "exp(a): e to the power a", elementary.exp),
    "log": _numeric("log", 1, 1, "call", "number", "log(a): the natural logarithm", elementary.log),
    "sin": _numeric("sin", 1, 1, "call", "number", "sin(a): a in rad", elementary.sin),
    "cos": _numeric("cos", 1, 1, "call", "number", "cos(a): a in rad", elementary.cos),
    "atan": _numeric("atan", 1, 1, "call", "number", "atan(a): the angle in rad whose tangent is a", elementary.atan),
    "erf": _numeric("erf", 1, 1, "call", "number", "erf(a): the error function", elementary.erf),
    "length": Function(1, 1, "column", "number-of", "length(x): how many values x has", lambda x: float(len(x))),
    "at": Function(2, 2, "column", "pick", "at(x, n): the value number n of x, counted from 0", _at),
    "first": Function(1, 1, "column", "pick", "first(x): the first value of x", _column("first", lambda *x: x[0])),
    "last": Function(1, 1, "column", "pick", "last(x): the latest value of x", _column("last", lambda *x: x[-1])),
    "lowest": Function(1, 1, "column", "pick", "lowest(x): the least value of x", _column("lowest", _least)),
    "highest": Function(1, 1, "column", "pick", "highest(x): the greatest value of x", _column("highest", _most)),
    "total": Function(1, 1, "column", "total", "total(x): the sum of x", _column("total", _total)),
    "mean": Function(1, 1, "column", "pick", "mean(x): the mean of x", _column("mean", _average)),
}
