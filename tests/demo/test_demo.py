"""The demonstration is made through the same operations as a real station's work, and its record verifies elsewhere."""

from __future__ import annotations

import datetime as dt
import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

from fieldkit.demo import build, registers
from fieldkit.operations import review, runs
from fieldkit.operations.dossier import dossier
from fieldkit.pdf.verify import verify

NOW = dt.datetime.now(dt.UTC)


def fieldkit(*words: str, place: Path) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-m", "fieldkit.cli.main", *words]
    return subprocess.run(command, cwd=place, env=dict(os.environ), capture_output=True, text=True, timeout=180)


@pytest.fixture(scope="module")
def made(tmp_path_factory):
    """The whole demonstration, filled once."""
    folder = tmp_path_factory.mktemp("demo")
    with build.opened(folder):
        demo = build.prepare(folder, NOW, build.signs(), lambda said: None)
        third = build.tablet(demo, "demo-tablet-3", "tablet 3", NOW - dt.timedelta(hours=5))
        warm = build.warm_up(demo, third)
        pdf = build.countersign(demo, warm.run)
        third.clock.pass_by(720)
        climbed = build.bring_up(demo, third)
        fourth = build.tablet(demo, "demo-tablet-4", "tablet 4", NOW - dt.timedelta(minutes=25))
        going = build.still_going(demo, fourth)
        yield demo, warm, pdf, climbed, going


def test_one_record_is_countersigned_one_waits_and_one_run_is_open(made):
    states = {line.run: line.state for line in review.lines()}
    _, warm, _, climbed, going = made
    assert states == {warm.run: "countersigned", climbed.run: "waiting", going.run: "open"}


def test_what_was_played_agrees_with_the_engine(made):
    for run in (made[1], made[3], made[4]):
        assert run.state["disagree"] == []
        assert [e.raw.decode() for e in runs.load(run.run).events] == run.texts


def test_the_bring_up_fell_back_once_for_gas_and_ended_locked(made):
    climbed = made[3]
    failed = [row for row in climbed.state["log"] if row["outcome"] == "fail"]
    assert [row["step"] for row in failed] == ["climb_ion"]
    levels = [row["level"] for row in climbed.state["log"] if (row["kind"], row["step"]) == ("read", "climb_ion")]
    assert levels == [f"{kv} kV" for kv in (18, 20, 22, 24, 26, 24, 26, 28, 30, 32)]
    assert {lock["point"] for lock in climbed.state["locks"]} == {"Q1", "S4"}


def test_the_bring_ups_record_says_what_a_supervisor_asks(made):
    r = dossier(made[3].run).record
    ends = "Of 87 readings 83 pass, 3 are not judged and 1 failed and was met as the procedure lays down."
    assert r.summary.endswith(ends)
    fail, rf, q1, wait = r.attention
    assert (fail.title, fail.value, fail.unit) == ("Ion-pump current, 26 kV", "5.8", "µA")
    assert fail.by.startswith("Then, as the procedure lays down: back one level. J. Vell ") and "gas" in fail.by
    lanes = [lane.source for lane in r.lanes]
    assert [(a.title, lanes[a.lane]) for a in (rf, q1, wait)] == [
        ("Lock 42", "rf_drive"),
        ("Lock 44", "beam_supply"),
        ("Heater at rated volts, without a break", "heater"),
    ]
    assert [n.says for n in r.cautions[:1]] == ["DANGER, read to J. Vell and P. Arkle."]
    lines = {line.seq: (line.title, line.says) for line in r.log}
    seq = fail.seq
    assert lines[seq] == ("Ion-pump current, 26 kV", "5.8 µA, fail")
    assert lines[seq + 1] == ("Ion-pump current, 26 kV", "Back one level: A burst of gas; the pump recovers.")
    assert r.waits[1].title == "Beam voltage, one level at a time: settle, 18 kV"
    assert next(x for x in r.readings if x.title == "Earthing sticks on their rests").limits.says == "exactly 3"


def test_the_countersigned_record_holds_with_its_authority_and_not_without(made):
    demo, _, pdf, _, _ = made
    assert verify(pdf, demo.held.authority_pem, dt.datetime.now(dt.UTC)).holds
    assert not verify(pdf, None, dt.datetime.now(dt.UTC)).holds


def test_dates_of_the_registers_move_with_the_day_and_one_meter_stays_overdue():
    later = registers.WRITTEN_FOR + dt.timedelta(days=400)
    instruments = registers.seed(later)["instruments"]
    assert instruments["DM-04"]["calibrated_to"] > later.isoformat()
    overdue = [key for key, one in instruments.items() if one["calibrated_to"] < later.isoformat()]
    assert overdue == ["RM-1"]


def test_a_record_is_made_and_verified_by_the_command_line_alone(tmp_path):
    done = fieldkit("demo", "--record", str(tmp_path / "out"), place=tmp_path)
    assert done.returncode == 0, done.stderr
    pdf, certificate = (Path(line) for line in done.stdout.splitlines())
    assert pdf.is_file() and certificate.is_file()
    told = fieldkit("verify", str(pdf), "--ca", str(certificate), "--json", place=tmp_path)
    assert told.returncode == 0, told.stdout
    assert json.loads(told.stdout)
    assert fieldkit("verify", str(pdf), place=tmp_path).returncode == 1
