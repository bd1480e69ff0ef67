"""What the ± of the numbers in a sum make of its answer, to first order (JCGM 100, 5.1.2), every ± a source of its own.

    carry(term, stated, library, coverage)     Carried(u, shares) of one value, and what is to be said about it

`coverage` divides what was typed to give a standard uncertainty: EXPANDED where ± is U with k = 2, which is what this
house means by ± everywhere; ACCURACY where it is the half-width of a meter's specification (rectangular, JCGM 100,
4.3.7). Not here: reading what was typed (stated.py), derivatives (slopes.py), their sum (spread.py).
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

from fieldkit.formula import ast, evaluate, slopes, spread
from fieldkit.formula.library import Library
from fieldkit.formula.parse import Parsed, Term
from fieldkit.formula.stated import Stated
from fieldkit.values import Fault

#: what a ± is divided by to give a standard uncertainty
EXPANDED = 2.0
ACCURACY = math.sqrt(3.0)

#: k of every uncertainty that is shown
COVERAGE = 2

#: an answer that strays from the straight line by more than this part of its own U is told, where its digits show it
_BENT = 0.2


@dataclass(frozen=True)
class Share:
    """What one number makes of the answer's uncertainty: its argument's name, as typed, and percent of the variance."""

    name: str
    written: str
    #: signed c u in SI
    part: float
    percent: float


@dataclass(frozen=True)
class Carried:
    """The standard uncertainty of a value in SI, and its sources, the largest share first."""

    u: float
    shares: tuple[Share, ...]

    @property
    def expanded(self) -> float:
        return COVERAGE * self.u


@dataclass(frozen=True)
class Told:
    """What came of carrying: nothing where the answer is yes or no or changes without bound; `says` are warnings."""

    carried: Carried | None
    says: tuple[str, ...] = field(default=())


def carry(term: Term, stated: Sequence[Stated], library: Library, value: object, coverage: float, digits: int) -> Told:
    """The uncertainty of the answer `value`, shown with so many digits; `term` is the sum, `stated` its ±."""
    names = {f"± {k}": one for k, one in enumerate(stated)}
    tree = _tree(term, names, library)
    used = library.used(_called(term))
    plain = evaluate.prepare(tree, used)
    at = {name: _number(one.term) for name, one in names.items()}
    labels = _labels(term, names)
    ends = {name: [plain.value({**at, name: at[name] + s * one.width}) for s in (1, -1)] for name, one in names.items()}
    ranged = [_ends(labels[n], names[n], found) for n, found in ends.items()]
    if not isinstance(value, float):
        changed = [_changes(labels[n], names[n]) for n, found in ends.items() if any(v is (not value) for v in found)]
        return Told(None, _only(ranged, changed))
    gradient = slopes.prepare(tree, used).gradient(at)
    if isinstance(gradient.of, Fault):
        return Told(None, _only(ranged, [gradient.of.says]))
    parts = spread.contributions(gradient.of, {n: {n: one.width / coverage} for n, one in names.items()})
    u = spread.standard(parts)
    if isinstance(u, Fault) or not math.isfinite(COVERAGE * u):
        return Told(None, _only(ranged, ["The uncertainty is too large to tell."]))
    most = max(_BENT * COVERAGE * u, 0.5 * 10.0 ** (1 - digits) * abs(value))
    bent = [
        _bends(labels[n], names[n])
        for n, found in ends.items()
        if _strays(found, value, gradient.of.get(n, 0.0) * names[n].width) > most
    ]
    return Told(Carried(u, _shares(parts, u, labels, names)), _only(ranged, bent))


def _only(*lists: Sequence[str]) -> tuple[str, ...]:
    return tuple(says for one in lists for says in one if says)


def _number(term: Term) -> float:
    found = evaluate.evaluate({"number": term.what})
    assert isinstance(found, float)
    return found


def _tree(term: Term, names: Mapping[str, Stated], library: Library) -> dict[str, Any]:
    """The sum with a name in the place of every number that has a ±."""
    by_place = {(one.term.start, one.term.end): name for name, one in names.items()}
    return ast.to_json(Parsed("", _named(term, by_place)).tree(library.signatures()))


def _named(term: Term, by_place: Mapping[tuple[int, int], str]) -> Term:
    if term.kind == "number" and (term.start, term.end) in by_place:
        return replace(term, kind="name", what=by_place[term.start, term.end], named=())
    return replace(term, of=tuple(_named(part, by_place) for part in term.of))


def _called(term: Term) -> list[str]:
    return [*([term.what] if term.kind == "library" else []), *(name for part in term.of for name in _called(part))]


def _labels(term: Term, names: Mapping[str, Stated]) -> dict[str, str]:
    """The argument that each number belongs to; with its formula, where two have the same; "" outside of formulas."""
    found = {name: _argument(term, one.term) for name, one in names.items()}
    many = {a for f, a in set(found.values()) if sum(a == b for _, b in set(found.values())) > 1}
    return {name: f"{a} of {f}" if a in many else a for name, (f, a) in found.items()}


def _argument(term: Term, number: Term) -> tuple[str, str]:
    """The innermost formula and argument that a number stands in."""
    for place, part in enumerate(term.of):
        if part.start <= number.start and number.end <= part.end:
            inner = _argument(part, number)
            own = term.named[place] if term.kind == "library" else None
            return inner if inner[1] or own is None else (term.what, own)
    return "", ""


def _called_of(label: str, one: Stated) -> str:
    return f"{label} ({one.written})" if label else one.written


def _ends(label: str, one: Stated, found: Sequence[object]) -> str:
    """That a value within ± has no answer; "" where all have."""
    fault = next((v for v in found if isinstance(v, Fault)), None)
    if fault is None:
        return ""
    what = "The range ends" if fault.code == "out-of-range" else "There is no answer everywhere"
    return f"{what} within the ± of {_called_of(label, one)}: {fault.says}"


def _changes(label: str, one: Stated) -> str:
    return f"The answer changes within the ± of {_called_of(label, one)}."


def _bends(label: str, one: Stated) -> str:
    return f"The answer bends within the ± of {_called_of(label, one)}: its own ± is only roughly right."


def _strays(found: Sequence[object], value: float, slope: float) -> float:
    """How far the answers at both ends of a ± lie off the straight line through the value."""
    lines = (value + slope, value - slope)
    return max((abs(v - line) for v, line in zip(found, lines, strict=True) if isinstance(v, float)), default=0.0)


def _shares(
    parts: Mapping[str, float], u: float, labels: Mapping[str, str], names: Mapping[str, Stated]
) -> tuple[Share, ...]:
    found = []
    for name, one in names.items():
        part = parts.get(name, 0.0)
        percent = 100.0 * (part / u) * (part / u) if u else 0.0
        found.append(Share(labels[name], one.written, part, percent))
    return tuple(sorted(found, key=lambda s: -s.percent))
