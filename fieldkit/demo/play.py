"""Works a run through the engine as a prudent person would: reads, waits, takes a failing reading again, signs.

    play(run, answers, until=None)      answers: step id -> text, list of texts for successive visits, or choice

A reading that the answers do not name is taken at its nameplate value, else well inside its limits. Nothing here
decides what is allowed; a refusal of the engine ends the play with its words. Pictures are drawn and say so.
"""

from __future__ import annotations

import hashlib
import io
from collections import Counter
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from decimal import Decimal
from typing import Any

from PIL import Image, ImageDraw

from fieldkit.demo.tablet import Run
from fieldkit.errors import Refusal
from fieldkit.record.basis import STATEMENTS

Plain = dict[str, Any]
Answers = Mapping[str, str | Sequence[str]]

#: seconds that a person takes over a step, by control; the rest takes 15
PACE = {"caution": 25, "number": 12, "prove": 90, "lock": 60, "picture": 20, "remark": 30, "hold": 40}
RETAKE = "The meter had not settled."
FALL_BACK = "A burst of gas; the pump recovers."


@dataclass
class Walk:
    """A run being worked: who records, who else is there, and what the meters show."""

    run: Run
    answers: Answers
    recorder: str
    second: str
    remarks: str = "As it should be."
    visits: Counter[str] = field(default_factory=Counter)

    def value(self, step: Plain, default: str) -> str:
        said = self.answers.get(step["id"], default)
        if isinstance(said, str):
            return said
        return said[min(self.visits[step["id"]], len(said)) - 1]


def play(walk: Walk, until: str | None = None, most: int = 400) -> None:
    """On to the end of the procedure, or to the step `until`. Raises Refusal not-played where it leads nowhere."""
    for _ in range(most):
        state = walk.run.state
        if state["phase"] != "going" or state["node"] in ("@end", until):
            return
        _step(walk)
    raise Refusal("not-played", f"The run does not come to an end; it stands at {walk.run.state['node']}.")


def _step(walk: Walk) -> None:
    seen, clock = walk.run.progress(), walk.run.tablet.clock
    if walk.run.state["pending"]:
        way = next((m for m in seen["moves"] if m["open"] and m["manner"] in ("plain", "again")), None)
        if way is None:
            raise Refusal("not-played", f"At {seen['node']} only stopping is open.")
        reason = RETAKE if way["manner"] == "again" else FALL_BACK
        walk.run.command(walk.recorder, do="went-on", move=way["move"], reason=reason)
        return
    if not seen["open"]:
        left = [reason["left"] for reason in seen["reasons"]]
        if not left or any(one is None for one in left):
            raise Refusal("not-played", " ".join(reason["says"] for reason in seen["reasons"]))
        clock.pass_by(float(max(left)) + 4)
        seen = walk.run.progress()
    step = seen["step"]
    control = step["control"]["control"]
    clock.pass_by(PACE.get(control, 15))
    walk.visits[step["id"]] += 1
    walk.run.command(walk.recorder, **_ANSWERS[control](walk, step, seen))
    due = walk.run.state["unsigned"]
    if due:
        walk.run.sign(due["person"], due["meaning"], step["control"].get("statement") or STATEMENTS[due["meaning"]])


def inside(step: Plain, seen: Plain) -> str:
    """The nameplate's value where there is one, else well inside the limits, at the resolution."""
    limits = seen["limits"] or {}
    low, high, plate = limits.get("low"), limits.get("high"), seen["plate"]
    digit = Decimal(limits.get("resolution") or "0.1")
    if plate is not None:
        return str(plate)
    if low is not None and high is not None:
        return str(low) if low == high else _at((Decimal(low) + Decimal(high)) / 2, digit)
    if low is not None:
        return _at(Decimal(low) + abs(Decimal(low)) / 5, digit)
    if high is not None:
        return _at(Decimal(high) - abs(Decimal(high)) * 3 / 4, digit)
    return "14"


def _at(value: Decimal, digit: Decimal) -> str:
    return format(value.quantize(digit), "f")


def correct(walk: Walk, step: str, text: str, reason: str) -> None:
    """The latest reading of `step` was typed wrong: its text is put right, the old one stays."""
    row = next(r for r in reversed(walk.run.state["log"]) if r["step"] == step and r["kind"] == "read")
    walk.run.tablet.clock.pass_by(14)
    walk.run.command(walk.recorder, do="corrected", seq=row["seq"], field="text", text=text, reason=reason)


def picture(run: Run, caption: str) -> Plain:
    """A drawn picture for a step; kept with the run and sent after it."""
    data = drawing(caption)
    sha256 = hashlib.sha256(data).hexdigest()
    run.pictures[sha256] = data
    return {"sha256": sha256, "media": "image/jpeg", "width": 960, "height": 640, "size": len(data), "note": caption}


def drawing(caption: str) -> bytes:
    """A JPEG that says what it stands for, and that it is no photograph."""
    image = Image.new("RGB", (960, 640), (223, 228, 227))
    draw = ImageDraw.Draw(image)
    for row, top in enumerate((90, 270)):
        for column in range(3):
            left = 60 + column * 290
            draw.rectangle((left, top, left + 260, top + 150), outline=(13, 23, 28), width=4, fill=(251, 252, 251))
            draw.line((left + 30, top + 110, left + 230, top + 110), fill=(107, 120, 127), width=3)
            draw.line((left + 130, top + 110, left + 90 + 25 * column + 10 * row, top + 40), fill=(13, 23, 28), width=5)
    draw.text((60, 480), caption, fill=(13, 23, 28), font_size=30)
    draw.text((60, 530), "Drawn for the demonstration; no photograph.", fill=(47, 60, 67), font_size=24)
    out = io.BytesIO()
    image.save(out, "JPEG", quality=82)
    return out.getvalue()


def _prove(walk: Walk, step: Plain, seen: Plain) -> Plain:
    points = [{"name": one["name"], "text": walk.value(step, "2")} for one in step["control"]["points"]]
    return {"do": "proved", "before": "502", "after": "501", "points": points}


_ANSWERS: dict[str, Callable[[Walk, Plain, Plain], Plain]] = {
    "caution": lambda w, s, p: {"do": "acknowledged", "heard": w.run.state["started"]["present"]},
    "confirm": lambda w, s, p: {"do": "confirmed"},
    "number": lambda w, s, p: {"do": "read", "text": w.value(s, inside(s, p))},
    "prove": _prove,
    "lock": lambda w, s, p: {"do": "locked", "lock": str(43 + len(w.run.state["locks"])), "tag": "T-88"},
    "unlock": lambda w, s, p: {"do": "unlocked"},
    "earth": lambda w, s, p: {"do": "earthed"},
    "lift": lambda w, s, p: {"do": "lifted"},
    "choice": lambda w, s, p: {"do": "chosen", "value": w.value(s, s["control"]["options"][0]["value"])},
    "hold": lambda w, s, p: {"do": "released", "who": w.second},
    "picture": lambda w, s, p: {"do": "pictured", **picture(w.run, s["title"])},
    "remark": lambda w, s, p: {"do": "remarked", "text": w.value(s, w.remarks)},
    "result": lambda w, s, p: {"do": "worked-out"},
    "wait": lambda w, s, p: {"do": "waited"},
    "people": lambda w, s, p: {"do": "people-counted", "names": ["J. Vell"]},
}
