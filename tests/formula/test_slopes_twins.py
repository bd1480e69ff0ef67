"""Derivatives are the same in both languages, bit for bit, for whatever is put in; and the values beside them stay."""

from __future__ import annotations

import math
import random
import struct
from typing import Any

from library_points import LIBRARY, call, hexed, javascript, points
from random_formulas import FORMULAS, Maker, damaged

from fieldkit.formula import rates, slopes
from fieldkit.formula.functions import FUNCTIONS
from fieldkit.formula.sums import sums
from fieldkit.values import Fault

POINTS = 400
FUZZED = 6000


def _told(value: Any) -> Any:
    return [value.code, value.says] if isinstance(value, Fault) else hexed(value)


def test_every_derivative_of_every_formula_is_equal_in_both_languages() -> None:
    asked = {name: points(name, POINTS) for name in LIBRARY.formulas}
    theirs = javascript(sums(LIBRARY)["formulas"], asked, slopes=True)
    steep = 0
    for name, rows in asked.items():
        arguments = [a.name for a in LIBRARY.formulas[name].arguments]
        ready = slopes.prepare(call(name), LIBRARY.used([name]))
        for row, other in zip(rows, theirs[name], strict=True):
            found = ready.gradient(dict(zip(arguments, row, strict=True)))
            of = found.of if isinstance(found.of, Fault) else [[n, hexed(d)] for n, d in found.of.items()]
            assert [_told(found.value), _told(of) if isinstance(of, Fault) else of] == other, (name, row)
            steep += isinstance(found.of, Fault) and not isinstance(found.value, Fault)
    assert steep > 20, "the ends of ranges hardly met a slope without bound"


def _requests(count: int, seed: int, damage: float = 0.0) -> list[tuple[str, list[Any]]]:
    maker, rnd = Maker(seed), random.Random(seed)
    found: list[tuple[str, list[Any]]] = []
    for k in range(count):
        tree, names, formulas = maker.number(2 + k % 4), maker.names(), FORMULAS
        series: dict[str, Any] = {"s": [maker.double() for _ in range(rnd.randint(1, 5))], "none": []}
        if rnd.random() < 0.3:  # equal values, whole numbers and zeros: where kinks are
            names |= {name: float(rnd.randint(-2, 2)) for name in "abcde"}
        if damage:
            tree, formulas = damaged(tree, rnd, damage), damaged(FORMULAS, rnd, damage)
            names |= {"a": rnd.choice([None, 5, [1.0], {}, 3.5]), "word": rnd.choice(["on", "", 7])}
            series["s"] = rnd.choice([[1.0, 2], [None], "abc", 5, None, [True]])
        found.append(("gradient", [tree, names, series, formulas if isinstance(formulas, dict) else {}]))
    return found


def test_random_formulas_are_differentiated_alike_and_keep_their_values(twins: Any) -> None:
    requests = _requests(FUZZED, 20260803)
    ours, theirs = twins.python(requests), twins.javascript(requests)
    assert [(r[1][0], a, b) for r, a, b in zip(requests, ours, theirs, strict=True) if a != b][:2] == []
    plain = twins.python([("evaluate", args) for _, args in requests])
    assert [a["value"]["value"] for a in ours] == [a["value"] for a in plain]
    found = [a["value"]["of"] for a in ours]
    assert sum(isinstance(of, list) and len(of) > 1 for of in found) > FUZZED // 15
    assert sum(isinstance(of, dict) and of["fault"] == "domain" and "bound" in of["says"] for of in found) > 20
    assert any("[" in name for of in found if isinstance(of, list) for name, _ in of)
    numbers = [struct.unpack(">d", bytes.fromhex(d["bits"]))[0] for of in found if isinstance(of, list) for _, d in of]
    assert all(math.isfinite(d) for d in numbers)


def test_whatever_json_comes_there_is_an_answer_and_the_same_in_both_languages(twins: Any) -> None:
    requests = _requests(3000, 11, damage=0.03)
    ours, theirs = twins.python(requests), twins.javascript(requests)
    assert [(r[1], a, b) for r, a, b in zip(requests, ours, theirs, strict=True) if a != b][:1] == []
    assert not any("threw" in a for a in ours)


HOSTILE: dict[str, Any] = {
    "no tree": None,
    "an argument without a name": {"call": "odd", "of": [{"name": "a"}]},
    "a name that is a list": {"call": "neg", "of": [{"name": ["a"]}]},
    "a number and a name at once": {"number": "2", "name": "a"},
    "a comparison without sides": {"call": "if", "of": [{"call": "lt"}, {"name": "a"}, {"name": "b"}]},
    "a comparison of three": {"call": "if", "of": [{"call": "lt", "of": [1, 2, 3]}, {"name": "a"}, {"name": "b"}]},
    "a formula that calls itself": {"call": "again", "of": [{"name": "a"}]},
    "too wide": {"call": "max", "of": [{"name": "a"}] * 20_001},
    "too deep": None,
    "as deep as it may be": None,
    "a choice of texts": {"call": "if", "of": [{"flag": True}, {"name": "word"}, {"name": "a"}]},
    "a table that falls": {"table": {"of": {"name": "a"}, "x": ["2", "1"], "y": ["0", "1"]}},
    "a table with a hole": {"table": {"of": {"name": "a"}, "x": ["1", None], "y": [None, "1"]}},
}
for _name, _depth in (("too deep", 121), ("as deep as it may be", 120)):
    HOSTILE[_name] = {"name": "a"}
    for _ in range(_depth):
        HOSTILE[_name] = {"call": "neg", "of": [HOSTILE[_name]]}
ODD: dict[str, Any] = {
    "odd": {"arguments": [{"name": ["x"], "factor": "1", "offset": "0"}], "tree": {"name": "x"}},
    "again": {
        "arguments": [{"name": "x", "factor": "1", "offset": "0"}],
        "tree": {"call": "again", "of": [{"name": "x"}]},
    },
}


def test_hostile_trees_are_answered_alike(twins: Any) -> None:
    requests = [("gradient", [tree, {"a": 1.5, "b": 2.0, "word": "on"}, {}, ODD]) for tree in HOSTILE.values()]
    ours, theirs = twins.python(requests), twins.javascript(requests)
    assert dict(zip(HOSTILE, ours, strict=True)) == dict(zip(HOSTILE, theirs, strict=True))
    told = dict(zip(HOSTILE, [a["value"] for a in ours], strict=True))
    assert told["as deep as it may be"]["of"] == [["a", {"bits": hexed(1.0)}]]
    assert told["too deep"]["of"]["fault"] == told["too wide"]["of"]["fault"] == "too-deep"
    assert told["a formula that calls itself"]["of"]["fault"] == "too-deep"
    assert (told["a choice of texts"]["value"], told["a choice of texts"]["of"]) == ("on", [])
    assert told["a number and a name at once"]["of"] == []


def test_contributions_and_their_sum_are_equal_in_both_languages(twins: Any) -> None:
    rnd = random.Random(5)

    def one() -> float:
        return rnd.choice([0.0, rnd.gauss(0, 1), rnd.gauss(0, 1) * 10.0 ** rnd.randint(-300, 300), 1e308, -1e308])

    requests: list[tuple[str, list[Any]]] = []
    for _ in range(3000):
        names = [f"n{k}" for k in range(rnd.randint(0, 5))]
        worth = [[n, [[f"reading {rnd.randint(1, 9)}", one()] for _ in range(rnd.randint(0, 3))]] for n in names[1:]]
        for _, own in worth:
            own[:] = [[s, d] for s, d in dict(own).items()]
        requests.append(("spread", [[[n, one()] for n in names], worth]))
    ours = twins.python(requests)
    # NaN, of which there are many, is written with any sign
    assert [a["value"]["u"] for a in ours] == [a["value"]["u"] for a in twins.javascript(requests)]
    assert sum(isinstance(a["value"]["u"], dict) and "fault" in a["value"]["u"] for a in ours) > 100


def test_both_languages_differentiate_the_same_functions() -> None:
    """Whatever gives a number and is neither a choice nor constant in its parts has a rule."""
    numbers = {name for name, f in FUNCTIONS.items() if f.number and f.make is not None}
    assert numbers - set(rates.MAKERS) - set(rates.COLUMNS) == {"lt", "le", "gt", "ge"} & numbers | {"length"}
