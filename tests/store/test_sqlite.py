"""SQLite's settings: the journal by the library's version, and every pooled connection checked."""

import sqlite3

import pytest
from flask import Flask
from sqlalchemy import text

from fieldkit.store import db as database
from fieldkit.store import migrate
from fieldkit.store.db import db


def start_sqlite(folder):
    app = Flask("fieldkit")
    database.start(app, f"sqlite:///{folder / 'fieldkit.db'}")
    with app.app_context():
        migrate.upgrade(db.engine)
    return app


# Source: sqlite.org/wal.html, "The WAL Reset Bug": 3.7.0 to 3.51.2, fixed in 3.51.3 and 3.50.7.
@pytest.mark.parametrize(
    ("version", "expected"),
    [
        ((3, 40, 1), ("delete", "EXTRA")),
        ((3, 44, 6), ("delete", "EXTRA")),
        ((3, 50, 6), ("delete", "EXTRA")),
        ((3, 50, 7), ("wal", "FULL")),
        ((3, 51, 0), ("delete", "EXTRA")),
        ((3, 51, 2), ("delete", "EXTRA")),
        ((3, 51, 3), ("wal", "FULL")),
        ((3, 53, 0), ("wal", "FULL")),
    ],
)
def test_the_journal_is_chosen_by_the_librarys_version(version, expected):
    assert database.journal(version) == expected


def test_every_pooled_connection_has_the_settings(tmp_path):
    app = start_sqlite(tmp_path)
    mode, synchronous = database.journal(sqlite3.sqlite_version_info)
    with app.app_context():
        connections = [db.engine.connect() for _ in range(8)]
        for connection in connections:
            values = {
                name: connection.execute(text(f"PRAGMA {name}")).scalar()
                for name in ("journal_mode", "synchronous", "foreign_keys", "busy_timeout")
            }
            assert values == {
                "journal_mode": mode,
                "synchronous": database.SYNCHRONOUS[synchronous],
                "foreign_keys": 1,
                "busy_timeout": 10_000,
            }
        for connection in connections:
            connection.close()
        db.engine.dispose()


def test_a_setting_that_is_not_taken_stops_the_connection():
    class Deaf(sqlite3.Connection):
        """Behaves like a database on a file system that cannot do what is asked."""

        def execute(self, statement, *more):
            return super().execute(statement.replace("foreign_keys = ON", "foreign_keys = OFF"), *more)

    connection = sqlite3.connect(":memory:", factory=Deaf)
    with pytest.raises(database.WrongPragma, match=r"journal_mode|foreign_keys"):
        database.set_pragmas(connection)
    connection.close()


def test_the_file_passes_sqlites_own_check(tmp_path):
    app = start_sqlite(tmp_path)
    with app.app_context():
        assert db.session.execute(text("PRAGMA integrity_check")).scalar() == "ok"
        db.session.remove()
        db.engine.dispose()
