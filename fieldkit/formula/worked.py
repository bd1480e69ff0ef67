"""The worked examples of an entry: arguments, and the answer with its tolerance or the Fault that is expected.

Not here: trying them (library.py).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from fieldkit.errors import Collector, Place
from fieldkit.formula import blocks, quantities
from fieldkit.formula.arguments import Argument
from fieldkit.formula.spots import one_of
from fieldkit.units import Unit
from fieldkit.values import FAULTS
from fieldkit.yaml_source import Mapping, Node, Scalar, Sequence


@dataclass(frozen=True)
class Example:
    """Arguments in SI in their order, and as written; `gives` and `within` in SI, or the code of the expected Fault."""

    given: tuple[str, ...]
    written: tuple[str, ...]
    gives: str
    gives_written: str
    within: str
    fault: str
    source: str
    place: Place


def read(node: Node | None, arguments: tuple[Argument, ...], unit: Unit, found: Collector) -> Iterator[Example]:
    """The examples that can be tried; problems with the others."""
    if not isinstance(node, Sequence) or not len(node):
        if node is not None:
            found.add(node.place, "not-a-list", "the examples are not a list", "write one example at least, after a -")
        return
    for item in node:
        block = blocks.mapping(item, found, "an example")
        example = _example(block, arguments, unit, found) if block is not None else None
        if example is not None:
            yield example


def _example(block: Mapping, arguments: tuple[Argument, ...], unit: Unit, found: Collector) -> Example | None:
    blocks.only(block, ("with", "gives", "within", "fault", "source"), found, "an example")
    given = _given(block, arguments, found)
    fault = blocks.text(block, "fault", found, needed=False) or ""
    if fault and fault not in FAULTS:
        found.add(block.place, "unknown-fault", f'there is no fault "{fault}"', one_of(fault, FAULTS))
    gives = _answer(block, "gives", unit, bool(fault), found)
    within = _answer(block, "within", quantities.tolerance_unit(unit), bool(fault), found)
    if given is None or not (fault or (gives and within)):
        return None
    source = blocks.text(block, "source", found, needed=False) or ""
    written = _written(block.get("with"), arguments)
    return Example(
        given, written, gives or "0", _as_text(block.get("gives")), within or "0", fault, source, block.place
    )


def _answer(block: Mapping, key: str, unit: Unit, spare: bool, found: Collector) -> str | None:
    if spare or blocks.present(block, key, found):
        return quantities.quantity(block.get(key), unit, found)
    return None


def _as_text(node: Node | None) -> str:
    return node.text.strip() if isinstance(node, Scalar) else ""


def _written(node: Node | None, arguments: tuple[Argument, ...]) -> tuple[str, ...]:
    return tuple(_as_text(node.get(a.name)) for a in arguments) if isinstance(node, Mapping) else ()


def _given(block: Mapping, arguments: tuple[Argument, ...], found: Collector) -> tuple[str, ...] | None:
    values_of = blocks.mapping(block.get("with"), found, "with") if blocks.present(block, "with", found) else None
    if values_of is None:
        return None
    blocks.only(values_of, tuple(a.name for a in arguments), found, "this formula")
    given = [
        quantities.quantity(values_of.get(a.name), a.unit, found) if blocks.present(values_of, a.name, found) else None
        for a in arguments
    ]
    return tuple(g for g in given if g is not None) if None not in given else None
