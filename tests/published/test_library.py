"""What holds for every formula of the library: no problem in its files, and no number outside its ranges."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from published import LIBRARY

from fieldkit.formula.evaluate import evaluate
from fieldkit.units import ANY, ANY_DIFFERENCE
from fieldkit.values import Fault


def test_the_library_reads_without_a_problem() -> None:
    assert LIBRARY.problems == ()
    assert len(LIBRARY.formulas) >= 11


@pytest.mark.parametrize("name", list(LIBRARY.formulas))
def test_outside_its_range_a_formula_names_the_argument_and_the_range(name: str) -> None:
    formula = LIBRARY.formulas[name]
    tree = {"call": name, "of": [{"name": a.name} for a in formula.arguments]}
    good = next(e for e in formula.examples if not e.fault)
    inside = dict(zip((a.name for a in formula.arguments), map(float, good.given), strict=True))
    assert isinstance(evaluate(tree, inside, {}, LIBRARY.used([name])), float)
    for argument in formula.arguments:
        sides: dict[str, Callable[[], float]] = {}
        if argument.low is not None:
            sides["low"] = lambda a=argument: float(a.low) - 1e-3 * abs(float(a.high or a.low)) - 1e-9
        if argument.high is not None:
            sides["high"] = lambda a=argument: float(a.high) * 1.001 + 1e-9
        assert sides or argument.unit in (ANY, ANY_DIFFERENCE), f"{argument.name} of {name} has no range"
        for outside in sides.values():
            value = evaluate(tree, inside | {argument.name: outside()}, {}, LIBRARY.used([name]))
            assert isinstance(value, Fault) and value.code == "out-of-range"
            assert f"{name}: {argument.name} is " in value.says and argument.unit.shown in value.says
