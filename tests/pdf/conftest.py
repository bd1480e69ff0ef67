"""A station with its authority, seal and people, made once; and a plain page to seal where no record is needed."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field

import pytest
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec

from fieldkit.pdf import assemble, countersign, seal, typeset
from fieldkit.trust import authority, jws, keys, seals

NOW = dt.datetime(2026, 8, 1, 9, 12, 55, tzinfo=dt.timezone(dt.timedelta(hours=1)))
ISSUED = NOW - dt.timedelta(days=30)
WORD = "four words or more"


@dataclass
class Station:
    """The signing authority, the seal, and people with their keys; keys of people never leave a tablet otherwise."""

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
        from fieldkit.trust import certificates

        return certificates.to_pem(self.authority.certificate)

    def sign(self, person: str, data: bytes) -> bytes:
        """What WebCrypto would give: 64 bytes over SHA-256 of `data`."""
        return jws.to_raw(self.keys[person].sign(data, ec.ECDSA(hashes.SHA256())))

    def countersign(self, sealed: bytes, person: str = "p.ardin", now: dt.datetime = NOW) -> bytes:
        prepared = countersign.prepare(sealed, self.certificates[person], self.authority.certificate, now)
        kept = countersign.Prepared.from_bytes(prepared.to_bytes())
        return countersign.finish(kept, self.sign(person, kept.to_sign))


@pytest.fixture(scope="session")
def station(tmp_path_factory) -> Station:
    folder = tmp_path_factory.mktemp("station")
    made = authority.create(folder, WORD, "Skarrow Fell", ISSUED)
    station = Station(made, seals.create(folder, made, ISSUED))
    station.enrol("j.vell", "J. Vell", "technician")
    station.enrol("s.quill", "S. Quill", "technician", "supervisor")
    station.enrol("p.ardin", "P. Ardin", "supervisor")
    # the people of the played run
    station.enrol("vell", "J. Vell", "technician")
    station.enrol("arkle", "P. Arkle", "technician")
    station.enrol("quill", "S. Quill", "supervisor")
    station.enrol("orme", "K. Orme", "supervisor")
    return station


_HTML = """<html lang="en"><head><title>Plain</title></head><body><h1 id="seal">Plain page</h1>
<div id="supervisor" style="width:45mm;height:26mm">Supervisor</div></body></html>"""
_CSS = '@page{size:A4;margin:20mm} body{font:400 10pt "Plex Sans"}'


@pytest.fixture(scope="session")
def plain() -> bytes:
    """A page with both fields and one attachment, unsealed."""
    pages = typeset.pages(_HTML, _CSS, identifier=b"plain")
    fields = [
        assemble.Field(assemble.SEAL, "Seal of the station", pages.boxes["seal"], locks=False),
        assemble.Field(assemble.SUPERVISOR, "Supervisor", pages.boxes["supervisor"], locks=True),
    ]
    note = assemble.Attached("note.txt", b"a note\n", "text/plain", "Supplement", "A note")
    return assemble.assemble(pages, [note], fields, NOW)


@pytest.fixture(scope="session")
def sealed(plain, station) -> bytes:
    return seal.seal(plain, station.seal, NOW)


@pytest.fixture(scope="session")
def run(station):
    """A finished run of every kind of event, with real signatures."""
    from .played import run as play

    return play(station)


@pytest.fixture(scope="session")
def countersigned(run) -> bytes:
    return run.countersigned()
