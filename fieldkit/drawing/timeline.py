"""Energy over a run: the lanes with time to scale, down the page, and numbered balloons at what deserves attention.

Model: from, to (whole seconds of the day, may pass 86400), lanes [{"short", "title", "spans": [{"at", "state",
"warming"?, "decay"?}]}], balls [{"at", "lane", "n"}], width, height, lane (px), ink.
Twin: static/core/drawing/timeline.js.
"""

from __future__ import annotations

from typing import Any

from fieldkit.drawing import says
from fieldkit.drawing.number import px, ratio, wide
from fieldkit.drawing.paint import escape, paint, path, rect, svg, words
from fieldkit.drawing.rails import LIVE

_LEFT, _FONT = 480, 14
#: seconds between lines; the first that leaves room for its figures is taken
_STEPS = (60, 300, 600, 900, 1800, 3600, 7200, 10800, 21600, 43200, 86400)


def timeline(model: dict[str, Any]) -> str:
    """The whole drawing as SVG text, its sentence as its name."""
    ink, lanes = model.get("ink", "screen"), model["lanes"]
    width, height = int(model.get("width") or 218) * 10, int(model.get("height") or 534) * 10
    lane = int(model["lane"]) * 10 if model.get("lane") else min(190, (width - _LEFT - 450) // max(1, len(lanes)))
    top = max([wide(one["short"], _FONT) for one in lanes] + [200]) + 140
    start, end = model["from"], max(model["to"], model["from"] + 60)

    def y(at: int) -> int:
        return top + ratio((max(start, min(end, at)) - start) * (height - top - 80), end - start)

    right = _LEFT + lane * len(lanes)
    body = _grid(ink, start, end, right, y)
    for k, one in enumerate(lanes):
        x = _LEFT + lane * k + lane // 2 + 20
        turn = f'transform="translate({px(x + 45)} {px(top - 70)}) rotate(-90)"'
        body += f'<text{paint(ink, "ink")} {turn} font-size="{_FONT}">{escape(one["short"])}</text>'
        body += _lane(ink, x, one["spans"], end, y)
    body += _balls(ink, model.get("balls") or (), lane, right, height, y)
    return svg(ink, "timeline", px(width), px(height), says.timeline(model), body)


def _grid(ink: str, start: int, end: int, right: int, y: Any) -> str:
    high = y(end) - y(start)
    step = next((s for s in _STEPS if high * s >= 260 * (end - start)), _STEPS[-1])
    named = next((s for s in _STEPS if s % step == 0 and high * s >= 480 * (end - start)), _STEPS[-1])
    out = ""
    for t in range(-(-start // step) * step, end + 1, step):
        full = t % named == 0
        reach = 60 if full else 30
        out += path(ink, f"M{px(_LEFT - reach)} {px(y(t))}H{px(right + 60)}", "", "hair", "1" if full else "0.6")
        if full:
            out += words(ink, _LEFT - 90, y(t) + 49, _FONT, says.hour(t), "end", role="ink-2")
    return out


def _lane(ink: str, x: int, spans: Any, end: int, y: Any) -> str:
    on, off, out, marks = x + 30, x - 40, "", ""
    for k, span in enumerate(spans):
        if span["at"] >= end:
            continue
        stop = spans[k + 1]["at"] if k + 1 < len(spans) else end
        y0, y1 = y(span["at"]), y(stop)
        before = spans[k - 1]["state"] if k else span["state"]
        out += _span(ink, on, off, y0, y1, span)
        if (span["state"] in LIVE) != (before in LIVE):
            out += path(ink, f"M{px(off - 7)} {px(y0)}H{px(on + 25)}", "", "ink", "1.6")
        covered = k + 1 < len(spans) and spans[k + 1]["state"] in ("proved", "earthed") and y1 - y0 < 160
        if (
            span["state"] in ("locked", "proved", "earthed", "unknown")
            and not covered
            and (before != span["state"] or not k)
        ):
            # at the very start the mark stands below the lane's head, not on it
            marks += _mark(ink, off, y0 if k else y0 + 90, span["state"])
    return out + marks


def _span(ink: str, on: int, off: int, y0: int, y1: int, span: dict[str, Any]) -> str:
    state = span["state"]
    if y1 <= y0:
        return ""
    if span.get("warming"):
        return path(ink, f"M{px(on - 25)} {px(y0)}h1.2L{px(on + 25)} {px(y1)}h-5z", "ink")
    if span.get("decay"):
        return path(ink, f"M{px(off - 25)} {px(y0)}h5L{px(off + 7)} {px(y1)}h-1.4z", "ink")
    if state == "standby":
        return rect(ink, "ink", on - 25, y0, 25, y1 - y0)
    if state in LIVE:
        teeth = path(ink, f"M{px(on - 40)} {px(y0)}V{px(y1)}", "", "ink", "3", "1.5 6") if state == "cut-off" else ""
        return teeth + rect(ink, "ink", on - 25, y0, 50, y1 - y0)
    if state == "off":
        return path(ink, f"M{px(off)} {px(y0)}V{px(y1)}", "", "ink-2", "1.4")
    if state == "unknown":
        return path(ink, f"M{px(off)} {px(y0)}V{px(y1)}M{px(on)} {px(y0)}V{px(y1)}", "", "ink-2", "1.4", "1.5 4")
    return path(ink, f"M{px(off)} {px(y0)}V{px(y1)}", "", "ink", "2", "3.5 3.5")


def _mark(ink: str, off: int, y: int, state: str) -> str:
    """A small lock, filled when proved; the earth's three lines; a question."""
    shift = f'<g transform="translate({px(off - 55)} {px(y - 70)})"><path{paint(ink, "ground")} d="M-1 -1H12V14H-1Z"/>'
    if state == "earthed":
        return shift + path(ink, "M5.5 0V6.5M0.5 6.5H10.5M2.5 9.7H8.5M4.3 12.9H6.7", "", "ink", "1.6") + "</g>"
    if state == "unknown":
        return shift + words(ink, 55, 120, 13, "?", weight="600") + "</g>"
    body = path(ink, "M2.8 6V4.2a2.7 2.7 0 0 1 5.4 0V6", "", "ink", "1.5")
    return shift + body + path(ink, "M1 6H10V13H1Z", "ink" if state == "proved" else "panel", "ink", "1.5") + "</g>"


def _balls(ink: str, balls: Any, lane: int, right: int, height: int, y: Any) -> str:
    """Balloons at the right, pushed apart, each on a leader to its moment; the lowest are pushed back up."""
    order = sorted(balls, key=lambda b: (b["at"], b["n"]))
    places: list[int] = []
    for one in order:
        places.append(max(y(one["at"]), places[-1] + 260 if places else 0))
    floor = height - 120
    for k in range(len(places) - 1, -1, -1):
        places[k] = min(places[k], floor)
        floor = places[k] - 260
    out, bx, ex = "", right + 280, right + 20
    for one, at in zip(order, places, strict=True):
        x, here = _LEFT + lane * one["lane"] + lane // 2 + 50, y(one["at"])
        out += path(ink, f"M{px(x + 30)} {px(here)}H{px(ex)}L{px(bx - 110)} {px(at)}", "", "ink", "1.1")
        out += f'<circle{paint(ink, "panel", "ink", "1.5")} cx="{px(x + 10)}" cy="{px(here)}" r="3.2"/>'
        out += f'<circle{paint(ink, "panel", "ink", "1.7")} cx="{px(bx)}" cy="{px(at)}" r="11.5"/>'
        out += words(ink, bx, at + 48, 13, str(one["n"]), weight="600")
    return out
