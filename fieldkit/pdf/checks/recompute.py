"""Checks that do the work again: every verdict from the sheet and the events, and the record from both."""

from __future__ import annotations

import json
from typing import Any

import fieldkit
from fieldkit.errors import Refusal
from fieldkit.pdf import inside
from fieldkit.pdf.report import Unknown, Wrong
from fieldkit.pdf.subject import Subject
from fieldkit.record import build, model
from fieldkit.run import state as run_state

#: characters of a value that are shown where two records part
LONGEST = 60


def verdicts(subject: Subject) -> str:
    """Every verdict comes out again from the sheet and the events, and stands so in the record."""
    state = run_state.fold(subject.sheet, subject.events)
    wrong = [f"Event {d['seq']}: {d['says']}" for d in state["disagree"]]
    written = {(r.get("seq"), r.get("part", "")): r for r in _list(subject.record, "readings")}
    proofs = {p.get("seq"): p for p in _list(subject.record, "proofs")}
    judged = 0
    for row in state["log"]:
        if not row.get("verdict"):
            continue
        judged += 1
        found = proofs.get(row["seq"]) if row["kind"] == "proved" else written.get((row["seq"], ""))
        if found is None:
            wrong.append(f"Event {row['seq']} was judged {row['verdict']}, but the record does not show it.")
        elif found.get("verdict") != row["verdict"]:
            wrong.append(f"Event {row['seq']} comes out as {row['verdict']}; the record says {found.get('verdict')}.")
    if wrong:
        raise Wrong(*wrong)
    return f"{judged} verdicts came out the same."


def record(subject: Subject) -> str:
    """The record built again from the sheet and the events is the one attached, byte for byte."""
    attached = subject.file(inside.RECORD)
    try:
        found = model.from_bytes(attached)
    except Refusal as exc:
        raise Wrong(exc.sentence) from exc
    again = model.to_bytes(build.build(subject.sheet, subject.events, found.context))
    if again != attached:
        made = made_with(subject).get("fieldkit", "")
        if made != fieldkit.__version__:
            says = f"The record was made by fieldkit {made or 'of unknown version'}; this is {fieldkit.__version__}."
            raise Unknown(f"{says} Compare it with that version.")
        raise Wrong(f"{inside.RECORD} is not what the sheet and the events give: {_where(attached, again)}.")
    untold = [c for c in found.context.checks if not c.holds]
    if found.context.alarm or untold:
        raise Wrong(*(f"The record itself says: {s}" for s in [found.context.alarm, *(c.says for c in untold)] if s))
    return f"{len(attached)} bytes, the same."


def real(subject: Subject) -> str:
    """The run was real work, not a rehearsal."""
    events = subject.events
    if events[0].head.kind != "run-started":
        raise Unknown("The events do not begin with the start of a run.")
    if events[0].body.rehearsal:
        raise Wrong("This was a rehearsal against a modelled amplifier. It is no record of real work.")
    return f"Run {events[0].head.run} on cabinet {events[0].body.cabinet}, tube {events[0].body.tube}."


def made_with(subject: Subject) -> dict[str, Any]:
    """What rendering.json says the pages were made with; empty when it does not say."""
    try:
        found = json.loads(subject.file(inside.RENDERING))
    except (ValueError, Unknown):
        return {}
    return found if isinstance(found, dict) else {}


def _list(record: dict[str, Any], name: str) -> list[dict[str, Any]]:
    found = record.get(name)
    return [r for r in found if isinstance(r, dict)] if isinstance(found, list) else []


def _where(one: bytes, other: bytes) -> str:
    """Where two records part: the first path with different values."""
    return _part(json.loads(one), json.loads(other), "") or "its form"


def _part(a: Any, b: Any, path: str) -> str:
    if isinstance(a, dict) and isinstance(b, dict):
        for key in sorted({*a, *b}):
            found = _part(a.get(key), b.get(key), f"{path}.{key}" if path else key)
            if found:
                return found
        return ""
    if isinstance(a, list) and isinstance(b, list):
        for place, (x, y) in enumerate(zip(a, b, strict=False)):
            found = _part(x, y, f"{path}[{place}]")
            if found:
                return found
        return "" if len(a) == len(b) else f"{path} has {len(a)} entries, not {len(b)}"
    return "" if a == b else f"{path} says {_short(a)}, not {_short(b)}"


def _short(value: Any) -> str:
    text = json.dumps(value, ensure_ascii=False)
    return text if len(text) <= LONGEST else text[:LONGEST] + "…"
