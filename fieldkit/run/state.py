"""The fold: what a run is, from its sheet and its events.

    fold(sheet, events)     the state; the same JSON in both languages
    begin(sheet)            a run without events; apply(run, event) gives the run one event later, and agrees with fold
    new(sheet, run, chain, sha256)   the state before the first event, for decide and next_event

Events are those of fieldkit.run.events (parsed, or their `plain` form). Nothing here throws at an event that was
parsed: what does not agree is listed in `disagree` and the fold goes on. A correction folds the run again with the
corrected text. Arms of events: fieldkit.run.answers (those that
answer a step) and fieldkit.run.arms (all others). Twin: static/core/state.js.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field, replace
from typing import Any

from fieldkit.run import answers, arms, clock, events, moves, recheck, rows, start
from fieldkit.run.moves import State, disagree
from fieldkit.run.names import Context, context
from fieldkit.sheet.model import Sheet

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
        "spread": {},
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
    if state["started"] is not None:
        recheck.event(ctx, state, event, step)
    if kind in answers.CONTROLS and answers.is_answer(ctx, state, event):
        answers.answer(ctx, state, event, corrections.get(seq, []))
    else:
        rows.add(ctx, state, event, **arms.said_by(ctx, state, event))
        arm = arms.ARMS.get(kind)
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
    wanted = {"person": due["person"], "meaning": due["meaning"]} if due else {}
    if due and not (event["kind"] == "signed" and wanted.items() <= event["body"].items()):
        says = f"Event {due['seq']} is not followed by the signature of {due['person']}."
        disagree(state, due["seq"], "not-signed", says)


def _run_started(ctx: Context, state: State, event: Plain) -> None:
    body, seq = event["body"], event["seq"]
    if state["started"] is not None:
        disagree(state, seq, "started-twice", "The run was started before.")
        return
    if event["prev"] != body["sheet"]:
        disagree(state, seq, "other-sheet", "The run's first event follows another sheet than it names.")
    state.update(phase="declare", run=event["run"], chain=event["chain"], sheet=body["sheet"], started=body)
    state.update(recorder=event["by"], recorders=[event["by"]], locks=list(body["locks"]), earths=list(body["earths"]))
    for name in ctx.sources:
        state["sources"][name] = {"state": "unknown", **moves.mark(state), "seq": seq, "flag": ""}
    rows.add(ctx, state, event, who=event["by"], names=list(body["present"]))
    arms.allowed(state, seq, lambda: start.begins(ctx, body, event["by"], event["at"]["wall"]))
