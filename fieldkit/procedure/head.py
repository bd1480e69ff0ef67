"""The head of a procedure lowered: givens, sources, start and end states, rules, make safe. It fills the scope."""

from __future__ import annotations

import re
from typing import Any

from fieldkit.errors import Collector, Place
from fieldkit.procedure.model import GivenWritten, SafeWritten
from fieldkit.sheet.model import After, Declared, Rule, SafeStep
from fieldkit.sheet.parts import SOURCE_STATES, Condition, Given, Source, Unit
from fieldkit.steps import conditions, words
from fieldkit.steps.expression import Named
from fieldkit.steps.scope import Scope
from fieldkit.steps.sources import FOLLOWS, SOURCES
from fieldkit.yaml_source import Mapping, Node, Scalar, Sequence

_STATES = "|".join(SOURCE_STATES)
_RULE = re.compile(rf"([a-z_]+) ({_STATES}) needs (.+)\Z", re.DOTALL)
_STATE = re.compile(rf"((?:{_STATES})(?: or (?:{_STATES}))*)(?: for (.+))?\Z")


def givens(written: dict[str, GivenWritten], node: Node | None, scope: Scope) -> tuple[Given, ...]:
    """The sheet's givens, and their names in the scope; a given with problems is known but not checked further."""
    out = []
    for name, one in (written or {}).items():
        unit = one.unit or words.NO_UNIT
        kind = "levels" if one.levels else "text" if one.text else "number"
        if one.levels and one.text:
            scope.found.add(
                one.at("text"), "levels-and-text", "a given is levels or a text, not both", "delete one of the two"
            )
        if one.text and one.unit is not None:
            scope.found.add(one.at("unit"), "text-with-unit", "a text has no unit", "delete unit:")
        if name == "level":
            scope.found.add(one.place, "kept-name", '"level" is the level of a ladder', "choose another name")
        _name_given(name, one, unit, scope)
        out.append(
            Given(
                name=name, origin=one.origin, kind=kind, unit=None if one.text else unit,  # type: ignore[arg-type]
                between=_between(one, unit, scope.found), meaning=one.meaning or name.replace("_", " "),
            )
        )  # fmt: skip
    _broken_givens(written or {}, node, scope)
    return tuple(out)


def _name_given(name: str, one: GivenWritten, unit: Unit, scope: Scope) -> None:
    scope.origins[name] = one.origin
    scope.given_places[name] = one.place
    scope.meanings[name] = one.meaning or name.replace("_", " ")
    if one.text:
        scope.texts.add(name)
        scope.names[name] = Named("text")
        return
    if one.levels:
        scope.levels[name] = unit
    scope.names[name] = Named(words.dimension(unit), series=one.levels)


def _broken_givens(read: dict[str, GivenWritten], node: Node | None, scope: Scope) -> None:
    if isinstance(node, Mapping):
        for entry in node:
            if entry.key not in read:
                scope.names[entry.key] = Named(None, broken=True)


def _between(one: GivenWritten, unit: Unit, found: Collector) -> tuple[str, str] | None:
    if one.between is None:
        return None
    node = one.between
    if isinstance(node, Scalar) and node.text.count(" to ") == 1:
        low, high = node.text.split(" to ")
        both = [words.quantity_of(low.strip(), node.place, found), words.quantity_of(high.strip(), node.place, found)]
    elif isinstance(node, Sequence) and len(node.items) == 2:
        both = [words.quantity(item, found) for item in node.items]
    else:
        found.add(node.place, "bad-range", "this is no range", "write [0.2 A, 0.9 A]")
        return None
    if both[0] is None or both[1] is None:
        return None
    for q in both:
        if q is not None and words.dimension(q.unit) != words.dimension(unit):
            shown = unit.symbol or "a plain number"
            found.add(q.place, "unit-mismatch", f"{q} does not fit {shown}", f"write it in {shown}")
            return None
    if both[0].si >= both[1].si:
        found.add(node.place, "empty-range", f"{both[0]} is not below {both[1]}", "write the lower end first")
        return None
    return both[0].inside(unit), both[1].inside(unit)


def sources(energy: dict[str, Any]) -> tuple[Source, ...]:
    """The sources that the procedure declares, in the order of their lanes, and those that follow from them."""
    wanted = set(energy) | {f for s in energy for f in FOLLOWS.get(s, ())}
    return tuple(
        Source(name=e.name, title=e.title, short=e.short, isolable=e.isolable)
        for e in SOURCES.values()
        if e.name in wanted
    )


def start(energy: dict[str, Scalar], scope: Scope) -> dict[str, Declared]:
    """`heater: on for 15 min`, `rf_drive: locked or off`: the first state is expected, the others are accepted too."""
    out = {}
    for source, scalar in energy.items():
        if not SOURCES[source].isolable:
            message = f"{SOURCES[source].title} cannot be switched or locked: its state is computed"
            scope.found.add(scalar.place, "following-source", message, "delete this line")
            continue
        match = _STATE.match(" ".join(scalar.text.split()))
        if not match:
            _no_state(scalar, scope.found)
            continue
        states = tuple(match[1].split(" or "))
        least = None
        if match[2]:
            least = scope.tree(scalar, words.SECOND, scalar.text.rindex(match[2]), match[2])
        out[source] = Declared(state=states[0], accepts=states[1:], least=least)
    return out


def _no_state(scalar: Scalar, found: Collector) -> None:
    remedy = f"write one of: {', '.join(SOURCE_STATES)}; with or between several, and for 15 min after them"
    found.add(scalar.place, "unknown-state", f'"{scalar.text}" is no state of a source', remedy)


def ends(written: dict[str, Scalar], scope: Scope) -> dict[str, tuple[str, ...]]:
    out = {}
    for source, scalar in written.items():
        match = _STATE.match(" ".join(scalar.text.split()))
        if not match or match[2]:
            _no_state(scalar, scope.found)
        elif scope.must_be_source(source, scalar.place):
            out[source] = tuple(match[1].split(" or "))
    return out


def rules(written: tuple[Scalar, ...], scope: Scope) -> tuple[Rule, ...]:
    """`beam_supply on needs heater on for 15 min, coolant on, bias on or cut-off`."""
    out = []
    for scalar in written:
        match = _RULE.match(scalar.text)
        if not match:
            remedy = "write beam_supply on needs coolant on, air on"
            scope.found.add(scalar.place, "bad-rule", f'"{scalar.text}" is no rule', remedy)
            continue
        if not scope.must_be_source(match[1], scalar.at(0, len(match[1]))):
            continue
        needs: list[Condition] = []
        offset = match.start(3)
        for part in match[3].split(","):
            text = part.strip()
            place = scalar.at(offset + len(part) - len(part.lstrip()), len(text))
            needs += conditions.read(Scalar(text, "plain", _wide(place, len(text))), scope).conditions
            offset += len(part) + 1
        says = " ".join(scalar.text.split()).replace("_", " ")
        out.append(Rule(source=match[1], state=match[2], needs=tuple(needs), says=says))  # type: ignore[arg-type]
    return tuple(out)


def _wide(place: Place, width: int) -> Place:
    return Place(place.line, place.column, max(place.width, width))


def after(written: dict[str, Scalar], scope: Scope) -> tuple[After, ...]:
    out = []
    for procedure, scalar in (written or {}).items():
        text = " ".join(scalar.text.split())
        if text == "at any time":
            out.append(After(procedure=procedure, says=f"a finished run of {procedure} on the same tube"))
            continue
        within = (
            words.quantity_of(text.removeprefix("within "), scalar.place, scope.found)
            if text.startswith("within ")
            else None
        )
        if not text.startswith("within "):
            scope.found.add(scalar.place, "bad-after", f'"{text}" says no time', "write within 8 h, or at any time")
        elif within is not None and words.dimension(within.unit) != words.dimension(words.SECOND):
            scope.found.add(scalar.place, "unit-mismatch", f"{within} is no time", "write a time, as in within 8 h")
        elif within is not None:
            says = f"a finished run of {procedure} on the same tube {text}"
            out.append(After(procedure=procedure, within=within.inside(words.SECOND), says=says))
    return tuple(out)


def make_safe(written: tuple[SafeWritten, ...], scope: Scope) -> tuple[SafeStep, ...]:
    """The make-safe list. It takes off no lock and no earth, so it may only switch."""
    out = []
    for index, one in enumerate(written or (), 1):
        for source in one.sets or {}:
            scope.must_be_source(source, one.at("sets"))
        out.append(SafeStep(id=f"safe_{index}", text=one.text, sets=one.sets or {}, note=one.note))  # type: ignore[arg-type]
    return tuple(out)
