"""Step kinds: each a model of what a writer writes, and a function that lowers it to controls, moves and conditions.

To add a kind: a module here with its Kind, one line in KINDS, an example in tests/steps/<kind>.yaml. Nothing after
the compiler knows kinds, so no other file changes.
"""

from __future__ import annotations

from fieldkit.steps import (
    act,
    caution,
    choose,
    clear,
    dwell,
    earth,
    hands,
    hold,
    lift,
    lock,
    picture,
    prove,
    raise_,
    read,
    remark,
    unlock,
    work_out,
)  # fmt: skip
from fieldkit.steps.base import Kind

KINDS: dict[str, Kind] = {
    "caution": caution.KIND,
    "act": act.KIND,
    "lock": lock.KIND,
    "unlock": unlock.KIND,
    "prove": prove.KIND,
    "earth": earth.KIND,
    "lift": lift.KIND,
    "read": read.KIND,
    "dwell": dwell.KIND,
    "raise": raise_.KIND,
    "work_out": work_out.KIND,
    "choose": choose.KIND,
    "hold": hold.KIND,
    "picture": picture.KIND,
    "remark": remark.KIND,
    "hands": hands.KIND,
    "clear": clear.KIND,
}
