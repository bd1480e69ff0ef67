"""The lock board: the locks and earths on every cabinet now, and who put them there; and the runs that finished.

Locks and earths belong to the cabinet and outlive a run. The board is what the runs on the cabinet say, one after the
other in the order in which they began: what a run began with and no longer has is off, what it has is on.
"""

from __future__ import annotations

import json
from dataclasses import dataclass
from typing import Any

from sqlalchemy import select

from fieldkit.errors import Refusal
from fieldkit.operations import moment, procedures, runs
from fieldkit.run import events, state
from fieldkit.store.db import db
from fieldkit.store.tables import EventRow, Run

#: earlier runs of a tube that go into the kit, latest last
EARLIER = 40


@dataclass(frozen=True)
class Board:
    """One cabinet's: bodies of LockOnBoard and EarthOnBoard (fieldkit.run.events)."""

    locks: list[dict[str, Any]]
    earths: list[dict[str, Any]]


def boards(cabinets: list[str]) -> dict[str, Board]:
    """The board of every cabinet named."""
    return {cabinet: _board(cabinet) for cabinet in cabinets}


def _board(cabinet: str) -> Board:
    locks: dict[tuple[str, str], dict[str, Any]] = {}
    earths: dict[str, dict[str, Any]] = {}
    found = db.session.scalars(select(Run).where(Run.cabinet == cabinet, Run.rehearsal.is_(False))).all()
    for run in sorted(found, key=lambda run: (moment.order(run.started), run.id)):
        before, after = _start(run), _now(run)
        for lock in before["locks"]:
            locks.pop(_lock(lock), None)
        for earth in before["earths"]:
            earths.pop(earth["stick"], None)
        locks.update({_lock(lock): lock for lock in after["locks"]})
        earths.update({earth["stick"]: earth for earth in after["earths"]})
    return Board(list(locks.values()), list(earths.values()))


def _lock(lock: dict[str, Any]) -> tuple[str, str]:
    """Several people may lock one point, each with their own lock."""
    return lock["point"], lock["lock"]


def _start(run: Run) -> dict[str, Any]:
    row = db.session.get_one(EventRow, (run.id, run.chain, 0))
    body = json.loads(row.data)["body"]
    return {"locks": body.get("locks", []), "earths": body.get("earths", [])}


def _now(run: Run) -> dict[str, Any]:
    """What the run says is on: its end says it, and while it is open its events do."""
    ended = runs.ended_body(run)
    if ended is not None:
        return ended
    try:
        sheet, _, _ = procedures.sheet(run.sheet)
        return state.fold(sheet, [events.parse(raw) for raw in runs.raw_events(run.id)])
    except Refusal:
        # a run on a sheet that is not here: what it began with is all that is known to be on
        return _start(run)


def earlier() -> dict[str, list[dict[str, Any]]]:
    """Tube -> its finished runs (bodies of fieldkit.run.events.Earlier), latest last."""
    made: dict[str, list[dict[str, Any]]] = {}
    found = db.session.scalars(select(Run).where(Run.phase.in_(("done", "stopped")), Run.rehearsal.is_(False))).all()
    for run in sorted(found, key=lambda run: (moment.order(run.ended or ""), run.id)):
        one = {"procedure": run.procedure, "run": run.id, "ended": run.ended, "outcome": run.phase}
        made.setdefault(run.tube, []).append(one)
    return {tube: finished[-EARLIER:] for tube, finished in made.items()}
