"""The library as plain JSON, for people who want one sum: the tablet's page of sums and `fieldkit calc --list --json`.

    {"subjects": [{"name": "beam", "formulas": ["beam_power", ...]}],     in the order read; pairs stand among them
     "formulas": {name: {...}}, "pairs": {name: {...}}, "units": units.table()}

A value of "formulas" serves the evaluators as it is. Ranges are in SI, as decimal texts; null is
unbounded. `digits` is how many significant digits an answer deserves.
"""

from __future__ import annotations

from typing import Any

from fieldkit import units
from fieldkit.formula import display
from fieldkit.formula.arguments import Argument, any_of
from fieldkit.formula.entry import Formula, Pair
from fieldkit.formula.library import Library


def sums(library: Library) -> dict[str, Any]:
    """Everything about the library's formulas that a page needs to offer and compute them offline."""
    return {
        "subjects": _subjects(library),
        "formulas": {name: _formula(f) for name, f in library.formulas.items()},
        "pairs": {name: _pair(p) for name, p in library.pairs.items()},
        "units": units.table(),
    }


def _subjects(library: Library) -> list[dict[str, Any]]:
    """Names by subject; a pair stands in its subject before the first of its two formulas."""
    found: dict[str, list[str]] = {}
    before = {p.of[0]: p for p in library.pairs.values()}
    for name, formula in library.formulas.items():
        names = found.setdefault(formula.subject, [])
        if name in before:
            names.append(before[name].name)
        names.append(name)
    return [{"name": subject, "formulas": names} for subject, names in found.items()]


def _formula(f: Formula) -> dict[str, Any]:
    return {
        "subject": f.subject,
        "meaning": f.meaning,
        "arguments": [_argument(a) for a in f.arguments],
        **_unit(f.unit),
        "tree": f.tree,
        "written": f.written,
        "uses": list(f.uses),
        "reference": f.reference,
        "decides": f.decides,
        "cautions": list(f.cautions),
        "digits": display.digits(f),
        "plot": {"along": f.plot} if f.plot else None,
        "example": _example(f),
    }


def _argument(a: Argument) -> dict[str, Any]:
    ranged = {"low": a.low, "high": a.high, "whole": a.whole}
    return {"name": a.name, "meaning": a.meaning, **_unit(a.unit), **ranged}


def _unit(unit: units.Unit) -> dict[str, Any]:
    symbol = "" if any_of(unit) else unit.symbol
    return {
        "symbol": symbol,
        "unit": unit.shown,
        "factor": unit.factor,
        "offset": unit.offset,
        "any": any_of(unit),
    }


def _example(f: Formula) -> dict[str, Any] | None:
    """The first worked example that gives a number, as it is written."""
    example = next((e for e in f.examples if not e.fault), None)
    if example is None:
        return None
    with_ = dict(zip((a.name for a in f.arguments), example.written, strict=True))
    return {"with": with_, "gives": example.gives_written}


def _pair(p: Pair) -> dict[str, Any]:
    return {
        "subject": p.subject,
        "meaning": p.meaning,
        "of": list(p.of),
        "reference": p.reference,
        "decides": p.decides,
        "cautions": list(p.cautions),
    }
