"""Rows of the log: one for every event, with the same keys whatever happened. Twin: static/core/rows.js."""

from __future__ import annotations

from typing import Any

from fieldkit import values
from fieldkit.run import judge, names
from fieldkit.run.names import Context, Scope

State = dict[str, Any]


def add(ctx: Context, state: State, event: dict[str, Any], step: dict[str, Any] | None = None, **said: Any) -> None:
    """Append the row of an event; `said` fills the keys that differ from an empty row."""
    level = level_text(ctx, names.scope(ctx, state), step) if step and step["level"] else ""
    row = {
        "seq": event["seq"],
        "wall": event["at"]["wall"],
        "by": event["by"],
        "kind": event["kind"],
        "step": step["id"] if step else "",
        "number": step["number"] if step else "",
        "title": with_level(step["title"], level) if step else "",
        "level": level,
        "text": "",
        "unit": "",
        "verdict": None,
        "outcome": None,
        "limits": None,
        "margin": None,
        "u": None,
        "near": False,
        "untypical": False,
        "instrument": None,
        "range": "",
        "overdue": False,
        "value": None,
        "shown": "",
        "words": "",
        "points": [],
        "elapsed": None,
        "move": None,
        "manner": None,
        "reason": "",
        "who": "",
        "names": [],
        "old": [],
        "note": "",
    }
    for key, value in said.items():
        if value is not None:
            row[key] = value
    state["log"].append(row)


def change(state: State, seq: int, **said: Any) -> None:
    """The last row again, with more said about it; only where it is the row of `seq`."""
    row = state["log"][-1]
    if row["seq"] == seq:
        state["log"][-1] = {**row, **said}


def level_text(ctx: Context, where: Scope, step: dict[str, Any]) -> str:
    """The rung that a step is at: "26 kV"; empty where it has no value."""
    si = names.value(ctx, where, step["level"]["value"])
    if isinstance(si, bool) or not isinstance(si, float):
        return ""
    unit = step["level"]["unit"]
    return f"{judge.to_shown(si, unit)} {unit['symbol']}".strip()


def with_level(text: str, level: str) -> str:
    """Text of the sheet in which `{level}` stands for the rung."""
    return text.replace("{level}", level)


def shown(si: Any, unit: dict[str, Any], resolution: str | None) -> str | None:
    """An SI value in the unit with the decimals of a resolution; None where it is no number."""
    if isinstance(si, bool) or not isinstance(si, float):
        return None
    text = judge.to_shown(si, unit)
    return text if resolution is None else values.to_text(values.dec(text), values.decimals(resolution))
