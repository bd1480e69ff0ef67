"""work_out: a value derived from readings and givens by a formula, shown with its limits."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Any

from fieldkit.sheet.controls import Result
from fieldkit.sheet.parts import Unit
from fieldkit.steps import base, judged, read, words
from fieldkit.steps import limits as limits_words
from fieldkit.steps.base import Kind, Name, Piece
from fieldkit.steps.judged import Judged
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import Quantity, key


@dataclass(frozen=True, kw_only=True)
class WorkOut(Judged):
    value: Any = key(words.texts, "a formula of givens and earlier readings", required=True, name="work_out")
    title: str = key(words.text, "what it is", default="")
    unit: Unit = key(words.unit, "its unit", default=words.NO_UNIT)
    resolution: Quantity = key(
        words.quantity, "the step to which it is shown and its limits are rounded", required=True
    )


def lower(written: WorkOut, id_: str, scope: Scope) -> Piece:
    unit, before = written.unit, set(scope.formulas_used)
    scope.formulas_used = set()
    value = scope.tree(written.value, unit)
    used, scope.formulas_used = scope.formulas_used, before | scope.formulas_used
    control = Result(
        value=value,
        unit=unit,
        resolution=read.resolution(written.resolution, unit, scope) or "1",
        limits=limits_words.limits(written, unit, scope),
        typical=limits_words.typical(written, unit, scope),
        plate=None if written.plate is None else scope.tree(written.plate, unit),
        formulas=tuple(sorted(used)),
        protects=written.protects,
        spread=True,
    )
    ways = judged.ways(written, id_, scope, base.gate(written, scope, written.sets), base.effects(written))
    text = written.text or _in_titles(" ".join(written.value.text.split()), scope)
    step = base.make_step(id_, "work_out", title_of(written, id_), control, written, text=text)
    return Piece(id_, [step], ways.exits, ways.moves, ways.counters)


def _in_titles(formula: str, scope: Scope) -> str:
    """The formula as people read it: every step and given by its title, functions and sources by their words."""

    def said(found: re.Match[str]) -> str:
        word = found[0]
        if found.string.startswith("(", found.end()):
            return word.replace("_", " ")
        return _inside(scope.meanings.get(word) or (scope.steps[word][1] if word in scope.steps else word))

    # the names of a call's arguments go: title and value say enough
    plain = re.sub(r"\b[a-z][a-z0-9_]*=(?!=)", "", formula)
    return re.sub(r"\b[a-z][a-z0-9_]*\b", said, plain)


def _inside(title: str) -> str:
    """A title inside a sentence; abbreviations keep their capitals."""
    return title if title[:2].isupper() else title[:1].lower() + title[1:]


def title_of(written: WorkOut, id_: str) -> str:
    return written.title or id_.replace("_", " ").capitalize()


def names(written: WorkOut, id_: str) -> tuple[Name, ...]:
    return (Name(id_, title_of(written, id_), written.unit),)


KIND = Kind("work_out", WorkOut, lower, "a value derived by a formula, with limits", names)
