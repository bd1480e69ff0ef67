"""Judgement against the guides it follows: GUM 4.3.7 and 7.2.6, ILAC-G8:09/2019, JCGM 106; propagation by GTC,
uncertainties and by random draws. Source beside each check."""

from __future__ import annotations

import math
from decimal import Decimal
from typing import Any

import GTC
import numpy as np
import pytest
import run_driver as drive
import uncertainties
from scipy import stats

from fieldkit.formula.evaluate import evaluate
from fieldkit.run import judge, worth

VOLT = {"symbol": "V", "factor": "1", "offset": "0"}


def meter(**figures: str | None) -> dict[str, Any]:
    """The flat view of a range in volts, exact where nothing is said."""
    flat = {"id": "M", "calibrated_to": None, "range": "range", "unit": "V", "low": None, "high": None}
    return {**flat, "resolution": "0.000001", "percent": "0", "digits": "0", "percent_of_range": "0", **figures}


def own(u: str) -> dict[str, Any]:
    """What stands for the meter of a result: U as it is."""
    return {"id": "", "unit": "V", "calibrated_to": None, "u": u}


def verdict(value: str, of: dict[str, Any], low: str | None = None, high: str | None = None) -> str:
    """The verdict on a value against guarded limits, shown to six decimals."""
    sides = {"low": low and {"number": low}, "high": high and {"number": high}, "low_name": "", "high_name": ""}
    bounds = judge.bounds({**sides, "guarded": True}, None, VOLT, "0.000001", of, evaluate)
    return str(judge.judge(value, "V", bounds, "0.000001", of, False)["verdict"])


# The specification of a meter ------------------------------------------------------------------------------------------


def test_the_voltmeter_of_the_gum() -> None:
    # GUM (JCGM 100:2008) 4.3.7, example: 14e-6 of reading and 2e-6 of the 1 V range at 0.928571 V: a = 15 uV, u = 8.7 uV
    # (from memory)
    voltmeter = meter(low="0", high="1", percent="0.0014", percent_of_range="0.0002")
    half = worth.half("0.928571", voltmeter, "V")
    assert half is not None
    assert half.digits / 10**half.scale == pytest.approx(15.0e-6, abs=0.05e-6)
    u = worth.standard("0.928571", voltmeter, VOLT)
    assert float(u or "0") == pytest.approx(8.7e-6, abs=0.05e-6)


def test_with_the_scatter_of_its_readings_the_voltmeter_gives_what_the_gum_combines() -> None:
    # GUM 4.3.7 and 5.1.5 (from memory): with 12 uV from repeated readings u = 14.8 uV, printed 15 uV
    u = float(
        worth.standard("0.928571", meter(low="0", high="1", percent="0.0014", percent_of_range="0.0002"), VOLT) or "0"
    )
    assert GTC.uncertainty(GTC.ureal(0, u) + GTC.ureal(0, 12e-6)) == pytest.approx(14.8e-6, abs=0.05e-6)


def test_percent_and_digits() -> None:
    # 0.5 % + 2 digits of 1 mV on 6.300 V: a = 0.0335 V; the standard deviation of that rectangle by scipy
    found = worth.standard("6.300", meter(resolution="0.001", percent="0.5", digits="2"), VOLT)
    assert float(found or "0") == pytest.approx(float(stats.uniform(-0.0335, 2 * 0.0335).std()), rel=1e-11)


def test_full_scale_is_the_farther_end() -> None:
    # common practice, no source: "of range" means of full scale, whichever sign it has
    for low, high, full in (("-20", "50", 50), ("-200", "0", 200), ("-2", "2", 2), (None, "30", 30), ("-7", None, 7)):
        found = worth.standard("1", meter(low=low, high=high, percent_of_range="1.5"), VOLT)
        half = 0.015 * full
        assert float(found or "0") == pytest.approx(float(stats.uniform(-half, 2 * half).std()), rel=1e-11)
    assert worth.standard("1", meter(percent_of_range="1.5"), VOLT) is None


# Decision rules --------------------------------------------------------------------------------------------------------


def test_a_guarded_pass_is_wrong_in_less_than_one_case_in_forty() -> None:
    # ILAC-G8:09/2019, table 1, guard band w = U: risk of a wrong pass below 2.5 % (from memory); by scipy at the edge
    limits = {"low": None, "high": {"number": "70"}, "low_name": "", "high_name": "", "guarded": True}
    bounds = judge.bounds(limits, None, VOLT, "0.000001", own("1.5"), evaluate)
    assert bounds is not None and bounds["accept_high"] == "68.500000"
    risk = float(stats.norm.sf(70.0, float(bounds["accept_high"]), 0.75))
    assert 0.0225 < risk < 0.025


def test_a_simple_pass_may_be_wrong_in_one_case_of_two() -> None:
    # ILAC-G8:09/2019, table 1, w = 0 (simple acceptance): below 50 % (from memory)
    limits = {"low": None, "high": {"number": "70"}, "low_name": "", "high_name": "", "guarded": False}
    bounds = judge.bounds(limits, None, VOLT, "0.000001", own("1.5"), evaluate)
    assert judge.judge("70", "V", bounds, "0.000001", own("1.5"), False)["verdict"] == "pass"
    assert float(stats.norm.sf(70.0, 70.0, 0.75)) == pytest.approx(0.5)


def test_the_four_verdicts_follow_the_probability_of_conformance() -> None:
    # ILAC-G8:09/2019, 4.2.3, w = U = 2 u (from memory): pass, conditional pass, conditional fail and fail part where the
    # probability that the true value keeps the limit (JCGM 106:2012, 7.2; normal, by scipy) is 97.7 %, 50 % and 2.3 %
    rnd = np.random.default_rng(5)
    edges = (float(stats.norm.cdf(2)), 0.5, float(stats.norm.cdf(-2)))
    seen = set()
    for _ in range(2000):
        u, high = round(float(10 ** rnd.uniform(-2, 1)), 6), round(float(rnd.uniform(50, 100)), 6)
        value = round(high + float(rnd.uniform(-4, 4)) * u, 6)
        p = float(stats.norm.cdf(high, value, u))
        if min(abs(p - edge) for edge in edges) < 1e-3:
            continue
        want = ("pass", "conditional pass", "conditional fail", "fail")[sum(p < edge for edge in edges)]
        assert verdict(f"{value:.6f}", own(f"{2 * u:.6f}"), high=f"{high:.6f}") == want, (value, u, high, p)
        seen.add(want)
    assert len(seen) == 4


def test_the_examples_of_jcgm_106() -> None:
    # JCGM 106:2012, examples (from memory): Zener diode, at most -5.40 V, -5.47 V with u = 0.05 V: p = 0.92; bursting
    # strength, at least 490, 509.7 with u = 8.6: p = 0.99; motor oil, 12.5 to 16.3, 13.6 with u = 1.8: p = 0.66.
    # Guarded by U = 2 u a pass needs 97.7 %; for the oil U is as wide as the limits: no value could pass.
    assert verdict("-5.47", own("0.10"), high="-5.40") == "conditional pass"
    assert verdict("509.7", own("17.2"), low="490") == "pass"
    assert verdict("13.6", own("3.6"), low="12.5", high="16.3") == "not judged"


# A value beside its uncertainty ----------------------------------------------------------------------------------------


def test_a_value_ends_where_its_uncertainty_ends() -> None:
    # GUM 7.2.6 (from memory): 10.057 62 ohm with u = 27 mohm is 10.058 ohm
    assert worth.shown("10.05762", "0.027", None) == "10.058 ± 0.027"


def test_shown_values_agree_with_another_library() -> None:
    # uncertainties (its "u" formats, two digits of the uncertainty): the same digits wherever it prints plain numbers
    rnd = np.random.default_rng(8)
    for _ in range(500):
        u = float(f"{10 ** rnd.uniform(-3, 0.9):.5g}")
        value = float(f"{rnd.uniform(-100, 100):.9g}")
        theirs = f"{uncertainties.ufloat(value, u):.2uf}".replace("+/-", " ± ")
        assert worth.shown(format(Decimal(repr(value)), "f"), format(Decimal(repr(u)), "f"), None) == theirs


# Propagation through a run ---------------------------------------------------------------------------------------------

#: half-widths of the readings below, by hand from the ranges of run_driver.metered_start: 0.1 % + 2 x 0.01 V; 0.5 % + 2 x 0.01 A
VOLTS, AMPS = (6.30, 0.001 * 6.30 + 0.02), (9.80, 0.005 * 9.80 + 0.02)


@pytest.fixture(scope="module")
def run() -> drive.Driver:
    """The metered sheet to its end."""
    d = drive.Driver(drive.frozen("metered"))
    d.do(**drive.metered_start())
    d.do("states-declared", **drive.HEATER_ON)
    d.do("read", text="6.30")
    d.do("read", text="0.002", range="2 V")
    d.do("read", text="9.80")
    for _ in range(3):
        d.do("worked-out")
    d.do("read", text="0.20", instrument="RM-2")
    for text in ("3.0", "24.0", "33.5"):
        d.do("read", text=text)
    d.do("worked-out")
    for text, more in (("1.0", "once_more"), ("2.0", "once_more"), ("3.0", "enough")):
        d.do("read", text=text)
        d.do("chosen", value=more)
        if more == "once_more":
            d.do("confirmed")
    d.do("worked-out")
    return d


def u_of(run: drive.Driver, step: str) -> float:
    """The standard uncertainty that the record's row implies, in the step's unit."""
    row = next(row for row in run.state["log"] if row["step"] == step)
    return float(row["u"]) / 2


def rectangles() -> tuple[Any, Any]:
    draw = np.random.default_rng(1).uniform
    return draw(VOLTS[0] - VOLTS[1], VOLTS[0] + VOLTS[1], 400_000), draw(AMPS[0] - AMPS[1], AMPS[0] + AMPS[1], 400_000)


def test_power_and_resistance_agree_with_random_draws(run: drive.Driver) -> None:
    # Monte Carlo with rectangular errors (JCGM 101), 4e5 draws: within 1 %
    volts, amps = rectangles()
    assert u_of(run, "power") == pytest.approx(float(np.std(volts * amps)), rel=0.01)
    assert u_of(run, "hot") == pytest.approx(float(np.std(volts / amps)), rel=0.01)


def test_results_agree_with_gtc(run: drive.Driver) -> None:
    # GTC 1.5, reverse: same inputs, u = a / sqrt 3; a result of a result counts each reading once
    volts, amps = (GTC.ureal(x, a / math.sqrt(3)) for x, a in (VOLTS, AMPS))
    power = volts * amps
    assert u_of(run, "power") == pytest.approx(GTC.uncertainty(power), rel=1e-10)
    assert u_of(run, "hot") == pytest.approx(GTC.uncertainty(volts / amps), rel=1e-10)
    assert GTC.uncertainty(power / amps - volts) == pytest.approx(0, abs=1e-12)
    assert u_of(run, "nothing") == 0


def test_readings_that_share_their_error(run: drive.Driver) -> None:
    # GTC: one thermometer moved from inlet to outlet (r = 1): its error cancels in the rise
    error = GTC.ureal(0, 0.3 / math.sqrt(3))
    assert GTC.uncertainty((33.5 + error) - (24.0 + error)) == 0
    assert u_of(run, "rise") == 0


def test_the_mean_of_a_column(run: drive.Driver) -> None:
    # uncertainties 3.2: mean of three independent readings of 3 % + 1 x 0.1 uA
    column = [uncertainties.ufloat(x, (0.03 * x + 0.1) / math.sqrt(3)) for x in (1.0, 2.0, 3.0)]
    assert u_of(run, "ion_mean") == pytest.approx((sum(column) / 3).std_dev, rel=1e-10)


def test_pressure_by_percent_of_range(run: drive.Driver) -> None:
    # 1.6 % of the 10 bar range whatever it shows: the standard deviation of that rectangle by scipy
    assert u_of(run, "pressure") == pytest.approx(float(stats.uniform(-0.16, 0.32).std()), rel=1e-10)
