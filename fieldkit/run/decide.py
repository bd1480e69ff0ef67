"""What a command becomes: events, or a refusal in words. Pure; the caller stores what is given, and signs.

    decide(sheet, state, command, now)  ->  {"events": [{"kind", "body"}, ...]} | {"refused": {"code", "says"}}

A command is `{"do": kind of the event, ...}` with the event's body but for what is filled in here: step, unit,
instrument, range, point, stick, statement, value, move, states, locks, earths, times. The rules for people, locks and
energy states stand in fieldkit.run.rules, the start of a run in fieldkit.run.start. Twin: static/core/decide.js.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from fieldkit.errors import Refusal
from fieldkit.run import answers, clock, judge, moves, names, progress, readings, rules, start
from fieldkit.run import state as folding
from fieldkit.run.command import Given, checked
from fieldkit.run.moves import State
from fieldkit.run.names import Context, context
from fieldkit.sheet.model import Sheet
from fieldkit.sheet.moves import END

Plain = dict[str, Any]

_ALWAYS = ("remarked", "pictured", "storage-found", "clock-changed", "resumed", "voided")
_SAFE = ("safe-begun", "safe-step-done", "safe-ended", "trip-recorded", "ended")
#: what each phase lets through, and how it refuses the rest
PHASES: dict[str, tuple[tuple[str, ...], str, str]] = {
    "new": (("run-started",), "not-started", "The run has not been started."),
    "declare": ((*_ALWAYS, *_SAFE, "states-declared"), "declare-first", "Confirm the energy states first."),
    "going": (
        (*_ALWAYS, *_SAFE, *answers.CONTROLS, "went-on", "corrected", "paused", "person-changed"),
        "not-now",
        "This does not belong here while the work goes on.",
    ),
    "confirm": (
        (*_ALWAYS, *_SAFE, "states-confirmed", "corrected"),
        "confirm-first",
        "The work was interrupted. Confirm the energy states first.",
    ),
    "stopped": (
        (*_ALWAYS, *_SAFE, "corrected", "person-changed"),
        "run-stopped",
        "The run is stopped. Make safe and end it.",
    ),
    "ended": ((*_ALWAYS, "corrected", "reopened"), "run-ended", "The run has ended."),
    "voided": ((), "run-voided", "The run was voided."),
}


def decide(sheet: Sheet | Plain | Context, state: State, command: Plain, now: dict[str, Any]) -> Plain:
    """Events for a command, or its refusal."""
    ctx = context(sheet)
    try:
        return {"events": _decided(ctx, state, command, now)}
    except Refusal as refusal:
        return {"refused": {"code": refusal.code, "says": refusal.sentence}}


def _decided(ctx: Context, state: State, command: Plain, now: Plain) -> list[Plain]:
    kind = command.get("do")
    if kind not in _HANDLERS:
        raise Refusal("unknown-command", "There is no such command.")
    allowed, code, says = PHASES[state["phase"]]
    if kind not in allowed:
        raise Refusal(code, says)
    asked = {key: value for key, value in command.items() if key not in ("do", "by", "facts")}
    by = command.get("by") or state["recorder"]
    given = Given(ctx, state, kind, asked, now, by, command.get("facts") or {})
    body = checked(kind, _HANDLERS[kind](given))
    _holds(given, body)
    return [{"kind": kind, "body": body}]


def trial(given: Given, body: Plain) -> State:
    """The state after the event that the command would become."""
    state = given.state
    event = {
        "seq": state["seq"] + 1,
        "kind": given.kind,
        "by": given.by,
        "at": {"wall": given.now["wall"], "mono": given.now["mono"], "boot": given.now["boot"]},
        "run": state["run"],
        "chain": state["chain"],
        "prev": body["sheet"] if given.kind == "run-started" else state["head"],
        "sha256": "",
        "body": body,
    }
    return folding.one(given.ctx, state, event)


def _holds(given: Given, body: Plain) -> None:
    """Last check: the fold finds nothing to list. A correction is folded again by its caller."""
    if given.kind == "corrected":
        return
    known = len(given.state["disagree"])
    for found in trial(given, body)["disagree"][known:]:
        if found["code"] != "not-signed":
            raise Refusal(found["code"], found["says"])


# ---- answers ---------------------------------------------------------------------------------------------------------


def _answer(given: Given) -> Plain:
    """An answer to the open step, with its move where it takes one by itself."""
    ctx, state, asked = given.ctx, given.state, given.asked
    beside = _beside(given)
    if beside is not None:
        return beside
    step = ctx.steps.get(state["node"])
    if step is None:
        raise Refusal("no-step", "The last step is done. End the run and sign it.")
    if asked.get("step", step["id"]) != step["id"]:
        raise Refusal("not-here", f"The open step is {step['number']}, {step['title']}.")
    if state["pending"]:
        raise Refusal("answered", "The step is answered. Choose how to go on.")
    if step["control"]["control"] != answers.CONTROLS[given.kind]:
        raise Refusal("wrong-answer", f"Step {step['number']} is not answered so.")
    closed = progress.closed(ctx, state, names.scope(ctx, state, given.now))
    if closed:
        raise Refusal("not-open", progress.told(closed))
    body = rules.ANSWERS[given.kind](given, step)
    body = {**body, "step": step["id"], "move": None}
    return {**body, "move": _move(given, checked(given.kind, body))}


def _beside(given: Given) -> Plain | None:
    """A picture or a remark that answers no step; None where it answers the open one."""
    if given.kind not in ("pictured", "remarked"):
        return None
    state, step = given.state, given.ctx.steps.get(given.state["node"])
    here = state["phase"] == "going" and step is not None and not state["pending"]
    if here and step is not None and step["control"]["control"] == answers.CONTROLS[given.kind]:
        return None
    if state["phase"] == "ended" and not progress.unsigned_end(state):
        raise Refusal("run-signed", "The run is signed. It can be added to when it was returned and taken up again.")
    if given.kind == "remarked":
        given.need("text", "nothing-typed", "Write the remark.")
    return {**given.asked, "step": given.asked.get("step") or state["node"], "move": None}


def _move(given: Given, body: Plain) -> str | None:
    """The move that an answer takes by itself, or that the command picked among the open ones."""
    ctx, after = given.ctx, trial(given, body)
    pending = after["pending"]
    if pending is None or pending["outcome"] == "fail":
        return None
    with_answer = pending["outcome"] in answers.WITH_ANSWER
    where = names.scope(ctx, after) if with_answer else names.scope(ctx, given.state, given.now)
    leaving = [m for m in moves.leads(ctx, after, pending["step"], pending["outcome"]) if m["manner"] == "plain"]
    leaving = [m for m in leaving if not moves.is_around(m)]
    free = [m for m in leaving if not names.reasons(ctx, where, m["gate"])]
    picked = given.asked.get("move")
    if picked is not None:
        if not any(m["id"] == picked for m in free):
            raise Refusal("not-open", "That way on is not open.")
        return str(picked)
    return free[0]["id"] if len(free) == 1 else None


def _went_on(given: Given) -> Plain:
    ctx, state = given.ctx, given.state
    pending, move = state["pending"], ctx.moves.get(str(given.asked.get("move")))
    here = pending["step"] if pending else state["node"]
    leaving = moves.leads(ctx, state, here, pending["outcome"]) if pending else ctx.leaving.get(here, [])
    if move is None or move not in leaving:
        raise Refusal("wrong-move", "That is no way on from here.")
    if pending is None and not moves.is_around(move):
        raise Refusal("not-answered", "Answer the step first.")
    closed = names.reasons(ctx, names.scope(ctx, state, given.now), move["gate"])
    if closed:
        code = "no-more-tries" if move["manner"] == "again" else "not-open"
        raise Refusal(code, progress.told(closed))
    if move["manner"] == "again":
        given.need("reason", "reason-needed", "Say why it is taken again.")
    if move["manner"] == "deviation":
        rules.deviation(given)
    return {**given.asked, "step": here}


def _corrected(given: Given) -> Plain:
    state, asked = given.state, given.asked
    if state["phase"] == "ended" and not progress.unsigned_end(state):
        raise Refusal("run-signed", "The run is signed. It can be corrected when it was returned and taken up again.")
    row = next((r for r in state["log"] if r["seq"] == asked.get("seq")), None)
    if row is None or row["kind"] not in answers.CORRECTABLE:
        raise Refusal("nothing-corrected", "There is no text to correct in that row.")
    now = rules.row_text(row, str(asked.get("field")))
    if now is None:
        raise Refusal("no-such-field", "That row has no such text.")
    text = given.need("text", "nothing-typed", "Write the right text.")
    given.need("reason", "reason-needed", "Say what was wrong.")
    if text == now:
        raise Refusal("nothing-changed", "It says so already.")
    if row["kind"] in ("read", "proved"):
        rules.number(text, readings.instrument(state, row["instrument"], row["range"]), row["unit"])
    return {**asked, "text": text, "move": _corrected_move(given, row, text)}


def _corrected_move(given: Given, row: Plain, text: str) -> str | None:
    """The move of an answer that waited for the person's choice, and passes now that its text is corrected."""
    ctx, state = given.ctx, given.state
    pending = state["pending"]
    if not pending or pending["seq"] != row["seq"] or row["kind"] != "read" or state["phase"] != "going":
        return None
    step = ctx.steps[row["step"]]
    control = step["control"]
    meter = readings.instrument(state, row["instrument"], row["range"])
    resolution = readings.resolution_of(control, meter)
    verdict = judge.judge(text, row["unit"], row["limits"], resolution, meter, control["protects"])
    if verdict.get("outcome") != "pass":
        return None
    si = readings.si_text(text, control["unit"])
    column = state["series"].get(step["id"], [])
    after = {
        **state,
        "values": {**state["values"], step["id"]: {**state["values"][step["id"]], "si": si}},
        "series": {**state["series"], step["id"]: [*column[:-1], si]},
    }
    where = names.scope(ctx, after, given.now)
    leaving = [
        m for m in moves.leads(ctx, after, step["id"], "pass") if m["manner"] == "plain" and not moves.is_around(m)
    ]
    free = [m for m in leaving if not names.reasons(ctx, where, m["gate"])]
    return free[0]["id"] if len(free) == 1 else None


# ---- the rest --------------------------------------------------------------------------------------------------------


def _as_asked(given: Given) -> Plain:
    return given.asked


def _safe_step_done(given: Given) -> Plain:
    if not any(one["id"] == given.asked.get("item") for one in given.ctx.sheet["make_safe"]):
        raise Refusal("unknown-item", "The make-safe list has no such line.")
    return given.asked


def _trip_recorded(given: Given) -> Plain:
    given.need("indicator", "nothing-typed", "Say which indicator showed it.")
    given.need("done", "nothing-typed", "Say what was done.")
    return {"kind": "trip", **given.asked}


def _resumed(given: Given) -> Plain:
    wall, mono = _gap(given)
    return {"wall_s": wall, "mono_s": mono, **given.asked}


def _clock_changed(given: Given) -> Plain:
    wall, mono = _gap(given)
    return {"wall_s": wall, "mono_s": mono or "0.000", **given.asked}


def _gap(given: Given) -> tuple[str, str | None]:
    """What each clock says has passed since the last event."""
    then, now = given.state["clock"], given.now
    a, b = clock.wall_ms(then["wall"] if then else None), clock.wall_ms(now["wall"])
    wall = clock.seconds(b - a) if a is not None and b is not None else "0.000"
    if then is None or then["boot"] != now["boot"]:
        return wall, None
    c, d = clock.mono_ms(then["mono"]), clock.mono_ms(now["mono"])
    return wall, clock.seconds(d - c) if c is not None and d is not None else None


def _person_changed(given: Given) -> Plain:
    to = given.text("to")
    rules.records(given.state, to)
    if to == given.state["recorder"]:
        raise Refusal("same-person", "This person records already.")
    return given.asked


def _ended(given: Given) -> Plain:
    ctx, state = given.ctx, given.state
    outcome = given.asked.get("outcome", "done")
    if outcome == "done":
        if state["phase"] != "going" or state["node"] != END:
            raise Refusal("not-at-end", "Steps are left. End the run as stopped, with a reason, or go on.")
        rules.end_states(ctx, state)
    else:
        given.need("reason", "reason-needed", "Say why the run stops here.")
    return {
        "outcome": outcome,
        "reason": given.text("reason"),
        "states": {name: source["state"] for name, source in state["sources"].items()},
        "locks": state["locks"],
        "earths": state["earths"],
    }


def _voided(given: Given) -> Plain:
    given.need("reason", "reason-needed", "Say why the run is void.")
    return given.asked


def _reopened(given: Given) -> Plain:
    given.need("reason", "reason-needed", "Say what the supervisor asked for.")
    given.need("returned_by", "nothing-typed", "Name who returned it.")
    if given.state["reopened"] is not None:
        raise Refusal("reopened", "It was taken up already.")
    return given.asked


_HANDLERS: dict[str, Callable[[Given], Plain]] = {
    "run-started": start.started,
    "states-declared": start.declared,
    **dict.fromkeys(answers.CONTROLS, _answer),
    "went-on": _went_on,
    "corrected": _corrected,
    "safe-begun": _as_asked,
    "safe-step-done": _safe_step_done,
    "safe-ended": _as_asked,
    "trip-recorded": _trip_recorded,
    "paused": _as_asked,
    "resumed": _resumed,
    "states-confirmed": start.confirmed,
    "clock-changed": _clock_changed,
    "person-changed": _person_changed,
    "storage-found": _as_asked,
    "ended": _ended,
    "voided": _voided,
    "reopened": _reopened,
}
