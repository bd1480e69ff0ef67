"""What the record and its pages say of ranges: overdue, too coarse, wrongly ranged, and results with their uncertainty."""

from __future__ import annotations

import html
import re

import pytest
import run_driver as drive

from fieldkit.pdf import render
from fieldkit.record import build
from fieldkit.record.context import Context
from fieldkit.record.model import Record
from fieldkit.run import events


@pytest.fixture(scope="module")
def record() -> Record:
    """The metered sheet, with a wrong range, a coarse one, an overdue meter taken and one replaced."""
    d = drive.Driver(drive.frozen("metered"))
    d.do(**drive.metered_start())
    d.do("states-declared", **drive.HEATER_ON)
    d.do("read", text="1.90", range="2 V")
    d.do("went-on", move="volts:again", reason="Wrong range.")
    d.do("read", text="6.30", range="20 V")
    d.do("read", text="0.00")
    d.do("read", text="9.80")
    for _ in range(3):
        d.do("worked-out")
    d.do("read", text="0.20", instrument="RM-2")
    for text in ("3.0", "24.0", "33.5"):
        d.do("read", text=text)
    d.do("worked-out")
    d.do("read", text="1.0")
    return build.build(d.sheet, [events.parse(t.encode()) for t in d.texts], Context(station="Skarrow Fell"))


@pytest.fixture(scope="module")
def page(record: Record) -> str:
    """The record's words as printed, one space between them."""
    return re.sub(r"\s+", " ", html.unescape(re.sub(r"<[^>]*>", " ", render.html(record))))


def test_a_reading_on_too_small_a_range_failed_and_says_why(record: Record, page: str) -> None:
    wrong, right = (r for r in record.readings if r.step == "volts")
    assert (wrong.verdict, wrong.range, wrong.retaken) == ("fail", "2 V", True)
    assert "This range ends at 2 V, below the limit of 6.100 V: use the 20 V range." in wrong.words
    assert (right.verdict, right.range) == ("pass", "20 V")
    assert "HM-3 2 V range" in page and "HM-3 20 V range" in page


def test_too_coarse_a_range_is_not_judged_with_its_reason(record: Record, page: str) -> None:
    ripple = next(r for r in record.readings if r.step == "ripple")
    assert ripple.verdict == "not judged"
    assert ripple.reason == "the meter's steps of 0.01 V are too coarse for this limit: use the 2 V range"
    assert ripple.reason in page
    assert any(a.tag == "Not judged" and "Ripple" in a.title for a in record.attention)


def test_an_overdue_meter_is_flagged_and_the_one_that_replaced_another_is_not(record: Record, page: str) -> None:
    ion, leak = (next(r for r in record.readings if r.step == step) for step in ("ion", "leak"))
    assert ion.overdue and ion.verdict == "pass"
    assert not leak.overdue and leak.instrument == "RM-2"
    assert "The calibration of IP-2 ran out on 30 July 2026; the verdicts stand." in page
    lines = {(i.id, i.overdue) for i in record.instruments if i.used}
    assert ("IP-2", True) in lines and ("RM-2", False) in lines


def test_each_range_that_was_used_stands_with_its_accuracy_and_how_long_it_holds(record: Record, page: str) -> None:
    found = [(i.range, i.accuracy) for i in record.instruments if i.id == "HM-3"]
    assert ("20 V: −20 to 20 V", "±(0.1 % of reading + 2 × 0.01 V)") in found
    assert {span.split(":")[0] for span, _ in found} == {"2 V", "20 V", "10 A"}
    pressure = next(i for i in record.instruments if i.id == "PR-2")
    assert (pressure.accuracy, pressure.calibrated_to) == ("±(1.6 % of range)", "2026-07-31")
    assert "18 to 28 °C, calibrated 31 January 2026 for 6 months" in page
    unused = next(i for i in record.instruments if i.id == "RM-1")
    assert not unused.used and unused.overdue


def test_a_result_stands_with_its_uncertainty(record: Record, page: str) -> None:
    power = next(r for r in record.readings if r.step == "power")
    assert (power.shown, power.u, power.verdict) == ("61.7 ± 0.6", "0.6", "conditional pass")
    assert "61.7 ± 0.6 W" in page
    assert "within its uncertainty of ±0.6 W of 62.0 W" in power.words.replace("’", "'")
