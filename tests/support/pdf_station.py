"""A station with its signing authority, seal and enrolled people, for the tests of PDFs; keys as a tablet would hold."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field
from pathlib import Path

import played_run
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec

from fieldkit.pdf import countersign
from fieldkit.trust import authority, certificates, jws, keys, seals

NOW = dt.datetime(2026, 8, 1, 9, 12, 55, tzinfo=dt.timezone(dt.timedelta(hours=1)))
ISSUED = NOW - dt.timedelta(days=30)
WORD = "four words or more"


@dataclass
class Station:
    """The signing authority, the seal, and people with their keys; people's keys never leave a tablet otherwise."""

    authority: authority.Authority
    seal: seals.Seal
    keys: dict = field(default_factory=dict)
    certificates: dict = field(default_factory=dict)

    def enrol(self, person: str, name: str, *roles: str) -> None:
        key = keys.new()
        jwk = keys.to_jwk(key.public_key())
        self.keys[person] = key
        self.certificates[person] = authority.issue_person(self.authority, name, person, jwk, ISSUED, roles)

    @property
    def pem(self) -> str:
        return certificates.to_pem(self.authority.certificate)

    def sign(self, person: str, data: bytes) -> bytes:
        """What WebCrypto would give: 64 bytes over SHA-256 of `data`."""
        return jws.to_raw(self.keys[person].sign(data, ec.ECDSA(hashes.SHA256())))

    def countersign(self, sealed: bytes, person: str = "p.ardin", now: dt.datetime = NOW) -> bytes:
        """The whole of it in two steps, with what is kept in between written out and read again."""
        prepared = countersign.prepare(sealed, self.certificates[person], self.authority.certificate, now)
        kept = countersign.Prepared.from_bytes(prepared.to_bytes())
        return countersign.finish(kept, self.sign(person, kept.to_sign))


def make(folder: Path) -> Station:
    """The people of the played run, and P. Ardin, a supervisor who had no part in it."""
    made = authority.create(folder, WORD, "Skarrow Fell", ISSUED)
    station = Station(made, seals.create(folder, made, ISSUED))
    station.enrol("p.ardin", "P. Ardin", "supervisor")
    for person in played_run.PEOPLE:
        station.enrol(person["id"], person["name"], *person["roles"])
    return station
