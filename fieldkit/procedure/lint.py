"""Rules of sense: what the grammar allows and no engineer means. Each rule is one function and one line in a table.

`check_written` sees the steps as written and works even where other problems stand; `check_sheet` sees the finished
sheet. A warning is shown and does not stop. To add a rule: a function, a line in WRITTEN or SHEET, and a pair of
files in tests/lint/err. Not here: the safety proof.
"""

from __future__ import annotations

from collections.abc import Callable
from decimal import Decimal
from typing import Any

from fieldkit.errors import Place
from fieldkit.procedure.items import Item
from fieldkit.sheet.model import Sheet
from fieldkit.sheet.moves import END, SAFE
from fieldkit.sheet.parts import Limits
from fieldkit.steps.scope import Scope
from fieldkit.steps.sources import SOURCES


def check_written(items: list[Item], head: dict[str, Any], scope: Scope) -> None:
    """Adds the problems of every rule that speaks of what is written."""
    for rule in WRITTEN:
        rule(items, head, scope)


def check_sheet(sheet: Sheet, scope: Scope) -> None:
    """Adds the problems of every rule that speaks of the compiled sheet."""
    for rule in SHEET:
        rule(sheet, scope)


def _second_person_alone(items: list[Item], head: dict[str, Any], scope: Scope) -> None:
    for item in items:
        if scope.crew < 2 and item.written is not None and item.written.who == "second person":
            place = item.written.at("who")
            scope.found.add(
                place, "nobody-else", "a second person does this, and the crew is 1", "write crew: 2, or delete who:"
            )


def _a_live_source_at_the_end(items: list[Item], head: dict[str, Any], scope: Scope) -> None:
    for source in head.get("energy") or {}:
        if head.get("ends") is not None and source not in head["ends"]:
            place = head["ends"][next(iter(head["ends"]))].place if head["ends"] else Place(1, 1)
            message = f'ends: says nothing of "{source}"'
            scope.found.add(place, "end-not-said", message, f"write {source}: with the states it may have at the end")


def _unreachable(sheet: Sheet, scope: Scope) -> None:
    reached, todo = {sheet.first}, [sheet.first]
    ways: dict[str, list[str]] = {}
    for move in sheet.moves:
        ways.setdefault(move.origin, []).append(move.to)
    while todo:
        for to in ways.get(todo.pop(), []):
            if to not in reached:
                reached.add(to)
                todo.append(to)
    lines = set()
    for step in sheet.steps:
        if step.id not in reached and step.line not in lines:
            lines.add(step.line)
            remedy = "correct the conditions before it, or delete it"
            scope.found.add(Place(step.line, 3), "unreachable", f'nothing leads to the step "{step.id}"', remedy)
    if END not in reached:
        scope.found.add(
            Place(sheet.steps[-1].line, 3), "no-end", "the end can never be reached", "let a step lead on to the end"
        )


def _limits_that_nothing_meets(sheet: Sheet, scope: Scope) -> None:
    for step in sheet.steps:
        found = getattr(step.control, "limits", None)
        if found is not None and _empty(found):
            message = f'no value can meet the limits of "{step.id}"'
            scope.found.add(
                Place(step.line, 3), "empty-limits", message, "write the lower limit first, and a higher one after it"
            )


def _empty(limits: Limits) -> bool:
    """Whether the lower constant is above the higher one; limits that are formulas are judged when they are known."""
    low, high = limits.low, limits.high
    if low is None or high is None or "number" not in low or "number" not in high:
        return False
    return Decimal(low["number"]) > Decimal(high["number"])


def _make_safe_leaves_beam(sheet: Sheet, scope: Scope) -> None:
    switched_on = {s for m in sheet.moves for s, state in m.effects.sets.items() if state == "on"}
    sources = switched_on | {s for s, found in sheet.start.items() if found.state == "on"}
    switched = {s for line in sheet.make_safe for s, state in line.sets.items() if state == "off"}
    for source in ("beam_supply", "rf_drive"):
        if source in sources and source not in switched:
            message = f"make safe never switches the {SOURCES[source].title} off"
            scope.found.add(
                Place(1, 1), "make-safe-leaves", message, f"write a line with sets: {{{source}: off}}", "warning"
            )


def _judged_without_ways(sheet: Sheet, scope: Scope) -> None:
    """Held by the lowering of every kind; a kind that forgets it is found here."""
    for step in sheet.steps:
        if step.control.control in ("number", "prove", "result"):
            ways = {m.to for m in sheet.moves if m.origin == step.id and m.on == "fail"}
            if SAFE not in ways:
                scope.found.add(
                    Place(step.line, 3), "fail-leads-nowhere", f'a fail of "{step.id}" cannot stop', "add a stop move"
                )


WRITTEN: tuple[Callable[[list[Item], dict[str, Any], Scope], None], ...] = (
    _second_person_alone,
    _a_live_source_at_the_end,
)
SHEET: tuple[Callable[[Sheet, Scope], None], ...] = (
    _unreachable,
    _limits_that_nothing_meets,
    _make_safe_leaves_beam,
    _judged_without_ways,
)
