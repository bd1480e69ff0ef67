"""A formula of the library evaluated as a sheet does it: the compiled tree, in SI, through fieldkit.formula.evaluate."""

from __future__ import annotations

from pathlib import Path

from fieldkit.files import folder
from fieldkit.formula import library
from fieldkit.formula.evaluate import evaluate
from fieldkit.values import Fault

LIBRARY = library.load(Path(folder("procedures")) / "formulas")


def answer(name: str, **arguments: float) -> float | Fault:
    """What the formula gives for arguments in SI: a number, or a Fault."""
    order = LIBRARY.signatures()[name]
    assert set(arguments) == set(order), f"{name} takes {order}"
    value = evaluate({"call": name, "of": [{"name": a} for a in order]}, arguments, {}, LIBRARY.used([name]))
    assert isinstance(value, float | Fault), value
    return value


def call(name: str, **arguments: float) -> float:
    """The number that the formula gives for arguments in SI."""
    value = answer(name, **arguments)
    assert isinstance(value, float), value
    return value
