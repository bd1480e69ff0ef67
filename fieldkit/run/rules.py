"""The rules for people, locks and readings that a command must keep: one function an answer.

Twin: static/core/rules.js.

Each gives the event's body but for step and move, or raises a Refusal that says what to do instead.
Not here: whether the step is open at all (fieldkit.run.progress), the start and the energy states (fieldkit.run.start).
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from fieldkit import values
from fieldkit.errors import Refusal
from fieldkit.run import answers, names, ranges, readings
from fieldkit.run.command import Given
from fieldkit.run.moves import State
from fieldkit.run.names import Context

Plain = dict[str, Any]

#: the three checks before the lock of somebody else is taken off
CHECKS = ("not on site", "tried to reach", "told before return")


def name_of(state: State, person: str) -> str:
    found = answers.person(state, person)
    return str(found["name"]) if found else person


def known(state: State, person: str) -> str:
    """The person, as this run knows them."""
    if answers.person(state, person) is None:
        raise Refusal("unknown-person", "This run knows no such person.")
    return person


def number(text: str, meter: Plain | None, unit: str) -> None:
    """The text is a number, and the meter can show it."""
    typed = values.typed(text)
    if isinstance(typed, Refusal):
        raise typed
    if meter is None or meter["unit"] != unit:
        return
    for side, sign, word in (("low", 1, "from"), ("high", -1, "up to")):
        if meter[side] is not None and values.compare(typed, values.dec(meter[side])) * sign < 0:
            on, what = (f" on its {meter['range']} range", "range") if meter["range"] else ("", "meter")
            says = (
                f"{meter['id']} reads {word} {meter[side]} {unit}{on}. Read it again, or name the {what} that was used."
            )
            raise Refusal("outside-range", says)


def in_range(state: State, control: Plain, used: str | None, name: str) -> None:
    """Refuses a range that the instrument has not, or that reads in another unit while others read in the step's."""
    one = readings.aboard(state, used)
    if one is None:
        return
    unit = control["unit"]["symbol"]
    fitting = [found["name"] for found in readings.usable(one, unit)]
    found, told = readings.range_of(one, name), f"Name one of: {', '.join(fitting)}."
    if found is None:
        named = f"has no {name} range" if name else "has more than one range"
        raise Refusal("unknown-range", f"{used} {named}. {told}")
    if found["name"] not in fitting:
        says = f"The {found['name']} range of {used} reads in {found['unit'] or 'plain numbers'}"
        raise Refusal("wrong-range", f"{says}, the step in {unit or 'plain numbers'}. {told}")


def in_date(control: Plain, meter: Plain | None, wall: str) -> None:
    """Refuses an overdue meter where the step takes none."""
    says = ranges.overdue(readings.asked_of(control), meter, wall)
    if says:
        raise Refusal("overdue", says)


def row_text(row: Plain, field: str) -> str | None:
    """What a field of a row says now; None where it has no such field."""
    if row["kind"] == "proved":
        return next((point["text"] for point in row["points"] if point["field"] == field), None)
    fits = field == ("lock" if row["kind"] == "locked" else "text")
    return str(row["text"]) if fits else None


def deviation(given: Given) -> None:
    """A fail is accepted by a supervisor who records nothing in this run, with a reason and under an authority."""
    given.need("reason", "reason-needed", "Say why the reading is accepted.")
    given.need("under", "under-needed", "Say under whose authority: a letter, a rule of the station.")
    who = given.need("authority", "authority-needed", "A supervisor allows this, with their own passphrase.")
    known(given.state, who)
    if not answers.has_role(given.state, who, "supervisor"):
        raise Refusal("not-supervisor", f"{name_of(given.state, who)} is no supervisor.")
    if who in given.state["recorders"]:
        raise Refusal(
            "recorder-allows", f"{name_of(given.state, who)} records in this run, and cannot allow its deviations."
        )


def records(state: State, who: str) -> None:
    """Refuses to let somebody record who is unknown, or who allowed a deviation of this run."""
    known(state, who)
    if any(one["person"] == who and one["meaning"] == "allowed" for one in state["signatures"]):
        says = f"{name_of(state, who)} allowed a deviation in this run, and cannot record in it."
        raise Refusal("allowed-before", says)


def releases(state: State, control: Plain, who: str) -> None:
    """Refuses the release of a hold point by its recorder, or by somebody who does not work at transmitters."""
    known(state, who)
    if who == state["recorder"]:
        raise Refusal("same-person", f"{name_of(state, who)} records. Another person releases this hold point.")
    if control["by"] == "supervisor" and not answers.has_role(state, who, "supervisor"):
        raise Refusal("not-supervisor", f"{name_of(state, who)} is no supervisor.")
    if not any(answers.has_role(state, who, role) for role in ("technician", "supervisor")):
        raise Refusal("no-role", f"{name_of(state, who)} is neither technician nor supervisor.")


def tester(state: State, control: Plain, used: str) -> None:
    """Refuses a proof that was not made with the tester that the step names: a panel meter never proves."""
    meant = readings.meter_of(state, control["tester"])
    if meant is not None and used != meant:
        says = f"This proof is made with {meant}, proved before and after; no other meter proves."
        raise Refusal("other-tester", says)


def end_states(ctx: Context, state: State) -> None:
    """At the end everyone is out, and every source is as the procedure leaves it."""
    inside = [name for people in state["hands"].values() for name in people]
    if inside:
        raise Refusal("people-in", f"Not counted out yet: {', '.join(inside)}.")
    for name, allowed in ctx.sheet["ends"].items():
        now = state["sources"].get(name, {}).get("state")
        if now not in allowed:
            title = ctx.sources[name]["title"] if name in ctx.sources else name
            raise Refusal("end-state", f"At the end {title} is {' or '.join(allowed)}; it is {now}.")


def _acknowledged(given: Given, step: Plain) -> Plain:
    heard = given.asked.get("heard")
    named = list(heard) if isinstance(heard, list | tuple) else []
    missing = [p for p in given.state["started"]["present"] if p not in named]
    if missing:
        told = ", ".join(name_of(given.state, p) for p in missing)
        raise Refusal("not-heard", f"Read it aloud to everyone present. Not named: {told}.")
    return {"heard": named}


def _confirmed(given: Given, step: Plain) -> Plain:
    return {}


def _meter(given: Given, step: Plain) -> Plain | None:
    """The instrument that was used, on its range: those named, else what the register means and what is proposed."""
    control = step["control"]
    asked = readings.asked_of(control)
    named = given.text("instrument") or readings.meter_of(given.state, asked)
    if readings.aboard(given.state, named) is None:
        if named or asked:
            wanted = named or (asked or {}).get("role") or ""
            raise Refusal("no-instrument", f"This run carries no instrument {wanted}. Name the one that was used.")
        return None
    chosen = given.text("range")
    if chosen:
        in_range(given.state, control, named, chosen)
    where = names.scope(given.ctx, given.state, given.now)
    return ranges.in_use(given.ctx, given.state, where, step, {"instrument": named, "range": chosen})


def _range(meter: Plain | None) -> str:
    return str((meter["range"] if meter else None) or "")


def _read(given: Given, step: Plain) -> Plain:
    unit = step["control"]["unit"]["symbol"]
    if given.asked.get("unit", unit) != unit:
        raise Refusal("unit", f"This step is read in {unit or 'plain numbers'}.")
    meter = _meter(given, step)
    in_date(step["control"], meter, given.now["wall"])
    text = given.asked.get("text")
    number(text if isinstance(text, str) else "", meter, unit)
    return {"text": text, "unit": unit, "instrument": meter["id"] if meter else None, "range": _range(meter)}


def _proved(given: Given, step: Plain) -> Plain:
    control = step["control"]
    meter = _meter(given, step)
    tester(given.state, control, meter["id"] if meter else "")
    in_date(control, meter, given.now["wall"])
    points = given.asked.get("points")
    typed = (
        {p.get("name"): p.get("text") for p in points if isinstance(p, dict)}
        if isinstance(points, list | tuple)
        else {}
    )
    texts: Plain = {"before": given.asked.get("before"), "after": given.asked.get("after")}
    for field, title, _ in readings.proof_fields(control):
        text = texts[field] if field in texts else typed.get(field[len("points.") :])
        if not isinstance(text, str) or not text:
            raise Refusal("point-missing", f"Nothing is written for: {title}.")
        number(text, meter, control["unit"]["symbol"])
    return {
        "instrument": meter["id"] if meter else "",
        "range": _range(meter),
        **texts,
        "points": [{"name": p["name"], "text": typed[p["name"]]} for p in control["points"]],
    }


def _locked(given: Given, step: Plain) -> Plain:
    state = given.state
    lock = given.need("lock", "nothing-typed", "Write the number of the lock.")
    if any(one["lock"] == lock for one in state["locks"]):
        raise Refusal("lock-in-use", f"Lock {lock} is on the board already. Read its number again.")
    holder = known(state, given.text("holder") or state["recorder"])
    return {"point": step["control"]["point"], "lock": lock, "tag": given.text("tag"), "holder": holder}


def _unlocked(given: Given, step: Plain) -> Plain:
    state, point = given.state, step["control"]["point"]
    on = [one for one in state["locks"] if one["point"] == point]
    named = given.text("lock")
    lock = next((one for one in on if one["lock"] == named), None) if named else on[0] if len(on) == 1 else None
    if lock is None:
        numbers = ", ".join(one["lock"] for one in on)
        raise Refusal(
            "no-such-lock", f"On {point}: {numbers}. Say which lock comes off." if on else f"No lock is on {point}."
        )
    who = known(state, given.text("who") or state["recorder"])
    body: Plain = {"point": point, "lock": lock["lock"], "who": who}
    if who == lock["holder"]:
        return body
    return {**body, **exception(state, lock, who, given.asked.get("checks"), given.text("second"))}


def exception(state: State, lock: Plain, who: str, asked: Any, second: str | None) -> Plain:
    """Somebody else's lock: three checks, each with how it was made, a second person, a supervisor among the two."""
    made = (
        {c.get("name"): c.get("how") for c in asked if isinstance(c, dict)} if isinstance(asked, list | tuple) else {}
    )
    lacking = [name for name in CHECKS if not str(made.get(name) or "").strip()]
    holder = lock["holder_name"] or lock["holder"]
    if lacking:
        checks = ", ".join(lacking)
        says = f"Lock {lock['lock']} is held by {holder}, who takes it off. Otherwise three checks: {checks}."
        raise Refusal("not-holder", says)
    if not second:
        raise Refusal("second-needed", "A second person is needed to take off this lock.")
    known(state, who)
    known(state, second)
    if second in (who, lock["holder"]):
        raise Refusal("second-needed", "The second person is neither the holder nor who takes the lock off.")
    if not any(answers.has_role(state, one, "supervisor") for one in (who, second)):
        raise Refusal("supervisor-needed", f"A supervisor takes part when the lock of {holder} is taken off.")
    return {"checks": [{"name": name, "how": made[name]} for name in CHECKS], "second": second}


def _earthed(given: Given, step: Plain) -> Plain:
    control = step["control"]
    if any(one["stick"] == control["stick"] for one in given.state["earths"]):
        raise Refusal("stick-on", f"Stick {control['stick']} is on already. Lift it where it is first.")
    return {"stick": control["stick"], "point": control["point"]}


def _lifted(given: Given, step: Plain) -> Plain:
    control = step["control"]
    if not any(one["stick"] == control["stick"] for one in given.state["earths"]):
        raise Refusal("stick-not-on", f"Stick {control['stick']} is not on the board. Count the sticks.")
    return {"stick": control["stick"], "point": control["point"]}


def _chosen(given: Given, step: Plain) -> Plain:
    value = given.asked.get("value")
    if not any(one["value"] == value for one in step["control"]["options"]):
        raise Refusal("unknown-option", "Choose one of the options.")
    return {"value": value}


def _released(given: Given, step: Plain) -> Plain:
    state, control = given.state, step["control"]
    who = given.need("who", "second-needed", "Another person releases this, with their own passphrase.")
    releases(state, control, who)
    return {"who": who, "statement": control["statement"]}


def _pictured(given: Given, step: Plain) -> Plain:
    return {key: value for key, value in given.asked.items() if key not in ("step", "move")}


def _remarked(given: Given, step: Plain) -> Plain:
    text = given.text("text")
    if step["control"]["required"] and not text:
        raise Refusal("nothing-typed", "A remark is asked for here. Write it.")
    return {"text": text}


def _worked_out(given: Given, step: Plain) -> Plain:
    where = names.scope(given.ctx, given.state, given.now)
    return {"value": readings.result_text(given.ctx, where, step["control"])[0]}


def _waited(given: Given, step: Plain) -> Plain:
    return {}


def _people_counted(given: Given, step: Plain) -> Plain:
    control, asked = step["control"], given.asked.get("names")
    place, way = control["place"], control["way"]
    named = [n.strip() for n in asked if isinstance(n, str) and n.strip()] if isinstance(asked, list | tuple) else []
    inside = given.state["hands"].get(place, [])
    if way == "in" and not named:
        raise Refusal("nobody-named", f"Name everyone who puts hands in at the {place}.")
    if way == "out":
        left = [n for n in inside if n not in named]
        if left:
            raise Refusal("people-left", f"Not counted out of the {place}: {', '.join(left)}. Search before you go on.")
    return {"place": place, "way": way, "names": named}


ANSWERS: dict[str, Callable[[Given, Plain], Plain]] = {
    "acknowledged": _acknowledged,
    "confirmed": _confirmed,
    "read": _read,
    "proved": _proved,
    "locked": _locked,
    "unlocked": _unlocked,
    "earthed": _earthed,
    "lifted": _lifted,
    "chosen": _chosen,
    "released": _released,
    "pictured": _pictured,
    "remarked": _remarked,
    "worked-out": _worked_out,
    "waited": _waited,
    "people-counted": _people_counted,
}
