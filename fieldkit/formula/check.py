"""Whether a formula makes sense: every name exists, units fit, arguments are complete. Pure, and all at once.

    checked = check(read("beam_voltage * idle"), {"beam_voltage": VOLT, "idle": AMPERE}, want=WATT)
    checked.kind      the Dimension of the answer, or "flag", or "text"; None where a problem hides it
    checked.spots     what is wrong, with columns and remedies

Temperatures on the Celsius scale (`Dimension.absolute`) are told from differences: two of them can be subtracted (which
gives K), compared and averaged, and a difference added; they cannot be added to each other or multiplied. `x - 0 degC`
is the number of degrees, in K.

Not here: what a formula gives (evaluate.py). To add a rule for a new kind of function: an arm in `_RULES`.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Protocol, Union

from fieldkit import units
from fieldkit.formula import functions, parse
from fieldkit.formula.parse import Parsed, Term
from fieldkit.formula.spots import Spot, one_of
from fieldkit.units import NUMBER, Dimension

#: a Dimension, or "flag", or "text"
Kind = Union[Dimension, str]

_SECOND = units.UNITS["s"].dimension

#: kinds of the names that a run gives (DEVELOPERS.md, "Names")
NAMESPACES: dict[str, Kind] = {
    "state": "text",
    "choice": "text",
    "age": _SECOND,
    "oldest": _SECOND,
    "since": _SECOND,
    "oldest-since": _SECOND,
    "fact": "flag",
    "lock": "flag",
    "count": NUMBER,
    "in": NUMBER,
}


class _Argument(Protocol):
    @property
    def name(self) -> str: ...
    @property
    def unit(self) -> units.Unit: ...


class FormulaKind(Protocol):
    """What check wants to know of a library formula."""

    @property
    def arguments(self) -> Sequence[_Argument]: ...
    @property
    def unit(self) -> units.Unit: ...


class PairKind(Protocol):
    """What check wants to know of a pair: the two formulas."""

    @property
    def of(self) -> tuple[str, str]: ...


@dataclass(frozen=True)
class Checked:
    kind: Kind | None
    spots: tuple[Spot, ...]


def check(
    parsed: Parsed,
    names: Mapping[str, Kind],
    *,
    series: Mapping[str, Kind] | None = None,
    library: Mapping[str, FormulaKind] | None = None,
    pairs: Mapping[str, PairKind] | None = None,
    known: Mapping[str, Collection[str]] | None = None,
    want: Kind | None = None,
) -> Checked:
    """Everything wrong with a formula, and the kind of its answer.

    `names` and `series` give the kind of each name and column; `pairs` are told as what they are, and which of the two
    formulas to use; `known` gives, for a prefix such as "state" or "since",
    the words that exist ("heater"), and where a prefix is left out any word is taken; `want` is what the answer must
    be.
    """
    work = _Check(parsed, names, series or {}, library or {}, known or {}, pairs or {})
    kind = work.kind(parsed.term)
    if want is not None and kind is not None and not _fits(kind, want):
        says = f"this gives {words(kind)}, and {words(want)} is needed"
        work.add(parsed.term, "unit-mismatch", says, "look at what is multiplied and divided")
    return Checked(kind, tuple(sorted(work.spots, key=lambda s: s.column)))


def words(kind: Kind) -> str:
    """A kind in words for a writer: "V", "a temperature (degC)", "a plain number", "yes or no", "a word"."""
    if isinstance(kind, str):
        return "yes or no" if kind == "flag" else "a word"
    return "a temperature (degC)" if kind.absolute else kind.words()


def _fits(kind: Kind, want: Kind) -> bool:
    """A number in K will do for a temperature, since kelvin are a scale too; a temperature never for a difference."""
    if isinstance(kind, Dimension) and isinstance(want, Dimension):
        return kind.same_powers(want) and (want.absolute or not kind.absolute)
    return kind == want


def _bound(formula: FormulaKind, given: Mapping[str, Kind | None]) -> Dimension | None:
    """The dimension that stands for "any unit" in one call: that of the first such argument that has one."""
    kinds = (given.get(a.name) for a in formula.arguments if a.unit == units.ANY)
    spreads = (given.get(a.name) for a in formula.arguments if a.unit == units.ANY_DIFFERENCE)
    return next((k for k in (*kinds, *spreads) if isinstance(k, Dimension)), None)


def _wanted(unit: units.Unit, bound: Dimension | None) -> tuple[Dimension | None, str]:
    """What an argument or an answer in `unit` must be, and its name; None where nothing tells yet."""
    if unit not in (units.ANY, units.ANY_DIFFERENCE):
        return unit.dimension, unit.symbol
    if bound is None:
        return None, ""
    dimension = bound if unit == units.ANY else Dimension(bound.powers)
    return dimension, "degC" if dimension.absolute else words(dimension)


class _Check:
    def __init__(
        self,
        parsed: Parsed,
        names: Mapping[str, Kind],
        series: Mapping[str, Kind],
        library: Mapping[str, FormulaKind],
        known: Mapping[str, Collection[str]],
        pairs: Mapping[str, PairKind],
    ) -> None:
        self.text = parsed.text
        self.names = names
        self.series = series
        self.library = library
        self.known = known
        self.pairs = pairs
        self.spots: list[Spot] = []

    def add(self, term: Term, code: str, message: str, remedy: str = "") -> None:
        self.spots.append(term.spot(code, message, remedy))

    def quote(self, term: Term) -> str:
        part = self.text[term.start : term.end]
        return part if len(part) <= 30 else part[:27] + "..."

    def kind(self, term: Term) -> Kind | None:
        match term.kind:
            case "number":
                return term.unit.dimension if term.unit else NUMBER
            case "text" | "flag":
                return term.kind
            case "name":
                return self.name(term)
            case "series":
                return self.column(term)
            case "library":
                return self.call(term)
        if self.bare_word(term):
            return "flag"
        of = [self.kind(t) for t in term.of]
        return _RULES[functions.FUNCTIONS[term.what].rule](self, term, of)

    def bare_word(self, term: Term) -> bool:
        """A text compared with a word that lacks its quotes: told as that, not as an unknown name."""
        if term.what not in ("eq", "ne") or term.of[1].kind != "name" or term.of[1].what in self.names:
            return False
        left = term.of[0]
        if left.kind != "name" or self.names.get(left.what) != "text":
            return False
        word = term.of[1].what
        self.add(term.of[1], "word-without-quotes", f"{word} is a word here, not a value", f'write "{word}"')
        return True

    def name(self, term: Term) -> Kind | None:
        if term.what in self.names:
            return self.names[term.what]
        prefix, colon, word = term.what.partition(":")
        if colon:
            words_known = self.known.get(prefix)
            if words_known is not None and word not in words_known:
                self.add(term, "unknown-name", f'"{word}" is not known to {prefix}', one_of(word, sorted(words_known)))
            return NAMESPACES[prefix]
        if term.what == "earths":
            return NUMBER
        if term.what in self.series:
            remedy = f"write last({term.what}), mean({term.what}) or at({term.what}, 0)"
            self.add(term, "column-not-number", f"{term.what} is a list of numbers", remedy)
            return None
        self.add(term, "unknown-name", f'there is no value named "{term.what}" here', one_of(term.what, self.names))
        return None

    def column(self, term: Term) -> Kind | None:
        if term.what in self.series:
            return self.series[term.what]
        remedy = one_of(term.what, self.series) or "a list comes from a levels given or from a step's readings"
        self.add(term, "unknown-name", f'there is no list of numbers named "{term.what}" here', remedy)
        return None

    def call(self, term: Term) -> Kind | None:
        given = {n: (t, self.kind(t)) for n, t in zip(term.named, term.of, strict=True) if n}
        formula = self.library.get(term.what)
        if formula is None and term.what in self.pairs:
            remedy = f"write {' or '.join(self.pairs[term.what].of)}"
            self.add(term, "pair-not-number", f"{term.what} gives two values", remedy)
            return None
        if formula is None:
            self.spots.append(parse.unknown_function(term, {n: () for n in self.library}))
            return None
        self.spots.extend(parse.argument_problems(term, [a.name for a in formula.arguments]))
        bound = _bound(formula, {n: kind for n, (_, kind) in given.items()})
        for argument in formula.arguments:
            part, kind = given.get(argument.name, (term, None))
            want, symbol = _wanted(argument.unit, bound)
            if kind is not None and want is not None and not _fits(kind, want):
                says = f"{argument.name} of {term.what} is in {symbol}; {self.quote(part)} is {words(kind)}"
                self.add(part, "unit-mismatch", says, f"give it something in {symbol}")
        return _wanted(formula.unit, bound)[0]

    def numbers(self, term: Term, of: Sequence[Kind | None], *, differences: bool = False) -> list[Dimension] | None:
        """The dimensions of all parts; None, with a problem, where one is no number (or a temperature on a scale)."""
        for part, kind in zip(term.of, of, strict=True):
            if isinstance(kind, str):
                self.add(part, "not-a-number", f"{self.quote(part)} is {words(kind)}, not a number", "take it out")
                return None
            if differences and kind is not None and kind.absolute:
                remedy = f"write ({self.quote(part)} - 0 degC), or a difference of two temperatures"
                says = f"{self.quote(part)} is a temperature on a scale and cannot be multiplied, divided or negated"
                self.add(part, "temperature-scale", says, remedy)
                return None
        found = [k for k in of if isinstance(k, Dimension)]
        return found if len(found) == len(of) else None

    def mismatch(self, term: Term, left: Kind, right: Kind, doing: str) -> None:
        a, b = self.quote(term.of[0]), self.quote(term.of[-1])
        says = f"{doing} {words(left)} and {words(right)}: {a} is {words(left)}, {b} is {words(right)}"
        remedy = f"give both in {words(left)}" if isinstance(left, Dimension) else f"compare with {words(left)}"
        if isinstance(left, Dimension) and isinstance(right, Dimension) and left.same_powers(right):
            remedy = "write a temperature in degC and a difference in K"
        elif right == NUMBER and isinstance(left, Dimension):
            remedy = f"write a unit after the number, like {b} {words(left)}"
        elif left == "text" and term.of[-1].kind == "name":
            remedy = f'write "{b}" in quotes'
        self.add(term, "unit-mismatch", says, remedy)


def _sum(work: _Check, term: Term, of: list[Kind | None]) -> Kind | None:
    found = work.numbers(term, of)
    if found is None:
        return None
    left, right = found
    if not left.same_powers(right):
        work.mismatch(term, left, right, "adding" if term.what == "add" else "subtracting")
        return None
    if term.what == "sub":
        if right.absolute and not left.absolute:
            work.add(term, "temperature-scale", "a temperature is subtracted from a difference", "turn them round")
            return None
        return Dimension(left.powers, left.absolute and not right.absolute)
    if left.absolute and right.absolute:
        work.add(term, "temperature-scale", "two temperatures are added", "write average(a, b), or a difference in K")
        return None
    return Dimension(left.powers, left.absolute or right.absolute)


def _difference(work: _Check, term: Term, of: list[Kind | None]) -> Kind | None:
    found = work.numbers(term, of, differences=True)
    return found[0] if found else None


def _times(work: _Check, term: Term, of: list[Kind | None]) -> Kind | None:
    found = work.numbers(term, of, differences=True)
    return found[0].times(found[1]) if found else None


def _over(work: _Check, term: Term, of: list[Kind | None]) -> Kind | None:
    found = work.numbers(term, of, differences=True)
    return found[0].over(found[1]) if found else None


def _root(work: _Check, term: Term, of: list[Kind | None]) -> Kind | None:
    found = work.numbers(term, of, differences=True)
    return found[0].to_power(Fraction(1, 2)) if found else None


def _power(work: _Check, term: Term, of: list[Kind | None]) -> Kind | None:
    found = work.numbers(term, of, differences=True)
    if found is None:
        return None
    base, power = found
    if power != NUMBER:
        work.add(term.of[1], "unit-mismatch", f"a power is a plain number, not {words(power)}", "divide by its unit")
        return None
    fixed = _fixed(term.of[1])
    if fixed is not None:
        return base.to_power(fixed)
    if base != NUMBER:
        says = f"{work.quote(term.of[0])} is in {words(base)}; its power must be written as a number"
        work.add(term.of[1], "power-not-fixed", says, "write the number, like ^ 1.5")
        return None
    return NUMBER


def _fixed(term: Term) -> Fraction | None:
    if term.kind == "number":
        return Fraction(term.what)
    if term.kind == "call" and term.what == "neg" and (inner := _fixed(term.of[0])) is not None:
        return -inner
    return None


def _order(work: _Check, term: Term, of: list[Kind | None]) -> Kind | None:
    found = work.numbers(term, of)
    if found is not None and found[0] != found[1]:
        work.mismatch(term, found[0], found[1], "comparing")
    return "flag"


def _equal(work: _Check, term: Term, of: list[Kind | None]) -> Kind | None:
    left, right = of
    if left is not None and right is not None and left != right:
        work.mismatch(term, left, right, "comparing")
    return "flag"


def _flags(work: _Check, term: Term, of: list[Kind | None]) -> Kind | None:
    for part, kind in zip(term.of, of, strict=True):
        if kind is not None and kind != "flag":
            says = f"{work.quote(part)} is {words(kind)}, not yes or no"
            work.add(part, "not-a-condition", says, "compare it with something, like > 0 V")
    return "flag"


def _choose(work: _Check, term: Term, of: list[Kind | None]) -> Kind | None:
    _flags(work, Term("call", "if", term.start, term.end, None, term.of[:1]), of[:1])
    _, left, right = of
    if left is not None and right is not None and left != right:
        work.mismatch(Term("call", "if", term.start, term.end, None, term.of[1:]), left, right, "choosing between")
        return None
    return left if left is not None else right


def _same(work: _Check, term: Term, of: list[Kind | None]) -> Kind | None:
    found = work.numbers(term, of)
    if found is None:
        return None
    for part, kind in zip(term.of[1:], found[1:], strict=True):
        if kind != found[0]:
            pair = Term("call", term.what, term.start, term.end, None, (term.of[0], part))
            work.mismatch(pair, found[0], kind, f"{term.what} of")
            return None
    return found[0]


def _number(work: _Check, term: Term, of: list[Kind | None]) -> Kind | None:
    found = work.numbers(term, of, differences=True)
    if found is not None and found[0] != NUMBER:
        says = f"{term.what} takes a plain number; {work.quote(term.of[0])} is in {words(found[0])}"
        work.add(term.of[0], "unit-mismatch", says, "divide by a value of the same unit")
    return NUMBER


def _pick(work: _Check, term: Term, of: list[Kind | None]) -> Kind | None:
    if len(of) > 1 and of[1] is not None and of[1] != NUMBER:
        says = f"the place in a list is a plain number; {work.quote(term.of[1])} is {words(of[1])}"
        work.add(term.of[1], "unit-mismatch", says, "write a number counted from 0")
    return of[0]


_RULES: dict[str, Callable[[_Check, Term, list[Kind | None]], Kind | None]] = {
    "sum": _sum,
    "difference": _difference,
    "times": _times,
    "over": _over,
    "root": _root,
    "power": _power,
    "order": _order,
    "equal": _equal,
    "flags": _flags,
    "choose": _choose,
    "same": _same,
    "number": _number,
    "number-of": lambda work, term, of: NUMBER,
    "pick": _pick,
    "total": _difference,
}
