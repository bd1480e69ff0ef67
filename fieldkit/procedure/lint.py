"""Rules of sense: what the grammar allows and no engineer means. Each rule is one function and one line in a table.

`check_written` sees the steps as written and works even where other problems stand; `check_sheet` sees the finished
sheet. A warning is shown and does not stop. To add a rule: a function, a line in WRITTEN or SHEET, and a pair of
files in tests/lint/err. Not here: the safety proof; rules about one step alone (its kind checks those).
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from typing import Any

from fieldkit.errors import Place
from fieldkit.procedure.items import Item
from fieldkit.sheet.model import Sheet
from fieldkit.sheet.moves import END, SAFE
from fieldkit.steps.scope import Scope
from fieldkit.steps.sources import SOURCES


def check_written(items: list[Item], head: dict[str, Any], scope: Scope) -> None:
    """Adds the problems of every rule that speaks of what is written."""
    for rule in WRITTEN:
        rule(items, head, scope)


def check_sheet(sheet: Sheet, items: list[Item], scope: Scope) -> None:
    """Adds the problems of every rule that speaks of the compiled sheet."""
    places = {item.place.line: item.place for item in items}
    for rule in SHEET:
        rule(sheet, places, scope)


def _second_person_alone(items: list[Item], head: dict[str, Any], scope: Scope) -> None:
    for item in items:
        if scope.crew < 2 and item.written is not None and item.written.who == "second person":
            message = "a second person does this, and the crew is 1"
            scope.found.add(item.written.at("who"), "nobody-else", message, "write crew: 2, or delete who:")


def _end_not_said(items: list[Item], head: dict[str, Any], scope: Scope) -> None:
    ends = head.get("ends")
    for source, scalar in (head.get("energy") or {}).items():
        if ends is not None and source not in ends and SOURCES[source].isolable:
            message = f'nothing under ends: speaks of "{source}"'
            remedy = f"write {source}: under ends:, with the states it may have then"
            scope.found.add(scalar.place, "end-not-said", message, remedy)


def _make_safe_leaves_it_on(items: list[Item], head: dict[str, Any], scope: Scope) -> None:
    lines = head.get("make_safe") or ()
    switched_off = {s for line in lines for s, state in (line.sets or {}).items() if state == "off"}
    on = {s for s, scalar in (head.get("energy") or {}).items() if scalar.text.split()[0] == "on"}
    on |= {s for item in items for s, state in (getattr(item.written, "sets", None) or {}).items() if state == "on"}
    for source in ("beam_supply", "rf_drive"):
        if lines and source in on and source not in switched_off:
            message = f"make safe never switches the {SOURCES[source].title} off"
            remedy = f"write a line with sets: {{{source}: off}}"
            scope.found.add(lines[0].place, "make-safe-leaves", message, remedy, "warning")


def _no_way_back(items: list[Item], head: dict[str, Any], scope: Scope) -> None:
    """A pause clears facts, and a greatest age passes; a step that needs either must then lead back to it."""
    for item in items:
        if item.written is None or item.written.or_else is not None:
            continue
        for scalar in item.written.needs:
            written = " ".join(scalar.text.split())
            if written in scope.facts:
                message = f'a pause clears "{written}", and nothing leads back to where it is shown'
            elif re.search(r"^[a-z][a-z0-9_]* within ", written):
                message = f'"{written}" can pass, and nothing leads back'
            else:
                continue
            remedy = "write or_else: with the step to take again"
            scope.found.add(scalar.place, "no-way-back", message, remedy, "warning")


def _given_unused(sheet: Sheet, places: dict[int, Place], scope: Scope) -> None:
    used = set(_names(sheet.model_dump(mode="json", exclude={"givens"})))
    for given in sheet.givens:
        if given.name not in used:
            message = f'the given "{given.name}" is used nowhere'
            place = scope.given_places.get(given.name, Place(1, 1))
            scope.found.add(
                place, "given-unused", message, "delete it; every given must be in the registers", "warning"
            )


def _names(part: Any) -> Iterator[str]:
    """Every name and column in the trees of a sheet."""
    if isinstance(part, dict):
        for key in ("name", "series"):
            if set(part) == {key} and isinstance(part[key], str):
                yield part[key]
        for value in part.values():
            yield from _names(value)
    elif isinstance(part, list):
        for value in part:
            yield from _names(value)


def _unreachable(sheet: Sheet, places: dict[int, Place], scope: Scope) -> None:
    reached, todo = {sheet.first}, [sheet.first]
    ways: dict[str, list[str]] = {}
    for move in sheet.moves:
        ways.setdefault(move.origin, []).append(move.to)
    while todo:
        for to in ways.get(todo.pop(), []):
            if to not in reached:
                reached.add(to)
                todo.append(to)
    some = {step.line for step in sheet.steps if step.id in reached}
    for line in sorted({step.line for step in sheet.steps} - some):
        step = next(s for s in sheet.steps if s.line == line)
        remedy = "correct the conditions or the go to before it, or delete it"
        scope.found.add(places[line], "unreachable", f'nothing leads to the step "{step.id}"', remedy)
    if END not in reached:
        place = places[sheet.steps[-1].line]
        scope.found.add(place, "no-end", "the end of the procedure can never be reached", "let a step lead on to it")


def _judged_without_stop(sheet: Sheet, places: dict[int, Place], scope: Scope) -> None:
    """Held by the lowering of every kind that judges; a new kind that forgets it is found here."""
    for step in sheet.steps:
        if step.control.control in ("number", "prove", "result"):
            ways = {m.to for m in sheet.moves if m.origin == step.id and m.on == "fail"}
            if SAFE not in ways:
                message = f'a fail of "{step.id}" cannot stop and make safe'
                scope.found.add(places[step.line], "fail-cannot-stop", message, "give the kind judged.stop(id)")


WRITTEN: tuple[Callable[[list[Item], dict[str, Any], Scope], None], ...] = (
    _second_person_alone,
    _end_not_said,
    _make_safe_leaves_it_on,
    _no_way_back,
)
SHEET: tuple[Callable[[Sheet, dict[int, Place], Scope], None], ...] = (
    _given_unused,
    _unreachable,
    _judged_without_stop,
)
