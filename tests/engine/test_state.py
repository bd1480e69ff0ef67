"""The fold: what holds for every run, beside what the frozen runs show."""

from __future__ import annotations

import copy
import json
import random
from typing import Any

import run_driver as drive
import run_walker as walking
from run_twin import Twin

from fieldkit.run import events, names, progress, state


def followed() -> dict[str, Any]:
    """The tiny sheet with its beam named as the registers name it, and what follows it."""
    text = json.dumps(drive.tiny().model_dump(mode="json")).replace('"beam"', '"beam_supply"')
    sheet: dict[str, Any] = json.loads(text.replace("state:beam", "state:beam_supply"))
    for name in ("stored_charge", "x_rays", "heat"):
        sheet["sources"].append({"name": name, "title": name, "short": name, "isolable": False})
    return sheet


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


def test_what_follows_the_beam_supply_is_told_by_it() -> None:
    d = drive.Driver(followed())
    d.do(**drive.tiny_start())
    ctx, state = d.run.ctx, d.state
    started = {**state["started"], "places": {"box": ["stored_charge"], "frame": ["x_rays"], "pipe": ["heat"]}}
    for beam, charge, x_rays, box, frame in (
        ("on", "on", "on", False, False),
        ("off", "unknown", "off", False, True),
        ("locked", "unknown", "off", False, True),
        ("proved", "off", "off", False, True),  # the sheet earths it: proved is not enough for hands
        ("earthed", "off", "off", True, True),
        ("unknown", "unknown", "unknown", False, False),
    ):
        there = {**state, "started": started, "sources": {**state["sources"]}}
        there["sources"]["beam_supply"] = {**state["sources"]["beam_supply"], "state": beam}
        assert [names.stands(ctx, there, n) for n in ("stored_charge", "x_rays", "heat")] == [charge, x_rays, "unknown"]
        assert [names.safe(ctx, there, p) for p in ("box", "frame", "pipe")] == [box, frame, True]
        assert names.scope(ctx, there).names["state:x_rays"] == x_rays


def test_an_unmapped_place_is_reached_by_what_only_the_register_knows() -> None:
    d = drive.started()
    dead = {n: {**s, "state": "earthed"} for n, s in d.state["sources"].items()}
    started = {**d.state["started"], "places": {"cavity": ["beam", "rf_return"]}}
    assert not names.safe(d.run.ctx, {**d.state, "started": started, "sources": dead}, "nowhere")


def test_both_engines_tell_what_follows_alike(twin: Twin) -> None:
    sheet = followed()
    trees = {f"the {p} is safe": {"name": f"safe:{p}"} for p in ("box", "frame", "pipe", "nowhere")}
    trees |= {
        f"{n} off": {"call": "eq", "of": [{"name": f"state:{n}"}, {"text": "off"}]} for n in ("stored_charge", "x_rays")
    }
    gate = [{"says": says, "tree": tree, "clock": None, "least": None} for says, tree in trees.items()]
    sheet["moves"][0]["gate"], sheet["start"] = gate, {}
    twin.keep("followed", sheet)
    places = {"box": ["stored_charge"], "frame": ["x_rays"], "pipe": ["heat"]}
    closed = {}
    for beam in ("on", "off", "unknown"):
        d = drive.Driver(sheet)
        d.do(**drive.tiny_start() | {"places": places})
        d.do("states-declared", states={"beam_supply": beam, "heater": "off", "coolant": "off"}, board_seen=True)
        asked = [{"text": text} for text in d.texts] + [{"now": d.now}]
        there = twin.ask(
            play="followed", run=d.first["run"], chain=d.first["chain"], sha256=drive.SHEET_SHA, steps=asked
        )
        assert there["said"] == [d.progress]
        closed[beam] = (len(d.progress["reasons"]), "x_rays" in d.progress["live"])
    assert closed == {"on": (5, True), "off": (3, False), "unknown": (5, True)}
