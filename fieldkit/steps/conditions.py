"""Conditions in words: what `needs:`, `when:` and `rules:` may say, and the Condition of the sheet that each becomes.

    heater on | bias on or cut-off | heater on for 15 min      a source's state, and for how long
    nobody anywhere | nobody at deck                           people signed in
    every earth lifted | deck safe                             earths; every source that reaches a place made dead
    lock on Q1 | no lock on Q1                                 the lock board and this run
    history is cold | history is cold or stored                a choice made before, or a text given
    10 min after heater_on | ion within 2 min                  least age, greatest age of a step
    vacuum good                                                a fact that a step shows
    ion <= ion_hold                                            a formula that says yes or no

To add a form: a row in `_FORMS` and a function that gives a Phrase.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable
from dataclasses import dataclass, field

from fieldkit.sheet.parts import SOURCE_STATES, Condition, Tree
from fieldkit.steps import words
from fieldkit.steps.scope import NOTHING, Scope
from fieldkit.steps.sources import SOURCES, says_state
from fieldkit.yaml_source import Scalar

FORMS = (
    "heater on",
    "bias on or cut-off",
    "heater on for 15 min",
    "nobody anywhere",
    "nobody at PLACE",
    "every earth lifted",
    "PLACE safe",
    "lock on POINT",
    "no lock on POINT",
    "CHOICE is OPTION",
    "10 min after STEP",
    "STEP within 2 min",
    "a fact that a step shows",
    "a comparison as in ion <= ion_hold",
)


@dataclass(frozen=True)
class Phrase:
    """One written condition: all of `conditions` must hold. `choice` says which options of a choice it lets through."""

    text: str
    conditions: tuple[Condition, ...]
    choice: tuple[str, frozenset[str]] | None = None
    place: object = field(default=None, compare=False)


def call(function: str, *of: Tree) -> Tree:
    return {"call": function, "of": list(of)}


def named(name: str) -> Tree:
    return {"name": name}


def number(value: str | int) -> Tree:
    return {"number": str(value)}


def all_of(trees: list[Tree]) -> Tree:
    """One tree that holds where all of `trees` do."""
    return trees[0] if len(trees) == 1 else call("and", *trees)


def any_of(trees: list[Tree]) -> Tree:
    return trees[0] if len(trees) == 1 else call("or", *trees)


def negate(conditions: Iterable[Condition]) -> Condition:
    """The one condition that holds where not all of `conditions` do."""
    found = list(conditions)
    says = "it is not so that " + " and ".join(c.says for c in found)
    return Condition(says=says, tree=call("not", all_of([c.tree for c in found])))


def distinct(conditions: Iterable[Condition]) -> tuple[Condition, ...]:
    """The conditions without repetitions, in order."""
    out: list[Condition] = []
    for c in conditions:
        if c not in out:
            out.append(c)
    return tuple(out)


def state_is(source: str, states: tuple[str, ...]) -> Condition:
    tree = any_of([call("eq", named(f"state:{source}"), {"text": s}) for s in states])
    return Condition(says=says_state(source, states), tree=tree)


def state_is_not(source: str, states: tuple[str, ...], says: str) -> Condition:
    return Condition(says=says, tree=call("not", state_is(source, states).tree))


def at_least(clock: str, least: Tree, says: str) -> Condition:
    """A wait: `clock` counts seconds, `least` is how many are needed."""
    return Condition(says=says, tree=call("ge", named(clock), least), clock=clock, least=least)


def read(scalar: Scalar, scope: Scope) -> Phrase:
    """The phrase written in `scalar`; where it says nothing that is known, a Problem and no conditions."""
    written = " ".join(scalar.text.split())
    if written in scope.facts:
        return Phrase(
            written, (Condition(says=f"{written} has been shown", tree=named(f"fact:{written}")),), place=scalar.place
        )
    for pattern, make in _FORMS:
        match = pattern.match(written)
        if match:
            phrase = make(match, scalar, scope)
            if phrase is not None:
                return phrase
    if re.search(r"[<>=]", written):
        return Phrase(written, (Condition(says=written, tree=scope.flag(scalar)),), place=scalar.place)
    known = [*scope.facts, *scope.options, *scope.sources]
    first = scope.names.get(written.split(" ", 1)[0])
    if first is not None and first.broken:
        return Phrase(written, ())
    remedy = f"{words.near(written, known)}write one of: {'; '.join(FORMS)}"
    scope.found.add(scalar.place, "unknown-condition", f'"{written}" says no condition that is known', remedy)
    return Phrase(written, (), place=scalar.place)


def read_after(scalar: Scalar, scope: Scope) -> Phrase:
    """`not_before: 10 min after STEP`."""
    written = " ".join(scalar.text.split())
    match = _AFTER.match(written)
    phrase = _after(match, scalar, scope) if match else None
    if phrase is None:
        scope.found.add(
            scalar.place, "unknown-condition", f'"{written}" names no time after a step', "write 10 min after STEP"
        )
        return Phrase(written, ())
    return phrase


_STATE = re.compile(r"([a-z_]+)((?: or)? (?:%s)(?: or (?:%s))*)(?: for (.+))?\Z" % (("|".join(SOURCE_STATES),) * 2))
_AFTER = re.compile(r"(.+) after ([a-z][a-z0-9_]*)\Z")
_WITHIN = re.compile(r"([a-z][a-z0-9_]*) within (.+)\Z")
_IS = re.compile(r"([a-z][a-z0-9_]*) is (not )?(.+)\Z")


def _state(match: re.Match[str], scalar: Scalar, scope: Scope) -> Phrase | None:
    source, states = match[1], tuple(match[2].split(" or "))
    states = tuple(s.strip() for s in states if s.strip())
    if not scope.must_be_source(source, scalar.at(0, len(source))):
        return Phrase(scalar.text, ())
    found = [state_is(source, states)]
    if match[3]:
        least = scope.tree(scalar, words.SECOND, scalar.text.rindex(match[3]), match[3])
        has = "have" if SOURCES[source].plural else "has"
        says = f"the {SOURCES[source].title} {has} been {' or '.join(states)} for {scope.says(match[3])}"
        found.append(at_least(f"age:{source}", least, says))
    return Phrase(" ".join(scalar.text.split()), tuple(found), place=scalar.place)


def _nobody(match: re.Match[str], scalar: Scalar, scope: Scope) -> Phrase:
    place = match[1] or "anywhere"
    says = (
        "everyone is out, counted by name"
        if place == "anywhere"
        else f"everyone is out of the {place}, counted by name"
    )
    return Phrase(
        match[0], (Condition(says=says, tree=call("eq", named(f"in:{place}"), number(0))),), place=scalar.place
    )


def _earths(match: re.Match[str], scalar: Scalar, scope: Scope) -> Phrase:
    return Phrase(match[0], (EARTHS_LIFTED,), place=scalar.place)


def _safe(match: re.Match[str], scalar: Scalar, scope: Scope) -> Phrase:
    return Phrase(match[0], (place_safe(match[1]),), place=scalar.place)


def place_safe(place: str) -> Condition:
    says = f"every source that reaches the {place} is locked, waited for, proved dead and earthed"
    return Condition(says=says, tree=named(f"safe:{place}"))


def _lock(match: re.Match[str], scalar: Scalar, scope: Scope) -> Phrase:
    tree = named(f"lock:{match[2]}")
    if match[1]:
        return Phrase(
            match[0], (Condition(says=f"no lock is on {match[2]}", tree=call("not", tree)),), place=scalar.place
        )
    return Phrase(match[0], (Condition(says=f"a lock is on {match[2]}", tree=tree),), place=scalar.place)


def _is(match: re.Match[str], scalar: Scalar, scope: Scope) -> Phrase | None:
    name, negative, values = match[1], bool(match[2]), tuple(v.strip().strip('"') for v in match[3].split(" or "))
    if name in scope.options:
        return _choice(name, negative, values, scalar, scope)
    if name not in scope.texts:
        return None
    tree = any_of([call("eq", named(name), {"text": v}) for v in values])
    words_ = f"{scope.says(name)} is {'not ' if negative else ''}{' or '.join(values)}"
    return Phrase(match[0], (Condition(says=words_, tree=call("not", tree) if negative else tree),), place=scalar.place)


def _choice(name: str, negative: bool, values: tuple[str, ...], scalar: Scalar, scope: Scope) -> Phrase:
    options = scope.options[name]
    for value in values:
        if value not in options:
            remedy = f"{words.near(value, options)}write one of: {', '.join(options)}"
            scope.found.add(scalar.place, "unknown-option", f'"{value}" is no option of the choice "{name}"', remedy)
            return Phrase(scalar.text, ())
    let = frozenset(o for o in options if (o in values) != negative)
    if name in scope.steps and scope.steps[name][0] >= scope.now:
        scope.must_be_step(name, scalar.place)
    ordered = [o for o in options if o in let]
    tree = any_of([call("eq", named(f"choice:{name}"), {"text": o}) for o in ordered]) if ordered else NOTHING
    says = f"{words.plain(scope.title_of(name))} is {' or '.join(ordered)}"
    return Phrase(f"{name} is {' or '.join(ordered)}", (Condition(says=says, tree=tree),), (name, let), scalar.place)


def _after(match: re.Match[str] | None, scalar: Scalar, scope: Scope) -> Phrase | None:
    if match is None:
        return None
    if not scope.must_be_step(match[2], scalar.at(len(match[1]) + 7, len(match[2]))):
        return Phrase(scalar.text, ())
    least = scope.tree(scalar, words.SECOND, 0, match[1])
    says = f"{scope.says(match[1])} have passed since “{scope.title_of(match[2])}”"
    return Phrase(match[0], (at_least(f"since:{match[2]}", least, says),), place=scalar.place)


def _within(match: re.Match[str], scalar: Scalar, scope: Scope) -> Phrase:
    if not scope.must_be_step(match[1], scalar.at(0, len(match[1]))):
        return Phrase(scalar.text, ())
    most = scope.tree(scalar, words.SECOND, scalar.text.rindex(match[2]), match[2])
    says = f"“{scope.title_of(match[1])}” is at most {scope.says(match[2])} old"
    tree = call("le", named(f"oldest-since:{match[1]}"), most)
    return Phrase(match[0], (Condition(says=says, tree=tree),), place=scalar.place)


EARTHS_LIFTED = Condition(
    says="every earthing stick is lifted and counted", tree=call("eq", named("earths"), number(0))
)
NOBODY_IN = Condition(says="everyone is out, counted by name", tree=call("eq", named("in:anywhere"), number(0)))

_FORMS: tuple[tuple[re.Pattern[str], Callable[[re.Match[str], Scalar, Scope], Phrase | None]], ...] = (
    (re.compile(r"nobody (?:anywhere|at ([a-z][a-z0-9-]*))\Z"), _nobody),
    (re.compile(r"every earth lifted\Z"), _earths),
    (re.compile(r"([a-z][a-z0-9-]*) safe\Z"), _safe),
    (re.compile(r"(no )?lock on ([A-Za-z0-9-]+)\Z"), _lock),
    (_STATE, _state),
    (_IS, _is),
    (_AFTER, _after),
    (_WITHIN, _within),
)
