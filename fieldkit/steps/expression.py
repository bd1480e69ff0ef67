"""A formula inside a procedure: parsed, its names and units checked, lowered to a tree in SI, problems at their column.

Not here: the formula language itself (fieldkit.formula); which names there are (scope).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, Union

from fieldkit import units
from fieldkit.errors import Collector
from fieldkit.formula import ast, check, parse
from fieldkit.formula.library import Library
from fieldkit.formula.parse import Parsed, Term
from fieldkit.formula.spots import Spot, Unreadable
from fieldkit.sheet.model import FormulaUsed
from fieldkit.sheet.parts import Tree, Unit
from fieldkit.steps import words
from fieldkit.yaml_source import Scalar

Want = Union[Unit, Literal["flag"], None]


@dataclass(frozen=True)
class Named:
    """What a name is: its dimension ("text" for a text), whether it is a column, and a tree that stands for it."""

    dimension: units.Dimension | Literal["text"] | None
    order: int = 0
    series: bool = False
    tree: Tree | None = None
    #: declared, but what was written of it is wrong: formulas with it are not checked further
    broken: bool = False


@dataclass(frozen=True)
class Lowered:
    tree: Tree
    formulas: frozenset[str]


def lower(
    scalar: Scalar,
    offset: int,
    text: str | None,
    want: Want,
    names: dict[str, Named],
    library: Library,
    found: Collector,
) -> Lowered | None:
    """The tree of the formula in `scalar` (its part `text` at `offset`); None after adding every problem of it."""
    written = scalar.text if text is None else text
    offset += len(written) - len(written.lstrip())
    written = written.strip()
    try:
        parsed = parse.read(written)
        if _speaks_of_broken(parsed.term, names):
            return None
        spots = _check(parsed, want, names, library)
        tree = parsed.tree(library.signatures()) if not spots else None
    except Unreadable as exc:
        spots, tree = tuple(exc.spots), None
    if tree is None:
        _report(spots, scalar, offset, found)
        return None
    return Lowered(_substituted(ast.to_json(tree), names), frozenset(_library_calls(parsed.term)))


def _check(parsed: Parsed, want: Want, names: dict[str, Named], library: Library) -> tuple[Spot, ...]:
    """What is wrong with the names and units of a formula that reads well."""
    kinds = {n: v.dimension for n, v in names.items() if v.dimension is not None and not v.series}
    columns = {n: v.dimension for n, v in names.items() if v.dimension is not None and (v.series or v.order)}
    wanted = want if want is None or isinstance(want, str) else words.dimension(want)
    return check.check(parsed, kinds, series=columns, library=library.formulas, pairs=library.pairs, want=wanted).spots


def _speaks_of_broken(term: Term, names: dict[str, Named]) -> bool:
    """Whether a name in the formula was itself written wrongly: its problem is told once, at its own place."""
    todo = [term]
    while todo:
        one = todo.pop()
        if one.kind in ("name", "series") and one.what in names and names[one.what].broken:
            return True
        todo.extend(one.of)
    return False


def _report(spots: tuple[Spot, ...], scalar: Scalar, offset: int, found: Collector) -> None:
    for spot in spots:
        found.add(scalar.at(offset + spot.column - 1, spot.width), spot.code, spot.message, spot.remedy)


def _library_calls(term: Term) -> set[str]:
    found, todo = set(), [term]
    while todo:
        one = todo.pop()
        if one.kind == "library":
            found.add(one.what)
        todo.extend(one.of)
    return found


def _substituted(tree: Tree, names: dict[str, Named]) -> Tree:
    """The tree with names that stand for another tree (`level`) replaced by it."""
    if "name" in tree and tree["name"] in names and names[tree["name"]].tree is not None:
        return names[tree["name"]].tree or tree
    if "call" in tree:
        return {"call": tree["call"], "of": [_substituted(t, names) for t in tree["of"]]}
    return tree


def used_formulas(names: set[str], library: Library) -> dict[str, FormulaUsed]:
    """The library's formulas that a sheet carries: those named and all that they use."""
    if not names:
        return {}
    return {name: FormulaUsed.model_validate(used) for name, used in library.used(names).items()}
