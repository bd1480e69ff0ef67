"""A desk with a played run on it: four people enrolled on one tablet in Python, runs that arrive over the wire.

The sheet, and the runs, are those of played_run.py; the station is that of station_in_tests.py.
"""

from __future__ import annotations

import datetime as dt
import hashlib
from typing import Any

import played_run as play
from flask import Flask
from station_in_tests import PASSWORD, held, issue, jpeg
from tablet_in_python import TabletInPython

from fieldkit.operations import enrol, procedures
from fieldkit.operations.actor import HOUSE, Actor
from fieldkit.store.db import db
from fieldkit.trust import jws, keys

ZONE = dt.timezone(dt.timedelta(hours=1))
PICTURE = jpeg((70, 90, 110), (320, 200))
SHA = hashlib.sha256(PICTURE).hexdigest()
QUILL = Actor("quill", "S. Quill", ("technician", "supervisor"))
ORME = Actor("orme", "K. Orme", ("supervisor", "administrator"))
VELL = Actor("vell", "J. Vell", ("technician",))


class Desk:
    """An app that knows the played sheet, and a tablet on which everybody can sign."""

    def __init__(self, app: Flask) -> None:
        self.app = app
        with app.app_context():
            procedures.release(HOUSE, play.sheet(), play.YAML)
            db.session.remove()
        self.tablet = TabletInPython(app.test_client())
        for login in ("vell", "arkle", "quill"):
            assert self.tablet.enrol(login, PASSWORD).status_code == 200
            issue(app, self.tablet, login)
        self.keys: dict[str, tuple[Any, str]] = {}

    def sign(self, person: str, claims: dict[str, Any]) -> str:
        x5c = self.tablet.certificates[person]
        return jws.sign(claims, self.tablet.people[person], "fieldkit-signature", x5c=x5c)

    def pen(self, run: str, hours: int = 1, zone: dt.tzinfo = ZONE, **started: Any) -> play.Pen:
        """A run that began some hours ago."""
        now = dt.datetime.now(zone).replace(microsecond=0)
        began = now - dt.timedelta(hours=hours)
        chain = f"{self.tablet.device}.EPOCH001"
        device = {**play.STARTED["tablet"], "device": self.tablet.device}
        return play.Pen(play.sheet(), self.sign, run, chain, began, tablet=device, **started)

    def arrive(self, pen: play.Pen, picture: bytes | None = PICTURE, texts: list[str] | None = None) -> Any:
        """Send the run as the tablet does."""
        run = Chain(pen.state["run"], pen.state["chain"])
        answer = self.tablet.send(run, pen.texts if texts is None else texts)  # type: ignore[arg-type]
        assert answer.status_code == 200, answer.text
        if picture is not None:
            assert self.tablet.send_picture(picture).status_code == 200
        return answer

    def waiting(self, run: str = "260731-B2-1AAAA", eventful: bool = False, hours: int = 1) -> play.Pen:
        """A finished run that waits for a supervisor."""
        pen = (play.eventful if eventful else play.clean)(self.pen(run, hours), SHA)
        self.arrive(pen)
        return pen

    def key(self, actor: Actor) -> tuple[Any, str]:
        """A key as a supervisor's browser makes it, certified: the private key and its kid. Needs an app context."""
        if actor.id not in self.keys:
            from station_in_tests import PASSPHRASE

            from fieldkit.operations import devices

            mine, station = keys.new(), held(self.app)
            proof = jws.sign({"device": "desk", "nonce": devices.challenge(station)}, mine, "fieldkit-enrol")
            asked = enrol.ask_at_desk(actor, station, keys.to_jwk(mine.public_key()), proof)
            kid = enrol.issue(HOUSE, station, asked, PASSPHRASE, "known in person")
            self.keys[actor.id] = (mine, kid)
        return self.keys[actor.id]


class Chain:
    """What the tablet in Python wants to know of a run that it sends."""

    def __init__(self, run: str, chain: str) -> None:
        self.run, self.chain = run, chain


def raw(key: Any, data: bytes) -> bytes:
    """A raw 64-byte ES256 signature, as WebCrypto makes it."""
    from cryptography.hazmat.primitives import hashes
    from cryptography.hazmat.primitives.asymmetric import ec

    return jws.to_raw(key.sign(data, ec.ECDSA(hashes.SHA256())))


__all__ = ["ORME", "PICTURE", "QUILL", "SHA", "VELL", "Chain", "Desk", "raw"]
