"""lift: an earthing stick taken off and counted, with everyone out. Proved dead ends with it."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.sheet.controls import Lift
from fieldkit.sheet.parts import Effects
from fieldkit.steps import base, conditions, words
from fieldkit.steps.base import Kind, Piece, StepWritten
from fieldkit.steps.scope import Scope
from fieldkit.steps.sources import SOURCES
from fieldkit.steps.words import key


@dataclass(frozen=True, kw_only=True)
class LiftStep(StepWritten):
    stick: str = key(words.point, "the earthing stick, by number", required=True, name="lift")
    point: str = key(words.text, "where it is", required=True)
    source: str = key(words.one_of(*SOURCES), "what it earthed", required=True)
    title: str = key(words.text, "where the default would not do", default="")


def lower(written: LiftStep, id_: str, scope: Scope) -> Piece:
    base.sources_known(written, (written.source,), scope)
    opens = conditions.distinct((*base.gate(written, scope), conditions.NOBODY_IN))
    control = Lift(stick=written.stick, point=written.point, source=written.source)
    title = written.title or f"Lift stick {written.stick} from the {written.point}"
    #: proved dead ends with the first stick that is lifted
    effects = Effects(sets={written.source: "locked"})
    return base.one_step("lift", title, control, written, id_, opens, effects, scope)


KIND = Kind("lift", LiftStep, lower, "an earthing stick taken off, counted")
