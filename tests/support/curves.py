"""Formulas for fieldkit.fits.curve to fit: as random requests of its twins, good and bad."""

from __future__ import annotations

import random
from collections.abc import Callable
from typing import Any

from library_points import LIBRARY

from fieldkit.formula import ast, parse

#: what is fitted, its parameters with likely starting values, and what else it is told
FORMULAS: list[tuple[str, list[list[Any]], dict[str, Any]]] = [
    ("a + b * t", [["a", 1.0], ["b", 1.0]], {}),
    ("a * exp(-(b * t))", [["a", 1e-4], ["b", 0.1]], {}),
    ("a * (1 - exp(-(b * t)))", [["a", 30.0], ["b", 0.1]], {}),
    ("a * t ^ b", [["a", 1e-4], ["b", -1.0]], {}),
    ("a + b * (t - c) ^ 2", [["c", 10.0], ["a", 1.0], ["b", 1.0]], {}),
    ("a / (b + t)", [["a", 1.0], ["b", 1.0]], {}),
    ("a * k + b * t * t", [["a", 1.0], ["b", 1.0]], {"k": 2.5}),
    ("scale * warm_up_fraction(time=t, time_constant=tau)", [["scale", 30.0], ["tau", 20.0]], {}),
    ("max(a, b * t) + 0 * c", [["a", 1.0], ["b", 1.0], ["c", 1.0]], {}),
    ("a * b * t + if(t < knee, 0, 1)", [["a", 1.0], ["b", 1.0], ["knee", 4.0]], {}),
    ("sqrt(a - t) + b", [["a", 20.0], ["b", 0.0]], {}),
]
USED = LIBRARY.used(["warm_up_fraction"])


def tree(text: str) -> dict[str, Any]:
    return ast.to_json(parse.parse(text, LIBRARY.signatures()))


def asked(r: random.Random, u: Any, or_bad: Callable[[random.Random, Any], Any]) -> list[Any]:
    """The arguments after the columns: tree, along, start, u, known, formulas."""
    text, start, known = r.choice(FORMULAS)
    start = [[name, or_bad(r, value * 10.0 ** r.uniform(-0.5, 0.5))] for name, value in start]
    way = r.random()
    if way < 0.06:
        start = r.choice([None, [], start * 5, [["a"]], [["t", 1.0]], start[:1] * 2, [[3, 1.0]], {"a": 1.0}, start[1:]])
    made: Any = tree(text)
    if 0.06 < way < 0.1:
        made = r.choice([None, [], {"name": "a"}, {"flag": True}, {"call": "sqrt", "of": [{"number": "-1"}]}, "a"])
    along = "t" if r.random() < 0.97 else r.choice(["x", "", "T", None, "a", "__proto__"])
    formulas = USED if r.random() < 0.97 else r.choice([None, {}, [], {"warm_up_fraction": 3}])
    return [made, along, start, u, known if r.random() < 0.97 else r.choice([None, {"t": 1.0}, {"k": "x"}]), formulas]
