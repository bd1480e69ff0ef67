"""What may be done now, and why not what may not: everything a screen needs beside the state.

`progress(sheet, state, now)` computes it afresh each time; nothing here is stored. Sentences are whole sentences;
times left are seconds. Twin: static/core/progress.js. Not here: refusing (fieldkit.run.decide).
"""

from __future__ import annotations

from typing import Any

from fieldkit.run import ahead, clock, judge, moves, names, ranges, readings, results, rows
from fieldkit.run.moves import State
from fieldkit.run.names import LIVE, Context, Scope, context
from fieldkit.sheet.model import Sheet

Plain = dict[str, Any]

LABELS = {
    "plain": "Go on",
    "again": "Take it again",
    "deviation": "Accept as a deviation",
    "stop": "Stop and make safe",
}


def progress(sheet: Sheet | Plain | Context, state: State, now: dict[str, Any], using: Plain | None = None) -> Plain:
    """Where the run stands at the moment `now` ({"wall", "mono", "boot"}); DEVELOPERS.md spells the answer.

    `using` asks for another instrument or range than is proposed: {"instrument", "range"}, either may be left out.
    """
    ctx = context(sheet)
    where = names.scope(ctx, state, now)
    step = ctx.steps.get(state["node"])
    reasons = closed(ctx, state, where)
    ways = offered(ctx, state, where)
    path = ahead.ahead(ctx, state, where)
    meter = ranges.in_use(ctx, state, where, step, using)
    own = _own(ctx, state, where, step)
    limits = _limits(ctx, where, step, meter or own)
    points = _points(ctx, where, step, meter)
    return {
        "node": state["node"],
        "step": step,
        "open": not reasons,
        "reasons": reasons,
        "moves": ways,
        "next": _next(ways),
        "limits": limits,
        "points": points,
        "instrument": meter,
        **ranges.offers(state, step, meter),
        "plate": _plate(ctx, where, step, meter),
        "value": _value(ctx, where, step),
        "spread": own,
        "shown": results.shown(ctx, where, step["control"], own) if step else "",
        "level": rows.level_text(ctx, where, step) if step and step["level"] else "",
        "judgeable": _judgeable(ctx, where, step, meter, [limits, *(one["limits"] for one in points)], now),
        "waits": ahead.waits(ctx, where, state, path),
        "live": [name for name in state["sources"] if names.stands(ctx, state, name) in LIVE],
        "next_change": ahead.next_change(state, ctx, path),
        "may": may(state, not reasons, ways),
        "path": [step_id for step_id, _ in path[1:]],
    }


def closed(ctx: Context, state: State, where: Scope) -> list[Plain]:
    """Why the step where the run stands may not be answered now; empty where it may."""
    phase, node = state["phase"], state["node"]
    if phase != "going":
        return [{"says": _PHASES[phase], "left": None}]
    step = ctx.steps.get(node)
    if step is None:
        return [{"says": "The last step is done. End the run and sign it.", "left": None}]
    if state["pending"]:
        return [{"says": "It is answered. Choose how to go on.", "left": None}]
    gates = [names.reasons(ctx, where, move["gate"], node) for move in ahead.forward(ctx, node)]
    found = min(gates, key=len) if gates and all(gates) else []
    timed = any(one["left"] is not None for one in found)
    return found if timed else [*_wait_reasons(ctx, where, step), *found]


def told(reasons: list[Plain]) -> str:
    """Reasons as one text, with the time that is left."""
    return " ".join(
        one["says"]
        if not one["left"]
        else f"{one['says'].removesuffix('.')}; {clock.spoken(clock.ceil_ms(one['left']))} left."
        for one in reasons
    )


_PHASES = {
    "new": "The run has not been started.",
    "declare": "Confirm the energy states first.",
    "confirm": "The work was interrupted. Confirm the energy states first.",
    "stopped": "The run is stopped. Make safe and end it.",
    "ended": "The run has ended.",
    "voided": "The run was voided.",
}


def _wait_reasons(ctx: Context, where: Scope, step: Plain) -> list[Plain]:
    control = step["control"]
    if control["control"] != "wait":
        return []
    elapsed = readings.waited(ctx, where, control)
    if elapsed is None:
        return [{"says": "The time has not begun to count.", "left": None}]
    if elapsed["left"] > 0:
        return [{"says": "The time is not over.", "left": elapsed["left"]}]
    return []


def offered(ctx: Context, state: State, where: Scope) -> list[Plain]:
    """Every move that leaves the step, with what keeps it closed: after an answer only those of its outcome."""
    if state["phase"] != "going":
        return []
    pending, node = state["pending"], state["node"]
    leaving = moves.leads(ctx, state, node, pending["outcome"]) if pending else ctx.leaving.get(node, [])
    skip = None if pending else node
    found = []
    for move in leaving:
        reasons = names.reasons(ctx, where, move["gate"], skip)
        found.append(
            {
                "move": move["id"],
                "to": move["to"],
                "on": move["on"],
                "choice": move["choice"],
                "manner": move["manner"],
                "label": label(ctx, state, move),
                "button": moves.is_around(move) or pending is not None,
                "open": not reasons,
                "reasons": reasons,
                "around": moves.is_around(move),
                "tries": tries(ctx, state, move),
            }
        )
    return found


def label(ctx: Context, state: State, move: Plain) -> str:
    """The words on a move's button; `{level}` is the rung that it leads to."""
    text = move["label"] or LABELS[move["manner"]]
    to = ctx.steps.get(move["to"])
    if "{level}" not in text or to is None or to["level"] is None:
        return str(text)
    after = {**state, "counters": dict(state["counters"])}
    for count in move["effects"]["counts"]:
        after["counters"][count["counter"]] = moves.counted(ctx, after, count)
    there = names.scope(ctx, after)
    return rows.with_level(text, rows.level_text(ctx, there, to))


def tries(ctx: Context, state: State, move: Plain) -> Plain | None:
    """How often a capped move was taken and still may be, from its counter's bounds; None where nothing caps it."""
    for count in move["effects"]["counts"]:
        bound = ctx.sheet["counters"].get(count["counter"])
        if count["by"] == 1 and bound is not None and move["manner"] == "again":
            used = names.count(ctx, state, count["counter"]) - bound[0]
            return {"used": used, "left": max(0, bound[1] - bound[0] - used)}
    return None


def _next(ways: list[Plain]) -> str | None:
    """Where the one way on leads that an answer takes by itself."""
    plain = [way for way in ways if way["manner"] == "plain" and way["on"] != "fail" and way["open"]]
    plain = [way for way in plain if way["around"] is False]
    return plain[0]["to"] if len(plain) == 1 else None


def _is(step: Plain | None, *controls: str) -> bool:
    return step is not None and step["control"]["control"] in controls


def _limits(ctx: Context, where: Scope, step: Plain | None, meter: Plain | None) -> Plain | None:
    if step is None or not _is(step, "number", "result"):
        return None
    return readings.bounds(ctx, where, step["control"], meter)


def _own(ctx: Context, state: State, where: Scope, step: Plain | None) -> Plain | None:
    """What stands for the meter of a result: its own uncertainty."""
    if step is None or not _is(step, "result"):
        return None
    return results.meter(step["control"], results.of_result(ctx, state, where, step["control"]))


def _points(ctx: Context, where: Scope, step: Plain | None, meter: Plain | None) -> list[Plain]:
    """What a proof asks for, in order, each with its limits."""
    if step is None or not _is(step, "prove"):
        return []
    return [
        {"field": field, "title": title, "limits": readings.bounds(ctx, where, step["control"], meter, own)}
        for field, title, own in readings.proof_fields(step["control"])
    ]


def _value(ctx: Context, where: Scope, step: Plain | None) -> str | None:
    """A result in its unit; None where the step is none, or the formula has no value."""
    if step is None or not _is(step, "result"):
        return None
    return readings.result_text(ctx, where, step["control"])[1] or None


def _plate(ctx: Context, where: Scope, step: Plain | None, meter: Plain | None) -> str | None:
    control = step["control"] if step else {}
    if control.get("plate") is None:
        return None
    resolution = readings.resolution_of(control, meter)
    return rows.shown(names.value(ctx, where, control["plate"]), control["unit"], resolution)


def _judgeable(
    ctx: Context, where: Scope, step: Plain | None, meter: Plain | None, limits: list[Plain | None], now: Plain
) -> Plain:
    """Whether a reading could be judged now, and what keeps it from being so; known before anyone takes it.

    `refused` says that this meter is not taken at all; `says` is what the person is told, in whole sentences.
    """
    if step is None or not _is(step, "number", "prove", "result"):
        return {"ok": True, "why": "", "overdue": False, "refused": False, "says": []}
    asked = readings.asked_of(step["control"])
    out_of_date, refused = judge.overdue(meter, now["wall"]), ranges.overdue(asked, meter, now["wall"])
    why, says = "", [refused] if refused else []
    if out_of_date and meter is not None and not refused:
        says.append(f"The calibration of {meter['id']} ran out on {meter['calibrated_to']}. The record will say so.")
    if asked and meter is None:
        why = f"This run carries no instrument for {asked['role'] or asked['instrument']}."
    elif _is(step, "result"):
        why = readings.result_text(ctx, where, step["control"])[2]
    known = [one for one in limits if one]
    found = next((one["fault"] or one["coarse"] for one in known if one["fault"] or one["coarse"]), "")
    short = next((one["reach"] for one in known if one["reach"]), "")
    if why:
        says.append(why)
    elif found:
        what = "The result" if _is(step, "result") else "A reading"
        says.append(f"{what} cannot be judged: {found.removesuffix('.')}.")
    elif short:
        says.append(f"No reading on this range can pass: {short}.")
    why = why or found or short
    why = why or refused
    return {"ok": not why, "why": why, "overdue": out_of_date, "refused": bool(refused), "says": says}


_MAY = {
    "new": [],
    "declare": ["make-safe", "declare", "trip", "remark", "picture", "end", "void"],
    "going": ["make-safe", "correct", "trip", "pause", "remark", "picture", "change-person", "end", "void"],
    "confirm": ["make-safe", "confirm", "correct", "trip", "remark", "picture", "end", "void"],
    "stopped": ["make-safe", "correct", "trip", "remark", "picture", "change-person", "end", "void"],
    "voided": [],
}


def may(state: State, is_open: bool, ways: list[Plain]) -> list[str]:
    """The things that may be done now, as words for buttons; `answer` and `go-on` where the step itself is open."""
    phase = state["phase"]
    if phase == "ended":
        return ["sign", "correct", "remark", "picture", "void"] if unsigned_end(state) else ["void"]
    found = list(_MAY[phase])
    if phase == "going" and is_open:
        found.append("answer")
    if phase == "going" and any(way["open"] and way["button"] for way in ways):
        found.append("go-on")
    return found


def unsigned_end(state: State) -> bool:
    """The run has ended, and whoever performed it has not signed since, or it was returned and taken up again."""
    if state["ended"] is None:
        return False
    last = state["ended"]["seq"]
    signed = any(s["meaning"] == "performed" and s["seq"] > last for s in state["signatures"])
    return state["reopened"] is not None or not signed
