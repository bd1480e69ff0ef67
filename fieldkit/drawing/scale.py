"""The limit scale: one reading on its limits, with figures, in words and as a drawing.

Model (decimal strings in the unit shown; all but `unit` may be missing or None):
    value, u, unit, low, high, low_name, high_name, caution_low, caution_high (edges of the caution strips),
    accept_low, accept_high (acceptance limits, where the guard bands end), plate, plate_name,
    olds [{"value", "name"}] (as found, last run, earlier tries), margin (as judged, else computed), verdict, why,
    says, width (px), ink
Twin: static/core/drawing/scale.js. Geometry is that of the look studies.
"""

from __future__ import annotations

from typing import Any

from fieldkit.drawing import says
from fieldkit.drawing.number import parts, px, ratio, shown, text, wide
from fieldkit.drawing.paint import hatch, path, rect, svg, words
from fieldkit.drawing.spread import Spread, spread
from fieldkit.drawing.ticks import ticks

#: tenths of a pixel: sides, top of the channel, its height
_PAD, _TOP, _HIGH = 60, 500, 320
_FOOT = _TOP + _HIGH


def scale(model: dict[str, Any]) -> str:
    """One horizontal limit scale as SVG text, its sentence as its name."""
    ink, width = model.get("ink", "screen"), int(model.get("width") or 572) * 10
    s = spread(model, True)
    body = _channel(ink, s, width, model) + _axis(ink, s, width, model)
    lines, height = _figures(ink, s, width, model)
    body += lines + _olds(ink, s, width, model) + _reading(ink, s, width, model)
    return svg(ink, "scale", px(width), px(height), says.scale(model), body)


def _x(s: Spread, width: int, value: int) -> int:
    """Where a value lies, kept on the drawing."""
    at = _PAD + ratio((value - s.a) * (width - 2 * _PAD), s.b - s.a)
    return max(_PAD, min(width - _PAD, at))


def _at(s: Spread, width: int) -> int:
    """Where the reading's pointer stands: its place, or the end of a broken axis."""
    if s.far:
        return _PAD + 140 if s.far == "low" else width - _PAD - 140
    return _x(s, width, s.value or 0)


def _channel(ink: str, s: Spread, width: int, model: dict[str, Any]) -> str:
    left = _x(s, width, s.low) if s.low is not None else _PAD
    right = _x(s, width, s.high) if s.high is not None else width - _PAD
    out = rect(ink, "key", left, _TOP, right - left, _HIGH)
    value = judged(s, model)
    if s.low is not None:
        out += _outside(ink, _PAD, left, value is not None and value < s.low)
    if s.high is not None:
        out += _outside(ink, right, width - _PAD, value is not None and value > s.high)
    for limit, guard, caution in ((s.low, s.accept_low, s.caution_low), (s.high, s.accept_high, s.caution_high)):
        if limit is not None:
            out += _bands(ink, s, width, limit, guard, caution, value)
    dash = "6 4" if model.get("verdict") == "not judged" else ""
    edge = f"M{px(left)} {px(_TOP)}H{px(right)}M{px(left)} {px(_FOOT)}H{px(right)}"
    return out + path(ink, edge, "", "ink", "2", dash)


def _outside(ink: str, x0: int, x1: int, hit: bool) -> str:
    out = rect(ink, "danger" if hit else "out", x0, _TOP, x1 - x0, _HIGH)
    if hit and x1 > x0:
        out += path(ink, hatch(x0, x1, _TOP, _FOOT, 90), "", "on-danger", "0.8")
    return out


def _bands(
    ink: str, s: Spread, width: int, limit: int, guard: int | None, caution: int | None, value: int | None
) -> str:
    """Guard band cross-hatched from post to the acceptance limit, caution strip beyond; yellow where a reading is.

    A reading at the inner edge is clear of the band: the acceptance limit itself passes.
    """
    low = limit == s.low
    edges = [e for e in (guard, caution) if e is not None]
    if not edges:
        return ""
    inner = max(edges) if low else min(edges)
    hot = value is not None and in_band(value, limit, inner, low)
    x0, x1 = sorted((_x(s, width, limit), _x(s, width, inner)))
    role = "on-caution" if hot else "ink-2"
    out = rect(ink, "caution", x0, _TOP, x1 - x0, _HIGH) if hot else ""
    if x1 > x0:
        out += path(ink, hatch(x0, x1, _TOP, _FOOT, 90), "", role, "1.6")
    if guard is not None:
        g0, g1 = sorted((_x(s, width, limit), _x(s, width, guard)))
        if g1 > g0:
            out += path(ink, hatch(g0, g1, _TOP, _FOOT, 90, True), "", role, "1.6")
            edge = g1 if low else g0
            out += path(ink, f"M{px(edge)} {px(_TOP)}V{px(_FOOT)}", "", role, "2")
    return out


def judged(s: Spread, model: dict[str, Any]) -> int | None:
    """The reading where it is judged: colour says a verdict, so what is not judged gets none."""
    return None if model.get("verdict") == "not judged" else s.value


def in_band(value: int, limit: int, inner: int, low: bool) -> bool:
    """Whether a reading lies in the band beside a limit, whose inner edge does not belong to it."""
    return limit <= value < inner if low else inner < value <= limit


def _axis(ink: str, s: Spread, width: int, model: dict[str, Any]) -> str:
    """Ticks below the channel; figures only where no limit or nameplate figure is near."""
    t = ticks(s.a, s.b, s.places, max(3, width // 800))
    taken = [(_x(s, width, v), wide(shown(v, s.places, s.keep), 19)) for v in (s.low, s.high, s.plate) if v is not None]
    minor, major, out = "", "", ""
    v = -(-s.a // t.minor) * t.minor
    while v <= s.b:
        x = _x(s, width, v)
        if v % t.major:
            minor += f"M{px(x)} {px(_FOOT)}v6"
        else:
            major += f"M{px(x)} {px(_FOOT)}v11"
            figure = shown(v, s.places, t.keep)
            half = wide(figure, 16) // 2
            clear = all(abs(x - at) > half + size // 2 + 60 for at, size in taken)
            if clear and half + 10 < x < width - half - 10:
                out += words(ink, x, _FOOT + 300, 16, figure, role="ink-2")
        v += t.minor
    return path(ink, minor, "", "line", "1") + path(ink, major, "", "ink-2", "1.5") + out


def _place(x: int, width: int, size: int) -> tuple[int, str]:
    """Anchor for words about x that would otherwise run off the drawing."""
    if x - size // 2 < 0:
        return 0, "start"
    return (width, "end") if x + size // 2 > width else (x, "middle")


def _one_name(s: Spread, model: dict[str, Any]) -> bool:
    """Whether both limits carry the same name, and one of their own."""
    name = model.get("low_name")
    return bool(name) and name == model.get("high_name") and s.low is not None and s.high is not None


def _figures(ink: str, s: Spread, width: int, model: dict[str, Any]) -> tuple[str, int]:
    """Posts with their figures and names, and the nameplate's chain line; and the height that they need."""
    out, rows = "", _FOOT + 560
    size = 19 if width >= 4500 else 17
    right_of: list[tuple[int, int]] = []
    if s.plate is not None:
        chain = f"M{px(_x(s, width, s.plate))} {px(_TOP - 80)}V{px(_FOOT + 120)}"
        out += path(ink, chain, "", "ink", "1.8", "11 3 2.5 3")
    for value, field, given in ((s.low, "low", "lower limit"), (s.high, "high", "upper limit")):
        if value is None:
            continue
        x, name = _x(s, width, value), model.get(field + "_name") or given
        figure = text(model.get(field))
        out += rect(ink, "ink", x - 30, _TOP - 100, 60, _HIGH + 220)
        out += words(ink, *_pair(x, width, figure, size), size, figure, _place(x, width, wide(figure, size))[1], "600")
        if _one_name(s, model):
            # both limits have one name: it stands once, between them
            if field == "low":
                continue
            x = (_x(s, width, s.low or 0) + x) // 2
        reach = wide(name, 16)
        at, anchor = _place(x, width, reach)
        start = at if anchor == "start" else at - reach if anchor == "end" else at - reach // 2
        y = _FOOT + 520
        if any(start < end + 60 and begin - 60 < start + reach for begin, end in right_of):
            y, rows = _FOOT + 720, _FOOT + 760
        right_of.append((start, start + reach))
        out += words(ink, at, y, 16, name, anchor, role="ink-2")
    if s.plate is None:
        return out, rows
    figure, name = text(model.get("plate")), model.get("plate_name") or "nameplate"
    x = _x(s, width, s.plate)
    reach = max(wide(figure, 18), wide(name, 16))
    begin, end = x - reach // 2, x + reach // 2
    near = [v for v in (s.low, s.high) if v is not None and abs(_x(s, width, v) - x) < wide(figure, 18) + 60]
    if not near and not any(begin < e + 60 and b - 60 < end for b, e in right_of):
        out += words(ink, *_pair(x, width, figure, 18), 18, figure, _place(x, width, wide(figure, 18))[1], "500")
        at, anchor = _place(x, width, wide(name, 16))
        return out + words(ink, at, _FOOT + 520, 16, name, anchor, role="ink-2"), rows
    both = f"{name} {figure}"
    at, anchor = _place(x, width, wide(both, 16))
    return out + words(ink, at, rows + 160, 16, both, anchor, role="ink-2"), rows + 200


def _pair(x: int, width: int, figure: str, size: int) -> tuple[int, int]:
    return _place(x, width, wide(figure, size))[0], _FOOT + 310


def _olds(ink: str, s: Spread, width: int, model: dict[str, Any]) -> str:
    """Hollow pointers: not now. A name stands at the side that is clear, or is left to the sentence."""
    names = [f"{o['name']} {text(o['value'])}" for o in model.get("olds") or () if parts(o["value"]) is not None]
    order = sorted(range(len(s.olds)), key=lambda k: (s.olds[k], k))
    posts = [_x(s, width, v) for v in (s.low, s.high) if v is not None]
    taken = [(x - 60, x + 60) for x in posts] + [(_x(s, width, v) - 140, _x(s, width, v) + 140) for v in s.olds]
    if s.value is not None:
        taken.append((_at(s, width) - 150, _at(s, width) + 150))
    chain = [(_x(s, width, s.plate) - 20, _x(s, width, s.plate) + 20)] if s.plate is not None else []
    out, labels = "", ""
    for k in order:
        x, reach = _x(s, width, s.olds[k]), wide(names[k], 16)
        out += path(ink, f"M{px(x)} {px(_TOP + 10)}l-9 -17h18z", "panel", "ink", "2.2")
        for begin, anchor, at, also in (
            (x - 140 - reach, "end", x - 140, chain),
            (x + 140, "start", x + 140, chain),
            (x - 140 - reach, "end", x - 140, []),
            (x + 140, "start", x + 140, []),
        ):
            clear = all(begin + reach <= left or begin >= right for left, right in taken + also)
            if clear and begin >= 0 and begin + reach <= width:
                labels += words(ink, at, _TOP - 50, 16, names[k], anchor)
                taken.append((begin, begin + reach))
                break
    return out + labels


def _reading(ink: str, s: Spread, width: int, model: dict[str, Any]) -> str:
    if s.value is None:
        return ""
    x, middle = _at(s, width), _TOP + _HIGH // 2
    out = path(ink, f"M{px(x)} {px(_TOP + 30)}V{px(_FOOT - 30)}", "", "panel", "9")
    if s.far:
        out += _broken(ink, x, s.far)
    elif s.u:
        r = ratio(s.u * (width - 2 * _PAD), s.b - s.a)
        bar = f"M{px(x - r)} {px(middle)}H{px(x + r)}"
        out += path(ink, bar, "", "panel", "9")
        out += path(ink, f"{bar}M{px(x - r)} {px(middle - 90)}v18M{px(x + r)} {px(middle - 90)}v18", "", "ink", "3")
    out += path(ink, f"M{px(x)} {px(_TOP - 40)}V{px(_FOOT)}", "", "ink", "3.5")
    out += path(ink, f"M{px(x)} {px(_TOP + 30)}l-11 -22h22z", "ink")
    return out + _dimension(ink, s, width, x, model)


def _broken(ink: str, x: int, far: str) -> str:
    """The axis is broken between the limits and a reading too far off to draw in place."""
    at = x + 200 if far == "low" else x - 200
    d = "".join(f"M{px(at + k - 25)} {px(_FOOT + 60)}L{px(at + k + 25)} {px(_TOP - 60)}" for k in (-40, 40))
    gap = f"M{px(at - 65)} {px(_FOOT + 60)}L{px(at - 15)} {px(_TOP - 60)}H{px(at + 65)}L{px(at + 15)} {px(_FOOT + 60)}z"
    return path(ink, gap, "panel") + path(ink, d, "", "ink", "2")


def _dimension(ink: str, s: Spread, width: int, x: int, model: dict[str, Any]) -> str:
    """The margin as a dimension line to the nearest limit."""
    near = says.nearest(s)
    if near is None:
        return ""
    short = f"{near.size} {model.get('unit', '')}".strip()
    word = f"{near.word} {short}"
    at, y = _x(s, width, near.limit), 180
    p, q = min(x, at), max(x, at)
    out = path(ink, f"M{px(x)} {px(_TOP - 220)}V{px(y - 60)}M{px(at)} {px(_TOP - 130)}V{px(y - 60)}", "", "ink-2", "1")
    inside = f"M{px(p)} {px(y)}l12 -4v8zM{px(q)} {px(y)}l-12 -4v8z"
    for label in (word, short) if near.word == "margin" else (word,):
        reach = wide(label, 18)
        if q - p > reach + 440:
            m = (p + q) // 2
            line = f"M{px(p + 80)} {px(y)}H{px(m - reach // 2 - 60)}M{px(m + reach // 2 + 60)} {px(y)}H{px(q - 80)}"
            out += path(ink, line, "", "ink", "1.5") + path(ink, inside, "ink")
            return out + words(ink, m, y + 55, 18, label, weight="500")
    reach = wide(word, 18)
    if q - p > 400:
        out += path(ink, f"M{px(p + 80)} {px(y)}H{px(q - 80)}", "", "ink", "1.5") + path(ink, inside, "ink")
        left, right = p - 120, q + 120
    else:
        line = f"M{px(p - 300)} {px(y)}H{px(p - 80)}M{px(q + 80)} {px(y)}H{px(q + 300)}"
        heads = f"M{px(p)} {px(y)}l-12 -4v8zM{px(q)} {px(y)}l12 -4v8z"
        out += path(ink, line, "", "ink", "1.5") + path(ink, heads, "ink")
        left, right = p - 380, q + 380
    if left - reach >= 0:
        return out + words(ink, left, y + 55, 18, word, "end", "600")
    if right + reach <= width:
        return out + words(ink, right, y + 55, 18, word, "start", "600")
    return out + words(ink, left, y + 55, 18, short, "end", "600") if left >= wide(short, 18) else out
