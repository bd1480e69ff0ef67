"""The signing authority of a station: it issues the certificates of people and of the seal, and nothing else.

Its key lies in the folder encrypted under a passphrase that the server does not keep, so that an intruder on the
server cannot mint a supervisor. `open` it for as long as one enrolment takes. Not here: TLS (tls.py).
"""

from __future__ import annotations

import datetime as dt
import secrets
from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from fieldkit.errors import Refusal
from fieldkit.trust import certificates, keys
from fieldkit.trust.certificates import Certificate, Holder
from fieldkit.trust.keys import PrivateKey, PublicKey

KEY, CERTIFICATE = "signing-authority.key", "signing-authority.pem"


@dataclass(frozen=True)
class Authority:
    """An opened signing authority. Keep it no longer than the one thing it was opened for."""

    station: str
    certificate: Certificate
    key: PrivateKey = field(repr=False)


def create(folder: Path, passphrase: str, station: str, now: dt.datetime) -> Authority:
    """Make the authority of `station` in `folder`: its key under `passphrase` (0600) and its certificate.

    Raises Refusal authority-exists or short-passphrase; then nothing was written.
    """
    folder.mkdir(parents=True, exist_ok=True)
    if (folder / KEY).exists() or (folder / CERTIFICATE).exists():
        raise Refusal("authority-exists", f"{folder} already holds a signing authority; it is never replaced.")
    key = keys.new()
    # The suffix keeps two authorities of one station apart in a trust store.
    name = f"{station} signing authority {secrets.token_hex(3)}"
    certificate = certificates.make_authority(key, name, station, now)
    held = keys.held_pem(key, passphrase)
    keys.write_private(folder / KEY, held)
    (folder / CERTIFICATE).write_text(certificates.to_pem(certificate), encoding="ascii")
    return Authority(station, certificate, key)


def certificate(folder: Path) -> Certificate:
    """The authority's certificate; needs no passphrase. Raises Refusal no-authority."""
    path = folder / CERTIFICATE
    if not path.exists():
        raise Refusal("no-authority", f"{folder} holds no signing authority yet. Set the station up first.")
    return certificates.from_pem(path.read_bytes())


def open(folder: Path, passphrase: str) -> Authority:
    """The authority in `folder`. Raises Refusal no-authority, wrong-passphrase or damaged-key."""
    known = certificate(folder)
    path = folder / KEY
    if not path.exists():
        raise Refusal("no-authority", f"{path} is missing. Restore it from the backup.")
    key = keys.load(path.read_bytes(), passphrase, str(path))
    if key.public_key() != certificates.public_key(known):
        raise Refusal("damaged-key", f"{path} does not belong to the certificate beside it.")
    return Authority(certificates.holder(known).station, known, key)


def issue_person(
    authority: Authority,
    name: str,
    person_id: str,
    public_jwk: dict[str, Any],
    now: dt.datetime,
    roles: Sequence[str] = ("technician",),
) -> Certificate:
    """A certificate for one person on one tablet or browser. `roles` are attested: "technician", "supervisor".

    Raises Refusal bad-key, bad-name or bad-role.
    """
    if not roles or certificates.SEAL in roles or any("," in r or not r.strip() for r in roles):
        raise Refusal("bad-role", "Give the person at least one role of their own: technician or supervisor.")
    holder = Holder(name, person_id, tuple(roles), authority.station)
    return _issue(authority, keys.from_jwk(public_jwk), holder, now, certificates.PERSON_YEARS)


def issue_seal(authority: Authority, public: PublicKey, now: dt.datetime) -> Certificate:
    """The certificate of the station's seal."""
    holder = Holder(f"{authority.station} seal", "seal", (certificates.SEAL,), authority.station)
    return _issue(authority, public, holder, now, certificates.SEAL_YEARS)


def _issue(authority: Authority, public: PublicKey, holder: Holder, now: dt.datetime, count: int) -> Certificate:
    return certificates.make_leaf(authority.key, authority.certificate, public, holder, now, count)
