"""Server time to accept a run of 500 events, against bare SQLite inserts of the same rows.

The run is the demonstration's bring-up with remarks until it is that long; it is sent as the tablet sends it, in batches
of its size, each signed by the tablet's key. The floor writes the same rows into a table of the same columns and keys,
with the same settings of SQLite and one commit a batch, in the same process. What is printed is the least of a few goes.
"""

from __future__ import annotations

import datetime as dt
import hashlib
import json
import shutil
import sqlite3
from collections.abc import Callable
from contextlib import closing
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest
from bench import Ratios, Watch
from sqlalchemy import func, select
from tablet_in_python import TabletInPython

from fieldkit.demo import build, play, readings
from fieldkit.demo.tablet import Run
from fieldkit.operations import devices, sync
from fieldkit.store.db import db, set_pragmas
from fieldkit.store.tables import EventRow
from fieldkit.web.app import here

pytestmark = pytest.mark.bench
EVENTS = 500
GOES = 3
#: as static/tablet/sync.js cuts them
BATCH_BYTES = 256 * 1024


@dataclass(frozen=True)
class Long:
    """A data folder that knows the tablet and not yet the run, the run, and its events as the tablet cuts them."""

    folder: Path
    run: Run
    batches: list[list[str]]


def batches(texts: list[str]) -> list[list[str]]:
    made: list[list[str]] = [[]]
    size = 0
    for text in texts:
        size += len(text.encode())
        if made[-1] and size > BATCH_BYTES:
            made.append([])
            size = len(text.encode())
        made[-1].append(text)
    return made


@pytest.fixture(scope="module")
def long(tmp_path_factory: pytest.TempPathFactory) -> Long:
    folder = tmp_path_factory.mktemp("long") / "station"
    now = dt.datetime.now(dt.UTC)
    with build.opened(folder):
        demo = build.prepare(folder, now, build.signs(), lambda said: None)
        tablet = build.tablet(demo, "demo-tablet-3", "tablet 3", now - dt.timedelta(hours=5))
        build.warm_up(demo, tablet)
        tablet.clock.pass_by(720)
        ages = {
            "heater": "3600",
            "ion_pump": "90000",
            "magnets": "2400",
            "coolant": "3900",
            "air": "3900",
            "bias": "2600",
        }
        run = build.begin(demo, tablet, "hv-bring-up", "B2", "T-0417", ("vell", "arkle"), ages)
        play.play(play.Walk(run, readings.bring_up(), "vell", "arkle", "32 kV reached."))
        assert run.state["node"] == "@end"
        for n in range(EVENTS - 2 - len(run.texts)):
            tablet.clock.pass_by(20)
            run.command(
                "vell", do="remarked", step="", text=f"Meters looked at, {n}: nothing has moved since the last look."
            )
        run.command("vell", do="ended", outcome="done")
        run.sign("vell", "performed", "I did this work and these are my readings.")
        db.session.remove()
        db.engine.dispose()
    assert len(run.texts) == EVENTS
    return Long(folder, run, batches(run.texts))


def rows_here(run: str) -> int:
    return db.session.scalar(select(func.count()).select_from(EventRow).where(EventRow.run == run)) or 0


def by_requests(long: Long, app: Any, watch: Watch) -> None:
    """Signed beforehand by the tablet; timed is what the server does from the request to its answer with the receipt."""
    tablet = TabletInPython(app.test_client(), long.run.tablet.device)
    tablet.key = long.run.tablet.key
    path = f"/api/runs/{long.run.run}/events"
    bodies = [json.dumps({"chain": long.run.chain, "events": texts}).encode() for texts in long.batches]
    headers = [{"Authorization": "Fieldkit " + tablet.token("POST", path, body)} for body in bodies]

    def send() -> list[Any]:
        return [
            tablet.client.post(path, data=body, headers=header, content_type="application/json")
            for body, header in zip(bodies, headers, strict=True)
        ]

    answers = [answer.get_json() for answer in watch.go(send)]
    assert all(answer["receipt"] and not answer["kept"] for answer in answers), answers
    assert answers[-1]["have"] == EVENTS - 1


def by_operation(long: Long, app: Any, watch: Watch) -> None:
    device = next(one for one in devices.everything() if one.id == long.run.tablet.device)

    def take() -> list[sync.Accepted]:
        return [sync.accept(here(), device, long.run.run, long.run.chain, texts) for texts in long.batches]

    assert [done.kept for done in watch.go(take)] == [()] * len(long.batches)


def accepted(long: Long, place: Path, watch: Watch, way: Callable[[Long, Any, Watch], None]) -> list[Any]:
    """Over a fresh copy of the data folder, because a run is accepted once; gives the rows that were made."""
    shutil.copytree(long.folder, place)
    with build.opened(place) as app:
        assert rows_here(long.run.run) == 0
        way(long, app, watch)
        assert rows_here(long.run.run) == EVENTS
        every = select(EventRow.__table__).where(EventRow.run == long.run.run).order_by(EventRow.seq)
        made = list(db.session.execute(every))
        db.session.remove()
        db.engine.dispose()
    return made


def bare(long: Long, place: Path, watch: Watch, rows: list[Any]) -> None:
    """The same rows by sqlite3 alone: same columns and keys, same settings, one commit a batch."""
    names = [column.name for column in EventRow.__table__.columns]
    with closing(sqlite3.connect(place)) as connection:
        set_pragmas(connection)
        keys = "PRIMARY KEY (run, chain, seq), UNIQUE (sha256)"
        connection.execute(f"CREATE TABLE events ({', '.join(f'{name} NOT NULL' for name in names)}, {keys})")
        insert = f"INSERT INTO events VALUES ({', '.join('?' * len(names))})"

        def write() -> None:
            at = 0
            for texts in long.batches:
                connection.execute("BEGIN IMMEDIATE")
                connection.executemany(insert, [tuple(row) for row in rows[at : at + len(texts)]])
                connection.execute("COMMIT")
                at += len(texts)

        watch.go(write)
        assert connection.execute("SELECT count(*), count(DISTINCT sha256) FROM events").fetchone() == (EVENTS, EVENTS)


def test_server_time_to_accept_a_run_of_500_events(long: Long, tmp_path: Path, show: Callable[[Ratios], None]) -> None:
    floor, requests, operation = Watch(), Watch(), Watch()
    for n in range(GOES):
        accepted(long, tmp_path / f"operation{n}", operation, by_operation)
        rows = accepted(long, tmp_path / f"requests{n}", requests, by_requests)
        assert all(hashlib.sha256(row.data).hexdigest() == row.sha256 for row in rows)
        bare(long, tmp_path / f"bare{n}.db", floor, rows)
    size = sum(len(text.encode()) for text in long.run.texts) // 1024
    told = Ratios(
        f"Accepting a run of {EVENTS} events, {size} KiB, commits: {len(long.batches)}",
        "bare sqlite3 inserts of the same rows, as many commits",
        floor.wall,
    )
    told.add("device-signed requests, to the receipt", requests.wall)
    told.add("the operation alone, without the request", operation.wall)
    show(told)
    same = Ratios("The same in processor time, without what the disk takes", "bare sqlite3 inserts", floor.processor)
    same.add("device-signed requests, to the receipt", requests.processor)
    show(same)
