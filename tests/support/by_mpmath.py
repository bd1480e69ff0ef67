"""Formula trees worked out in forty digits: an evaluator of its own, with nothing of fieldkit's but the trees.

Decimals of a tree are taken as the doubles that stand for them, so that nodes and branches are met where fieldkit meets
them. It looks at no range and raises no Fault: ask it only where there is an answer.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import reduce
from typing import Any

import mpmath

mpmath.mp.dps = 40

FUNCTIONS: dict[str, Callable[..., Any]] = {
    "add": lambda a, b: a + b,
    "sub": lambda a, b: a - b,
    "mul": lambda a, b: a * b,
    "div": lambda a, b: a / b,
    "neg": lambda a: -a,
    "lt": lambda a, b: a < b,
    "le": lambda a, b: a <= b,
    "gt": lambda a, b: a > b,
    "ge": lambda a, b: a >= b,
    "eq": lambda a, b: a == b,
    "ne": lambda a, b: a != b,
    "and": lambda *of: all(of),
    "or": lambda *of: any(of),
    "not": lambda a: not a,
    "min": min,
    "max": max,
    "average": lambda *of: reduce(lambda a, b: a + b, of) / len(of),
    "abs": abs,
    "sqrt": mpmath.sqrt,
    "pow": mpmath.power,
    "exp": mpmath.exp,
    "log": mpmath.log,
    "sin": mpmath.sin,
    "cos": mpmath.cos,
    "atan": mpmath.atan,
    "erf": mpmath.erf,
}


def value(tree: Any, names: Mapping[str, Any], formulas: Mapping[str, Any]) -> Any:
    match tree:
        case {"number": text}:
            return mpmath.mpf(float(text))
        case {"name": name}:
            return names[name]
        case {"table": table}:
            return _between(table, value(table["of"], names, formulas))
        case {"call": "if", "of": [condition, held, other]}:
            return value(held if value(condition, names, formulas) else other, names, formulas)
        case {"call": "holds", "of": [_, _, held]}:
            return value(held, names, formulas)
        case {"call": name, "of": of}:
            given = [value(part, names, formulas) for part in of]
            if name in FUNCTIONS:
                return FUNCTIONS[name](*given)
            own = [a["name"] for a in formulas[name]["arguments"]]
            return value(formulas[name]["tree"], dict(zip(own, given, strict=True)), formulas)
    raise AssertionError(tree)


def _between(table: Any, at: Any) -> Any:
    x, y = ([mpmath.mpf(float(t)) for t in table[key]] for key in ("x", "y"))
    k = max(0, min(sum(v <= at for v in x), len(x) - 1) - 1)
    return y[k] + (y[k + 1] - y[k]) * (at - x[k]) / (x[k + 1] - x[k])


def slope(tree: Any, names: Mapping[str, float], by: str, formulas: Mapping[str, Any], side: int = 0) -> float:
    """The derivative by one name, by differences in forty digits: of both sides, or of one (-1, 1)."""
    given = {name: mpmath.mpf(v) for name, v in names.items()}

    def along(t: Any) -> Any:
        return value(tree, {**given, by: t}, formulas)

    return float(mpmath.diff(along, given[by], direction=side))
