"""Where in an expression a fault arises: every argument out of its range, every division by zero, at its column.

The evaluator gives the first fault and no place, which is all that a sheet needs; a person who typed the expression
wants to see all of them. Each part is evaluated by the same evaluator, from the inside out, so the words are its own.
Not here: what an expression gives (evaluate.py), problems of names and units (check.py).
"""

from __future__ import annotations

from fieldkit.formula import describe
from fieldkit.formula.arguments import Argument
from fieldkit.formula.evaluate import evaluate
from fieldkit.formula.functions import Value
from fieldkit.formula.library import Library
from fieldkit.formula.parse import Parsed, Term
from fieldkit.formula.spots import Spot
from fieldkit.values import Fault

_REMEDIES = {
    "divide-by-zero": "give a divisor that is not zero",
    "overflow": "give smaller numbers",
    "domain": "look at what stands in the brackets",
    "too-deep": "work it out in parts",
}

_ONE = Term("number", "1", 0, 0)


def locate(parsed: Parsed, library: Library) -> list[Spot]:
    """Every fault of an expression whose names and units are right; none where it has an answer."""
    work = _Work(library)
    work.value(parsed.term)
    return work.spots


class _Work:
    def __init__(self, library: Library) -> None:
        self.library = library
        self.spots: list[Spot] = []

    def value(self, term: Term) -> Value | None:
        """The value of one part; None where it has none, and that was told."""
        if term.kind in ("number", "text"):
            return self._given(term, evaluate({term.kind: term.what}))
        if term.kind == "flag":
            return term.what == "true"
        if term.what in ("if", "and", "or"):
            return self._choice(term)
        of = self._arguments(term)
        if of is None:
            return None
        names = {str(n): value for n, value in enumerate(of)}
        tree = {"call": term.what, "of": [{"name": name} for name in names]}
        used = self.library.used([term.what]) if term.kind == "library" else {}
        return self._given(term, evaluate(tree, names, formulas=used))

    def _choice(self, term: Term) -> Value | None:
        """if, and, or: only what the answer needs, as the evaluator does."""
        first = self.value(term.of[0])
        if first is None:
            return None
        if term.what == "if":
            return self.value(term.of[1] if first else term.of[2])
        for part in term.of[1:]:
            if first is (term.what == "or"):
                return first
            first = self.value(part)
            if first is None:
                return None
        return first

    def _arguments(self, term: Term) -> list[Value] | None:
        if term.kind != "library":
            parts = [self.value(t) for t in term.of]
            if term.what == "div" and parts[0] is None and parts[1] == 0.0:
                self.value(Term("call", "div", term.start, term.end, None, (_ONE, term.of[1])))
            return None if None in parts else [p for p in parts if p is not None]
        terms = dict(zip(term.named, term.of, strict=True))
        found: list[Value] = []
        for argument in self.library.formulas[term.what].arguments:
            value = self.value(terms[argument.name])
            if value is not None and self._within(term.what, argument, value, terms[argument.name]):
                found.append(value)
        return found if len(found) == len(terms) else None

    def _within(self, name: str, argument: Argument, value: Value, term: Term) -> bool:
        """Whether a formula takes this value; asked of the evaluator with a formula of this one argument."""
        alone = {name: {"arguments": [argument.used()], "tree": {"name": argument.name}}}
        got = evaluate({"call": name, "of": [{"name": "given"}]}, {"given": value}, formulas=alone)
        if isinstance(got, Fault):
            self.spots.append(
                term.spot(got.code, got.says.rstrip("."), f"give {argument.name} {describe.span(argument)}")
            )
        return not isinstance(got, Fault)

    def _given(self, term: Term, value: Value) -> Value | None:
        if not isinstance(value, Fault):
            return value
        place = term.of[1] if value.code == "divide-by-zero" and term.what == "div" else term
        says, remedy = value.says.rstrip("."), _REMEDIES.get(value.code, "")
        says = says[:1].lower() + says[1:]
        if term.kind == "library":
            own = says.startswith(f"{term.what}: ")
            says = says if own else f"{term.what} has no answer for this: {says}"
            remedy = "look at its arguments together"
        self.spots.append(place.spot(value.code, says, remedy))
        return None
