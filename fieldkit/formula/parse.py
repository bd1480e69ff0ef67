"""A formula as text, read into a tree, with the place of every part of it.

    27 kV   12 L/min   0.5 uA   40 degC   2.5   1.6e-19   "cold"   true       literals: a number, a space, a unit
    heater_voltage                                                             a given, a reading, a result
    state(heater) = on    choice(tube) != cold                                 compared with one word
    age(heater)  oldest(heater)  since(heater_on)  oldest_since(heater_on)     seconds
    fact(vacuum_good)  lock(Q1)   count(rung)  hands(deck)  earths             flags; numbers
    at(levels, 0)  length(levels)  last(levels)                                a column of numbers, counted from 0
    beam_power(voltage=beam_voltage, current=idle)                             a library formula: every argument by name
    + - * / ^   < <= > >= = !=   and or not   if(condition, a, b)              and the functions of functions.py

`parse(text)` gives the plain tree of fieldkit.formula.ast, all literals in SI. `read(text)` gives a Parsed, which also
knows columns and units: what check.py wants. Both raise Unreadable, which carries Spots (column, code, remedy).
Not here: whether names exist and units fit (check.py). To add a function: functions.py, never the grammar.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from decimal import Decimal
from fractions import Fraction
from functools import lru_cache

from lark import Lark, Token, Transformer, UnexpectedInput, v_args
from lark.exceptions import VisitError

from fieldkit import units, values
from fieldkit.formula import ast, functions
from fieldkit.formula.spots import Spot, Unreadable, diagnose, one_of

MAX_LENGTH = 2000

#: how a writer spells a namespaced name, and the prefix that it has in trees (DEVELOPERS.md, "Names")
SPACES = {
    "state": "state",
    "choice": "choice",
    "age": "age",
    "oldest": "oldest",
    "since": "since",
    "oldest_since": "oldest-since",
    "fact": "fact",
    "lock": "lock",
    "count": "count",
    "hands": "in",
}
_TEXT_SPACES = ("state", "choice")

_NUMBER = r"[0-9]+(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?"
_GRAMMAR = r"""
start: expr
?expr: conjunction ("or" conjunction)*          -> either
?conjunction: negation ("and" negation)*        -> both
?negation: "not" negation                       -> negated
    | comparison
?comparison: sum
    | sum (EQUAL | UNEQUAL | ORDER) sum         -> compared
    | TEXTSPACE "(" KEY ")" (EQUAL | UNEQUAL) (WORD | STRING)  -> text_compared
?sum: product
    | sum (PLUS | MINUS) product                -> binary
?product: unary
    | product (TIMES | OVER) unary              -> binary
?unary: power
    | MINUS unary                               -> negative
?power: atom
    | atom POWER unary                          -> binary
?atom: QUANTITY                                 -> quantity
    | NUMBER                                    -> quantity
    | STRING                                    -> text
    | TRUTH                                     -> flag
    | NAME                                      -> name
    | SPACE "(" KEY RPAR                        -> spaced
    | SERIESFUNC "(" NAME ("," expr)* RPAR      -> on_series
    | FUNC "(" expr ("," expr)* RPAR            -> builtin
    | NAME "(" (argument ("," argument)*)? RPAR -> library
    | LPAR expr RPAR                            -> grouped
argument: NAME EQUAL expr                       -> keyword
    | sum                                       -> positional

EQUAL: "="
UNEQUAL: "!=" | "≠"
ORDER: "<=" | ">=" | "≤" | "≥" | "<" | ">"
PLUS: "+"
MINUS: "-" | "\u2212"
TIMES: "*" | "·" | "×"
OVER: "/"
POWER: "^"
LPAR: "("
RPAR: ")"
TRUTH.3: /(?:true|false)(?![A-Za-z0-9_])/
QUANTITY.4: /%(number)s +(?:%(units)s)(?![A-Za-z0-9_µμΩ°%%])/
NUMBER.3: /%(number)s(?![A-Za-z0-9_.µμΩ°%%])/
STRING: /"[^"\n]*"/
FUNC.5: /(?:%(funcs)s)(?= *\()/
SERIESFUNC.5: /(?:%(series)s)(?= *\()/
SPACE.5: /(?:%(spaces)s)(?= *\()/
TEXTSPACE.5: /(?:%(texts)s)(?= *\()/
KEY: /[A-Za-z0-9_][A-Za-z0-9_:-]*/
WORD: /[A-Za-z0-9][A-Za-z0-9_-]*/
NAME: /(?!(?:and|or|not|true|false)(?![A-Za-z0-9_]))[A-Za-z_][A-Za-z0-9_]*/
%%ignore /[ \n]+/
"""


@dataclass(frozen=True)
class Term:
    """A part of a formula with its place: `kind` is number, text, flag, name, series, call or library."""

    kind: str
    #: the literal's text in SI, the name, or the function
    what: str
    start: int
    end: int
    unit: units.Unit | None = None
    of: tuple[Term, ...] = ()
    #: for a library call, the name that each argument was given under, None where it had none;
    #: for a number, its digits as written, unless it stands in brackets or has a sign
    named: tuple[str | None, ...] = ()

    def spot(self, code: str, message: str, remedy: str = "") -> Spot:
        return Spot(self.start + 1, max(1, self.end - self.start), code, message, remedy)


@dataclass(frozen=True)
class Parsed:
    """A formula that reads well: its text, and its outermost term."""

    text: str
    term: Term
    spots: tuple[Spot, ...] = field(default=())

    def tree(self, signatures: Mapping[str, Sequence[str]] | None = None) -> ast.Tree:
        """The plain tree; `signatures` gives each library formula's arguments in order. Unreadable if they differ."""
        problems: list[Spot] = []
        tree = _tree(self.term, signatures or {}, problems)
        if problems:
            raise Unreadable(problems)
        return tree


def parse(text: str, signatures: Mapping[str, Sequence[str]] | None = None) -> ast.Tree:
    """The tree that `text` spells, in plain SI. Raises Unreadable with columns."""
    return read(text).tree(signatures)


def read(text: str) -> Parsed:
    """The formula that `text` spells, with places and units kept. Raises Unreadable with columns."""
    if len(text) > MAX_LENGTH:
        raise Unreadable(
            [Spot(1, 1, "formula-too-long", f"this formula has more than {MAX_LENGTH} characters", "split it")]
        )
    if not text.strip():
        raise Unreadable(
            [Spot(1, 1, "formula-empty", "there is no formula here", "write one, like 1.4 * idle_current")]
        )
    try:
        term = _parser().parse(text)
    except UnexpectedInput as exc:
        raise Unreadable([diagnose(text, exc)]) from exc
    except VisitError as exc:
        if isinstance(exc.orig_exc, Unreadable):
            raise exc.orig_exc from exc
        raise
    assert isinstance(term, Term)
    if _depth(term) > ast.MAX_DEPTH:
        message = f"this formula is nested deeper than {ast.MAX_DEPTH}"
        raise Unreadable([term.spot("too-deep", message, "work out a part of it in a step of its own")])
    return Parsed(text, term)


@lru_cache(maxsize=1)
def _parser() -> Lark:
    grammar = _GRAMMAR % {
        "number": _NUMBER,
        "units": unit_pattern().replace("/", r"\/"),
        "funcs": _words(n for n, f in functions.FUNCTIONS.items() if f.spelled and not f.on_series),
        "series": _words(n for n, f in functions.FUNCTIONS.items() if f.spelled and f.on_series),
        "spaces": _words(s for s in SPACES if s not in _TEXT_SPACES),
        "texts": _words(_TEXT_SPACES),
    }
    return Lark(grammar, parser="lalr", transformer=_Terms(), propagate_positions=False, maybe_placeholders=False)


def _words(names: Iterable[str]) -> str:
    return "|".join(sorted(names, key=len, reverse=True))


def unit_pattern() -> str:
    """A regular expression of every spelling of every unit, the longer before the shorter."""
    written = sorted({*units.UNITS, *_other_spellings()} - {"1"}, key=len, reverse=True)
    return "|".join(re.escape(u) for u in written)


def _other_spellings() -> set[str]:
    """Units with µ, Ω, ° and raised digits, as people copy them from instruments."""
    found = {u.shown for u in units.UNITS.values() if units.unit(u.shown)}
    return found | {s.replace("\u00b5", "\u03bc") for s in found} - {""}


@v_args(inline=True)
class _Terms(Transformer):
    """Builds terms bottom-up while the text is parsed, so that no nesting can exhaust the stack."""

    def start(self, term: Term) -> Term:
        return term

    def quantity(self, token: Token) -> Term:
        written, _, symbol = str(token).partition(" ")
        unit = units.unit(symbol.strip()) if symbol else None
        return _number(written, unit, token.start_pos or 0, token.end_pos or 0)

    def text(self, token: Token) -> Term:
        return _leaf("text", str(token)[1:-1], token)

    def flag(self, token: Token) -> Term:
        return _leaf("flag", str(token), token)

    def name(self, token: Token) -> Term:
        return _leaf("name", str(token), token)

    def spaced(self, space: Token, key: Token, end: Token) -> Term:
        return Term("name", f"{SPACES[space]}:{key}", space.start_pos or 0, end.end_pos or 0)

    def grouped(self, left: Token, term: Term, right: Token) -> Term:
        named = () if term.kind == "number" else term.named
        return Term(term.kind, term.what, left.start_pos or 0, right.end_pos or 0, term.unit, term.of, named)

    def binary(self, left: Term, operator: Token, right: Term) -> Term:
        function = {"PLUS": "add", "MINUS": "sub", "TIMES": "mul", "OVER": "div", "POWER": "pow"}[operator.type]
        return Term("call", function, left.start, right.end, None, (left, right))

    def negative(self, minus: Token, term: Term) -> Term:
        start = minus.start_pos or 0
        if term.kind == "number" and term.named:
            return _negated(term, start)
        return Term("call", "neg", start, term.end, None, (term,))

    def compared(self, left: Term, operator: Token, right: Term) -> Term:
        function = _COMPARE[str(operator)]
        return Term("call", function, left.start, right.end, None, (left, right))

    def text_compared(self, space: Token, key: Token, operator: Token, word: Token) -> Term:
        end = (key.end_pos or 0) + 1
        left = Term("name", f"{SPACES[space]}:{key}", space.start_pos or 0, end)
        right = _leaf("text", str(word).strip('"'), word)
        return Term("call", _COMPARE[str(operator)], left.start, right.end, None, (left, right))

    def negated(self, term: Term) -> Term:
        return Term("call", "not", max(0, term.start - 4), term.end, None, (term,))

    def both(self, *terms: Term) -> Term:
        if len(terms) == 1:
            return terms[0]
        return Term("call", "and", terms[0].start, terms[-1].end, None, terms)

    def either(self, *terms: Term) -> Term:
        if len(terms) == 1:
            return terms[0]
        return Term("call", "or", terms[0].start, terms[-1].end, None, terms)

    def on_series(self, function: Token, name: Token, *rest: Term | Token) -> Term:
        of = (_leaf("series", str(name), name), *(t for t in rest if isinstance(t, Term)))
        return _call(function, of, rest[-1])

    def builtin(self, function: Token, *rest: Term | Token) -> Term:
        return _call(function, tuple(t for t in rest if isinstance(t, Term)), rest[-1])

    def keyword(self, name: Token, _equal: Token, term: Term) -> tuple[str | None, Term]:
        return str(name), term

    def positional(self, term: Term) -> tuple[str | None, Term]:
        return None, term

    def library(self, name: Token, *rest: object) -> Term:
        pairs = [a for a in rest if isinstance(a, tuple)]
        end = rest[-1].end_pos if isinstance(rest[-1], Token) else 0
        of, named = tuple(t for _, t in pairs), tuple(n for n, _ in pairs)
        return Term("library", str(name), name.start_pos or 0, end or 0, None, of, named)


_COMPARE = {"<": "lt", "<=": "le", "≤": "le", ">": "gt", ">=": "ge", "≥": "ge", "=": "eq", "!=": "ne", "≠": "ne"}


def _leaf(kind: str, what: str, token: Token) -> Term:
    return Term(kind, what, token.start_pos or 0, token.end_pos or 0)


def _number(written: str, unit: units.Unit | None, start: int, end: int) -> Term:
    text, spot = _in_si(written, unit), Spot(start + 1, end - start, "number-too-large", "this number is too large", "")
    if isinstance(values.number(text), values.Fault):
        raise Unreadable([spot])
    return Term("number", text, start, end, unit, named=(written,))


def _negated(term: Term, start: int) -> Term:
    """-5 degC is the temperature five below zero, so a sign belongs to the number before its unit is applied."""
    return Term("number", _in_si(f"-{term.named[0]}", term.unit), start, term.end, term.unit)


def _in_si(written: str, unit: units.Unit | None) -> str:
    """The number in SI as a plain decimal: exact where it ends within 25 digits, else to 20 significant digits."""
    number = Decimal(written)
    if number.adjusted() > 400 or number.adjusted() < -400:
        return "1" + "0" * 400 if number.adjusted() > 400 else "0"
    exact = Fraction(number)
    if unit is not None:
        exact = exact * unit.exact + Fraction(unit.offset)
    bottom = exact.denominator
    places = next((p for p in range(450) if 10**p % bottom == 0), None)
    if places is None:
        places = 20 + len(str(bottom)) - len(str(abs(exact.numerator)))
    return values.to_text(values.trim(values.Dec(round(exact * 10**places), places)))


def _call(function: Token, of: tuple[Term, ...], end: object) -> Term:
    entry = functions.FUNCTIONS[str(function)]
    stop = (end.end_pos or 0) if isinstance(end, Token) else 0
    term = Term("call", str(function), function.start_pos or 0, stop, None, of)
    if len(of) < entry.least or (entry.most is not None and len(of) > entry.most):
        raise Unreadable([term.spot("argument-count", f"{function} takes {entry.takes()}, not {len(of)}", entry.says)])
    return term


def _depth(term: Term) -> int:
    deepest, todo = 0, [(term, 1)]
    while todo:
        one, depth = todo.pop()
        deepest = max(deepest, depth)
        todo.extend((t, depth + 1) for t in one.of)
    return deepest


def _tree(term: Term, signatures: Mapping[str, Sequence[str]], problems: list[Spot]) -> ast.Tree:
    match term.kind:
        case "number" | "text":
            return ast.Literal(term.kind, term.what)
        case "flag":
            return ast.Literal("flag", term.what == "true")
        case "name":
            return ast.Name(term.what)
        case "series":
            return ast.Series(term.what)
        case "call":
            return ast.Call(term.what, tuple(_tree(t, signatures, problems) for t in term.of))
    if term.what not in signatures:
        problems.append(unknown_function(term, signatures))
        return ast.Literal("flag", False)
    order = list(signatures[term.what])
    problems.extend(argument_problems(term, order))
    given = {n: _tree(t, signatures, problems) for n, t in zip(term.named, term.of, strict=True) if n}
    return ast.Call(term.what, tuple(given.get(n, ast.Literal("flag", False)) for n in order))


def unknown_function(term: Term, signatures: Mapping[str, Sequence[str]]) -> Spot:
    """The problem of calling what is neither a function nor a formula of the library."""
    known = [*signatures, *(n for n, f in functions.FUNCTIONS.items() if f.spelled)]
    return term.spot("unknown-function", f'there is no function or formula "{term.what}"', one_of(term.what, known))


def argument_problems(term: Term, order: Sequence[str]) -> list[Spot]:
    """Arguments of a library call that are unknown, missing, given twice, or given without their name."""
    found: list[Spot] = []
    want = ", ".join(f"{n}=..." for n in order)
    for n, t in zip(term.named, term.of, strict=True):
        if n is None:
            found.append(
                t.spot("argument-without-name", "a formula's argument needs its name", f"write {term.what}({want})")
            )
        elif n not in order:
            found.append(t.spot("unknown-argument", f'{term.what} has no argument "{n}"', one_of(n, order)))
    names = [n for n in term.named if n]
    for n in sorted({n for n in names if names.count(n) > 1}):
        found.append(term.spot("argument-twice", f'the argument "{n}" is given twice', "give it once"))
    missing = [n for n in order if n not in names]
    if missing and None not in term.named:
        says = f"{term.what} lacks {' and '.join(missing)}"
        found.append(term.spot("argument-missing", says, f"write {term.what}({want})"))
    return found
