"""unlock: a lock taken off by its holder, with every earth lifted and everyone out."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.sheet.controls import Unlock
from fieldkit.sheet.parts import Condition, Effects
from fieldkit.steps import base, conditions, words
from fieldkit.steps.base import Kind, Piece, StepWritten
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import key


@dataclass(frozen=True, kw_only=True)
class UnlockStep(StepWritten):
    point: str = key(words.point, "the isolating point", required=True, name="unlock")
    sources: tuple[str, ...] = key(base.SOURCE_NAMES, "what it isolates", required=True)
    title: str = key(words.text, "where the default would not do", default="")


def lower(written: UnlockStep, id_: str, scope: Scope) -> Piece:
    base.sources_known(written, written.sources, scope)
    on = Condition(says=f"a lock is on {written.point}", tree=conditions.named(f"lock:{written.point}"))
    opens = conditions.distinct((*base.gate(written, scope), on, conditions.NOBODY_IN, conditions.EARTHS_LIFTED))
    effects = Effects(sets={s: "off" for s in written.sources})
    title = written.title or f"Unlock {written.point}"
    control = Unlock(point=written.point, sources=written.sources)
    return base.one_step("unlock", title, control, written, id_, opens, effects, scope)


KIND = Kind("unlock", UnlockStep, lower, "taking a lock off, by its holder")
