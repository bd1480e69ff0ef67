"""remark: something written down in the person's own words."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.sheet.controls import Remark
from fieldkit.steps import base, words
from fieldkit.steps.base import Kind, Piece, StepWritten
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import key


@dataclass(frozen=True, kw_only=True)
class RemarkStep(StepWritten):
    title: str = key(words.text, "what to write about", required=True, name="remark")
    required: bool = key(words.yes_no, "whether something must be written", default=False)


def lower(written: RemarkStep, id_: str, scope: Scope) -> Piece:
    return base.simple("remark", written.title, Remark(required=written.required), written, id_, scope)


KIND = Kind("remark", RemarkStep, lower, "a remark")
