"""What is wrong with a formula, and in which column: the words for a writer.

Not here: what is checked (parse.py, check.py).
"""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterable
from dataclasses import dataclass

from lark import UnexpectedCharacters, UnexpectedEOF, UnexpectedInput, UnexpectedToken

from fieldkit import units


@dataclass(frozen=True)
class Spot:
    """One thing wrong in a formula: 1-based column and width inside its text, code, what it is, what to write."""

    column: int
    width: int
    code: str
    message: str
    remedy: str = ""


class Unreadable(Exception):
    """A formula that cannot be used; carries its Spots in order of column."""

    def __init__(self, spots: list[Spot]) -> None:
        self.spots = sorted(spots, key=lambda s: s.column)
        super().__init__("; ".join(f"column {s.column}: {s.message} [{s.code}]" for s in self.spots))


def one_of(wrong: str, known: Iterable[str]) -> str:
    """ "write a", or "write one of: a, b": the known words most like the wrong one, or the first few of them."""
    names = list(dict.fromkeys(known))
    close = nearest(wrong, names) or names[:8]
    if not close:
        return ""
    return f"write {close[0]}" if len(close) == 1 else f"write one of: {', '.join(close)}"


def nearest(wrong: str, known: Iterable[str]) -> list[str]:
    """The known words most like the wrong one, best first; at most four, none where none is like it."""
    return difflib.get_close_matches(wrong, list(known), n=4, cutoff=0.6)


#: signs that look like one of the language, what they are, and what to write
_SIGNS = {
    **dict.fromkeys("\u2010\u2011\u2012\u2013\u2014", ("a dash, not a minus", "write -")),
    **dict.fromkeys("\u2219\u22c5\u2022", ("another dot", "write *")),
    **dict.fromkeys("\u00f7\u2215\u2044", ("another sign of division", "write /")),
    **dict.fromkeys("[]{}", ("another bracket", "write ( and )")),
    **dict.fromkeys("\u2103\u00ba\u00b0", ("a sign of degrees alone", "write degC, or deg for an angle")),
    "\u00b2": ("a raised 2", "write ^ 2"),
    "\u00b3": ("a raised 3", "write ^ 3"),
    "\u221a": ("a root sign", "write sqrt( and )"),
    "\u03c0": ("the number pi", "write 3.14159265358979"),
    ";": ("another comma", "write ,"),
}

_GLUED = re.compile(r"([0-9]+(?:\.[0-9]+)?)([A-Za-zµμΩ°%][A-Za-z0-9µμΩ°/%]*)")
_POINT_FIRST = re.compile(r"\.([0-9]+)")
_POINT_LAST = re.compile(r"([0-9]+)\.(?![0-9])")
_MINUS_IN_POWER = re.compile(r"([0-9]+(?:\.[0-9]+)?[eE])[\u2212\u2013]([0-9]+)")


def diagnose(text: str, exc: UnexpectedInput) -> Spot:
    """The Spot for a formula that the grammar does not allow, with the likeliest cause in a writer's words."""
    if isinstance(exc, UnexpectedEOF) or (isinstance(exc, UnexpectedToken) and exc.token.type == "$END"):
        return _at_end(text)
    at = exc.pos_in_stream or 0
    number = _number_at(text, at)
    if number is not None:
        return number
    if isinstance(exc, UnexpectedToken):
        return _token(text, at, str(exc.token))
    assert isinstance(exc, UnexpectedCharacters)
    return _character(text, at)


def _at_end(text: str) -> Spot:
    if re.search(r"(?:state|choice) *\([^()]*\)\s*$", text):
        return Spot(
            len(text), 1, "formula-syntax", "a state or choice is compared with one word", "write = and the word"
        )
    if text.count("(") > text.count(")"):
        return Spot(len(text), 1, "formula-syntax", "a bracket is never closed", "write ) where it ends")
    return Spot(len(text), 1, "formula-syntax", "the formula ends too early", "write what belongs after this")


def _number_at(text: str, at: int) -> Spot | None:
    """A number that is not written as one: 27kV, .5, 5. or 1,5."""
    if power := _MINUS_IN_POWER.match(text, at):
        first, last = power.groups()
        says = "another sign than - stands in the exponent"
        return Spot(at + 1, len(power[0]), "number-form", says, f"write {first}-{last}")
    if glued := _GLUED.match(text, at):
        digits, letters = glued.groups()
        width = len(glued[0])
        if units.unit(letters):
            says = "there is no space between number and unit"
            return Spot(at + 1, width, "no-space-before-unit", says, f"write {digits} {letters}")
        return Spot(at + 1, width, "name-starts-with-digit", "a name cannot start with a digit", "put a letter first")
    if first := _POINT_FIRST.match(text, at):
        return Spot(at + 1, len(first[0]), "number-form", "no digit before the point", f"write 0.{first[1]}")
    if last := _POINT_LAST.match(text, at):
        return Spot(at + 1, len(last[0]), "number-form", "no digit after the point", f"write {last[1]}")
    if text[at : at + 1] == "," and re.search(r"[0-9]$", text[:at]) and re.match(r",[0-9]", text[at:]):
        return Spot(at + 1, 1, "number-form", "a comma stands between digits", "write a point in numbers, like 1.5")
    return None


def _token(text: str, at: int, found: str) -> Spot:
    before = text[:at].rstrip()
    if re.search(r"(?:^|[^A-Za-z0-9_])[0-9]+(?:\.[0-9]+)?$", before) and re.match(r"[A-Za-z_%°µμΩ]", found):
        word = re.match(r"[A-Za-z0-9_%°µμΩ/]+", text[at:])
        symbol = word[0] if word else found
        likely = units.near(symbol)
        remedy = f"write {likely[0]}" if len(likely) == 1 else f"write one of: {', '.join(likely)}"
        message = f'"{symbol}" is no unit known here'
        return Spot(
            at + 1, len(symbol), "unknown-unit", message, remedy if likely else "write a unit such as V, kV, A, uA"
        )
    if re.search(r"(?:state|choice) *\([^()]*\)$", before):
        remedy = "write = or != and one word, like state(heater) = on"
        return Spot(at + 1, max(1, len(found)), "formula-syntax", "a state or choice is compared with one word", remedy)
    if found == "*" and before.endswith("*"):
        return Spot(at + 1, 1, "formula-syntax", "two signs of multiplication", "write one *, or ^ for a power")
    if re.match(r"[0-9]", found) and re.search(r"(?:^|[^A-Za-z0-9_])[0-9.]+$", before):
        says = "a number follows a number without a sign between them"
        return Spot(at + 1, len(found), "formula-syntax", says, "write 1200 without a space, or a sign between them")
    if found == "=" and before.endswith("="):
        return Spot(at + 1, 1, "formula-syntax", "two equals signs", "write one =")
    if found in ("<", ">", "<=", ">=", "=", "!=", "≤", "≥", "≠"):
        return Spot(at + 1, len(found), "formula-syntax", "a second comparison", "write a < b and b < c")
    remedy = "write a comma before it" if re.match(r"\w+ *=", text[at:]) else "look at what stands before it"
    return Spot(at + 1, max(1, len(found)), "formula-syntax", f'"{found}" cannot stand here', remedy)


def _character(text: str, at: int) -> Spot:
    char = text[at]
    if char == '"':
        return Spot(at + 1, 1, "formula-syntax", "a quote is never closed", 'close it with "')
    if char in "'\u201c\u201d\u201e":
        return Spot(at + 1, 1, "formula-syntax", "these are other quotes", 'write "..."')
    if char == "&" or char == "|":
        return Spot(at + 1, 1, "formula-syntax", f'"{char}" is not used here', "write and, or or")
    if char.isspace():
        return Spot(at + 1, 1, "formula-syntax", "this is not an ordinary space", "write an ordinary space")
    if char in _SIGNS:
        what, remedy = _SIGNS[char]
        return Spot(at + 1, 1, "formula-syntax", f'"{char}" is {what}', remedy)
    word = re.match(r"[A-Za-z0-9_]+", text[at:])
    found = word[0] if word else char
    if re.match(r"[A-Za-z0-9_]", found):
        return _token(text, at, found)
    return Spot(at + 1, 1, "formula-syntax", f'"{found}" is not used in formulas', "take it out")
