"""Formulas as text: what trees they give, and in which column each mistake is told."""

from __future__ import annotations

import json
from typing import Any

import pytest

from fieldkit.formula import ast, parse
from fieldkit.formula.spots import Unreadable

SIGNATURES = {"beam_power": ("voltage", "current")}


def _short(tree: Any) -> str:
    """A tree in one line: add(a, 2)."""
    data = tree if isinstance(tree, dict) else ast.to_json(tree)
    if "call" in data:
        return f"{data['call']}({', '.join(_short(t) for t in data['of'])})"
    (value,) = data.values()
    return json.dumps(value) if "text" in data else str(value)


TREES = [
    ("27 kV", "27000"),
    ("12 L/min", "0.0002"),
    ("48 L/min", "0.0008"),
    ("0.5 uA", "0.0000005"),
    ("0.5 µA", "0.0000005"),
    ("0.5 \u03bcA", "0.0000005"),
    ("1.5 kΩ", "1500"),
    ("40 degC", "313.15"),
    ("40 °C", "313.15"),
    ("-5 degC", "268.15"),
    ("- 5 degC", "268.15"),
    ("-(5 degC)", "neg(278.15)"),
    ("(5 degC)", "278.15"),
    ("5 %", "0.05"),
    ("15 min", "900"),
    ("2 h + 3 s", "add(7200, 3)"),
    ("1.6e-3", "0.0016"),
    ("1E3", "1000"),
    ("007.50", "7.5"),
    ("a + b * c ^ d", "add(a, mul(b, pow(c, d)))"),
    ("a - b - c", "sub(sub(a, b), c)"),
    ("a / b * c", "mul(div(a, b), c)"),
    ("a ^ b ^ c", "pow(a, pow(b, c))"),
    ("-a ^ 2", "neg(pow(a, 2))"),
    ("2 ^ -3", "pow(2, -3)"),
    ("(a + b) * c", "mul(add(a, b), c)"),
    ("a − b", "sub(a, b)"),
    ("a × b · c", "mul(mul(a, b), c)"),
    ("a ≤ b", "le(a, b)"),
    ("a ≠ b", "ne(a, b)"),
    ("a < b and b < c", "and(lt(a, b), lt(b, c))"),
    ("not a or b and c", "or(not(a), and(b, c))"),
    ("not a = b", "not(eq(a, b))"),
    ("true", "True"),
    ("truest", "truest"),
    ("order + nothing", "add(order, nothing)"),
    ("min + max(min, 2)", "add(min, max(min, 2))"),
    ("state(heater) = on", 'eq(state:heater, "on")'),
    ("state(bias) != cut-off", 'ne(state:bias, "cut-off")'),
    ('choice(path) = "stored or new"', 'eq(choice:path, "stored or new")'),
    ('history = "cold"', 'eq(history, "cold")'),
    ("since(heater_on) >= 15 min", "ge(since:heater_on, 900)"),
    ("age(beam_supply) + oldest(heater)", "add(age:beam_supply, oldest:heater)"),
    ("oldest_since(heater_on)", "oldest-since:heater_on"),
    ("fact(vacuum_good) and not lock(Q1)", "and(fact:vacuum_good, not(lock:Q1))"),
    ("count(again:heater_v) < 3", "lt(count:again:heater_v, 3)"),
    ("hands(hv-compartment) = 0 and earths = 3", "and(eq(in:hv-compartment, 0), eq(earths, 3))"),
    ("at(levels, count(rung))", "at(levels, count:rung)"),
    ("state", "state"),
    ("beam_power(current=2 A, voltage=u)", "beam_power(u, 2)"),
    ("beam_power( voltage = u , current = i )", "beam_power(u, i)"),
    ("if(a > 3 V, 1, 2)", "if(gt(a, 3), 1, 2)"),
    ("  a\n + b ", "add(a, b)"),
]


@pytest.mark.parametrize(("text", "tree"), TREES)
def test_read_as(text: str, tree: str) -> None:
    assert _short(parse.parse(text, SIGNATURES)) == tree


MISTAKES = [
    ("", "formula-empty", 1),
    ("   ", "formula-empty", 1),
    ("27kV", "no-space-before-unit", 1),
    ("1 + 5%", "no-space-before-unit", 5),
    ("27 kVolt", "unknown-unit", 4),
    ("3 + 27 KV", "unknown-unit", 8),
    ("40 C", "unknown-unit", 4),
    ("12 l/min", "unknown-unit", 4),
    ("2x", "name-starts-with-digit", 1),
    (".5 + a", "number-form", 1),
    ("a + 5.", "number-form", 5),
    ("1,5 + 2", "number-form", 2),
    ("a +", "formula-syntax", 3),
    ("(a + b", "formula-syntax", 6),
    ("a + b)", "formula-syntax", 6),
    ("a b", "formula-syntax", 3),
    ("a == b", "formula-syntax", 4),
    ("a < b < c", "formula-syntax", 7),
    ("a & b", "formula-syntax", 3),
    ("a = 'cold'", "formula-syntax", 5),
    ('a = "cold', "formula-syntax", 5),
    ("a\u00a0+ b", "formula-syntax", 2),
    ("a ; b", "formula-syntax", 3),
    ("state(heater)", "formula-syntax", 13),
    ("state(heater) < on", "formula-syntax", 15),
    ("at(1, 2)", "formula-syntax", 4),
    ("sqr(4)", "unknown-function", 1),
    ("1 + nosuch(x=1)", "unknown-function", 5),
    ("sqrt(1, 2)", "argument-count", 1),
    ("if(a, b)", "argument-count", 1),
    ("at(levels)", "argument-count", 1),
    ("length(levels, 1)", "argument-count", 1),
    ("beam_power(u, i)", "argument-without-name", 12),
    ("beam_power(volt=u, current=i)", "argument-missing", 1),
    ("beam_power(voltage=u, voltage=u, current=i)", "argument-twice", 1),
    ("beam_power()", "argument-missing", 1),
    ("1e400", "number-too-large", 1),
    ("1e999999999", "number-too-large", 1),
    ("(" * 100 + "1" + ")" * 100, "ok", 0),
    ("-" * 80 + "a", "too-deep", 1),
    ("+".join("a" * 80), "too-deep", 1),
    ("a" * 2001, "formula-too-long", 1),
]


@pytest.mark.parametrize(("text", "code", "column"), MISTAKES)
def test_each_mistake_has_its_code_and_column(text: str, code: str, column: int) -> None:
    if code == "ok":
        assert _short(parse.parse(text)) == "1"
        return
    with pytest.raises(Unreadable) as caught:
        parse.parse(text, SIGNATURES)
    first = caught.value.spots[0]
    assert (first.code, first.column) == (code, column)
    assert first.message


REMEDIES = [
    ("27kV", "write 27 kV"),
    ("27 kVolt", "write one of: kV, keV"),
    ("40 C", "write degC"),
    (".5", "write 0.5"),
    ("5.", "write 5"),
    ("beam_power(u, i)", "write beam_power(voltage=..., current=...)"),
    ("beam_pwer(voltage=u, current=i)", "write beam_power"),
    ("sqr(4)", "write sqrt"),
    ("a < b < c", "write a < b and b < c"),
]


@pytest.mark.parametrize(("text", "remedy"), REMEDIES)
def test_the_remedy_says_what_to_write(text: str, remedy: str) -> None:
    with pytest.raises(Unreadable) as caught:
        parse.parse(text, SIGNATURES)
    assert caught.value.spots[0].remedy.startswith(remedy)


@pytest.mark.parametrize(
    "text", ["\x00", "((((", "))))", "1" * 1999, "é", "=" * 50, '"' * 3, "a." * 300, "^", "🙂", "\\"]
)
def test_nonsense_never_raises_anything_else(text: str) -> None:
    try:
        parse.parse(text)
    except Unreadable as exc:
        assert exc.spots


def test_a_tree_goes_through_json_unchanged() -> None:
    for text, _ in TREES:
        tree = parse.parse(text, SIGNATURES)
        assert ast.from_json(json.loads(json.dumps(ast.to_json(tree)))) == tree
