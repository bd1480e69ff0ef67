"""A formula's value alone, its expression already parsed: ours against general-purpose evaluators, as ratios.

Python against simpleeval and asteval, each with its own tree kept, its names set once, and the platform's exp and log;
JavaScript against compiled mathjs with a Map for its scope, which is the fastest that each offers. Ours are formulas of
the library, called by name: the ranges of the arguments and what the formula requires are looked at every time, and
exp, log and powers give the same bits on every machine. The others work out the bare expression, constants as numbers.
The goes take turns, and the least of them counts, so that what others do on the machine meanwhile hardly does.

pytest tests/bench/test_formula.py
"""

from __future__ import annotations

import json
import math
import shutil
import subprocess
from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import Any

import asteval
import pytest
import simpleeval
from bench import Ratios, Watch

from fieldkit.files import folder
from fieldkit.formula import library
from fieldkit.formula.evaluate import prepare

pytestmark = pytest.mark.bench
HERE = Path(__file__).resolve().parent
GOES, TURNS = 60, 1000
PLATFORM = {"exp": math.exp, "log": math.log, "sqrt": math.sqrt}


@dataclass(frozen=True)
class Case:
    """A formula of the library, the same written out for Python and for mathjs, and values in SI."""

    name: str
    python: str
    mathjs: str
    values: dict[str, float]


CASES = (
    Case("beam_power", "voltage * current", "voltage * current", {"voltage": 34e3, "current": 2.2}),
    Case(
        "discharge_voltage",
        "initial * exp(-(time / (resistance * capacitance)))",
        "initial * exp(-(time / (resistance * capacitance)))",
        {"initial": 35e3, "resistance": 2e6, "capacitance": 20e-6, "time": 40.0},
    ),
    Case(
        "discharge_time",
        "0 if initial <= safe else resistance * capacitance * log(initial / safe)",
        "initial <= safe ? 0 : resistance * capacitance * log(initial / safe)",
        {"initial": 35e3, "safe": 50.0, "resistance": 2e6, "capacitance": 20e-6},
    ),
    Case(
        "copper_resistance",
        "resistance * (234.5 + (to_temperature - 273.15)) / (234.5 + (from_temperature - 273.15))",
        "resistance * (234.5 + (to_temperature - 273.15)) / (234.5 + (from_temperature - 273.15))",
        {"resistance": 1.0, "from_temperature": 293.15, "to_temperature": 330.15},
    ),
    Case(
        "child_langmuir_density",
        "4 / 9 * 8.8541878188e-12 * sqrt(2 * 1.602176634e-19 / 9.1093837139e-31) * voltage ** 1.5 / gap ** 2",
        "4 / 9 * 8.8541878188e-12 * sqrt(2 * 1.602176634e-19 / 9.1093837139e-31) * voltage ^ 1.5 / gap ^ 2",
        {"voltage": 35e3, "gap": 0.01},
    ),
)


@pytest.fixture(scope="module")
def aboard() -> library.Library:
    found = library.load(folder("procedures") / "formulas")
    assert found.problems == ()
    return found


def tree(aboard: library.Library, name: str) -> dict[str, Any]:
    return {"call": name, "of": [{"name": a.name} for a in aboard.formulas[name].arguments]}


def turns(work: Callable[[], Any]) -> Callable[[], None]:
    def many() -> None:
        for _ in range(TURNS):
            work()

    return many


def ours(aboard: library.Library, case: Case) -> Callable[[], Any]:
    ready = prepare(tree(aboard, case.name), aboard.used([case.name]))
    return partial(ready.value, case.values)


def by_simpleeval(case: Case) -> Callable[[], Any]:
    evaluator = simpleeval.SimpleEval(functions=PLATFORM, names=case.values)
    parsed = evaluator.parse(case.python)
    return partial(evaluator.eval, case.python, previously_parsed=parsed)


def by_asteval(case: Case) -> Callable[[], Any]:
    evaluator = asteval.Interpreter(use_numpy=False)
    evaluator.symtable.update(PLATFORM | case.values)
    parsed = evaluator.parse(case.python)
    return partial(evaluator.run, parsed)


def table(title: str, floor: str, seconds: float, rows: dict[str, float]) -> Ratios:
    return Ratios(title, floor, seconds, list(rows.items()))


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)
def test_at_least_twice_as_fast_as_the_evaluators_of_python(
    case: Case, aboard: library.Library, show: Callable[[Ratios], None]
) -> None:
    work = {
        "ours, with its ranges": ours(aboard, case),
        "simpleeval": by_simpleeval(case),
        "asteval": by_asteval(case),
    }
    answers = [one() for one in work.values()]
    assert answers == pytest.approx([answers[0]] * 3, rel=1e-14)
    watches = {name: Watch() for name in work}
    for _ in range(GOES):
        for name, one in work.items():
            watches[name].go(turns(one))
    took = {name: watch.processor for name, watch in watches.items()}
    first, *others = took
    show(table(f"{case.name} in Python, {TURNS} times", first, took[first], {name: took[name] for name in others}))
    assert all(took[name] >= 2.0 * took[first] for name in others), took


def test_not_slower_than_compiled_mathjs(aboard: library.Library, show: Callable[[Ratios], None]) -> None:
    node = shutil.which("node")
    if node is None or not (HERE.parent / "js" / "node_modules" / "mathjs").is_dir():
        pytest.skip("it needs node, and npm ci in tests/js")
    asked = [
        {
            "name": case.name,
            "tree": tree(aboard, case.name),
            "formulas": aboard.used([case.name]),
            "expression": case.mathjs,
            "values": case.values,
        }
        for case in CASES
    ]
    done = subprocess.run(
        [node, str(HERE / "formula.mjs")],
        input=json.dumps(asked),
        capture_output=True,
        text=True,
        timeout=300,
        check=True,
    )
    told = json.loads(done.stdout)
    assert [one["name"] for one in told] == [case.name for case in CASES]
    for one in told:
        assert one["our_value"] == pytest.approx(one["their_value"], rel=1e-14)
        title, seconds = f"{one['name']} in JavaScript, a million times", one["ours"] / 1000
        show(table(title, "ours, with its ranges", seconds, {"compiled mathjs": one["theirs"] / 1000}))
    assert all(one["theirs"] >= one["ours"] for one in told), told
