"""What the uncertainty of a reading or a result is made of, kept with its value in the state.

    parts      [[source, signed c u in SI], ...] in the order in which sources are first met; None: not known
    source     the seq of one reading, or "instrument/range" where a step says that its readings share their error

A reading has one part, a result those of all that it is made of; so a result of results counts each reading once.
Givens, counts and times have none: they are taken as exact. A sheet from before this (`spread` false) keeps its
meaning: its results have no uncertainty. Twin: static/core/results.js.
Not here: derivatives and their sum (fieldkit.formula.slopes, spread).
"""

from __future__ import annotations

from typing import Any

from fieldkit import values
from fieldkit.formula import spread
from fieldkit.run import judge, names, rows, worth
from fieldkit.run.moves import State
from fieldkit.run.names import Context, Scope
from fieldkit.values import Fault

Plain = dict[str, Any]
Parts = list[list[str]]
#: parts are kept to 12 digits: where they cancel, what is left below this share of them is nothing
LEAST = 1e-11


def of_reading(control: Plain, meter: Plain | None, text: str, seq: int) -> Parts | None:
    """The part of a reading, plain decimal text in the step's unit. A count without a meter is exact."""
    unit = control["unit"]
    if meter is None and unit["symbol"] == "":
        return []
    u = worth.standard(text, meter, unit)
    if u is None or meter is None:
        return None
    shared = (control.get("meter") or {}).get("correlated")
    source = f"{meter['id']}/{meter['range']}" if shared else str(seq)
    return [[source, u]] if values.dec(u).digits else []


def of_result(ctx: Context, state: State, where: Scope, control: Plain) -> Parts | None:
    """The parts of a result now; None where one that counts is not known, or the value changes without bound."""
    if not control.get("spread"):
        return None
    slopes = names.gradient(ctx, where, control["value"])
    if isinstance(slopes, Fault):
        return None
    known: dict[str, dict[str, float]] = {}
    for name, slope in slopes.items():
        parts = _parts(state, name)
        if parts is None and slope != 0.0:
            return None
        known[name] = _numbers(parts or [])
    found = spread.contributions(slopes, known)
    if isinstance(spread.standard(found), Fault):
        return None
    sizes = spread.contributions(_sizes(slopes), {name: _sizes(parts) for name, parts in known.items()})
    return [[source, values.round12(part)] for source, part in found.items() if abs(part) > LEAST * sizes[source]]


def _sizes(of: dict[str, float]) -> dict[str, float]:
    return {name: abs(number) for name, number in of.items()}


def _parts(state: State, name: str) -> Parts | None:
    """The parts of what a name means; "ion[3]" is the fourth reading of a column."""
    column, _, place = name.removesuffix("]").partition("[")
    if place:
        kept = state["spread"].get(column)
        return None if kept is None and column in state["series"] else kept[int(place)] if kept else []
    found = state["values"].get(name)
    parts: Parts | None = found["parts"] if found else []
    return parts


def _numbers(parts: Parts) -> dict[str, float]:
    return {source: values.to_float(values.dec(part)) for source, part in parts}


def meter(control: Plain, parts: Parts | None) -> Plain | None:
    """What stands for the meter of a result: its own U (k = 2) in its unit; None where the sheet knows of none."""
    if not control.get("spread"):
        return None
    unit = control["unit"]
    u = None if parts is None else spread.standard(_numbers(parts))
    known = isinstance(u, float) and 2.0 * u - 2.0 * u == 0.0
    text = (
        judge.to_shown(2.0 * u, {"factor": unit["factor"], "offset": "0"}) if known and isinstance(u, float) else None
    )
    return {"id": "", "unit": unit["symbol"], "calibrated_to": None, "u": text}


def shown(ctx: Context, where: Scope, control: Plain, own: Plain | None) -> str:
    """A result with its U, without the unit: "41.54 ± 0.83"; "" where it has no value, or no U."""
    if own is None or own["u"] is None or values.dec(own["u"]).digits == 0:
        return ""
    text = rows.shown(names.value(ctx, where, control["value"]), control["unit"], None)
    return "" if text is None else worth.shown(text, own["u"], control["resolution"])
