"""Gates that a procedure need not write: from the rules of the plant, from its own `rules:`, from a hand meter's place."""

from __future__ import annotations

from fieldkit.formula.library import Library
from fieldkit.procedure.compile import compile_bytes
from fieldkit.sheet.model import Sheet

HEAD = """procedure: rules
edition: 1
title: Rules
purpose: To see what gates a rule gives.
for: [inductive-output-tube]
crew: 2
energy: {beam_supply: off, heater: off, coolant: on, bias: off, rf_drive: locked}
ends: {beam_supply: off or on, heater: on or off, coolant: on or off, bias: off or on or cut-off, rf_drive: locked}
rules:
  - beam_supply on needs heater on for 15 min, coolant on, bias on or cut-off
steps:
"""
SAFE = """make_safe:
  - act: Beam stop.
    sets: {beam_supply: off}
"""


def sheet(steps: str) -> Sheet:
    found, problems = compile_bytes((HEAD + steps + SAFE).encode(), "rules.yaml", Library())
    assert found is not None, problems
    return found


def says(found: Sheet, step: str) -> list[str]:
    (move,) = [m for m in found.moves if m.origin == step and m.on in ("done", "pass")]
    return [c.says for c in move.gate]


def test_a_rule_gates_the_step_that_switches_its_source_on() -> None:
    gate = says(sheet("  - {act: Beam on, id: beam, sets: {beam_supply: on}}\n"), "beam")
    assert "the heater has been on for 15 min" in gate
    assert "the coolant is on" in gate
    assert "the bias is on or cut-off" in gate


def test_what_a_live_source_needs_cannot_be_switched_off_under_it() -> None:
    found = sheet("  - {act: Coolant off, id: off, sets: {coolant: off}}\n")
    (move,) = [m for m in found.moves if m.origin == "off"]
    assert [c.says for c in move.gate] == ["the beam supply is no longer on; it needs the coolant on"]
    asked = {"call": "not", "of": [{"call": "eq", "of": [{"name": "state:beam_supply"}, {"text": "on"}]}]}
    assert move.gate[0].tree == asked


def test_a_change_to_another_state_that_the_rule_allows_stays_open() -> None:
    gate = says(sheet("  - {act: Bias to cut-off, id: park, sets: {bias: cut-off}}\n"), "park")
    assert not [one for one in gate if "no longer" in one]


def test_switching_both_off_in_one_act_is_no_taking_away() -> None:
    found = sheet("  - {act: All off, id: off, sets: {beam_supply: off, coolant: off}}\n")
    assert says(found, "off") == []


def test_switching_off_the_beam_is_never_gated() -> None:
    assert says(sheet("  - {act: Beam off, id: off, sets: {beam_supply: off}}\n"), "off") == []


def test_a_hand_meter_needs_its_place_made_dead_and_a_panel_meter_does_not() -> None:
    by_hand = sheet("  - {read: Heater leads, id: lead, unit: V, meter: HM-3 at deck}\n")
    (move,) = [m for m in by_hand.moves if m.on == "pass"]
    assert [c.tree for c in move.gate] == [{"name": "safe:deck"}]
    panel = sheet("  - {read: Beam volts, id: volts, unit: kV, meter: beam_volts}\n")
    assert says(panel, "volts") == []


def test_unlocking_needs_the_lock_everyone_out_and_every_earth_lifted() -> None:
    found = sheet(
        "  - {act: Coolant off, id: off, sets: {coolant: off}}\n"
        "  - {lock: Q6A, id: a, sources: [coolant]}\n"
        "  - {unlock: Q6A, id: b, sources: [coolant]}\n"
    )
    assert says(found, "b") == [
        "a lock is on Q6A",
        "everyone is out, counted by name",
        "every earthing stick is lifted and counted",
    ]


def test_a_wait_before_a_step_does_not_open_the_way_back() -> None:
    """`or_else` is for what time alone does not open: a wait that still runs is no reason to go back."""
    found = sheet(
        "  - {act: Heater on, id: on, sets: {heater: on}}\n"
        "  - {act: Look, id: look, needs: [heater on], not_before: 5 min after on, or_else: on}\n"
    )
    (back,) = [m for m in found.moves if m.origin == "look" and m.to == "on"]
    assert back.gate[0].tree["call"] == "not"
    assert "since:on" not in str(back.gate[0].tree)
