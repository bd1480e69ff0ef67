"""The scale of a wait: elapsed time against a limit of at least so much. Twin: static/core/drawing/wait.js.

Model: elapsed, least (seconds, decimal strings), width (px), ink. The lesser of the two clocks is the caller's matter.
"""

from __future__ import annotations

from typing import Any

from fieldkit.drawing import says
from fieldkit.drawing.number import px, ratio, wide
from fieldkit.drawing.paint import path, rect, svg, words

_PAD, _TOP, _HIGH = 60, 500, 320
_FOOT = _TOP + _HIGH
#: seconds between (minor, major) ticks, the first that leaves at most six figures
_STEPS = (
    (1, 5),
    (2, 10),
    (10, 30),
    (10, 60),
    (30, 120),
    (60, 300),
    (120, 600),
    (300, 1800),
    (600, 3600),
    (1800, 7200),
    (3600, 21600),
    (21600, 86400),
)


def wait(model: dict[str, Any]) -> str:
    """One wait as SVG text, its sentence as its name."""
    ink, width = model.get("ink", "screen"), int(model.get("width") or 572) * 10
    elapsed, least = says.whole(model.get("elapsed")), max(1, says.whole(model.get("least"), True))
    end = max(least + least // 5 + 1, elapsed + elapsed // 10)

    def x(seconds: int) -> int:
        return _PAD + ratio(seconds * (width - 2 * _PAD), end)

    post, now = x(least), x(elapsed)
    out = rect(ink, "key", post, _TOP, width - _PAD - post, _HIGH)
    out += path(
        ink, f"M{px(post)} {px(_TOP)}H{px(width - _PAD)}M{px(post)} {px(_FOOT)}H{px(width - _PAD)}", "", "ink", "2"
    )
    out += rect(ink, "out", _PAD, _TOP, post - _PAD, _HIGH) + rect(
        ink, "ink-2", _PAD, _TOP, min(now, post) - _PAD, _HIGH
    )
    out += _ticks(ink, width, end, least, x(least), x)
    out += rect(ink, "ink", post - 30, _TOP - 100, 60, _HIGH + 220)
    label = _span(least)
    at = min(post, width - wide(label, 18) // 2)
    out += words(ink, at, _FOOT + 310, 18, label, weight="600") + words(
        ink, at, _FOOT + 520, 16, "at least", role="ink-2"
    )
    out += path(ink, f"M{px(now)} {px(_TOP - 40)}V{px(_FOOT)}", "", "ink", "3.5")
    out += path(ink, f"M{px(now)} {px(_TOP + 30)}l-11 -22h22z", "ink")
    if elapsed < least:
        out += _left(ink, now, post, says.clock(least - elapsed) + " left")
    return svg(ink, "wait", px(width), px(_FOOT + 560), says.wait(model), out)


def _span(seconds: int) -> str:
    """A round time as words: 15 min, 40 s, 1 h 30 min."""
    if seconds % 60 and seconds < 3600:
        return f"{seconds} s" if seconds < 60 else f"{seconds // 60} min {seconds % 60} s"
    minutes = seconds // 60
    if minutes < 60:
        return f"{minutes} min"
    return f"{minutes // 60} h {minutes % 60} min" if minutes % 60 else f"{minutes // 60} h"


def _ticks(ink: str, width: int, end: int, least: int, post: int, x: Any) -> str:
    minor, major = next((s for s in _STEPS if end // s[1] <= 5), _STEPS[-1])
    fine, coarse, out = "", "", ""
    for t in range(0, end + 1, minor):
        if t % major:
            fine += f"M{px(x(t))} {px(_FOOT)}v6"
            continue
        coarse += f"M{px(x(t))} {px(_FOOT)}v11"
        label = _span(t) if t else "0 min" if major >= 60 else "0 s"
        half = wide(label, 16) // 2
        at = max(x(t), half)
        if abs(at - post) > half + wide(_span(least), 18) // 2 + 60 and at + half < width:
            out += words(ink, at, _FOOT + 300, 16, label, role="ink-2")
    return path(ink, fine, "", "line", "1") + path(ink, coarse, "", "ink-2", "1.5") + out


def _left(ink: str, now: int, post: int, label: str) -> str:
    y, reach = 180, wide(label, 18)
    out = path(
        ink, f"M{px(now)} {px(_TOP - 220)}V{px(y - 60)}M{px(post)} {px(_TOP - 130)}V{px(y - 60)}", "", "ink-2", "1"
    )
    if post - now > reach + 440:
        m = (now + post) // 2
        line = f"M{px(now + 80)} {px(y)}H{px(m - reach // 2 - 60)}M{px(m + reach // 2 + 60)} {px(y)}H{px(post - 80)}"
        heads = f"M{px(now)} {px(y)}l12 -4v8zM{px(post)} {px(y)}l-12 -4v8z"
        return (
            out
            + path(ink, line, "", "ink", "1.5")
            + path(ink, heads, "ink")
            + words(ink, m, y + 55, 18, label, weight="500")
        )
    line = f"M{px(now - 300)} {px(y)}H{px(now - 80)}M{px(post + 80)} {px(y)}H{px(post + 300)}"
    heads = f"M{px(now)} {px(y)}l-12 -4v8zM{px(post)} {px(y)}l12 -4v8z"
    out += path(ink, line, "", "ink", "1.5") + path(ink, heads, "ink")
    if now - 380 >= reach:
        return out + words(ink, now - 380, y + 55, 18, label, "end", "500")
    return out + words(ink, post + 380, y + 55, 18, label, "start", "500")
