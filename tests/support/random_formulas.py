"""Random formula trees from a seed, the names and columns that they ask for, and ways to damage them."""

from __future__ import annotations

import copy
import math
import random
import struct
from typing import Any

from fieldkit.formula import ast, parse
from fieldkit.values import Fault


class Maker:
    """Random trees from a seed: mostly sound, sometimes of the wrong kind, sometimes damaged."""

    def __init__(self, seed: int) -> None:
        self.rnd = random.Random(seed)

    def double(self) -> float:
        pick = self.rnd.random()
        if pick < 0.5:
            return self.rnd.uniform(-1, 1) * 10 ** self.rnd.randint(-3, 5)
        if pick < 0.7:
            return float(self.rnd.randint(-12, 12))
        if pick < 0.9:
            return self.rnd.uniform(-1, 1) * 10.0 ** self.rnd.randint(-300, 300)
        x = struct.unpack(">d", self.rnd.randbytes(8))[0]
        return x if math.isfinite(x) else 0.0

    def literal(self) -> dict[str, Any]:
        pick = self.rnd.random()
        if pick < 0.6:
            return {"number": f"{self.rnd.uniform(-1000, 1000):.{self.rnd.randint(0, 15)}f}"}
        if pick < 0.85:
            return {"number": f"{self.double():.30f}"}
        if pick < 0.97:
            return {"number": str(self.rnd.randint(-9, 9))}
        return self.rnd.choice([{"text": "on"}, {"flag": True}, {"number": "1e5"}, {}, {"series": "s"}])

    def name(self) -> dict[str, Any]:
        return {
            "name": self.rnd.choice(["a", "b", "c", "d", "e", "a", "b", "c", "d", "e", "flag", "word", "lost", "no"])
        }

    def number(self, depth: int) -> dict[str, Any]:
        pick = self.rnd.random()
        if depth <= 0 or pick < 0.12:
            return self.name() if self.rnd.random() < 0.5 else self.literal()
        if pick < 0.62:
            return self.call(self.rnd.choice(["add", "sub", "mul", "div"]), 2, depth)
        if pick < 0.72:
            return self.call(self.rnd.choice(["neg", "abs", "sqrt"]), 1, depth)
        if pick < 0.78:
            return self.call(self.rnd.choice(["min", "max", "average"]), self.rnd.randint(1, 4), depth)
        if pick < 0.86:
            return self.call(self.rnd.choice(["exp", "log", "sin", "cos", "atan", "erf"]), 1, depth)
        if pick < 0.89:
            return self.call("pow", 2, depth)
        if pick < 0.92:
            return {"call": "if", "of": [self.flag(depth - 1), self.number(depth - 1), self.number(depth - 1)]}
        if pick < 0.95:
            return self.column(depth)
        if pick < 0.96:
            says = self.rnd.choice([{"text": "it does not hold"}, {"text": "it does not hold"}, self.literal()])
            return {"call": "holds", "of": [self.flag(depth - 1), says, self.number(depth - 1)]}
        if pick < 0.985:
            name = self.rnd.choice(list(FORMULAS))
            return self.call(name, len(FORMULAS[name]["arguments"]), depth)
        xs = sorted({round(self.rnd.uniform(-5, 5), 2) for _ in range(self.rnd.randint(2, 6))})
        ys = [f"{self.rnd.uniform(-9, 9):.4f}" for _ in xs]
        return {"table": {"name": "t", "of": self.number(depth - 1), "x": [str(x) for x in xs], "y": ys}}

    def call(self, name: str, count: int, depth: int) -> dict[str, Any]:
        return {"call": name, "of": [self.number(depth - 1) for _ in range(count)]}

    def column(self, depth: int) -> dict[str, Any]:
        name = self.rnd.choice(["length", "first", "last", "lowest", "highest", "total", "mean", "at"])
        of: list[Any] = [{"series": self.rnd.choice(["s", "s", "s", "none", "no"])}]
        return {"call": name, "of": [*of, self.number(min(depth - 1, 1))] if name == "at" else of}

    def flag(self, depth: int) -> dict[str, Any]:
        pick = self.rnd.random()
        if depth <= 0 or pick < 0.15:
            return {"name": "flag"}
        if pick < 0.65:
            return self.call(self.rnd.choice(["lt", "le", "gt", "ge", "eq", "ne"]), 2, depth)
        if pick < 0.75:
            return {"call": "not", "of": [self.flag(depth - 1)]}
        count = self.rnd.randint(2, 3)
        return {"call": self.rnd.choice(["and", "or"]), "of": [self.flag(depth - 1) for _ in range(count)]}

    def names(self) -> dict[str, Any]:
        numbers = {n: self.double() for n in "abcde"}
        return numbers | {"flag": self.rnd.random() < 0.5, "word": "on", "lost": Fault("missing", "Not read yet.")}


def _argument(name: str, low: str | None, high: str | None, **more: Any) -> dict[str, Any]:
    return {"name": name, "unit": "kV", "factor": "1000", "offset": "0", "low": low, "high": high} | more


def _formula(expression: str, *arguments: dict[str, Any]) -> dict[str, Any]:
    tree = ast.to_json(parse.parse(expression, {"ranged": ("x",), "constant": ()}))
    return {"name": "", "meaning": "", "arguments": list(arguments), "result_unit": "1", "tree": tree, "reference": ""}


FORMULAS = {
    "square": _formula("x * x", _argument("x", None, None)),
    "ranged": _formula("x * x", _argument("x", "-3.5", "700")),
    "counted": _formula("x + 1", _argument("x", "-12", None, unit="1", factor="1", whole=True)),
    "constant": _formula("2 * 4.5 / 7"),
    "inner": _formula("ranged(x=x) + constant() * y", _argument("x", None, "9"), _argument("y", None, None)),
    "five": _formula("p - q * r / s + t", *[_argument(n, None, None) for n in "pqrst"]),
}


JUNK: tuple[Any, ...] = (
    *(None, 5, -0.5, True, "", "1e5", "x", [], [[]], {}, {"number": 5}, {"text": None}, {"flag": "yes"}),
    *({"name": ["a"]}, {"call": "mul"}, {"call": ["mul"], "of": []}, {"call": "ranged", "of": {}}, {"series": None}),
    *(
        {"table": []},
        {"table": {"x": ["1", "2"], "y": ["1", None], "of": {"number": "1"}}},
        {"call": "last", "of": [5]},
    ),
)


def damaged(part: Any, rnd: random.Random, share: float) -> Any:
    """A copy with some of its parts put out for junk, or left out."""
    if rnd.random() < share:
        return copy.deepcopy(rnd.choice(JUNK))
    if isinstance(part, dict):
        return {k: damaged(v, rnd, share) for k, v in part.items() if rnd.random() > share / 2}
    return [damaged(v, rnd, share) for v in part] if isinstance(part, list) else part
