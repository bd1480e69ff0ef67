"""Both databases: SQLite in a folder, and a real PostgreSQL (tests/support/postgresql_in_tests.py)."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest
from flask import Flask
from postgresql_in_tests import fresh_database, postgresql

from fieldkit.store import db as database
from fieldkit.store import fences, migrate
from fieldkit.store.db import db

__all__ = ["postgresql"]


def start(url: str) -> Flask:
    app = Flask("fieldkit")
    database.start(app, url)
    fences.guard()
    with app.app_context():
        migrate.upgrade(db.engine)
    return app


@pytest.fixture(params=["sqlite", "postgresql"])
def store(request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[Flask]:
    """An app with nothing but the database, at this version's tables, empty."""
    if request.param == "sqlite":
        app = start(f"sqlite:///{tmp_path / 'fieldkit.db'}")
    else:
        app = start(fresh_database(request.getfixturevalue("postgresql")))
    with app.app_context():
        yield app
        db.session.remove()
        db.engine.dispose()
