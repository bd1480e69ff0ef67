"""What a person writes after ± in a sum: how uncertain the number before it is.

    34 kV ± 1 %      35 degC +/- 0.2 K      2.2 A +- 10 mA

`split(text)` takes them out of the text, which the language then reads as ever; `bind` says to which number each
belongs and how wide it is in SI, or what is wrong with it. Percent is of the value; what has no natural zero (a
temperature in degC, a level in dB) or is itself in percent has none. Not here: what is made of it (carried.py).
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from decimal import Decimal
from functools import lru_cache

from fieldkit import values
from fieldkit.formula import parse
from fieldkit.formula.check import words
from fieldkit.formula.display import difference
from fieldkit.formula.parse import Term
from fieldkit.formula.spots import Spot, Unreadable
from fieldkit.units import Unit

_LIKE = "write ± and a number with % or a unit, like ± 0.5 % or ± 0.2 K"
_COMMA = "write a point in numbers, like 1.5; between arguments a space after the comma"


@dataclass(frozen=True)
class Mark:
    """A ± and what follows it, by its place in the text: `start` to `end`, and where its number begins."""

    start: int
    number: int
    end: int

    def spot(self, code: str, message: str, remedy: str) -> Spot:
        return Spot(self.start + 1, self.end - self.start, code, message, remedy)


@dataclass(frozen=True)
class Stated:
    """How uncertain one number of a sum is, as its writer stated it."""

    #: the number, as the language read it
    term: Term
    #: number and ± as they were typed, "34 kV ± 1 %"
    written: str
    #: how far from the value, in SI, to both sides
    width: float


def split(text: str) -> tuple[str, list[Mark]]:
    """The text with blanks, so that columns hold, in the place of every ± and its number; and where they were."""
    marks: list[Mark] = []
    for found in _pattern().finditer(text):
        if found["sign"]:
            width = len(found["rest"].rstrip())
            start = found.start("rest") + len(found["rest"]) - len(found["rest"].lstrip())
            end = found.start("rest") + width if width else found.end("sign")
            marks.append(Mark(found.start(), min(start, end), end))
    readable = text
    for mark in marks:
        readable = readable[: mark.start] + " " * (mark.end - mark.start) + readable[mark.end :]
    return readable, marks


@lru_cache(maxsize=1)
def _pattern() -> re.Pattern[str]:
    """A text in quotes, which is passed over; or a ± and the number after it, in brackets or with a unit."""
    number = r"[-+\u2212]? *[0-9.]+(?:[eE][-+\u2212]?[0-9]+)?"
    unit = rf"(?:{parse.unit_pattern()})(?![A-Za-z0-9_µμΩ°%])|(?!(?:and|or|not)\b)[A-Za-zµμΩ°%][\w/°%]*"
    return re.compile(rf'"[^"\n]*"|(?P<sign>±|\+/?[-\u2212])(?P<rest> *(?:\([^()]*\)|{number}(?: *(?:{unit}))?|))')


def bind(text: str, term: Term, marks: Sequence[Mark]) -> tuple[list[Stated], list[Spot]]:
    """Each ± with the number that it stands after; and what is wrong with any."""
    found: list[Stated] = []
    spots: list[Spot] = []
    readable, _ = split(text)
    numbers = [t for t in _terms(term) if t.kind == "number"]
    for mark in marks:
        own = next((t for t in numbers if _before(readable, t, mark)), None)
        wrong = _misplaced(text, mark, own, [s.term for s in found])
        if own is None or wrong is not None:
            spots += [wrong] if wrong is not None else []
            continue
        try:
            width = _width(text, mark, own)
        except Unreadable as exc:
            spots += exc.spots
        else:
            found.append(Stated(own, _written(text, mark, own), width))
    return found, spots


def _before(readable: str, number: Term, mark: Mark) -> bool:
    """Whether a ± stands right after a number, or after it within the number's own brackets."""
    if number.end <= mark.start:
        return not readable[number.end : mark.start].strip()
    closing = readable[number.start : mark.start]
    return number.start < mark.start and not readable[mark.end : number.end].strip(" )\n") and closing.count("(") > 0


def alone(text: str, mark: Mark) -> list[Spot]:
    """What is wrong with a ± by itself, where the rest of the text cannot be read."""
    try:
        _number(text, mark)
    except Unreadable as exc:
        return exc.spots
    wrong = None if text[: mark.start].strip() else _misplaced(text, mark, None, [])
    return [wrong] if wrong is not None else []


def _terms(term: Term) -> Iterator[Term]:
    yield term
    for part in term.of:
        yield from _terms(part)


def _misplaced(text: str, mark: Mark, own: Term | None, taken: Sequence[Term]) -> Spot | None:
    if own is None:
        says = "± stands after a number, and here is none before it"
        return mark.spot("uncertainty-misplaced", says, "write it after each number that it is about: 34 kV ± 1 %")
    if own in taken:
        says = "a number has two ±"
        return mark.spot("uncertainty-twice", says, "write one: the root of the sum of their squares")
    if re.match(",[0-9]", text[mark.end :]) and re.search(r"[0-9]$", text[: mark.end]):
        return Spot(mark.end + 1, 1, "number-form", "a comma stands between digits", _COMMA)
    return None


def _written(text: str, mark: Mark, own: Term) -> str:
    value = text[own.start : mark.start].strip()
    while value.startswith("("):
        value = value[1:].strip()
        value = value[:-1].strip() if value.count(")") > value.count("(") else value
    return " ".join(f"{value} ± {text[mark.number : mark.end]}".split())


def _number(text: str, mark: Mark) -> Term:
    """The number after ±, its places those of the whole text."""
    written = text[mark.number : mark.end]
    if not written:
        raise Unreadable([mark.spot("uncertainty-not-a-number", "no number follows ±", _LIKE)])
    if re.match("[( ]*[-+\u2212]", written):
        raise Unreadable([mark.spot("uncertainty-sign", "± is to both sides already", "write it without a sign")])
    try:
        term = parse.read(written).term
    except Unreadable as exc:
        moved = [Spot(s.column + mark.number, s.width, s.code, s.message, s.remedy) for s in exc.spots]
        raise Unreadable(moved) from exc
    if term.kind != "number":
        raise Unreadable([mark.spot("uncertainty-not-a-number", "what follows ± is not one number", _LIKE)])
    return term


def _width(text: str, mark: Mark, own: Term) -> float:
    """How wide in SI. Raises Unreadable where it does not fit the number that it stands after."""
    term = _number(text, mark)
    wrong = _unfit(text, own, term)
    if wrong is not None:
        raise Unreadable([mark.spot(*wrong)])
    size = values.magnitude(values.dec(term.what))
    return values.to_float(values.mul(size, values.magnitude(values.dec(own.what))) if _percent(term.unit) else size)


def _percent(unit: Unit | None) -> bool:
    return unit is not None and unit.symbol == "%"


def _unfit(text: str, own: Term, term: Term) -> tuple[str, str, str] | None:
    """Why a ± does not fit its number: code, message and remedy; None where it does."""
    value, unit, other = text[own.start : own.end], own.unit, term.unit
    if _percent(unit):
        says = f"± after {value} could be points or a part of the value"
        return "uncertainty-of-percent", says, _of_percent(own, term)
    if _percent(other):
        return _no_percent(value, own)
    right = f"write it in {difference(unit).symbol}" + (" or in %" if _scaled(own) else "") if unit else ""
    if unit is None and other is None:
        return None
    if unit is None or other is None:
        has = f"no unit, and its ± is in {other.symbol}" if other else "a unit, and its ± has none"
        return (
            "uncertainty-unit",
            f"{value} has {has}",
            right or f"write {value} {other.symbol if other else ''} before it",
        )
    if other.dimension.absolute:
        return "uncertainty-unit", "± is a difference, and degC is a temperature on a scale", right or "write it in K"
    if other.symbol == "dBm":
        return "uncertainty-unit", "± is a difference, and dBm is a level", right
    if not other.dimension.same_powers(unit.dimension):
        return "uncertainty-unit", f"{value} is {words(unit.dimension)}, and its ± is {words(other.dimension)}", right
    return None


def _of_percent(own: Term, term: Term) -> str:
    """How to write either of the two meanings."""
    value, number = Decimal(own.what).normalize(), Decimal(term.what)
    part = (number if _percent(term.unit) else number / 100).normalize()
    return f"write {value:f} ± {part:f} for points, {value:f} ± {(part * 100).normalize():f} % for a part of the value"


def _no_percent(value: str, own: Term) -> tuple[str, str, str] | None:
    """Why a number has no percent of itself."""
    right = difference(own.unit).symbol if own.unit else ""
    if not _scaled(own):
        says = f"{value} is on a scale whose zero is arbitrary, so that a percent of it means nothing"
        return "uncertainty-percent", says, f"write it in {right}"
    if Decimal(own.what) == 0:
        remedy = f"write it in {right}" if right else "write it without %"
        return "uncertainty-percent", f"a percent of {value} is nothing", remedy
    return None


def _scaled(own: Term) -> bool:
    """Whether a percent of a number means something."""
    return own.unit is None or not (own.unit.dimension.absolute or own.unit.symbol in ("dB", "dBm"))
