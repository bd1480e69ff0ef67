"""Fills a data folder with the demonstration: station, registers, people, tablets, and four runs at different stages.

Everything goes through the operations that a real station uses. Times lie in the two days before `now`, so that
certificates, calibrations and runs agree. Not here: the command line (fieldkit.cli.demo), readings (readings.py).
"""

from __future__ import annotations

import datetime as dt
import secrets
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec
from flask import Flask

from fieldkit import files
from fieldkit.demo import play, readings, registers
from fieldkit.demo.tablet import Clock, Run, Tablet, start_body
from fieldkit.errors import Problems
from fieldkit.formula import library
from fieldkit.operations import devices, enrol, people, pictures, procedures, review, station
from fieldkit.operations import registers as keeping
from fieldkit.operations.actor import HOUSE, Actor
from fieldkit.operations.station import Station
from fieldkit.procedure.compile import compile_file
from fieldkit.trust import jws, keys
from fieldkit.web.app import create_app, here

NAME = "Skarrow Fell"
#: id, login, name, roles; invented
PEOPLE = (
    ("vell", "vell", "J. Vell", ("technician",)),
    ("arkle", "arkle", "P. Arkle", ("technician",)),
    ("quill", "quill", "S. Quill", ("technician", "supervisor")),
    ("orme", "orme", "K. Orme", ("supervisor", "administrator", "writer")),
)
LOCKS = (("Q1", ("beam_supply",), "41", "T-41"), ("S4", ("rf_drive",), "42", "T-42"))
Say = Callable[[str], None]


@dataclass(frozen=True)
class SignIns:
    """What a person needs to use the demonstration."""

    logins: tuple[str, ...]
    password: str
    authority: str


@dataclass
class Demo:
    """The station while it is being filled."""

    held: Station
    now: dt.datetime
    signs: SignIns
    say: Say
    desk: dict[str, keys.PrivateKey]

    @property
    def begun(self) -> dt.datetime:
        return self.now - dt.timedelta(days=2)


@contextmanager
def opened(folder: Path) -> Iterator[Flask]:
    """The app over the folder, for operations without a request."""
    app = create_app(folder, plain_http=True)
    with app.app_context():
        yield app


def signs() -> SignIns:
    """Fresh words for this demonstration; printed once, kept nowhere."""
    return SignIns(tuple(p[1] for p in PEOPLE), f"skarrow {secrets.token_hex(4)}", f"authority {secrets.token_hex(6)}")


def prepare(folder: Path, now: dt.datetime, words: SignIns, say: Say) -> Demo:
    """Station, people, registers, nameplates, procedures and one enrolled tablet; call it inside `opened`."""
    demo = Demo(here(), now, words, say, {})
    station.set_up(HOUSE, demo.held, NAME, words.authority, demo.begun - dt.timedelta(days=30))
    for key, login, name, roles in PEOPLE:
        people.add(HOUSE, login, name, roles, words.password, id=key)
    say("people and signing authority")
    _registers(now)
    say("registers and nameplates")
    for path in sorted(files.folder("procedures").glob("*.yaml")):
        procedures.release_file(HOUSE, path, library.load(files.folder("procedures") / "formulas"))
    say("procedures")
    return demo


def _registers(now: dt.datetime) -> None:
    seed = registers.seed(now.date())
    keeping.load(HOUSE, seed)
    first, second = (Actor(p[0], p[2], p[3]) for p in PEOPLE[:2])
    for serial, tube in seed["tubes"].items():
        drawn = play.drawing(f"Nameplate of {serial}")
        photograph = pictures.put(drawn, "demonstration")
        keeping.enter_nameplate(first, serial, tube["givens"], photograph)
        keeping.confirm_nameplate(second, serial, tube["givens"])


def tablet(demo: Demo, device: str, name: str, wall: dt.datetime) -> Tablet:
    """A tablet with every technician and supervisor enrolled on it."""
    made = Tablet(demo.held, Clock(wall, boot=f"boot-{device}"), device, name)
    for _, login, _, _ in PEOPLE:
        made.enrol(login, demo.signs.password, demo.signs.authority, demo.begun)
    return made


def begin(demo: Demo, on: Tablet, procedure: str, cabinet: str, tube: str, present: tuple[str, ...], ages: Any) -> Run:
    """A run that stands at its first step: started, energy states declared against the lock board."""
    run = on.run(f"{on.clock.wall:%m%d}-{cabinet}-{procedure}", procedure)
    body = start_body(run, cabinet=cabinet, tube=tube, present=present)
    run.command(present[0], do="run-started", facts={"confirmed": True}, **body)
    on.clock.pass_by(40)
    expected = run.sheet.sheet["start"]
    states = {name: expected[name]["state"] for name in expected}
    for name, source in run.sheet.sources.items():
        if source["isolable"]:
            states.setdefault(name, "off")
    on_board = {lock["point"] for lock in run.state["locks"]}
    found = [
        {"point": point, "sources": list(sources), "lock": number, "tag": tag, "holder": present[0]}
        for point, sources, number, tag in LOCKS
        if point not in on_board and any(states.get(s) == "locked" for s in sources)
    ]
    run.command(present[0], do="states-declared", states=states, ages=ages, locks=found, board_seen=True)
    return run


def finish(run: Run, recorder: str, remark: str = "") -> None:
    """End and sign a run that was played to its end, and send it."""
    run.tablet.clock.pass_by(60)
    run.command(recorder, do="ended", outcome="done")
    run.tablet.clock.pass_by(30)
    run.sign(recorder, "performed", "I did this work and these are my readings.")
    run.send()


def warm_up(demo: Demo, on: Tablet) -> Run:
    """The whole warm-up of T-0417 in B2, one reading taken again and one corrected."""
    run = begin(demo, on, "warm-up", "B2", "T-0417", ("vell", "arkle"), {"ion_pump": "86400"})
    answers = {**readings.WARM_UP, "coolant_flow": ["39.6", "48.2"]}
    walk = play.Walk(run, answers, "vell", "arkle", "Heater on; the beam supply stays locked. P. Arkle watches.")
    play.play(walk, until="grid_current")
    play.correct(walk, "bias_voltage", "-119.4", "The last figure was misread.")
    play.play(walk)
    finish(run, "vell")
    return run


def bring_up(demo: Demo, on: Tablet) -> Run:
    """High-voltage bring-up after the warm-up; one gas fall-back on the way; ends with Q1 locked."""
    ages = {"heater": "3600", "ion_pump": "90000", "magnets": "2400", "coolant": "3900", "air": "3900", "bias": "2600"}
    run = begin(demo, on, "hv-bring-up", "B2", "T-0417", ("vell", "arkle"), ages)
    walk = play.Walk(run, readings.bring_up(), "vell", "arkle", "32 kV reached, one fall-back at 26 kV. Q1 is locked.")
    play.play(walk)
    finish(run, "vell")
    return run


def still_going(demo: Demo, on: Tablet) -> Run:
    """A warm-up of T-0533 in B1 that stands in the middle: heater on, waiting; sent as far as it is."""
    run = begin(demo, on, "warm-up", "B1", "T-0533", ("arkle",), {"ion_pump": "43200"})
    walk = play.Walk(run, {**readings.OPEN}, "arkle", "vell")
    play.play(walk, until="ion_hump")
    run.send()
    return run


def countersign(demo: Demo, run: str, login: str = "orme") -> bytes:
    """The supervisor's part at the desk, with a key of their own; gives the countersigned PDF."""
    row = next(p for p in PEOPLE if p[1] == login)
    actor = Actor(row[0], row[2], row[3])
    key, kid = _desk_key(demo, actor)
    ready = review.prepare(actor, demo.held, run, kid)
    review.finish(actor, ready.id, jws.to_raw(key.sign(ready.to_sign, ec.ECDSA(hashes.SHA256()))))
    return review.countersigned_pdf(actor, run)


def _desk_key(demo: Demo, actor: Actor) -> tuple[keys.PrivateKey, str]:
    key = keys.new()
    proof = jws.sign({"device": enrol.DESK, "nonce": devices.challenge(demo.held)}, key, enrol.PROOF)
    asked = enrol.ask_at_desk(actor, demo.held, keys.to_jwk(key.public_key()), proof)
    kid = enrol.issue(HOUSE, demo.held, asked, demo.signs.authority, "invented person of the demonstration", demo.begun)
    return key, kid


def check_shipped() -> None:
    """Raises Problems where a shipped procedure does not compile."""
    shelf = library.load(files.folder("procedures") / "formulas")
    for path in sorted(files.folder("procedures").glob("*.yaml")):
        sheet, problems = compile_file(path, shelf)
        if sheet is None:
            raise Problems(problems)
