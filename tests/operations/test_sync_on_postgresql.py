"""Sync once more over PostgreSQL: replays, gaps, forks and threads end in the same tables there."""

import random
import threading

import pytest
from postgresql_in_tests import fresh_database
from sqlalchemy import func, select
from station_in_tests import whole_run
from tablet_in_python import TabletInPython

from fieldkit.operations import runs
from fieldkit.store.db import db
from fieldkit.store.tables import EventRow, KeptEvent, PendingEvent, RecordRow


@pytest.fixture
def database_url(postgresql):
    return fresh_database(postgresql)


def count(table):
    return db.session.scalar(select(func.count()).select_from(table))


def test_the_app_really_runs_on_postgresql(app):
    with app.app_context():
        assert db.engine.dialect.name == "postgresql"


def test_batches_in_any_order_with_repeats_end_in_one_chain(app, tablet, sheet_sha):
    run = whole_run(tablet, sheet_sha, remarks=12)
    parts = [run.texts[i : i + 3] for i in range(0, len(run.texts), 3)] * 3
    random.Random(3).shuffle(parts)
    for part in parts:
        assert tablet.send(run, part).status_code == 200
    with app.app_context():
        assert [raw.decode() for raw in runs.raw_events(run.run)] == run.texts
        assert (count(PendingEvent), count(KeptEvent)) == (0, 0)
        assert db.session.get(RecordRow, run.run).state == "waiting"


def test_a_fork_is_kept_and_the_first_stays(app, tablet, sheet_sha):
    run = whole_run(tablet, sheet_sha)
    tablet.send(run, run.texts)
    assert tablet.send(run, [run.texts[2].replace("nothing odd", "something odd")]).status_code == 409
    with app.app_context():
        assert runs.raw_events(run.run)[2].decode() == run.texts[2] and count(KeptEvent) == 1


def test_threads_sending_at_once_lose_and_double_nothing(app, tablet, sheet_sha):
    made = [whole_run(tablet, sheet_sha, f"260731-B2-PRUN{n}", remarks=10) for n in range(4)]
    failed = []

    def work(run):
        mine = TabletInPython(app.test_client(), device=tablet.device)
        mine.key = tablet.key
        try:
            for at in range(0, len(run.texts), 2):
                if mine.send(run, run.texts[at : at + 2]).status_code != 200:
                    failed.append(run.run)
        except Exception as bad:
            failed.append(bad)

    threads = [threading.Thread(target=work, args=(run,)) for run in made * 2]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert failed == []
    with app.app_context():
        assert count(EventRow) == sum(len(run.texts) for run in made)
        assert (count(PendingEvent), count(RecordRow)) == (0, 4)
