"""The start of a run, the energy states declared at it, and those confirmed after a pause.

Twin: static/core/start.js. Not here: answers to steps (fieldkit.run.rules).
"""

from __future__ import annotations

from typing import Any

from fieldkit import values
from fieldkit.errors import Refusal
from fieldkit.run import clock, names
from fieldkit.run.command import Given, checked
from fieldkit.run.moves import State
from fieldkit.run.names import Context, Scope

Plain = dict[str, Any]

#: states that a lock on the board goes with
ISOLATED = ("locked", "proved", "earthed")


def started(given: Given) -> Plain:
    """The body of the first event. `facts` of the command: {"confirmed": the tube's nameplate was entered twice}."""
    body = checked(given.kind, given.asked)
    if given.facts.get("confirmed") is not True:
        says = "counts only when a second person has entered it again and it has a photograph."
        raise Refusal("nameplate-not-confirmed", f"The nameplate of {body['tube']} {says}")
    begins(given.ctx, body, given.by, given.now["wall"])
    return body


def begins(ctx: Context, body: Plain, by: str, wall: str) -> None:
    """Refuses a start that the sheet does not allow: its crew, its givens, its instruments, the runs before it."""
    sheet = ctx.sheet
    if body["procedure"] != sheet["procedure"] or body["edition"] != sheet["edition"]:
        raise Refusal(
            "other-sheet", f"This is {sheet['procedure']}, edition {sheet['edition']}. Open the run from its own sheet."
        )
    _crew(sheet, body, by)
    for one in sheet["givens"]:
        _given(one, body["givens"].get(one["name"]))
    _meters(ctx, body)
    for after in sheet["after"]:
        _after(after, body, wall)


def _crew(sheet: Plain, body: Plain, by: str) -> None:
    known = {person["id"] for person in body["people"]}
    present = list(dict.fromkeys(body["present"]))
    unknown = [p for p in present if p not in known]
    if unknown or by not in present:
        raise Refusal("unknown-person", "Everyone present is named, and whoever records is among them.")
    if len(present) < sheet["crew"]:
        alone = f" {sheet['alone']}" if sheet["alone"] else ""
        raise Refusal("alone", f"This procedure needs {sheet['crew']} people, and {len(present)} is named.{alone}")


def _given(asked: Plain, found: Plain | None) -> None:
    """A given of the sheet is there, in the sheet's unit, a number where it must be, and inside its plausible range."""
    name = asked["name"]
    if found is None or not found["texts"] or not all(t.strip() for t in found["texts"]):
        raise Refusal("given-missing", f"The register has no {name}. Enter it there first.")
    if asked["kind"] == "text":
        return
    symbol = asked["unit"]["symbol"] if asked["unit"] else ""
    if found["unit"] != symbol:
        said = f"{name} is in {found['unit'] or 'no unit'} in the register; this sheet needs {symbol or 'no unit'}."
        raise Refusal("given-unit", said)
    for text in found["texts"]:
        typed = values.typed(text)
        if isinstance(typed, Refusal):
            raise Refusal("given-no-number", f"{name} says '{text}' in the register. {typed.sentence}")
        if asked["between"] is None:
            continue
        low, high = (values.dec(edge) for edge in asked["between"])
        if values.compare(typed, low) < 0 or values.compare(typed, high) > 0:
            span = f"{asked['between'][0]} to {asked['between'][1]} {symbol}".strip()
            raise Refusal(
                "given-range", f"{name} is {text} {symbol} in the register; {span} is plausible. Look at the nameplate."
            )


def _meters(ctx: Context, body: Plain) -> None:
    """Every meter that a step asks for is aboard."""
    aboard = {one["id"] for one in body["instruments"]}
    for step in ctx.sheet["steps"]:
        meter = step["control"].get("meter") or step["control"].get("tester")
        if not meter:
            continue
        name = meter["instrument"] or body["meters"].get(meter["role"])
        if name not in aboard:
            asked = meter["instrument"] or meter["role"]
            raise Refusal(
                "no-instrument", f"Step {step['number']} reads {asked}, and the register has no such instrument."
            )


def _after(asked: Plain, body: Plain, wall: str) -> None:
    """A finished run of the procedure that comes before, on the same tube, not too long ago."""
    now = clock.wall_ms(wall)
    for run in body["earlier"]:
        if run["procedure"] != asked["procedure"] or run["outcome"] != "done":
            continue
        ended = clock.wall_ms(run["ended"])
        if asked["within"] is None or (
            now is not None and ended is not None and now - ended <= _within_ms(asked["within"])
        ):
            return
    raise Refusal("needs-before", f"Before this: {asked['says']}.")


def _within_ms(text: str) -> int:
    return clock.millis(text) or 0


def declared(given: Given) -> Plain:
    """The energy states as found: against the sheet, and against the lock board. Nothing opens where they differ."""
    body = checked(given.kind, {"ages": {}, **given.asked, "locks": _found(given)})
    agrees(given.ctx, given.state, names.scope(given.ctx, given.state, given.now), body)
    return body


def agrees(ctx: Context, state: State, where: Scope, body: Plain) -> None:
    """Refuses declared states that differ from the sheet or from the lock board."""
    if not body["board_seen"]:
        raise Refusal("board-not-seen", "Look at the lock board first.")
    _complete(ctx, body["states"])
    for name in body["states"]:
        _expected(ctx, where, name, body)
        _board(ctx, state, name, body)


def _found(given: Given) -> list[Plain]:
    """Locks that are on the cabinet and not on the board, as named now: point, sources, lock, holder."""
    asked, people = given.asked.get("locks"), given.state["started"]["people"]
    found: list[Plain] = []
    for one in asked if isinstance(asked, list | tuple) else []:
        if not isinstance(one, dict):
            raise Refusal("bad-command", "A lock is named by its point, sources, number and holder.")
        lock = {key: one.get(key) for key in ("point", "sources", "lock", "tag", "holder", "holder_name")}
        lock["tag"] = lock["tag"] or ""
        known = next((person["name"] for person in people if person["id"] == lock["holder"]), lock["holder_name"])
        if not all(_written(lock[key]) for key in ("point", "lock")) or not known:
            raise Refusal("lock-unnamed", "Name the point, the number and the holder of every lock that is on.")
        if any(lock["lock"] == other["lock"] for other in [*given.state["locks"], *found]):
            raise Refusal("lock-in-use", f"Lock {lock['lock']} is on the board already. Read its number again.")
        holder = {"holder": lock["holder"] or "", "holder_name": known}
        found.append({**lock, **holder, "run": given.state["run"], "since": given.now["wall"]})
    return found


def _complete(ctx: Context, states: Plain) -> None:
    for name in states:
        if name not in ctx.sources:
            raise Refusal("unknown-source", f"The sheet knows no source '{name}'.")
    for name, source in ctx.sources.items():
        if (source["isolable"] or name in ctx.sheet["start"]) and name not in states:
            raise Refusal("states-missing", f"Say how {source['title']} is.")


def _expected(ctx: Context, where: Scope, name: str, body: Plain) -> None:
    expected, title = ctx.sheet["start"].get(name), ctx.sources[name]["title"]
    if expected is None:
        return
    allowed = [expected["state"], *expected["accepts"]]
    if body["states"][name] not in allowed:
        begins = f"this procedure begins with it {' or '.join(allowed)}"
        says = f"{title} is {body['states'][name]}; {begins}. Nothing opens until it is so."
        raise Refusal("state-differs", says)
    if expected["least"] is None or body["states"][name] != expected["state"]:
        return
    least = names.value(ctx, where, expected["least"])
    age = clock.millis(body["ages"].get(name, "0"))
    if age is None or isinstance(least, bool) or not isinstance(least, float) or age / 1000.0 < least:
        need = clock.spoken(clock.ceil_ms(least)) if isinstance(least, float) else "longer"
        raise Refusal("age-too-short", f"{title} must have been {expected['state']} for {need}.")


def _written(text: Any) -> bool:
    return isinstance(text, str) and bool(text.strip())


def _board(ctx: Context, run: State, name: str, body: Plain) -> None:
    """The lock board, with the locks that were found, and what is declared say the same; no proof is declared."""
    title, state = ctx.sources[name]["title"], body["states"][name]
    if state == "proved":
        raise Refusal("proof-expired", f"{title} is locked at best: a proof counts only in the run that made it.")
    locks = [lock for lock in [*run["locks"], *body["locks"]] if name in lock["sources"]]
    earths = [earth for earth in run["earths"] if earth["source"] == name]
    if locks and state not in ISOLATED:
        told = "; ".join(
            f"lock {one['lock']} on {one['point']}, held by {one['holder_name'] or one['holder']}" for one in locks
        )
        raise Refusal("locked-on-board", f"{title} is declared {state}, and the board shows {told}.")
    if not locks and state in ISOLATED:
        raise Refusal(
            "no-lock-on-board",
            f"{title} is declared {state}, and the board shows no lock for it. Name the lock and its holder.",
        )
    if earths and state != "earthed":
        sticks = ", ".join(one["stick"] for one in earths)
        raise Refusal("earth-on-board", f"{title} is declared {state}, and the board shows stick {sticks} on it.")
    if not earths and state == "earthed":
        raise Refusal("no-earth-on-board", f"{title} is declared earthed, and the board shows no stick on it.")


def confirmed(given: Given) -> Plain:
    """The energy states after a pause. A state that differs is not refused: it is recorded, and stops the run."""
    body = checked(given.kind, {"unbroken": [], **given.asked})
    goes_on(given.ctx, given.state, body)
    return body


def goes_on(ctx: Context, state: State, body: Plain) -> None:
    """Refuses confirmed states that leave a source out, keep a proof through the pause, or claim what did not hold."""
    _complete(ctx, body["states"])
    for name, to in body["states"].items():
        kept = state["sources"][name]
        if to == "proved" and kept["state"] == "locked":
            title = ctx.sources[name]["title"]
            raise Refusal(
                "proof-expired", f"The proof that {title} is dead ended with the pause. It is locked; prove it again."
            )
    for name in body["unbroken"]:
        if name not in state["sources"] or body["states"].get(name) != state["sources"][name]["state"]:
            raise Refusal("not-unbroken", f"{name} did not hold through the pause as it was.")
