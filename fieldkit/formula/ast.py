"""The formula tree: five nodes, and their JSON form, the same bytes that the sheet carries.

    Literal   {"number": "27000"} | {"text": "cold"} | {"flag": true}     numbers are decimal strings in plain SI
    Name      {"name": "heater_voltage"}                                   what names mean: DEVELOPERS.md, "Names"
    Call      {"call": "add", "of": [tree, ...]}                           operators are calls; so are library formulas
    Series    {"series": "levels"}                                         a column of numbers, or a given list
    Table     {"table": {"of": tree, "x": ["..."], "y": ["..."], "name": "water_density"}}   linear interpolation

Not here: parsing, evaluation. To add a node: don't; add a function (functions.py and its twin).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Union

MAX_DEPTH = 60


@dataclass(frozen=True)
class Literal:
    #: a decimal string (number), a str (text) or a bool (flag); `kind` says which.
    kind: str
    value: str | bool


@dataclass(frozen=True)
class Name:
    name: str


@dataclass(frozen=True)
class Call:
    function: str
    of: tuple[Tree, ...]


@dataclass(frozen=True)
class Series:
    name: str


@dataclass(frozen=True)
class Table:
    name: str
    of: Tree
    x: tuple[str, ...]
    y: tuple[str, ...]


Tree = Union[Literal, Name, Call, Series, Table]


def to_json(tree: Tree) -> dict[str, Any]:
    """The tree as plain JSON values, in the form of the module's docstring."""
    match tree:
        case Literal(kind, value):
            return {kind: value}
        case Name(name):
            return {"name": name}
        case Call(function, of):
            return {"call": function, "of": [to_json(t) for t in of]}
        case Series(name):
            return {"series": name}
        case Table(name, of_, x, y):
            return {"table": {"of": to_json(of_), "x": list(x), "y": list(y), "name": name}}


def from_json(data: Any, depth: int = 0) -> Tree:
    """The tree that `data` spells. Raises ValueError on anything else: a sheet may come from a foreign file."""
    if depth > MAX_DEPTH:
        raise ValueError("formula tree is nested too deeply")
    if not isinstance(data, dict):
        raise ValueError(f"not a formula tree: {data!r:.80}")
    keys = set(data)
    if keys == {"number"} and isinstance(data["number"], str):
        return Literal("number", data["number"])
    if keys == {"text"} and isinstance(data["text"], str):
        return Literal("text", data["text"])
    if keys == {"flag"} and isinstance(data["flag"], bool):
        return Literal("flag", data["flag"])
    if keys == {"name"} and isinstance(data["name"], str):
        return Name(data["name"])
    if keys == {"series"} and isinstance(data["series"], str):
        return Series(data["series"])
    if keys == {"call", "of"} and isinstance(data["call"], str) and isinstance(data["of"], list):
        return Call(data["call"], tuple(from_json(t, depth + 1) for t in data["of"]))
    if keys == {"table"} and isinstance(data["table"], dict) and set(data["table"]) == {"of", "x", "y", "name"}:
        t = data["table"]
        x, y = t["x"], t["y"]
        if isinstance(x, list) and isinstance(y, list) and all(isinstance(v, str) for v in [*x, *y, t["name"]]):
            return Table(t["name"], from_json(t["of"], depth + 1), tuple(x), tuple(y))
    raise ValueError(f"not a formula tree: keys {sorted(keys)}")
