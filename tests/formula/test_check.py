"""Units and names in formulas: what is accepted with which unit, and what is refused with which words."""

from __future__ import annotations

import pytest

from fieldkit import units
from fieldkit.formula import check, functions, parse
from fieldkit.formula.check import Kind


def _of(symbol: str) -> units.Dimension:
    return units.UNITS[symbol].dimension


NAMES: dict[str, Kind] = {
    "beam_voltage": _of("kV"),
    "idle": _of("A"),
    "ion_inhibit": _of("uA"),
    "inlet": _of("degC"),
    "outlet": _of("degC"),
    "rise": _of("K"),
    "ratio": _of("1"),
    "history": "text",
    "ready": "flag",
    "drive": _of("dBm"),
    "pad": _of("dB"),
}
SERIES: dict[str, Kind] = {"levels": _of("kV"), "inlets": _of("degC")}
KNOWN = {"state": {"heater", "beam_supply"}, "since": {"heater_on"}}


def _check(text: str, want: Kind | None = None) -> check.Checked:
    return check.check(parse.read(text), NAMES, series=SERIES, known=KNOWN, want=want)


GOOD = [
    ("beam_voltage * idle", "W"),
    ("beam_voltage / idle", "ohm"),
    ("1.4 * idle", "A"),
    ("ion_inhibit / 2", "A"),
    ("idle + 20 mA", "A"),
    ("outlet - inlet", "K"),
    ("outlet + 5 K", "a temperature (degC)"),
    ("5 K + outlet", "a temperature (degC)"),
    ("outlet - 5 K", "a temperature (degC)"),
    ("outlet < 70 degC", "yes or no"),
    ("outlet - inlet < 30 K", "yes or no"),
    ("average(inlet, outlet)", "a temperature (degC)"),
    ("max(inlet, 20 degC)", "a temperature (degC)"),
    ("234.5 K + (outlet - 0 degC)", "K"),
    ("sqrt(beam_voltage ^ 2)", "V"),
    ("(beam_voltage / 1 V) ^ ratio", "a plain number"),
    ("(beam_voltage ^ 1.5) ^ 2 / beam_voltage ^ 3", "a plain number"),
    ("exp(-(3 s / (2 Mohm * 4 uF)))", "a plain number"),
    ("beam_voltage ^ -2 * (1 V) ^ 2", "a plain number"),
    ("last(levels) - 1 kV", "V"),
    ("at(levels, count(rung))", "V"),
    ("length(levels)", "a plain number"),
    ("lowest(inlets)", "a temperature (degC)"),
    ("drive + pad", "dB"),
    ("if(ready, idle, 2 A)", "A"),
    ('history = "cold" and ready', "yes or no"),
    ("state(heater) = on and since(heater_on) > 15 min", "yes or no"),
    ("fact(vacuum_good) and hands(deck) = 0 and earths = 0", "yes or no"),
    ("atan(2) + 1 rad", "a plain number"),
    ("5 % * idle", "A"),
]


@pytest.mark.parametrize(("text", "words"), GOOD)
def test_the_unit_of_the_answer(text: str, words: str) -> None:
    checked = _check(text)
    assert checked.spots == ()
    assert checked.kind is not None and check.words(checked.kind) == words


BAD = [
    ("beam_voltage + idle", "unit-mismatch", 1, "adding V and A"),
    ("3 + idle", "unit-mismatch", 1, "adding a plain number and A"),
    ("idle - 3", "unit-mismatch", 1, "subtracting A and a plain number"),
    ("idle > 3", "unit-mismatch", 1, "comparing A and a plain number"),
    ("beam_voltage < idle", "unit-mismatch", 1, "comparing V and A"),
    ("outlet < 70 K", "unit-mismatch", 1, "comparing a temperature (degC) and K"),
    ("outlet - inlet < 30 degC", "unit-mismatch", 1, "comparing K and a temperature (degC)"),
    ("outlet + inlet", "temperature-scale", 1, "two temperatures are added"),
    ("5 K - outlet", "temperature-scale", 1, "subtracted from a difference"),
    ("2 * outlet", "temperature-scale", 5, "outlet is a temperature on a scale"),
    ("1.1 * idle + outlet / 2", "temperature-scale", 14, "outlet is a temperature on a scale"),
    ("-outlet", "temperature-scale", 2, "outlet is a temperature on a scale"),
    ("total(inlets)", "temperature-scale", 7, "inlets is a temperature on a scale"),
    ("beam_voltage ^ ratio", "power-not-fixed", 16, "power must be written as a number"),
    ("2 ^ idle", "unit-mismatch", 5, "a power is a plain number, not A"),
    ("exp(beam_voltage)", "unit-mismatch", 5, "exp takes a plain number"),
    ("max(idle, beam_voltage)", "unit-mismatch", 1, "max of A and V"),
    ("if(ready, idle, beam_voltage)", "unit-mismatch", 1, "choosing between A and V"),
    ("if(idle, 1, 2)", "not-a-condition", 4, "idle is A, not yes or no"),
    ("ready and idle", "not-a-condition", 11, "idle is A, not yes or no"),
    ("ready + 1", "not-a-number", 1, "ready is yes or no, not a number"),
    ("history < 3", "not-a-number", 1, "history is a word, not a number"),
    ("history = 3", "unit-mismatch", 1, "comparing a word and a plain number"),
    ("history = cold", "word-without-quotes", 11, "cold is a word here"),
    ("ion_inhibt / 2", "unknown-name", 1, 'no value named "ion_inhibt"'),
    ("state(heatr) = on", "unknown-name", 1, '"heatr" is not known to state'),
    ("since(beam_on) > 3 s", "unknown-name", 1, '"beam_on" is not known to since'),
    ("levels * 2", "column-not-number", 1, "levels is a list of numbers"),
    ("last(level)", "unknown-name", 6, 'no list of numbers named "level"'),
    ("at(levels, idle)", "unit-mismatch", 12, "the place in a list is a plain number"),
    ("nosuch(x=idle)", "unknown-function", 1, 'no function or formula "nosuch"'),
    ("drive * 1 W + 1 W", "unit-mismatch", 1, "adding"),
]


@pytest.mark.parametrize(("text", "code", "column", "part"), BAD)
def test_each_mistake_has_code_column_words_and_remedy(text: str, code: str, column: int, part: str) -> None:
    spots = _check(text).spots
    assert [(s.code, s.column) for s in spots] == [(code, column)]
    assert part in spots[0].message
    assert spots[0].remedy


def test_adding_volts_to_amperes_names_both() -> None:
    (spot,) = _check("beam_voltage + idle").spots
    assert spot.message == "adding V and A: beam_voltage is V, idle is A"
    assert spot.width == len("beam_voltage + idle")


def test_all_mistakes_are_told_at_once() -> None:
    codes = [s.code for s in _check("(idle + beam_voltage) * nosuch > 3 or history + 1 > 2 or exp(idle) > 2").spots]
    assert codes == ["unit-mismatch", "unknown-name", "not-a-number", "unit-mismatch"]


@pytest.mark.parametrize(("wrong", "right"), [("ion_inhibt", "ion_inhibit"), ("beam_voltge", "beam_voltage")])
def test_near_names_are_proposed(wrong: str, right: str) -> None:
    assert right in _check(f"{wrong} / 2").spots[0].remedy


def test_what_is_wanted_is_checked() -> None:
    assert _check("beam_voltage * idle", want=_of("kW")).spots == ()
    (spot,) = _check("beam_voltage / idle", want=_of("kW")).spots
    assert spot.code == "unit-mismatch" and "this gives ohm, and W is needed" in spot.message
    (spot,) = _check("outlet - inlet", want="flag").spots
    assert spot.message == "this gives K, and yes or no is needed"
    (spot,) = _check("outlet", want=_of("K")).spots
    assert spot.code == "unit-mismatch"


def test_every_function_has_a_rule_for_its_units() -> None:
    assert {f.rule for f in functions.FUNCTIONS.values()} == set(check._RULES)
