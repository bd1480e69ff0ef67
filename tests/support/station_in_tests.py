"""Fixtures of a small station: people, registers, one sheet, an app over a fresh folder, an enrolled tablet.

The station is the invented one of fieldkit/demo/station.json. Password hashing is made cheap here; what it costs is
checked by itself (tests/operations/test_signin.py).
"""

from __future__ import annotations

import hashlib
import io
import json
import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from argon2 import PasswordHasher
from flask import Flask
from flask.testing import FlaskClient
from PIL import Image
from tablet_in_python import RunOnTablet, TabletInPython

import fieldkit
from fieldkit.operations import enrol, people, procedures, registers, station
from fieldkit.operations.actor import HOUSE
from fieldkit.sheet.controls import Remark
from fieldkit.sheet.model import Sheet, Step
from fieldkit.sheet.moves import Move
from fieldkit.store import db as database
from fieldkit.store.db import db
from fieldkit.trust import keys
from fieldkit.web.app import create_app

PASSWORD = "four words make one"
PASSPHRASE = "correct horse battery staple"
SEED = json.loads((Path(fieldkit.__file__).parent / "demo" / "station.json").read_text(encoding="utf-8"))
YAML = b"procedure: test-check\nedition: 1\n"
PEOPLE = {
    "vell": ("J. Vell", ("technician",)),
    "arkle": ("P. Arkle", ("technician",)),
    "quill": ("S. Quill", ("technician", "supervisor")),
    "orme": ("K. Orme", ("supervisor", "administrator")),
    "drafts": ("A. Drafts", ("writer",)),
}


def sheet() -> Sheet:
    """One step, a remark, and the end."""
    return Sheet(
        procedure="test-check",
        edition=1,
        title="Test check",
        purpose="To be received.",
        source_sha256=hashlib.sha256(YAML).hexdigest(),
        tubes=("inductive-output-tube",),
        crew=1,
        givens=(),
        sources=(),
        start={},
        ends={},
        first="note",
        steps=(Step(id="note", number="1", kind="remark", title="Say what you see", control=Remark()),),
        moves=(Move(id="note-done", origin="note", to="@end", on="done"),),
        make_safe=(),
    )


def jpeg(colour: tuple[int, int, int] = (90, 120, 60), size: tuple[int, int] = (40, 30)) -> bytes:
    out = io.BytesIO()
    Image.new("RGB", size, colour).save(out, "JPEG")
    return out.getvalue()


@pytest.fixture(scope="session", autouse=True)
def cheap_passwords() -> Iterator[None]:
    before, rounds = people.HASHER, keys.ROUNDS
    people.HASHER, keys.ROUNDS = PasswordHasher(time_cost=1, memory_cost=8, parallelism=1), 1000
    yield
    people.HASHER, keys.ROUNDS = before, rounds


def furnish(app: Flask) -> str:
    """Set the station up; gives the SHA-256 of its one sheet."""
    with app.app_context():
        for login, (name, roles) in PEOPLE.items():
            people.add(HOUSE, login, name, roles, PASSWORD)
        station.set_up(HOUSE, app.extensions["fieldkit"], "Skarrow Fell", PASSPHRASE)
        registers.load(HOUSE, SEED)
        digest = procedures.release(HOUSE, sheet(), YAML)
        db.session.remove()
    return digest


@pytest.fixture
def database_url() -> str | None:
    """None is SQLite in the app's folder; a test module may say otherwise."""
    return None


@pytest.fixture
def bare(tmp_path: Path, database_url: str | None) -> Iterator[Flask]:
    """An app over an empty folder."""
    app = create_app(tmp_path / "data", plain_http=True, testing=True, database_url=database_url)
    yield app
    with app.app_context():
        db.session.remove()
        db.engine.dispose()


@pytest.fixture
def app(bare: Flask) -> Flask:
    bare.config["TEST_SHEET"] = furnish(bare)
    return bare


@pytest.fixture
def sheet_sha(app: Flask) -> str:
    return str(app.config["TEST_SHEET"])


@pytest.fixture
def inside(app: Flask) -> Iterator[Flask]:
    with app.app_context():
        yield app
        db.session.remove()


def patient(app: Flask, monkeypatch: pytest.MonkeyPatch) -> None:
    """Connections made from now on wait long: on a slow disk eight who write without a pause keep one out for many seconds."""
    monkeypatch.setattr(database, "BUSY_SECONDS", 300)
    with app.app_context():
        db.engine.dispose()


def held(app: Flask) -> station.Station:
    found: station.Station = app.extensions["fieldkit"]
    return found


def issue(app: Flask, tablet: TabletInPython, login: str) -> str:
    """An administrator issues what the tablet asked for, and the tablet fetches it."""
    with app.app_context():
        kid = enrol.issue(HOUSE, held(app), tablet.enrolments[login], PASSPHRASE, "known in person")
        db.session.remove()
    assert tablet.take_certificate(login)["status"] == "issued"
    return kid


@pytest.fixture
def tablet(app: Flask) -> TabletInPython:
    """A tablet with J. Vell enrolled on it."""
    made = TabletInPython(app.test_client())
    assert made.enrol("vell", PASSWORD).status_code == 200
    issue(app, made, "vell")
    return made


def whole_run(tablet: TabletInPython, sheet_sha: str, run: str = "260731-B2-1ABCD", remarks: int = 8) -> RunOnTablet:
    """A finished run: start, remarks, end, signature."""
    made = RunOnTablet(tablet, run, sheet_sha)
    made.start()
    for n in range(remarks):
        made.remark(f"nothing odd, {n}")
    made.end()
    made.sign("vell")
    return made


def csrf(html: str) -> str:
    found = re.search(r'name="csrf_token"[^>]*value="([^"]+)"', html)
    assert found, "the page has no token"
    return found.group(1)


def sign_in(app: Flask, login: str, password: str = PASSWORD) -> FlaskClient:
    """A browser with `login` signed in."""
    client = app.test_client()
    data = {"login": login, "password": password, "csrf_token": csrf(client.get("/signin").text)}
    answer = client.post("/signin", data=data)
    assert answer.status_code == 303, answer.text
    return client


def post(client: FlaskClient, page: str, path: str, data: dict[str, Any] | None = None) -> Any:
    """Send a form as the page would, with its token."""
    return client.post(path, data={**(data or {}), "csrf_token": csrf(client.get(page).text)})
