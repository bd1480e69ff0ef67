"""Moves: the flat graph that a run walks. From a step to a step, opened by a gate, with effects.

`on` is the outcome of the step that the move leaves:
    done     the control was answered (caution, confirm, lock, unlock, earth, lift, hold, picture, remark, wait, people)
    pass     a number, prove or result was judged, and counts as passing (DEVELOPERS.md, "Outcomes")
    fail     it was judged and does not
    option   a choice was made; `choice` names the value
`manner` says what taking it means to the record:
    plain      the work goes on
    again      the same step once more; needs a reason; a counter in its gate caps it
    deviation  a fail is accepted, under a supervisor's passphrase, with a reason
    stop       to "@safe"
Where exactly one move of the outcome is plain and open, the answering event takes it by itself; otherwise the
person picks. Edges may repeat. `to` is a step id, "@end" or "@safe".
"""

from __future__ import annotations

from typing import Literal

from fieldkit.sheet.parts import Condition, Effects, Part

END = "@end"
SAFE = "@safe"


class Move(Part):
    id: str
    origin: str
    to: str
    on: Literal["done", "pass", "fail", "option"]
    choice: str | None = None
    manner: Literal["plain", "again", "deviation", "stop"] = "plain"
    #: button text where the person picks, "Up to {level}" may name the step's level
    label: str = ""
    #: all must hold
    gate: tuple[Condition, ...] = ()
    effects: Effects = Effects()
