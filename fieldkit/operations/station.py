"""The station as the server holds it: the data folder, the keys in it, and setting it up the first time.

Folder: `fieldkit.db`, `secret` (signs cookies and nonces), `trust/` (signing authority, seal, receipt key), `tls/`.
Every key file is 0600. Not here: people (people.py), TLS (fieldkit.trust.tls, called by `fieldkit serve`).
"""

from __future__ import annotations

import datetime as dt
import os
import secrets
from dataclasses import dataclass, field
from pathlib import Path

import platformdirs

from fieldkit.errors import Refusal
from fieldkit.operations import moment, settings
from fieldkit.operations.actor import Actor, require
from fieldkit.store.db import writing
from fieldkit.trust import authority, certificates, keys, receipts, seals
from fieldkit.trust.authority import Authority
from fieldkit.trust.keys import PrivateKey

#: a secret shorter than this, or one of these words, is nobody's secret
SECRET_BYTES = 32
GUESSABLE = (b"dev", b"secret", b"changeme", b"default", b"password", b"test")


@dataclass(frozen=True)
class Station:
    """Where things are, and the keys that the server uses unattended."""

    folder: Path
    secret: bytes = field(repr=False)
    receipt: PrivateKey = field(repr=False)

    @property
    def trust(self) -> Path:
        return self.folder / "trust"

    @property
    def tls(self) -> Path:
        return self.folder / "tls"

    @property
    def database(self) -> Path:
        return self.folder / "fieldkit.db"

    @property
    def receipt_jwk(self) -> dict[str, str]:
        return keys.to_jwk(self.receipt.public_key())

    @property
    def authority_pem(self) -> str:
        """The signing authority's certificate, "" before the station is set up."""
        try:
            return certificates.to_pem(authority.certificate(self.trust))
        except Refusal:
            return ""


def data_folder(given: str | None = None) -> Path:
    """Where the data is: `given`, else $FIELDKIT_DATA, else the platform's place for a user's data."""
    chosen = given or os.environ.get("FIELDKIT_DATA")
    return Path(chosen).expanduser().resolve() if chosen else platformdirs.user_data_path("fieldkit", appauthor=False)


def open(folder: Path) -> Station:
    """The station in `folder`, its folder and unattended keys made at the first call. Raises Refusal weak-secret."""
    folder.mkdir(mode=0o700, parents=True, exist_ok=True)
    (folder / "trust").mkdir(mode=0o700, exist_ok=True)
    return Station(folder, _secret(folder / "secret"), receipts.key(folder / "trust"))


def _secret(path: Path) -> bytes:
    if not path.exists():
        keys.write_private(path, secrets.token_hex(SECRET_BYTES).encode())
    if os.name == "posix" and path.stat().st_mode & 0o077:
        raise Refusal("weak-secret", f"{path} can be read by others. Take their rights away: chmod 600 {path}")
    value = path.read_bytes().strip()
    if len(value) < SECRET_BYTES or any(value.startswith(word) for word in GUESSABLE):
        raise Refusal(
            "weak-secret", f"{path} holds a secret that can be guessed. Remove it; a new one is made at the start."
        )
    return value


def is_set_up() -> bool:
    return bool(settings.get("station"))


def set_up(actor: Actor, station: Station, name: str, passphrase: str, at: dt.datetime | None = None) -> None:
    """Name the station, make its signing authority under `passphrase`, and its seal. Administrator; once.

    Raises Refusal already-set-up, bad-name, short-passphrase.
    """
    require(actor, "administrator")
    if is_set_up():
        raise Refusal("already-set-up", "This station is set up already.")
    if not name.strip():
        raise Refusal("bad-name", "Give the station a name: it stands on every record.")
    at = at or moment.now()
    made = authority.create(station.trust, passphrase, name.strip(), at)
    seals.create(station.trust, made, at)
    settings.store_id()
    with writing() as session:
        settings.put(session, "station", name.strip())


def open_authority(station: Station, passphrase: str) -> Authority:
    """The signing authority, for as long as one operation takes. Raises Refusal wrong-passphrase, no-authority."""
    return authority.open(station.trust, passphrase)
