"""What every step kind is: a model of what the writer writes, and a function that lowers it to a piece of the graph.

    KIND = Kind("act", Act, lower)          one module a kind, one line in fieldkit.steps.KINDS

A `Piece` holds the sheet's steps, the moves inside the piece and its exits: moves whose end the compiler fills in,
because the next step may have a `when:`. A kind never branches on what stands before or after it.
Not here: reading values (words), names and conditions (scope, conditions), retries and deviations (failing).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

from fieldkit.errors import Collector
from fieldkit.sheet.controls import Control
from fieldkit.sheet.model import Level, Step
from fieldkit.sheet.moves import Move
from fieldkit.sheet.parts import Condition, Count, Effects, Unit
from fieldkit.steps import conditions, words
from fieldkit.steps.gates import built_in
from fieldkit.steps.scope import Scope
from fieldkit.steps.sources import SETTABLE, SOURCES
from fieldkit.steps.words import Written, key


def _sets(node: Any, found: Collector) -> dict[str, str] | None:
    return words.map_of(words.one_of(*SETTABLE), words.one_of(*SOURCES))(node, found)


#: one or more sources, by name
SOURCE_NAMES = words.list_of(words.one_of(*SOURCES))


def sources_known(written: StepWritten, sources: tuple[str, ...], scope: Scope) -> None:
    """Adds a Problem for each source that the procedure does not declare."""
    for source in sources:
        scope.must_be_source(source, written.value_places.get("sources", written.at("source")))


SETS = words.Word("source: state", _sets)


@dataclass(frozen=True, kw_only=True)
class StepWritten(Written):
    """The keys that every step may have."""

    id: str | None = key(words.name, "the step's name, for formulas and conditions")
    text: str = key(words.text, "what to do, in full; shown under the title", default="")
    why: str = key(words.text, "why the step is there", default="")
    when: tuple[Any, ...] = key(
        words.list_of(words.texts), "conditions; where they do not hold the step is left out", default=()
    )
    needs: tuple[Any, ...] = key(
        words.list_of(words.texts), "conditions that must hold before the step opens", default=()
    )
    not_before: Any = key(words.texts, "a least time after another step: 10 min after heater_on")
    or_else: str | None = key(words.name, "the step to go back to while the conditions of needs do not hold")
    go_on: str | None = key(words.name, "the step to go on at; left out: the next one", name="go to")
    who: str = key(words.one_of("recorder", "second person"), "who does it", default="recorder")


@dataclass(frozen=True, kw_only=True)
class Acting(StepWritten):
    """Keys of a step that changes what the run believes of the plant."""

    sets: dict[str, str] = key(SETS, "states of energy sources after the step", default=None)
    shows: tuple[str, ...] = key(words.list_of(words.text), "facts that hold from now until a pause", default=())


@dataclass
class Exit:
    """A move out of a piece whose end is the next step; `goto` names another one."""

    origin: str
    on: str
    gate: tuple[Condition, ...] = ()
    effects: Effects = Effects()
    manner: str = "plain"
    label: str = ""
    choice: str | None = None
    goto: str | None = None
    #: what an answered choice says: choice step -> the values it can have here
    known: dict[str, frozenset[str]] = field(default_factory=dict)


@dataclass
class Piece:
    entry: str
    steps: list[Step]
    exits: list[Exit]
    moves: list[Move] = field(default_factory=list)
    counters: dict[str, tuple[int, int]] = field(default_factory=dict)


@dataclass(frozen=True)
class Name:
    """A name that a step gives to formulas: a value with a unit, or a choice with its options."""

    name: str
    title: str
    unit: Unit | None = None
    options: tuple[str, ...] = ()


@dataclass(frozen=True)
class Kind:
    word: str
    model: type[StepWritten]
    lower: Callable[[Any, str, Scope], Piece]
    about: str
    #: (written, id) -> the names it gives; and the further steps that it makes, with their titles
    names: Callable[[Any, str], tuple[Name, ...]] = lambda written, id_: ()
    inner: Callable[[Any, str], dict[str, str]] = lambda written, id_: {}


def make_step(
    id_: str,
    kind: str,
    title: str,
    control: Control,
    written: StepWritten,
    level: Level | None = None,
    text: str | None = None,
) -> Step:
    """The sheet's step; the compiler fills in number and section."""
    return Step(
        id=id_,
        number="",
        kind=kind,
        title=title,
        text=written.text if text is None else text,
        why=written.why,
        level=level,
        control=control,
        who=written.who,  # type: ignore[arg-type]
        line=written.place.line,
    )


def gate(written: StepWritten, scope: Scope, sets: dict[str, str] | None = None) -> tuple[Condition, ...]:
    """What must hold before the step is taken: its `needs`, its `not_before`, and what its effects need by rule."""
    found: list[Condition] = []
    for scalar in written.needs:
        found += conditions.read(scalar, scope).conditions
    if written.not_before is not None:
        found += conditions.read_after(written.not_before, scope).conditions
    found += built_in(sets or {}, scope, written.at("sets"))
    return conditions.distinct(found)


def effects(written: Acting, extra: tuple[Count, ...] = ()) -> Effects:
    return Effects(sets=written.sets or {}, shows=written.shows, counts=extra)  # type: ignore[arg-type]


def simple(kind: str, title: str, control: Control, written: StepWritten, id_: str, scope: Scope) -> Piece:
    """A piece of one step with one way on: what most kinds are."""
    what = effects(written) if isinstance(written, Acting) else Effects()
    opens = gate(written, scope, dict(what.sets))
    return one_step(kind, title, control, written, id_, opens, what, scope)


def one_step(
    kind: str,
    title: str,
    control: Control,
    written: StepWritten,
    id_: str,
    opens: tuple[Condition, ...],
    what: Effects,
    scope: Scope,
) -> Piece:
    """A piece of one step that is answered with `done`: gated by `opens`, with the effects `what`."""
    exits = [Exit(id_, "done", opens, what), *other_way(written, id_, "done", opens, scope)]
    return Piece(id_, [make_step(id_, kind, title, control, written)], exits)


def other_way(written: StepWritten, id_: str, on: str, opens: tuple[Condition, ...], scope: Scope) -> list[Exit]:
    """The way back that `or_else` gives while conditions do not hold that time alone does not open."""
    if written.or_else is None:
        return []
    scope.must_be_step(written.or_else, written.at("or_else"))
    lasting = [c for c in opens if c.clock is None]
    if not lasting:
        remedy = "write needs: with the conditions, or delete or_else"
        scope.found.add(written.at("or_else"), "no-needs", "or_else stands here without needs", remedy)
        return []
    label = f"Too late or not so: back to {scope.title_of(written.or_else)}"
    return [Exit(id_, on, (conditions.negate(lasting),), label=label, goto=written.or_else)]
