"""Limits in words: `6.10 V to 6.50 V`, `at most ion_back`, `at least flow_min`, `idle within 0.02 A`, `exactly 3`.

A limit itself is inside. Each side is a formula of constants, givens and earlier readings; the run rounds it inward to
the resolution. A limit that is a given is named after where the given comes from. Not here: judging (fieldkit.run).
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from decimal import Decimal
from typing import Any

from fieldkit.sheet.parts import Limits, Tree, Typical, Unit
from fieldkit.steps import words
from fieldkit.steps.conditions import call
from fieldkit.steps.scope import Scope
from fieldkit.yaml_source import Scalar

FORM = "6.10 V to 6.50 V; at most 5 uA; at least 300 Pa; 0.50 A within 0.02 A; exactly 3"
_ONE = re.compile(r"(at most|below|at least|above|exactly)\s+(.+)\Z", re.DOTALL)


@dataclass(frozen=True)
class Side:
    tree: Tree | None
    name: str


@dataclass(frozen=True)
class Range:
    low: Side
    high: Side


NO_SIDE = Side(None, "")


def read_range(scalar: Scalar, unit: Unit, scope: Scope) -> Range:
    """The two sides written in `scalar`; a Problem where it has none of the forms."""
    written = scalar.text
    one = _ONE.match(written)
    if one:
        side = _side(scalar, one.start(2), one[2], unit, scope)
        if one[1] == "exactly":
            return Range(side, side)
        return Range(NO_SIDE, side) if one[1] in ("at most", "below") else Range(side, NO_SIDE)
    for word in (" to ", " within "):
        cut = written.find(word)
        if cut > 0 and written.count(word) == 1:
            first = (0, written[:cut])
            second = (cut + len(word), written[cut + len(word) :])
            return _both(scalar, word, first, second, unit, scope)
    scope.found.add(scalar.place, "bad-limits", f'"{written}" does not say a limit', f"write {FORM}")
    return Range(NO_SIDE, NO_SIDE)


def _both(
    scalar: Scalar, word: str, first: tuple[int, str], second: tuple[int, str], unit: Unit, scope: Scope
) -> Range:
    left = _side(scalar, *first, unit, scope)
    if word == " to ":
        return Range(left, _side(scalar, *second, unit, scope))
    spread = scope.tree(scalar, _difference(unit), second[0], second[1])
    assert left.tree is not None
    name = f"{first[1].strip()} ± {second[1].strip()}"
    return Range(Side(call("sub", left.tree, spread), name), Side(call("add", left.tree, spread), name))


def _difference(unit: Unit) -> Unit:
    """The unit of a difference: kelvin for a temperature on the Celsius scale."""
    return words.KELVIN if unit.symbol == "degC" else unit


def _side(scalar: Scalar, offset: int, text: str, unit: Unit, scope: Scope) -> Side:
    return Side(scope.tree(scalar, unit, offset, text), name_of(text, scope))


def name_of(text: str, scope: Scope) -> str:
    """Where a limit comes from: "nameplate", "cabinet's card", the formula as written, or nothing for a constant."""
    written = " ".join(text.split())
    origins = {"tube": "nameplate", "cabinet": "cabinet's card", "site": "station's own"}
    if written in scope.origins:
        return origins[scope.origins[written]]
    return written.replace("*", "×").replace("_", " ") if re.search(r"[a-z_]{3,}", written) else ""


def limits(written: Any, unit: Unit, scope: Scope) -> Limits | None:
    """The Limits of a step with keys limits, caution_band, guarded and limit_name; None where it writes no limits."""
    if written.limits is None:
        for name in ("caution_band", "guarded"):
            if getattr(written, name):
                scope.found.add(
                    written.at(name), "no-limits", f"{name} stands here without limits", "write limits: as well"
                )
        return None
    sides = read_range(written.limits, unit, scope)
    if _empty(sides):
        remedy = "write the lower limit first, and a higher one after it"
        scope.found.add(written.limits.place, "empty-limits", "no value can meet these limits", remedy)
    band = (
        read_range(written.caution_band, unit, scope) if written.caution_band is not None else Range(NO_SIDE, NO_SIDE)
    )
    name = written.limit_name
    return Limits(
        low=sides.low.tree,
        high=sides.high.tree,
        low_name=(name or sides.low.name) if sides.low.tree is not None else "",
        high_name=(name or sides.high.name) if sides.high.tree is not None else "",
        caution_low=band.low.tree,
        caution_high=band.high.tree,
        guarded=bool(written.guarded),
    )


def _empty(sides: Range) -> bool:
    """Whether the lower constant is above the higher one; limits that are formulas are judged when they are known."""
    low, high = sides.low.tree, sides.high.tree
    if low is None or high is None or "number" not in low or "number" not in high:
        return False
    return Decimal(low["number"]) > Decimal(high["number"])


def typical(written: Any, unit: Unit, scope: Scope) -> Typical | None:
    if written.typical is None:
        return None
    sides = read_range(written.typical, unit, scope)
    return Typical(low=sides.low.tree, high=sides.high.tree)
