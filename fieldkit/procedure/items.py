"""The list under `steps:` read into items: steps of a kind, under their sections, conditions and asides.

    - section: Coolant and air          a heading for the steps below it
    - when: history is stored           a block that is left out where its conditions do not hold
      steps: [...]
    - aside: After a fall               a block that is only reached by `go to`
      steps: [...]
    - read: Heater voltage              a step: its first key names its kind

Not here: lowering (fieldkit.procedure.compile). What stands in a step is its kind's business.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from typing import Any

from fieldkit.errors import Collector, Place
from fieldkit.steps import KINDS, words
from fieldkit.steps.base import Kind, StepWritten
from fieldkit.yaml_source import Mapping, Node, Scalar, Sequence, kind

MAX_STEPS = 400


@dataclass(frozen=True)
class Block:
    """A `when:` block, or an `aside:` (no conditions). Compared by identity: two blocks are never the same."""

    conditions: tuple[Scalar, ...]
    place: Place
    aside: str = ""
    serial: int = 0


@dataclass
class Item:
    """One step as written. `written` is None where it has problems; its id and title are known all the same."""

    kind: Kind
    id: str
    title: str
    written: StepWritten | None
    place: Place
    number: str
    section: str = ""
    blocks: tuple[Block, ...] = ()


@dataclass
class _Reader:
    found: Collector
    kinds: dict[str, Kind]
    items: list[Item] = field(default_factory=list)
    taken: dict[str, Place] = field(default_factory=dict)
    section: str = ""
    blocks: int = 0
    pieces: int = 0


def read(node: Node | None, found: Collector, kinds: dict[str, Kind] | None = None) -> list[Item]:
    """Every step under `node`, in order, numbered from 1; problems are added to `found`."""
    reader = _Reader(found, kinds or KINDS)
    if node is not None:
        _list(node, (), reader)
    return reader.items


def _list(node: Node, blocks: tuple[Block, ...], reader: _Reader) -> None:
    if not isinstance(node, Sequence) or not node.items:
        reader.found.add(
            node.place, "no-steps", f"{kind(node)} stands here, not a list of steps", "write - act: ... for each"
        )
        return
    for item in node:
        reader.pieces += 1
        if reader.pieces > MAX_STEPS:
            if reader.pieces == MAX_STEPS + 1:
                reader.found.add(item.place, "too-many-steps", f"more than {MAX_STEPS} steps", "split the procedure")
            return
        if not isinstance(item, Mapping):
            remedy = "write - act: ... (a kind, a colon, a text), and its keys below"
            reader.found.add(item.place, "not-a-step", f"{kind(item)} stands here, not a step", remedy)
        elif "section" in item and item.entries[0].key == "section":
            _section(item, reader)
        elif item.entries and item.entries[0].key in ("when", "aside") and "steps" in item:
            _block(item, blocks, reader)
        else:
            _step(item, blocks, reader)


def _section(item: Mapping, reader: _Reader) -> None:
    value = words.text(item.entries[0].value, reader.found)
    reader.section = value or ""
    for entry in item.entries[1:]:
        remedy = "a section has only its title; write steps as items below it"
        reader.found.add(entry.key_place, "unknown-key", f'unknown key "{entry.key}" in a section', remedy)


def _block(item: Mapping, blocks: tuple[Block, ...], reader: _Reader) -> None:
    reader.blocks += 1
    first = item.entries[0]
    for entry in item.entries:
        if entry.key not in (first.key, "steps"):
            message = f'unknown key "{entry.key}" in a {first.key} block'
            reader.found.add(
                entry.key_place, "unknown-key", message, f"a {first.key} block has only {first.key} and steps"
            )
    if first.key == "when":
        conditions = words.list_of(words.texts)(first.value, reader.found) or ()
        block = Block(conditions, first.value.place, "", reader.blocks)
    else:
        title = words.text(first.value, reader.found) or "aside"
        block = Block((), first.value.place, title, reader.blocks)
    steps = item.get("steps")
    if steps is not None:
        _list(steps, (*blocks, block), reader)


def _step(item: Mapping, blocks: tuple[Block, ...], reader: _Reader) -> None:
    word = next((e.key for e in item.entries if e.key in reader.kinds), None)
    if word is None:
        key = item.entries[0] if item.entries else None
        place, name = (key.key_place, key.key) if key else (item.place, "")
        remedy = f"{words.near(name, reader.kinds)}start a step with one of: {', '.join(reader.kinds)}"
        reader.found.add(place, "unknown-kind", f'"{name}" is no kind of step', remedy)
        return
    chosen = reader.kinds[word]
    article = "an" if word[0] in "aeiou" else "a"
    written = words.read_model(chosen.model, item, reader.found, f"{article} {word} step")
    title = _title(item.get(word), word)
    number = str(len(reader.items) + 1)
    id_ = _id(item, title, word, reader)
    reader.items.append(Item(chosen, id_, title, written, item.place, number, reader.section, blocks))


def _title(node: Any, word: str) -> str:
    if isinstance(node, Scalar) and node.text.strip():
        return " ".join(node.text.split()).rstrip(".")
    if isinstance(node, Mapping) and isinstance(node.get("hazard"), Scalar):
        return " ".join(node.get("hazard").text.split())  # type: ignore[union-attr]
    return word


def _id(item: Mapping, title: str, word: str, reader: _Reader) -> str:
    """The written id, else one made from the kind and the title: stable while those stay."""
    written = item.get("id")
    if isinstance(written, Scalar) and written.text.strip():
        id_ = written.text.strip()
        if id_ in reader.taken:
            line = reader.taken[id_].line
            message = f'the id "{id_}" was already given on line {line}'
            reader.found.add(written.place, "duplicate-id", message, "give each step an id of its own")
        reader.taken.setdefault(id_, written.place)
        return id_
    slug = re.sub(r"[^a-z0-9]+", "_", title.lower()).strip("_")
    made = f"{word}_{slug}"[:32].rstrip("_")
    id_, count = made, 1
    while id_ in reader.taken:
        count += 1
        id_ = f"{made}_{count}"
    reader.taken[id_] = item.place
    return id_
