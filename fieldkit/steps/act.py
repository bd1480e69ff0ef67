"""act: something to do; the person says that it is done. `sets` says what it changes."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.sheet.controls import Confirm
from fieldkit.steps import base, words
from fieldkit.steps.base import Acting, Kind, Piece
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import key


@dataclass(frozen=True, kw_only=True)
class Act(Acting):
    title: str = key(words.text, "what to do, one act", required=True, name="act")
    button: str = key(words.text, "what the button says", default="Done")
    held: bool = key(words.yes_no, "press and hold: spoken aloud, or not to be undone", default=False)


def lower(written: Act, id_: str, scope: Scope) -> Piece:
    title = written.title.rstrip(".")
    return base.simple("act", title, Confirm(button=written.button, held=written.held), written, id_, scope)


KIND = Kind("act", Act, lower, "one thing to do, said to be done")
