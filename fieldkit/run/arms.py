"""What events that answer no step do to the state: one arm an event. Twin: static/core/arms.js.

Each arm changes the working copy that fieldkit.run.state made. Not here: answers to steps (fieldkit.run.answers).
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from fieldkit.errors import Refusal
from fieldkit.run import answers, clock, moves, names, rows, rules, start
from fieldkit.run.moves import State, disagree
from fieldkit.run.names import LIVE, Context
from fieldkit.sheet.moves import END

Plain = dict[str, Any]


def allowed(state: State, seq: int, rule: Callable[[], None]) -> None:
    """List what a rule refuses: the tablet kept it, or something else made the event."""
    try:
        rule()
    except Refusal as refusal:
        disagree(state, seq, refusal.code, refusal.sentence)


def said_by(ctx: Context, state: State, event: Plain) -> Plain:
    """What the row of an event that answers no step says."""
    body, kind = event["body"], event["kind"]
    if kind in ("remarked", "pictured", "went-on"):
        step = ctx.steps.get(body["step"])
        note = body["note"] if kind == "pictured" else ""
        text = body["text"] if kind == "remarked" else ""
        who = body.get("authority") or ""
        move = body.get("move")
        reason = body.get("reason", "")
        return {"step": step, "note": note, "text": text, "who": who, "move": move, "reason": reason}
    said = {
        "corrected": {"text": body.get("text"), "reason": body.get("reason"), "note": body.get("field")},
        "safe-begun": {"reason": body.get("why")},
        "safe-step-done": {"text": body.get("item"), "note": "" if body.get("done", True) else "it was so already"},
        "safe-ended": {"text": body.get("remark")},
        "trip-recorded": {"text": body.get("indicator"), "note": body.get("level"), "reason": body.get("done")},
        "paused": {"reason": body.get("reason")},
        "resumed": {"note": body.get("cause"), "text": body.get("wall_s")},
        "clock-changed": {"text": body.get("wall_s"), "note": body.get("mono_s")},
        "person-changed": {"who": body.get("to")},
        "storage-found": {"text": str(body.get("lost")), "note": body.get("note")},
        "ended": {"outcome": body.get("outcome"), "reason": body.get("reason")},
        "voided": {"reason": body.get("reason")},
        "reopened": {"reason": body.get("reason"), "who": body.get("returned_by")},
        "signed": {"who": body.get("person"), "note": body.get("meaning")},
        "states-confirmed": {"names": list(body.get("unbroken", ()))},
    }
    return said.get(kind, {})


def _states_declared(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    seq, body = event["seq"], event["body"]
    if state["phase"] != "declare":
        disagree(state, seq, "not-declaring", "The energy states were declared before.")
        return
    allowed(state, seq, lambda: start.agrees(ctx, state, names.scope(ctx, state), body))
    for name, to in body["states"].items():
        if name not in state["sources"]:
            continue
        back = max(0, clock.millis(body["ages"].get(name, "0")) or 0)
        made = {"state": to, **moves.mark(state), "seq": seq, "flag": "declared"}
        state["sources"][name] = _earlier(made, back, back)
    state["locks"].extend(body["locks"])
    rows.change(state, seq, names=[f"{lock['lock']} on {lock['point']}" for lock in body["locks"]])
    state["phase"] = "going"


def _earlier(source: Plain, least: int, greatest: int) -> Plain:
    """The mark moved back in time, by milliseconds."""
    return {
        **source,
        "least": clock.seconds((clock.millis(source["least"]) or 0) - least),
        "greatest": clock.seconds((clock.millis(source["greatest"]) or 0) - greatest),
    }


def _went_on(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    body, seq = event["body"], event["seq"]
    if state["phase"] != "going":
        disagree(state, seq, "not-going", f"Event {seq} goes on while nothing may.")
    pending = state["pending"]
    if (pending["step"] if pending else state["node"]) != body["step"]:
        disagree(state, seq, "not-here", f"Event {seq} goes on from '{body['step']}', which is not the open step.")
    move = ctx.moves.get(body["move"])
    if move and move["manner"] == "deviation":
        if not body["authority"] or body["authority"] in state["recorders"]:
            disagree(state, seq, "authority", "A deviation is allowed by a supervisor who records nothing in this run.")
        elif body["authority"]:
            state["unsigned"] = {"seq": seq, "person": body["authority"], "meaning": "allowed"}
    rows.change(state, seq, manner=move["manner"] if move else None, note=body["under"])
    moves.take(ctx, state, body["move"], names.scope(ctx, state), event, body["reason"])


def _corrected(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    body, seq = event["body"], event["seq"]
    if not any(row["seq"] == body["seq"] and row["kind"] in answers.CORRECTABLE for row in state["log"]):
        disagree(state, seq, "nothing-corrected", f"Event {seq} corrects event {body['seq']}, which has no such text.")
    if more["stop"]:
        moves.stop(state, seq, more["stop"])
    elif body["move"] is not None:
        moves.take(ctx, state, body["move"], names.scope(ctx, state), event, body["reason"])


def _safe_begun(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    state["safe_begun"] = event["seq"] if state["safe_begun"] is None else state["safe_begun"]


def _safe_step_done(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    seq, body = event["seq"], event["body"]
    item = next((one for one in ctx.sheet["make_safe"] if one["id"] == body["item"]), None)
    if item is None:
        disagree(state, seq, "unknown-item", f"The make-safe list has no line '{body['item']}'.")
    else:
        rows.change(state, seq, title=item["text"])
        for name, to in item["sets"].items():
            if state["sources"].get(name, {}).get("state") in LIVE:
                moves.set_source(state, name, to, seq)
    state["safe"][body["item"]] = seq
    moves.stop(state, seq, "Made safe.")


def _safe_ended(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    state["safe_ended"] = event["seq"]


def _trip_recorded(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    if event["body"]["kind"] == "trip":
        _pause(state, event["seq"], "trip")


def _paused(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    if state["phase"] != "going":
        disagree(state, event["seq"], "not-going", "A pause begins while nothing goes on.")
    _pause(state, event["seq"], "pause")


def _pause(state: State, seq: int, cause: str) -> None:
    """Facts are cleared, proofs fall, and nothing opens until the states are confirmed."""
    if state["phase"] != "going":
        return
    state.update(phase="confirm", paused={"cause": cause, "seq": seq}, facts=[])
    state["clock"] = {**state["clock"], "owed": "0.000"}
    moves.drop_proofs(state, seq)


def _resumed(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    passed = more["passed"]
    if passed is None:
        return
    if passed["out"] is None or passed["greatest"] > clock.PAUSE_MS:
        _pause(state, event["seq"], event["body"]["cause"])
    if state["phase"] == "confirm":
        state["clock"] = clock.owe(state["clock"], passed["out"])


def _clock_changed(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    state["clock"] = clock.owe({**state["clock"], "changed": True}, None)


def _states_confirmed(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    seq, body = event["seq"], event["body"]
    if state["phase"] != "confirm":
        disagree(state, seq, "not-paused", "The energy states were confirmed without a pause.")
        return
    owed = clock.millis(state["clock"]["owed"]) if state["clock"]["owed"] is not None else None
    unbroken, changed = set(body["unbroken"]), []
    for name, to in body["states"].items():
        source = state["sources"].get(name)
        if source is None:
            disagree(state, seq, "unknown-source", f"The sheet knows no source '{name}'.")
        elif source["state"] != to:
            changed.append(f"{ctx.sources[name]['title']} was {source['state']} and is {to}")
            moves.set_source(state, name, to, seq, "found")
    for name, source in list(state["sources"].items()):
        if source["seq"] != seq:
            state["sources"][name] = _through(state, source, owed, name in unbroken)
    for step, done in list(state["done"].items()):
        depends = set(done["sets"]) | ctx.depends.get(step, set())
        state["done"][step] = _through(state, done, owed, depends <= unbroken)
    state.update(phase="going", paused=None)
    state["clock"] = {**state["clock"], "owed": "0.000"}
    if changed:
        moves.stop(state, seq, f"Found otherwise after the pause: {'; '.join(changed)}.")


def _through(state: State, kept: Plain, owed: int | None, unbroken: bool) -> Plain:
    """A mark through a gap: what held through it is credited the gap; what did not begins anew, for least times."""
    flagged = "flag" in kept
    if not unbroken:
        return {**kept, "least": state["clock"]["least"], **({"flag": "restarted"} if flagged else {})}
    if owed:
        return {**_earlier(kept, owed, 0), **({"flag": "gap"} if flagged else {})}
    return kept


def _person_changed(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    to = event["body"]["to"]
    state["recorder"] = to
    if to not in state["recorders"]:
        state["recorders"] = [*state["recorders"], to]
    moves.drop_proofs(state, event["seq"])


def _ended(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    body, seq = event["body"], event["seq"]
    if body["outcome"] == "done" and (state["node"] != END or state["phase"] != "going"):
        disagree(state, seq, "not-at-end", "The run says that it is done, and is not at its end.")
    if body["outcome"] == "done":
        allowed(state, seq, lambda: rules.end_states(ctx, state))
    if body["outcome"] == "stopped":
        moves.stop(state, seq, body["reason"])
    states = {name: source["state"] for name, source in state["sources"].items()}
    if body["states"] != states or _on(body) != _on(state):
        disagree(state, seq, "end-differs", "The end names other states, locks or earths than the run has.")
    state.update(phase="ended", ended={"outcome": body["outcome"], "seq": seq})


def _on(of: Plain) -> list[list[str]]:
    """Where locks and earths are; the number of a lock may have been corrected since."""
    return [[lock["point"] for lock in of["locks"]], [earth["stick"] for earth in of["earths"]]]


def _voided(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    state["phase"] = "voided"


def _reopened(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    if state["phase"] != "ended":
        disagree(state, event["seq"], "not-ended", "The run is taken up again before it ended.")
    body = event["body"]
    state["reopened"] = {"seq": event["seq"], "reason": body["reason"], "returned_by": body["returned_by"]}


def _signed(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    body, seq = event["body"], event["seq"]
    one = {"seq": seq, "person": body["person"], "meaning": body["meaning"], "covers": seq - 1}
    state["signatures"].append(one)
    if body["meaning"] == "performed":
        state["reopened"] = None


Arm = Callable[[Context, State, Plain, Plain], None]


ARMS: dict[str, Arm] = {
    "states-declared": _states_declared,
    "went-on": _went_on,
    "corrected": _corrected,
    "safe-begun": _safe_begun,
    "safe-step-done": _safe_step_done,
    "safe-ended": _safe_ended,
    "trip-recorded": _trip_recorded,
    "paused": _paused,
    "resumed": _resumed,
    "states-confirmed": _states_confirmed,
    "clock-changed": _clock_changed,
    "person-changed": _person_changed,
    "ended": _ended,
    "voided": _voided,
    "reopened": _reopened,
    "signed": _signed,
}
