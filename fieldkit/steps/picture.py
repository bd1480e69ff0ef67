"""picture: a picture of something, kept by its hash with the run."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.sheet.controls import Picture
from fieldkit.steps import base, words
from fieldkit.steps.base import Kind, Piece, StepWritten
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import key


@dataclass(frozen=True, kw_only=True)
class PictureStep(StepWritten):
    title: str = key(words.text, "what the picture shows", required=True, name="picture")
    optional: bool = key(words.yes_no, "whether the step may be left without one", default=False)


def lower(written: PictureStep, id_: str, scope: Scope) -> Piece:
    control = Picture(of=written.title, required=not written.optional)
    return base.simple("picture", written.title, control, written, id_, scope)


KIND = Kind("picture", PictureStep, lower, "a picture")
