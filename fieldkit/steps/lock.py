"""lock: a lock and tag on an isolating point, after its sources are switched off. The lock board outlives the run."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.sheet.controls import Lock
from fieldkit.sheet.parts import Condition, Effects
from fieldkit.steps import base, conditions, words
from fieldkit.steps.base import Kind, Piece, StepWritten
from fieldkit.steps.scope import Scope
from fieldkit.steps.sources import SOURCES
from fieldkit.steps.words import key


@dataclass(frozen=True, kw_only=True)
class LockStep(StepWritten):
    point: str = key(words.point, "the isolating point, as the cabinet's register names it", required=True, name="lock")
    sources: tuple[str, ...] = key(base.SOURCE_NAMES, "what it isolates", required=True)
    title: str = key(words.text, "where the default would not do", default="")
    ask: str = key(words.text, "what to look at: the visible break", default="")


def lower(written: LockStep, id_: str, scope: Scope) -> Piece:
    base.sources_known(written, written.sources, scope)
    live = [c for s in written.sources if s in scope.sources for c in (not_live(s),)]
    opens = conditions.distinct((*base.gate(written, scope), *live))
    effects = Effects(sets={s: "locked" for s in written.sources})
    control = Lock(point=written.point, sources=written.sources, ask=written.ask)
    title = written.title or f"Lock {written.point}"
    return base.one_step("lock", title, control, written, id_, opens, effects, scope)


def not_live(source: str) -> Condition:
    """Switched off at its own control before its isolator is opened."""
    says = f"{SOURCES[source].is_} switched off at its own control"
    return conditions.state_is_not(source, ("on", "standby"), says)


KIND = Kind("lock", LockStep, lower, "a lock and tag on an isolating point")
