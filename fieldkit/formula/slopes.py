"""How a formula's answer changes with each thing that it is made of: the same tree, differentiated as it is evaluated.

    prepare(tree, formulas).gradient(names, series)    Gradient(value, of={"beam_voltage": 2.2, "ion[3]": 0.25})

Forward differentiation, exact to rounding: every node gives its value and, for each name below it, the derivative. Of
`if`, `min` and `max` that of the branch taken counts; of a table the slope of the segment; where two meet in one point
(a node of a table, |0|), the steeper one, so that an uncertainty made of it is never too small. Where an answer changes
without bound (the square root at zero), its value stands and `of` is a Fault "domain".

The twin is static/core/slopes.js, rule by rule. Not here: what is made of the derivatives (spread.py), what nodes give
(evaluate.py, nodes.py, functions.py). To add a function: its rule in `_RULES`, a row in tests/vectors/slopes/.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from operator import itemgetter
from types import MappingProxyType
from typing import Any, Union

from fieldkit import values
from fieldkit.formula import ast, elementary, evaluate, nodes
from fieldkit.formula.functions import FUNCTIONS, Stop, Value, wrong_type
from fieldkit.formula.nodes import Part
from fieldkit.values import Fault

Slopes = dict[str, float]
#: a node: value and derivatives, from what names mean and (inside a formula) how its arguments change
Node = Callable[[Any, Any], tuple[Any, Slopes]]

_NOTHING: Mapping[str, Any] = MappingProxyType({})
_NONE: Slopes = {}
#: 2 / sqrt(pi)
_ERF = 1.1283791670955126
_STEEP = Fault("domain", "The result changes without bound at this value, so it has no uncertainty.")


@dataclass(frozen=True, slots=True)
class Gradient:
    """The value, and its derivatives in SI by name ("x") and by place in a column ("x[3]"); or why there are none."""

    value: Value
    of: Union[Slopes, Fault]


@dataclass(frozen=True, slots=True)
class Prepared:
    """A tree made ready. Holds while tree and formulas stay as they were."""

    gradient: Callable[..., Gradient]


class _Steep(Exception):
    """A derivative without bound. Raised and caught within one evaluation."""


def prepare(tree: ast.Tree | dict[str, Any], formulas: Mapping[str, Any] | None = None) -> Prepared:
    """`tree` made ready to be differentiated, with the formulas that it calls. Raises nothing, whatever the tree is."""
    data = tree if isinstance(tree, dict) else ast.to_json(tree)
    plain = evaluate.prepare(data, formulas)
    node = _node(data, formulas or _NOTHING)

    def gradient(names: Mapping[str, Any] = _NOTHING, series: Mapping[str, Sequence[float]] = _NOTHING) -> Gradient:
        value = plain.value(names, series)
        if type(value) is not float:
            return Gradient(value, value if isinstance(value, Fault) else {})
        try:
            return Gradient(value, node({**names, nodes.COLUMNS: series}, None)[1])
        except (_Steep, Stop):
            return Gradient(value, _STEEP)

    return Prepared(gradient)


def _node(tree: dict[str, Any], formulas: Mapping[str, Any]) -> Node:
    try:
        return _Making(formulas).node(tree)
    except Stop as stop:
        return _stops(stop.fault)


class _Making:
    """Makes one tree ready, and once each the formulas that it calls; `plain` makes what is not differentiated."""

    def __init__(self, formulas: Mapping[str, Any]) -> None:
        self.formulas = formulas
        self.plain = evaluate.Making(formulas)
        self.bodies: dict[str, Node] = {}
        self.depth = 0

    def node(self, tree: Any) -> Node:
        self.depth += 1
        if self.depth > evaluate.DEEPEST:
            raise Stop(_STEEP)
        made = self._node(tree)
        self.depth -= 1
        return made

    def _node(self, tree: Any) -> Node:
        if not isinstance(tree, dict):
            return _stops(nodes.bad_tree())
        if "name" in tree:
            return self.named(tree["name"])
        if "table" in tree:
            return self.table(tree["table"])
        if "call" in tree and isinstance(tree.get("of"), list):
            return self.call(tree["call"], tree["of"], tree)
        return self.flat(tree)

    def flat(self, tree: Any) -> Node:
        """A part that nothing is differentiated in: a constant, a condition."""
        run = self.plain.part(tree, 0).run
        return lambda e, g: (run(e), _NONE)

    def named(self, name: Any) -> Node:
        part = self.plain.named(name)
        run, arguments = part.run, self.plain.arguments
        if arguments is not None:
            place = arguments.get(name, -1)
            return (lambda e, g: (e[place], g[place])) if place >= 0 else _stops(nodes.bad_tree())

        def look(e: Any, g: Any) -> tuple[Any, Slopes]:
            v = run(e)
            return v, ({name: 1.0} if type(v) is float else _NONE)

        return look

    def call(self, function: Any, of: list[Any], tree: Any) -> Node:
        entry = FUNCTIONS.get(function) if isinstance(function, str) else None
        if entry is None:
            return self.library(function, of)
        if len(of) < entry.least or (entry.most is not None and len(of) > entry.most):
            return _stops(nodes.bad_tree())
        if function in ("if", "holds"):
            condition, held = self.plain.part(of[0], 0).run, self.node(of[1] if function == "if" else of[2])
            other = self.node(of[2]) if function == "if" else _stops(nodes.bad_tree())
            return lambda e, g: held(e, g) if condition(e) is True else other(e, g)
        if entry.on_series:
            return self.on_column(function, of)
        if function not in _RULES or entry.make is None:
            return self.flat(tree)
        parts = [self.node(p) for p in of]
        places = [nodes.number(Part(itemgetter(k)), wrong_type(function)) for k in range(len(of))]
        return _applied(entry.make(*places), _RULES[function], parts)

    def on_column(self, function: str, of: list[Any]) -> Node:
        """A function of a column: its index, where it has one, is not differentiated."""
        entry = FUNCTIONS[function]
        name = of[0].get("series") if isinstance(of[0], dict) else None
        if not isinstance(name, str) or self.plain.arguments is not None or entry.make is None:
            return _stops(nodes.bad_tree())
        indexes = [nodes.number(self.plain.part(p, 0), wrong_type(function)) for p in of[1:]]
        column, rule = nodes.column(name), _COLUMNS[function]
        run = entry.make(itemgetter(0), *[itemgetter(k + 1) for k in range(len(indexes))])

        def look(e: Any, g: Any) -> tuple[Any, Slopes]:
            given = (column(e), *[index(e) for index in indexes])
            v = run(given)
            return v, {f"{name}[{k}]": d for k, d in rule(given[0], v, given[1:])}

        return look

    def library(self, function: Any, of: list[Any]) -> Node:
        formula = self.formulas.get(function) if isinstance(function, str) else None
        arguments = nodes.aspect(formula, "arguments")
        if not isinstance(arguments, list | tuple) or len(arguments) != len(of):
            return _stops(nodes.bad_tree())
        parts = [self.node(p) for p in of]
        checks = [nodes.ranged(function, a, Part(itemgetter(k))) for k, a in enumerate(arguments)]
        body = self.body(function, formula, [nodes.aspect(a, "name") for a in arguments])

        def look(e: Any, g: Any) -> tuple[Any, Slopes]:
            found = [part(e, g) for part in parts]
            given = tuple([v for v, _ in found])
            return body(tuple([check(given) for check in checks]), [slopes for _, slopes in found])

        return look

    def body(self, function: str, formula: Any, names: list[str]) -> Node:
        if function not in self.bodies:
            outer, self.plain.arguments = self.plain.arguments, {name: k for k, name in enumerate(names)}
            self.bodies[function] = self.node(nodes.aspect(formula, "tree"))
            self.plain.arguments = outer
        return self.bodies[function]

    def table(self, table: Any) -> Node:
        if not isinstance(table, dict) or not isinstance(table.get("x"), list) or not isinstance(table.get("y"), list):
            return _stops(nodes.bad_tree())
        at, run, steps = self.node(table.get("of")), nodes.table(table, itemgetter(0)), _steps(table)

        def look(e: Any, g: Any) -> tuple[Any, Slopes]:
            x, slopes = at(e, g)
            v = run((x,))
            return v, _chained([(_steepest(steps, x), slopes)]) if slopes else _NONE

        return look


def _stops(fault: Fault) -> Node:
    def look(e: Any, g: Any) -> tuple[Any, Slopes]:
        raise Stop(fault)

    return look


def _applied(run: Callable[[Any], Any], rule: Callable[..., float], parts: list[Node]) -> Node:
    """A function over its parts: derivatives only where something below changes."""

    def look(e: Any, g: Any) -> tuple[Any, Slopes]:
        found = [part(e, g) for part in parts]
        given = tuple([v for v, _ in found])
        v = run(given)
        if not any([slopes for _, slopes in found]):
            return v, _NONE
        return v, _chained([(rule(k, given, v), slopes) for k, (_, slopes) in enumerate(found) if slopes])

    return look


def _chained(outer: list[tuple[float, Slopes]]) -> Slopes:
    """The chain rule: the sum over the parts, left to right; names in the order in which they are first met."""
    found: Slopes = {}
    for factor, slopes in outer:
        for name, slope in slopes.items():
            d = factor * slope
            total = found[name] + d if name in found else d
            if total - total != 0.0:
                raise _Steep
            found[name] = total
    return found


def _steps(table: dict[str, Any]) -> list[tuple[float, float, float]]:
    """The segments of a table: from, to, slope; none where it is damaged, for then it has no value either."""
    columns = [[values.number(t) for t in table[key] if isinstance(t, str)] for key in ("x", "y")]
    x, y = [[v for v in column if isinstance(v, float)] for column in columns]
    if len(x) != len(y) or len(x) != len(table["x"]) or any(b <= a for a, b in pairwise(x)):
        return []
    return [(x[k], x[k + 1], (y[k + 1] - y[k]) / (x[k + 1] - x[k])) for k in range(len(x) - 1)]


def _steepest(steps: list[tuple[float, float, float]], at: float) -> float:
    found = 0.0
    for low, high, slope in steps:
        if low <= at <= high and abs(slope) > abs(found):
            found = slope
    return found


def _number(value: float | Fault) -> float:
    if isinstance(value, Fault):
        raise _Steep
    return value


def _div(k: int, of: tuple[float, ...], v: float) -> float:
    return 1.0 / of[1] if k == 0 else -(v / of[1])


def _pow(k: int, of: tuple[float, ...], v: float) -> float:
    base, power = of
    if k == 0:
        return power * _number(elementary.pow(base, power - 1.0)) if power != 0.0 else 0.0
    if base == 0.0:
        return 0.0
    return v * _number(elementary.log(base))


def _sqrt(k: int, of: tuple[float, ...], v: float) -> float:
    if v == 0.0:
        raise _Steep
    return 0.5 / v


#: the derivative of a function by its argument number k, from the arguments and the value
_RULES: dict[str, Callable[[int, tuple[float, ...], float], float]] = {
    "add": lambda k, of, v: 1.0,
    "sub": lambda k, of, v: 1.0 if k == 0 else -1.0,
    "mul": lambda k, of, v: of[1 - k],
    "div": _div,
    "neg": lambda k, of, v: -1.0,
    "min": lambda k, of, v: 1.0 if of.index(v) == k else 0.0,
    "max": lambda k, of, v: 1.0 if of.index(v) == k else 0.0,
    "average": lambda k, of, v: 1.0 / float(len(of)),
    "abs": lambda k, of, v: -1.0 if of[0] < 0.0 else 1.0,
    "sqrt": _sqrt,
    "pow": _pow,
    "exp": lambda k, of, v: v,
    "log": lambda k, of, v: 1.0 / of[0],
    "sin": lambda k, of, v: _number(elementary.cos(of[0])),
    "cos": lambda k, of, v: -_number(elementary.sin(of[0])),
    "atan": lambda k, of, v: 1.0 / (1.0 + of[0] * of[0]),
    "erf": lambda k, of, v: _ERF * _number(elementary.exp(-(of[0] * of[0]))),
}


def _one(k: int) -> list[tuple[int, float]]:
    return [(k, 1.0)]


#: the derivatives of a function of a column by its places, from the column, the value and the index
_COLUMNS: dict[str, Callable[[tuple[float, ...], float, tuple[float, ...]], list[tuple[int, float]]]] = {
    "length": lambda x, v, at: [],
    "at": lambda x, v, at: _one(int(at[0])),
    "first": lambda x, v, at: _one(0),
    "last": lambda x, v, at: _one(len(x) - 1),
    "lowest": lambda x, v, at: _one(x.index(v)),
    "highest": lambda x, v, at: _one(x.index(v)),
    "total": lambda x, v, at: [(k, 1.0) for k in range(len(x))],
    "mean": lambda x, v, at: [(k, 1.0 / float(len(x))) for k in range(len(x))],
}
