"""Quantities and units as a formula file writes them: `60 kV`, `degC`, `any`.

Not here: quantities in procedures (fieldkit.steps), the formula language itself (parse.py).
"""

from __future__ import annotations

from fieldkit import units, values
from fieldkit.errors import Collector
from fieldkit.formula import parse
from fieldkit.formula.spots import Unreadable
from fieldkit.units import Unit
from fieldkit.yaml_source import Node, Scalar, kind

#: what an argument writes that takes any unit
ANY = {u.symbol: u for u in (units.ANY, units.ANY_DIFFERENCE)}


def quantity(node: Node | None, unit: Unit, found: Collector) -> str | None:
    """A quantity in SI: "60 kV" where `unit` is of the same dimension, or any; else None, with a problem."""
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
    if term.kind == "number" and unit.dimension == units.ANY.dimension:
        return _of_any(node, term.what, has.absolute and unit == units.ANY_DIFFERENCE, found)
    if term.kind != "number" or not has.same_powers(unit.dimension):
        remedy = f"write a number and a unit, like 5 {unit.symbol}" if unit.symbol != "1" else "write a number alone"
        found.add(node.place, "not-a-quantity", f'"{node.text}" is no quantity in {unit.symbol}', remedy)
        return None
    return term.what


def _of_any(node: Scalar, si: str, on_scale: bool, found: Collector) -> str | None:
    """A quantity where any unit will do; a temperature on a scale is no difference."""
    if on_scale:
        found.add(node.place, "not-a-quantity", f'"{node.text}" is a temperature, not a difference', "write it in K")
        return None
    return si


def tolerance_unit(unit: Unit) -> Unit:
    """The unit of a tolerance on a value in `unit`: K for a temperature."""
    return units.UNITS["K"] if unit.dimension.absolute else unit


def unit_of(node: Node | None, found: Collector) -> Unit | None:
    if node is None:
        return None
    symbol = node.text if isinstance(node, Scalar) else ""
    unit = ANY.get(symbol) or units.unit(symbol)
    if unit is None:
        likely = units.near(symbol)
        remedy = f"write one of: {', '.join(likely)}" if likely else 'write a unit such as V, or "1" for a plain number'
        found.add(node.place, "unknown-unit", f'"{symbol}" is no unit known here', remedy)
    return unit


def in_si(text: str, unit: Unit) -> str:
    """A plain decimal in `unit` as a decimal in SI."""
    exact = values.add(values.mul(values.dec(text), values.dec(unit.factor)), values.dec(unit.offset))
    return values.to_text(values.trim(exact))
