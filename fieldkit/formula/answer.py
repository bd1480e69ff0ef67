"""One sum asked by a person: an expression of numbers and library formulas, its value, and the unit that suits it.

    found = answer("coolant_heat_water(flow=60 L/min, inlet=35 degC, outlet=45 degC)", library)
    found.values[0].si, found.values[0].unit, found.shown()     41543.28..., kW, "41.54 kW"

A number may have its uncertainty after it, like 60 L/min ± 2 %; then the value has one too, and is shown with it.
Raises Unreadable with everything that is wrong: spelling, names, units, and what has no answer (a range, a division by
zero), each at its column. Not here: the language (parse.py, check.py), what stands after ± (stated.py) and what is made
of it (carried.py), where faults arise (locate.py), the choice of digits (display.py), printing (fieldkit.cli.calc).
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Union

from fieldkit import units
from fieldkit.formula import ast, carried, check, display, functions, parse, stated
from fieldkit.formula.arguments import any_of
from fieldkit.formula.carried import EXPANDED, Carried, Told
from fieldkit.formula.entry import Formula, Pair
from fieldkit.formula.evaluate import evaluate
from fieldkit.formula.library import Library
from fieldkit.formula.locate import locate
from fieldkit.formula.parse import Parsed, Term
from fieldkit.formula.spots import Spot, Unreadable, nearest, one_of
from fieldkit.formula.stated import Mark, Stated
from fieldkit.units import Dimension, Unit
from fieldkit.values import Fault

#: so many misspelt units are told in one answer
_MOST_REPAIRS = 20

#: operations whose answer is shown in the unit that a part of it was given in, where that has the dimension
_KEEP_UNIT = ("add", "sub", "mul", "div", "neg", "abs", "min", "max", "average", "if")

#: problems that hold also where a unit could not be read
_WITHOUT_UNITS = ("unknown-function", "unknown-argument", "argument-missing", "argument-twice", "argument-without-name")


@dataclass(frozen=True)
class Value:
    """One number of an answer: in SI, and the unit and digits to show it with. `name` is the formula's, or "".

    `carried` is its uncertainty, where a number of the sum has one and it can be told.
    """

    name: str
    si: float
    dimension: Dimension
    unit: Unit
    digits: int
    carried: Carried | None = None

    def text(self) -> str:
        return display.plain(self.si, self.unit, self.digits)

    def shown(self) -> str:
        """ "41.54 kW", or with its uncertainty (k = 2) "41.54 kW ± 0.83 kW"."""
        if self.carried is None or not self.carried.u:
            return display.with_unit(self.text(), self.unit)
        return display.beside(self.si, self.carried.expanded, self.unit, self.digits)


@dataclass(frozen=True)
class Answer:
    """One value, or two of a pair, or a yes or no; and the formulas that the expression names, in order."""

    text: str
    values: tuple[Value, ...]
    flag: bool | None
    formulas: tuple[Union[Formula, Pair], ...]
    #: the formula or pair whose call is the whole expression
    whole: Union[Formula, Pair, None]
    #: a number of it has a ±
    uncertain: bool = False
    #: what is to be known of its uncertainty, or why it has none
    warnings: tuple[str, ...] = ()

    def shown(self) -> str:
        """ "41.54 kW", "21.8 dB to 34.7 dB", "yes"."""
        if self.flag is not None:
            return "yes" if self.flag else "no"
        return " to ".join(v.shown() for v in self.values)


def answer(text: str, library: Library, coverage: float = EXPANDED) -> Answer:
    """What the expression gives. Raises Unreadable with every problem of it, in order of column.

    `coverage` divides a ± that was typed, to give a standard uncertainty: EXPANDED or ACCURACY (carried.py).
    """
    parsed, spots, marks = _read(text)
    if parsed is None:
        raise Unreadable(spots + _alone(text, marks))
    pair = library.pairs.get(parsed.term.what) if parsed.term.kind == "library" else None
    parts = [replace(parsed.term, what=name) for name in pair.of] if pair else [parsed.term]
    found = [_Part(Parsed(parsed.text, term), library, pair) for term in parts]
    units_lost = bool(spots)
    known, wrong = stated.bind(text, parsed.term, marks) if not units_lost else ([], _alone(text, marks))
    spots += wrong
    for part in found:
        spots.extend(s for s in part.problems(units_lost=units_lost) if s not in spots)
    spots += _whole_numbers(parsed.term, known, library)
    if spots:
        raise Unreadable(spots)
    told = [part.carried(known, coverage) for part in found]
    results = [part.result(of.carried) for part, of in zip(found, told, strict=True)]
    named = [pair] if pair else [library.formulas[n] for n in _called(parsed.term)]
    whole = pair or (library.formulas[parsed.term.what] if parsed.term.kind == "library" else None)
    flag = results[0] if isinstance(results[0], bool) else None
    numbers = tuple(r for r in results if isinstance(r, Value))
    warnings = tuple(dict.fromkeys(says for of in told for says in of.says))
    return Answer(text, numbers, flag, tuple(named), whole, bool(known), warnings)


def _alone(text: str, marks: list[Mark]) -> list[Spot]:
    return [spot for mark in marks for spot in stated.alone(text, mark)]


def _whole_numbers(term: Term, known: list[Stated], library: Library) -> list[Spot]:
    """Numbers with a ± that stand for what is counted."""
    exact, found = [one.term for one in known], list[Spot]()
    for call in (t for t in _terms(term) if exact and t.kind == "library"):
        name = library.pairs[call.what].of[0] if call.what in library.pairs else call.what
        counted = [a.name for a in library.formulas[name].arguments if a.whole] if name in library.formulas else []
        for argument, part in ((a, part) for a in counted for part in _given(call, a) if part in exact):
            says = f"{argument} is a whole number, which has no uncertainty"
            found.append(part.spot("uncertainty-of-count", says, "leave its ± out"))
    return found


def asked(symbol: str) -> Unit:
    """The unit that an answer is wanted in. Raises Unreadable, with columns in `symbol`."""
    unit = units.unit(symbol)
    if unit is None:
        likely = units.near(symbol)
        remedy = one_of(symbol, likely) if likely else "write a unit such as V, kV, A, uA"
        raise _at(symbol, "unknown-unit", f'"{symbol}" is no unit known here', remedy)
    return unit


def in_unit(found: Answer, unit: Unit) -> Answer:
    """The answer in the unit asked for. Raises Unreadable, with columns in its symbol, where it is of another kind."""
    if found.flag is not None:
        raise _at(unit.symbol, "unit-mismatch", "the answer is yes or no, which has no unit", "leave the unit out")
    for value in found.values:
        _must_fit(value, unit)
    return replace(found, values=tuple(replace(v, unit=unit) for v in found.values))


def _must_fit(value: Value, unit: Unit) -> None:
    has, want, symbol = value.dimension, unit.dimension, unit.symbol
    if not has.same_powers(want):
        same = [u.symbol for u in units.UNITS.values() if u.dimension == has]
        remedy = f"write one of: {', '.join(same)}" if same else "leave the unit out"
        raise _at(symbol, "unit-mismatch", f"the answer is {check.words(has)}; {symbol} is another kind", remedy)
    if want.absolute and not has.absolute:
        says = "the answer is in K, as a difference is; degC is a temperature on a scale"
        raise _at(symbol, "temperature-scale", says, "for kelvin of a scale write 0 degC + (... - 273.15 K)")


def _at(symbol: str, code: str, message: str, remedy: str) -> Unreadable:
    return Unreadable([Spot(1, max(1, len(symbol)), code, message, remedy)])


def _read(text: str) -> tuple[Parsed | None, list[Spot], list[Mark]]:
    """The expression without its ±, read on past units that are unknown, so that all of them are told at once."""
    spots: list[Spot] = []
    readable, marks = stated.split(text)
    for _ in range(_MOST_REPAIRS):
        try:
            return replace(parse.read(readable), text=text), spots, marks
        except Unreadable as exc:
            spots.extend(exc.spots)
            repaired = _repaired(readable, exc.spots[0])
            if repaired is None:
                break
            readable = repaired
    return None, spots, marks


def _repaired(text: str, spot: Spot) -> str | None:
    """The text, its length kept, without the unit that cannot be read; None where something else is wrong."""
    start, end = spot.column - 1, spot.column - 1 + spot.width
    if spot.code == "no-space-before-unit":
        digits = re.match(r"[0-9.]+", text[start:end])
        start += len(digits[0]) if digits else 0
    elif spot.code != "unknown-unit":
        return None
    return text[:start] + " " * (end - start) + text[end:]


class _Part:
    """An expression that gives one value: the whole of what was asked, or one of a pair."""

    def __init__(self, parsed: Parsed, library: Library, pair: Pair | None) -> None:
        self.parsed = parsed
        self.library = library
        self.pair = pair
        self.kind: check.Kind | None = None
        #: what the evaluator gave, once `problems` found nothing
        self.got: object = None

    def problems(self, *, units_lost: bool) -> list[Spot]:
        """What is wrong with names, arguments and units, and, where nothing is, what has no answer."""
        checked = check.check(self.parsed, {}, library=self.library.formulas, pairs=self.library.pairs)
        self.kind = checked.kind
        spots = [s for s in checked.spots if s.code != "unknown-name"]
        spots += [_nameless(self.parsed.text, t, self.library) for t in _names(self.parsed.term)]
        if units_lost:
            return [s for s in spots if s.code in (*_WITHOUT_UNITS, "unknown-name", "no-run")]
        if not spots and self.kind == "text":
            spots = [self.parsed.term.spot("not-a-number", "this is a word, not a sum", "write numbers and formulas")]
        return [self._worded(s) for s in spots or self._faults()]

    def _faults(self) -> list[Spot]:
        """Works the sum out; the places of its faults where it has no answer."""
        tree = ast.to_json(self.parsed.tree(self.library.signatures()))
        self.got = evaluate(tree, formulas=self.library.used(_called(self.parsed.term)))
        if not isinstance(self.got, Fault):
            return []
        whole = self.parsed.term.spot(self.got.code, self.got.says.rstrip("."), "work it out in parts")
        return locate(self.parsed, self.library) or [whole]

    def _worded(self, spot: Spot) -> Spot:
        """Problems with one formula of a pair name the pair, which is what was written; nothing far off is offered."""
        if spot.code == "unknown-function":
            found = re.match(r"\w+", self.parsed.text[spot.column - 1 :])
            known = [*self.library.formulas, *self.library.pairs, *functions.FUNCTIONS]
            close = nearest(found[0] if found else "", known)
            return replace(spot, remedy=one_of("", close) or "look at fieldkit calc --list")
        if self.pair is None:
            return spot
        name = self.parsed.term.what
        message, remedy = (t.replace(name, self.pair.name) for t in (spot.message, spot.remedy))
        return replace(spot, message=message, remedy=remedy)

    def carried(self, known: list[Stated], coverage: float) -> Told:
        """What the ± of its numbers make of it."""
        if not known:
            return Told(None)
        told = carried.carry(self.parsed.term, known, self.library, self.got, coverage, self.digits())
        if self.pair is None:
            return told
        return replace(told, says=tuple(says.replace(self.parsed.term.what, self.pair.name) for says in told.says))

    def result(self, of: Carried | None) -> Union[Value, bool]:
        term, si = self.parsed.term, self.got
        if isinstance(si, bool):
            return si
        assert isinstance(si, float) and isinstance(self.kind, Dimension)
        unit = self._unit(term) or display.fitting(si, self.kind)
        return Value(term.what if term.kind == "library" else "", si, self.kind, unit, self.digits(), of)

    def digits(self) -> int:
        """How many digits the answer deserves."""
        term = self.parsed.term
        return display.digits(self.library.formulas[term.what]) if term.kind == "library" else display.MOST_DIGITS

    def _unit(self, term: Term) -> Unit | None:
        """The unit that the expression itself names for its answer: a formula's own, or that of a part."""
        if term.kind == "number":
            return term.unit
        if term.kind == "library":
            formula = self.library.formulas[term.what]
            if not any_of(formula.unit):
                return formula.unit
            parts = [t for a in formula.arguments if any_of(a.unit) for t in _given(term, a.name)]
        elif term.what in _KEEP_UNIT:
            parts = list(term.of[1:] if term.what == "if" else term.of)
        else:
            return None
        kind = check.check(Parsed(self.parsed.text, term), {}, library=self.library.formulas).kind
        return next((u for p in parts if (u := self._unit(p)) is not None and u.dimension == kind), None)


def _given(term: Term, name: str) -> list[Term]:
    return [t for n, t in zip(term.named, term.of, strict=True) if n == name]


def _terms(term: Term) -> Iterator[Term]:
    yield term
    for part in term.of:
        yield from _terms(part)


def _called(term: Term) -> list[str]:
    return list(dict.fromkeys(t.what for t in _terms(term) if t.kind == "library"))


def _names(term: Term) -> list[Term]:
    return [t for t in _terms(term) if t.kind in ("name", "series")]


def _nameless(text: str, term: Term, library: Library) -> Spot:
    """A name that stands for no number here: a formula or a unit written alone, a slip, or a name of a run."""
    word = text[term.start : term.end]
    if word in library.formulas or word in library.pairs:
        return term.spot("unknown-name", f"{word} is a formula and wants its arguments", f"write {call(word, library)}")
    if word in functions.FUNCTIONS:
        return term.spot("unknown-name", f"{word} is a function", f"write {functions.FUNCTIONS[word].says}")
    if units.unit(word) is not None:
        return term.spot("unknown-name", f"{word} is a unit without its number", f"write 1 {word}, or 27 {word}")
    if term.what == "earths" or ":" in term.what or term.kind == "series":
        says = f"{word} is known only while a procedure runs; calc knows only numbers and formulas"
        return term.spot("no-run", says, "write a number with its unit in its place")
    close = nearest(word, [*library.formulas, *library.pairs])
    remedy = "write its value, like 34 kV" + (f"; or a formula: {', '.join(close)}" if close else "")
    return term.spot("unknown-name", f'there is no "{word}" here; calc knows only numbers and formulas', remedy)


def call(name: str, library: Library) -> str:
    """How a formula or pair is called: "beam_power(voltage=..., current=...)"."""
    pair = library.pairs.get(name)
    formula = library.formulas[pair.of[0] if pair else name]
    return f"{name}({', '.join(f'{a.name}=...' for a in formula.arguments)})"
