"""Every step kind: one module, one line in KINDS, one example that compiles; and a kind that only a test knows."""

from __future__ import annotations

import dataclasses
from dataclasses import dataclass
from pathlib import Path

import pytest

import fieldkit.steps
from fieldkit.formula.library import Library
from fieldkit.procedure.compile import compile_bytes, compile_file
from fieldkit.run.moves import is_around
from fieldkit.sheet import controls
from fieldkit.sheet.controls import Confirm
from fieldkit.sheet.model import Sheet
from fieldkit.steps import KINDS, base, words
from fieldkit.steps.base import Acting, Kind, Piece
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import key

HERE = Path(__file__).parent
#: modules of fieldkit.steps that are no kinds
SHARED = {
    "__init__",
    "base",
    "conditions",
    "expression",
    "gates",
    "judged",
    "limits",
    "meters",
    "scope",
    "sources",
    "words",
}


def compiled(kind: str) -> Sheet:
    sheet, problems = compile_file(HERE / f"{kind}.yaml", Library())
    assert sheet is not None, problems
    assert problems == []
    return sheet


def test_every_kind_has_an_example_and_every_example_a_kind() -> None:
    assert {path.stem for path in HERE.glob("*.yaml")} == set(KINDS)


def test_every_kind_has_a_module_and_every_module_a_kind() -> None:
    folder = Path(fieldkit.steps.__file__).parent
    modules = {path.stem.rstrip("_") for path in folder.glob("*.py")} - {n.rstrip("_") for n in SHARED}
    assert modules == set(KINDS)
    assert all(kind.word == word for word, kind in KINDS.items())


def test_a_picture_that_is_optional_can_be_left_out_and_others_cannot() -> None:
    written = (HERE / "picture.yaml").read_text(encoding="utf-8")
    for text, labels in (
        (written, [""]),
        (written.replace("id: meters", "id: meters\n    optional: yes"), ["", "Go on without a picture"]),
    ):
        sheet, problems = compile_bytes(text.encode(), "picture.yaml", Library())
        assert sheet is not None, problems
        assert [m.label for m in sheet.moves if m.origin == "meters"] == labels
        assert [is_around(m.model_dump()) for m in sheet.moves if m.origin == "meters"] == [
            bool(label) for label in labels
        ]


def test_a_formula_is_shown_by_the_titles_of_what_it_names() -> None:
    sheet = compiled("work_out")
    said = [step.text for step in sheet.steps if step.control.control == "result"]
    assert said
    assert not any("_" in text for text in said), said


@pytest.mark.parametrize("kind", KINDS)
def test_the_example_of_a_kind_compiles_and_uses_it(kind: str) -> None:
    sheet = compiled(kind)
    assert kind in {step.kind for step in sheet.steps}
    assert sheet.steps[-1].line > 0


@pytest.mark.parametrize("kind", KINDS)
def test_every_key_of_a_kind_says_what_it_is_for(kind: str) -> None:
    for field in words.keys_of(KINDS[kind].model).values():
        assert len(field.metadata["doc"]) > 5
        assert field.metadata["word"].write


def test_the_examples_together_use_every_control() -> None:
    used = {step.control.control for kind in KINDS for step in compiled(kind).steps}
    assert used == set(controls.CONTROLS)


def test_a_danger_panel_keeps_the_order_of_words_that_ansi_z535_asks_for() -> None:
    # signal word, hazard, consequence, how to avoid it: ANSI Z535.4 as commonly described, from memory
    control = compiled("caution").steps[0].control
    assert list(type(control).model_fields)[1:] == ["signal", "hazard", "consequence", "avoid"]


def test_a_lock_sets_its_sources_locked_and_asks_that_they_are_off_first() -> None:
    move = compiled("lock").moves[0]
    assert move.effects.sets == {"beam_supply": "locked"}
    assert [c.says for c in move.gate] == ["the beam supply is switched off at its own control"]


def test_an_earth_needs_its_source_proved_dead() -> None:
    move = compiled("earth").moves[0]
    assert [c.says for c in move.gate] == ["the beam supply is proved dead or earthed"]
    assert move.effects.sets == {"beam_supply": "earthed"}


def test_a_lifted_stick_ends_the_proof() -> None:
    move = compiled("lift").moves[0]
    assert move.effects.sets == {"beam_supply": "locked"}
    assert [c.says for c in move.gate] == ["everyone is out, counted by name"]


def test_hands_need_the_place_safe_and_clear_needs_nothing() -> None:
    into, out = compiled("hands").moves[0], compiled("clear").moves[0]
    assert [c.tree for c in into.gate] == [{"name": "safe:hv-compartment"}]
    assert out.gate == ()
    assert (into.effects.hands, out.effects.hands) == ({"hv-compartment": "in"}, {"hv-compartment": "out"})


def test_switching_on_needs_everyone_out_and_the_beam_every_earth_lifted() -> None:
    act = compiled("act").moves[0]
    assert [c.says for c in act.gate] == [
        "everyone is out, counted by name",
        "the heater is unlocked, not earthed, and its state is known",
    ]
    beam = next(m for m in compiled("raise").moves if m.origin == "beam_on")
    assert "every earthing stick is lifted and counted" in [c.says for c in beam.gate]


def test_a_failed_proof_offers_nothing_but_to_make_safe() -> None:
    fails = [m for m in compiled("prove").moves if m.on == "fail"]
    assert [m.manner for m in fails] == ["stop"]


def test_a_wait_is_a_gate_on_the_clock_that_it_names() -> None:
    (move,) = [m for m in compiled("dwell").moves if m.origin == "warm"]
    clock = next(c for c in move.gate if c.clock)
    assert clock.clock == "age:heater"
    assert clock.tree == {"call": "ge", "of": [{"name": "age:heater"}, {"name": "warm_up"}]}


def test_a_branch_is_two_gated_moves_side_by_side_or_decided_by_the_option() -> None:
    sheet = compiled("choose")
    ways = {m.choice: (m.to, m.gate) for m in sheet.moves if m.origin == "history"}
    assert ways == {"cold": ("@end", ()), "stored": ("remark_how_long_it_was_stored", ())}


def test_a_deviation_shows_no_fact() -> None:
    ways = {m.manner: m for m in compiled("read").moves if m.origin == "ion"}
    assert ways["deviation"].effects.shows == ()
    assert ways["plain"].effects.shows == ("vacuum good",)
    assert set(ways) == {"plain", "again", "deviation", "stop"}


@dataclass(frozen=True, kw_only=True)
class Ring(Acting):
    title: str = key(words.text, "whom to ring", required=True, name="ring")


def _lower(written: Ring, id_: str, scope: Scope) -> Piece:
    return base.simple("ring", f"Ring {written.title}", Confirm(button="Rung"), written, id_, scope)


def test_a_kind_that_only_a_test_knows_compiles_without_another_file_being_touched() -> None:
    text = (HERE / "act.yaml").read_text().replace("- act: Switch the heater on", "- ring: Control room")
    text = text.replace("    button: Heater is on\n    held: yes\n", "")
    kinds = {**KINDS, "ring": Kind("ring", Ring, _lower, "a telephone call")}
    sheet, problems = compile_bytes(text.encode(), "ring.yaml", Library(), kinds)
    assert problems == [] and sheet is not None
    assert (sheet.steps[0].title, sheet.steps[0].kind) == ("Ring Control room", "ring")
    assert sheet.moves[0].effects.sets == {"heater": "on"}
    assert dataclasses.is_dataclass(Ring)
