"""What a formula tree gives: a number, a flag, a text or a Fault. Total: never an exception, never NaN or infinity.

    prepare(tree, formulas).value(names, series)      the tree made ready once, asked as often as wanted
    evaluate(tree, names, series, formulas)           the same for one time

Faults are values: the first one met, from left to right, is the answer, except where `if`, `holds`, `and` or `or`
settle the answer without it. Trees are taken in the JSON form that sheets carry (fieldkit.formula.ast), because a sheet
may come from a foreign file: whatever is not a tree is a Fault "bad-tree" where it is reached. A tree that is too high
or too large, each formula of the library counted wherever it is called, is a Fault "too-deep" as a whole.

To make ready means to turn every node into a function of what names mean, with all that does not depend on them done
beforehand: decimals read, formulas found, parts that never change worked out. Inside, a Fault travels as the exception
`Stop`. What names mean is the caller's mapping; in a formula of the library it is the tuple of its arguments.

The twin is static/core/evaluate.js, arm by arm. Not here: what names mean (fieldkit.run.progress gives them), what each
function does (functions.py), what all other nodes do (nodes.py).
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

from fieldkit import values
from fieldkit.formula import ast, nodes
from fieldkit.formula.functions import FUNCTIONS, Function, Run, Stop, Value, wrong_type
from fieldkit.formula.nodes import Part
from fieldkit.values import Fault

#: nodes below nodes, library formulas included
DEEPEST = 120
#: nodes in all, library formulas included each time they are called
MOST_WORK = 20_000

_NOTHING: Mapping[str, Any] = MappingProxyType({})


@dataclass(frozen=True, slots=True)
class Prepared:
    """A tree made ready: `value(names, series)` as in `evaluate`. Holds while tree and formulas stay as they were."""

    value: Callable[..., Value]


def evaluate(
    tree: ast.Tree | dict[str, Any],
    names: Mapping[str, Any] | None = None,
    series: Mapping[str, Sequence[float]] | None = None,
    formulas: Mapping[str, Any] | None = None,
) -> Value:
    """The value of `tree`, in SI.

    `names` gives numbers, flags, texts and Faults (DEVELOPERS.md, "Names"); `series` gives columns of numbers;
    `formulas` gives the library formulas aboard the sheet, as sheet.model.FormulaUsed or the same as plain JSON.
    """
    return prepare(tree, formulas).value(names or _NOTHING, series or _NOTHING)


def prepare(tree: ast.Tree | dict[str, Any], formulas: Mapping[str, Any] | None = None) -> Prepared:
    """`tree` made ready, with the formulas that it calls. Raises nothing, whatever the tree is."""
    made = Making(formulas or _NOTHING)
    try:
        run = made.part(tree if isinstance(tree, dict) else ast.to_json(tree), 0).run
    except Stop as stop:
        run = nodes.stops(stop.fault).run

    def value(names: Mapping[str, Any] = _NOTHING, series: Mapping[str, Sequence[float]] = _NOTHING) -> Value:
        try:
            return run(names)
        except Stop as stop:
            return stop.fault

    def value_of_columns(names: Mapping[str, Any] = _NOTHING, series: Mapping[str, Any] = _NOTHING) -> Value:
        return value({**names, nodes.COLUMNS: series})

    return Prepared(value_of_columns if made.columns else value)


class Making:
    """Makes one tree ready, and once each the formulas that it calls."""

    def __init__(self, formulas: Mapping[str, Any]) -> None:
        self.formulas = formulas
        #: nodes so far, of the tree or of the formula that is being made ready
        self.size = 0
        #: inside a formula: its arguments, and which of them each is
        self.arguments: dict[str, int] | None = None
        #: formulas made ready, with their sizes; None while one is being made
        self.bodies: dict[str, tuple[Part, int] | None] = {}
        self.columns = False

    def count(self, depth: int, size: int) -> None:
        self.size += size
        if depth > DEEPEST or self.size > MOST_WORK:
            raise _too_deep()

    def part(self, tree: Any, depth: int) -> Part:
        self.count(depth, 1)
        if not isinstance(tree, dict):
            return nodes.stops(nodes.bad_tree())
        if "number" in tree:
            text = tree["number"]
            return nodes.constant(values.number(text) if isinstance(text, str) else nodes.bad_tree())
        if "text" in tree:
            return nodes.constant(tree["text"] if isinstance(tree["text"], str) else nodes.bad_tree())
        if "flag" in tree:
            return nodes.constant(tree["flag"] if isinstance(tree["flag"], bool) else nodes.bad_tree())
        if "name" in tree:
            return self.named(tree["name"])
        if "table" in tree:
            return self.table(tree["table"], depth)
        if "call" in tree and isinstance(tree.get("of"), list):
            return self.call(tree["call"], tree["of"], depth)
        if "series" in tree:
            return nodes.stops(Fault("wrong-type", "A column of numbers stands where one number belongs."))
        return nodes.stops(nodes.bad_tree())

    def named(self, name: Any) -> Part:
        if not isinstance(name, str):
            return nodes.stops(nodes.bad_tree())
        if self.arguments is None:
            return nodes.named(name)
        return nodes.argument(self.arguments[name]) if name in self.arguments else nodes.stops(nodes.unknown(name))

    def call(self, function: Any, of: list[Any], depth: int) -> Part:
        entry = FUNCTIONS.get(function) if isinstance(function, str) else None
        if entry is None:
            return self.library(function, of, depth)
        if len(of) < entry.least or (entry.most is not None and len(of) > entry.most):
            return nodes.stops(_miscounted(function, of))
        if entry.on_series:
            return self.on_column(function, entry, of, depth)
        parts = [self.part(p, depth + 1) for p in of]
        if entry.make is None:
            return _whole(nodes.choice(function, parts), nodes.chosen(function, parts), parts, _fixed(parts))
        runs = [nodes.number(p, wrong_type(function)) if entry.numbers else p.run for p in parts]
        return _whole(entry.make(*runs), entry.number, parts, _fixed(parts))

    def on_column(self, function: str, entry: Function, of: list[Any], depth: int) -> Part:
        name = of[0].get("series") if isinstance(of[0], dict) else None
        if not isinstance(name, str):
            return nodes.stops(Fault("wrong-type", "One number stands where a column of numbers belongs."))
        if self.arguments is not None:
            return nodes.stops(nodes.no_column(name))
        self.columns = True
        parts = [self.part(p, depth + 1) for p in of[1:]]
        runs = [nodes.number(p, wrong_type(function)) for p in parts]
        assert entry.make is not None
        return _whole(entry.make(nodes.column(name), *runs), entry.number, parts, False)

    def library(self, function: Any, of: list[Any], depth: int) -> Part:
        if not isinstance(function, str):
            return nodes.stops(Fault("unknown-function", "The name of a formula is no text."))
        if function not in self.formulas:
            return nodes.stops(Fault("unknown-function", f"There is no formula named {function}."))
        formula = self.formulas[function]
        arguments = nodes.aspect(formula, "arguments")
        if not isinstance(arguments, list | tuple) or len(arguments) != len(of):
            return nodes.stops(_miscounted(function, of))
        names = [nodes.aspect(a, "name") for a in arguments]
        if not all(isinstance(name, str) for name in names):
            return nodes.stops(nodes.bad_tree())
        parts = [self.part(p, depth + 1) for p in of]
        body = self.body(function, formula, names, depth + 1)
        given = [nodes.ranged(function, a, p) for a, p in zip(arguments, parts, strict=True)]
        return _whole(nodes.called(body.run, given), body.number, [*parts, body], _fixed(parts))

    def body(self, function: str, formula: Any, names: list[str], depth: int) -> Part:
        """The tree of a formula, made ready the first time that it is called."""
        if function not in self.bodies:
            self.bodies[function] = None
            outer = self.arguments, self.size
            self.arguments, self.size = {name: k for k, name in enumerate(names)}, 0
            made = self.part(nodes.aspect(formula, "tree"), depth)
            self.bodies[function] = made, self.size
            self.arguments, self.size = outer
        found = self.bodies[function]
        if found is None:  # it calls itself
            raise _too_deep()
        self.count(depth + found[0].height, found[1])
        return found[0]

    def table(self, table: Any, depth: int) -> Part:
        if not isinstance(table, dict) or not isinstance(table.get("x"), list) or not isinstance(table.get("y"), list):
            return nodes.stops(nodes.bad_tree())
        at = self.part(table.get("of"), depth + 1)
        asked = nodes.number(at, Fault("wrong-type", "A table was asked with something that is no number."))
        return _whole(nodes.table(table, asked), True, [at], at.fixed)


def _fixed(parts: list[Part]) -> bool:
    return all(p.fixed for p in parts)


def _whole(run: Run, number: bool, parts: list[Part], fixed: bool) -> Part:
    """A node over its parts; asked at once where nothing can change its answer."""
    height = 1 + max((p.height for p in parts), default=-1)
    if not fixed:
        return Part(run, number, height=height)
    try:
        value = run(())
    except Stop as stop:
        return nodes.stops(stop.fault, height)
    return nodes.constant(value, height)


def _miscounted(function: str, of: list[Any]) -> Fault:
    return Fault("bad-tree", f"{function} was given {len(of)} values.")


def _too_deep() -> Stop:
    return Stop(Fault("too-deep", "The formula is nested too deeply, or is too long."))
