"""The arguments of a library formula, as its entry writes them.

voltage: {unit: kV, low: 0 kV, high: 60 kV, meaning: beam voltage}
channel: {unit: "1", low: 14, high: 36, whole: true, meaning: channel}
value:   {unit: any, meaning: measured value}            any unit, the same for all such arguments of a call
spread:  {unit: any difference, low: 0, meaning: standard uncertainty}      in K where the value is in degC
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Any

from fieldkit import units
from fieldkit.errors import Collector
from fieldkit.formula import blocks, parse, quantities
from fieldkit.units import Unit
from fieldkit.yaml_source import Mapping, Node, Scalar

NAME = re.compile(r"[a-z][a-z0-9_]*")
_KEYS = ("unit", "low", "high", "meaning", "whole")


@dataclass(frozen=True)
class Argument:
    """`low` and `high` are in SI, inclusive, decimal texts; None is unbounded. `whole`: whole numbers only."""

    name: str
    unit: Unit
    low: str | None
    high: str | None
    meaning: str
    whole: bool = False

    def used(self) -> dict[str, Any]:
        """The argument in the form of sheet.model.Argument."""
        return {
            "name": self.name,
            "unit": self.unit.shown,
            "factor": self.unit.factor,
            "offset": self.unit.offset,
            "low": self.low,
            "high": self.high,
            **({"whole": True} if self.whole else {}),
        }


def any_of(unit: Unit) -> str:
    """ "any" or "difference" where a unit stands for any; else ""."""
    return {units.ANY.symbol: "any", units.ANY_DIFFERENCE.symbol: "difference"}.get(unit.symbol, "")


def read(node: Node | None, found: Collector) -> tuple[Argument, ...] | None:
    """The arguments of an entry in their order; None, with problems, where one of them cannot be used."""
    if node is None or (block := _block(node, found)) is None:
        return None
    arguments = [a for e in block if (a := _argument(e.key, e.key_place, e.value, found)) is not None]
    return tuple(arguments) if len(arguments) == len(block) else None


def _block(node: Node, found: Collector) -> Mapping | None:
    return blocks.mapping(node, found, "arguments")


def _argument(name: str, place: Any, node: Node, found: Collector) -> Argument | None:
    part = blocks.mapping(node, found, name)
    if part is None:
        return None
    if not NAME.fullmatch(name) or name in parse.SPACES:
        found.add(place, "argument-name", f'"{name}" cannot name an argument', "write small letters and _")
    blocks.only(part, _KEYS, found, "an argument")
    unit = quantities.unit_of(part.get("unit"), found) if blocks.present(part, "unit", found) else None
    if unit is None:
        return None
    low, high = (quantities.quantity(part.get(k), unit, found) for k in ("low", "high"))
    return Argument(name, unit, low, high, blocks.text(part, "meaning", found) or "", _whole(part, found))


def _whole(part: Mapping, found: Collector) -> bool:
    node = part.get("whole")
    if node is None:
        return False
    if not isinstance(node, Scalar) or node.text not in ("true", "false"):
        found.add(node.place, "not-yes-or-no", "whole is neither true nor false", "write whole: true")
        return False
    return node.text == "true"
