"""A played run gives exactly the record that tests/record/golden/ shows, and nothing of the run is missing from it.

`FIELDKIT_REWRITE=1 pytest tests/record` writes the golden records again; read the difference before keeping it.
"""

from __future__ import annotations

import json
import os
from pathlib import Path

import played_run as play
import pytest

from fieldkit.errors import Refusal
from fieldkit.record import build, lanes, model, sections
from fieldkit.record.context import Check, Context, LastRun
from fieldkit.record.frame import titled
from fieldkit.record.model import Record
from fieldkit.record.readings import by_margin

HERE = Path(__file__).parent


def record(pen: play.Pen, **more: object) -> Record:
    checks = tuple(Check(seq=e.head.seq, holds=True, kid="ab" * 32) for e in pen.events if e.head.kind == "signed")
    return build.build(pen.sheet, pen.events, Context(station="Skarrow Fell", checks=checks, **more))  # type: ignore[arg-type]


@pytest.mark.parametrize("name", ["clean", "eventful"])
def test_a_played_run_gives_the_golden_record(name: str) -> None:
    made = json.loads(model.to_bytes(record(getattr(play, name)())))
    golden = HERE / "golden" / f"{name}.json"
    if os.environ.get("FIELDKIT_REWRITE"):
        golden.parent.mkdir(exist_ok=True)
        golden.write_text(json.dumps(made, ensure_ascii=False, indent=1, sort_keys=True) + "\n")
    assert made == json.loads(golden.read_text())


def test_the_same_run_gives_the_same_bytes_and_they_read_back() -> None:
    one, two = record(play.eventful()), record(play.eventful())
    assert model.to_bytes(one) == model.to_bytes(two)
    assert model.from_bytes(model.to_bytes(one)) == one


def test_a_record_can_be_built_again_from_its_own_context() -> None:
    pen = play.eventful()
    made = record(pen)
    again = build.build(pen.sheet, pen.events, model.from_bytes(model.to_bytes(made)).context)
    assert model.to_bytes(again) == model.to_bytes(made)


def test_the_sentence_says_date_times_steps_and_readings() -> None:
    made = record(play.eventful())
    assert made.summary == (
        "On 31 July 2026, from 12:58 to 13:22, all 17 steps were done. Of 6 readings 3 pass, 1 passes conditionally, "
        "1 failed and was taken again and 1 failed and was accepted as a deviation."
    )
    assert record(play.clean()).short == "All 17 steps were done. All 5 readings pass."


def test_every_event_is_a_line_of_the_log_in_order() -> None:
    pen = play.eventful()
    made = record(pen)
    assert [(line.seq, line.sha256) for line in made.log] == [(e.head.seq, e.sha256) for e in pen.events]
    assert all(line.says for line in made.log)


def test_a_correction_keeps_the_old_value_beside_the_new_one() -> None:
    made = record(play.eventful())
    reading = next(r for r in made.readings if r.step == "ion")
    assert (reading.text, [o.text for o in reading.old], reading.old[0].by_name) == ("5.2", ["52"], "J. Vell")
    assert (made.corrections[0].old, made.corrections[0].new, made.corrections[0].after_s) == ("52", "5.2", 20)
    assert made.corrections[0].unit == "µA"


def test_a_retaken_reading_stands_hollow_on_the_scale_of_the_next() -> None:
    made = record(play.eventful())
    first, second = (r for r in made.readings if r.step == "heater")
    assert first.retaken and second.tries_before == 1
    assert [(p.name, p.value) for p in second.pointers] == [("earlier try", "6.62")]
    assert made.retakes[0].reason == "Meter not settled."


def test_margins_are_counted_in_units_of_the_meters_uncertainty() -> None:
    made = record(play.clean())
    heater = next(r for r in made.readings if r.step == "heater")
    # by hand, JCGM 100 4.3.7: a = 0.3 % x 6.30 + 0.01 = 0.0289, U = 2 a / sqrt 3 = 0.03337; 0.20 / 0.03337 = 5.993
    assert (heater.margin, heater.u, heater.margin_u) == ("0.20", "0.03", "6.0")


def test_readings_are_ordered_by_failure_then_by_margin() -> None:
    order = by_margin(record(play.eventful()).readings)
    assert [r.verdict for r in order[:2]] == ["fail", "fail"]
    rest = [float(r.margin_u) for r in order[2:] if r.margin_u]
    assert rest == sorted(rest)


def test_energy_over_the_run_has_each_change_and_the_warming_heater() -> None:
    lanes = {lane.source: lane.spans for lane in record(play.clean()).lanes}
    assert [s.state for s in lanes["beam_supply"]] == ["off", "locked", "proved", "earthed", "locked", "off"]
    assert [(s.state, s.warming) for s in lanes["heater"]] == [("off", False), ("on", True), ("on", False)]
    assert [s.state for s in lanes["ion_pump"]] == ["on"]


def test_an_open_run_gives_a_record_of_what_came_so_far() -> None:
    made = record(play.Pen(play.sheet()).isolate())
    assert made.head.outcome == "open" and made.head.ended == ""
    assert made.short.startswith("The run is not over: 4 of 17 steps were done.")
    assert [e.stick for e in made.earths if e.left_on] == ["E2"]


def test_a_stopped_run_says_where_and_why() -> None:
    pen = play.Pen(play.sheet()).isolate().release().warm().read("heater", "7.1", None)
    pen.went("heater", "stop", "Heater supply runs away.")
    pen.write("safe-begun", {"why": "heater"}).write("safe-step-done", {"item": "beam"}).write("safe-ended", {})
    made = record(pen.end("stopped", "made safe"))
    assert made.head.outcome == "stopped"
    assert "was stopped after 12 of 17 steps: heater supply runs away" in made.summary
    assert [n.title for n in made.safe] == ["Make safe begun", "Beam supply off.", "Make safe ended"]


def test_instruments_that_were_used_come_first_with_their_accuracy() -> None:
    lines = record(play.clean()).instruments
    assert {i.id for i in lines if i.used} == {"DM-04", "IP-2", "HV-2"}
    heater = next(i for i in lines if i.id == "DM-04")
    assert (heater.accuracy, heater.range) == ("±(0.3 % of reading + 1 × 0.01 V)", "0 to 20 V")


def test_the_last_run_is_shown_on_the_scale() -> None:
    last = {"heater": LastRun(text="6.25", unit="V", run="0702-B2-1", day="2 July 2026")}
    reading = next(r for r in record(play.clean(), last_run=last).readings if r.step == "heater")
    assert [(p.name, p.value) for p in reading.pointers] == [("last run", "6.25")]


def test_a_record_of_another_version_is_refused_by_name() -> None:
    data = json.loads(model.to_bytes(record(play.clean())))
    with pytest.raises(Refusal) as unknown:
        model.from_bytes(json.dumps({**data, "fieldkit": "record/9"}).encode())
    assert unknown.value.code == "unknown-version"
    with pytest.raises(Refusal) as damaged:
        model.from_bytes(json.dumps({**data, "counts": {}}).encode())
    assert damaged.value.code == "damaged-record"


def test_sections_name_fields_that_exist_and_empty_ones_are_left_out() -> None:
    made = record(play.clean())
    for section in sections.SECTIONS:
        assert all(field in Record.model_fields for field in section.fields), section
    printed = [s.name for s in sections.printed(made)]
    assert printed[0] == "summary" and printed[-1] == "proof"
    assert "deviations" not in printed and "isolation" in printed


def test_only_a_heater_warms_up_and_only_a_source_that_is_off_discharges() -> None:
    span = lanes.Span(second=100, state="on", seq=3)
    off = span.model_copy(update={"state": "off"})
    assert [s.warming for s in lanes._mark("heater", [span], 400, 9)] == [True, False]
    assert lanes._mark("beam_supply", [span], 400, 9) == [span]
    assert [s.decay for s in lanes._mark("beam_supply", [off], 400, 9)] == [True, False]


def test_a_reading_on_a_ladder_is_titled_with_its_rung_once() -> None:
    assert titled("Ion-pump current", "26 kV") == "Ion-pump current, 26 kV"
    assert titled("Settle at 26 kV", "26 kV") == "Settle at 26 kV"
    assert titled("Heater voltage", "") == "Heater voltage"
