"""The fold: what a run is, from its sheet and its events.

    fold(sheet, events)     the state; the same JSON in both languages
    begin(sheet)            a run without events; apply(run, event) gives the run one event later, and agrees with fold
    new(sheet, run, chain, sha256)   the state before the first event, for decide and next_event

Events are those of fieldkit.run.events (parsed, or their `plain` form). Nothing here throws at an event that was
parsed: what does not agree is listed in `disagree` and the fold goes on. A correction folds the run again with the
corrected text. Arms of events that answer a step: fieldkit.run.answers. Twin: static/core/state.js.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, field, replace
from typing import Any

from fieldkit.run import answers, clock, events, moves, rows
from fieldkit.run.moves import State, disagree
from fieldkit.run.names import LIVE, Context, context
from fieldkit.sheet.model import Sheet
from fieldkit.sheet.moves import END

Plain = dict[str, Any]


@dataclass(frozen=True)
class Run:
    """A state with what is needed to go on from it."""

    ctx: Context
    state: State
    events: tuple[Plain, ...] = ()
    #: corrections so far: seq of the corrected event -> corrections in order
    corrections: dict[int, list[Plain]] = field(default_factory=dict)
    #: what corrections stopped: seq of the correction -> why
    stops: dict[int, str] = field(default_factory=dict)


def new(sheet: Sheet | Plain | Context, run: str = "", chain: str = "", sha256: str = "") -> State:
    """The state before the first event."""
    ctx = context(sheet)
    return {
        "phase": "new",
        "node": ctx.sheet["first"],
        "run": run,
        "chain": chain,
        "seq": -1,
        "head": sha256,
        "sheet": sha256,
        "started": None,
        "recorder": "",
        "recorders": [],
        "clock": None,
        "sources": {},
        "values": {},
        "series": {},
        "choices": {},
        "facts": [],
        "counters": {},
        "hands": {},
        "locks": [],
        "earths": [],
        "done": {},
        "pending": None,
        "stop": None,
        "safe": {},
        "safe_begun": None,
        "safe_ended": None,
        "paused": None,
        "unsigned": None,
        "disagree": [],
        "log": [],
        "ended": None,
        "reopened": None,
        "signatures": [],
    }


def fold(sheet: Sheet | Plain | Context, happened: Iterable[events.Event | Plain]) -> State:
    """The state after all of `happened`, in order."""
    run = begin(sheet)
    for event in happened:
        run = apply(run, event)
    return run.state


def begin(sheet: Sheet | Plain | Context) -> Run:
    """A run without events."""
    ctx = context(sheet)
    return Run(ctx, new(ctx))


def apply(run: Run, event: events.Event | Plain) -> Run:
    """The run one event later. `run` itself stays as it is."""
    one = events.plain(event) if isinstance(event, events.Event) else event
    state, corrections, stops = run.state, run.corrections, run.stops
    if one["kind"] == "corrected":
        corrections = {**corrections, one["body"]["seq"]: [*corrections.get(one["body"]["seq"], []), one]}
        state = _again(run, corrections)
        why = _stopped_by(run.state, state)
        if why:
            stops = {**stops, one["seq"]: why}
    return replace(
        run,
        state=_step(run.ctx, state, one, corrections, stops),
        events=(*run.events, one),
        corrections=corrections,
        stops=stops,
    )


def one(sheet: Sheet | Plain | Context, state: State, event: Plain) -> State:
    """The state one event later, where that event corrects nothing and is corrected by nothing: for a trial."""
    return _step(context(sheet), state, event, {}, {})


def _again(run: Run, corrections: dict[int, list[Plain]]) -> State:
    """The run so far with corrected texts; a wrong value that was listed before stays listed."""
    state = new(run.ctx)
    for event in run.events:
        state = _step(run.ctx, state, event, corrections, run.stops)
    listed = {(d["seq"], d["code"]) for d in state["disagree"]}
    lost = [d for d in run.state["disagree"] if d["code"] == "value" and (d["seq"], d["code"]) not in listed]
    return {**state, "disagree": sorted([*state["disagree"], *lost], key=lambda d: d["seq"])}


def _stopped_by(before: State, after: State) -> str:
    """Why a correction stops the run: what disagrees only since it was made."""
    known = {(d["seq"], d["code"]) for d in before["disagree"]}
    for one in after["disagree"]:
        if (one["seq"], one["code"]) not in known:
            return f"The correction changes what came after it. {one['says']}"
    return ""


def _copy(state: State) -> State:
    """A working copy: every container that an arm changes is new, what it holds is replaced and never changed."""
    made = {key: dict(v) if isinstance(v, dict) else list(v) if isinstance(v, list) else v for key, v in state.items()}
    return {**made, "started": state["started"]}


#: allowed once the run has ended, been voided or before it began
_AFTER_END = (
    "signed",
    "reopened",
    "corrected",
    "remarked",
    "pictured",
    "storage-found",
    "voided",
    "clock-changed",
    "resumed",
)


def _step(
    ctx: Context, before: State, event: Plain, corrections: dict[int, list[Plain]], stops: dict[int, str]
) -> State:
    state, seq, kind = _copy(before), event["seq"], event["kind"]
    _chain(state, event)
    step = clock.passed(state["clock"], event["at"]) if state["clock"] else None
    state["clock"] = clock.advance(state["clock"], event["at"]) if state["clock"] else clock.begin(event["at"])
    if step and step["ahead"] and kind not in ("resumed", "clock-changed"):
        state["clock"] = {**state["clock"], "changed": True}
    _signature_due(state, event)
    if kind == "run-started":
        _run_started(ctx, state, event)
        return state
    if state["started"] is None:
        disagree(state, seq, "not-started", f"Event {seq} ({kind}) stands before the run was started.")
    elif state["phase"] in ("ended", "voided") and kind not in _AFTER_END:
        disagree(state, seq, "after-end", f"Event {seq} ({kind}) stands after the end of the run.")
    if kind in answers.CONTROLS and answers.is_answer(ctx, state, event):
        answers.answer(ctx, state, event, corrections.get(seq, []))
    else:
        rows.add(ctx, state, event, **_said(ctx, state, event))
        arm = _ARMS.get(kind)
        if arm:
            arm(
                ctx, state, event, {"passed": step, "stop": stops.get(seq, ""), "corrections": corrections.get(seq, [])}
            )
    return state


def _chain(state: State, event: Plain) -> None:
    seq = event["seq"]
    if seq != state["seq"] + 1:
        disagree(state, seq, "sequence", f"Event {seq} follows event {state['seq']}.")
    if state["started"] is not None:
        if event["prev"] != state["head"]:
            disagree(state, seq, "chain", f"Event {seq} does not carry the hash of the event before it.")
        if event["run"] != state["run"] or event["chain"] != state["chain"]:
            disagree(state, seq, "other-run", f"Event {seq} belongs to another run or chain.")
    state["seq"], state["head"] = seq, event["sha256"]


def _signature_due(state: State, event: Plain) -> None:
    """A release, a deviation and a lock taken off are followed by that person's signature at once."""
    due = state["unsigned"]
    state["unsigned"] = None
    if due and not (event["kind"] == "signed" and event["body"]["person"] == due["person"]):
        says = f"Event {due['seq']} is not followed by the signature of {due['person']}."
        disagree(state, due["seq"], "not-signed", says)


def _run_started(ctx: Context, state: State, event: Plain) -> None:
    body, seq = event["body"], event["seq"]
    if state["started"] is not None:
        disagree(state, seq, "started-twice", "The run was started before.")
        return
    sheet = ctx.sheet
    if body["procedure"] != sheet["procedure"] or body["edition"] != sheet["edition"] or event["prev"] != body["sheet"]:
        disagree(state, seq, "other-sheet", "The run was started on another sheet than this one.")
    state.update(phase="declare", run=event["run"], chain=event["chain"], sheet=body["sheet"], started=body)
    state.update(recorder=event["by"], recorders=[event["by"]], locks=list(body["locks"]), earths=list(body["earths"]))
    for name in ctx.sources:
        state["sources"][name] = {"state": "unknown", **moves.mark(state), "seq": seq, "flag": ""}
    rows.add(ctx, state, event, who=event["by"], names=list(body["present"]))


def _said(ctx: Context, state: State, event: Plain) -> Plain:
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
    for name, to in body["states"].items():
        if name not in state["sources"]:
            disagree(state, seq, "unknown-source", f"The sheet knows no source '{name}'.")
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
    moves.take(ctx, state, body["move"], answers.names_now(ctx, state), event, body["reason"])


def _corrected(ctx: Context, state: State, event: Plain, more: Plain) -> None:
    body, seq = event["body"], event["seq"]
    if not any(row["seq"] == body["seq"] and row["kind"] in answers.CORRECTABLE for row in state["log"]):
        disagree(state, seq, "nothing-corrected", f"Event {seq} corrects event {body['seq']}, which has no such text.")
    if more["stop"]:
        moves.stop(state, seq, more["stop"])
    elif body["move"] is not None:
        moves.take(ctx, state, body["move"], answers.names_now(ctx, state), event, body["reason"])


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
    if body["outcome"] == "stopped":
        moves.stop(state, seq, body["reason"])
    state.update(phase="ended", ended={"outcome": body["outcome"], "seq": seq})


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

_ARMS: dict[str, Arm] = {
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
