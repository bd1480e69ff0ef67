"""One entry of a formula file: its keys, its arguments, its table, its examples (library.py shows what it looks like).

`read` makes a Draft of each entry, with every problem of form; library.py parses the expressions afterwards, because
formulas may use each other. To add a key: a line in `_KEYS`, a field in Draft and Formula, an arm in `_entry`.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import pairwise
from typing import Any

from fieldkit import units, values
from fieldkit.errors import Collector, Place
from fieldkit.formula import ast, functions, parse
from fieldkit.formula.spots import Unreadable, one_of
from fieldkit.units import Unit
from fieldkit.values import FAULTS
from fieldkit.yaml_source import Mapping, Node, Scalar, Sequence, kind

to_json = ast.to_json

_KEYS = (
    "meaning",
    "arguments",
    "expression",
    "table",
    "unit",
    "reference",
    "decides",
    "cautions",
    "examples",
)
_NEEDED = ("meaning", "arguments", "unit", "reference", "decides", "examples")
_NAME = re.compile(r"[a-z][a-z0-9_]*")
_PLAIN = re.compile(r"-?[0-9]+(\.[0-9]+)?")


@dataclass(frozen=True)
class Argument:
    """`low` and `high` are in SI, inclusive, decimal texts; None is unbounded."""

    name: str
    unit: Unit
    low: str | None
    high: str | None
    meaning: str


@dataclass(frozen=True)
class Example:
    """Arguments in SI in their order; `gives` and `within` in SI, or the code of the expected Fault."""

    given: tuple[str, ...]
    gives: str
    within: str
    fault: str
    source: str
    place: Place


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
    table: tuple[str, tuple[str, ...], tuple[str, ...]] | None


@dataclass(frozen=True)
class Formula:
    """A formula of the library, ready for use; `tree` in the JSON form of fieldkit.formula.ast."""

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

    def used(self) -> dict[str, Any]:
        """The formula in the form of sheet.model.FormulaUsed."""
        arguments = [
            {
                "name": a.name,
                "unit": a.unit.shown,
                "factor": a.unit.factor,
                "offset": a.unit.offset,
                "low": a.low,
                "high": a.high,
            }
            for a in self.arguments
        ]
        return {
            "name": self.name,
            "meaning": self.meaning,
            "arguments": arguments,
            "result_unit": self.unit.shown,
            "tree": self.tree,
            "reference": self.reference,
        }


def formula(draft: Draft, tree: dict[str, Any], uses: tuple[str, ...]) -> Formula:
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
    )


def read(root: Node, found: Collector) -> Iterator[Draft]:
    """The drafts in one file: entries with a problem of form are told and left out."""
    top = _mapping(root, found, "this file")
    if top is None:
        return
    _only(top, ("subject", "formulas"), found, "a formula file")
    subject = _text(top, "subject", found)
    entries = _mapping(top.get("formulas"), found, "formulas") if _present(top, "formulas", found) else None
    for e in entries or ():
        before = len(found.problems)
        draft = _entry(e.key, e.key_place, e.value, subject or "", found)
        if draft is not None and len(found.problems) == before:
            yield draft


def table_tree(draft: Draft) -> dict[str, Any] | None:
    """The tree of an entry that is a table, its numbers in SI."""
    if draft.table is None:
        return None
    of, x, y = draft.table
    return ast.to_json(ast.Table(draft.name, ast.Name(of), x, y))


def _entry(name: str, place: Place, node: Node, subject: str, found: Collector) -> Draft | None:
    block = _mapping(node, found, name)
    if block is None:
        return None
    if not _NAME.fullmatch(name) or name in functions.FUNCTIONS or name in parse.SPACES:
        found.add(
            place, "formula-name", f'"{name}" cannot name a formula', "write small letters and _, no function's name"
        )
    _only(block, _KEYS, found, "a formula")
    for key in _NEEDED:
        _present(block, key, found)
    arguments = _arguments(block.get("arguments"), found)
    unit = _unit(block.get("unit"), found)
    expression, table = _body(block, arguments, unit, found)
    if unit is None or arguments is None:
        return None
    examples = tuple(_examples(block.get("examples"), arguments, unit, found))
    return Draft(
        name,
        subject,
        found.file,
        place,
        _text(block, "meaning", found) or "",
        arguments,
        unit,
        _text(block, "reference", found) or "",
        _text(block, "decides", found) or "",
        tuple(_texts(block.get("cautions"), found)),
        examples,
        expression,
        table,
    )


def _body(
    block: Mapping, arguments: tuple[Argument, ...] | None, unit: Unit | None, found: Collector
) -> tuple[Scalar | None, tuple[str, tuple[str, ...], tuple[str, ...]] | None]:
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
    return None, _table(table, arguments or (), unit, found)


def _table(
    node: Node, arguments: tuple[Argument, ...], unit: Unit | None, found: Collector
) -> tuple[str, tuple[str, ...], tuple[str, ...]] | None:
    block = _mapping(node, found, "the table")
    if block is None or unit is None:
        return None
    _only(block, ("of", "x", "y"), found, "a table")
    of = _text(block, "of", found)
    argument = next((a for a in arguments if a.name == of), None)
    if argument is None:
        if of is not None:
            remedy = one_of(of, [a.name for a in arguments])
            found.add(block.place, "unknown-name", f'"{of}" is no argument of this formula', remedy)
        return None
    x = _column(block, "x", argument.unit, found)
    y = _column(block, "y", unit, found)
    if x is None or y is None:
        return None
    if len(x) != len(y) or len(x) < 2:
        found.add(
            block.place, "table-length", f"{len(x)} values of x and {len(y)} of y", "give as many of both, two at least"
        )
        return None
    if any(float(b) <= float(a) for a, b in pairwise(x)):
        found.add(
            block.place, "table-order", "the values of x do not rise", "write them from the least to the greatest"
        )
        return None
    return str(of), x, y


def _column(block: Mapping, key: str, unit: Unit, found: Collector) -> tuple[str, ...] | None:
    node = block.get(key)
    if not isinstance(node, Sequence):
        found.add(block.place, "not-a-list", f"the table's {key} is not a list", f"write {key}: [0, 5, 10]")
        return None
    texts: list[str] = []
    for item in node:
        if isinstance(item, Scalar) and _PLAIN.fullmatch(item.text):
            texts.append(in_si(item.text, unit))
        else:
            found.add(item.place, "not-a-number", "this is no plain number", "write a number like 4.18")
    return tuple(texts) if len(texts) == len(node) else None


def _arguments(node: Node | None, found: Collector) -> tuple[Argument, ...] | None:
    if node is None or (block := _mapping(node, found, "arguments")) is None:
        return None
    arguments: list[Argument] = []
    for e in block:
        part = _mapping(e.value, found, e.key)
        if part is None:
            continue
        if not _NAME.fullmatch(e.key) or e.key in parse.SPACES:
            found.add(e.key_place, "argument-name", f'"{e.key}" cannot name an argument', "write small letters and _")
        _only(part, ("unit", "low", "high", "meaning"), found, "an argument")
        unit = _unit(part.get("unit"), found) if _present(part, "unit", found) else None
        if unit is not None:
            low, high = (_quantity(part.get(k), unit, found) for k in ("low", "high"))
            arguments.append(Argument(e.key, unit, low, high, _text(part, "meaning", found) or ""))
    return tuple(arguments) if len(arguments) == len(block) else None


def _examples(node: Node | None, arguments: tuple[Argument, ...], unit: Unit, found: Collector) -> Iterator[Example]:
    if not isinstance(node, Sequence) or not len(node):
        if node is not None:
            found.add(node.place, "not-a-list", "the examples are not a list", "write one example at least, after a -")
        return
    for item in node:
        block = _mapping(item, found, "an example")
        if block is None:
            continue
        _only(block, ("with", "gives", "within", "fault", "source"), found, "an example")
        given = _given(block, arguments, found)
        fault = _text(block, "fault", found, needed=False) or ""
        if fault and fault not in FAULTS:
            found.add(block.place, "unknown-fault", f'there is no fault "{fault}"', one_of(fault, FAULTS))
        gives = _quantity(block.get("gives"), unit, found) if fault or _present(block, "gives", found) else None
        within = _within(block.get("within"), unit, found) if fault or _present(block, "within", found) else None
        if given is not None and (fault or (gives and within)):
            source = _text(block, "source", found, needed=False) or ""
            yield Example(given, gives or "0", within or "0", fault, source, block.place)


def _given(block: Mapping, arguments: tuple[Argument, ...], found: Collector) -> tuple[str, ...] | None:
    values_of = _mapping(block.get("with"), found, "with") if _present(block, "with", found) else None
    if values_of is None:
        return None
    _only(values_of, tuple(a.name for a in arguments), found, "this formula")
    given = [
        _quantity(values_of.get(a.name), a.unit, found) if _present(values_of, a.name, found) else None
        for a in arguments
    ]
    return tuple(g for g in given if g is not None) if None not in given else None


def _quantity(node: Node | None, unit: Unit, found: Collector) -> str | None:
    """A quantity in SI: "60 kV" where `unit` is of the same dimension; None, with a problem, where it is not."""
    if node is None:
        return None
    if not isinstance(node, Scalar):
        found.add(
            node.place, "not-a-quantity", f"this is {kind(node)}", f"write a number and a unit, like 5 {unit.symbol}"
        )
        return None
    try:
        term = parse.read(node.text).term
    except Unreadable as exc:
        for s in exc.spots:
            found.add(node.at(s.column - 1, s.width), s.code, s.message, s.remedy)
        return None
    has = term.unit.dimension if term.unit else units.NUMBER
    if term.kind != "number" or not has.same_powers(unit.dimension):
        remedy = f"write a number and a unit, like 5 {unit.symbol}" if unit.symbol != "1" else "write a number alone"
        found.add(node.place, "not-a-quantity", f'"{node.text}" is no quantity in {unit.symbol}', remedy)
        return None
    return term.what


def _within(node: Node | None, unit: Unit, found: Collector) -> str | None:
    """A tolerance: a quantity, in K for a temperature."""
    plain = units.UNITS["K"] if unit.dimension.absolute else unit
    return _quantity(node, plain, found)


def _unit(node: Node | None, found: Collector) -> Unit | None:
    if node is None:
        return None
    symbol = node.text if isinstance(node, Scalar) else ""
    unit = units.unit(symbol)
    if unit is None:
        likely = units.near(symbol)
        remedy = f"write one of: {', '.join(likely)}" if likely else 'write a unit such as V, or "1" for a plain number'
        found.add(node.place, "unknown-unit", f'"{symbol}" is no unit known here', remedy)
    return unit


def in_si(text: str, unit: Unit) -> str:
    """A plain decimal in `unit` as a decimal in SI."""
    exact = values.add(values.mul(values.dec(text), values.dec(unit.factor)), values.dec(unit.offset))
    return values.to_text(values.trim(exact))


def _mapping(node: Node | None, found: Collector, what: str) -> Mapping | None:
    if isinstance(node, Mapping):
        return node
    if node is not None:
        found.add(node.place, "not-a-block", f"{what} is {kind(node)}", "write keys and values under it")
    return None


def _only(block: Mapping, keys: tuple[str, ...], found: Collector, what: str) -> None:
    for e in block:
        if e.key not in keys:
            found.add(e.key_place, "unknown-key", f'unknown key "{e.key}" in {what}', one_of(e.key, keys))


def _present(block: Mapping, key: str, found: Collector) -> bool:
    if key not in block:
        found.add(block.place, "missing-key", f'the key "{key}" is missing', f"write {key}: ...")
    return key in block


def _text(block: Mapping, key: str, found: Collector, needed: bool = True) -> str | None:
    node = block.get(key)
    if isinstance(node, Scalar) and node.text.strip():
        return node.text.strip()
    if node is not None:
        found.add(node.place, "not-a-text", f'"{key}" is {kind(node)} or empty', "write a text")
    return None


def _texts(node: Node | None, found: Collector) -> Iterator[str]:
    if node is None:
        return
    if not isinstance(node, Sequence):
        found.add(node.place, "not-a-list", "this is not a list", "write each item after a -")
        return
    for item in node:
        if isinstance(item, Scalar) and item.text.strip():
            yield item.text.strip()
        else:
            found.add(item.place, "not-a-text", "this is no text", "write a sentence")
