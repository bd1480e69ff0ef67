"""The evaluator is total, and the same in both languages: vectors, and a seeded differential test bit for bit."""

from __future__ import annotations

import copy
import math
import random
import struct
from typing import Any

import pytest

from fieldkit.formula import ast, evaluate, parse
from fieldkit.formula.functions import FUNCTIONS
from fieldkit.sheet import model
from fieldkit.values import FAULTS, Fault

FUZZED = 20_000


def test_every_vector_holds_in_both_languages(twins: Any, vectors: Any) -> None:
    cases = vectors("formula")
    assert len(cases) > 150
    assert twins.wrong(cases) == []


def _calls(tree: Any, found: set[str]) -> set[str]:
    if isinstance(tree, dict):
        if isinstance(tree.get("call"), str):
            found.add(tree["call"])
        for part in tree.values():
            _calls(part, found)
    elif isinstance(tree, list):
        for part in tree:
            _calls(part, found)
    return found


def test_every_function_and_every_fault_stands_in_a_vector(vectors: Any) -> None:
    called: set[str] = set()
    faults: set[str] = set()
    for case in vectors("formula"):
        _calls(case["args"][0], called)
        if isinstance(case["expect"], dict) and "fault" in case["expect"]:
            faults.add(case["expect"]["fault"])
    assert set(FUNCTIONS) - called == set()
    assert set(FAULTS) - faults == set()


def test_too_much_work_is_a_fault_in_both_languages(twins: Any) -> None:
    wide = {"call": "max", "of": [{"number": "1"}] * 20_001}
    assert twins.wrong([{"name": "wide", "do": "evaluate", "args": [wide, {}], "expect": {"fault": "too-deep"}}]) == []


def test_a_plain_tree_and_its_json_give_the_same() -> None:
    tree = parse.parse("1.4 * idle")
    assert evaluate.evaluate(tree, {"idle": 0.42}) == evaluate.evaluate(ast.to_json(tree), {"idle": 0.42}) == 0.42 * 1.4


def test_a_tree_made_ready_is_asked_often() -> None:
    ready = evaluate.prepare(parse.parse("last(levels) * gain"))
    assert ready.value({"gain": 2.0}, {"levels": [1.0, 3.0]}) == 6.0
    assert ready.value({"gain": 5}, {"levels": [4]}) == 20.0
    assert ready.value({"gain": 2.0}) == Fault("unknown-name", "There is no column of numbers named levels.")
    assert ready.value({"gain": 2.0}, {"levels": [1.0, 3.0]}) == 6.0


def test_the_formulas_of_a_sheet_are_taken_as_they_are_or_as_json() -> None:
    argument = model.Argument(name="x", unit="kV", factor="1000", low="0", high="60000")
    tree = ast.to_json(parse.parse("2 * x"))
    used = model.FormulaUsed(name="twice", meaning="", arguments=(argument,), result_unit="V", tree=tree, reference="")
    plain = used.model_dump(mode="json")
    old = plain | {"arguments": [{k: v for k, v in plain["arguments"][0].items() if k != "whole"}]}
    for x, expected in ((12.0, 24.0), (61000.0, "twice: x is 61 kV; the formula holds from 0 to 60 kV.")):
        for given in (used, plain, old):
            got = evaluate.evaluate({"call": "twice", "of": [{"name": "x"}]}, {"x": x}, {}, {"twice": given})
            assert (got.says if isinstance(got, Fault) else got) == expected


SENTENCES = {
    "channel(14.5)": "channel: channel is 14.5; only whole numbers.",
    "channel(70)": "channel: channel is 70; the formula holds from 1 to 69.",
    "anything(-4, -0.5)": "anything: uncertainty is -0.5; the formula holds from 0.",
    "mark(1, 1)": "mark: the reflected power must be below the forward power",
    "mark(1, -1)": "mark: reflected is -1 W; the formula holds from 0 W.",
}


@pytest.mark.parametrize("call", SENTENCES)
def test_a_person_is_told_what_is_out_of_range_in_both_languages(call: str, twins: Any, vectors: Any) -> None:
    formulas = next(c["args"][3] for c in vectors("formula") if c["name"].startswith("channel("))
    name, _, given = call.removesuffix(")").partition("(")
    tree = {"call": name, "of": [{"number": text} for text in given.split(", ")]}
    for language in (twins.python, twins.javascript):
        (answer,) = language([("evaluate", [tree, {}, {}, formulas])])
        assert answer["value"] == {"fault": "out-of-range", "says": SENTENCES[call]}


class _Maker:
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


def test_twenty_thousand_random_formulas_agree_bit_for_bit(twins: Any) -> None:
    maker = _Maker(20260802)
    requests: list[tuple[str, list[Any]]] = []
    for k in range(FUZZED):
        tree = maker.number(2 + k % 4) if k % 5 else maker.flag(2 + k % 3)
        series = {"s": [maker.double() for _ in range(maker.rnd.randint(1, 5))], "none": []}
        requests.append(("evaluate", [tree, maker.names(), series, FORMULAS]))
    ours, theirs = twins.python(requests), twins.javascript(requests)
    assert len(ours) == len(theirs) == FUZZED
    differ = [(r[1][0], a, b) for r, a, b in zip(requests, ours, theirs, strict=True) if a != b]
    assert differ[:3] == []
    blocks = [a["value"] for a in ours if isinstance(a["value"], dict)]
    answered = [v for v in blocks if "bits" in v]
    faults = {v["fault"] for v in blocks if "fault" in v}
    assert len(answered) > FUZZED // 4, "too few of the random formulas have an answer for the test to mean much"
    assert faults >= {"divide-by-zero", "overflow", "out-of-range", "missing", "wrong-type", "domain", "bad-tree"}
    values = [struct.unpack(">d", bytes.fromhex(v["bits"]))[0] for v in answered]
    assert all(math.isfinite(v) for v in values)


JUNK: tuple[Any, ...] = (
    *(None, 5, -0.5, True, "", "1e5", "x", [], [[]], {}, {"number": 5}, {"text": None}, {"flag": "yes"}),
    *({"name": ["a"]}, {"call": "mul"}, {"call": ["mul"], "of": []}, {"call": "ranged", "of": {}}, {"series": None}),
    *(
        {"table": []},
        {"table": {"x": ["1", "2"], "y": ["1", None], "of": {"number": "1"}}},
        {"call": "last", "of": [5]},
    ),
)


def _damaged(part: Any, rnd: random.Random, share: float) -> Any:
    """A copy with some of its parts put out for junk, or left out."""
    if rnd.random() < share:
        return copy.deepcopy(rnd.choice(JUNK))
    if isinstance(part, dict):
        return {k: _damaged(v, rnd, share) for k, v in part.items() if rnd.random() > share / 2}
    return [_damaged(v, rnd, share) for v in part] if isinstance(part, list) else part


def test_whatever_json_comes_there_is_an_answer_and_the_same_in_both_languages(twins: Any) -> None:
    maker, rnd = _Maker(7), random.Random(7)
    requests: list[tuple[str, list[Any]]] = []
    for k in range(3000):
        tree = _damaged(maker.number(2 + k % 3), rnd, 0.03)
        names = maker.names() | {"a": rnd.choice([None, 5, [1.0], {}, 3.5]), "word": rnd.choice(["on", "", 7])}
        series = {"s": rnd.choice([[1.0, 2], [None], "abc", 5, None, [True]])}
        formulas = _damaged(FORMULAS, rnd, 0.03)
        requests.append(("evaluate", [tree, names, series, formulas if isinstance(formulas, dict) else {}]))
    ours, theirs = twins.python(requests), twins.javascript(requests)
    assert [(r[1], a, b) for r, a, b in zip(requests, ours, theirs, strict=True) if a != b][:1] == []
    assert not any("threw" in a for a in ours)
    assert {a["value"]["fault"] for a in ours if isinstance(a["value"], dict) and "fault" in a["value"]} >= {
        "bad-tree",
        "wrong-type",
        "unknown-function",
        "unknown-name",
    }
