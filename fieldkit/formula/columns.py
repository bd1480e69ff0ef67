"""The table of an entry: two columns of numbers, straight lines between.

table: {of: temperature, x: [0, 5, 10], y: [999.94, 1000.06, 999.80]}

in the units of the argument and of the answer.
"""

from __future__ import annotations

import re
from itertools import pairwise

from fieldkit.errors import Collector
from fieldkit.formula import blocks, quantities
from fieldkit.formula.arguments import Argument
from fieldkit.formula.spots import one_of
from fieldkit.units import Unit
from fieldkit.yaml_source import Mapping, Node, Scalar, Sequence

_PLAIN = re.compile(r"-?[0-9]+(\.[0-9]+)?")

#: argument, its values, the answers; decimal texts in SI
Columns = tuple[str, tuple[str, ...], tuple[str, ...]]


def read(node: Node, arguments: tuple[Argument, ...], unit: Unit | None, found: Collector) -> Columns | None:
    """The table, its numbers in SI; None, with problems, where it cannot be used."""
    block = blocks.mapping(node, found, "the table")
    if block is None or unit is None:
        return None
    blocks.only(block, ("of", "x", "y"), found, "a table")
    of = blocks.text(block, "of", found)
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
            texts.append(quantities.in_si(item.text, unit))
        else:
            found.add(item.place, "not-a-number", "this is no plain number", "write a number like 4.18")
    return tuple(texts) if len(texts) == len(node) else None
