"""The register of instruments: what an entry must be, when it is due, its lines at the desk."""

import copy
import json
from importlib import resources

import pytest

from fieldkit.operations import instruments
from fieldkit.run.events import Instrument, with_ranges

RANGE = {
    "name": "20 V",
    "unit": "V",
    "low": "-20",
    "high": "20",
    "resolution": "0.001",
    "percent": "0.05",
    "digits": "3",
}
METER = {
    "id": "HM-3",
    "reads": "hand multimeter",
    "calibrated_on": "2025-08-31",
    "interval_months": 6,
    "temperature": {"low": "18", "high": "28"},
    "ranges": [RANGE, {**RANGE, "name": "200 V", "low": "-200", "high": "200", "resolution": "0.01"}],
}
STATION = json.loads(resources.files("fieldkit.demo").joinpath("station.json").read_text("utf-8"))


def entry(*path, to=None):
    """The meter with one thing otherwise."""
    made = copy.deepcopy(METER)
    at = made
    for key in path[:-1]:
        at = at[key]
    if path:
        at[path[-1]] = to
    return Instrument.model_validate(made)


def test_a_calibration_holds_to_the_end_of_a_shorter_month():
    # 31 August and six months: 28 February (as python-dateutil counts, tests/engine/test_clock.py)
    assert instruments.due(entry()).calibrated_to == "2026-02-28"
    assert instruments.due(entry("calibrated_to", to="2026-01-31")).calibrated_to == "2026-01-31"
    assert instruments.due(entry("calibrated_on")).calibrated_to is None


def test_the_demonstration_is_in_order():
    for name, one in STATION["instruments"].items():
        found = Instrument.model_validate(one)
        assert instruments.wrong_with(name, found) == ""
        assert instruments.due(found).calibrated_to
    many = {name for name, one in STATION["instruments"].items() if len(one["ranges"]) > 1}
    assert {"HM-3", "HV-2", "GP-1", "XR-1", "PS-1", "CL-1"} <= many


@pytest.mark.parametrize(
    ("path", "to", "says"),
    [
        (("id",), "HM-4", "its id says"),
        (("ranges",), (), "no range"),
        (("ranges", 1, "name"), "20 V", "name of its own"),
        (("ranges", 0, "name"), "", "name of its own"),
        (("ranges", 0, "unit"), "volts", "no unit"),
        (("ranges", 0, "low"), "-2e1", "no plain number"),
        (("ranges", 0, "percent"), "0,05", "no plain number"),
        (("ranges", 0, "digits"), "-3", "below zero"),
        (("ranges", 0, "resolution"), "0.000", "resolution is zero"),
        (("ranges", 0, "high"), "-20", "ends where it begins"),
        (("calibrated_on",), "31.8.2025", "no date"),
        (("calibrated_to",), "2026-02-29", "no date"),
        (("interval_months",), 0, "less than a month"),
        (("calibrated_to",), "2026-03-01", "its interval ends on 2026-02-28"),
        (("temperature",), {"low": "28", "high": "18"}, "wrong way round"),
        (("temperature",), {"low": "cold", "high": "18"}, "no plain numbers"),
    ],
)
def test_what_is_wrong_with_an_entry_is_said(path, to, says):
    assert says in instruments.wrong_with("HM-3", entry(*path, to=to))
    assert instruments.wrong_with("HM-3", entry()) == ""


def test_a_part_of_a_range_needs_an_end():
    open_ended = {**RANGE, "low": None, "high": None, "percent_of_range": "1.5"}
    found = Instrument.model_validate({**METER, "ranges": [open_ended]})
    assert "has no end" in instruments.wrong_with("HM-3", found)


def test_the_desk_shows_every_range_with_its_accuracy_and_how_long_it_holds():
    (line,) = instruments.lines({"HM-3": entry("ranges", 1, "percent_of_range", to="0.02")}, "2026-02-28")
    assert [(r.name, r.span, r.resolution, r.accuracy) for r in line.ranges] == [
        ("20 V", "−20 to 20 V", "0.001 V", "±(0.05 % of reading + 3 × 0.001 V)"),
        ("200 V", "−200 to 200 V", "0.01 V", "±(0.05 % of reading + 0.02 % of range + 3 × 0.01 V)"),
    ]
    assert (line.calibrated_to, line.state) == ("2026-02-28", "due today")
    assert line.holds == "18 to 28 °C, calibrated 31 August 2025 for 6 months"
    assert instruments.lines({"HM-3": entry()}, "2026-03-01")[0].state == "overdue"
    assert instruments.lines({"HM-3": entry()}, "2026-02-27")[0].state == ""


def test_an_entry_of_the_earlier_form_is_one_range_without_a_name():
    flat = {"id": "M", "reads": "volts", "unit": "V", "low": "0", "high": "20", "resolution": "0.01", "percent": "0.3"}
    found = Instrument.model_validate(with_ranges({**flat, "digits": "1", "calibrated_to": "2026-11-30"}))
    assert instruments.wrong_with("M", found) == ""
    (line,) = instruments.lines({"M": found}, "2026-07-31")
    assert [(r.name, r.span) for r in line.ranges] == [("", "0 to 20 V")]
