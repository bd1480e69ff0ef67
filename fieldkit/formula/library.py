"""The library of formulas: procedures/formulas/*.yaml, one file a subject, read, checked and tried on their examples.

    library = load(folder("procedures") / "formulas")
    library.formulas["beam_power"], library.problems, library.signatures(), library.used(["beam_power"])

An entry of a file:

    formulas:
      beam_power:
        meaning: power that the beam takes from its supply
        arguments:
          voltage: {unit: V, low: 0 V, high: 60 kV, meaning: beam voltage}
          current: {unit: A, low: 0 A, high: 10 A, meaning: beam current}
        requires:                              # optional: conditions between the arguments
          - {where: current <= voltage / (1 ohm), otherwise: why there is no answer}
        expression: voltage * current          # or  table: {of: temperature, x: [0, 5], y: [999.9, 1000.0]}
        unit: W
        reference: where it is published; say so if it is from memory
        decides: what a practitioner decides from it
        cautions: [what it does not tell]
        plot: {along: current}                 # optional: the page of sums draws it
        examples:
          - {with: {voltage: 34 kV, current: 2.2 A}, gives: 74.8 kW, within: 0.1 kW, source: a worked example}
          - {with: {voltage: 70 kV, current: 1 A}, fault: out-of-range}

Formulas may use each other, in any file, but not in a circle. Outside an argument's range, and where something in
`requires` does not hold, there is no answer, but the Fault "out-of-range". An entry may instead be a `pair` of two
formulas: the list and the page of sums show both values, a procedure uses one of the two. A station's own folder adds
to the library that comes with fieldkit: `load(own, base=shipped)`.
Not here: the language (parse.py), reading one entry (entry.py).
"""

from __future__ import annotations

import hashlib
import os
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from fieldkit import values, yaml_source
from fieldkit.errors import Collector, Problem
from fieldkit.formula import check, entry, parse
from fieldkit.formula.entry import Draft, Formula, Pair
from fieldkit.formula.evaluate import evaluate
from fieldkit.formula.spots import Unreadable, one_of
from fieldkit.values import Fault


@dataclass(frozen=True)
class Library:
    """Formulas by name in the order read, and everything wrong with their files. Use none while there is a problem."""

    formulas: dict[str, Formula] = field(default_factory=dict)
    pairs: dict[str, Pair] = field(default_factory=dict)
    problems: tuple[Problem, ...] = ()
    #: SHA-256 of each file that was read
    files: frozenset[str] = frozenset()

    def signatures(self) -> dict[str, tuple[str, ...]]:
        """The arguments of each formula in order: what parse wants."""
        return {name: tuple(a.name for a in f.arguments) for name, f in self.formulas.items()}

    def used(self, names: Iterable[str]) -> dict[str, dict[str, Any]]:
        """The named formulas and all that they use, each in the form of sheet.model.FormulaUsed."""
        found: dict[str, dict[str, Any]] = {}
        todo = list(names)
        while todo:
            name = todo.pop(0)
            if name not in found:
                found[name] = self.formulas[name].used()
                todo.extend(self.formulas[name].uses)
        return dict(sorted(found.items()))


def load(folder: Path, base: Library | None = None) -> Library:
    """Every formula in the YAML files of `folder`, and every problem in them; examples are tried. Raises nothing.

    `base` is a library without problems that the folder adds to: its formulas are there to use and their names taken.
    A copy of a file of `base` adds nothing and is no problem: a checkout beside an installed fieldkit has all of them.
    """
    entries = _Entries(base or Library())
    for path in sorted(folder.glob("*.yaml")):
        data = path.read_bytes()
        if not entries.is_new(data):
            continue
        found = Collector(_shown(path))
        root, wrong = yaml_source.read(data, found.file)
        entries.problems.extend(wrong)
        if root is not None:
            entries.collect(root, found)
        entries.problems.extend(found.problems)
    return entries.library()


def _shown(path: Path) -> str:
    """The path as a person in the working folder would write it."""
    shown = os.path.relpath(path)
    return str(path) if shown.startswith("..") else shown


class _Entries:
    """What the files of one folder hold, on the way to a Library."""

    def __init__(self, base: Library) -> None:
        self.base = base
        self.drafts: dict[str, Draft] = {}
        self.pairs: dict[str, Pair] = {}
        self.problems: list[Problem] = []
        self.files: set[str] = set()

    def is_new(self, data: bytes) -> bool:
        """Whether a file is no copy of one that the base was read from; marks it as read."""
        digest = hashlib.sha256(data).hexdigest()
        self.files.add(digest)
        return digest not in self.base.files

    def collect(self, root: yaml_source.Node, found: Collector) -> None:
        """Takes the entries of one file; a name that is taken is a problem where it is written again."""
        for one in entry.read(root, found):
            other = self.drafts.get(one.name) or self.pairs.get(one.name)
            known = one.name in self.base.formulas or one.name in self.base.pairs
            if other is not None or known:
                where = f"in {other.file}" if other is not None else "among the formulas that come with fieldkit"
                found.add(one.place, "formula-twice", f'"{one.name}" is already {where}', "give it another name")
            elif isinstance(one, Pair):
                self.pairs[one.name] = one
            else:
                self.drafts[one.name] = one

    def library(self) -> Library:
        """The library: the base, and what the files add where they have no problem that hides it."""
        known: dict[str, Draft | Formula] = {**self.base.formulas, **self.drafts}
        own = {name: made for name, d in self.drafts.items() if (made := self._compiled(d, known)) is not None}
        formulas = {**self.base.formulas, **own}
        _circles(formulas, self.drafts, self.problems)
        for pair in self.pairs.values():
            self._look_at(pair, known)
        pairs = {**self.base.pairs, **self.pairs}
        if not any(p.weight == "problem" for p in self.problems):
            _try_examples(Library(formulas), self.drafts, self.problems)
        problems = tuple(sorted(self.problems, key=lambda p: (p.file, p.place)))
        return Library(formulas, pairs, problems, self.base.files | self.files)

    def _compiled(self, draft: Draft, known: dict[str, Draft | Formula]) -> Formula | None:
        """The formula: expressions parsed and their units checked, now that all names are known."""
        found = Collector(draft.file)
        uses: list[str] = []
        tree = entry.table_tree(draft)
        if draft.expression is not None:
            tree = _parsed(draft.expression, draft, known, draft.unit.dimension, uses, found)
        for one in reversed(draft.requires):
            condition = _parsed(one.where, draft, known, "flag", uses, found)
            said = f"{draft.name}: {one.otherwise.rstrip('.')}."
            tree = {"call": "holds", "of": [condition, {"text": said}, tree]} if tree and condition else None
        self.problems.extend(found.problems)
        return entry.formula(draft, tree, tuple(dict.fromkeys(uses))) if tree is not None else None

    def _look_at(self, pair: Pair, known: dict[str, Draft | Formula]) -> None:
        """Both formulas of a pair exist, take the same arguments and give the same unit."""
        found = Collector(pair.file)
        missing = [name for name in pair.of if name not in known]
        if missing and self.problems:
            return  # it may be one of those that could not be read
        for name in missing:
            found.add(pair.place, "unknown-function", f'there is no formula "{name}"', one_of(name, known))
        if not missing:
            a, b = (known[name] for name in pair.of)
            if a.arguments != b.arguments or a.unit != b.unit:
                says = f"{a.name} and {b.name} differ in their arguments or their unit"
                found.add(pair.place, "pair-differs", says, "write the same arguments and unit in both")
        self.problems.extend(found.problems)


def _parsed(
    text: yaml_source.Scalar,
    draft: Draft,
    known: Mapping[str, Draft | Formula],
    want: check.Kind,
    uses: list[str],
    found: Collector,
) -> dict[str, Any] | None:
    """The tree of one expression of an entry; None, with problems, where it makes no sense. Adds to `uses`."""
    names: dict[str, check.Kind] = {a.name: a.unit.dimension for a in draft.arguments}
    try:
        parsed = parse.read(text.text)
        spots = check.check(parsed, names, library=known, want=want).spots
        if not spots:
            uses.extend(_called(parsed.term))
            return entry.to_json(parsed.tree({n: tuple(a.name for a in d.arguments) for n, d in known.items()}))
    except Unreadable as exc:
        spots = tuple(exc.spots)
    for s in spots:
        found.add(text.at(s.column - 1, s.width), s.code, s.message, s.remedy)
    return None


def _called(term: parse.Term) -> tuple[str, ...]:
    names = [term.what] if term.kind == "library" else []
    for part in term.of:
        names.extend(_called(part))
    return tuple(dict.fromkeys(names))


def _circles(formulas: dict[str, Formula], drafts: dict[str, Draft], problems: list[Problem]) -> None:
    for name, formula in ((n, formulas[n]) for n in drafts if n in formulas):
        reached: set[str] = set()
        todo = list(formula.uses)
        while todo:
            one = todo.pop()
            if one not in reached and one in formulas:
                reached.add(one)
                todo.extend(formulas[one].uses)
        if name in reached:
            found = Collector(drafts[name].file)
            says = f'"{name}" uses itself through {", ".join(sorted(reached))}'
            found.add(drafts[name].place, "formula-circle", says, "write one of them out in full")
            problems.extend(found.problems)


def _try_examples(library: Library, drafts: dict[str, Draft], problems: list[Problem]) -> None:
    for name, draft in drafts.items():
        found = Collector(draft.file)
        aboard = library.used([name])
        for example in draft.examples:
            tree = {"call": name, "of": [{"number": values.to_text(values.dec(v))} for v in example.given]}
            says = _differs(evaluate(tree, formulas=aboard), example, draft)
            if says:
                remedy = "correct the formula or the example, whichever is wrong"
                found.add(example.place, "example-differs", f"{name}: {says}", remedy)
        problems.extend(found.problems)


def _differs(got: Any, example: entry.Example, draft: Draft) -> str:
    """What is wrong with an example's answer, in words; "" where nothing is."""
    if example.fault:
        if isinstance(got, Fault) and got.code == example.fault:
            return ""
        return f"this example expects {example.fault} and gives {got.code if isinstance(got, Fault) else got}"
    if isinstance(got, Fault):
        return f"this example has no answer: {got.says}"
    if not isinstance(got, float):
        return "this example gives no number"
    if abs(got - float(example.gives)) <= float(example.within):
        return ""
    unit = draft.unit
    shown = values.to_shown(got, unit)
    expected = values.to_shown(float(example.gives), unit)
    return f"this example gives {shown} {unit.symbol}, not {expected} {unit.symbol}"
