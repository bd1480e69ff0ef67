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
        expression: voltage * current          # or  table: {of: temperature, x: [0, 5], y: [999.9, 1000.0]}
        unit: W
        reference: where it is published; say so if it is from memory
        decides: what a practitioner decides from it
        cautions: [what it does not tell]
        examples:
          - {with: {voltage: 34 kV, current: 2.2 A}, gives: 74.8 kW, within: 0.1 kW, source: a worked example}
          - {with: {voltage: 70 kV, current: 1 A}, fault: out-of-range}

Formulas may use each other, in any file, but not in a circle. Outside an argument's range there is no answer, but the
Fault "out-of-range". Not here: the language (parse.py), reading one entry (entry.py).
"""

from __future__ import annotations

import os
from collections.abc import Iterable
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from fieldkit import values, yaml_source
from fieldkit.errors import Collector, Problem
from fieldkit.formula import check, entry, parse
from fieldkit.formula.entry import Draft, Formula
from fieldkit.formula.evaluate import evaluate
from fieldkit.formula.spots import Unreadable
from fieldkit.values import Fault


@dataclass(frozen=True)
class Library:
    """Formulas by name in the order read, and everything wrong with their files. Use none while there is a problem."""

    formulas: dict[str, Formula] = field(default_factory=dict)
    problems: tuple[Problem, ...] = ()

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


def load(folder: Path) -> Library:
    """Every formula in the YAML files of `folder`, and every problem in them; examples are tried. Raises nothing."""
    drafts: dict[str, Draft] = {}
    problems: list[Problem] = []
    for path in sorted(folder.glob("*.yaml")):
        found = Collector(_shown(path))
        root, wrong = yaml_source.read(path.read_bytes(), found.file)
        problems.extend(wrong)
        if root is not None:
            _collect(root, found, drafts)
        problems.extend(found.problems)
    formulas = _compile(drafts, problems)
    _circles(formulas, drafts, problems)
    if not any(p.weight == "problem" for p in problems):
        _try_examples(Library(formulas), drafts, problems)
    return Library(formulas, tuple(sorted(problems, key=lambda p: (p.file, p.place))))


def _shown(path: Path) -> str:
    """The path as a person in the working folder would write it."""
    shown = os.path.relpath(path)
    return str(path) if shown.startswith("..") else shown


def _collect(root: yaml_source.Node, found: Collector, drafts: dict[str, Draft]) -> None:
    for draft in entry.read(root, found):
        if draft.name in drafts:
            other = drafts[draft.name].file
            found.add(draft.place, "formula-twice", f'"{draft.name}" is already in {other}', "give it another name")
        else:
            drafts[draft.name] = draft


def _compile(drafts: dict[str, Draft], problems: list[Problem]) -> dict[str, Formula]:
    """Formulas out of drafts: expressions parsed and their units checked, now that all names are known."""
    formulas: dict[str, Formula] = {}
    for draft in drafts.values():
        found = Collector(draft.file)
        tree = entry.table_tree(draft)
        uses: tuple[str, ...] = ()
        if draft.expression is not None:
            tree, uses = _expression(draft, drafts, found)
        problems.extend(found.problems)
        if tree is not None:
            formulas[draft.name] = entry.formula(draft, tree, uses)
    return formulas


def _expression(draft: Draft, drafts: dict[str, Draft], found: Collector) -> tuple[Any, tuple[str, ...]]:
    assert draft.expression is not None
    names: dict[str, check.Kind] = {a.name: a.unit.dimension for a in draft.arguments}
    try:
        parsed = parse.read(draft.expression.text)
        checked = check.check(parsed, names, library=drafts, want=draft.unit.dimension)
        spots = checked.spots
        if not spots:
            signatures = {n: tuple(a.name for a in d.arguments) for n, d in drafts.items()}
            return entry.to_json(parsed.tree(signatures)), _called(parsed.term)
    except Unreadable as exc:
        spots = tuple(exc.spots)
    for s in spots:
        found.add(draft.expression.at(s.column - 1, s.width), s.code, s.message, s.remedy)
    return None, ()


def _called(term: parse.Term) -> tuple[str, ...]:
    names = [term.what] if term.kind == "library" else []
    for part in term.of:
        names.extend(_called(part))
    return tuple(dict.fromkeys(names))


def _circles(formulas: dict[str, Formula], drafts: dict[str, Draft], problems: list[Problem]) -> None:
    for name, formula in formulas.items():
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
