"""The evaluator is total, and the same in both languages: vectors, and a seeded differential test bit for bit."""

from __future__ import annotations

import math
import random
import struct
from typing import Any

import pytest
from random_formulas import FORMULAS, Maker, damaged

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


def test_twenty_thousand_random_formulas_agree_bit_for_bit(twins: Any) -> None:
    maker = Maker(20260802)
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


def test_whatever_json_comes_there_is_an_answer_and_the_same_in_both_languages(twins: Any) -> None:
    maker, rnd = Maker(7), random.Random(7)
    requests: list[tuple[str, list[Any]]] = []
    for k in range(3000):
        tree = damaged(maker.number(2 + k % 3), rnd, 0.03)
        names = maker.names() | {"a": rnd.choice([None, 5, [1.0], {}, 3.5]), "word": rnd.choice(["on", "", 7])}
        series = {"s": rnd.choice([[1.0, 2], [None], "abc", 5, None, [True]])}
        formulas = damaged(FORMULAS, rnd, 0.03)
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
