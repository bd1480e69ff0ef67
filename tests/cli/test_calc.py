"""`fieldkit calc`: what it prints, what it says of a sum that has no answer, and the exit codes that mean something."""

from __future__ import annotations

import cmath
import json
import math
import re
import subprocess
import sys
from pathlib import Path
from typing import Any

import pint
import pytest

from fieldkit.cli.main import main
from fieldkit.files import folder
from fieldkit.formula import library
from fieldkit.formula.sums import sums

HEAT = "coolant_heat_water(flow=60 L/min, inlet=35 degC, outlet=45 degC)"

OWN = """\
subject: hall
formulas:
  fan_heat:
    meaning: heat that the fan takes out of the hall
    arguments:
      flow: {unit: m3/h, low: 0 m3/h, high: 20000 m3/h, meaning: air flow}
      rise: {unit: K, low: 0 K, high: 40 K, meaning: rise of the air}
    requires:
      - {where: flow > 0 m3/h or rise = 0 K, otherwise: still air rises by nothing here}
    expression: flow * 1.2 kg/m3 * 1.005 kJ/kg/K * rise
    unit: kW
    reference: density of dry air (from memory)
    decides: whether the fan is enough
    cautions: [Dry air only.]
    examples:
      - {with: {flow: 3600 m3/h, rise: 10 K}, gives: 12.06 kW, within: 0.01 kW, source: by hand}
"""

Printed = pytest.CaptureFixture[str]


@pytest.fixture
def calc(capsys: Printed) -> Any:
    """Runs the command: its exit code, standard output and standard error."""

    def run(*words: str) -> tuple[int, str, str]:
        code = main(["calc", *words])
        said = capsys.readouterr()
        return code, said.out, said.err

    return run


@pytest.fixture
def asked(calc: Any) -> Any:
    """Runs the command with --json: its exit code, and the object that it printed."""

    def run(*words: str) -> tuple[int, dict[str, Any]]:
        code, out, err = calc("--json", *words)
        assert err == ""
        return code, json.loads(out)

    return run


@pytest.fixture
def own(tmp_path: Path) -> Path:
    home = tmp_path / "formulas"
    home.mkdir()
    (home / "hall.yaml").write_text(OWN)
    return home


def test_the_first_line_is_the_value_alone_and_source_and_cautions_follow(calc: Any) -> None:
    code, out, err = calc(HEAT)
    lines = out.splitlines()
    # IAPWS-IF97 gives 41 535 W for this flow
    assert (code, err, lines[0]) == (0, "", "41.54 kW")
    assert lines[1].startswith("Source: ")
    cautions = library.load(folder("procedures") / "formulas").formulas["coolant_heat_water"].cautions
    said = " ".join(out.split())
    assert cautions and all(f"Caution: {' '.join(c.split())}" in said for c in cautions)


def test_json_gives_si_and_the_display_unit(asked: Any) -> None:
    code, answer = asked(HEAT)
    assert code == 0
    assert answer["expression"] == HEAT and answer["formula"] == "coolant_heat_water"
    assert answer["si_unit"] == "W" and answer["unit"] == "kW" and answer["shown"] == "41.54 kW"
    # IAPWS-IF97: 41 535 W
    assert answer["si"] == pytest.approx(41_535, rel=1e-3)
    assert answer["value"] == pytest.approx(answer["si"] / 1000, rel=1e-11)
    assert answer["reference"] and answer["cautions"]


@pytest.mark.parametrize(
    ("expression", "first"),
    [
        ("27 kV * 2.2 A", "59.4 kW"),
        ("27 kV + 300 V", "27.3 kV"),
        ("2 * 60 L/min", "120 L/min"),
        # Abramowitz and Stegun, table 4.2
        ("log(2)", "0.693147"),
        ("45 degC - 35 degC", "10 K"),
        ("20 degC + 5 K", "25 °C"),
        ("30 kW / 75 kW", "0.4"),
        ("0.5 µA * 3 kΩ", "1.5 mV"),
        ("25 °C + 5 K", "30 °C"),
        ("3 V · 2 A", "6 W"),
        ("5 V − 7 V", "-2 V"),
        ("-(3 V)", "-3 V"),
        ("2 V * 3 V", "6 kg² m⁴ s⁻⁶ A⁻²"),
        ("2 > 1 and 3 V < 2 V", "no"),
        ("if(2 > 1, 3 kV, 5 V)", "3 kV"),
        ("if(2 > 1, 3, 1 / 0)", "3"),
        # SI Brochure, 9th edition: exact
        ("elementary_charge()", "1.60218e-19 A s"),
        ("1234567.8", "1234568"),
        ("beam_power(voltage=beam_power(voltage=1 kV, current=1 A) / 1 A, current=2 A)", "2 kW"),
        ("27 kV *\n2.2 A", "59.4 kW"),
    ],
)
def test_any_expression_of_the_language_is_answered(calc: Any, expression: str, first: str) -> None:
    code, out, _ = calc(expression)
    assert (code, out.splitlines()[0]) == (0, first)


@pytest.mark.parametrize(
    ("expression", "unit", "theirs"),
    [
        ("27 kV * 2.2 A", "W", "59400 W"),
        ("5 gal/min", "L/min", "5 gallon/minute"),
        ("1e-8 mbar", "Torr", "1e-8 mbar"),
        ("30 keV", "J", "30 keV"),
        ("310 mm", "in", "310 mm"),
        ("20 degC", "K", "293.15 K"),
    ],
)
def test_in_asks_for_a_unit(asked: Any, expression: str, unit: str, theirs: str) -> None:
    """Against pint, which knows the factors by itself."""
    pints = pint.UnitRegistry()
    names = {"Torr": "torr", "in": "inch", "L/min": "liter/minute", "K": "kelvin"}
    expected = pints.Quantity(theirs).to(names.get(unit, unit)).magnitude
    code, answer = asked(expression, "--in", unit)
    assert (code, answer["unit"]) == (0, unit)
    assert answer["value"] == pytest.approx(expected, rel=1e-11)


def test_a_pair_prints_both_values(calc: Any, asked: Any) -> None:
    call = "directivity_bounds(return_loss=26 dB, directivity=40 dB)"
    code, out, _ = calc(call)
    shown = re.fullmatch(r"([\d.]+) dB to ([\d.]+) dB", out.splitlines()[0])
    # two waves, 26 dB and 40 dB down, in every phase to each other
    waves = [abs(10 ** (-26 / 20) + cmath.rect(10 ** (-40 / 20), math.radians(a))) for a in range(360)]
    low, high = (pytest.approx(-20 * math.log10(w), abs=1e-3) for w in (max(waves), min(waves)))
    assert code == 0 and shown and (float(shown[1]), float(shown[2])) == (low, high)
    code, answer = asked(call)
    assert [v["name"] for v in answer["values"]] == ["directivity_lowest", "directivity_highest"]
    assert [v["si"] for v in answer["values"]] == [low, high]
    assert answer["formula"] == "directivity_bounds" and answer["shown"] == out.splitlines()[0]


def test_any_unit_is_shown_as_the_arguments_had_it(calc: Any) -> None:
    assert calc("guarded_limit(limit=60 kV, uncertainty=100 V, ratio=1)")[1].splitlines()[0].endswith(" kV")
    assert calc("expanded_uncertainty(uncertainty=20 mA, coverage=2)")[1].splitlines()[0] == "40 mA"


def test_sources_and_cautions_of_every_formula_in_a_longer_sum_are_told(calc: Any, asked: Any) -> None:
    both = "beam_power(voltage=30 kV, current=2 A) + heater_power(voltage=10 V, current=20 A)"
    out = calc(both)[1]
    assert out.splitlines()[0] == "60.2 kW"
    for name in ("beam_power", "heater_power"):
        assert f"Source for {name}: " in out and f"Caution for {name}: " in out
    answer = asked(both)[1]
    assert answer["formula"] is None and answer["reference"] is None
    assert list(answer["sources"]) == ["beam_power", "heater_power"]
    assert {c.split(":")[0] for c in answer["cautions"]} == {"beam_power", "heater_power"}


def test_yes_and_no(asked: Any) -> None:
    code, answer = asked("27 kV > 26 kV")
    assert (code, answer["value"], answer["si"], answer["unit"], answer["shown"]) == (0, True, None, None, "yes")


def test_digits_can_be_asked_for(calc: Any) -> None:
    # 15 digits of pi, from memory
    assert calc("4 * atan(1)", "--digits", "10")[1] == "3.141592654\n"
    assert calc("4 * atan(1)", "--digits", "3")[1] == "3.14\n"


WRONG = [
    # expression, then each problem: code, the text over the caret, a part of the message, a part of the remedy
    ("27 kv * 2 amps", ("unknown-unit", "kv", "no unit", "kV"), ("unknown-unit", "amps", "no unit", "A")),
    ("27kV * 2 A", ("no-space-before-unit", "27kV", "no space", "27 kV")),
    ("beam_pwer(voltage=1 kV, current=1 A)", ("unknown-function", "beam_pwer(", "beam_pwer", "beam_power")),
    ("frobnicate(x=1)", ("unknown-function", "frobnicate(", "frobnicate", "--list")),
    ("beam_power(voltage=1 kV)", ("argument-missing", "beam_power(", "lacks current", "current=...")),
    ("water_density(20 degC)", ("argument-without-name", "20 degC", "needs its name", "temperature=...")),
    (
        "beam_power(volts=1 kV, current=1 V)",
        ("argument-missing", "beam_power(", "lacks voltage", "voltage=..."),
        ("unknown-argument", "1 kV", '"volts"', "voltage"),
        ("unit-mismatch", "1 V", "in A", "in A"),
    ),
    (
        "beam_power(voltage=61 kV, current=11 A)",
        ("out-of-range", "61 kV", "voltage is 61 kV; the formula holds from", "to 60 kV"),
        ("out-of-range", "11 A", "current is 11 A; the formula holds from", "to 10 A"),
    ),
    ("pilot_frequency(channel=14.5)", ("out-of-range", "14.5", "only whole numbers", "whole numbers only")),
    ("reflection(forward=1 kW, reflected=2 kW)", ("out-of-range", "reflection(", "must not be more", "arguments")),
    ("1 V / (2 V - 2 V) > 1", ("divide-by-zero", "(2 V - 2 V)", "divide by zero", "divisor")),
    ("sqrt(1 V - 2 V) * 1 / 0", ("domain", "sqrt(", "square root", "brackets"), ("divide-by-zero", "0", "zero", "zero")),
    ("10 ^ 400", ("overflow", "10 ^ 400", "too large", "smaller")),
    ("3 V + 2 A", ("unit-mismatch", "3 V + 2 A", "V and A", "V")),
    ("60 L/min ± 0.5 % + 1 A", ("unit-mismatch", "60 L/min", "m3/s and A", "")),
    (
        "coolant_heat_water(flow=60 L/min ± 0.5 A, inlet=35 degC +/- (0.2 degC), outlet=145 degC)",
        ("uncertainty-unit", "± 0.5 A", "60 L/min is m3/s, and its ± is A", "write it in L/min or in %"),
        ("uncertainty-unit", "+/- (0.2 degC)", "a temperature on a scale", "write it in K"),
        ("out-of-range", "145 degC", "outlet is 145 °C", "from 0 to 100 °C"),
    ),
    ("34 kV ± 500 * 1 A", ("uncertainty-unit", "± 500", "its ± has none", "write it in kV or in %")),
    ("34 ± 0.5 kV", ("uncertainty-unit", "± 0.5 kV", "34 has no unit, and its ± is in kV", "write 34 kV")),
    ("76 dBm ± 1 dBm", ("uncertainty-unit", "± 1 dBm", "dBm is a level", "write it in dB")),
    ("76 dBm ± 1 % + 3 dB", ("uncertainty-percent", "± 1 %", "zero is arbitrary", "write it in dB")),
    ("35 degC ± 1 % - 5 K", ("uncertainty-percent", "± 1 %", "zero is arbitrary", "write it in K")),
    ("0 V ± 1 %", ("uncertainty-percent", "± 1 %", "a percent of 0 V is nothing", "write it in V")),
    ("40 % ± 1 %", ("uncertainty-of-percent", "± 1 %", "points or a part", "0.4 ± 0.01 for points, 0.4 ± 1 % for a part")),
    ("40 % ± 1", ("uncertainty-of-percent", "± 1", "points or a part", "0.4 ± 0.01 for points, 0.4 ± 1 % for a part")),
    ("34 kV ± -1 %", ("uncertainty-sign", "± -1 %", "both sides", "without a sign")),
    ("34 kV +/- +1 kV", ("uncertainty-sign", "+/- +1 kV", "both sides", "without a sign")),
    ("34 kV ± * 2", ("uncertainty-not-a-number", "±", "no number", "± 0.5 %")),
    ("34 kV ± (1 kV + 2 kV)", ("uncertainty-not-a-number", "± (1 kV + 2 kV)", "not one number", "± 0.5 %")),
    ("34 kV ± 1 kv", ("unknown-unit", "kv", "no unit", "kV")),
    ("27 kv ± 1 kv", ("unknown-unit", "kv", "no unit", "kV"), ("unknown-unit", "kv", "no unit", "kV")),
    ("34 kV ± 1%", ("no-space-before-unit", "1%", "no space", "1 %")),
    ("34 kV ± 1 % ± 2 %", ("uncertainty-twice", "± 2 %", "two ±", "root of the sum")),
    ("(27 kV + 3 kV) ± 1 %", ("uncertainty-misplaced", "± 1 %", "none before it", "after each number")),
    ("min(3 V, 5 V) ± 1 V", ("uncertainty-misplaced", "± 1 V", "none before it", "after each number")),
    ("min(3 V ± 1,5 V)", ("number-form", ",5 V", "a comma stands between digits", "a point in numbers")),
    ("min(3 ± 1,5)", ("number-form", ",5", "a comma stands between digits", "a point in numbers")),
    ("pilot_frequency(channel=30 ± 1)", ("uncertainty-of-count", "30", "whole number", "leave its ± out")),
    ("heater_voltage * 2 A", ("unknown-name", "heater_voltage", "only numbers and formulas", "heater_power")),
    ("state(heater) = on", ("no-run", "state(heater)", "only numbers and formulas", "")),
    ("since(warm) > 3 s", ("no-run", "since(warm)", "while a procedure runs", "number")),
    ("last(levels) + 1", ("no-run", "levels", "only numbers and formulas", "number")),
    ("2 * beam_power", ("unknown-name", "beam_power", "wants its arguments", "beam_power(voltage=..., current=...)")),
    ("27 * kV", ("unknown-name", "kV", "a unit without its number", "27 kV")),
    ("2 * log", ("unknown-name", "log", "a function", "log(a)")),
    ("2 * directivity_bounds(return_loss=20 dB, directivity=30 dB)", ("pair-not-number", "directivity_bounds(", "two values", "directivity_lowest or directivity_highest")),
    ("directivity_bounds(return_loss=20 dB, directivity=3 dB)", ("out-of-range", "3 dB", "directivity_bounds: directivity is 3 dB", "from 5 to 80 dB")),
    ("27 kV – 3 kV", ("formula-syntax", "–", "a dash, not a minus", "write -")),
    ("5 ÷ 2", ("formula-syntax", "÷", "division", "write /")),
    ("1.6e−19", ("number-form", "1.6e−19", "exponent", "1.6e-19")),
    ("2 ** 3", ("formula-syntax", "*", "two signs", "^")),
    ("1 000 V", ("formula-syntax", "000", "number follows a number", "without a space")),
    ("3\u202fV", ("formula-syntax", "\u202f", "ordinary space", "ordinary space")),
    ("π * 2", ("formula-syntax", "π", "pi", "3.14159")),
    ("beam_power(voltage=1 kV current=1 A)", ("formula-syntax", "current", "cannot stand here", "a comma before it")),
    ('"cold"', ("not-a-number", '"cold"', "a word", "numbers")),
    ("(3 V", ("formula-syntax", "V", "never closed", ")")),
]  # fmt: skip


@pytest.mark.parametrize(("expression", "problems"), [(w[0], w[1:]) for w in WRONG], ids=[w[0] for w in WRONG])
def test_every_problem_of_a_sum_is_told_with_its_place_and_remedy(
    calc: Any, asked: Any, expression: str, problems: tuple[tuple[str, str, str, str], ...]
) -> None:
    code, out, err = calc(expression)
    assert (code, out) == (1, "")
    told = re.findall(r"^expression:1:(\d+): (.*) \[([a-z-]+)\]$", err, re.M)
    assert [c for _, _, c in told] == [p[0] for p in problems]
    for (column, message, _), (_, under, says, _) in zip(told, problems, strict=True):
        assert expression[int(column) - 1 :].startswith(under) and says in message
    code, answer = asked(expression)
    assert code == 1 and answer["expression"] == expression
    for found, (kind, _, _, remedy) in zip(answer["problems"], problems, strict=True):
        assert found["code"] == kind and remedy in found["remedy"]


def test_the_caret_stands_under_the_place(calc: Any) -> None:
    err = calc("beam_power(voltage=61 kV, current=1 A)")[2].splitlines()
    assert err[1:3] == ["    beam_power(voltage=61 kV, current=1 A)", "    " + " " * 19 + "^~~~~"]
    err = calc("1 V\n+ 2 A * 3")[2].splitlines()
    assert err[0].startswith("expression:1:1: ")
    assert calc("1 V +\n2 kv")[2].splitlines()[:2] == [
        'expression:2:3: "kv" is no unit known here [unknown-unit]', "    2 kv"]  # fmt: skip


@pytest.mark.parametrize(
    ("expression", "unit", "code", "remedy"),
    [
        ("27 kV * 2 A", "V", "unit-mismatch", "write one of: W, kW, mW"),
        ("27 kV * 2 A", "kw", "unknown-unit", "kW"),
        ("45 degC - 35 degC", "degC", "temperature-scale", "0 degC"),
        ("2 > 1", "V", "unit-mismatch", "leave the unit out"),
    ],
)
def test_a_unit_that_does_not_fit_is_told(calc: Any, expression: str, unit: str, code: str, remedy: str) -> None:
    exit_code, out, err = calc(expression, "--in", unit)
    assert (exit_code, out) == (1, "")
    assert err.startswith("--in:1:1: ") and f"[{code}]" in err and remedy in err


def test_a_wrong_unit_and_a_wrong_sum_are_told_together(asked: Any) -> None:
    code, answer = asked("27 kv", "--in", "kw")
    assert code == 1 and [p["file"] for p in answer["problems"]] == ["expression", "--in"]


def test_the_remedy_for_a_kelvin_temperature_works(calc: Any) -> None:
    assert calc("0 degC + (1300 K - 273.15 K)")[1] == "1026.85 °C\n"


def test_the_list_shows_every_formula_under_its_subject(calc: Any, asked: Any) -> None:
    held = library.load(folder("procedures") / "formulas")
    code, out, _ = calc("--list")
    assert code == 0
    for name in (*held.formulas, *held.pairs):
        assert f"\n  {name}(" in out
    assert re.search(r"^beam\n  \w+\(", out, re.M)
    code, answer = asked("--list")
    assert (code, answer) == (0, json.loads(json.dumps(sums(held))))
    assert calc("--list", "magnets")[1].startswith("magnets\n  copper_resistance(")
    part = asked("--list", "magnets")[1]
    assert set(part["formulas"]) == {n for n, f in held.formulas.items() if f.subject == "magnets"}


def test_a_name_shows_one_formula_whole(calc: Any, asked: Any) -> None:
    out = calc("--list", "beam_power")[1]
    assert calc("beam_power")[1] == calc(" beam_power ")[1] == out
    assert re.search(r"^  voltage  from [\d.]+ to 60 kV +beam voltage$", out, re.M)
    for start in ("Gives: kW", "Source: ", "Caution: ", "Decides: "):
        assert re.search(f"^{start}", out, re.M), start
    assert re.search(r"^fieldkit calc 'beam_power\(voltage=34 kV, current=2.2 A\)'\n  74.8 kW$", out, re.M)
    answer = asked("beam_power")[1]
    assert answer["name"] == "beam_power" and [a["name"] for a in answer["arguments"]] == ["voltage", "current"]
    assert "whole numbers only" in calc("pilot_frequency")[1]
    assert "any unit" in calc("conformance_probability")[1]
    assert "directivity_lowest and directivity_highest, in dB" in calc("directivity_bounds")[1]


def test_a_name_that_is_not_in_the_list_is_told_with_the_nearest(calc: Any) -> None:
    code, _, err = calc("--list", "beam_pwer")
    assert code == 1 and "beam_power" in err
    code, _, err = calc("--list", "qqqq")
    assert code == 1 and "look at fieldkit calc --list" in err


def test_a_stations_own_formulas_stand_beside_the_others(calc: Any, own: Path) -> None:
    sum_ = "fan_heat(flow=3600 m3/h, rise=10 K) + beam_power(voltage=1 kV, current=1 A)"
    for home in (own, own.parent):
        code, out, _ = calc(sum_, "--formulas", str(home))
        # 1.2 kg/m3 * 1 m3/s * 1.005 kJ/(kg K) * 10 K, and 1 kW
        assert (code, out.splitlines()[0]) == (0, "13.06 kW")
    assert "\nhall\n  fan_heat(flow, rise)" in calc("--list", "--formulas", str(own))[1]
    code, _, err = calc("fan_heat(flow=0 m3/h, rise=10 K)", "--formulas", str(own))
    assert code == 1 and "still air rises by nothing here [out-of-range]" in err
    assert calc("fan_heat(flow=3600 m3/h, rise=10 K)")[0] == 1


def test_problems_in_a_stations_formulas_are_told_as_check_tells_them(
    calc: Any, asked: Any, own: Path, capsys: Printed
) -> None:
    (own / "hall.yaml").write_text(OWN.replace("12.06", "13.06").replace("unit: K,", "unit: kelvin,"))
    (own / "more.yaml").write_text(OWN.replace("fan_heat", "beam_power"))
    code, out, err = calc("1 + 1", "--formulas", str(own))
    assert (code, out) == (1, "")
    main(["check", str(own)])
    assert err.strip() in capsys.readouterr().out
    assert "[unknown-unit]" in err and "[formula-twice]" in err
    assert {p["code"] for p in asked("1 + 1", "--formulas", str(own))[1]["problems"]} >= {"formula-twice"}


@pytest.mark.parametrize("words", [(), ("",), ("27", "kV"), ("1 + 1", "--list", "beam"), ("1", "--formulas", "/none")])
def test_misuse_ends_with_2_and_says_how(calc: Any, asked: Any, words: tuple[str, ...]) -> None:
    code, out, err = calc(*words)
    assert (code, out) == (2, "") and err.startswith("fieldkit calc: ")
    code, answer = asked(*words)
    assert code == 2 and answer["problems"][0]["code"] == "misuse"


def test_a_folder_without_formulas_is_misuse(calc: Any, tmp_path: Path) -> None:
    code, _, err = calc("1 + 1", "--formulas", str(tmp_path))
    assert code == 2 and "no .yaml file" in err


def test_from_a_shell() -> None:
    """What a shell passes arrives as it was typed, and the two streams are told apart."""
    command = [sys.executable, "-m", "fieldkit.cli.main", "calc"]
    done = subprocess.run([*command, "0.5 µA · 3 kΩ − 1 mV"], capture_output=True, text=True, encoding="utf-8")
    assert (done.returncode, done.stdout, done.stderr) == (0, "0.5 mV\n", "")
    done = subprocess.run([*command, "1 / 0"], capture_output=True, text=True, encoding="utf-8")
    assert (done.returncode, done.stdout) == (1, "") and "Traceback" not in done.stderr
