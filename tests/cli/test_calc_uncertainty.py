"""`fieldkit calc` with ± after its numbers: what comes out, how it is shown, and what is said of it.

Outside checks: the uncertainties package (propagation by itself), Monte Carlo with numpy and CoolProp (JCGM 101), the
published relative uncertainties of a calorimetric power and of a beam's efficiency, each typed as a person types it.
"""

from __future__ import annotations

import json
import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
import uncertainties
from CoolProp.CoolProp import PropsSI
from uncertainties import ufloat, umath

from fieldkit.cli.main import main

HEAT = "coolant_heat_water(flow=60 L/min ± 4 %, inlet=35 degC ± 0.4 K, outlet=45 degC ± 0.4 K)"
Printed = pytest.CaptureFixture[str]
Array = Any


@pytest.fixture
def calc(capsys: Printed) -> Callable[..., list[str]]:
    """The lines that the command prints of a sum that has an answer."""

    def run(*words: str) -> list[str]:
        assert main(["calc", *words]) == 0
        return capsys.readouterr().out.splitlines()

    return run


@pytest.fixture
def asked(capsys: Printed) -> Callable[..., dict[str, Any]]:
    """The object that the command prints with --json."""

    def run(*words: str) -> dict[str, Any]:
        assert main(["calc", "--json", *words]) == 0
        answer = json.loads(capsys.readouterr().out)
        assert isinstance(answer, dict)
        return answer

    return run


def u_of(answer: dict[str, Any]) -> float:
    """The standard uncertainty, in SI."""
    assert answer["uncertainty"]["k"] == 2
    return float(answer["uncertainty"]["si"]) / 2


# ---- the numbers -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("expression", "relative"),
    [
        # calorimetric power, standard uncertainties 1 % of density times heat capacity, 2 % of flow, 0.2 K of each
        # thermometer at a rise of 10 K: root(0.01^2 + 0.02^2 + 2 * 0.02^2), also by the uncertainties package
        ("1 ± 2 % * calorimetric_power(flow=60 L/min ± 4 %, inlet=35 degC ± 0.4 K, outlet=45 degC ± 0.4 K)", 0.0361),
        # efficiency of a beam, 3 % of RF power, 1 % of voltage and of current: root(0.03^2 + 2 * 0.01^2)
        ("beam_efficiency(rf_power=28 kW ± 6 %, voltage=34 kV ± 2 %, current=2.2 A ± 2 %)", 0.0332),
    ],
)
def test_relative_uncertainties_that_are_published_come_out(asked: Any, expression: str, relative: float) -> None:
    answer = asked(expression)
    assert u_of(answer) / answer["si"] == pytest.approx(relative, abs=5e-5)


THEIRS: list[tuple[str, Callable[[], uncertainties.UFloat]]] = [
    ("34 kV ± 1 % * 2.2 A ± 20 mA", lambda: ufloat(34e3, 170) * ufloat(2.2, 0.01)),
    ("27 kV +- 540 V / 3 A +/- 2 %", lambda: ufloat(27e3, 270) / ufloat(3, 0.03)),
    ("(45 degC ± 0.4 K - 35 degC ± 0.2 K) / 10 K", lambda: (ufloat(45, 0.2) - ufloat(35, 0.1)) / 10),
    ("sqrt(16 V ± 2 V) * sqrt(4 V)", lambda: umath.sqrt(ufloat(16, 1)) * 2),
    ("exp(-(2 ± 0.2)) + log(3.0 ± 1 %)", lambda: umath.exp(-ufloat(2, 0.1)) + umath.log(ufloat(3, 0.015))),
    ("sin(30 deg ± 2 deg)", lambda: umath.sin(ufloat(math.radians(30), math.radians(1)))),
    ("2.0 ± 0.2 ^ 3.0 ± 0.1", lambda: ufloat(2, 0.1) ** ufloat(3, 0.05)),
    ("-(3 V ± 0.1 V) + (5 V ± 1 %)", lambda: -ufloat(3, 0.05) + ufloat(5, 0.025)),
    (
        "vswr(forward=50 W ± 2 W, reflected=2 W ± 0.4 W)",
        lambda: (lambda r: (1 + r) / (1 - r))(umath.sqrt(ufloat(2, 0.2) / ufloat(50, 1))),
    ),
    (
        "discharge_time(initial=35 kV ± 1 %, safe=50 V ± 2 V, resistance=2 Mohm ± 5 %, capacitance=4 uF ± 10 %)",
        lambda: ufloat(2e6, 5e4) * ufloat(4e-6, 2e-7) * umath.log(ufloat(35e3, 175) / ufloat(50, 1)),
    ),
    (
        "dbm_from_watts(power=40 kW ± 3 %)",
        lambda: 10 * umath.log10(ufloat(40e3, 600) / 1e-3),
    ),
    (
        "beam_power(voltage=beam_power(voltage=1 kV ± 1 %, current=1 A ± 1 %) / 1 A, current=2 A ± 1 %)",
        lambda: ufloat(1e3, 5) * ufloat(1, 0.005) * ufloat(2, 0.01),
    ),
]  # fmt: skip


@pytest.mark.parametrize(("expression", "theirs"), THEIRS, ids=[e for e, _ in THEIRS])
def test_the_uncertainties_package_gives_the_same(asked: Any, expression: str, theirs: Any) -> None:
    answer, want = asked(expression), theirs()
    assert answer["si"] == pytest.approx(want.nominal_value, rel=1e-12)
    assert u_of(answer) == pytest.approx(want.std_dev, rel=1e-10)
    # each number's own part, as the package splits it
    parts = sorted((c * c for c in want.error_components().values()), reverse=True)
    assert [s["percent"] for s in answer["uncertainty"]["shares"]] == pytest.approx(
        [100 * p / want.std_dev**2 for p in parts], rel=1e-9
    )


def _heat(flow: Array, inlet: Array, outlet: Array) -> Array:
    """The heat that water takes up, by enthalpy (IAPWS-95 in CoolProp) and its density at the meter in the inlet."""
    h = [PropsSI("H", "T", t, "P", 3e5, "Water") for t in (inlet, outlet)]
    return flow * PropsSI("D", "T", inlet, "P", 3e5, "Water") * (h[1] - h[0])


def _wave(return_loss: Array, directivity: Array) -> Array:
    return -20 * np.log10(10 ** (-return_loss / 20) + 10 ** (-directivity / 20))


#: expression, (value, standard uncertainty) of each number in SI, the model in numpy
DRAWN: list[tuple[str, list[tuple[float, float]], Callable[..., Array]]] = [
    (HEAT, [(1e-3, 2e-5), (308.15, 0.2), (318.15, 0.2)], _heat),
    (
        "beam_efficiency(rf_power=28 kW ± 6 %, voltage=34 kV ± 2 %, current=2.2 A ± 2 %)",
        [(28e3, 840), (34e3, 340), (2.2, 0.022)],
        lambda p, v, i: p / (v * i),
    ),
    (
        "perveance(current=2.2 A ± 2 %, voltage=34 kV ± 3 %)",
        [(2.2, 0.022), (34e3, 510)],
        lambda i, v: i / v**1.5,
    ),
    (
        "discharge_time(initial=35 kV ± 1 %, safe=50 V ± 2 V, resistance=2 Mohm ± 5 %, capacitance=4 uF ± 10 %)",
        [(35e3, 175), (50, 1), (2e6, 5e4), (4e-6, 2e-7)],
        lambda v, safe, r, c: r * c * np.log(v / safe),
    ),
    (
        "directivity_lowest(return_loss=26 dB ± 0.5 dB, directivity=30 dB ± 1 dB)",
        [(26, 0.25), (30, 0.5)],
        _wave,
    ),
    (
        "winding_rise(cold_resistance=5 ohm ± 0.5 %, cold_temperature=20 degC ± 1 K, hot_resistance=6.1 ohm ± 0.5 %, "
        "ambient=25 degC ± 1 K)",
        [(5, 0.0125), (20, 0.5), (6.1, 0.01525), (25, 0.5)],
        # IEC 60034-1, 8.6.2.3.3 (from memory), k = 235 of copper
        lambda cold, at, hot, ambient: (hot - cold) / cold * (235 + at) + at - ambient,
    ),
]


@pytest.mark.parametrize(("expression", "numbers", "model"), DRAWN, ids=[e.partition("(")[0] for e, _, _ in DRAWN])
def test_a_monte_carlo_with_an_outside_model_agrees_within_3_percent(
    asked: Any, expression: str, numbers: list[tuple[float, float]], model: Any
) -> None:
    draw = np.random.default_rng(20261205)
    drawn = model(*[draw.normal(value, u, 20_000) for value, u in numbers])
    answer = asked(expression)
    assert answer["warnings"] == []
    assert u_of(answer) == pytest.approx(float(np.std(drawn)), rel=0.03)


def test_accuracies_are_half_widths(asked: Any) -> None:
    """JCGM 100, 4.3.7: u = a / sqrt(3). Against draws that are spread evenly over the width."""
    expression = "beam_efficiency(rf_power=28 kW ± 6 %, voltage=34 kV ± 2 %, current=2.2 A ± 2 %)"
    answer = asked(expression, "--accuracy")
    draw = np.random.default_rng(20261206)
    power, volts, amps = (v * draw.uniform(1 - a, 1 + a, 40_000) for v, a in ((28e3, 0.06), (34e3, 0.02), (2.2, 0.02)))
    assert u_of(answer) == pytest.approx(float(np.std(power / (volts * amps))), rel=0.02)
    assert answer["stated"] == "accuracy" and asked(expression)["stated"] == "expanded"


# ---- how it is shown -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("expression", "first"),
    [
        (HEAT, "41.5 kW ± 2.9 kW"),
        # root(0.5^2 + 1^2) % of 74.8 kW
        ("beam_power(voltage=34 kV ± 0.5 %, current=2.2 A ± 1 %)", "74.80 kW ± 0.84 kW"),
        ("25 degC ± 0.4 K", "25.00 °C ± 0.40 K"),
        ("25 °C ± 0.4 K", "25.00 °C ± 0.40 K"),
        ("dbm_from_watts(power=40 kW ± 3 %)", "76.02 dBm ± 0.13 dB"),
        ("34 kV ± 1500 V", "34.0 kV ± 1.5 kV"),
        ("elementary_charge() * 3.0 ± 1 %", "4.807e-19 A s ± 0.048e-19 A s"),
        ("-0.5 V ± 12 V", "0 V ± 12 V"),
        ("0 V ± 1 V", "0.0 V ± 1.0 V"),
        # a formula that deserves four digits shows no finer uncertainty
        ("coolant_heat_water(flow=60 L/min ± 0.001 %, inlet=35 degC, outlet=45 degC)", "41.54 kW ± 0.01 kW"),
        ("2 V ± 1 V > 1.5 V", "yes"),
        ("5 V ± 0 V", "5 V"),
    ],
)
def test_value_and_uncertainty_end_at_the_same_place(calc: Any, expression: str, first: str) -> None:
    assert calc(expression)[0] == first


def test_units_and_digits_that_are_asked_for_hold_for_both(calc: Any) -> None:
    assert calc(HEAT, "--in", "W")[0] == "41500 W ± 2900 W"
    assert calc("20 degC ± 0.5 K", "--in", "K")[0] == "293.15 K ± 0.50 K"
    assert calc(HEAT, "--digits", "2")[0] == "42 kW ± 3 kW"


def test_what_is_meant_and_where_it_comes_from_stand_below(calc: Any) -> None:
    lines = calc("1 ± 2 % * " + HEAT)
    assert lines[1].startswith("± is the expanded uncertainty, k = 2, typed or worked out.")
    # 0.01^2, 0.02^2 and twice 0.02^2 in 0.0013
    assert [line.split() for line in lines[3:7]] == [
        "inlet 35 degC ± 0.4 K 31 %".split(),
        "outlet 45 degC ± 0.4 K 31 %".split(),
        "flow 60 L/min ± 4 % 31 %".split(),
        "1 ± 2 % 7.7 %".split(),
    ]
    assert lines[7].startswith("Source for coolant_heat_water: ")
    assert "a ± typed is an accuracy" in " ".join(calc(HEAT, "--accuracy"))
    assert not any("±" in line for line in calc("beam_power(voltage=34 kV, current=2 A)"))


def test_each_of_a_pair_has_its_own(calc: Any, asked: Any) -> None:
    call = "directivity_bounds(return_loss=26 dB ± 0.5 dB, directivity=30 dB ± 1 dB)"
    assert calc(call)[0] == "21.75 dB ± 0.49 dB to 34.7 dB ± 2.2 dB"
    both = asked(call)["values"]
    for value in both:
        alone = asked(call.replace("directivity_bounds", value["name"]))
        assert value["uncertainty"] == alone["uncertainty"]
        assert value["shown"] == alone["shown"]
    assert both[0]["uncertainty"]["si"] < both[1]["uncertainty"]["si"]


def test_json_holds_it_in_si_and_in_the_unit_shown(asked: Any) -> None:
    answer = asked("25 degC ± 0.4 K")
    assert answer["uncertainty"] == {
        "si": pytest.approx(0.4),
        "value": pytest.approx(0.4),
        "unit": "K",
        "k": 2,
        "shares": [{"name": None, "written": "25 degC ± 0.4 K", "si": pytest.approx(0.4), "percent": 100.0}],
    }
    answer = asked(HEAT, "--in", "W")
    of = answer["uncertainty"]
    assert (of["unit"], answer["shown"]) == ("W", "41500 W ± 2900 W") and of["value"] == pytest.approx(of["si"])
    assert [s["name"] for s in of["shares"]] == ["inlet", "outlet", "flow"]
    assert math.hypot(*(s["si"] for s in of["shares"])) == pytest.approx(of["si"], rel=1e-12)
    assert asked("2 V")["uncertainty"] is None and asked("2 V")["stated"] is None


def test_an_argument_that_two_formulas_have_is_told_apart(asked: Any) -> None:
    answer = asked(
        "beam_power(voltage=1 kV ± 1 %, current=1 A) + stored_energy(capacitance=4 uF, voltage=2 kV ± 1 %) / 1 s"
    )
    assert {s["name"] for s in answer["uncertainty"]["shares"]} == {"voltage of beam_power", "voltage of stored_energy"}


# ---- what is said of it ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("expression", "says"),
    [
        ("beam_power(voltage=60 kV ± 1 %, current=2 A)", "The range ends within the ± of voltage (60 kV ± 1 %): beam_power: voltage is 60.6 kV; the formula holds"),
        ("directivity_bounds(return_loss=59 dB ± 2 dB, directivity=80 dB)", "The range ends within the ± of return_loss (59 dB ± 2 dB): directivity_bounds: return_loss"),
        ("reflection(forward=50 W ± 1 W, reflected=49.8 W)", "The range ends within the ± of forward (50 W ± 1 W): reflection: "),
        ("1 / (2 V ± 2 V)", "There is no answer everywhere within the ± of 2 V ± 2 V: "),
        ("2 V ± 1 V > 1.5 V", "The answer changes within the ± of 2 V ± 1 V."),
        ("(0.2 V ± 0.5 V) ^ 2", "The answer bends within the ± of 0.2 V ± 0.5 V: its own ± is only roughly right."),
        ("(0 V ± 0.5 V) ^ 2", "The answer bends within the ± of 0 V ± 0.5 V: its own ± is only roughly right."),
    ],
)  # fmt: skip
def test_what_the_uncertainty_reaches_is_told(calc: Any, asked: Any, expression: str, says: str) -> None:
    assert says in " ".join(" ".join(calc(expression)).split())
    assert [w for w in asked(expression)["warnings"] if w.startswith(says)]


def test_where_an_answer_changes_without_bound_the_value_stands(calc: Any, asked: Any) -> None:
    answer = asked("sqrt(0 ± 1)")
    assert (answer["si"], answer["uncertainty"], answer["shown"]) == (0.0, None, "0")
    assert any("changes without bound" in w for w in answer["warnings"])
    lines = calc("sqrt(0 ± 1)")
    assert lines[0] == "0" and not any(line.startswith("±") for line in lines)


@pytest.mark.parametrize(
    "expression", ["beam_power(voltage=34 kV ± 1 %, current=2 A ± 1 %)", "2 V ± 0.1 V > 1.5 V", "sqrt(4 ± 0.1)"]
)
def test_nothing_is_said_where_nothing_is_reached(asked: Any, expression: str) -> None:
    assert asked(expression)["warnings"] == []
