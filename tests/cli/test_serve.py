"""`fieldkit serve` as a process: its first start, TLS, stopping, and being killed without warning."""

import http.client
import json
import random
import socket
import sqlite3
import ssl
import subprocess
import threading
import time
from pathlib import Path

import psycopg
import pytest
from postgresql_in_tests import fresh_database
from server_in_tests import PASSPHRASE, PASSWORD, Client, Serving, command, environment
from station_in_tests import SEED, furnish, held, issue
from tablet_in_python import RunOnTablet, TabletInPython

from fieldkit.operations import people, station
from fieldkit.store.db import db
from fieldkit.trust import receipts
from fieldkit.web.app import create_app

ROOT = Path(__file__).resolve().parents[2]
FIRST = ("--station", "Skarrow Fell", "--admin", "orme", "--admin-name", "K. Orme")


def finished(*more, stdin="", **env):
    given = environment(**env)
    for name in [name for name, value in env.items() if value == ""]:
        del given[name]
    return subprocess.run(command(*more), env=given, input=stdin, capture_output=True, text=True, timeout=120)


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    """A station set up from the command line, registers loaded, the procedures that come along in use."""
    made = tmp_path_factory.mktemp("serve") / "data"
    seed = made.parent / "station.json"
    seed.write_text(json.dumps(SEED))
    done = finished("--data", str(made), "--set-up-only", "--registers", str(seed), *FIRST)
    assert done.returncode == 0, done.stdout + done.stderr
    return made


def test_the_first_start_sets_the_station_up(folder):
    app = create_app(folder, testing=True)
    with app.app_context():
        assert station.is_set_up() and [p.login for p in people.everyone()] == ["orme"]
        station.open_authority(held(app), PASSPHRASE)
        from fieldkit.operations import procedures, registers

        assert "warm-up" in [one.procedure for one in procedures.released()]
        assert set(registers.tubes()) == {"T-0417", "T-0533"}
        db.session.remove()
        db.engine.dispose()


def test_nothing_of_the_data_folder_can_be_read_by_others(folder):
    assert folder.stat().st_mode & 0o077 == 0
    for path in folder.rglob("*"):
        if path.suffix == ".key" or path.name in ("secret", "fieldkit.db"):
            assert path.stat().st_mode & 0o077 == 0, path
    words = (PASSWORD.encode(), PASSPHRASE.encode())
    for path in (p for p in folder.rglob("*") if p.is_file()):
        assert not any(word in path.read_bytes() for word in words), path


def test_it_serves_over_tls_that_its_own_authority_vouches_for_and_stops_when_told(folder):
    serving = Serving(folder)
    try:
        client = Client(serving.port, folder / "tls" / "tls-authority.pem")
        answer = client.get("/api/challenge")
        assert answer.status_code == 200 and answer.headers["X-Fieldkit"] == "1"
        assert "max-age" in answer.headers["Strict-Transport-Security"]
        stranger = ssl.create_default_context()
        with socket.create_connection(("127.0.0.1", serving.port)) as raw, pytest.raises(ssl.SSLCertVerificationError):
            stranger.wrap_socket(raw, server_hostname="localhost")
        second = finished("--data", str(folder))
        assert second.returncode == 1 and "already-served" in second.stderr
    finally:
        assert serving.stop() == 0
    assert not serving.answers()


def test_plain_http_is_for_this_machine_only(tmp_path):
    done = finished("--data", str(tmp_path / "d"), "--plain-http", "--host", "192.0.2.1")
    assert done.returncode == 2 and "only over TLS" in done.stderr


def test_without_a_terminal_the_first_start_says_what_it_needs(tmp_path):
    done = finished("--data", str(tmp_path / "d"), "--set-up-only")
    assert done.returncode == 1 and "--station" in done.stderr
    done = finished("--data", str(tmp_path / "d"), "--set-up-only", *FIRST, FIELDKIT_ADMIN_PASSWORD="")
    assert done.returncode == 1 and "FIELDKIT_ADMIN_PASSWORD" in done.stderr


def test_passwords_may_come_on_standard_input_and_a_short_one_is_refused(tmp_path):
    none = {"FIELDKIT_ADMIN_PASSWORD": "", "FIELDKIT_AUTHORITY_PASSPHRASE": ""}
    more = ("--data", str(tmp_path / "d"), "--set-up-only", *FIRST)
    done = finished(*more, stdin=f"{PASSWORD}\nshort\n", **none)
    assert done.returncode == 1 and "short-passphrase" in done.stderr
    # what was done so far is no obstacle to the next try
    done = finished(*more, stdin=f"{PASSWORD}\n{PASSPHRASE}\n", **none)
    assert done.returncode == 0, done.stderr


def test_a_procedure_with_problems_stops_with_where_and_what(folder, tmp_path):
    bad = tmp_path / "bad.yaml"
    bad.write_text("procedure: bad\nedition: one\n")
    done = finished("--data", str(folder), "--set-up-only", "--release", str(bad))
    assert done.returncode == 1 and "bad.yaml:" in done.stderr


def test_a_procedure_is_released_with_the_stations_own_formulas(folder, tmp_path):
    (tmp_path / "formulas").mkdir()
    own = tmp_path / "formulas" / "own.yaml"
    own.write_text(
        "subject: own\nformulas:\n  twice_over:\n    meaning: two quotients\n    arguments:\n"
        "      a: {unit: V, low: 0 V, high: 9 V}\n      b: {unit: A, low: 0.1 A, high: 9 A}\n"
        "    expression: 2 * a / b\n    unit: ohm\n    reference: none needed\n    decides: nothing\n"
        "    examples:\n      - {with: {a: 4 V, b: 2 A}, gives: 4 ohm, within: 0 ohm}\n"
    )
    step = (ROOT / "tests" / "steps" / "work_out.yaml").read_text()
    procedure = tmp_path / "work-out.yaml"
    procedure.write_text(step.replace("volts / amps", "twice_over(a=volts, b=amps)"))
    released = ("--data", str(folder), "--set-up-only", "--release", str(procedure))
    done = finished(*released)
    assert done.returncode == 0 and "In use: work-out.yaml" in done.stdout, done.stdout + done.stderr
    own.write_text(own.read_text().replace("gives: 4 ohm", "gives: 5 ohm"))
    done = finished(*released)
    assert done.returncode == 1 and "own.yaml:13:9:" in done.stderr and "[example-differs]" in done.stderr


def test_every_receipt_survives_a_server_that_is_killed_at_any_moment(tmp_path):
    """SIGKILL to the process group while events are sent one by one; then the database is looked at by itself.

    It tries the order of commit and receipt; it does not try a power cut, which needs hardware.
    """
    folder = tmp_path / "data"
    app = create_app(folder, plain_http=True, testing=True)
    sheet_sha = furnish(app)
    tablet = TabletInPython(app.test_client())
    tablet.enrol("vell", PASSWORD)
    issue(app, tablet, "vell")
    public = held(app).receipt.public_key()
    with app.app_context():
        db.session.remove()
        db.engine.dispose()
    dice, given, rounds = random.Random(11), {}, 4
    run = RunOnTablet(tablet, "260731-B2-KILL", sheet_sha)
    run.start()
    for n in range(400):
        run.remark(f"{n}")
    position = 0
    for _ in range(rounds):
        serving = Serving(folder, "--plain-http")
        tablet.client = Client(serving.port)

        def send():
            nonlocal position
            while position < len(run.texts):
                try:
                    answer = tablet.send(run, [run.texts[position]]).get_json()
                except (OSError, ValueError, http.client.HTTPException):
                    return
                found = receipts.verify(answer["receipt"], public)
                given[found["seq"]] = found["head"]
                position = answer["have"] + 1

        sender = threading.Thread(target=send)
        sender.start()
        # counted from the first receipts on: how soon those come is the machine's affair
        before, until = len(given), time.monotonic() + 120
        while len(given) < before + 3:
            assert sender.is_alive() and time.monotonic() < until, "nothing is received"
            time.sleep(0.01)
        time.sleep(dice.uniform(0, 0.6))
        serving.kill()
        sender.join()
        connection = sqlite3.connect(folder / "fieldkit.db")
        stored = dict(connection.execute("SELECT seq, sha256 FROM events"))
        assert connection.execute("PRAGMA integrity_check").fetchone()[0] == "ok"
        connection.close()
        assert given.items() <= stored.items()
        assert sorted(stored) == list(range(len(stored)))
    assert len(given) < len(run.texts), "everything was received before the server was killed; the test tried nothing"


def test_a_station_on_postgresql(tmp_path, postgresql):
    url = fresh_database(postgresql)
    done = finished("--data", str(tmp_path / "d"), "--set-up-only", *FIRST, FIELDKIT_DATABASE=url)
    assert done.returncode == 0, done.stderr
    assert not (tmp_path / "d" / "fieldkit.db").exists()
    with psycopg.connect(url.replace("postgresql+psycopg:", "postgresql:")) as connection:
        assert connection.execute("SELECT login FROM people").fetchall() == [("orme",)]
