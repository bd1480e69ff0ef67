"""Strict YAML: an author's file as nodes with line and column, every scalar as the text that was written.

`no`, `on`, `12:30`, `1e3` and `010` are the texts "no", "on", "12:30", "1e3" and "010"; what they mean is for the
reader of the file to say. Refused, each with its place and a remedy: duplicate keys, anchors, aliases, tags,
directives, several documents, keys that are no plain words, tabs, control characters, a byte order mark, CRLF line
ends, text that is not UTF-8, nesting deeper than 30, files over 200 KB or 50,000 pieces. Nothing here raises.

    node, problems = read(path.read_bytes(), "procedures/warm-up.yaml")

Not here: what keys a procedure or a formula has (fieldkit.procedure.source, fieldkit.formula.library).
To refuse one thing more: a check in `_text_problems` (characters) or in `_Builder` (structure), and a row in
tests/test_yaml_source.py.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any, Union

import yaml

from fieldkit.errors import Collector, Place, Problem

MAX_BYTES = 200_000
MAX_EVENTS = 50_000
MAX_DEPTH = 30

_STYLES = {None: "plain", "'": "single", '"': "double", "|": "literal", ">": "folded"}


@dataclass(frozen=True)
class Scalar:
    """A text as written; "" where nothing was. `style` is plain, single, double, literal or folded."""

    text: str
    style: str
    place: Place

    def at(self, offset: int, width: int = 1) -> Place:
        """The place of the character at `offset` of the text: exact on one line, else the start of the scalar."""
        if self.place.width < len(self.text) or self.style in ("literal", "folded"):
            return self.place
        quote = 1 if self.style in ("single", "double") else 0
        return Place(self.place.line, self.place.column + quote + offset, max(1, width))


@dataclass(frozen=True)
class Entry:
    """One `key: value` of a mapping, with the place of the key."""

    key: str
    key_place: Place
    value: Node


@dataclass(frozen=True)
class Mapping:
    """Keys and values in the order written; where a key was written twice (a Problem), the first one is kept."""

    entries: tuple[Entry, ...]
    place: Place

    def keys(self) -> tuple[str, ...]:
        return tuple(e.key for e in self.entries)

    def entry(self, key: str) -> Entry | None:
        return next((e for e in self.entries if e.key == key), None)

    def get(self, key: str) -> Node | None:
        found = self.entry(key)
        return found.value if found else None

    def __contains__(self, key: object) -> bool:
        return any(e.key == key for e in self.entries)

    def __iter__(self) -> Iterator[Entry]:
        return iter(self.entries)

    def __len__(self) -> int:
        return len(self.entries)


@dataclass(frozen=True)
class Sequence:
    items: tuple[Node, ...]
    place: Place

    def __iter__(self) -> Iterator[Node]:
        return iter(self.items)

    def __len__(self) -> int:
        return len(self.items)


Node = Union[Scalar, Mapping, Sequence]


def kind(node: Node) -> str:
    """What `node` is, in the words of a message: "a text", "a list" or "a block of keys"."""
    return "a text" if isinstance(node, Scalar) else "a list" if isinstance(node, Sequence) else "a block of keys"


def read(data: bytes, file: str) -> tuple[Node | None, list[Problem]]:
    """The file's root node, and everything wrong with it in order of place.

    The node is None where nothing can be read; it is given together with problems where it can, so that the caller
    can report its own problems at the same time. Any problem means that the file must not be used.
    """
    found = Collector(file)
    if len(data) > MAX_BYTES:
        found.add(
            Place(1, 1), "file-too-big", f"this file has {len(data):,} bytes; {MAX_BYTES:,} is the most", "split it"
        )
        return None, found.problems
    text = _decode(data, found)
    if text is None:
        return None, found.problems
    node = _Builder(found).build(_text_problems(text, found))
    found.problems.sort(key=lambda p: (p.place.line, p.place.column))
    return node, found.problems


def _decode(data: bytes, found: Collector) -> str | None:
    try:
        return data.decode("utf-8")
    except UnicodeDecodeError as exc:
        before = data[: exc.start].decode("utf-8")
        line, column = before.count("\n") + 1, len(before) - (before.rfind("\n") + 1) + 1
        found.add(Place(line, column), "not-utf-8", "this is not UTF-8 text", "save the file with UTF-8 encoding")
        return None


def _text_problems(text: str, found: Collector) -> str:
    """Reports characters that do not belong in the file; gives the text with harmless ones in their place."""
    if text.startswith("\ufeff"):
        found.add(
            Place(1, 1), "byte-order-mark", "the file starts with a byte order mark", "save it as UTF-8 without one"
        )
        text = text[1:]
    if "\r" in text:
        line = text[: text.index("\r")].count("\n") + 1
        found.add(Place(line, 1), "line-ends", "lines end in CR LF or CR", "save the file with Unix line ends (LF)")
        text = text.replace("\r\n", "\n").replace("\r", "\n")
    lines = text.split("\n")
    for number, row in enumerate(lines, 1):
        if "\t" in row:
            place = Place(number, row.index("\t") + 1)
            found.add(place, "tab", "a tab stands here", "use spaces; two for each level of indentation")
        for column, char in enumerate(row, 1):
            if not _belongs(char):
                found.add(
                    Place(number, column), "control-character", f"character U+{ord(char):04X} stands here", "delete it"
                )
        lines[number - 1] = "".join(c if _belongs(c) else "?" for c in row).replace("\t", " ")
    return "\n".join(lines)


def _belongs(char: str) -> bool:
    code = ord(char)
    if char == "\t" or 0x20 <= code < 0x7F:
        return True
    hidden = code < 0xA0 or code in (0x2028, 0x2029, 0xFEFF) or 0x200B <= code <= 0x200F or 0x202A <= code <= 0x202E
    return not (hidden or 0x2066 <= code <= 0x2069 or 0xD800 <= code < 0xE000 or code in (0xFFFE, 0xFFFF))


class _Stop(Exception):
    """Reading this file further is not possible or not wise; what was wrong is in the collector."""


class _Open:
    """A mapping or sequence that is still being filled."""

    def __init__(self, place: Place, is_mapping: bool) -> None:
        self.place = place
        self.is_mapping = is_mapping
        self.items: list[Node] = []
        self.entries: list[Entry] = []
        self.seen: dict[str, Place] = {}
        self.key: tuple[str, Place] | None = None
        self.skip = False

    def close(self) -> Node:
        return Mapping(tuple(self.entries), self.place) if self.is_mapping else Sequence(tuple(self.items), self.place)


class _Builder:
    """Turns the parser's events into nodes, without recursion, so that no nesting can exhaust the stack."""

    def __init__(self, found: Collector) -> None:
        self.found = found
        self.stack: list[_Open] = []
        self.root: Node | None = None
        self.documents = 0
        self.events = 0

    def build(self, text: str) -> Node | None:
        try:
            for event in yaml.parse(text, Loader=yaml.SafeLoader):
                self.events += 1
                if self.events > MAX_EVENTS:
                    self.found.add(
                        _place(event), "too-many-pieces", f"more than {MAX_EVENTS:,} pieces", "split the file"
                    )
                    raise _Stop
                self._take(event)
        except _Stop:
            return None
        except yaml.YAMLError as exc:
            self._syntax(exc, text)
            return None
        if self.root is None:
            self.found.add(Place(1, 1), "empty-file", "there is nothing in this file", "write the keys it needs")
        return self.root

    def _take(self, event: Any) -> None:
        if isinstance(event, yaml.DocumentStartEvent):
            self._document(event)
        elif isinstance(event, yaml.AliasEvent):
            self.found.add(
                _place(event), "alias", f"the alias *{event.anchor} stands here", "write the value out in full"
            )
            self._put(Scalar("", "plain", _place(event)), event)
        elif isinstance(event, yaml.ScalarEvent):
            self._plain(event)
            self._escapes(event)
            self._put(Scalar(event.value, _STYLES[event.style], _place(event)), event)
        elif isinstance(event, (yaml.MappingStartEvent, yaml.SequenceStartEvent)):
            self._plain(event)
            if len(self.stack) >= MAX_DEPTH:
                self.found.add(_place(event), "too-deep", f"nested deeper than {MAX_DEPTH} levels", "flatten it")
                raise _Stop
            self.stack.append(_Open(_place(event, one=True), isinstance(event, yaml.MappingStartEvent)))
        elif isinstance(event, (yaml.MappingEndEvent, yaml.SequenceEndEvent)):
            self._put(self.stack.pop().close(), event)

    def _document(self, event: Any) -> None:
        self.documents += 1
        if event.version or event.tags:
            self.found.add(
                _place(event, one=True), "directive", "a % directive stands before the document", "delete it"
            )
        if self.documents > 1:
            place = _place(event, one=True)
            self.found.add(
                place, "several-documents", "a second document starts here", "one file, one document: delete ---"
            )
            raise _Stop

    def _plain(self, event: Any) -> None:
        if event.anchor:
            self.found.add(
                _place(event), "anchor", f"the anchor &{event.anchor} stands here", "delete it; write values out"
            )
        if event.tag:
            self.found.add(
                _place(event), "tag", f"the tag {event.tag} stands here", "delete it; every value is read as text"
            )

    def _escapes(self, event: Any) -> None:
        """Characters that an escape in double quotes has brought in: "\\0", "\\uD800"."""
        hidden = next((c for c in event.value if c != "\n" and not _belongs(c)), None)
        if hidden is not None:
            message = f"an escape makes the character U+{ord(hidden):04X}"
            self.found.add(_place(event), "control-character", message, "take the escape out")

    def _put(self, node: Node, event: Any) -> None:
        if not self.stack:
            self.root = node
            return
        top = self.stack[-1]
        if not top.is_mapping:
            top.items.append(node)
        elif top.key is None:
            self._key(top, node)
        else:
            if not top.skip:
                top.entries.append(Entry(top.key[0], top.key[1], node))
            top.key, top.skip = None, False

    def _key(self, top: _Open, node: Node) -> None:
        name = node.text if isinstance(node, Scalar) else ""
        top.key = (name, node.place)
        if not isinstance(node, Scalar):
            self.found.add(node.place, "key-not-plain", f"the key is {kind(node)}", "write one word as the key")
            top.skip = True
        elif name == "<<" or name == "":
            self.found.add(node.place, "key-not-plain", "the key is empty or <<", "write one word as the key")
            top.skip = True
        elif name in top.seen:
            first = top.seen[name].line
            message = f'the key "{name}" was already given on line {first}'
            self.found.add(node.place, "duplicate-key", message, "keep one of the two")
            top.skip = True
        else:
            top.seen[name] = node.place

    def _syntax(self, exc: yaml.YAMLError, text: str) -> None:
        mark = getattr(exc, "problem_mark", None) or getattr(exc, "context_mark", None)
        line, column = (mark.line + 1, mark.column + 1) if mark else (1, 1)
        line = min(line, text.count("\n") + 1)
        problem = str(getattr(exc, "problem", None) or "this cannot be read")
        message, remedy = _in_words(problem)
        self.found.add(Place(line, column), "yaml-syntax", message, remedy)


def _in_words(problem: str) -> tuple[str, str]:
    """What the parser found, and what to do about it, in words for a writer who does not know YAML's grammar."""
    for part, message, remedy in _SYNTAX:
        if part in problem:
            return message, remedy
    return f"this is not YAML: {problem}", "compare the indentation, quotes and colons with the lines above"


_SYNTAX = (
    (
        "mapping values are not allowed",
        "a colon stands where no key can be",
        "put the text in quotes, or correct the indentation",
    ),
    ("could not find expected ':'", "a key without its colon", "write the key, a colon and a space"),
    ("cannot start any token", "a value cannot start with this character", "put the value in quotes"),
    (
        "expected <block end>",
        "the indentation does not fit the lines above",
        "start the line in the same column as its neighbours",
    ),
    ("unexpected end of stream", "a quote is never closed", "close it with the same quote"),
    ("expected ',' or", "a comma or a closing bracket is missing", "separate by commas, and close what was opened"),
    (
        "unknown escape",
        "this escape is not known inside double quotes",
        "use single quotes, or write \\\\ for one backslash",
    ),
    ("sequence entries are not allowed", "a list starts where none can be", "put the first - on a line of its own"),
    ("undefined alias", "an alias is used", "write the value out in full"),
    ("undefined tag handle", "a tag is used", "delete it; every value is read as text"),
)


def _place(event: Any, one: bool = False) -> Place:
    start, end = event.start_mark, event.end_mark
    width = end.column - start.column if end.line == start.line and not one else 1
    return Place(start.line + 1, start.column + 1, max(1, width))


__all__ = ["Entry", "Mapping", "Node", "Scalar", "Sequence", "kind", "read"]
