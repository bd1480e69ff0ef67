"""raise: up a ladder of levels that the cabinet's supply really has, reading at each; stay or fall back by rule.

One level is a ladder too. It lowers to steps shared by all levels; a counter says which level it is:

    ID_first   wait until the first level has settled        (where `from:` names the step that put it on)
    ID_set     act: set the next level                       ID_down   act: set one level lower
    ID_settle  wait after ID_set                             ID_rest   wait after ID_down
    the reads  every one at each level; the last one rules
    ID_stay    wait, then the ruling reading again           ID_hold   wait while it is low enough
    RULING_held  the ruling reading again after that         its moves: up, stay, back, stop, or on after the top

ID_set is closed while the held reading is older than settle and rest together (a pause, a talk); then the ruling
reading is taken again at the level where the supply stands.
Counters: ID_level (0 is the first level), ID_backs (falls in all), ID_backs_N (falls from level N).
Not here: what reading is taken (fieldkit.steps.read); a level is never chosen by the person, only by these moves.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

from fieldkit.errors import Collector
from fieldkit.sheet.controls import Confirm, Wait
from fieldkit.sheet.model import Level, Step
from fieldkit.sheet.moves import Move
from fieldkit.sheet.parts import Condition, Count, Effects, Tree, Unit
from fieldkit.steps import base, judged, read, words
from fieldkit.steps.base import Acting, Exit, Kind, Name, Piece
from fieldkit.steps.conditions import any_of, at_least, call, named, negate, number
from fieldkit.steps.read import Read
from fieldkit.steps.scope import NOTHING, Scope
from fieldkit.steps.words import Written, key
from fieldkit.yaml_source import Node, Scalar, Sequence

#: the most levels for which falls are counted one by one; above it a fall makes safe
MOST_LEVELS = 12
_AT_FIRST = re.compile(r"go to ([a-z][a-z0-9_]*), (\d{1,2}) times?\Z")


@dataclass(frozen=True, kw_only=True)
class Rule(Written):
    """What the ruling reading decides."""

    up: Any = key(words.texts, "up while it is at most this", required=True)
    held: Any = key(words.texts, "for this long: 30 s", required=True)
    back: Any = key(words.texts, "one level back when it is this or more", required=True)
    rest: Any = key(words.texts, "wait after going back: 3 min", required=True)
    stop: Any = key(words.texts, "make safe when it is this or more", required=True)
    most: int = key(words.whole(1, 20), "the fall in all that makes safe: 3", required=True, name="backs")
    most_at_one: int | None = key(
        words.whole(1, 20), "the fall from one level that makes safe: 2", name="backs_at_one_level"
    )
    at_first: Any = key(words.texts, "a fall from the first level: make safe, or go to STEP, 3 times", required=True)


@dataclass(frozen=True, kw_only=True)
class Raise(Acting):
    title: str = key(words.text, "what is raised", required=True, name="raise")
    levels: Any = key(words.node, "a given of levels, or a list of formulas", required=True)
    unit: Unit | None = key(words.unit, "unit of the levels, where they are a list")
    start: str | None = key(words.name, "the step that put the first level on", name="from")
    set: str = key(words.text, "the act at each level", required=True)
    down: str = key(words.text, "the act that goes one level back", required=True)
    button: str = key(words.text, "what the button of both acts says", default="Level is set")
    settle: Any = key(words.texts, "wait at each level before reading: 60 s", required=True)
    reads: tuple[Read, ...] = key(
        words.Word("a list of read steps", lambda node, found: _reads(node, found)),
        "the readings; the last one rules",
        required=True,
    )
    rule: Rule = key(
        words.Word("up, held, back, ...", lambda node, found: words.read_model(Rule, node, found, "a ladder's rule")),
        "what the last reading decides", required=True,
    )  # fmt: skip


def _reads(node: Node, found: Collector) -> tuple[Read, ...] | None:
    if not isinstance(node, Sequence) or not node.items:
        found.add(node.place, "wrong-form", "the reads are no list", "write - read: ... for each")
        return None
    out = [words.read_model(Read, item, found, "a read step") for item in node]
    for one in out:
        if one is not None and one.id is None:
            found.add(one.place, "missing-key", "a read of a ladder has no id", "write id: and a name")
            return None
    return None if any(r is None for r in out) else tuple(r for r in out if r is not None)


@dataclass(frozen=True)
class Ladder:
    """What the parts of one ladder have in common."""

    id: str
    written: Raise
    unit: Unit
    level: Tree
    count: Tree
    most_levels: int
    opens: tuple[Condition, ...]

    @property
    def rung(self) -> str:
        return f"{self.id}_level"

    @property
    def shown(self) -> Level:
        return Level(value=self.level, unit=self.unit)

    def at_level(self, index: int) -> Condition:
        says = "it is at the first level" if index == 0 else f"it is at level {index + 1}"
        return Condition(says=says, tree=call("eq", named(f"count:{self.rung}"), number(index)))

    def top(self, is_top: bool) -> Condition:
        last = call("ge", call("add", named(f"count:{self.rung}"), number(1)), self.count)
        says = "it is at the top level" if is_top else "there is a level above"
        return Condition(says=says, tree=last if is_top else call("not", last))


def _ladder(written: Raise, id_: str, scope: Scope) -> Ladder:
    opens = base.gate(written, scope, written.sets)
    counter = named(f"count:{id_}_level")
    if isinstance(written.levels, Scalar):
        name = written.levels.text.strip()
        if name not in scope.levels:
            remedy = f"{words.near(name, scope.levels)}declare it under givens: with levels: yes, or write a list"
            scope.found.add(written.levels.place, "unknown-levels", f'"{name}" is no given of levels', remedy)
            return Ladder(id_, written, words.NO_UNIT, NOTHING, NOTHING, MOST_LEVELS, opens)
        series: Tree = {"series": name}
        level, length = call("at", series, counter), call("length", series)
        return Ladder(id_, written, scope.levels[name], level, length, MOST_LEVELS, opens)
    unit = written.unit or words.NO_UNIT
    items = [i for i in getattr(written.levels, "items", ()) if isinstance(i, Scalar)]
    if not items or not isinstance(written.levels, Sequence) or len(items) != len(written.levels.items):
        scope.found.add(
            written.levels.place, "unknown-levels", "no levels stand here", "write a given of levels, or a list"
        )
        return Ladder(id_, written, unit, NOTHING, NOTHING, MOST_LEVELS, opens)
    trees = [scope.tree(item, unit) for item in items]
    level = trees[-1]
    for index in range(len(trees) - 2, -1, -1):
        level = call("if", call("eq", counter, number(index)), trees[index], level)
    return Ladder(id_, written, unit, level, number(len(trees)), len(trees), opens)


def lower(written: Raise, id_: str, scope: Scope) -> Piece:
    ladder = _ladder(written, id_, scope)
    ruling = written.reads[-1]
    if ruling.on_fail:
        scope.found.add(
            ruling.at("on_fail"), "ladder-on-fail", "the ruling reading has on_fail", "delete it: the rule decides"
        )
    piece = Piece("", [], [])
    with scope.level(ladder.level, ladder.unit):
        first_read = written.reads[0].id or ""
        _waits_and_acts(ladder, first_read, piece, scope)
        _other_reads(ladder, piece, scope)
        _ruling(ladder, piece, scope)
    piece.counters[ladder.rung] = (0, ladder.most_levels - 1)
    return piece


def _wait(
    ladder: Ladder, name: str, title: str, clock: str, least: Any, to: str, scope: Scope, counts: tuple[Count, ...] = ()
) -> tuple[Step, Move]:
    tree = scope.tree(least, words.SECOND)
    since = scope.steps.get(clock, (0, clock.rsplit("_", 1)[-1]))[1]
    says = f"{scope.says(' '.join(least.text.split()))} have passed since “{since}”"
    depends = next(iter(ladder.written.sets or {}), None)
    control = Wait(clock=f"since:{clock}", least=tree, depends=depends, why=ladder.written.why)
    id_ = f"{ladder.id}_{name}"
    step = base.make_step(id_, "raise", title, control, ladder.written, ladder.shown, text="")
    gate = (at_least(f"since:{clock}", tree, says),)
    return step, Move(id=f"{id_}:done", origin=id_, to=to, on="done", gate=gate, effects=Effects(counts=counts))


def _fresh(ladder: Ladder, scope: Scope) -> Condition:
    """The held reading is young: nobody goes up on one from before a pause. Nothing was held before the first level."""
    rule, settle = ladder.written.rule, ladder.written.settle
    held = f"{ladder.written.reads[-1].id}_held"
    most = call("add", scope.tree(settle, words.SECOND), scope.tree(rule.rest, words.SECOND))
    young = call("le", named(f"oldest-since:{held}"), most)
    says = f"“{scope.title_of(held)}” is at most {scope.says(settle.text)} + {scope.says(rule.rest.text)} old"
    at_first = call("eq", named(f"count:{ladder.rung}"), number(0))
    return Condition(says=says, tree=young if ladder.written.start is not None else any_of([at_first, young]))


def _act(ladder: Ladder, name: str, title: str, to: str, opens: tuple[Condition, ...] = ()) -> tuple[Step, Move]:
    id_, written = f"{ladder.id}_{name}", ladder.written
    step = base.make_step(id_, "raise", title.rstrip("."), Confirm(button=written.button), written, ladder.shown)
    effects = base.effects(written) if name == "set" else Effects()
    return step, Move(id=f"{id_}:done", origin=id_, to=to, on="done", gate=opens, effects=effects)


def _waits_and_acts(ladder: Ladder, first_read: str, piece: Piece, scope: Scope) -> None:
    written, id_ = ladder.written, ladder.id
    ruling = written.reads[-1].id or ""
    rows = []
    if written.start is not None:
        scope.must_be_step(written.start, written.at("start"))
        start = (Count(counter=ladder.rung, to=0),)
        rows.append(
            _wait(ladder, "first", f"{written.title}: settle", written.start, written.settle, first_read, scope, start)
        )
    fresh = _fresh(ladder, scope)
    rows.append(_act(ladder, "set", written.set, f"{id_}_settle", (*ladder.opens, fresh)))
    back = f"Too late: read {words.plain(written.reads[-1].title)} again"
    gate = (negate([fresh]), *(c for c in ladder.opens if c.clock is None))
    lower_again = Effects(counts=(Count(counter=ladder.rung, by=-1),))
    reread = Move(
        id=f"{id_}_set:reread", origin=f"{id_}_set", to=ruling, on="done", label=back, gate=gate, effects=lower_again
    )
    piece.moves.append(reread)
    piece.exits += base.other_way(written, f"{id_}_set", "done", ladder.opens, scope)
    rows.append(_wait(ladder, "settle", f"{written.title}: settle", f"{id_}_set", written.settle, first_read, scope))
    #: a fall lowers energy and is never gated
    rows.append(_act(ladder, "down", written.down, f"{id_}_rest"))
    rows.append(
        _wait(
            ladder,
            "rest",
            f"{written.title}: rest after going back",
            f"{id_}_down",
            written.rule.rest,
            first_read,
            scope,
        )
    )
    rows.append(_wait(ladder, "stay", f"{written.title}: stay at this level", ruling, written.settle, ruling, scope))
    rows.append(
        _wait(
            ladder, "hold", f"{written.title}: hold at this level", ruling, written.rule.held, f"{ruling}_held", scope
        )
    )
    piece.entry = rows[0][0].id
    piece.steps += [step for step, _ in rows]
    piece.moves += [move for _, move in rows]


def _other_reads(ladder: Ladder, piece: Piece, scope: Scope) -> None:
    reads = ladder.written.reads
    for one, following in pairwise(reads):
        part = read.lower(one, one.id or "", scope, ladder.shown)
        piece.steps += [replace_kind(s) for s in part.steps]
        piece.moves += part.moves
        piece.counters |= part.counters
        for way in part.exits:
            if way.goto is None:
                piece.moves.append(move_of(way, following.id or ""))
            else:
                piece.exits.append(way)


def replace_kind(step: Step) -> Step:
    return step.model_copy(update={"kind": "raise"})


def move_of(way: Exit, to: str) -> Move:
    return Move(
        id=f"{way.origin}:{way.on}:{to}", origin=way.origin, to=to, on=way.on, choice=way.choice,  # type: ignore[arg-type]
        manner=way.manner, label=way.label, gate=way.gate, effects=way.effects,  # type: ignore[arg-type]
    )  # fmt: skip


def _ruling(ladder: Ladder, piece: Piece, scope: Scope) -> None:
    """Both ruling readings and what each decides: up (only the held one), stay, back, stop."""
    ruling = ladder.written.reads[-1]
    name = ruling.id or ""
    control = read.control(ruling, scope)
    for id_, title in ((name, ruling.title), (f"{name}_held", f"{ruling.title}, held")):
        step = base.make_step(id_, "raise", title, control, ruling, ladder.shown)
        piece.steps.append(step)
        _decide(ladder, id_, id_ != name, piece, scope)


def _decide(ladder: Ladder, id_: str, held: bool, piece: Piece, scope: Scope) -> None:
    written, rule = ladder.written, ladder.written.rule
    ruling = written.reads[-1]
    value, unit = named(id_), ruling.unit
    what = words.plain(ruling.title)
    hold, back, stop = (scope.tree(s, unit) for s in (rule.up, rule.back, rule.stop))
    says = {
        n: scope.says(" ".join(s.text.split())) for n, s in (("up", rule.up), ("back", rule.back), ("stop", rule.stop))
    }
    low = Condition(says=f"the {what} is at most {says['up']}", tree=call("le", value, hold))
    not_low = Condition(says=f"the {what} is above {says['up']}", tree=call("gt", value, hold))
    high = Condition(says=f"the {what} is {says['back']} or more", tree=call("ge", value, back))
    not_high = Condition(says=f"the {what} is below {says['back']}", tree=call("lt", value, back))
    not_stop = Condition(says=f"the {what} is below {says['stop']}", tree=call("lt", value, stop))
    if held:
        piece.moves.append(
            Move(id=f"{id_}:up", origin=id_, to=f"{ladder.id}_set", on="pass", gate=(low, ladder.top(False)),
                 label="Up one level", effects=Effects(counts=(Count(counter=ladder.rung, by=1),)))
        )  # fmt: skip
        piece.exits.append(Exit(id_, "pass", (low, ladder.top(True)), Effects(shows=ruling.shows)))
    else:
        piece.moves.append(Move(id=f"{id_}:hold", origin=id_, to=f"{ladder.id}_hold", on="pass", gate=(low,)))
    stay = ruling.id if held else f"{ladder.id}_stay"
    piece.moves.append(Move(id=f"{id_}:stay", origin=id_, to=stay or "", on="pass", gate=(not_low, not_high)))
    for on, asked in (("pass", (not_low, high, not_stop)), ("fail", (not_stop,))):
        _falls(ladder, id_, on, asked, piece, scope)
    piece.moves.append(judged.stop(id_))
    stops = Condition(
        says=f"the {what} is {says['stop']} or more, or it fell back too often",
        tree=call("and", high.tree, call("gt", value, hold)),
    )
    piece.moves.append(judged.stop(id_, (stops,), on="pass", name=":rule"))


def _falls(ladder: Ladder, id_: str, on: str, asked: tuple[Condition, ...], piece: Piece, scope: Scope) -> None:
    """One move for each level that it can fall from, so that falls from one level are counted."""
    rule, backs = ladder.written.rule, f"{ladder.id}_backs"
    piece.counters[backs] = (0, max(0, rule.most - 1))
    capped = judged.fewer(backs, rule.most - 1, "fallen back")
    one_less = Count(counter=ladder.rung, by=-1)
    per_level = rule.most_at_one is not None and rule.most_at_one < rule.most
    for index in range(1, ladder.most_levels):
        own = f"{backs}_{index + 1}"
        counts: tuple[Count, ...] = (one_less, Count(counter=backs, by=1))
        gate = (*asked, capped, ladder.at_level(index))
        if per_level:
            assert rule.most_at_one is not None
            piece.counters[own] = (0, max(0, rule.most_at_one - 1))
            counts = (*counts, Count(counter=own, by=1))
            times = rule.most_at_one - 1
            gate = (*gate, judged.fewer(own, times, "fallen back from this level"))
        to = f"{ladder.id}_down"
        piece.moves.append(
            Move(id=f"{id_}:{on}:back{index + 1}", origin=id_, to=to, on=on, label="Back one level",  # type: ignore[arg-type]
                 gate=gate, effects=Effects(counts=counts))
        )  # fmt: skip
    _fall_from_first(ladder, id_, on, (*asked, ladder.at_level(0)), piece, scope)


def _fall_from_first(
    ladder: Ladder, id_: str, on: str, gate: tuple[Condition, ...], piece: Piece, scope: Scope
) -> None:
    scalar = ladder.written.rule.at_first
    text = " ".join(scalar.text.split())
    match = _AT_FIRST.match(text)
    if match and scope.must_be_step(match[1], scalar.place, before=False):
        counter, most = f"{ladder.id}_first_backs", int(match[2])
        piece.counters[counter] = (0, most)
        cap = judged.fewer(counter, most, "fallen from the first level")
        counts = Effects(counts=(Count(counter=counter, by=1),))
        piece.exits.append(Exit(id_, on, (*gate, cap), counts, label="Back from the first level", goto=match[1]))
    elif not match and text != "make safe":
        scope.found.add(scalar.place, "unknown-way", f'"{text}" says no way', "write make safe, or go to STEP, 3 times")


def names(written: Raise, id_: str) -> tuple[Name, ...]:
    reads = tuple(Name(r.id, r.title, r.unit) for r in written.reads if r.id)
    ruling = written.reads[-1]
    return (*reads, Name(f"{ruling.id}_held", f"{ruling.title}, held", ruling.unit))


def inner(written: Raise, id_: str) -> dict[str, str]:
    waits = {f"{id_}_{n}": f"{written.title}: {n}" for n in ("first", "settle", "rest", "stay", "hold")}
    return {**waits, f"{id_}_set": written.set, f"{id_}_down": written.down}


KIND = Kind("raise", Raise, lower, "up a ladder of levels, reading at each", names, inner)
