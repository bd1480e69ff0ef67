"""Reading the nodes of a formula file: blocks, keys and texts, each problem with its place.

Not here: quantities and units (quantities.py), what an entry is made of (entry.py).
"""

from __future__ import annotations

from collections.abc import Iterator

from fieldkit.errors import Collector
from fieldkit.formula.spots import one_of
from fieldkit.yaml_source import Mapping, Node, Scalar, Sequence, kind


def mapping(node: Node | None, found: Collector, what: str) -> Mapping | None:
    if isinstance(node, Mapping):
        return node
    if node is not None:
        found.add(node.place, "not-a-block", f"{what} is {kind(node)}", "write keys and values under it")
    return None


def only(block: Mapping, keys: tuple[str, ...], found: Collector, what: str) -> None:
    for e in block:
        if e.key not in keys:
            found.add(e.key_place, "unknown-key", f'unknown key "{e.key}" in {what}', one_of(e.key, keys))


def present(block: Mapping, key: str, found: Collector) -> bool:
    if key not in block:
        found.add(block.place, "missing-key", f'the key "{key}" is missing', f"write {key}: ...")
    return key in block


def text(block: Mapping, key: str, found: Collector, needed: bool = True) -> str | None:
    node = block.get(key)
    if isinstance(node, Scalar) and node.text.strip():
        return node.text.strip()
    if node is not None:
        found.add(node.place, "not-a-text", f'"{key}" is {kind(node)} or empty', "write a text")
    return None


def texts(node: Node | None, found: Collector) -> Iterator[str]:
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
