"""Events that decide would refuse, put into the chain as they stand: both folds list what is wrong with each.

The runs are those of the procedures that come with fieldkit; every case is one way in which somebody could be hurt, or
a record could say what did not happen.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

import pytest
from run_twin import Twin
from walker import HIGH, WARM, Walk, shipped

from fieldkit.run import decide, events

PROVED = [{"name": n, "text": "2"} for n in ("rectifier_output", "capacitor_top", "deck_bus")]
CHECK = {"name": "not on site", "how": "looked for him"}
DEVIATION = "heater_hot:deviation:picture_meters"
#: hot resistance below its limit, so that the result fails
COLD = {"heater_warm": "6.15", "heater_amps_10": "10.3", "heater_amps_warm": "10.35"}


@dataclass
class Forger(Walk):
    """A walk that keeps the texts of its events, and can come back on another boot."""

    texts: list[str] = field(default_factory=list)
    boot: str = "b1"

    @property
    def now(self) -> dict[str, str]:
        at = super().now
        return at if self.boot == "b1" else {**at, "mono": "900.0", "boot": self.boot}

    def record(self, kind: str, body: dict[str, Any], by: str = "vell") -> None:
        self.texts.append(events.to_text(events.next_event(self.state, kind, body, by, self.now, "0.1.0")))
        super().record(kind, body, by)

    def sign(self, person: str, meaning: str) -> None:
        self.record("signed", {"person": person, "meaning": meaning, "jws": "e30.e30.e30"}, person)


def walk(name: str, node: str, **more: str) -> Forger:
    values = WARM | more if name == "warm-up" else HIGH | {"next": "look"} | more
    found = Forger(shipped(name), values).to(node)
    assert found.state["node"] == node and not found.state["disagree"]
    return found  # type: ignore[return-value]


def listed(made: Forger, twin: Twin) -> list[str]:
    """What both folds list."""
    name = made.sheet.procedure
    twin.keep(name, made.sheet.model_dump(mode="json"))
    assert twin.ask(fold=name, texts=made.texts) == made.state
    return [one["code"] for one in made.state["disagree"]]


def answer(node: str, to: str, kind: str, body: dict[str, Any], by: str = "vell") -> Callable[[Forger], None]:
    return lambda made: made.record(kind, {"step": node, "move": f"{node}:{to}", **body}, by)


def passed_by(node: str, to: str) -> tuple[str, str, Callable[[Forger], None]]:
    return node, "not-answered", lambda made: made.record("went-on", {"step": node, "move": f"{node}:{to}"})


HV: list[tuple[str, str, Callable[[Forger], None]]] = [
    passed_by("prove_beam", "pass:earth_e1"),
    passed_by("walk_round", "done:unlock_q1"),
    passed_by("release", "done:beam_on"),
    passed_by("sticks_home", "pass:proofs_seen"),
    ("release", "other-statement", answer("release", "done:beam_on", "released", {"who": "arkle", "statement": "yes"})),
    ("lock_q1", "other-point", answer("lock_q1", "done:warning_machines", "locked",
        {"point": "Q9", "lock": "L-9", "tag": "", "holder": "vell"})),
    ("lock_q1", "nothing-typed", answer("lock_q1", "done:warning_machines", "locked",
        {"point": "Q1", "lock": " ", "tag": "", "holder": "vell"})),
    ("lock_q1", "unknown-person", answer("lock_q1", "done:warning_machines", "locked",
        {"point": "Q1", "lock": "L-9", "tag": "", "holder": "nobody"})),
    ("prove_beam", "other-tester", answer("prove_beam", "pass:earth_e1", "proved",
        {"instrument": "HM-3", "before": "502", "after": "501", "points": PROVED})),
    ("earth_e1", "other-stick", answer("earth_e1", "done:earth_e2", "earthed", {"stick": "E9", "point": "capacitor top"})),
    ("lift_e3", "other-stick", answer("lift_e3", "done:lift_e2", "lifted", {"stick": "E1", "point": "capacitor top"})),
    ("hands_in", "other-place", answer("hands_in", "done:picture_compartment", "people-counted",
        {"place": "hall", "way": "in", "names": ["J. Vell"]})),
    ("hands_out", "other-place", answer("hands_out", "done:lift_e3", "people-counted",
        {"place": "hall", "way": "out", "names": []})),
    ("unlock_q7", "other-point", answer("unlock_q7", "done:aux_on", "unlocked",
        {"point": "S4", "lock": "L-S4", "who": "vell"})),
    ("unlock_q7", "not-holder", answer("unlock_q7", "done:aux_on", "unlocked",
        {"point": "Q7", "lock": "?", "who": "arkle", "checks": [CHECK] * 3, "second": "quill"})),
    ("ready_flow", "outside-range", answer("ready_flow", "pass:dew_point", "read",
        {"text": "500", "unit": "L/min", "instrument": "FM-2"})),
    ("ready_flow", "no-instrument", answer("ready_flow", "pass:dew_point", "read",
        {"text": "48", "unit": "L/min", "instrument": None})),
    ("ready_flow", "not-recorder", answer("ready_flow", "pass:dew_point", "read",
        {"text": "48", "unit": "L/min", "instrument": "FM-2"}, "quill")),
]  # fmt: skip


@pytest.mark.parametrize(("node", "code", "forge"), HV, ids=[f"{n}-{c}" for n, c, _ in HV])
def test_a_forged_event_is_listed(node: str, code: str, forge: Callable[[Forger], None], twin: Twin) -> None:
    made = walk("hv-bring-up", node)
    forge(made)
    assert code in listed(made, twin)


def test_beam_on_is_not_confirmed_by_the_way_round_it(twin: Twin) -> None:
    made = walk("hv-bring-up", "beam_on")
    made.seconds += 200
    answer("beam_on", "done:ready_list", "confirmed", {})(made)
    assert listed(made, twin) == ["wrong-move"]


def test_a_deviation_is_a_supervisors_and_never_taken_by_the_answer(twin: Twin) -> None:
    made = walk("warm-up", "heater_hot", **COLD)
    (said,) = decide.decide(made.sheet, made.state, {"do": "worked-out"}, made.now)["events"]
    made.record("worked-out", {**said["body"], "move": DEVIATION})
    assert listed(made, twin) == ["wrong-move"]

    made = walk("warm-up", "heater_hot", **COLD)
    made.do("worked-out")
    made.record("went-on", {"step": "heater_hot", "move": DEVIATION, "authority": "arkle"})
    made.sign("arkle", "allowed")
    assert listed(made, twin) == ["reason-needed", "under-needed", "not-supervisor"]


def test_who_allowed_a_deviation_does_not_record_afterwards(twin: Twin) -> None:
    made = walk("warm-up", "heater_hot", **COLD)
    made.do("worked-out")
    made.do("went-on", move=DEVIATION, reason="a meter at its edge", authority="quill", under="rule 12")
    said = decide.decide(made.sheet, made.state, {"do": "person-changed", "to": "quill"}, made.now)
    assert said["refused"]["code"] == "allowed-before"
    made.record("person-changed", {"to": "quill"})
    assert listed(made, twin) == ["allowed-before"]


def test_a_release_is_signed_as_a_release(twin: Twin) -> None:
    made = walk("hv-bring-up", "release")
    (said,) = decide.decide(made.sheet, made.state, {"do": "released", "who": "arkle"}, made.now)["events"]
    made.record("released", said["body"])
    made.sign("arkle", "witnessed")
    assert listed(made, twin) == ["not-signed"]


def test_every_source_is_named_after_a_pause_and_only_what_held_is_credited(twin: Twin) -> None:
    for states, unbroken, code in (({}, ["beam_supply"], "states-missing"), (None, ["pump"], "not-unbroken")):
        made = walk("hv-bring-up", "climb_settle")
        made.do("paused")
        kept = {name: s["state"] for name, s in made.state["sources"].items()}
        made.record("states-confirmed", {"states": kept if states is None else states, "unbroken": unbroken})
        assert listed(made, twin) == [code]


def test_nothing_goes_on_after_a_gap_that_was_not_told(twin: Twin) -> None:
    made = walk("hv-bring-up", "hands_in")
    made.boot, made.seconds = "b2", made.seconds + 7 * 3600
    ask = {"do": "people-counted", "names": ["J. Vell"]}
    assert decide.decide(made.sheet, made.state, ask, made.now)["refused"]["code"] == "not-resumed"
    body = {"place": "hv-compartment", "way": "in", "names": ["J. Vell"]}
    answer("hands_in", "done:picture_compartment", "people-counted", body)(made)
    assert listed(made, twin) == ["not-resumed"]


def test_the_lock_of_another_is_taken_off_with_a_supervisor(twin: Twin) -> None:
    made = walk("hv-bring-up", "unlock_q7")
    names = ("not on site", "tried to reach", "told before return")
    ask = {"do": "unlocked", "who": "arkle", "checks": [{"name": n, "how": "as asked"} for n in names]}
    for second, code in (("vell", "second-needed"), ("", "second-needed"), ("nobody", "unknown-person")):
        said = decide.decide(made.sheet, made.state, {**ask, "second": second}, made.now)
        assert said["refused"]["code"] == code
    for one in made.state["started"]["people"]:
        if one["id"] == "quill":
            one["roles"] = ["technician"]
    said = decide.decide(made.sheet, made.state, {**ask, "second": "quill"}, made.now)
    assert said["refused"]["code"] == "supervisor-needed"


def test_who_neither_operates_nor_supervises_releases_nothing() -> None:
    made = walk("hv-bring-up", "release")
    for one in made.state["started"]["people"]:
        if one["id"] == "arkle":
            one["roles"] = ["writer"]
    said = decide.decide(made.sheet, made.state, {"do": "released", "who": "arkle"}, made.now)
    assert said["refused"]["code"] == "no-role"
