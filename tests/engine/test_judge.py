"""Judging: frozen cases for both engines, and the figures against the GUM's and ILAC-G8's own rules."""

from __future__ import annotations

import json
import math
from decimal import Decimal
from typing import Any

import pytest
import run_driver as drive
from run_twin import Twin

from fieldkit.formula.evaluate import evaluate
from fieldkit.run import judge, worth

CASES: list[dict[str, Any]] = [
    case for path in sorted((drive.VECTORS / "judge").glob("*.json")) for case in json.loads(path.read_text())
]


def here(case: dict[str, Any]) -> dict[str, Any]:
    bounds = judge.bounds(
        case["limits"], case["typical"], case["unit"], case["resolution"], case["instrument"], evaluate
    )
    said = judge.judge(
        case["text"],
        case["unit"]["symbol"],
        bounds,
        case["resolution"],
        case["instrument"],
        case["protects"],
        case["day"],
    )
    return {"bounds": bounds, "judged": said}


@pytest.mark.parametrize("case", CASES, ids=lambda c: f"{c['why']}-{c['text']}")
def test_a_reading_is_judged_as_frozen(case: dict[str, Any]) -> None:
    assert here(case) == {"bounds": case["bounds"], "judged": case["judged"]}


def test_the_tablet_judges_the_same(twin: Twin) -> None:
    for case in CASES:
        got = twin.ask(judge=case)
        assert got == {"bounds": case["bounds"], "judged": case["judged"]}, case["why"]


def specified(resolution: str, percent: str, digits: str) -> dict[str, Any]:
    return {"unit": "V", "resolution": resolution, "percent": percent, "digits": digits}


def test_uncertainty_is_that_of_a_rectangular_specification() -> None:
    # JCGM 100:2008, 4.3.7: half-width a, u = a / sqrt(3); here 0.5 % of 6.300 V and 2 digits of 1 mV: a = 0.0335 V,
    # u = 0.0193 V (formulas.md F10.2). U = 2 u.
    u = worth.expanded("6.300", specified("0.001", "0.5", "2"), "V")
    assert u is not None
    assert float(u) / 2 == pytest.approx(0.0335 / math.sqrt(3), rel=1e-11)
    assert round(float(u) / 2, 4) == 0.0193
    # the same, by the GUM's own example of 4.3.7: a = 15.0 uV gives u = 8.66 uV (printed 8.7)
    u = worth.expanded("0", specified("0.0000150", "0", "1"), "V")
    assert u is not None
    assert round(float(u) / 2 * 1e6, 2) == 8.66


def test_guarded_verdicts_are_those_of_ilac_g8() -> None:
    # ILAC-G8:09/2019, non-binary statement with a guard band w = U: pass up to TU - U, conditional pass up to TU,
    # conditional fail up to TU + U, fail beyond. From the text of the guide as summarised in formulas.md F10.3.
    limit, meter = Decimal("50.0"), specified("0.1", "0", "17.3205080757")
    # a = 17.32 digits of 0.1 V: U = 2 a / sqrt(3) = 2.00 V at every reading
    limits = {"low": None, "high": {"number": "50"}, "low_name": "", "high_name": "", "guarded": True}
    unit = {"symbol": "V", "factor": "1", "offset": "0"}
    bounds = judge.bounds(limits, None, unit, "0.1", meter | {"id": "M", "calibrated_to": None}, evaluate)
    for tenths in range(450, 551):
        x = Decimal(tenths) / 10
        want = (
            "pass"
            if x <= limit - 2
            else "conditional pass"
            if x <= limit
            else "conditional fail"
            if x <= limit + 2
            else "fail"
        )
        got = judge.judge(str(x), "V", bounds, "0.1", meter | {"id": "M", "calibrated_to": None}, False)
        # the rounded U is 1.99999999999...: the edge itself may stand on either side by less than a digit
        if x not in (limit - 2, limit + 2):
            assert got["verdict"] == want, x


def test_a_computed_limit_is_rounded_inward_and_applied_so() -> None:
    case = next(c for c in CASES if c["why"].startswith("computed limit"))
    assert case["bounds"]["high"] == "0.58"
    assert case["judged"]["verdict"] == "pass"
    over = next(c for c in CASES if c["why"].startswith("0.59 A"))
    assert over["judged"]["verdict"] == "fail"


def test_neither_caution_nor_calibration_changes_a_verdict() -> None:
    for case in CASES:
        plain = {**case, "day": "2000-01-01"}
        if case["limits"]:
            plain["limits"] = {**case["limits"], "caution_low": None, "caution_high": None}
        assert here(plain)["judged"].get("verdict") == case["judged"].get("verdict")


def test_calibration_is_valid_to_the_end_of_its_last_day() -> None:
    meter = {"calibrated_to": "2026-11-30"}
    assert not judge.overdue(meter, "2026-11-30T23:59:59.999+01:00")
    assert judge.overdue(meter, "2026-12-01T00:00:00.000+01:00")
    assert not judge.overdue({"calibrated_to": None}, "2026-12-01")


def test_sentence_names_side_margin_and_meter() -> None:
    said = {c["why"]: c["judged"].get("words") for c in CASES}
    assert said["inside"] == "6.30 V: inside 6.10 to 6.50 V, margin 0.20 V, meter ±0.03 V."
    assert said["a hundredth over"] == "6.51 V: above 6.50 V by 0.01 V, meter ±0.03 V."
    assert said["guarded, outside by less than U"] == "6.53 V: above 6.50 V by 0.03 V, within the meter's ±0.03 V."
