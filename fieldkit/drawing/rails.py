"""The energy rails of one row: each source's lane before and after, and where in the row it changes.

Weight and side say the state twice: thin at the left is off, heavy at the right is on; hollow or light is planned.
Model: lanes [{"title", "before", "after"?, "warming"?, "decay"?, "mark"?}], at (per cent of the row's height, "50"),
planned (the change is still to come), coming (all of the row is), lane, pad (px), ink, named (give it its sentence:
else hidden from readers, because the words stand beside the rails). The drawing stretches with its row.
Twin: static/core/drawing/rails.js.
"""

from __future__ import annotations

from typing import Any

from fieldkit.drawing import says
from fieldkit.drawing.marks import figure
from fieldkit.drawing.number import px
from fieldkit.drawing.paint import escape, paint

#: states with a lock on the lane
_LOCKED = ("locked", "proved", "earthed")
#: states in which energy is there
LIVE = ("on", "standby", "cut-off")
_MARK = {"locked": "lock", "proved": "proved", "earthed": "earth", "unknown": "unknown"}


def rails(model: dict[str, Any]) -> str:
    """The lanes of one row as SVG text, as wide as its lanes and as high as what holds it."""
    ink, lane, pad = model.get("ink", "screen"), int(model.get("lane") or 25) * 10, int(model.get("pad") or 0) * 10
    at = int(model.get("at") or 50)
    width = lane * len(model["lanes"]) + 2 * pad
    body = "".join(_lane(ink, pad + k * lane + lane // 2, at, one, model) for k, one in enumerate(model["lanes"]))
    label = f'role="img" aria-label="{escape(says.rails(model))}"' if model.get("named") else 'aria-hidden="true"'
    name = ' class="rails"' if ink != "print" else ""
    return f'<svg xmlns="http://www.w3.org/2000/svg"{name} width="{px(width)}" height="100%" {label}>{body}</svg>'


def _lane(ink: str, x: int, at: int, lane: dict[str, Any], model: dict[str, Any]) -> str:
    before, after = lane["before"], lane.get("after") or lane["before"]
    coming = bool(model.get("coming"))
    later = coming or (bool(model.get("planned")) and after != before)
    out = _half(ink, x, 0, at, before, coming, bool(lane.get("warming")), False)
    out += _half(ink, x, at, 100 - at, after, later, False, bool(lane.get("decay")))
    if after != before and _crosses(before, after):
        edge = f'<path{paint(ink, "", "ink", "2.5")} d="M-5 0H5.5"/>'
        out += f'<svg x="{px(x)}" y="{at}%" overflow="visible">{edge}</svg>'
    shown = lane.get("mark") or (_MARK.get(after) if after != before else None)
    if not shown:
        return out
    planned = (later and after != before) or coming
    name = f"{shown}-planned" if planned and shown in ("lock", "proved", "earth") else shown
    where = at if after != before else 50
    drawn = f'<g transform="translate(0 -12) scale(1.18)">{figure(name, ink)}</g>'
    return f'{out}<svg x="{px(x - 120)}" y="{where}%" overflow="visible">{drawn}</svg>'


def _crosses(before: str, after: str) -> bool:
    """Whether the change is drawn as an edge across the lane: only where energy comes or goes."""
    return (before in LIVE) != (after in LIVE)


def _half(ink: str, x: int, y: int, high: int, state: str, planned: bool, warming: bool, decay: bool) -> str:
    """One half of a lane: from y, high per cent."""
    if high <= 0:
        return ""
    if warming or decay:
        taper = "M0 0H1.6L6.5 100H0Z" if warming else "M0 0H6.5L1.6 100H0Z"
        left = x - 10 if warming else x - 50
        return (
            f'<svg x="{px(left)}" y="{y}%" width="6.5" height="{high}%" viewBox="0 0 6.5 100"'
            ' preserveAspectRatio="none">'
            f'<path{paint(ink, "ink")} d="{taper}"/></svg>'
        )

    def line(at: int, width: str, role: str, dash: str = "") -> str:
        return f'<line{paint(ink, "", role, width, dash)} x1="{px(at)}" y1="{y}%" x2="{px(at)}" y2="{y + high}%"/>'

    if state in LIVE:
        if planned:
            return line(x - 1, "1.75", "ink-2") + line(x + 46, "1.75", "ink-2")
        if state == "standby":
            return line(x + 22, "3", "ink")
        teeth = line(x - 20, "4", "ink", "2 10") if state == "cut-off" else ""
        return teeth + line(x + 22, "6.5", "ink")
    if state in _LOCKED:
        return line(x - 35, "2", "ink-2", "5 6") if planned else line(x - 35, "3", "ink", "5 6")
    if state == "unknown":
        return line(x - 40, "2", "ink-2", "2 5") + line(x + 22, "2", "ink-2", "2 5")
    return line(x - 40, "2", "ink-2", "2 4") if planned else line(x - 40, "2", "ink-2")
