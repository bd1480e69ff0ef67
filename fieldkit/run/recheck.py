"""What an event must keep to whoever made it: the fold asks here again what decide asked of the command.

`event` lists in `disagree` what a tablet of this project would have refused: an answer whose words are not those of
its step, a way taken that only a person's choice takes, a lock taken off without the exception's rules, a gap that
was not told. The words as they were first recorded are asked, not as corrected. To add a rule: an arm in `_RULES`.
Twin: static/core/recheck.js. Not here: verdicts, gates and what an event does (fieldkit.run.answers, arms, moves).
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

from fieldkit.errors import Refusal
from fieldkit.run import answers, clock, moves, readings, rules, start
from fieldkit.run.moves import State
from fieldkit.run.names import Context

Plain = dict[str, Any]
Found = Iterator[tuple[str, str]]

#: what whoever records does: an event of another person among these is not theirs to make
_WORK = (*answers.CONTROLS, "went-on", "corrected", "states-declared", "states-confirmed", "ended")


def event(ctx: Context, state: State, one: Plain, passed: Plain | None) -> None:
    """List what does not keep to the rules; `passed` is what the clock says since the event before."""
    seq, kind = one["seq"], one["kind"]
    found: list[tuple[str, str]] = []
    if kind in _WORK and one["by"] != state["recorder"]:
        found.append(("not-recorder", f"Event {seq} is by {one['by']}, and {state['recorder']} records."))
    going = state["phase"] == "going"
    if going and (kind == "went-on" or _takes(one)) and passed is not None and clock.away(passed):
        found.append(("not-resumed", f"Event {seq} follows a gap that was not told. Take the run up again first."))
    step = ctx.steps.get(one["body"].get("step") or "")
    if kind in answers.CONTROLS:
        if step is not None and step["control"]["control"] == answers.CONTROLS[kind]:
            found += _RULES[kind](ctx, state, one, step["control"]) if kind in _RULES else []
        found += _by_itself(ctx, one)
    elif kind in _RULES:
        found += _RULES[kind](ctx, state, one, {})
    for code, says in found:
        moves.disagree(state, seq, code, says)


def _takes(one: Plain) -> bool:
    """An answer; a picture or a remark only where it takes a move."""
    beside = one["kind"] in ("pictured", "remarked") and one["body"]["move"] is None
    return one["kind"] in answers.CONTROLS and not beside


def _by_itself(ctx: Context, one: Plain) -> Found:
    """An answer takes a plain move and no way round; all others are a person's choice."""
    move = ctx.moves.get(one["body"]["move"] or "")
    if move is not None and (move["manner"] != "plain" or moves.is_around(move)):
        yield "wrong-move", f"Event {one['seq']} takes the move '{move['id']}', which only a person's choice takes."


def _refused(rule: Callable[[], Any]) -> Found:
    try:
        rule()
    except Refusal as refusal:
        yield refusal.code, refusal.sentence


def _differs(one: Plain, control: Plain, *keys: str) -> Found:
    for key in keys:
        if one["body"][key] != control[key]:
            says = f"Event {one['seq']} says '{one['body'][key]}' where the step says '{control[key]}'."
            yield f"other-{key}", says


def _read(ctx: Context, state: State, one: Plain, control: Plain) -> Found:
    body = one["body"]
    meter = readings.instrument(state, body["instrument"], body["range"])
    if meter is None and (body["instrument"] or control["meter"]):
        yield "no-instrument", f"Event {one['seq']} names no instrument that this run carries."
    yield from _metered(state, one, control, meter)
    for code, says in _refused(lambda: rules.number(body["text"], meter, body["unit"])):
        if code == "outside-range":
            yield code, says


def _metered(state: State, one: Plain, control: Plain, meter: Plain | None) -> Found:
    """What the instrument and its range must be, whichever answer they gave."""
    body = one["body"]
    yield from _refused(lambda: rules.in_range(state, control, body["instrument"], body["range"]))
    yield from _refused(lambda: rules.in_date(control, meter, one["at"]["wall"]))


def _proved(ctx: Context, state: State, one: Plain, control: Plain) -> Found:
    body = one["body"]
    yield from _refused(lambda: rules.tester(state, control, body["instrument"]))
    yield from _metered(state, one, control, readings.instrument(state, body["instrument"], body["range"]))


def _locked(ctx: Context, state: State, one: Plain, control: Plain) -> Found:
    yield from _differs(one, control, "point")
    if not one["body"]["lock"].strip():
        yield "nothing-typed", f"Event {one['seq']} gives no number of the lock."
    yield from _refused(lambda: rules.known(state, one["body"]["holder"]))


def _unlocked(ctx: Context, state: State, one: Plain, control: Plain) -> Found:
    body = one["body"]
    yield from _differs(one, control, "point")
    at = [lock for lock in state["locks"] if lock["point"] == body["point"]]
    lock = next((one for one in at if one["lock"] == body["lock"]), at[0] if at else None)
    if lock is None or lock["holder"] == body["who"]:
        return
    yield from _refused(lambda: rules.exception(state, lock, body["who"], body["checks"], body["second"]))


def _stick(ctx: Context, state: State, one: Plain, control: Plain) -> Found:
    yield from _differs(one, control, "stick", "point")


def _released(ctx: Context, state: State, one: Plain, control: Plain) -> Found:
    yield from _differs(one, control, "statement")
    yield from _refused(lambda: rules.releases(state, control, one["body"]["who"]))


def _people(ctx: Context, state: State, one: Plain, control: Plain) -> Found:
    yield from _differs(one, control, "place", "way")


def _went_on(ctx: Context, state: State, one: Plain, control: Plain) -> Found:
    body, move = one["body"], ctx.moves.get(one["body"]["move"])
    if move is None:
        return
    if state["pending"] is None and state["phase"] == "going" and not moves.is_around(move):
        yield "not-answered", f"Event {one['seq']} goes on from '{body['step']}', which was not answered."
    if move["manner"] in ("again", "deviation") and not body["reason"].strip():
        yield "reason-needed", f"Event {one['seq']} gives no reason."
    if move["manner"] != "deviation":
        return
    if not body["under"].strip():
        yield "under-needed", f"Event {one['seq']} does not say under whose authority the reading is accepted."
    if body["authority"] and not answers.has_role(state, body["authority"], "supervisor"):
        yield "not-supervisor", f"{rules.name_of(state, body['authority'])} is no supervisor."


def _corrected(ctx: Context, state: State, one: Plain, control: Plain) -> Found:
    pending = state["pending"]
    if one["body"]["move"] is None or state["phase"] != "going":
        return
    if pending is None or pending["seq"] != one["body"]["seq"]:
        yield "not-answered", f"Event {one['seq']} goes on from a step that did not wait for it."
    yield from _by_itself(ctx, one)


def _person_changed(ctx: Context, state: State, one: Plain, control: Plain) -> Found:
    yield from _refused(lambda: rules.records(state, one["body"]["to"]))


def _states_confirmed(ctx: Context, state: State, one: Plain, control: Plain) -> Found:
    if state["phase"] == "confirm":
        yield from _refused(lambda: start.goes_on(ctx, state, one["body"]))


_RULES: dict[str, Callable[[Context, State, Plain, Plain], Found]] = {
    "read": _read,
    "proved": _proved,
    "locked": _locked,
    "unlocked": _unlocked,
    "earthed": _stick,
    "lifted": _stick,
    "released": _released,
    "people-counted": _people,
    "went-on": _went_on,
    "corrected": _corrected,
    "person-changed": _person_changed,
    "states-confirmed": _states_confirmed,
}
