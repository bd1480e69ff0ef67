"""Paint and text of drawings: colour roles as classes on screen, as attributes in print; hatching as plain lines.

Roles are the tokens of static/css/tokens.css; static/css/drawing.css gives each role its two classes (f- fill,
s- stroke). Print values are the light theme's, so that a page reads alike and copies in black.
Twin: static/core/drawing/paint.js. No inline style anywhere: the pages' content security policy forbids it.
"""

from __future__ import annotations

from fieldkit.drawing.number import px

#: role -> print colour; `current` takes the colour of the text around a symbol, `hole` the ground behind it
PRINT = {
    "ink": "#0D171C",
    "ink-2": "#2F3C43",
    "line": "#6B787F",
    "hair": "#B4BEC0",
    "out": "#CDD3D3",
    "key": "#FFFFFF",
    "panel": "#FFFFFF",
    "ground": "#FFFFFF",
    "hole": "#FFFFFF",
    "danger": "#B0101A",
    "on-danger": "#FFFFFF",
    "caution": "#FFCF1A",
    "on-caution": "#0D171C",
    "current": "#0D171C",
    "cross": "#B0101A",
}


def paint(ink: str, fill: str = "", stroke: str = "", width: str = "", dash: str = "") -> str:
    """Attributes for one shape, with a leading space. An empty fill is none; an empty stroke is left out."""
    out, classes = "", []
    for kind, letter, role in (("fill", "f", fill), ("stroke", "s", stroke)):
        if not role:
            out += ' fill="none"' if kind == "fill" else ""
        elif ink == "print":
            out += f' {kind}="{PRINT[role]}"'
        elif role in ("current", "cross"):
            out += f' {kind}="currentColor"'
        else:
            classes.append(f"{letter}-{role}")
    if classes:
        out = f' class="{" ".join(classes)}"' + out
    if width:
        out += f' stroke-width="{width}"'
    if dash:
        out += f' stroke-dasharray="{dash}"'
    return out


def rect(ink: str, role: str, x: int, y: int, w: int, h: int) -> str:
    """A filled rectangle, in tenths of a pixel; nothing where it has no width."""
    if w <= 0 or h <= 0:
        return ""
    return f'<rect{paint(ink, role)} x="{px(x)}" y="{px(y)}" width="{px(w)}" height="{px(h)}"/>'


def path(ink: str, d: str, fill: str = "", stroke: str = "", width: str = "", dash: str = "") -> str:
    return f'<path{paint(ink, fill, stroke, width, dash)} d="{d}"/>'


def words(
    ink: str, x: int, y: int, size: int, text: str, anchor: str = "middle", weight: str = "", role: str = "ink"
) -> str:
    heavy = f' font-weight="{weight}"' if weight else ""
    return (
        f'<text{paint(ink, role)} x="{px(x)}" y="{px(y)}" font-size="{size}" text-anchor="{anchor}"{heavy}>'
        f"{escape(text)}</text>"
    )


def hatch(x0: int, x1: int, y0: int, y1: int, period: int, falling: bool = False) -> str:
    """Path data of 45 degree lines clipped to a rectangle, on one grid for the whole drawing so that bands join."""
    d, high = "", y1 - y0
    first = (x0 // period) * period
    last = x1 + high
    c = first
    while c <= last:
        left, right = max(x0, c - high), min(x1, c)
        if left < right:
            down, up = y0 + (c - left), y0 + (c - right)
            if falling:
                down, up = y1 - (c - left), y1 - (c - right)
            d += f"M{px(left)} {px(down)}L{px(right)} {px(up)}"
        c += period
    return d


def escape(text: str) -> str:
    """Text for an attribute or a text node."""
    return text.replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;").replace('"', "&quot;")


def svg(ink: str, kind: str, w: str, h: str, says: str, body: str) -> str:
    """The whole drawing: named by its sentence, or hidden from readers where the words stand beside it."""
    label = f'role="img" aria-label="{escape(says)}"' if says else 'aria-hidden="true"'
    font = ' font-family="Plex Sans"' if ink == "print" else ""
    name = "" if ink == "print" else f' class="{kind}"'
    box = f'viewBox="0 0 {w} {h}" width="{w}" height="{h}"'
    return f'<svg xmlns="http://www.w3.org/2000/svg"{name} {box}{font} {label}>{body}</svg>'
