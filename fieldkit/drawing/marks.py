"""Marks: a verdict as a small scale, and the symbols of the run. Twin: static/core/drawing/marks.js.

Each is drawn in the colour of the text around it (screen) or in ink (print), and always stands beside its word.
To add one: a line in VERDICTS or SYMBOLS of both twins, a vector.
"""

from __future__ import annotations

from fieldkit.drawing.paint import paint, svg

_POSTS = "M14 3V31M70 3V31"
VERDICTS = ("pass", "conditional pass", "conditional fail", "fail", "not judged")
#: symbol -> its width and height
SYMBOLS: dict[str, tuple[int, int]] = {
    "lock": (17, 21),
    "proved": (17, 21),
    "lock-planned": (17, 21),
    "proved-planned": (17, 21),
    "earth": (17, 21),
    "earth-planned": (17, 21),
    "unknown": (17, 21),
    "make-safe": (44, 48),
    "alert": (64, 58),
    "backspace": (40, 30),
    "camera": (30, 30),
    "pen": (30, 30),
    "hold": (30, 30),
    "trip": (30, 30),
}
_SHACKLE = "M4.5 10V6.6a4 4 0 0 1 8 0V10"
_TICK = "M5 14.4l2.6 2.6 4.6-5"


def mark(verdict: str, ink: str = "screen", says: str = "") -> str:
    """The mark of a verdict, 84 by 34: dot between posts, against a post, ring outside, cross well outside."""

    def line(d: str, width: str, role: str = "current") -> str:
        return f'<path{paint(ink, "", role, width)} d="{d}"/>'

    match verdict:
        case "pass":
            body = (
                line(_POSTS, "5") + line("M14 17H70", "2") + f'<circle{paint(ink, "current")} cx="42" cy="17" r="8.5"/>'
            )
        case "conditional pass":
            body = (
                line(_POSTS, "5") + line("M14 17H70", "2") + f'<circle{paint(ink, "current")} cx="59" cy="17" r="8.5"/>'
            )
        case "conditional fail":
            ring = f'<circle{paint(ink, "", "current", "3.5")} cx="72" cy="17" r="7"/>'
            body = line("M14 3V31M61 3V31", "5") + line("M14 17H61", "2") + ring
        case "fail":
            body = line("M8 3V31M48 3V31", "5") + line("M8 17H48", "2") + line("M65 9L79 25M79 9L65 25", "5", "cross")
        case _:
            body = f'<path{paint(ink, "", "current", "2.5", "7 5")} d="M14 5H70V29H14Z"/>'
    return svg(ink, "mark", "84", "34", says, body)


def symbol(name: str, ink: str = "screen", says: str = "") -> str:
    """A symbol of the run as SVG text; `hole` parts take the ground behind it."""
    w, h = SYMBOLS[name]
    return svg(ink, "symbol", str(w), str(h), says, figure(name, ink))


def figure(name: str, ink: str) -> str:
    """The shapes of a symbol, without the svg around them, for drawing it on a lane."""

    def line(d: str, width: str, dash: str = "") -> str:
        return f'<path{paint(ink, "", "current", width, dash)} d="{d}"/>'

    def solid(d: str, role: str = "current") -> str:
        return f'<path{paint(ink, role)} d="{d}"/>'

    ground = solid("M0 0H17V21H0Z", "hole")
    match name:
        case "lock":
            return (
                ground
                + line(_SHACKLE, "2.2")
                + f'<path{paint(ink, "hole", "current", "2.2")} d="M2.1 9.6H14.9V19.2H2.1Z"/>'
            )
        case "proved":
            return (
                ground
                + line(_SHACKLE, "2.2")
                + solid("M1 8.6H16V20.2H1Z")
                + f'<path{paint(ink, "", "hole", "2")} d="{_TICK}"/>'
            )
        case "lock-planned":
            return ground + line(_SHACKLE, "1.5") + line("M2.1 9.6H14.9V19.2H2.1Z", "1.5")
        case "proved-planned":
            return ground + line(_SHACKLE, "1.5") + line("M1.6 9.2H15.4V19.8H1.6Z", "1.5") + line(_TICK, "1.5")
        case "earth":
            return ground + line("M8.5 1V10", "2.2") + line("M1 10H16M3.8 14.5H13.2M6.4 19H10.6", "2.6")
        case "earth-planned":
            return ground + line("M8.5 1V10", "1.5") + line("M1 10H16M3.8 14.5H13.2M6.4 19H10.6", "1.5")
        case "unknown":
            return (
                ground
                + line("M4.2 7.2a4.4 4.4 0 1 1 6.6 3.8c-1.6 1-2.3 1.8-2.3 3.6", "2.4")
                + solid("M7.1 17H9.9V19.8H7.1Z")
            )
        case "make-safe":
            rails = solid("M9 0H13.5V25H9zM23 0H27.5V25H23zM37 0H41.5V25H37z")
            return line("M5 24H13M19 24H27M33 24H41", "2.5") + rails + line("M6 24V48M20 24V48M34 24V48", "2.5", "5 4")
        case "alert":
            stroke = (
                solid("M29 20h6l-1.3 19h-3.4z", "hole") + f'<circle{paint(ink, "hole")} cx="32" cy="46.5" r="3.6"/>'
            )
            return solid("M32 2L62.5 56H1.5Z") + stroke
        case "backspace":
            return line("M13 3H37V27H13L2 15Z", "2.5") + line("M19 10L29 20M29 10L19 20", "2.5")
        case "camera":
            lens = f'<circle{paint(ink, "", "current", "2.2")} cx="15" cy="16.5" r="5.5"/>'
            return line("M2 8h7l2.5-4h7L21 8h7v18H2z", "2.2") + lens
        case "pen":
            return line("M4 26l1.5-6.5L21 4l5 5L10.5 24.5z M17.5 7.5l5 5", "2.2")
        case "hold":
            heads = f'<circle{paint(ink, "current")} cx="10" cy="8" r="4"/>'
            heads += f'<circle{paint(ink, "", "current", "2.2")} cx="21" cy="8" r="4"/>'
            return heads + line("M3 26v-6a7 7 0 0 1 14 0v6M21 15a6 6 0 0 1 6 6v5", "2.2")
        case _:
            return line("M15 3V14M6.5 7.5a11 11 0 1 0 17 0", "2.5")
