"""What a formula tree gives: a number, a flag, a text or a Fault. Total: never an exception, never NaN or infinity.

Faults are values: the first one met, from left to right, is the answer, except where `if`, `and` or `or` settle the
answer without it. Trees are taken in the JSON form that sheets carry (fieldkit.formula.ast), because a sheet may come
from a foreign file: whatever is not a tree is a Fault "bad-tree", and depth and work are bounded ("too-deep").

The twin is static/core/evaluate.js, arm by arm. Not here: what names mean (fieldkit.run.progress gives them), and
what each function does (functions.py).
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from sys import float_info
from typing import Any

from fieldkit import values
from fieldkit.formula import ast
from fieldkit.formula.functions import FUNCTIONS, Function, Value
from fieldkit.values import Fault

#: nodes below nodes, library formulas included
DEEPEST = 120
#: nodes looked at in one evaluation
MOST_WORK = 20_000


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
    data = tree if isinstance(tree, dict) else ast.to_json(tree)
    return _Work(names or {}, series or {}, formulas or {}).value(data, 0)


class _Work:
    """One evaluation: what names mean, and how much work is left."""

    def __init__(self, names: Mapping[str, Any], series: Mapping[str, Any], formulas: Mapping[str, Any]) -> None:
        self.names = names
        self.series = series
        self.formulas = formulas
        self.left = MOST_WORK

    def value(self, tree: Any, depth: int) -> Value:
        self.left -= 1
        if depth > DEEPEST or self.left < 0:
            return Fault("too-deep", "The formula is nested too deeply, or is too long.")
        if not isinstance(tree, dict):
            return _bad_tree()
        if "number" in tree:
            text = tree["number"]
            return values.number(text) if isinstance(text, str) else _bad_tree()
        if "text" in tree:
            return tree["text"] if isinstance(tree["text"], str) else _bad_tree()
        if "flag" in tree:
            return tree["flag"] if isinstance(tree["flag"], bool) else _bad_tree()
        if "name" in tree:
            return self._name(tree["name"])
        if "table" in tree:
            return self._table(tree["table"], depth)
        if "call" in tree and isinstance(tree.get("of"), list):
            return self._call(tree["call"], tree["of"], depth)
        if "series" in tree:
            return Fault("wrong-type", "A column of numbers stands where one number belongs.")
        return _bad_tree()

    def _name(self, name: Any) -> Value:
        if not isinstance(name, str):
            return _bad_tree()
        if name not in self.names:
            return Fault("unknown-name", f"There is no value named {name}.")
        found = self.names[name]
        if isinstance(found, bool | str | Fault):
            return found
        number = _column([found])
        if number is not None:
            return number[0]
        return Fault("wrong-type", f"{name} is no number, text or flag.")

    def _call(self, function: Any, of: list[Any], depth: int) -> Value:
        entry = FUNCTIONS.get(function) if isinstance(function, str) else None
        if entry is None:
            return self._library(function, of, depth)
        if len(of) < entry.least or (entry.most is not None and len(of) > entry.most):
            return Fault("bad-tree", f"{function} was given {len(of)} values.")
        if entry.apply is None:
            return self._choose(function, of, depth)
        if entry.on_series:
            return self._on_column(entry, of, depth)
        given: list[Value] = []
        for part in of:
            value = self.value(part, depth + 1)
            if isinstance(value, Fault):
                return value
            given.append(value)
        return entry.apply(*given)

    def _choose(self, function: str, of: list[Any], depth: int) -> Value:
        """if, holds, and, or: only what is needed for the answer is evaluated."""
        parts = of[:1] if function in ("if", "holds") else of
        for part in parts:
            flag = self.value(part, depth + 1)
            if isinstance(flag, Fault):
                return flag
            if type(flag) is not bool:
                return Fault("wrong-type", f"{function} was given something that is no yes or no.")
            if function == "if":
                return self.value(of[1] if flag else of[2], depth + 1)
            if function == "holds":
                return self.value(of[2], depth + 1) if flag else _not_held(self.value(of[1], depth + 1))
            if flag is (function == "or"):
                return flag
        return function == "and"

    def _on_column(self, entry: Function, of: list[Any], depth: int) -> Value:
        name = of[0].get("series") if isinstance(of[0], dict) else None
        if not isinstance(name, str):
            return Fault("wrong-type", "One number stands where a column of numbers belongs.")
        if name not in self.series:
            return Fault("unknown-name", f"There is no column of numbers named {name}.")
        column = _column(self.series[name])
        if column is None:
            return Fault("wrong-type", f"{name} holds something that is no number.")
        given: list[Value] = []
        for part in of[1:]:
            value = self.value(part, depth + 1)
            if isinstance(value, Fault):
                return value
            given.append(value)
        assert entry.apply is not None
        return entry.apply(column, *given)

    def _library(self, function: Any, of: list[Any], depth: int) -> Value:
        if not isinstance(function, str) or function not in self.formulas:
            return Fault("unknown-function", f"There is no formula named {function}.")
        formula = self.formulas[function]
        arguments = _part(formula, "arguments")
        if not isinstance(arguments, list | tuple) or len(arguments) != len(of):
            return Fault("bad-tree", f"{function} was given {len(of)} values.")
        given: dict[str, Any] = {}
        for argument, part in zip(arguments, of, strict=True):
            value = self.value(part, depth + 1)
            if isinstance(value, Fault):
                return value
            outside = _outside(function, argument, value)
            if outside is not None:
                return outside
            given[_part(argument, "name")] = value
        caller, self.names, columns, self.series = self.names, given, self.series, {}
        value = self.value(_part(formula, "tree"), depth + 1)
        self.names, self.series = caller, columns
        return value

    def _table(self, table: Any, depth: int) -> Value:
        if not isinstance(table, dict) or not isinstance(table.get("x"), list) or not isinstance(table.get("y"), list):
            return _bad_tree()
        at = self.value(table.get("of"), depth + 1)
        if isinstance(at, Fault):
            return at
        if type(at) is not float:
            return Fault("wrong-type", "A table was asked with something that is no number.")
        xs, ys = _numbers(table["x"]), _numbers(table["y"])
        if xs is None or ys is None or len(xs) != len(ys) or len(xs) < 2:
            return _bad_tree()
        return _interpolate(str(table.get("name")), at, xs, ys)


def _not_held(says: Value) -> Fault:
    """The answer of `holds` where its condition does not hold; `says` tells the person which one."""
    if isinstance(says, Fault):
        return says
    return Fault("out-of-range", says) if isinstance(says, str) else Fault("wrong-type", "holds has no sentence.")


def _interpolate(name: str, at: float, xs: list[float], ys: list[float]) -> Value:
    """Linear between neighbours; at a node exactly the node's value."""
    if at < xs[0] or at > xs[-1]:
        return Fault("out-of-range", f"{name}: {values.round12(at)} is outside the table, in SI units.")
    k = 0
    while k < len(xs) - 2 and at >= xs[k + 1]:
        k += 1
    if xs[k + 1] <= xs[k]:
        return _bad_tree()
    if at == xs[k + 1]:
        return ys[k + 1]
    value = ys[k] + (ys[k + 1] - ys[k]) * ((at - xs[k]) / (xs[k + 1] - xs[k]))
    return value if math.isfinite(value) else Fault("overflow", f"The result of {name} is too large.")


def _outside(function: str, argument: Any, value: Value) -> Fault | None:
    """The Fault where an argument lies outside the range for which the formula holds."""
    name, low, high = _part(argument, "name"), _part(argument, "low"), _part(argument, "high")
    if type(value) is not float:
        return Fault("wrong-type", f"{function}: {name} is no number.")
    least, most = _end(low), _end(high)
    factor, offset = _end(_part(argument, "factor")), _end(_part(argument, "offset"))
    if isinstance(least, Fault) or isinstance(most, Fault):
        return _bad_tree()
    if not isinstance(factor, float) or not isinstance(offset, float) or factor <= 0.0:
        return _bad_tree()
    whole = _part(argument, "whole")
    if whole is not None and type(whole) is not bool:
        return _bad_tree()
    unit = _Scale(str(_part(argument, "factor")), str(_part(argument, "offset")))
    symbol = str(_part(argument, "unit"))
    after = "" if symbol in ("", "1") else f" {symbol}"
    if (least is not None and value < least) or (most is not None and value > most):
        ends = [("from", least), ("to", most)]
        span = " ".join(f"{word} {values.to_shown(end, unit)}" for word, end in ends if end is not None)
        says = f"{function}: {name} is {values.to_shown(value, unit)}{after}; the formula holds {span}{after}."
        return Fault("out-of-range", says)
    if whole and value != math.floor(value):
        shown = values.to_shown(value, unit)
        return Fault("out-of-range", f"{function}: {name} is {shown}{after}; only whole numbers.")
    return None


def _end(text: Any) -> float | Fault | None:
    """A decimal text as a number, None as none; a Fault for anything else."""
    if text is None:
        return None
    return values.number(text) if isinstance(text, str) else _bad_tree()


class _Scale:
    def __init__(self, factor: str, offset: str) -> None:
        self.factor = factor
        self.offset = offset


def _column(given: Any) -> tuple[float, ...] | None:
    """Doubles, where every one is a finite number; None where one is not."""
    if not isinstance(given, list | tuple):
        return None
    if not all(isinstance(v, int | float) and not isinstance(v, bool) and abs(v) <= _LARGEST for v in given):
        return None
    return tuple(float(v) for v in given)


_LARGEST = float_info.max


def _numbers(texts: list[Any]) -> list[float] | None:
    found = [values.number(t) if isinstance(t, str) else None for t in texts]
    good = [v for v in found if isinstance(v, float)]
    return good if len(good) == len(found) else None


def _part(thing: Any, name: str) -> Any:
    """A part of a FormulaUsed or Argument, or of the same as plain JSON."""
    return thing.get(name) if isinstance(thing, Mapping) else getattr(thing, name, None)


def _bad_tree() -> Fault:
    return Fault("bad-tree", "The formula in the sheet is damaged.")
