"""A sum asked by a person: the same as the evaluator gives, every fault at its place, and digits and units as promised."""

from __future__ import annotations

import random
from decimal import Decimal
from fractions import Fraction

import pytest

from fieldkit import units, values
from fieldkit.files import folder
from fieldkit.formula import ast, display, library, parse
from fieldkit.formula.answer import answer
from fieldkit.formula.evaluate import evaluate
from fieldkit.formula.locate import locate
from fieldkit.formula.spots import Unreadable
from fieldkit.values import Fault

HELD = library.load(folder("procedures") / "formulas")

USED = HELD.used(HELD.formulas)
EXAMPLES = [(f.name, k) for f in HELD.formulas.values() for k in range(len(f.examples))]


@pytest.mark.parametrize(("name", "which"), EXAMPLES, ids=[f"{n}-{k}" for n, k in EXAMPLES])
def test_every_worked_example_can_be_asked_as_it_is_written(name: str, which: int) -> None:
    """The numbers stand in the entries with their sources; here they come through text, units and the right arguments."""
    formula = HELD.formulas[name]
    example = formula.examples[which]
    given = ", ".join(f"{a.name}={w}" for a, w in zip(formula.arguments, example.written, strict=True))
    if example.fault:
        with pytest.raises(Unreadable) as told:
            answer(f"{name}({given})", HELD)
        assert example.fault in {s.code for s in told.value.spots}
        return
    found = answer(f"{name}({given})", HELD)
    (value,) = found.values
    assert value.si == pytest.approx(float(example.gives), abs=float(example.within), rel=1e-15)
    assert found.whole is formula and value.unit.dimension.same_powers(value.dimension)
    # what is shown is an expression again, of the same value to the digits shown
    again = answer(f"{value.text()} {value.unit.symbol}".removesuffix(" 1"), HELD).values[0].si
    assert again == pytest.approx(value.si, rel=10.0 ** (1 - value.digits) / 2, abs=1e-300)


CALLS = (
    "beam_power(voltage=({}) * 1 kV, current=({}) * 1 A) / (1 kW)",
    "water_density(temperature=({}) * 1 K + 0 degC) / (1 kg/m3)",
    "sqrt({})",
    "log({})",
    "({}) / ({})",
    "({}) ^ ({})",
    "({}) * ({})",
    "({}) - ({})",
    "if(({}) > ({}), {}, {})",
    "if(({}) > ({}) and ({}) < ({}) or not {} = {}, {}, {})",
    "min({}, {})",
)


def _grown(draw: random.Random, depth: int) -> str:
    if depth == 0 or draw.random() < 0.2:
        return draw.choice(["0", "1", "2.5", "7", "50", "1e200", "3", "-1"])
    form = draw.choice(CALLS)
    return form.format(*(_grown(draw, depth - 1) for _ in range(form.count("{}"))))


def test_a_fault_is_located_exactly_where_the_evaluator_finds_one() -> None:
    draw = random.Random(20261201)
    faults = 0
    for _ in range(1500):
        text = _grown(draw, 3)
        if len(text) > parse.MAX_LENGTH:
            continue
        parsed = parse.read(text)
        got = evaluate(ast.to_json(parsed.tree(HELD.signatures())), formulas=USED)
        spots = locate(parsed, HELD)
        assert bool(spots) == isinstance(got, Fault), text
        if isinstance(got, Fault):
            faults += 1
            assert got.code in {s.code for s in spots}, text
        else:
            assert answer(text, HELD).values[0].si == got
    assert 300 < faults < 1400


def test_digits_are_rounded_once_to_the_nearest() -> None:
    """Against exact fractions: what is shown is within half a unit of the last digit that was asked for."""
    draw = random.Random(7)
    for _ in range(3000):
        si = draw.choice([-1, 1]) * draw.random() * 10.0 ** draw.randrange(-30, 30)
        unit = units.UNITS[draw.choice(["kV", "uA", "L/min", "1", "%", "Torr"])]
        digits = draw.randrange(1, 13)
        shown = display.plain(si, unit, digits)
        exact = Fraction(si) / Fraction(unit.factor)
        size = Decimal(values.to_shown(si, unit)).adjusted()
        step = Fraction(10) ** min(size + 1 - digits, 0 if -5 < size < 10 else 99)
        # twelve digits come first (values.to_shown), so the last half may be off by their rounding
        assert abs(Fraction(Decimal(shown)) - exact) <= step / 2 + abs(exact) * Fraction(1, 10**11), (si, unit, digits)
        assert not ("." in shown.partition("e")[0] and shown.partition("e")[0].endswith("0"))
        if "e" in shown or "." in shown:
            assert len(shown.partition("e")[0].replace("-", "").replace(".", "").lstrip("0")) <= digits


@pytest.mark.parametrize(
    ("si", "symbol", "shown"),
    [
        (0.0, "kV", "0"),
        (-0.0, "V", "0"),
        (999999.5, "1", "1000000"),
        (0.0001, "1", "0.0001"),
        (0.00009999996, "1", "0.0001"),
        (0.0000123456789, "1", "1.23457e-5"),
        (9999999999.0, "1", "9999999999"),
        (1e10, "1", "1e10"),
        (273.15, "degC", "0"),
        (-1.602176634e-19, "1", "-1.60218e-19"),
    ],
)
def test_how_numbers_are_written(si: float, symbol: str, shown: str) -> None:
    assert display.plain(si, units.UNITS[symbol]) == shown


def test_a_sum_is_shown_in_the_multiple_that_leaves_few_digits() -> None:
    watt = units.UNITS["W"].dimension
    assert [display.fitting(x, watt).symbol for x in (0.0, 1e-9, 0.02, 3.0, 999.0, 1000.0, 5e9)] == [
        "W", "mW", "mW", "W", "W", "kW", "kW"]  # fmt: skip
    # decimal multiples only: no minutes, inches, torr or electronvolts that nobody asked for
    for unit in units.UNITS.values():
        for power in range(-20, 20):
            found = display.fitting(10.0**power, unit.dimension)
            assert found.dimension.same_powers(unit.dimension)
            assert set(found.factor) <= set("0.1") and found.factor.count("1") == 1, (unit.symbol, found.symbol)


def test_a_formula_is_shown_to_the_digits_that_its_examples_are_held_to() -> None:
    assert display.digits(HELD.formulas["coolant_heat_water"]) == 4
    assert display.digits(HELD.formulas["elementary_charge"]) == 6
    assert all(4 <= display.digits(f) <= 6 for f in HELD.formulas.values())
