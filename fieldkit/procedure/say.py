"""A formula tree in words, for people who read a compiled sheet: the writer's own notation, constants in a unit.

Not here: reading a formula (fieldkit.formula.parse), what it gives (evaluate).
"""

from __future__ import annotations

from typing import Any

from fieldkit import values
from fieldkit.sheet.parts import Limits, Unit

#: operator -> sign and how tightly it binds
_SIGNS = {
    "or": ("or", 1),
    "and": ("and", 2),
    "eq": ("=", 4),
    "ne": ("!=", 4),
    "lt": ("<", 4),
    "le": ("<=", 4),
    "gt": (">", 4),
    "ge": (">=", 4),
    "add": ("+", 5),
    "sub": ("-", 5),
    "mul": ("*", 6),
    "div": ("/", 6),
    "pow": ("^", 8),
}


def tree(of: dict[str, Any], unit: Unit | None = None) -> str:
    """The tree as a formula; a constant that is the whole of it is shown in `unit`, others in SI."""
    if unit is not None and "number" in of:
        return f"{values.to_shown(values.to_float(values.dec(of['number'])), unit)} {unit.shown}".strip()
    return _say(of, 0)


def _say(of: dict[str, Any], outer: int) -> str:
    if "number" in of:
        return str(of["number"])
    if "text" in of:
        return f'"{of["text"]}"'
    if "flag" in of:
        return "true" if of["flag"] else "false"
    if "name" in of or "series" in of:
        return str(of.get("name", of.get("series")))
    if "table" in of:
        return f"{of['table']['name']}({_say(of['table']['of'], 0)})"
    return _call(of["call"], of["of"], outer)


def _call(function: str, of: list[dict[str, Any]], outer: int) -> str:
    if function == "neg":
        return f"-{_say(of[0], 7)}"
    if function == "not":
        return f"not {_say(of[0], 3)}"
    if function not in _SIGNS:
        return f"{function}({', '.join(_say(t, 0) for t in of)})"
    sign, binds = _SIGNS[function]
    # the right side of - and / binds one tighter, so that a - (b - c) keeps its brackets
    parts = [_say(t, binds if index == 0 else binds + 1) for index, t in enumerate(of)]
    said = f" {sign} ".join(parts)
    return f"({said})" if binds < outer else said


def limits(of: Limits, unit: Unit) -> str:
    """ "6.10 V to 6.50 V (nameplate)", "at most ion_back"; the caution band and guarding are said after it."""
    low = tree(of.low, unit) if of.low is not None else ""
    high = tree(of.high, unit) if of.high is not None else ""
    if low and low == high:
        said = f"exactly {low}"
    else:
        said = f"{low} to {high}" if low and high else f"at least {low}" if low else f"at most {high}"
    names = " to ".join(dict.fromkeys(n for n in (of.low_name, of.high_name) if n))
    band = [tree(t, unit) for t in (of.caution_low, of.caution_high) if t is not None]
    parts = [f"{said} ({names})" if names else said]
    parts += [f"caution beyond {' and '.join(band)}"] if band else []
    parts += ["guarded"] if of.guarded else []
    return "; ".join(parts)
