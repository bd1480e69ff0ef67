"""Bring the database to the tables of this version: `upgrade` at every start. The steps are in migrations/versions."""

from __future__ import annotations

from pathlib import Path

from alembic import command
from alembic.config import Config
from alembic.script import ScriptDirectory
from sqlalchemy import Engine

from fieldkit.errors import Refusal

_FOLDER = Path(__file__).resolve().parent / "migrations"


def config(engine: Engine) -> Config:
    made = Config()
    made.set_main_option("script_location", str(_FOLDER))
    made.attributes["engine"] = engine
    return made


def upgrade(engine: Engine) -> None:
    """Raises Refusal newer-database where a later fieldkit has written: nothing is touched then."""
    settings = config(engine)
    known = {s.revision for s in ScriptDirectory.from_config(settings).walk_revisions()}
    with engine.connect() as connection:
        from alembic.runtime.migration import MigrationContext

        found = MigrationContext.configure(connection).get_current_revision()
    if found is not None and found not in known:
        raise Refusal("newer-database", f"The database is at {found}, made by a newer fieldkit. Install that version.")
    command.upgrade(settings, "head")
