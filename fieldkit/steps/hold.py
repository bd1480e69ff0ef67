"""hold: a hold point. Only another person than the recorder releases it, with their own passphrase."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.sheet.controls import Hold
from fieldkit.steps import base, words
from fieldkit.steps.base import Acting, Kind, Piece
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import key


@dataclass(frozen=True, kw_only=True)
class HoldStep(Acting):
    title: str = key(words.text, "what the hold point is for", required=True, name="hold")
    statement: str = key(words.text, "what the releasing person states", required=True)
    by: str = key(words.one_of("second person", "supervisor"), "who releases it", default="second person")


def lower(written: HoldStep, id_: str, scope: Scope) -> Piece:
    if scope.crew < 2:
        remedy = "write crew: 2, or delete the hold point"
        scope.found.add(written.place, "hold-alone", "a hold point needs another person, and the crew is 1", remedy)
    control = Hold(statement=written.statement, by=written.by)  # type: ignore[arg-type]
    return base.simple("hold", written.title, control, written, id_, scope)


KIND = Kind("hold", HoldStep, lower, "a hold point that only another person releases")
