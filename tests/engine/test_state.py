"""The fold: what holds for every run, beside what the frozen runs show."""

from __future__ import annotations

import copy
import json
import random
from typing import Any

import run_driver as drive
import run_walker as walking

from fieldkit.run import events, names, progress, state


def test_apply_leaves_the_run_before_it_as_it_was() -> None:
    d = drive.to_end(drive.to_heater_volts(drive.started()))
    run = state.begin(d.sheet)
    for text in d.texts:
        before, kept = run, copy.deepcopy(run.state)
        run = state.apply(run, events.parse(text.encode()))
        assert before.state == kept
    corrected = copy.deepcopy(run.state)
    state.apply(run, correction(run, 17, "6.62"))
    assert run.state == corrected


def correction(run: state.Run, seq: int, text: str) -> dict[str, Any]:
    body = {"seq": seq, "field": "text", "text": text, "reason": "Misread.", "move": None}
    last = run.events[-1]
    return {
        **last,
        "seq": last["seq"] + 1,
        "kind": "corrected",
        "prev": run.state["head"],
        "sha256": "ff",
        "body": body,
    }


def test_a_state_is_plain_json() -> None:
    d = drive.to_end(drive.to_heater_volts(drive.started()))
    assert json.loads(json.dumps(d.state)) == d.state
    shown = progress.progress(d.sheet, d.state, d.now)
    assert json.loads(json.dumps(shown)) == shown


def test_every_row_has_every_key() -> None:
    d = drive.to_end(drive.to_heater_volts(drive.started()))
    assert len({tuple(sorted(row)) for row in d.state["log"]}) == 1
    assert [row["seq"] for row in d.state["log"]] == list(range(d.state["seq"] + 1))


def test_a_fold_never_throws_at_events_that_parse() -> None:
    """Every sample of every kind, with wild steps and moves, in any order, from the first event on."""
    sheet = drive.tiny()
    for seed in range(40):
        rng = random.Random(seed)
        d = drive.Driver(sheet)
        walker = walking.Walker(d, seed)
        if rng.random() < 0.7:
            d.do(**drive.tiny_start())
            d.do("states-declared", **drive.DECLARED)
        for _ in range(40):
            d.record(*walker.nonsense(), by=rng.choice(("vell", "nobody")))
            assert d.progress["node"] == d.state["node"]
            assert d.ask("remarked", text="x")
        assert d.state["disagree"]


def test_a_broken_chain_is_listed() -> None:
    d = drive.started()
    plain = [events.plain(events.parse(t.encode())) for t in d.texts]
    for damage, code in (({"prev": "00"}, "chain"), ({"seq": 7}, "sequence"), ({"run": "other"}, "other-run")):
        found = state.fold(d.sheet, [plain[0], {**plain[1], **damage}])["disagree"]
        assert code in {one["code"] for one in found}


def test_a_sheet_is_indexed_once() -> None:
    sheet = drive.tiny()
    assert names.context(sheet) is names.context(sheet)
    assert names.context(sheet) is not names.context(drive.tiny())


def test_an_unmapped_place_is_reached_by_every_source() -> None:
    d = drive.started()
    ctx = d.run.ctx
    safe = {**d.state, "sources": {n: {**s, "state": "earthed"} for n, s in d.state["sources"].items()}}
    assert names.safe(ctx, safe, "nowhere")
    for name in ("beam", "heater", "coolant"):
        live = {**safe["sources"][name], "state": "locked"}
        assert not names.safe(ctx, {**safe, "sources": {**safe["sources"], name: live}}, "nowhere")
    assert names.safe(ctx, {**safe, "sources": {**safe["sources"], "heater": live}}, "deck")


def test_a_source_that_the_sheet_does_not_know_makes_its_place_unsafe() -> None:
    d = drive.started()
    started = {**d.state["started"], "places": {"deck": ["beam", "rf_return"], "bay": [], "box": ["beam", "heat"]}}
    safe = {n: {**s, "state": "earthed"} for n, s in d.state["sources"].items()}
    there = {**d.state, "started": started, "sources": safe}
    assert not names.safe(d.run.ctx, there, "deck")
    assert names.safe(d.run.ctx, there, "box")
    assert names.safe(d.run.ctx, there, "bay")


def test_make_safe_and_trip_are_open_wherever_a_run_can_be() -> None:
    d = drive.Driver(drive.tiny())
    d.do(**drive.tiny_start())
    for then in (
        lambda: None,
        lambda: d.do("states-declared", **drive.DECLARED),
        lambda: drive.to_heater_volts(d),
        lambda: d.do("read", text="6.62"),
        lambda: d.do("paused"),
        lambda: d.do("safe-step-done", item="beam_off"),
    ):
        then()
        assert "make-safe" in d.progress["may"]
        assert "trip" in d.progress["may"]
        for command in (
            {"do": "safe-begun"},
            {"do": "safe-step-done", "item": "heater_off"},
            {"do": "trip-recorded", "indicator": "I6", "done": "Beam off."},
        ):
            assert "events" in d.ask(**command), (d.state["phase"], command)
