"""What every compiled sheet must be: a graph without loose ends, whose parallel moves exclude each other."""

from __future__ import annotations

import random
from collections import defaultdict
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from walker import shipped

from fieldkit.files import folder
from fieldkit.formula import evaluate as evaluation
from fieldkit.formula import library
from fieldkit.procedure.compile import compile_file
from fieldkit.sheet.model import Sheet
from fieldkit.sheet.moves import END, SAFE, Move
from fieldkit.sheet.parts import SOURCE_STATES

HERE = Path(__file__).resolve().parents[1]
NAMES = ["warm-up", "hv-bring-up", *(f"steps/{p.stem}" for p in sorted((HERE / "steps").glob("*.yaml")))]
NAMES += [f"lint/ok/{p.stem}" for p in sorted((HERE / "lint" / "ok").glob("*.yaml"))]


@pytest.fixture(scope="module", params=NAMES)
def sheet(request: pytest.FixtureRequest) -> Sheet:
    if "/" not in request.param:
        return shipped(request.param)
    found, problems = compile_file(HERE / f"{request.param}.yaml", library.load(folder("procedures") / "formulas"))
    assert found is not None, problems
    return found


def leaving(sheet: Sheet) -> dict[str, list[Move]]:
    ways = defaultdict(list)
    for move in sheet.moves:
        ways[move.origin].append(move)
    return ways


def test_every_move_joins_steps_that_exist_and_has_an_id_of_its_own(sheet: Sheet) -> None:
    ids = [step.id for step in sheet.steps]
    assert len(set(ids)) == len(ids)
    assert len({move.id for move in sheet.moves}) == len(sheet.moves)
    assert {move.origin for move in sheet.moves} == set(ids)
    assert {move.to for move in sheet.moves} <= {*ids, END, SAFE}
    assert sheet.first in ids


def test_every_step_is_reached_and_from_every_step_the_end_can_be(sheet: Sheet) -> None:
    ways, back = leaving(sheet), defaultdict(set)
    for move in sheet.moves:
        back[move.to].add(move.origin)
    reached, ends = {sheet.first}, {END}
    for _ in sheet.steps:
        reached |= {move.to for one in reached for move in ways.get(one, [])}
        ends |= {origin for one in ends for origin in back[one]}
    assert {step.id for step in sheet.steps} <= reached
    assert {step.id for step in sheet.steps} <= ends


def test_every_outcome_of_a_step_leads_somewhere(sheet: Sheet) -> None:
    judged, ways = ("number", "prove", "result"), leaving(sheet)
    for step in sheet.steps:
        kind = step.control.control
        wanted = {"pass", "fail"} if kind in judged else {"option"} if kind == "choice" else {"done"}
        assert {move.on for move in ways[step.id]} == wanted, step.id
        if kind == "choice":
            assert {move.choice for move in ways[step.id]} == {option.value for option in step.control.options}


def test_a_fail_can_always_stop_and_nothing_gates_it(sheet: Sheet) -> None:
    for step in sheet.steps:
        if step.control.control in ("number", "prove", "result"):
            stops = [m for m in sheet.moves if m.origin == step.id and m.on == "fail" and m.manner == "stop"]
            assert any(m.to == SAFE and m.gate == () for m in stops), step.id


def test_every_counter_is_bounded_by_a_gate_on_each_move_that_raises_it(sheet: Sheet) -> None:
    for move in sheet.moves:
        for count in move.effects.counts:
            assert count.counter in sheet.counters
            if count.by is not None and count.by > 0:
                asked = {name for c in move.gate for name in mentioned(c.tree)}
                # the level of a ladder is bounded by the number of its levels
                assert f"count:{count.counter}" in asked, move.id


def test_where_people_are_protected_no_deviation_is_offered(sheet: Sheet) -> None:
    protects = {step.id for step in sheet.steps if getattr(step.control, "protects", False)}
    protects |= {step.id for step in sheet.steps if step.control.control == "prove"}
    assert not [m.id for m in sheet.moves if m.origin in protects and m.manner in ("deviation",)]


def test_every_gate_and_limit_is_said_in_words(sheet: Sheet) -> None:
    for move in sheet.moves:
        for condition in move.gate:
            assert condition.says.strip() and not condition.says.endswith(".")
            assert (condition.clock is None) == (condition.least is None)


def mentioned(part: Any) -> Iterator[str]:
    if isinstance(part, dict):
        if set(part) == {"name"}:
            yield part["name"]
        for value in part.values():
            yield from mentioned(value)
    elif isinstance(part, list):
        for value in part:
            yield from mentioned(value)


def valuation(names: set[str], sheet: Sheet, rng: random.Random) -> dict[str, Any]:
    """Random values of the kinds that a run gives to names."""
    options = {s.id: [o.value for o in s.control.options] for s in sheet.steps if s.control.control == "choice"}
    out: dict[str, Any] = {}
    for name in sorted(names):
        space, _, rest = name.partition(":")
        if space == "state":
            out[name] = rng.choice(SOURCE_STATES)
        elif space == "choice":
            out[name] = rng.choice(options[rest])
        elif space in ("fact", "lock", "safe"):
            out[name] = rng.random() < 0.5
        elif space == "count":
            out[name] = float(rng.randint(0, 4))
        else:
            out[name] = rng.choice([0.0, 1e-6, 2e-6, 3e-6, 5e-6, 1e-5, 2e-5, 3e-5, 60.0, 900.0])
    return out


def test_of_the_plain_moves_that_an_answer_can_take_by_itself_at_most_one_is_open(sheet: Sheet) -> None:
    rng = random.Random(7)
    groups = defaultdict(list)
    for move in sheet.moves:
        if move.manner == "plain":
            groups[(move.origin, move.on, move.choice)].append(move)
    for key, moves in groups.items():
        if len(moves) < 2 or any(m.label.startswith(("Repaired", "Go on at", "Go on without")) for m in moves):
            continue
        names = {name for m in moves for c in m.gate for name in mentioned(c.tree)}
        for _ in range(60):
            values = valuation(names, sheet, rng)
            series = {g.name: [18000.0, 20000.0, 22000.0] for g in sheet.givens if g.kind == "levels"}
            opened = [m.id for m in moves if all(holds(c.tree, values, series, sheet) for c in m.gate)]
            assert len(opened) <= 1, (key, opened, values)


def holds(tree: dict[str, Any], values: dict[str, Any], series: dict[str, list[float]], sheet: Sheet) -> bool:
    formulas = {name: f.model_dump(mode="json") for name, f in sheet.formulas.items()}
    return evaluation.evaluate(tree, values, series, formulas) is True
