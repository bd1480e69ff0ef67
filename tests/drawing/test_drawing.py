"""What a drawing must show, measured in the SVG itself; and that pages' rules for styles hold."""

from __future__ import annotations

import json
import re
import xml.etree.ElementTree as ET
from itertools import pairwise
from pathlib import Path
from typing import Any

import pytest

from fieldkit import drawing
from fieldkit.drawing.paint import PRINT

ROOT = Path(__file__).parents[2]
ALL = [(f.stem, v) for f in sorted((ROOT / "tests/vectors/drawing").glob("*.json")) for v in json.loads(f.read_text())]
HEATER = {
    "value": "6.48", "u": "0.03", "unit": "V", "low": "6.10", "high": "6.50", "caution_low": "6.17",
    "caution_high": "6.43",
    "accept_low": "6.13", "accept_high": "6.47", "plate": "6.30", "verdict": "conditional pass",
}  # fmt: skip


def shapes(svg: str) -> list[ET.Element]:
    return list(ET.fromstring(svg))


def posts(svg: str, width: float) -> list[float]:
    """Middles of the limit posts."""
    found = [
        e
        for e in shapes(svg)
        if e.tag.endswith("rect") and e.get("width") == f"{width:g}" and e.get("class") == "f-ink"
    ]
    return sorted(float(e.get("x", "0")) + width / 2 for e in found)


@pytest.mark.parametrize(("draw", "vector"), ALL, ids=lambda x: x["name"] if isinstance(x, dict) else x)
def test_every_vector_is_well_formed_and_carries_no_inline_style(draw: str, vector: dict[str, Any]) -> None:
    root = ET.fromstring(vector["svg"])
    assert all("style" not in e.attrib and "onload" not in e.attrib for e in root.iter())
    assert root.get("aria-hidden") == "true" or root.get("aria-label")
    if vector["says"] and root.get("role"):
        assert root.get("aria-label") == vector["says"]


def test_every_class_has_its_colour_from_the_tokens() -> None:
    css = (ROOT / "static/css/drawing.css").read_text()
    tokens = (ROOT / "static/css/tokens.css").read_text()
    used = {
        c
        for _, v in ALL
        for cs in re.findall(r'class="([^"]+)"', v["svg"])
        for c in cs.split()
        if c[:2] in ("f-", "s-")
    }
    assert {"f-caution", "f-danger", "s-ink"} <= used
    for name in used:
        rule = re.search(rf"\.{name}\{{(fill|stroke):var\(--([a-z0-9-]+)", css)
        assert rule, name
        assert f"--{rule[2]}:" in tokens or rule[2] == "bg"


def test_print_uses_no_class_and_only_the_print_colours() -> None:
    for model in (HEATER, {**HEATER, "value": "9.9"}):
        svg = drawing.scale({**model, "ink": "print"}) + drawing.tiny({**model, "ink": "print"})
        assert "class=" not in svg
        assert set(re.findall(r"#[0-9A-F]{6}", svg)) <= set(PRINT.values())


@pytest.mark.parametrize("limits", [("6.10", "6.50"), ("-125", "-115"), ("0.001", "0.009"), ("27000", "38000")])
def test_small_scales_stand_their_limits_at_a_sixth_and_five_sixths(limits: tuple[str, str]) -> None:
    low, high = limits
    svg = drawing.tiny({"value": low, "low": low, "high": high, "unit": "V", "width": 120, "height": 25})
    left, right = posts(svg, 3.6)
    assert left == pytest.approx(2 + 116 / 6, abs=0.11)
    assert right == pytest.approx(2 + 116 * 5 / 6, abs=0.11)


@pytest.mark.parametrize(("side", "at"), [("high", 5 / 6), ("low", 1 / 6)])
def test_a_single_limit_stands_where_it_would_stand_among_two(side: str, at: float) -> None:
    svg = drawing.tiny({"value": "40", side: "40", "unit": "V", "width": 120})
    assert posts(svg, 3.6) == [pytest.approx(2 + 116 * at, abs=0.11)]


def test_a_scale_is_the_limits_and_a_quarter_each_side() -> None:
    left, right = posts(drawing.scale(HEATER), 6)
    assert left == pytest.approx(6 + 560 / 6, abs=0.1)
    assert right == pytest.approx(6 + 560 * 5 / 6, abs=0.1)


def test_the_scale_stretches_to_hold_the_reading_and_its_uncertainty() -> None:
    svg = drawing.scale({**HEATER, "value": "6.62", "verdict": "fail"})
    left, right = posts(svg, 6)
    pointer = re.search(r'd="M([0-9.]+) 46V82"', svg)
    assert pointer
    # straight proportion: 6.10 and 6.50 fix the axis, so 6.62 must lie at 6.62 on it
    assert float(pointer[1]) == pytest.approx(right + (right - left) * 0.12 / 0.40, abs=0.2)
    assert float(pointer[1]) + (right - left) * 0.03 / 0.40 < 566


def test_the_acceptance_limit_stands_where_straight_proportion_puts_it() -> None:
    svg = drawing.scale({**HEATER, "caution_low": None, "caution_high": None})
    left, right = posts(svg, 6)
    lines = [float(x) for x in re.findall(r'd="M([0-9.]+) 50V82"', svg)]
    # 6.13 and 6.47 between 6.10 and 6.50
    assert lines == [pytest.approx(left + (right - left) * part, abs=0.1) for part in (0.03 / 0.40, 0.37 / 0.40)]


@pytest.mark.parametrize("draw", ["scale", "tiny"])
@pytest.mark.parametrize(
    ("value", "yellow"),
    [("6.13", False), ("6.12", True), ("6.10", True), ("6.47", False), ("6.48", True), ("6.50", True), ("6.30", False)],
)
def test_yellow_is_the_guard_band_without_the_acceptance_limit_which_passes(
    draw: str, value: str, yellow: bool
) -> None:
    """ILAC-G8:09/2019 4.2.2: accepted where the value is not beyond the acceptance limit (from memory)."""
    model = {**HEATER, "caution_low": None, "caution_high": None, "value": value}
    assert ("f-caution" in drawing.DRAWINGS[draw](model)) is yellow


@pytest.mark.parametrize("draw", ["scale", "tiny"])
@pytest.mark.parametrize("value", ["6.12", "6.05", "6.60"])
def test_what_is_not_judged_carries_no_colour_wherever_it_lies(draw: str, value: str) -> None:
    svg = drawing.DRAWINGS[draw]({**HEATER, "value": value, "verdict": "not judged"})
    assert "caution" not in svg and "danger" not in svg and "stroke-dasharray" in svg


@pytest.mark.parametrize("draw", ["scale", "tiny"])
def test_limits_that_a_coarse_meters_steps_have_crossed_are_not_drawn(draw: str) -> None:
    svg = drawing.DRAWINGS[draw]({**HEATER, "low": "7", "high": "6", "value": "6", "verdict": "not judged"})
    assert posts(svg, 6) == [] and posts(svg, 3.6) == []


def test_a_reading_far_off_breaks_the_axis_and_leaves_the_limits_readable() -> None:
    svg = drawing.scale({**HEATER, "value": "660", "verdict": "fail"})
    left, right = posts(svg, 6)
    assert right - left > 200
    assert "over by 653.50 V" in svg


def test_colour_arrives_only_by_exception() -> None:
    plain = drawing.scale({**HEATER, "value": "6.30", "verdict": "pass"})
    assert "caution" not in plain and "danger" not in plain
    near = drawing.scale(HEATER)
    assert "f-caution" in near and "danger" not in near
    out = drawing.scale({**HEATER, "value": "6.62"})
    assert "f-danger" in out and "f-caution" not in out


@pytest.mark.parametrize(
    ("change", "says"),
    [
        ({"value": "6.30"}, "6.30 V: inside 6.10 to 6.50 V, margin 0.20 V, meter ±0.03 V."),
        ({}, "6.48 V: inside 6.10 to 6.50 V, but the margin of 0.02 V is smaller than the meter’s ±0.03 V."),
        ({"value": "6.62"}, "6.62 V: above 6.50 V by 0.12 V, four times the meter’s ±0.03 V."),
        ({"value": "6.52"}, "6.52 V: above 6.50 V by 0.02 V, which is smaller than the meter’s ±0.03 V."),
        ({"value": "6.0", "u": None}, "6.0 V: below 6.10 V by 0.10 V."),
        ({"value": "6.2", "high": None}, "6.2 V: inside the limit of at least 6.10 V, margin 0.10 V, meter ±0.03 V."),
        ({"value": None}, "No reading yet; limits 6.10 to 6.50 V."),
        ({"verdict": "not judged", "why": "the meter is too coarse"}, "6.48 V: not judged, the meter is too coarse."),
        ({"olds": [{"value": "6.25", "name": "last run"}], "value": "6.3"},
         "6.3 V: inside 6.10 to 6.50 V, margin 0.20 V, meter ±0.03 V. Last run 6.25 V."),
    ],
)  # fmt: skip
def test_the_sentence_says_value_side_margin_and_meter(change: dict[str, Any], says: str) -> None:
    assert drawing.says.scale({**HEATER, **change}) == says


def test_a_wait_never_rounds_in_favour_of_opening() -> None:
    assert drawing.says.wait({"elapsed": "899.999", "least": "900"}) == "14:59 of at least 15:00 has passed, 0:01 left."
    assert drawing.says.wait({"elapsed": "900", "least": "899.2"}) == "15:00 of at least 15:00 has passed."


def test_live_states_are_heavy_at_the_right_and_others_light_at_the_left() -> None:
    for state, heavy in (("on", True), ("cut-off", True), ("off", False), ("locked", False), ("earthed", False)):
        svg = drawing.rails({"lanes": [{"title": "x", "before": state}]})
        widths = [float(w) for w in re.findall(r'stroke-width="([0-9.]+)"', svg)]
        assert (max(widths) == 6.5) is heavy, state
    unknown = drawing.rails({"lanes": [{"title": "x", "before": "unknown"}]})
    assert len(set(re.findall(r'x1="([0-9.]+)"', unknown))) == 2  # neither side


def test_balloons_never_cover_each_other_and_stay_on_the_drawing() -> None:
    balls = [{"at": 3600 + n, "lane": 0, "n": n} for n in range(1, 9)]
    lanes = [{"short": "Beam", "title": "beam", "spans": [{"at": 0, "state": "on"}]}]
    svg = drawing.timeline({"from": 0, "to": 3600, "lanes": lanes, "balls": balls, "height": 400})
    at = sorted(float(y) for y in re.findall(r'cy="([0-9.]+)" r="11.5"', svg))
    assert len(at) == 8 and all(b - a >= 24 for a, b in pairwise(at)) and at[-1] + 12 <= 400
