"""A seeded random walk over every sheet: the tablet's engine and this one agree at every step, on everything they say.

Each walk is played here, by a hand that mostly does what is open and often does not; every event, every command
(taken or refused) and every progress is then compared in node, by the hash of its JSON. A third of the walks also
receive events that parse and make no sense: neither engine may throw, and both must list the same.
"""

from __future__ import annotations

import random
from typing import Any

import pytest
import run_driver as drive
import run_walker as walking
from run_twin import Twin, digest

from fieldkit.run import state

SHEETS = {"tiny": (drive.tiny, 30, 70), "metered": (lambda: drive.frozen("metered"), 16, 60), "warm-up": (lambda: walking.real("warm-up"), 10, 110), "hv-bring-up": (lambda: walking.real("hv-bring-up"), 6, 200)}  # fmt: skip


def begin(name: str, sheet: Any) -> tuple[drive.Driver, list[dict[str, Any]]]:
    d = drive.Driver(sheet)
    if name == "tiny":
        return d, [drive.tiny_start(), {"do": "states-declared", **drive.DECLARED}]
    if name == "metered":
        return d, [drive.metered_start(), {"do": "states-declared", **drive.HEATER_ON}]
    return d, [walking.real_start(sheet), walking.declared(sheet)]


def play(name: str, sheet: Any, seed: int, length: int) -> tuple[drive.Driver, list[dict[str, Any]]]:
    """A walk, and its steps with what this engine says of each."""
    rng = random.Random(seed)
    d, commands = begin(name, sheet)
    walker = walking.Walker(d, seed, care=1.0 if seed % 4 == 0 else rng.choice((0.97, 0.9, 0.6)))
    steps: list[dict[str, Any]] = []
    over = 0

    def note(what: dict[str, Any], said: Any) -> None:
        if "text" in what:
            what["whole"] = len(steps) % 40 == 0
            said = said if what["whole"] else walking.brief(said)
        steps.append({**what, "digest": digest(walking.canonical(said))})

    for i in range(length):
        if d.state["started"] and i % 3 == 0:
            using = walker.meter(d.progress) or None
            note({"now": d.now, "using": using}, d.seen(using))
        if i < 2 and rng.random() < 0.1:
            note({"command": {"do": "read", "text": "1"}, "now": d.now}, d.ask("read", text="1"))
        if seed % 3 == 0 and i > 6 and rng.random() < 0.1:
            d.record(*walker.nonsense(), by="vell")
            note({"text": d.texts[-1]}, d.state)
            continue
        command = commands[i] if i < 2 else walker.command()
        said = d.ask(**command)
        note({"command": command, "now": d.now}, said)
        for one in said.get("events", ()):
            d.record(one["kind"], one["body"], command.get("by") or d.state["recorder"])
            note({"text": d.texts[-1]}, d.state)
        due = d.state["unsigned"]
        if due and rng.random() < 0.95:
            d.sign(due["person"], due["meaning"])
            note({"text": d.texts[-1]}, d.state)
        over += d.state["phase"] in ("ended", "stopped")
        if d.state["phase"] == "voided" or over > 14:
            break
    d.record("remarked", {"step": d.state["node"], "move": None, "text": "Last."}, "vell")
    steps.append({"text": d.texts[-1], "whole": True, "digest": digest(walking.canonical(d.state))})
    return d, steps


@pytest.mark.parametrize("name", SHEETS)
def test_both_engines_agree_at_every_step_of_every_walk(name: str, twin: Twin) -> None:
    make, walks, length = SHEETS[name]
    sheet = make()
    twin.keep(name, sheet.model_dump(mode="json"))
    ended = refused = listed = 0
    for seed in range(walks):
        d, steps = play(name, sheet, seed, length)
        reply = twin.ask(walk=name, run=d.first["run"], chain=d.first["chain"], sha256=drive.SHEET_SHA, steps=steps)
        assert reply == {"ok": len(steps)}, explain(name, sheet, seed, length, reply)
        ended += d.state["phase"] == "ended"
        refused += sum("command" in s for s in steps) - len(d.texts)
        listed += bool(d.state["disagree"])
        assert state.fold(sheet, d.run.events) == d.state
    assert ended and refused and listed, "the walks did not reach what they are for"


def explain(name: str, sheet: Any, seed: int, length: int, reply: dict[str, Any]) -> str:
    """The two answers side by side, where they first differ."""
    _, steps = play(name, sheet, seed, length)
    step = steps[reply["step"]]
    d, _ = begin(name, sheet)
    for one in steps[: reply["step"] + 1]:
        if "text" in one:
            d.texts.append(one["text"])
            d.run = state.apply(d.run, walking.events.parse(one["text"].encode()))
    if "text" in step:
        here: Any = d.state if step["whole"] else walking.brief(d.state)
    elif "command" in step:
        here = walking.decided(sheet, d.state, step)
    else:
        here = walking.shown(sheet, d.state, step)
    shown = {k: v for k, v in step.items() if k != "digest"}
    return f"{name}, seed {seed}, step {reply['step']}: {shown}\n" + "\n".join(walking.differences(here, reply["got"]))
