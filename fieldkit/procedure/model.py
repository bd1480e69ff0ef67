"""The head of a procedure: every key that stands beside `steps:`, as the writer writes it.

Not here: the steps themselves (fieldkit.steps), what the head becomes (fieldkit.procedure.head).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from fieldkit.errors import Collector
from fieldkit.sheet.parts import Unit
from fieldkit.steps import base, words
from fieldkit.steps.sources import SOURCES
from fieldkit.steps.words import Written, key
from fieldkit.yaml_source import Node


@dataclass(frozen=True, kw_only=True)
class GivenWritten(Written):
    origin: str = key(words.one_of("tube", "cabinet", "site"), "whose value it is", required=True, name="from")
    unit: Unit | None = key(words.unit, "its unit; left out for a plain number or a text")
    between: Any = key(words.node, "its plausible range: [0.2 A, 0.9 A]; outside it no run starts")
    meaning: str = key(words.text, "what it is, as people read it beside a limit", default="")
    levels: bool = key(words.yes_no, "a list of levels, lowest first", default=False)
    text: bool = key(words.yes_no, "a text, not a number", default=False)


def _given(node: Node, found: Collector) -> GivenWritten | None:
    return words.read_model(GivenWritten, node, found, "a given")


@dataclass(frozen=True, kw_only=True)
class SafeWritten(Written):
    text: str = key(words.text, "one line of the list, one act", required=True, name="act")
    sets: dict[str, str] = key(base.SETS, "states of energy sources after it")
    note: str = key(words.text, "a word beside it", default="")


def _safe(node: Node, found: Collector) -> SafeWritten | None:
    return words.read_model(SafeWritten, node, found, "a make-safe line")


GIVEN = words.Word("from: tube, cabinet or site, and unit:", _given)
SAFE = words.Word("act: one line", _safe)
_SOURCE = words.one_of(*SOURCES)


@dataclass(frozen=True, kw_only=True)
class Head(Written):
    procedure: str = key(words.slug, "the procedure's name, as its file is named", required=True)
    edition: int = key(words.whole(1, 9999), "the number of this edition", required=True)
    title: str = key(words.text, "its title", required=True)
    purpose: str = key(words.text, "what it is for, one sentence", required=True)
    changes: str = key(words.text, "what changed since the edition before", default="")
    tubes: tuple[str, ...] = key(words.list_of(words.slug), "kinds of tube", required=True, name="for")
    crew: int = key(words.whole(1, 9), "how many people it needs", required=True)
    alone: str = key(words.text, "what one person may do alone, said when two are needed", default="")
    after: dict[str, Any] = key(words.map_of(words.texts, words.slug), "procedure: within 8 h, or at any time")
    givens: dict[str, GivenWritten] = key(words.map_of(GIVEN), "values known before the run")
    energy: dict[str, Any] = key(
        words.map_of(words.texts, _SOURCE), "source: state expected at the start", required=True
    )
    ends: dict[str, Any] = key(
        words.map_of(words.texts, _SOURCE), "source: states it may have at the end", required=True
    )
    rules: tuple[Any, ...] = key(
        words.list_of(words.texts), "beam_supply on needs heater on for 15 min, air on", default=()
    )
    steps: Any = key(words.node, "the steps, in order", required=True)
    make_safe: tuple[SafeWritten, ...] = key(words.list_of(SAFE), "the list that makes everything safe", required=True)
    next_person: str = key(words.text, "what the next person must know", default="")
