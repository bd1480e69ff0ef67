"""hands: people put hands in at a place, signed in by name; every source that reaches it is dead and earthed."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.sheet.controls import People
from fieldkit.sheet.parts import Effects
from fieldkit.steps import base, conditions, words
from fieldkit.steps.base import Kind, Piece, StepWritten
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import key


@dataclass(frozen=True, kw_only=True)
class Hands(StepWritten):
    where: str = key(words.slug, "the place, as the cabinet's register names it", required=True, name="hands")
    title: str = key(words.text, "where the default would not do", default="")


def lower(written: Hands, id_: str, scope: Scope) -> Piece:
    opens = conditions.distinct((*base.gate(written, scope), conditions.place_safe(written.where)))
    title = written.title or f"Hands in at the {written.where}: sign in by name"
    control, effects = People(place=written.where, way="in"), Effects(hands={written.where: "in"})
    return base.one_step("hands", title, control, written, id_, opens, effects, scope)


KIND = Kind("hands", Hands, lower, "hands in at a place, by name")
