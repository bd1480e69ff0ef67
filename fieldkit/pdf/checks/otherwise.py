"""A record that another state of fieldkit built: what is fact in it must come out again, its words may differ.

FACTS lists, section by section, the fields that follow from the sheet and the events and from nothing else: values,
limits, verdicts, who, when, hashes. A field that a later record/1 adds and that is fact gets its place there, and
always a default in the model. Not here: the record of this very code, the same byte for byte (recompute.py).
"""

from __future__ import annotations

import json
from typing import Any

Plain = dict[str, Any]

_READING = (
    "seq", "at", "step", "number", "level", "part", "text", "value", "unit", "u", "margin", "verdict", "overdue",
    "protects", "instrument", "deviation", "retaken", "kind", "limits.low", "limits.high", "limits.accept_low",
    "limits.accept_high", "range", "shown",
)  # fmt: skip
#: section of the record -> its facts; a section that is a list has them in each entry
FACTS: dict[str, tuple[str, ...]] = {
    "head": (
        "station", "site", "cabinet", "tube", "run", "procedure", "edition", "sheet", "proved", "rehearsal", "outcome",
        "recorder", "started", "ended",
    ),
    "readings": _READING,
    "log": ("seq", "at", "kind", "number", "sha256"),
    "chain": ("count", "head", "whole"),
    "deviations": ("seq", "value", "unit", "reason", "under", "authority"),
    "corrections": ("seq", "of_seq", "step", "old", "new", "unit", "reason"),
    "retakes": ("seq", "number", "reason"),
    "locks": ("point", "lock", "tag", "on_seq", "off_seq", "left_on"),
    "earths": ("stick", "point", "on_seq", "off_seq", "left_on"),
    "proofs": ("seq", "number", "instrument", "known_source", "verdict"),
    "waits": ("seq", "number", "least", "counted"),
    "holds": ("seq", "number", "statement", "who"),
    "people": ("seq",),
    "cautions": ("seq",),
    "trips": ("seq",),
    "safe": ("seq",),
    "gaps": ("seq",),
    "remarks": ("seq",),
    "pictures": ("seq", "sha256"),
    "signatures": ("seq", "person", "meaning", "statement", "time", "kid", "covers", "holds"),
    "instruments": ("id", "calibrated_to", "certificate", "resolution", "used", "overdue"),
    "givens": ("name", "value", "unit", "source"),
}  # fmt: skip
#: facts of a later record/1, and what they are in a record that was built without them
LATER = {"range": "", "shown": ""}
#: characters of a value that are shown where two records part
LONGEST = 60
#: characters shown before the place where two texts part
_BEFORE = 16
#: what a reader sees first is named first
_FIRST = ("summary", "attention", "counts")
#: sections named, of those that say the same thing otherwise
_NAMED = 6


def facts(record: Plain) -> Plain:
    """The facts of a record.json, in the record's own order; what is not there is None."""
    return {section: _picked(record.get(section), fields) for section, fields in FACTS.items()}


def _picked(part: Any, fields: tuple[str, ...]) -> Any:
    if isinstance(part, list):
        return [_picked(one, fields) for one in part]
    return {f: _field(part, f.split(".")) for f in fields} if isinstance(part, dict) else part


def _field(part: Any, path: list[str]) -> Any:
    for key in path:
        part = part.get(key, LATER.get(key)) if isinstance(part, dict) else None
    return part


def wording(attached: Plain, again: Plain) -> list[str]:
    """Which sections say the same facts in other words: a sentence each, with its first place."""
    keys = sorted({*attached, *again}, key=lambda k: (k not in _FIRST, k))
    parts = [found for key in keys if (found := parting(attached.get(key), again.get(key), key))]
    more = [f"And {len(parts) - _NAMED} more sections."] if len(parts) > _NAMED else []
    return [f"{part}." for part in parts[:_NAMED]] + more


def parting(a: Any, b: Any, path: str = "") -> str:
    """Where two records part: the first path with different values; empty where nowhere."""
    if isinstance(a, dict) and isinstance(b, dict):
        for key in sorted({*a, *b}):
            found = parting(a.get(key), b.get(key), f"{path}.{key}" if path else key)
            if found:
                return found
        return ""
    if isinstance(a, list) and isinstance(b, list):
        for place, (x, y) in enumerate(zip(a, b, strict=False)):
            found = parting(x, y, f"{path}[{place}]")
            if found:
                return found
        return "" if len(a) == len(b) else f"{path} has {len(a)} entries, not {len(b)}"
    if a == b:
        return ""
    start = _same(a, b) - _BEFORE if isinstance(a, str) and isinstance(b, str) else 0
    return f"{path} reads {_short(a, start)}, not {_short(b, start)}"


def _same(a: str, b: str) -> int:
    """How many characters two texts begin with alike."""
    return next((i for i, (x, y) in enumerate(zip(a, b, strict=False)) if x != y), min(len(a), len(b)))


def _short(value: Any, start: int = 0) -> str:
    """The value as JSON, a long text from a little before the place where it parts from another."""
    if isinstance(value, str) and start > 0 and len(value) > LONGEST:
        value = "…" + value[start:]
    text = json.dumps(value, ensure_ascii=False)
    return text if len(text) <= LONGEST else text[:LONGEST] + "…"
