"""Every formula of the library over its whole range, Python against JavaScript: equal bit for bit, faults included."""

from __future__ import annotations

import math
from typing import Any

from library_points import LIBRARY, hexed, javascript, points

from fieldkit.formula.evaluate import prepare
from fieldkit.formula.sums import sums
from fieldkit.values import Fault

POINTS = 2_000


def _python(name: str, rows: list[list[float]]) -> list[Any]:
    arguments = [a.name for a in LIBRARY.formulas[name].arguments]
    tree = {"call": name, "of": [{"name": a} for a in arguments]}
    ready = prepare(tree, LIBRARY.used([name]))
    answers: list[Any] = []
    for row in rows:
        value = ready.value(dict(zip(arguments, row, strict=True)))
        if isinstance(value, Fault):
            answers.append([value.code, value.says])
        else:
            assert type(value) is float and math.isfinite(value), f"{name}{row} gives {value!r}"
            answers.append(hexed(value))
    return answers


def test_every_formula_over_its_whole_range_is_equal_in_both_languages() -> None:
    formulas = sums(LIBRARY)["formulas"]
    asked = {name: points(name, POINTS) for name in LIBRARY.formulas}
    theirs = javascript(formulas, asked)
    assert set(theirs) == set(asked)
    for name, rows in asked.items():
        ours = _python(name, rows)
        differ = [(row, a, b) for row, a, b in zip(rows, ours, theirs[name], strict=True) if a != b]
        assert differ[:2] == [], name
        numbers = sum(isinstance(a, str) for a in ours)
        assert numbers >= len(rows) // 5, f"{name}: only {numbers} of {len(rows)} points have an answer"
