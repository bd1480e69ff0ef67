"""How a formula's answer changes with each thing that it is made of: the same tree, differentiated as it is evaluated.

    prepare(tree, formulas).gradient(names, series)    Gradient(value, of={"beam_voltage": 2.2, "ion[3]": 0.25})

Forward differentiation, exact to rounding: every node gives its value and, for each name below it, the derivative. Of
`if`, `min` and `max` that of the branch taken counts; of a table the slope of the segment; where two meet in one point,
the steeper one (rates.py says where), so that no uncertainty is lost at a kink. Where an answer changes without bound
(the square root at zero), its value stands and `of` is a Fault "domain".

The twin is static/core/slopes.js, rule by rule. Not here: the rule of each function (rates.py), what is made of the
derivatives (spread.py), what nodes give (evaluate.py, nodes.py, functions.py).
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from operator import itemgetter
from types import MappingProxyType
from typing import Any, NamedTuple, Union

from fieldkit import values
from fieldkit.formula import ast, evaluate, nodes, rates
from fieldkit.formula.functions import FUNCTIONS, Run, Stop, Value, wrong_type
from fieldkit.formula.nodes import Part
from fieldkit.formula.rates import NONE, Look, Slopes, Steep, lost
from fieldkit.values import Fault

_NOTHING: Mapping[str, Any] = MappingProxyType({})
_STEEP = Fault("domain", "The result changes without bound at this value, so it has no uncertainty.")
_COMPARED = ("lt", "le", "gt", "ge")


class Gradient(NamedTuple):
    """The value, and its derivatives in SI by name ("x") and by place in a column ("x[3]"); or why there are none."""

    value: Value
    of: Union[Slopes, Fault]


@dataclass(frozen=True, slots=True)
class Prepared:
    """A tree made ready. Holds while tree and formulas stay as they were."""

    gradient: Callable[..., Gradient]


@dataclass(frozen=True, slots=True)
class Node:
    """A part that changes with what names mean."""

    look: Look
    #: it never gives anything but a number
    number: bool = False
    #: the name that it is, where the caller tells what names mean
    name: str | None = None


def prepare(tree: ast.Tree | dict[str, Any], formulas: Mapping[str, Any] | None = None) -> Prepared:
    """`tree` made ready to be differentiated, with the formulas that it calls. Raises nothing, whatever the tree is."""
    data = tree if isinstance(tree, dict) else ast.to_json(tree)
    plain = evaluate.prepare(data, formulas)
    first = plain.value()
    if isinstance(first, Fault) and first.code == "too-deep":
        # so whatever is walked below ends
        return Prepared(lambda names=_NOTHING, series=_NOTHING: Gradient(first, first))
    made = _Making(formulas or _NOTHING)
    look = made.whole(data).look
    columns = made.columns or made.plain.columns

    def gradient(names: Mapping[str, Any] = _NOTHING, series: Mapping[str, Sequence[float]] = _NOTHING) -> Gradient:
        try:
            value, slopes = look({**names, nodes.COLUMNS: series} if columns else names, None)
        except (Steep, Stop):
            value = plain.value(names, series)
            return Gradient(value, value if isinstance(value, Fault) else _STEEP)
        return Gradient(value, dict(slopes))

    return Prepared(gradient)


class _Making:
    """Makes one tree ready, and once each the formulas that it calls; `plain` makes what is not differentiated.

    A part in which nothing changes with what names mean is None, until the part above it needs it made ready.
    """

    def __init__(self, formulas: Mapping[str, Any]) -> None:
        self.formulas = formulas
        self.plain = evaluate.Making(formulas)
        self.bodies: dict[str, Node] = {}
        self.columns = False

    def ask(self, tree: Any) -> Part:
        self.plain.size = 0  # the whole has been counted
        return self.plain.part(tree, 0)

    def whole(self, tree: Any) -> Node:
        return self.node(tree) or self.flat(tree)

    def flat(self, tree: Any) -> Node:
        part = self.ask(tree)
        run = part.run
        return Node(lambda e, g: (run(e), NONE), part.number)

    def node(self, tree: Any) -> Node | None:
        if not isinstance(tree, dict) or "number" in tree or "text" in tree or "flag" in tree:
            return None
        if "name" in tree:
            return self.named(tree["name"])
        if "table" in tree:
            return self.table(tree["table"])
        if "call" in tree and isinstance(tree.get("of"), list):
            return self.call(tree["call"], tree["of"])
        return None

    def named(self, name: Any) -> Node | None:
        if not isinstance(name, str):
            return None
        if self.plain.arguments is None:
            return _named(name)
        place = self.plain.arguments.get(name)
        return None if place is None else Node(lambda e, g: (e[place], g[place]), True)

    def parts(self, of: list[Any]) -> list[Node] | None:
        """All of them, or None where nothing changes in any."""
        found = [self.node(tree) for tree in of]
        if not any(found):
            return None
        return [node or self.flat(tree) for node, tree in zip(found, of, strict=True)]

    def call(self, function: Any, of: list[Any]) -> Node | None:
        entry = FUNCTIONS.get(function) if isinstance(function, str) else None
        if entry is None:
            return self.library(function, of)
        if len(of) < entry.least or (entry.most is not None and len(of) > entry.most):
            return None
        if function == "if":
            return self.choice(of)
        if function == "holds":
            return self.held(of)
        if entry.on_series:
            return self.on_column(function, of)
        parts = self.parts(of) if function in rates.MAKERS else None
        return None if parts is None else Node(rates.MAKERS[function](*[_sure(p) for p in parts]), True)

    def choice(self, of: list[Any]) -> Node | None:
        parts = self.parts(of[1:])
        if parts is None:
            return None
        condition, meets = self.ask(of[0]).run, self.meets(of[0])
        held, other = parts[0].look, parts[1].look

        def look(e: Any, g: Any) -> tuple[Any, Slopes]:
            flag = condition(e)
            if type(flag) is not bool:
                raise lost()
            found = held(e, g) if flag else other(e, g)
            return _met(found, other if flag else held, e, g) if meets is not None and meets(e) else found

        return Node(look, parts[0].number and parts[1].number)

    def meets(self, condition: Any) -> Run | None:
        """Whether the two sides of a comparison are equal, so that both branches of an `if` end here."""
        of = condition.get("of") if isinstance(condition, dict) and condition.get("call") in _COMPARED else None
        if not isinstance(of, list) or len(of) != 2:
            return None
        left, right = [self.ask(tree).run for tree in of]
        return lambda e: left(e) == right(e)

    def held(self, of: list[Any]) -> Node | None:
        part = self.node(of[2])
        if part is None:
            return None
        condition, inner = self.ask(of[0]).run, part.look

        def look(e: Any, g: Any) -> tuple[Any, Slopes]:
            if condition(e) is not True:
                raise lost()
            return inner(e, g)

        return Node(look, part.number)

    def on_column(self, function: str, of: list[Any]) -> Node | None:
        """A function of a column: its index, where it has one, is not differentiated."""
        entry, rule = FUNCTIONS[function], rates.COLUMNS.get(function)
        name = of[0].get("series") if isinstance(of[0], dict) else None
        if not isinstance(name, str) or self.plain.arguments is not None or entry.make is None or rule is None:
            return None
        self.columns = True
        indexes = [nodes.number(self.ask(p), wrong_type(function)) for p in of[1:]]
        column = nodes.column(name)
        run = entry.make(*[itemgetter(k) for k in range(len(of))])

        def look(e: Any, g: Any) -> tuple[Any, Slopes]:
            x, at = column(e), [index(e) for index in indexes]
            v = run((x, *at))
            return v, {f"{name}[{k}]": d for k, d in rule(x, v, at)}

        return Node(look, True)

    def library(self, function: Any, of: list[Any]) -> Node | None:
        formula = self.formulas.get(function) if isinstance(function, str) else None
        arguments = nodes.aspect(formula, "arguments")
        if not isinstance(arguments, list | tuple) or len(arguments) != len(of):
            return None
        names = [nodes.aspect(a, "name") for a in arguments]
        parts = self.parts(of) if all(isinstance(name, str) for name in names) else None
        if parts is None:
            return None
        body = self.body(function, formula, names)
        held = [_held(function, a, p) for a, p in zip(arguments, parts, strict=True)]
        return Node(_called(body.look, held), body.number)

    def body(self, function: str, formula: Any, names: list[str]) -> Node:
        if function not in self.bodies:
            outer, self.plain.arguments = self.plain.arguments, {name: k for k, name in enumerate(names)}
            self.bodies[function] = self.whole(nodes.aspect(formula, "tree"))
            self.plain.arguments = outer
        return self.bodies[function]

    def table(self, table: Any) -> Node | None:
        if not isinstance(table, dict) or not isinstance(table.get("x"), list) or not isinstance(table.get("y"), list):
            return None
        at = self.node(table.get("of"))
        if at is None:
            return None
        inner, run, slope = _sure(at), nodes.table(table, rates.given), _slopes(table)

        def look(e: Any, g: Any) -> tuple[Any, Slopes]:
            x, p = inner(e, g)
            v = run(x)
            return v, rates.scaled(slope(x), p) if p else NONE

        return Node(look, True)


def _named(name: str) -> Node:
    run, own = nodes.named(name).run, {name: 1.0}

    def look(e: Any, g: Any) -> tuple[Any, Slopes]:
        v = run(e)
        return v, own if type(v) is float else NONE

    return Node(look, name=name)


def _sure(node: Node) -> Look:
    """The part as a number."""
    inner = node.look
    if node.name is not None:
        run, own = nodes.number(nodes.named(node.name), lost().fault), {node.name: 1.0}
        return lambda e, g: (run(e), own)

    def look(e: Any, g: Any) -> tuple[Any, Slopes]:
        found = inner(e, g)
        if type(found[0]) is not float:
            raise lost()
        return found

    return inner if node.number else look


def _held(function: str, argument: Any, node: Node) -> Look:
    """An argument of a formula of the library, held to its range."""
    if node.name is not None:
        run, own = nodes.ranged(function, argument, nodes.named(node.name)), {node.name: 1.0}
        return lambda e, g: (run(e), own)
    inner, check = node.look, nodes.ranged(function, argument, Part(rates.given))

    def look(e: Any, g: Any) -> tuple[Any, Slopes]:
        v, slopes = inner(e, g)
        return check(v), slopes

    return look


def _called(body: Look, held: list[Look]) -> Look:
    def look(e: Any, g: Any) -> tuple[Any, Slopes]:
        given, slopes = [], []
        for part in held:
            v, p = part(e, g)
            given.append(v)
            slopes.append(p)
        return body(given, slopes)

    return look


def _met(found: tuple[Any, Slopes], left: Look, e: Any, g: Any) -> tuple[Any, Slopes]:
    """Where two branches meet: the steeper slopes, if the branch that was not taken gives the same value."""
    try:
        v, slopes = left(e, g)
    except Stop:
        return found
    return (v, rates.steeper(found[1], slopes)) if type(v) is type(found[0]) and v == found[0] else found


def _slopes(table: dict[str, Any]) -> Callable[[float], float]:
    """The slope of a table at a place in it, the steeper one at a node; a damaged table is never asked."""
    x, y = [[values.number(t) for t in table[key] if isinstance(t, str)] for key in ("x", "y")]
    xs, ys = [[v for v in column if isinstance(v, float)] for column in (x, y)]
    if len(xs) != len(ys) or any(b <= a for a, b in pairwise(xs)):
        return lambda at: 0.0
    steps = [(ys[k + 1] - ys[k]) / (xs[k + 1] - xs[k]) for k in range(len(xs) - 1)]

    def slope(at: float) -> float:
        k = bisect_right(xs, at) - 1
        found = 0.0
        for one in steps[k - 1 if k > 0 and at == xs[k] else k : k + 1]:
            found = one if abs(one) > abs(found) else found
        return found

    return slope
