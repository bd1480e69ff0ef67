"""picture: a picture of something, kept by its hash with the run."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.sheet.controls import Picture
from fieldkit.sheet.parts import Condition
from fieldkit.steps import base, words
from fieldkit.steps.base import Exit, Kind, Piece, StepWritten
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import key

#: always holds; negated, because a way round a step (run.moves.is_around) is known by that
_MAY_BE_LEFT = Condition(says="the picture may be left out", tree={"call": "not", "of": [{"flag": False}]})


@dataclass(frozen=True, kw_only=True)
class PictureStep(StepWritten):
    title: str = key(words.text, "what the picture shows", required=True, name="picture")
    optional: bool = key(words.yes_no, "whether the step may be left without one", default=False)


def lower(written: PictureStep, id_: str, scope: Scope) -> Piece:
    control = Picture(of=written.title, required=not written.optional)
    piece = base.simple("picture", written.title, control, written, id_, scope)
    if written.optional:
        opens = base.gate(written, scope)
        piece.exits.append(Exit(id_, "done", (_MAY_BE_LEFT, *opens), label="Go on without a picture"))
    return piece


KIND = Kind("picture", PictureStep, lower, "a picture")
