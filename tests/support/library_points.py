"""The library of formulas, points at which each is asked (in range, at an end, a little outside), and its other twin."""

from __future__ import annotations

import json
import math
import random
import shutil
import struct
import subprocess
from pathlib import Path
from typing import Any

import pytest

from fieldkit.files import folder
from fieldkit.formula import library
from fieldkit.formula.arguments import Argument

LIBRARY = library.load(Path(folder("procedures")) / "formulas")


def _ends(a: Argument) -> tuple[float, float]:
    """The range of an argument; of one without an end, what a meter might show."""
    low = float(a.low) if a.low is not None else -1e4
    high = float(a.high) if a.high is not None else 1e4
    return low, high


def _one(a: Argument, rnd: random.Random) -> float:
    """A value of an argument: in its range as a rule, at an end, or a little outside, sometimes."""
    low, high = _ends(a)
    way = rnd.random()
    if way < 0.04:
        value = rnd.choice((low, high))
    elif way < 0.06:
        value = rnd.choice((low - 1e-3 * (high - low), high + 1e-3 * (high - low)))
    elif way < 0.5 and low >= 0 and high > 0:
        value = math.exp(rnd.uniform(math.log(max(low, high * 1e-6)), math.log(high)))
    else:
        value = rnd.uniform(low, high)
    return float(round(value)) if a.whole and rnd.random() < 0.95 else value


def points(name: str, count: int) -> list[list[float]]:
    """Random points, and points near the first worked example, where what the formula requires holds."""
    formula, rnd = LIBRARY.formulas[name], random.Random(f"points of {name}")
    if not formula.arguments:
        return [[]]
    good = next(e for e in formula.examples if not e.fault)
    example = [float(g) for g in good.given]
    found = [example]
    while len(found) < count:
        row = [_one(a, rnd) for a in formula.arguments]
        if len(found) % 3 == 0:
            row = [v if rnd.random() < 0.3 else e * rnd.uniform(0.98, 1.02) for v, e in zip(row, example, strict=True)]
            row = [float(round(v)) if a.whole else v for v, a in zip(row, formula.arguments, strict=True)]
        found.append(row)
    return found


def call(name: str) -> dict[str, Any]:
    """The tree that calls a formula with its arguments as names."""
    return {"call": name, "of": [{"name": a.name} for a in LIBRARY.formulas[name].arguments]}


def hexed(value: float) -> str:
    return struct.pack(">d", value).hex()


def javascript(formulas: dict[str, Any], asked: dict[str, list[list[float]]], slopes: bool = False) -> dict[str, Any]:
    """What tests/js/library_twin.mjs answers for the points asked: values, or values with their derivatives."""
    node = shutil.which("node")
    if node is None:
        pytest.skip("node is not installed, so the JavaScript twins cannot be asked")
    script = Path(__file__).parents[1] / "js" / "library_twin.mjs"
    bits = {name: [[hexed(v) for v in row] for row in rows] for name, rows in asked.items()}
    data = json.dumps({"formulas": formulas, "asked": bits, "slopes": slopes})
    done = subprocess.run([node, str(script)], input=data, capture_output=True, text=True, check=True, timeout=120)
    return dict(json.loads(done.stdout))
