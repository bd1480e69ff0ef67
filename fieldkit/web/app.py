"""The app: `create_app(data_folder)` makes it, brings the database up to date, and joins the page groups in GROUPS.

Not here: serving it (fieldkit.cli.serve). To add a page group: a module with `blueprint`, and NAV if it has a place in
the bar at the top; one line in GROUPS.
"""

from __future__ import annotations

import importlib
from pathlib import Path
from typing import Any

from flask import Flask, current_app, g
from flask_wtf.csrf import CSRFProtect
from jinja2 import StrictUndefined

from fieldkit import __version__, files, units
from fieldkit.operations import moment, settings, station
from fieldkit.operations.station import Station
from fieldkit.store import db, fences, migrate
from fieldkit.web import assets, errors, security, sessions

GROUPS = ("signin", "home", "admin", "registers", "trust", "tablet", "enrol", "sync", "desk")

MEGABYTE = 1024 * 1024
csrf = CSRFProtect()


def create_app(
    data_folder: Path | str,
    *,
    plain_http: bool = False,
    hosts: tuple[str, ...] = ("localhost", "127.0.0.1", "[::1]"),
    database_url: str | None = None,
    testing: bool = False,
) -> Flask:
    """The app over `data_folder`. `plain_http` is for this machine only: cookies are then not Secure.

    Raises Refusal weak-secret, newer-database.
    """
    held = station.open(Path(data_folder))
    app = Flask("fieldkit", static_folder=None, template_folder=str(files.folder("templates")))
    app.testing = testing
    app.jinja_env.undefined = StrictUndefined
    app.jinja_env.filters["when"] = moment.shown
    app.jinja_env.filters["unit"] = units.shown
    app.jinja_env.trim_blocks = app.jinja_env.lstrip_blocks = True
    app.config.update(
        SECRET_KEY=held.secret.decode(),
        TRUSTED_HOSTS=list(hosts),
        MAX_CONTENT_LENGTH=8 * MEGABYTE,
        MAX_FORM_MEMORY_SIZE=MEGABYTE,
        MAX_FORM_PARTS=500,
        WTF_CSRF_TIME_LIMIT=12 * 3600,
        PREFERRED_URL_SCHEME="http" if plain_http else "https",
    )
    app.extensions["fieldkit"] = held
    db.start(app, database_url or f"sqlite:///{held.database}")
    fences.guard()
    with app.app_context():
        migrate.upgrade(db.db.engine)
        settings.store_id()
        db.db.session.remove()
    csrf.init_app(app)
    errors.start(app)
    sessions.start(app, secure=not plain_http)
    security.start(app)
    assets.start(app)
    _join(app)
    return app


def here() -> Station:
    """The station that this app serves."""
    held: Station = current_app.extensions["fieldkit"]
    return held


def _join(app: Flask) -> None:
    nav: list[tuple[str, str, tuple[str, ...]]] = []
    for name in GROUPS:
        module = importlib.import_module(f"fieldkit.web.{name}")
        app.register_blueprint(module.blueprint)
        if getattr(module, "TABLET_CALLS", False):
            # signed by the tablet's key, no cookie: there is nothing that another site could borrow
            csrf.exempt(module.blueprint)
        nav += getattr(module, "NAV", ())

    @app.context_processor
    def _bar() -> dict[str, Any]:
        actor = g.get("actor")
        shown = [(title, endpoint) for title, endpoint, roles in nav if actor and actor.may(*roles)]
        return {"actor": actor, "nav": shown, "station_name": settings.get("station"), "app_version": __version__}
