"""Steps that are judged (read, prove, work_out): their common keys, and the moves that follow a pass and a fail.

`on_fail` is a list, offered in the order written; stopping to make safe is always the last of it:

    make safe            stop
    again 2              take it again, at most twice, with a reason; every value is kept
    deviation            a supervisor accepts it with a reason, on the tablet
    back to STEP, 3 times    after a repair: go on from an earlier step
    go to STEP           go on at another step

Not here: which outcome a verdict is (fieldkit.run.judge).
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Any

from fieldkit.sheet.moves import SAFE, Move
from fieldkit.sheet.parts import Condition, Count, Effects
from fieldkit.steps import base, words
from fieldkit.steps.base import Acting, Exit
from fieldkit.steps.conditions import call, named, number
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import key
from fieldkit.yaml_source import Scalar

ON_FAIL = "make safe; again 2; deviation; back to STEP, 3 times; go to STEP"
_AGAIN = re.compile(r"again (\d{1,2})\Z")
_BACK = re.compile(r"back to ([a-z][a-z0-9_]*), (\d{1,2}) times?\Z")
_GO = re.compile(r"go to ([a-z][a-z0-9_]*)\Z")


@dataclass(frozen=True, kw_only=True)
class Judged(Acting):
    """Keys of a step that is judged against limits."""

    limits: Any = key(words.texts, "where the value must lie: 6.10 V to 6.50 V, at most ion_back")
    caution_band: Any = key(words.texts, "inside the limits; a value outside it deserves attention, the verdict stays")
    guarded: bool = key(
        words.yes_no, "pull the limits in by the uncertainty of the meter, or of the result", default=False
    )
    limit_name: str = key(words.text, "where the limits come from, in words", default="")
    typical: Any = key(words.texts, "what common practice expects; a value outside it only warns")
    plate: Any = key(words.texts, "the nameplate's value, drawn as a chain line")
    protects: bool = key(
        words.yes_no, "people are protected by it: only a plain pass opens the next step", default=False
    )
    on_fail: tuple[Any, ...] = key(words.list_of(words.texts), f"what a fail offers: {ON_FAIL}", default=())


@dataclass
class Ways:
    """What follows a judged step: exits, moves inside, counters."""

    exits: list[Exit]
    moves: list[Move]
    counters: dict[str, tuple[int, int]]


def ways(written: Judged, id_: str, scope: Scope, opens: tuple[Condition, ...], passing: Effects) -> Ways:
    """Exits and moves after the judgement; `passing` are a pass's effects, `opens` gates every way but stopping."""
    out = Ways([], [], {})
    again = f"again:{id_}"
    for scalar in written.on_fail:
        text = " ".join(scalar.text.split())
        if match := _AGAIN.match(text):
            out.counters[again] = (0, int(match[1]))
            out.moves.append(_again(id_, again, int(match[1]), opens))
        elif text == "deviation":
            _deviation(written, id_, scalar, opens, scope, out)
        elif match := _BACK.match(text):
            _back(id_, match, scalar, scope, out)
        elif match := _GO.match(text):
            if scope.must_be_step(match[1], scalar.place, before=False):
                out.exits.append(Exit(id_, "fail", opens, label=f"Go on at {scope.title_of(match[1])}", goto=match[1]))
        elif text != "make safe":
            remedy = f"{words.near(text, ['make safe', 'again 2', 'deviation'])}write one or more of: {ON_FAIL}"
            scope.found.add(scalar.place, "unknown-way", f'"{text}" is nothing that a fail can offer', remedy)
    out.moves.append(stop(id_))
    counts = passing.counts + ((Count(counter=again, to=0),) if again in out.counters else ())
    passed = passing.model_copy(update={"counts": counts})
    out.exits.insert(0, Exit(id_, "pass", opens, passed))
    out.exits += base.other_way(written, id_, "pass", opens, scope)
    return out


def stop(id_: str, gate: tuple[Condition, ...] = (), on: str = "fail", name: str = "") -> Move:
    """The move to make safe: no gate needs to hold for it, unless a rule asks for stopping only then."""
    label = "Stop and make safe"
    return Move(id=f"{id_}:{on}:safe{name}", origin=id_, to=SAFE, on=on, manner="stop", label=label, gate=gate)  # type: ignore[arg-type]


def fewer(counter: str, most: int, done: str) -> Condition:
    """The condition that caps a counter at `most`; `done` says what is counted: "been taken again"."""
    says = f"it has not {done} yet" if most == 1 else f"it has {done} fewer than {most} times"
    return Condition(says=says, tree=call("lt", named(f"count:{counter}"), number(most)))


def _again(id_: str, counter: str, most: int, opens: tuple[Condition, ...]) -> Move:
    cap = fewer(counter, most, "been taken again")
    return Move(
        id=f"{id_}:again", origin=id_, to=id_, on="fail", manner="again", label="Take it again",
        gate=(*opens, cap), effects=Effects(counts=(Count(counter=counter, by=1),)),
    )  # fmt: skip


def _deviation(written: Judged, id_: str, scalar: Scalar, opens: Any, scope: Scope, out: Ways) -> None:
    if written.protects:
        remedy = "delete deviation, or delete protects: where nobody is protected by it"
        scope.found.add(scalar.place, "deviation-protects", "a deviation is offered where people are protected", remedy)
    accepted = Effects(sets=written.sets or {})  # type: ignore[arg-type]
    out.exits.append(Exit(id_, "fail", opens, accepted, manner="deviation", label="Accept as a deviation"))


def _back(id_: str, match: re.Match[str], scalar: Scalar, scope: Scope, out: Ways) -> None:
    if not scope.must_be_step(match[1], scalar.place):
        return
    counter, most = f"back:{id_}", int(match[2])
    out.counters[counter] = (0, most)
    cap = fewer(counter, most, "gone back")
    label = f"Repaired: back to {scope.title_of(match[1])}"
    counts = Effects(counts=(Count(counter=counter, by=1),))
    out.exits.append(Exit(id_, "fail", (cap,), counts, label=label, goto=match[1]))
