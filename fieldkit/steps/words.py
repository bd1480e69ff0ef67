"""What a writer may write as the value of a key: the words that step kinds and the procedure's head are made of.

    title: str = key(text, "what is read", required=True)

A `Word` reads one YAML node; where the node is wrong it adds a Problem and gives None. A model is a frozen dataclass
whose fields are made with `key`; `read_model` fills it from a mapping and reports every unknown, missing and wrong
key at once. Not here: what names mean (fieldkit.steps.scope), what a step becomes (the kinds).
To add a word: a function `(node, found) -> value or None`, and a `Word` with the words of its messages.
"""

from __future__ import annotations

import dataclasses
import difflib
import inspect
import re
from collections.abc import Callable
from dataclasses import dataclass, field
from decimal import Decimal, InvalidOperation
from typing import Any, TypeVar

from fieldkit import units
from fieldkit.errors import Collector, Place
from fieldkit.sheet.parts import Unit
from fieldkit.yaml_source import Entry, Mapping, Node, Scalar, Sequence, kind

MAX_TEXT = 900
#: far more than anything has: a file with more is not read on
MAX_KEYS = 200
_NAME = re.compile(r"[a-z][a-z0-9_]{0,39}\Z")
_SLUG = re.compile(r"[a-z][a-z0-9]*(-[a-z0-9]+)*\Z")
_QUANTITY = re.compile(r"([+-]?\d+(?:\.\d+)?)(?:\s+(\S+))?\Z")

Model = TypeVar("Model", bound="Written")


@dataclass(frozen=True)
class Word:
    """One sort of value: how it is read, and what to write (for remedies and the reference)."""

    write: str
    read: Callable[[Node, Collector], Any]

    def __call__(self, node: Node, found: Collector) -> Any:
        return self.read(node, found)


@dataclass(frozen=True, kw_only=True)
class Written:
    """Base of every model: where it was written, and where each of its keys was."""

    place: Place = Place(1, 1)
    value_places: dict[str, Place] = field(default_factory=dict)

    def at(self, name: str) -> Place:
        """The place of the value of key `name`, else of the whole."""
        return self.value_places.get(name, self.place)


def key(word: Word, doc: str, *, required: bool = False, default: Any = None, name: str = "") -> Any:
    """A field that the writer writes as `name` (the field's own name where empty), read by `word`."""
    return field(default=default, metadata={"word": word, "doc": doc, "required": required, "name": name})


def keys_of(model: type[Written]) -> dict[str, dataclasses.Field[Any]]:
    """YAML key -> field; a model's own keys stand before those that it has from its base."""
    fields = [f for f in dataclasses.fields(model) if "word" in f.metadata]
    line = [one for one in reversed(model.__mro__) if one is not object]
    depth = {name: n for n, one in enumerate(line) for name in inspect.get_annotations(one)}
    fields.sort(key=lambda f: -depth[f.name])
    return {f.metadata["name"] or f.name: f for f in fields}


def near(found: str, names: Any) -> str:
    """'did you mean "unit"? ' or nothing."""
    close = difflib.get_close_matches(found, list(names), n=1, cutoff=0.6)
    return f'did you mean "{close[0]}"? ' if close else ""


def read_model(model: type[Model], node: Node, found: Collector, what: str) -> Model | None:
    """The model filled from `node`; `what` names it in messages ("a read step"). None when anything was wrong."""
    before = len(found.problems)
    values = read_keys(model, node, found, what)
    if not isinstance(node, Mapping) or any(p.weight == "problem" for p in found.problems[before:]):
        return None
    places = {keys_of(model)[e.key].name: e.value.place for e in node}
    return model(**values, place=node.place, value_places=places)


def read_keys(model: type[Written], node: Node, found: Collector, what: str) -> dict[str, Any]:
    """The values of those keys that are well written, by field name; every problem is added."""
    if not isinstance(node, Mapping):
        found.add(node.place, "not-keys", f"{what} is {kind(node)} here", "write its keys, one on each line")
        return {}
    fields, values = keys_of(model), {}
    if len(node) > MAX_KEYS:
        found.add(node.place, "too-many-keys", f"{what} has {len(node)} keys", f"it has: {', '.join(fields)}")
        return {}
    for entry in node:
        if entry.key not in fields:
            _unknown(entry, fields, found, what)
            continue
        value = fields[entry.key].metadata["word"](entry.value, found)
        if value is not None:
            values[fields[entry.key].name] = value
    for name, f in fields.items():
        if f.metadata["required"] and name not in node:
            message = f'{what} has no "{name}"'
            found.add(node.place, "missing-key", message, f"write {name}: {f.metadata['word'].write}")
    return values


def _unknown(entry: Entry, fields: Any, found: Collector, what: str) -> None:
    remedy = f"{near(entry.key, fields)}{what} has: {', '.join(fields)}"
    found.add(entry.key_place, "unknown-key", f'unknown key "{entry.key}" in {what}', remedy)


def _scalar(node: Node, found: Collector, write: str) -> str | None:
    if not isinstance(node, Scalar):
        found.add(node.place, "wrong-form", f"{kind(node)} stands here", f"write {write}")
        return None
    value = " ".join(node.text.split())
    if not value:
        found.add(node.place, "empty-value", "nothing is written here", f"write {write}")
        return None
    if len(value) > MAX_TEXT:
        found.add(node.place, "text-too-long", f"this text has {len(value)} characters", f"{MAX_TEXT} is the most")
        return None
    return value


def _matching(pattern: re.Pattern[str], write: str, code: str) -> Word:
    def read(node: Node, found: Collector) -> str | None:
        value = _scalar(node, found, write)
        if value is not None and not pattern.match(value):
            found.add(node.place, code, f'"{value}" cannot be a name here', f"write {write}")
            return None
        return value

    return Word(write, read)


text = Word("a text", lambda node, found: _scalar(node, found, "a text"))
name = _matching(_NAME, "a name of small letters, digits and _", "bad-name")
word = _matching(re.compile(r"[a-z][a-z0-9_-]{0,39}\Z"), "a word of small letters, digits, - and _", "bad-name")
point = _matching(
    re.compile(r"[A-Z][A-Z0-9]{0,7}(-[A-Z0-9]{1,8})?\Z"), "a number as it stands on the cabinet, as in Q1", "bad-name"
)
slug = _matching(_SLUG, "a name of small letters and hyphens", "bad-name")


def one_of(*values: str) -> Word:
    """One of the words listed."""
    write = " or ".join(values) if len(values) < 4 else f"one of: {', '.join(values)}"

    def read(node: Node, found: Collector) -> str | None:
        value = _scalar(node, found, write)
        if value is not None and value not in values:
            found.add(node.place, "unknown-word", f'"{value}" is not known here', f"{near(value, values)}write {write}")
            return None
        return value

    return Word(write, read)


def _yes_no(node: Node, found: Collector) -> bool | None:
    value = one_of("yes", "no")(node, found)
    return None if value is None else bool(value == "yes")


yes_no = Word("yes or no", _yes_no)


def whole(low: int, high: int) -> Word:
    """A whole number from `low` to `high`."""
    write = f"a whole number from {low} to {high}"

    def read(node: Node, found: Collector) -> int | None:
        value = _scalar(node, found, write)
        if value is None:
            return None
        if not re.fullmatch(r"[0-9]{1,6}", value) or not low <= int(value) <= high:
            found.add(node.place, "bad-number", f'"{value}" is not {write}', f"write {write}")
            return None
        return int(value)

    return Word(write, read)


def list_of(word: Word, least: int = 1) -> Word:
    """A list of `word`; one alone may stand without its list."""
    write = f"{word.write}, or a list of them"

    def read(node: Node, found: Collector) -> tuple[Any, ...] | None:
        items = node.items if isinstance(node, Sequence) else (node,)
        if len(items) < least:
            found.add(node.place, "empty-value", "this list is empty", f"write {write}")
            return None
        values = tuple(word(item, found) for item in items)
        return None if any(v is None for v in values) else values

    return Word(write, read)


def map_of(word: Word, key_word: Word = name) -> Word:
    """Keys of the writer's choice, each with a `word`: gives {key: value} in the order written."""
    write = f"keys, each with {word.write}"

    def read(node: Node, found: Collector) -> dict[str, Any] | None:
        if not isinstance(node, Mapping):
            found.add(node.place, "not-keys", f"{kind(node)} stands here", f"write {write}")
            return None
        values: dict[str, Any] = {}
        for entry in node:
            named = key_word(Scalar(entry.key, "plain", entry.key_place), found)
            values[entry.key] = None if named is None else word(entry.value, found)
        return None if any(v is None for v in values.values()) else values

    return Word(write, read)


#: the node itself, for what can only be read when all names are known
node = Word("a value", lambda n, found: n)
texts = Word("a text", lambda n, found: None if _scalar(n, found, "a text") is None else n)  # a Scalar, its place kept


def unit_named(symbol: str, place: Place, found: Collector) -> Unit | None:
    """The unit `symbol`, or None and a Problem with near names."""
    known = units.unit(symbol)
    if known is None:
        close = units.near(symbol)
        remedy = f"write {' or '.join(close)}" if close else "write a unit such as V, kV, mA, uA, L/min, degC, min"
        found.add(place, "unknown-unit", f'"{symbol}" is not a unit that is known here', remedy)
        return None
    return sheet_unit(known)


def sheet_unit(known: units.Unit) -> Unit:
    """A unit as the sheet carries it."""
    return Unit(symbol=known.symbol, shown=known.shown, factor=known.factor, offset=known.offset)


def dimension(unit: Unit) -> units.Dimension:
    """The dimension of a unit of the sheet; a plain number's where it has no symbol."""
    known = units.unit(unit.symbol or "1")
    return known.dimension if known else units.NUMBER


def _unit(n: Node, found: Collector) -> Unit | None:
    value = _scalar(n, found, "a unit")
    return None if value is None else unit_named(value, n.place, found)


unit = Word("a unit, as in kV", _unit)
#: a plain number, as the registers write it
NO_UNIT = Unit(symbol="")
SECOND = sheet_unit(units.UNITS["s"])
KELVIN = sheet_unit(units.UNITS["K"])


@dataclass(frozen=True)
class Quantity:
    """A number and its unit as written: "0.01 A". `si` is the value in SI."""

    number: str
    unit: Unit
    place: Place

    @property
    def si(self) -> Decimal:
        return Decimal(self.number) * Decimal(self.unit.factor) + Decimal(self.unit.offset)

    def inside(self, unit: Unit) -> str:
        """The number in `unit`, as a decimal string; the text as written where the units agree."""
        if unit == self.unit:
            return self.number
        value = (self.si - Decimal(unit.offset)) / Decimal(unit.factor)
        return format(value.normalize(), "f")

    def __str__(self) -> str:
        return f"{self.number} {self.unit.shown}".strip()


def _quantity(n: Node, found: Collector) -> Quantity | None:
    value = _scalar(n, found, "a number, a space and a unit")
    return None if value is None else quantity_of(value, n.place, found)


def quantity_of(value: str, place: Place, found: Collector) -> Quantity | None:
    """The quantity in a text, or None and a Problem."""
    match = _QUANTITY.match(value)
    if not match:
        found.add(
            place, "bad-quantity", f'"{value}" is not a number and a unit', "write a number, a space, a unit: 0.01 A"
        )
        return None
    if not match[2]:
        return Quantity(match[1], NO_UNIT, place)
    known = unit_named(match[2], place, found)
    try:
        return None if known is None else Quantity(match[1], known, place)
    except InvalidOperation:  # pragma: no cover - the pattern only passes decimals
        return None


quantity = Word("a number, a space and a unit, as in 0.01 A", _quantity)


def plain(tail: str) -> str:
    """A text as it stands inside a sentence: first letter small unless it is a name, no full stop."""
    value = tail.rstrip(". ")
    first = value.split(" ", 1)[0]
    lower = first[:1].isupper() and (len(first) == 1 or first[1:].islower())
    return value[0].lower() + value[1:] if lower and value else value
