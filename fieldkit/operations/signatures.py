"""Checking the signature inside a `signed` event against the certificates issued here.

A signature that does not hold is recorded with what disagrees and shown; the event is never dropped for it.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Any

from fieldkit.errors import Refusal
from fieldkit.operations import moment
from fieldkit.operations.station import Station
from fieldkit.run.events import Event
from fieldkit.store.db import db
from fieldkit.store.tables import PersonKey
from fieldkit.trust import authority, certificates, jws

TYPE = "fieldkit-signature"


@dataclass(frozen=True)
class Checked:
    """Whether a signature holds, by which key, and if not, why in one sentence."""

    holds: bool
    kid: str
    says: str


def check(station: Station, event: Event, sheet: str) -> Checked:
    """The signature in `event` (kind "signed") of a run on `sheet`."""
    token, kid = event.body.jws, ""
    try:
        claims = jws.claimed(token)
        at = _time(claims)
        found = jws.verify(token, authority.certificate(station.trust), TYPE, at)
        if found.certificate is None:
            raise Refusal("no-certificate", "It brings no certificate of its signer.")
        kid = certificates.digest(found.certificate)
        _check_key(kid, event.body.person, at)
        _check_claims(found.payload, event, sheet)
    except Refusal as bad:
        return Checked(False, kid, bad.sentence)
    return Checked(True, kid, "")


def _time(claims: Any) -> dt.datetime:
    try:
        return moment.read(claims["time"])
    except (KeyError, TypeError, ValueError) as exc:
        raise Refusal("no-time", "It does not say when it was made.") from exc


def _check_key(kid: str, person: str, at: dt.datetime) -> None:
    row = db.session.get(PersonKey, kid)
    if row is None:
        raise Refusal("unknown-key", "Its certificate was not issued here.")
    if row.person != person:
        raise Refusal("other-person", f"Its certificate is not of {person}.")
    if row.revoked is not None:
        when = "after" if at >= moment.read(row.revoked) else "before"
        raise Refusal(
            "revoked-key",
            f"Its key was revoked at {row.revoked}; it claims to be made {when} that, and arrived afterwards.",
        )


def _check_claims(claims: dict[str, Any], event: Event, sheet: str) -> None:
    wanted = {
        "run": event.head.run,
        "chain": event.head.chain,
        "seq": event.head.seq - 1,
        "head": event.head.prev,
        "sheet": sheet,
        "person": event.body.person,
        "meaning": event.body.meaning,
    }
    for name, value in wanted.items():
        if claims.get(name) != value:
            raise Refusal("other-claim", f"It signs {name} {claims.get(name)!r}, but stands over {value!r}.")
