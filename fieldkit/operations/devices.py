"""Tablets: challenges, signed requests, revoking. A tablet is known by its key; no cookie and no password is involved.

A nonce is made of the time and the server's secret, so none is stored; it is good for ten minutes. Every call that
changes something is idempotent, so one that is sent twice inside that time (browsers do) changes nothing again.
Not here: how a tablet becomes known (enrol.py).
"""

from __future__ import annotations

import hashlib
import hmac
import json
import secrets
import time
from dataclasses import dataclass

from sqlalchemy import select

from fieldkit.errors import Refusal
from fieldkit.operations import moment
from fieldkit.operations.actor import Actor, require
from fieldkit.operations.station import Station
from fieldkit.store.db import db, writing
from fieldkit.store.tables import Device, PersonKey
from fieldkit.trust import jws, keys

#: seconds that a nonce is good for, either way of the server's own clock
NONCE_SECONDS = 600
REQUEST = "fieldkit-request"


@dataclass(frozen=True)
class Tablet:
    """The tablet that made a request; status "waiting", "admitted" or "revoked"."""

    id: str
    name: str
    status: str
    created: str
    revoked: str | None = None
    revoked_why: str = ""


def challenge(station: Station, now: float | None = None) -> str:
    """A fresh nonce."""
    start = f"{int(now if now is not None else time.time())}.{secrets.token_hex(8)}"
    return f"{start}.{_seal(station, start)}"


def check_nonce(station: Station, nonce: str, now: float | None = None) -> None:
    """Raises Refusal old-nonce unless this server made the nonce within the last ten minutes."""
    start, _, mark = nonce.rpartition(".")
    made = start.partition(".")[0]
    at = now if now is not None else time.time()
    known = hmac.compare_digest(_seal(station, start), mark) and made.isdigit()
    if not known or abs(at - int(made)) > NONCE_SECONDS:
        raise Refusal("old-nonce", "The request is too old, or was meant for another server. Ask for a new challenge.")


def _seal(station: Station, start: str) -> str:
    return hmac.new(station.secret, b"nonce:" + start.encode(), hashlib.sha256).hexdigest()[:32]


def check_request(station: Station, token: str, method: str, path: str, body: bytes) -> Tablet:
    """The tablet that signed exactly this request, whatever its status.

    Raises Refusal unknown-device, bad-signature, old-nonce and those of trust.jws. `path` is with its query.
    """
    header, _, _, _ = jws.read(token)
    row = db.session.get(Device, str(header.get("kid", "")))
    if row is None:
        raise Refusal("unknown-device", "This tablet is not enrolled here. Enrol it while it is online.")
    claims = jws.verify(token, keys.from_jwk(json.loads(row.jwk)), REQUEST).payload
    wanted = {"method": method, "path": path, "body": hashlib.sha256(body).hexdigest()}
    if not isinstance(claims, dict) or any(claims.get(k) != v for k, v in wanted.items()):
        raise Refusal("bad-signature", "What the tablet signed is not what arrived. Send it again.")
    check_nonce(station, str(claims.get("nonce", "")))
    return _tablet(row)


def admit(tablet: Tablet) -> Tablet:
    """The tablet, if it may fetch and send. Raises Refusal waiting-device or revoked-device."""
    if tablet.status == "revoked":
        raise Refusal(
            "revoked-device", "This tablet was put out of use. What it holds stays; give it to an administrator."
        )
    if tablet.status == "waiting":
        raise Refusal("waiting-device", "This tablet waits for an administrator to issue its first certificate.")
    return tablet


def everything() -> list[Tablet]:
    return [_tablet(row) for row in db.session.scalars(select(Device).order_by(Device.name))]


def revoke(actor: Actor, device: str, why: str) -> None:
    """Put a tablet out of use with every key on it, from now on. Administrator.

    What it sends later is kept and shown; nothing of it is accepted. Raises Refusal not-found, no-reason.
    """
    require(actor, "administrator")
    if not why.strip():
        raise Refusal("no-reason", "Say why the tablet is put out of use.")
    with writing() as session:
        row = session.get(Device, device)
        if row is None:
            raise Refusal("not-found", f"There is no tablet {device!r} here.")
        if row.status == "revoked":
            return
        row.status, row.revoked, row.revoked_why = "revoked", moment.text(), f"{why.strip()} ({actor.name})"
        for key in session.scalars(select(PersonKey).where(PersonKey.device == device, PersonKey.revoked.is_(None))):
            key.revoked = row.revoked


def _tablet(row: Device) -> Tablet:
    return Tablet(row.id, row.name, row.status, row.created, row.revoked, row.revoked_why)
