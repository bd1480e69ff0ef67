"""What an answer to a step does to the state: one arm a control. Twin: static/core/answers.js.

An arm gives the outcome and what the row says; it changes the working copy that fieldkit.run.state made. Limits are
read with the names from before the answer; the gates of a reading's or a choice's moves with the answer in, those of
an act before it (a lock that comes off is still on). Not here: events that answer no step (fieldkit.run.state),
refusals (fieldkit.run.decide).
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from fieldkit.run import clock, judge, moves, names, readings, results, rows
from fieldkit.run.moves import State, disagree
from fieldkit.run.names import Context, Scope

Plain = dict[str, Any]
Said = tuple[str, Plain]

#: kind of the event -> control that it answers
CONTROLS = {
    "acknowledged": "caution",
    "confirmed": "confirm",
    "read": "number",
    "proved": "prove",
    "locked": "lock",
    "unlocked": "unlock",
    "earthed": "earth",
    "lifted": "lift",
    "chosen": "choice",
    "released": "hold",
    "pictured": "picture",
    "remarked": "remark",
    "worked-out": "result",
    "waited": "wait",
    "people-counted": "people",
}
#: kinds whose texts can be corrected
CORRECTABLE = ("read", "proved", "locked", "remarked")
#: outcomes whose gates are read with the answer in: the value just read, the option just chosen
WITH_ANSWER = ("pass", "fail", "option")


def is_answer(ctx: Context, state: State, event: Plain) -> bool:
    """A picture or a remark can also stand beside a step; all other answers answer."""
    if event["kind"] not in ("pictured", "remarked") or event["body"]["move"] is not None:
        return True
    step = ctx.steps.get(event["body"]["step"])
    here = step is not None and state["phase"] == "going" and state["node"] == step["id"] and not state["pending"]
    return here and step is not None and step["control"]["control"] == CONTROLS[event["kind"]]


def answer(ctx: Context, state: State, event: Plain, corrections: list[Plain]) -> None:
    """Record an answer with its row, and take its move."""
    seq, step = event["seq"], ctx.steps.get(event["body"]["step"])
    if step is None or step["control"]["control"] != CONTROLS[event["kind"]]:
        disagree(state, seq, "wrong-answer", f"Event {seq} ({event['kind']}) answers no such step of the sheet.")
        rows.add(ctx, state, event, step)
        return
    going = state["phase"] == "going"
    if not going:
        disagree(state, seq, "not-going", f"Event {seq} answers a step while nothing is open.")
    elif state["pending"] or state["node"] != step["id"]:
        disagree(state, seq, "not-here", f"Event {seq} answers the step '{step['id']}', which is not the open one.")
        state.update(node=step["id"], pending=None)
    body, old = corrected(event["body"], corrections)
    before = names.scope(ctx, state)
    outcome, said = _ARMS[step["control"]["control"]](ctx, state, before, {**event, "body": body, "step": step})
    rows.add(ctx, state, event, step, outcome=outcome, old=[*said.pop("old", []), *old], **said)
    if not going:
        return
    state["pending"] = {"step": step["id"], "seq": seq, "outcome": outcome, "verdict": said.get("verdict")}
    if body["move"] is not None:
        where = names.scope(ctx, state) if outcome in WITH_ANSWER else before
        moves.take(ctx, state, body["move"], where, event)
    elif event["kind"] == "unlocked" and lock_on(state, body["point"]):
        state["pending"] = None


def corrected(body: Plain, corrections: list[Plain]) -> tuple[Plain, list[Plain]]:
    """A body with its corrections applied, and every text that stood there before."""
    old = []
    for one in corrections:
        field, text = one["body"]["field"], one["body"]["text"]
        before = field_text(body, field)
        if before is None:
            continue
        body = with_field(body, field, text)
        old.append({"field": field, "text": before, "seq": one["seq"], "reason": one["body"]["reason"]})
    return body, old


def field_text(body: Plain, field: str) -> str | None:
    """The text of a correctable field; None where the event has no such field."""
    if field.startswith("points."):
        return next((p["text"] for p in body.get("points", ()) if p["name"] == field[len("points.") :]), None)
    text = body.get(field) if field in ("text", "before", "after", "lock") else None
    return text if isinstance(text, str) else None


def with_field(body: Plain, field: str, text: str) -> Plain:
    if not field.startswith("points."):
        return {**body, field: text}
    name = field[len("points.") :]
    return {**body, "points": [{**p, "text": text} if p["name"] == name else p for p in body["points"]]}


def person(state: State, name: str) -> Plain | None:
    started = state["started"]
    return next((one for one in started["people"] if one["id"] == name), None) if started else None


def has_role(state: State, name: str, role: str) -> bool:
    found = person(state, name)
    return found is not None and role in found["roles"]


def lock_on(state: State, point: str) -> bool:
    return any(lock["point"] == point for lock in state["locks"])


def _caution(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    heard = list(event["body"]["heard"])
    present = state["started"]["present"] if state["started"] else []
    missing = [p for p in present if p not in heard]
    if missing:
        disagree(state, event["seq"], "not-heard", f"The caution was not heard by {', '.join(missing)}.")
    return "done", {"names": heard}


def _confirm(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    return "done", {}


def _number(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    body, control, seq = event["body"], event["step"]["control"], event["seq"]
    meter = readings.instrument(state, body["instrument"], body["range"])
    limits = readings.bounds(ctx, where, control, meter)
    if body["unit"] != control["unit"]["symbol"]:
        disagree(state, seq, "unit", f"Event {seq} is in '{body['unit']}', the step in '{control['unit']['symbol']}'.")
    verdict = _judged(control, body["text"], limits, meter, control["protects"], event)
    if "refused" in verdict:
        disagree(state, seq, "no-number", f"Event {seq} holds no number: {verdict['refused']['says']}")
        return "fail", {
            "text": body["text"],
            "unit": body["unit"],
            "verdict": "not judged",
            "instrument": body["instrument"],
            "range": _range(body, meter),
        }
    si = readings.si_text(body["text"], control["unit"])
    parts = results.of_reading(control, meter, readings.plain(body["text"]), seq)
    _keep(state, event["step"]["id"], body["text"], control["unit"]["symbol"], si, seq, parts)
    return verdict.pop("outcome"), {
        "text": body["text"],
        "unit": body["unit"],
        "limits": limits,
        "instrument": body["instrument"],
        "range": _range(body, meter),
        **_of_verdict(verdict),
    }


def _range(body: Plain, meter: Plain | None) -> str:
    """The name of the range that was used; the only one of an instrument need not be named."""
    return str(body["range"] or (meter["range"] if meter else "") or "")


def _judged(
    control: Plain, text: str, limits: Plain | None, meter: Plain | None, protects: bool, event: Plain
) -> Plain:
    resolution = readings.resolution_of(control, meter)
    day = clock.day(event["at"]["wall"])
    return judge.judge(text, control["unit"]["symbol"], limits, resolution, meter, protects, day)


def _of_verdict(verdict: Plain) -> Plain:
    return {key: verdict[key] for key in ("verdict", "margin", "u", "near", "untypical", "overdue", "words")}


def _keep(
    state: State, step: str, text: str, unit: str, si: str | None, seq: int, parts: results.Parts | None = None
) -> None:
    state["values"][step] = {"text": text, "unit": unit, "si": si, "seq": seq, "parts": parts}
    if si is not None:
        state["series"][step] = [*state["series"].get(step, []), si]
        state["spread"][step] = [*state["spread"].get(step, []), parts]


def _result(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    body, control, seq, step = event["body"], event["step"]["control"], event["seq"], event["step"]["id"]
    si, text, fault = readings.result_text(ctx, where, control)
    old = []
    if si != body["value"]:
        changed = next((row for row in reversed(state["log"]) if any(o["seq"] > seq for o in row["old"])), None)
        if changed is None:
            disagree(
                state,
                seq,
                "value",
                f"Event {seq} holds '{body['value'] or 'no value'}', the sheet gives '{si or fault}'.",
            )
        else:
            last = max(o["seq"] for o in changed["old"])
            old = [
                {
                    "field": "value",
                    "text": body["value"],
                    "seq": last,
                    "reason": "worked out again after the correction",
                }
            ]
    parts = results.of_result(ctx, state, where, control)
    own = results.meter(control, parts)
    limits = readings.bounds(ctx, where, control, own)
    unit = control["unit"]["symbol"]
    if fault:
        _keep(state, step, "", unit, None, seq)
        said = {"verdict": "not judged", "words": f"No value: {fault}", "value": "", "limits": limits, "old": old}
        return "fail", {"unit": unit, **said}
    verdict = _judged(control, text, limits, own, control["protects"], event)
    shown = results.shown(ctx, where, control, own)
    _keep(state, step, text, unit, si, seq, parts)
    said = {"text": text, "unit": unit, "value": si, "shown": shown, "limits": limits, "old": old}
    return verdict.pop("outcome"), {**said, **_of_verdict(verdict)}


def _prove(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    body, control, seq = event["body"], event["step"]["control"], event["seq"]
    meter = readings.instrument(state, body["instrument"], body["range"])
    typed = {point["name"]: point["text"] for point in body["points"]}
    for point in control["points"]:
        if point["name"] not in typed:
            disagree(state, seq, "point-missing", f"Event {seq} leaves out the point '{point['name']}'.")
    points = []
    for field, title, own in readings.proof_fields(control):
        text = field_text(body, field) or ""
        limits = readings.bounds(ctx, where, control, meter, own)
        verdict = _judged(control, text, limits, meter, True, event)
        if "refused" in verdict:
            disagree(state, seq, "no-number", f"Event {seq} holds no number at {title}: {verdict['refused']['says']}")
            points.append(
                {"field": field, "title": title, "text": text, "limits": limits, "verdict": "not judged", "words": ""}
            )
            continue
        said = {
            "verdict": verdict["verdict"],
            "margin": verdict["margin"],
            "u": verdict["u"],
            "words": verdict["words"],
        }
        points.append({"field": field, "title": title, "text": text, "limits": limits, **said})
    worst = max((p["verdict"] for p in points), key=judge.VERDICTS.index)
    said = {
        "verdict": worst,
        "unit": control["unit"]["symbol"],
        "instrument": body["instrument"],
        "range": _range(body, meter),
        "overdue": judge.overdue(meter, event["at"]["wall"]),
        "points": points,
    }
    return "pass" if worst == "pass" else "fail", said


def _lock(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    body = event["body"]
    holder = person(state, body["holder"])
    lock = {
        "point": body["point"],
        "sources": list(event["step"]["control"]["sources"]),
        "lock": body["lock"],
        "tag": body["tag"],
        "holder": body["holder"],
        "holder_name": holder["name"] if holder else "",
        "run": state["run"],
        "since": event["at"]["wall"],
    }
    state["locks"].append(lock)
    return "done", {"text": body["lock"], "note": body["tag"], "who": body["holder"]}


def _unlock(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    body, seq = event["body"], event["seq"]
    at = [lock for lock in state["locks"] if lock["point"] == body["point"]]
    lock = next((one for one in at if one["lock"] == body["lock"]), at[0] if at else None)
    if lock is None:
        disagree(state, seq, "no-such-lock", f"Event {seq} takes a lock off {body['point']}, where none is on.")
    else:
        state["locks"].remove(lock)
    if body["move"] is not None and lock_on(state, body["point"]):
        disagree(state, seq, "locks-left", f"Event {seq} goes on while another lock is on {body['point']}.")
    state["unsigned"] = {"seq": seq, "person": body["who"], "meaning": "unlocked"}
    return "done", {
        "text": body["lock"],
        "who": body["who"],
        "names": [c["name"] for c in body["checks"]],
        "note": body["second"],
    }


def _earth(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    body = event["body"]
    if any(earth["stick"] == body["stick"] for earth in state["earths"]):
        disagree(state, event["seq"], "stick-on", f"Stick {body['stick']} is on already.")
    source = event["step"]["control"]["source"]
    earth = {"stick": body["stick"], "point": body["point"], "source": source, "run": state["run"]}
    state["earths"].append({**earth, "since": event["at"]["wall"]})
    return "done", {"text": body["stick"], "note": body["point"]}


def _lift(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    body = event["body"]
    earth = next((one for one in state["earths"] if one["stick"] == body["stick"]), None)
    if earth is None:
        disagree(state, event["seq"], "no-such-earth", f"Stick {body['stick']} is lifted, and was not on.")
    else:
        state["earths"].remove(earth)
        moves.drop_proofs(state, event["seq"], earth["source"])
    return "done", {"text": body["stick"], "note": body["point"]}


def _choice(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    value = event["body"]["value"]
    option = next((one for one in event["step"]["control"]["options"] if one["value"] == value), None)
    if option is None:
        disagree(state, event["seq"], "unknown-option", f"The step has no option '{value}'.")
    state["choices"][event["step"]["id"]] = value
    return "option", {"text": value, "note": option["label"] if option else ""}


def _hold(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    body, seq = event["body"], event["seq"]
    state["unsigned"] = {"seq": seq, "person": body["who"], "meaning": "released"}
    return "done", {"who": body["who"], "note": body["statement"]}


def _picture(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    return "done", {"value": event["body"]["sha256"], "note": event["body"]["note"]}


def _remark(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    return "done", {"text": event["body"]["text"]}


def _wait(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    elapsed = readings.waited(ctx, where, event["step"]["control"])
    if elapsed is None or elapsed["left"] > 0:
        disagree(state, event["seq"], "too-early", f"Event {event['seq']} ends a wait before its time.")
    return "done", {"elapsed": None if elapsed is None else elapsed["texts"]}


def _people(ctx: Context, state: State, where: Scope, event: Plain) -> Said:
    body, seq = event["body"], event["seq"]
    inside = state["hands"].get(body["place"], [])
    if body["way"] == "in":
        state["hands"][body["place"]] = [*inside, *[n for n in body["names"] if n not in inside]]
    else:
        left = [n for n in inside if n not in body["names"]]
        if left:
            disagree(state, seq, "people-left", f"Not counted out of the {body['place']}: {', '.join(left)}.")
        state["hands"][body["place"]] = left
    return "done", {"names": list(body["names"]), "note": f"{body['way']}: {body['place']}"}


_ARMS: dict[str, Callable[[Context, State, Scope, Plain], Said]] = {
    "caution": _caution,
    "confirm": _confirm,
    "number": _number,
    "prove": _prove,
    "lock": _lock,
    "unlock": _unlock,
    "earth": _earth,
    "lift": _lift,
    "choice": _choice,
    "hold": _hold,
    "picture": _picture,
    "remark": _remark,
    "result": _result,
    "wait": _wait,
    "people": _people,
}
