"""clear: everyone out of a place, counted out by name against those signed in."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.sheet.controls import People
from fieldkit.sheet.parts import Effects
from fieldkit.steps import base, words
from fieldkit.steps.base import Kind, Piece, StepWritten
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import key


@dataclass(frozen=True, kw_only=True)
class Clear(StepWritten):
    where: str = key(words.slug, "the place, as the cabinet's register names it", required=True, name="clear")
    title: str = key(words.text, "where the default would not do", default="")


def lower(written: Clear, id_: str, scope: Scope) -> Piece:
    title = written.title or f"Everyone out of the {written.where}: count by name"
    control, effects = People(place=written.where, way="out"), Effects(hands={written.where: "out"})
    return base.one_step("clear", title, control, written, id_, base.gate(written, scope), effects, scope)


KIND = Kind("clear", Clear, lower, "everyone out of a place, counted by name")
