"""earth: a numbered earthing stick put on, only where its source is proved dead."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.sheet.controls import Earth
from fieldkit.sheet.parts import Effects
from fieldkit.steps import base, conditions, words
from fieldkit.steps.base import Kind, Piece, StepWritten
from fieldkit.steps.scope import Scope
from fieldkit.steps.sources import SOURCES
from fieldkit.steps.words import key


@dataclass(frozen=True, kw_only=True)
class EarthStep(StepWritten):
    stick: str = key(words.point, "the earthing stick, by number", required=True, name="earth")
    point: str = key(words.text, "where it goes", required=True)
    source: str = key(words.one_of(*SOURCES), "what it earths", required=True)
    title: str = key(words.text, "where the default would not do", default="")


def lower(written: EarthStep, id_: str, scope: Scope) -> Piece:
    base.sources_known(written, (written.source,), scope)
    dead = conditions.state_is(written.source, ("proved", "earthed"))
    opens = conditions.distinct((*base.gate(written, scope), dead))
    control = Earth(stick=written.stick, point=written.point, source=written.source)
    title = written.title or f"Earth: stick {written.stick} on the {written.point}"
    effects = Effects(sets={written.source: "earthed"})
    return base.one_step("earth", title, control, written, id_, opens, effects, scope)


KIND = Kind("earth", EarthStep, lower, "a numbered earthing stick put on")
