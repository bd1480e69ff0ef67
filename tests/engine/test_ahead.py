"""What a ladder shows ahead: the way out of it and the change that comes after it.

The walk of test_walk.py holds the tablet's engine to the same.
"""

from __future__ import annotations

from typing import Any

from fieldkit.run import ahead, names


def step(id_: str) -> dict[str, Any]:
    return {"id": id_, "number": "1", "control": {"control": "confirm"}}


def move(origin: str, to: str, label: str = "", sets: dict[str, str] | None = None) -> dict[str, Any]:
    return {
        "id": f"{origin}:{to}", "origin": origin, "to": to, "on": "done", "manner": "plain", "label": label, "gate": [],
        "choice": None, "effects": {"sets": sets or {}},
    }  # fmt: skip


class Graph:
    """Only what `ahead` asks of a context: two rungs that come round, a fall-back, a way out, and beam off after it."""

    def __init__(self) -> None:
        moves = [
            move("rung", "look"),
            move("look", "rung", "Up one level"),
            move("look", "rest", "Back one level"),
            move("look", "top"),
            move("rest", "rung"),
            move("top", "@end", sets={"beam_supply": "off"}),
        ]
        self.steps = {s: step(s) for s in ("rung", "look", "rest", "top")}
        self.leaving = {s: [m for m in moves if m["origin"] == s] for s in self.steps}
        self.sheet = {"givens": []}


def seen_from(node: str) -> tuple[list[str], Any]:
    ctx: Any = Graph()
    state = {"node": node, "pending": None, "choices": {}, "sources": {"beam_supply": {"state": "on"}}}
    where: names.Scope = {}  # type: ignore[assignment]
    path = ahead.ahead(ctx, state, where)
    return [s for s, _ in path], ahead.next_change(state, ctx, path)


def test_the_way_ahead_leaves_a_ladder_and_reaches_the_change_after_it() -> None:
    for node in ("rung", "look"):
        path, change = seen_from(node)
        assert path[-1] == "top", path
        assert change == {"sources": {"beam_supply": "off"}, "step": "top", "number": "1"}


def test_a_round_without_a_way_out_ends() -> None:
    ctx: Any = Graph()
    ctx.leaving = {
        "rung": [move("rung", "look")],
        "look": [move("look", "rung", "Up one level")],
        "rest": [],
        "top": [],
    }
    state = {"node": "rung", "pending": None, "choices": {}, "sources": {}}
    assert [s for s, _ in ahead.ahead(ctx, state, {})] == ["rung", "look"]  # type: ignore[arg-type]


def test_nothing_is_foreseen_past_a_fail_that_leaves_only_stopping() -> None:
    ctx: Any = Graph()
    pending = {"step": "look", "outcome": "fail"}
    state = {"node": "look", "pending": pending, "choices": {}, "sources": {"beam_supply": {"state": "on"}}}
    path = ahead.ahead(ctx, state, {})  # type: ignore[arg-type]
    assert path == [("look", None)]
    assert ahead.next_change(state, ctx, path) is None
