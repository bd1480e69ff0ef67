"""Rules that no frozen run reaches: asked of both engines on sheets and states made for the purpose."""

from __future__ import annotations

import copy
from typing import Any

import pytest
import run_driver as drive
from run_twin import Twin

from fieldkit.errors import Refusal
from fieldkit.run import rules


def ask_both(d: drive.Driver, twin: Twin, name: str, command: dict[str, Any]) -> Any:
    """A decision, the same from both."""
    twin.keep(name, d.run.ctx.sheet)
    steps: list[dict[str, Any]] = [{"text": text} for text in d.texts]
    steps.append({"command": command, "now": d.now})
    there = twin.ask(play=name, run=d.first["run"], chain=d.first["chain"], sha256=drive.SHEET_SHA, steps=steps)
    here = d.ask(**command)
    assert there["said"] == [here]
    assert there["state"] == d.state
    return here


def changed(**steps: dict[str, Any]) -> dict[str, Any]:
    """The tiny sheet with changed controls."""
    sheet = copy.deepcopy(drive.tiny().model_dump(mode="json"))
    for step in sheet["steps"]:
        step["control"].update(steps.get(step["id"], {}))
    return sheet


def at_hold(sheet: dict[str, Any]) -> drive.Driver:
    d = drive.Driver(sheet)
    d.do(**drive.tiny_start())
    d.do("states-declared", **drive.DECLARED)
    d.do("acknowledged", heard=["vell", "arkle"])
    d.do("chosen", value="cold")
    d.do("locked", lock="L-21")
    d.later(60)
    d.do("waited")
    d.do("proved", before="502", after="501", points=[{"name": n, "text": "0"} for n in ("rectifier", "capacitor")])
    for kind, more in (
        ("earthed", {}),
        ("people-counted", {"names": ["A"]}),
        ("people-counted", {"names": ["A"]}),
        ("lifted", {}),
    ):
        d.do(kind, **more)
    return d


def test_a_hold_point_of_a_supervisor_is_released_by_one(twin: Twin) -> None:
    d = at_hold(changed(all_out={"by": "supervisor"}))
    said = ask_both(d, twin, "supervisor", {"do": "released", "who": "arkle"})
    assert said["refused"]["code"] == "not-supervisor"
    said = ask_both(d, twin, "supervisor", {"do": "released", "who": "quill"})
    assert said["events"][0]["body"]["move"] == "m-hold"
    d.record("released", {"step": "all_out", "move": "m-hold", "who": "arkle", "statement": ""}, "vell")
    ask_both(d, twin, "supervisor", {"do": "paused"})
    assert "not-supervisor" in {one["code"] for one in d.state["disagree"]}


def test_a_required_remark_is_asked_for(twin: Twin) -> None:
    d = drive.Driver(changed(note={"required": True}))
    d.do(**drive.tiny_start())
    d.do("states-declared", **drive.DECLARED)
    drive.to_heater_volts(d)
    with pytest.raises(AssertionError, match="nothing-typed"):
        drive.to_end(d)
    assert ask_both(d, twin, "required", {"do": "remarked", "text": " "})["refused"]["code"] == "nothing-typed"


def test_where_people_are_protected_only_a_plain_pass_opens(twin: Twin) -> None:
    for protects, outcome in ((False, "pass"), (True, "fail")):
        name = f"protects-{protects}"
        d = drive.Driver(changed(heater_volts={"protects": protects}))
        d.do(**drive.tiny_start())
        d.do("states-declared", **drive.DECLARED)
        drive.to_heater_volts(d)
        said = ask_both(d, twin, name, {"do": "read", "text": "6.48"})
        assert (said["events"][0]["body"]["move"] is not None) == (outcome == "pass")
        d.do("read", text="6.48")
        row = d.state["log"][-1]
        assert (row["verdict"], row["outcome"]) == ("conditional pass", outcome)


def test_a_number_without_limits_is_not_judged_and_goes_on(twin: Twin) -> None:
    d = drive.Driver(changed(heater_volts={"limits": None, "typical": None}))
    d.do(**drive.tiny_start())
    d.do("states-declared", **drive.DECLARED)
    drive.to_heater_volts(d)
    ask_both(d, twin, "unlimited", {"do": "read", "text": "9.99"})
    d.do("read", text="9.99")
    assert (d.state["log"][-1]["verdict"], d.state["node"]) == ("not judged", "heater_amps")


def test_a_result_without_a_value_fails(twin: Twin) -> None:
    by_zero = {"call": "div", "of": [{"name": "heater_volts"}, {"number": "0"}]}
    d = drive.Driver(changed(power={"value": by_zero}))
    d.do(**drive.tiny_start())
    d.do("states-declared", **drive.DECLARED)
    drive.to_heater_volts(d)
    d.do("read", text="6.30")
    d.do("read", text="0.58")
    said = ask_both(d, twin, "faulty", {"do": "worked-out"})
    assert said["events"][0]["body"] == {"step": "power", "move": None, "value": ""}
    d.do("worked-out")
    assert (d.state["pending"]["outcome"], d.state["values"]["power"]["si"]) == ("fail", None)
    assert d.progress["moves"][0]["move"] == "m-power-stop"


def test_the_end_asks_for_everyone_out_and_the_states_of_the_procedure() -> None:
    d = drive.to_end(drive.to_heater_volts(drive.started()))
    rules.end_states(d.run.ctx, d.state)
    for state, code in (
        ({**d.state, "hands": {"deck": ["J. Vell"]}}, "people-in"),
        ({**d.state, "sources": {**d.state["sources"], "beam": {"state": "on"}}}, "end-state"),
    ):
        with pytest.raises(Refusal) as refused:
            rules.end_states(d.run.ctx, state)
        assert refused.value.code == code
