"""One entry of a formula file: its keys, its body, its examples (library.py shows what it looks like).

`read` makes a Draft or a Pair of each entry, with every problem of form; library.py parses the expressions
afterwards, because formulas may use each other. To add a key: a line in `_KEYS`, a field in Draft and Formula, an arm
in `_formula`.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any, Union

from fieldkit.errors import Collector, Place
from fieldkit.formula import arguments as _arguments
from fieldkit.formula import ast, blocks, columns, functions, parse, quantities, worked
from fieldkit.formula.arguments import Argument
from fieldkit.formula.columns import Columns
from fieldkit.formula.spots import one_of
from fieldkit.formula.worked import Example
from fieldkit.units import Unit
from fieldkit.yaml_source import Mapping, Node, Scalar, Sequence, kind

to_json = ast.to_json

_KEYS = (
    "meaning",
    "arguments",
    "requires",
    "expression",
    "table",
    "unit",
    "reference",
    "decides",
    "cautions",
    "plot",
    "examples",
)
_NEEDED = ("meaning", "arguments", "unit", "reference", "decides", "examples")
_PAIR_KEYS = ("meaning", "pair", "reference", "decides", "cautions")


@dataclass(frozen=True)
class Requirement:
    """A condition between the arguments, and what is said where it does not hold."""

    where: Scalar
    otherwise: str


@dataclass(frozen=True)
class Draft:
    """An entry whose form is right, before its expression is parsed."""

    name: str
    subject: str
    file: str
    place: Place
    meaning: str
    arguments: tuple[Argument, ...]
    unit: Unit
    reference: str
    decides: str
    cautions: tuple[str, ...]
    examples: tuple[Example, ...]
    expression: Scalar | None
    table: Columns | None
    requires: tuple[Requirement, ...] = ()
    plot: str = ""


@dataclass(frozen=True)
class Pair:
    """An entry that gives two values: the names of two formulas with the same arguments, the lower value first."""

    name: str
    subject: str
    file: str
    place: Place
    meaning: str
    of: tuple[str, str]
    reference: str
    decides: str
    cautions: tuple[str, ...]


@dataclass(frozen=True)
class Formula:
    """A formula of the library, ready for use; `tree` in the JSON form of fieldkit.formula.ast.

    `plot` names the argument along which a picture of the answer helps; "" where none does.
    """

    name: str
    subject: str
    meaning: str
    arguments: tuple[Argument, ...]
    unit: Unit
    tree: dict[str, Any]
    uses: tuple[str, ...]
    reference: str
    decides: str
    cautions: tuple[str, ...] = ()
    examples: tuple[Example, ...] = field(default=())
    plot: str = ""
    #: the expression as written; "" for a table
    written: str = ""

    def used(self) -> dict[str, Any]:
        """The formula in the form of sheet.model.FormulaUsed."""
        return {
            "name": self.name,
            "meaning": self.meaning,
            "arguments": [a.used() for a in self.arguments],
            "result_unit": self.unit.shown,
            "tree": self.tree,
            "reference": self.reference,
        }


def formula(draft: Draft, tree: dict[str, Any], uses: tuple[str, ...]) -> Formula:
    """The draft with its tree."""
    return Formula(
        draft.name,
        draft.subject,
        draft.meaning,
        draft.arguments,
        draft.unit,
        tree,
        uses,
        draft.reference,
        draft.decides,
        draft.cautions,
        draft.examples,
        draft.plot,
        " ".join(draft.expression.text.split()) if draft.expression is not None else "",
    )


def read(root: Node, found: Collector) -> Iterator[Union[Draft, Pair]]:
    """The entries of one file in order: those with a problem of form are told and left out."""
    top = blocks.mapping(root, found, "this file")
    if top is None:
        return
    blocks.only(top, ("subject", "formulas"), found, "a formula file")
    subject = blocks.text(top, "subject", found)
    entries = blocks.mapping(top.get("formulas"), found, "formulas") if blocks.present(top, "formulas", found) else None
    for e in entries or ():
        before = len(found.problems)
        block = blocks.mapping(e.value, found, e.key)
        if block is None:
            continue
        read_one = _pair if "pair" in block else _formula
        made = read_one(e.key, e.key_place, block, subject or "", found)
        if made is not None and len(found.problems) == before:
            yield made


def table_tree(draft: Draft) -> dict[str, Any] | None:
    """The tree of an entry that is a table, its numbers in SI."""
    if draft.table is None:
        return None
    of, x, y = draft.table
    return ast.to_json(ast.Table(draft.name, ast.Name(of), x, y))


def _named(name: str, place: Place, found: Collector) -> None:
    if not _arguments.NAME.fullmatch(name) or name in functions.FUNCTIONS or name in parse.SPACES:
        remedy = "write small letters and _, no function's name"
        found.add(place, "formula-name", f'"{name}" cannot name a formula', remedy)


def _pair(name: str, place: Place, block: Mapping, subject: str, found: Collector) -> Pair | None:
    _named(name, place, found)
    blocks.only(block, _PAIR_KEYS, found, "a pair of formulas")
    for key in ("meaning", "reference", "decides"):
        blocks.present(block, key, found)
    node = block.get("pair")
    of = tuple(blocks.texts(node, found))
    if len(of) != 2:
        where = node.place if node is not None else block.place
        found.add(where, "pair-of-two", f"a pair names two formulas, not {len(of)}", "write pair: [lowest, highest]")
        return None
    texts = {k: blocks.text(block, k, found) or "" for k in ("meaning", "reference", "decides")}
    cautions = tuple(blocks.texts(block.get("cautions"), found))
    return Pair(
        name,
        subject,
        found.file,
        place,
        texts["meaning"],
        (of[0], of[1]),
        texts["reference"],
        texts["decides"],
        cautions,
    )


def _formula(name: str, place: Place, block: Mapping, subject: str, found: Collector) -> Draft | None:
    _named(name, place, found)
    blocks.only(block, _KEYS, found, "a formula")
    for key in _NEEDED:
        blocks.present(block, key, found)
    arguments = _arguments.read(block.get("arguments"), found)
    unit = quantities.unit_of(block.get("unit"), found)
    expression, table = _body(block, arguments, unit, found)
    if unit is None or arguments is None:
        return None
    return Draft(
        name,
        subject,
        found.file,
        place,
        blocks.text(block, "meaning", found) or "",
        arguments,
        unit,
        blocks.text(block, "reference", found) or "",
        blocks.text(block, "decides", found) or "",
        tuple(blocks.texts(block.get("cautions"), found)),
        tuple(worked.read(block.get("examples"), arguments, unit, found)),
        expression,
        table,
        tuple(_requires(block.get("requires"), found)),
        _plot(block.get("plot"), arguments, found),
    )


def _requires(node: Node | None, found: Collector) -> Iterator[Requirement]:
    if node is None:
        return
    if not isinstance(node, Sequence):
        found.add(node.place, "not-a-list", "requires is not a list", "write each condition after a -")
        return
    for item in node:
        block = blocks.mapping(item, found, "a requirement")
        if block is None:
            continue
        blocks.only(block, ("where", "otherwise"), found, "a requirement")
        where, said = block.get("where"), blocks.text(block, "otherwise", found)
        for key in ("where", "otherwise"):
            blocks.present(block, key, found)
        if isinstance(where, Scalar) and said:
            yield Requirement(where, said)
        elif where is not None and not isinstance(where, Scalar):
            found.add(
                where.place, "not-a-text", f"where is {kind(where)}", "write a condition, like reflected < forward"
            )


def _plot(node: Node | None, arguments: tuple[Argument, ...], found: Collector) -> str:
    if node is None or (block := blocks.mapping(node, found, "plot")) is None:
        return ""
    blocks.only(block, ("along",), found, "a plot")
    along = blocks.text(block, "along", found) if blocks.present(block, "along", found) else None
    names = [a.name for a in arguments]
    if along is not None and along not in names:
        found.add(block.place, "unknown-name", f'"{along}" is no argument of this formula', one_of(along, names))
    return along or ""


def _body(
    block: Mapping, arguments: tuple[Argument, ...] | None, unit: Unit | None, found: Collector
) -> tuple[Scalar | None, Columns | None]:
    expression, table = block.get("expression"), block.get("table")
    if (expression is None) == (table is None):
        found.add(block.place, "formula-body", "a formula has an expression or a table", "write one of the two")
        return None, None
    if expression is not None:
        if isinstance(expression, Scalar):
            return expression, None
        found.add(expression.place, "not-a-text", f"the expression is {kind(expression)}", "write a formula")
        return None, None
    assert table is not None
    return None, columns.read(table, arguments or (), unit, found)
