"""The limit scale without figures, for table rows: limits always at 1/6 and 5/6 of the width, so rows compare by place.

Model as for `scale` (names and figures are not drawn). A reading off the drawing is an arrow at its edge.
Twin: static/core/drawing/tiny.js.
"""

from __future__ import annotations

from typing import Any

from fieldkit.drawing import says
from fieldkit.drawing.number import px, ratio
from fieldkit.drawing.paint import hatch, path, rect, svg
from fieldkit.drawing.scale import in_band, judged
from fieldkit.drawing.spread import Spread, spread

_TOP = 70


def tiny(model: dict[str, Any]) -> str:
    """One small scale as SVG text, `width` by `height` px (190 by 26), its sentence as its name."""
    ink = model.get("ink", "screen")
    width, height = int(model.get("width") or 190) * 10, int(model.get("height") or 26) * 10
    s, high = spread(model, False), height - 140
    foot = _TOP + high

    def x(value: int) -> int:
        return max(30, min(width - 30, 20 + ratio((value - s.a) * (width - 40), s.b - s.a)))

    left = x(s.low) if s.low is not None else 0
    right = x(s.high) if s.high is not None else width
    out = rect(ink, "out", 0, _TOP, width, high) + rect(ink, "key", left, _TOP, right - left, high)
    value = judged(s, model)
    under = value is not None and s.low is not None and value < s.low
    over = value is not None and s.high is not None and value > s.high
    if under:
        out += rect(ink, "danger", 0, _TOP, left, high)
    if over:
        out += rect(ink, "danger", right, _TOP, width - right, high)
    for limit, guard, caution in ((s.low, s.accept_low, s.caution_low), (s.high, s.accept_high, s.caution_high)):
        edges = [e for e in (guard, caution) if e is not None]
        if limit is None or not edges:
            continue
        inner = max(edges) if limit == s.low else min(edges)
        hot = value is not None and in_band(value, limit, inner, limit == s.low)
        c0, c1 = sorted((x(limit), x(inner)))
        if c1 <= c0:
            continue
        out += rect(ink, "caution", c0, _TOP, c1 - c0, high) if hot else ""
        role = "on-caution" if hot else "ink-2"
        out += path(ink, hatch(c0, c1, _TOP, foot, 40), "", role, "1.1")
        out += "" if guard is None else _guard(ink, x(limit), x(guard), foot, role)
    dash = "4 3" if model.get("verdict") == "not judged" else ""
    edge = f"M{px(left)} {px(_TOP)}H{px(right)}M{px(left)} {px(foot)}H{px(right)}"
    out += path(ink, edge, "", "ink", "1.2", dash)
    if s.plate is not None:
        out += path(ink, f"M{px(x(s.plate))} {px(_TOP - 30)}V{px(foot + 30)}", "", "ink", "1", "5 2 1 2")
    for limit in (s.low, s.high):
        if limit is not None:
            out += rect(ink, "ink", x(limit) - 18, _TOP - 40, 36, high + 80)
    for old in s.olds:
        out += path(ink, f"M{px(x(old))} {px(_TOP)}l-4.5 -7h9z", "panel", "ink", "1.3")
    if s.value is not None:
        bar = ratio(s.u * (width - 40), s.b - s.a)
        out += _pointer(ink, s, width, high, x(s.value), bar, under or over)
    return svg(ink, "tiny", px(width), px(height), says.scale(model), out)


def _guard(ink: str, post: int, accept: int, foot: int, role: str) -> str:
    """Crosses the hatching from the post to the acceptance limit."""
    g0, g1 = sorted((post, accept))
    if g1 <= g0:
        return ""
    edge = path(ink, f"M{px(accept)} {px(_TOP)}V{px(foot)}", "", role, "1.2")
    return path(ink, hatch(g0, g1, _TOP, foot, 40, True), "", role, "1.1") + edge


def _pointer(ink: str, s: Spread, width: int, high: int, x: int, bar: int, fail: bool) -> str:
    role, middle, foot = "on-danger" if fail else "ink", _TOP + high // 2, _TOP + high
    if s.far:
        way = -1 if s.far == "low" else 1
        tip = 10 if way < 0 else width - 10
        return path(ink, f"M{px(tip)} {px(middle)}l{-9 * way} -5.5v11z", role)
    out = ""
    if bar > 15:
        ends = f"M{px(x - bar)} {px(middle - 35)}v7M{px(x + bar)} {px(middle - 35)}v7"
        out = path(ink, f"M{px(x - bar)} {px(middle)}H{px(x + bar)}{ends}", "", role, "1.6")
    out += path(ink, f"M{px(x)} {px(_TOP)}V{px(foot)}", "", role, "2.2")
    return out + path(ink, f"M{px(x)} {px(_TOP + 20)}l-5.5 -9h11z", "ink")
