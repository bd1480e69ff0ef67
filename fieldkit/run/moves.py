"""Taking a move: what it does to the state of a run, and what is listed where it was not open.

The functions here change the working copy that fieldkit.run.state makes of a state; nobody else calls them.
A fold never refuses: a move that makes no sense is listed in `disagree`, and the run goes on.
Twin: static/core/moves.js.
"""

from __future__ import annotations

from typing import Any

from fieldkit.run import names
from fieldkit.run.names import Context, Scope
from fieldkit.sheet.moves import END, SAFE

State = dict[str, Any]


def disagree(state: State, seq: int, code: str, says: str) -> None:
    """List what does not agree with the sheet or the chain."""
    state["disagree"].append({"seq": seq, "code": code, "says": says})


def mark(state: State) -> dict[str, str]:
    """The totals of the clock now, as a source or a step keeps them."""
    return {"least": state["clock"]["least"], "greatest": state["clock"]["greatest"]}


def set_source(state: State, name: str, to: str, seq: int, flag: str = "") -> None:
    """The source is in `to` from now on; nothing happens where it is so already."""
    kept = state["sources"].get(name)
    if kept is not None and kept["state"] == to:
        return
    state["sources"][name] = {"state": to, **mark(state), "seq": seq, "flag": flag}


def drop_proofs(state: State, seq: int, only: str | None = None) -> None:
    """Proved dead is locked again: after a pause, a change of person, a lifted earth."""
    for name, source in list(state["sources"].items()):
        if source["state"] == "proved" and only in (None, name):
            set_source(state, name, "locked", seq)


def stop(state: State, seq: int, why: str) -> None:
    """The run is stopped: make safe and end remain."""
    if state["stop"] is None:
        state["stop"] = {"seq": seq, "why": why}
    if state["phase"] in ("going", "confirm", "declare"):
        state["phase"] = "stopped"
        state["node"] = SAFE
        state["pending"] = None


def leads(ctx: Context, state: State, origin: str, outcome: str) -> list[dict[str, Any]]:
    """The moves that leave a step with an outcome; after a choice only those of the chosen value."""
    chosen = state["choices"].get(origin)
    return [
        move
        for move in ctx.leaving.get(origin, [])
        if move["on"] == outcome and (move["on"] != "option" or move["choice"] in (None, chosen))
    ]


def is_around(move: dict[str, Any]) -> bool:
    """A way round a step that cannot be done, taken without an answer: labelled, gated by a need that is not met."""
    if move["manner"] != "plain" or move["on"] not in ("done", "pass") or not move["label"] or not move["gate"]:
        return False
    own = names.own(move["origin"])
    return move["gate"][0]["tree"].get("call") == "not" and own.isdisjoint(names.mentioned(move["gate"]))


def take(ctx: Context, state: State, move_id: str, where: Scope, event: dict[str, Any], reason: str = "") -> None:
    """Take a recorded move, listing what does not agree. `where` holds the names that its gate is read with."""
    seq, move = event["seq"], ctx.moves.get(move_id)
    if move is None:
        disagree(state, seq, "unknown-move", f"The sheet has no move '{move_id}'.")
        return
    pending = state["pending"]
    here = pending["step"] if pending else state["node"]
    if move["origin"] != here:
        disagree(state, seq, "wrong-move", f"Move '{move_id}' does not leave the step '{here}'.")
    _check_outcome(ctx, state, move, pending, seq)
    closed = names.reasons(ctx, where, move["gate"])
    if closed:
        disagree(state, seq, "not-open", f"Move '{move_id}' was not open. {closed[0]['says']}")
    _apply(ctx, state, move, event)
    _on_row(state, pending["seq"] if pending else seq, move, reason)
    state["pending"] = None
    if move["to"] == SAFE or move["manner"] == "stop":
        stop(state, seq, reason or "The procedure asks to make safe.")
    else:
        state["node"] = END if move["to"] == END else move["to"]


def _check_outcome(ctx: Context, state: State, move: dict[str, Any], pending: dict[str, Any] | None, seq: int) -> None:
    if pending is None or move["manner"] == "stop":
        return
    if move in leads(ctx, state, pending["step"], pending["outcome"]):
        return
    corrected = any(row["seq"] == pending["seq"] and any(o["seq"] > seq for o in row["old"]) for row in state["log"])
    if corrected and pending["outcome"] == "pass" and move["manner"] in ("again", "deviation"):
        return
    disagree(state, seq, "outcome", f"Move '{move['id']}' does not follow the outcome '{pending['outcome']}'.")


def _apply(ctx: Context, state: State, move: dict[str, Any], event: dict[str, Any]) -> None:
    """The effects of a move, and the mark of the step that it leaves."""
    seq, effects, step = event["seq"], move["effects"], move["origin"]
    for name, to in effects["sets"].items():
        set_source(state, name, to, seq)
    facts = set(state["facts"]) | set(effects["shows"])
    state["facts"] = sorted(facts - set(effects["clears"]))
    for count in effects["counts"]:
        state["counters"][count["counter"]] = counted(ctx, state, count)
    for place, way in effects["hands"].items():
        _hands(state, place, way, event["by"])
    if move["manner"] == "again":
        for columns in (state["series"], state["spread"]):
            columns[step] = columns.get(step, [])[:-1]
    before = state["done"].get(step)
    state["done"][step] = {
        "seq": seq,
        **mark(state),
        "wall": event["at"]["wall"],
        "count": (before["count"] if before else 0) + 1,
        "sets": sorted(effects["sets"]),
    }


def counted(ctx: Context, state: State, count: dict[str, Any]) -> int:
    """What a counter is after a move counted on it, inside its bounds."""
    name = count["counter"]
    low, high = ctx.sheet["counters"].get(name, [0, None])
    to = count["to"] if count["to"] is not None else names.count(ctx, state, name) + (count["by"] or 0)
    if high is not None:
        to = min(to, high)
    return int(max(to, low))


def _hands(state: State, place: str, way: str, by: str) -> None:
    """A move that puts hands in names whoever records, unless a count by name has done so already."""
    if way == "out":
        state["hands"].pop(place, None)
    elif not state["hands"].get(place):
        state["hands"][place] = [by]


def _on_row(state: State, seq: int, move: dict[str, Any], reason: str) -> None:
    """Write the move on the row of the answer that it follows."""
    for i in range(len(state["log"]) - 1, -1, -1):
        row = state["log"][i]
        if row["seq"] == seq:
            extra = {"reason": reason} if reason and not row["reason"] else {}
            state["log"][i] = {**row, "move": move["id"], "manner": move["manner"], **extra}
            return
        if row["seq"] < seq:
            return
