"""Checks that do the work again: every verdict from the sheet and the events, and the record from both.

A record of another state of fieldkit is compared by its facts (otherwise.py) and never called false for its words.
"""

from __future__ import annotations

import json
from typing import Any

import fieldkit
from fieldkit.errors import Refusal
from fieldkit.pdf import inside
from fieldkit.pdf.checks.otherwise import facts, parting, wording
from fieldkit.pdf.report import Note, Unknown, Wrong
from fieldkit.pdf.subject import Subject
from fieldkit.record import build, model
from fieldkit.run import state as run_state


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
    """The record built again is the one attached: byte for byte by this very code, else fact by fact."""
    attached = subject.file(inside.RECORD)
    try:
        found = model.from_bytes(attached, lenient=True)
    except Refusal as exc:
        if exc.code == "unknown-version":
            raise Unknown(exc.sentence) from exc
        raise Wrong(exc.sentence) from exc
    again = model.to_bytes(build.build(subject.sheet, subject.events, found.context))
    untold = [c for c in found.context.checks if not c.holds]
    if found.context.alarm or untold:
        raise Wrong(*(f"The record itself says: {s}" for s in [found.context.alarm, *(c.says for c in untold)] if s))
    if again == attached:
        return f"{len(attached)} bytes, the same."
    one, other = subject.record, json.loads(again)
    made = made_with(subject)
    if made.get("code") == build.code():
        raise Wrong(f"{inside.RECORD} is not what the sheet and the events give: {parting(one, other) or 'its form'}.")
    wrong = parting(facts(one), facts(other))
    if wrong:
        raise Wrong(f"{inside.RECORD} is not what the sheet and the events give: {wrong}.")
    raise Note(_built_otherwise(found, str(made.get("fieldkit") or "")), *wording(one, other))


def _built_otherwise(found: model.Record, version: str) -> str:
    by = f"fieldkit {version}" if version else "an unnamed version of fieldkit"
    same = f"its {len(found.readings)} values with their verdicts and its {len(found.log)} events came out the same"
    here = f"this is another state of it ({fieldkit.__version__})"
    return f"The record was built by {by} and {here}: {same}. What follows from them is worded otherwise."


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
