"""Enrolling a person's key: asked for on the tablet (or at the desk), issued by whoever opens the signing authority.

The key is made where it is used and never leaves there; here is its public half, and a proof that its holder asked.
"""

from __future__ import annotations

import datetime as dt
import json
import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from sqlalchemy import select
from sqlalchemy.orm import Session

from fieldkit.errors import Refusal
from fieldkit.operations import devices, moment, people, signin, station
from fieldkit.operations.actor import Actor, require
from fieldkit.operations.station import Station
from fieldkit.store.db import db, writing
from fieldkit.store.tables import Device, Enrolment, Person, PersonKey
from fieldkit.trust import authority, certificates, jws, keys

PROOF = "fieldkit-enrol"
#: what a desk browser proves instead of a tablet's id
DESK = "desk"
#: the roles that a certificate may say; the others sign nothing
SIGNING = ("technician", "supervisor")
_DEVICE = re.compile(r"[A-Za-z0-9_-]{4,64}")


@dataclass(frozen=True)
class Waiting:
    """An enrolment that an administrator has to decide."""

    id: str
    person: str
    name: str
    roles: tuple[str, ...]
    device: str | None
    device_name: str
    created: str
    thumbprint: str


@dataclass(frozen=True)
class Status:
    """What a tablet is told of its enrolment."""

    status: str
    certificate: str
    authority: str
    person: str
    note: str


@dataclass(frozen=True)
class Key:
    """An issued key."""

    kid: str
    person: str
    device: str | None
    certificate: str
    issued: str
    revoked: str | None


def ask(
    station: Station,
    login: str,
    password: str,
    where: str,
    device: Mapping[str, Any],
    person_jwk: Mapping[str, Any],
    proof: str,
) -> tuple[str, str]:
    """A tablet asks for a person's certificate; gives (enrolment id, person id). Asking again gives the same.

    Raises Refusal wrong-password, slow-down, bad-device, bad-key, revoked-device, no-signing-role, old-nonce, or
    bad-signature.
    """
    actor = signin.check_password(login, password, where)
    device_id, name = str(device.get("id", "")), str(device.get("name", "")).strip()
    if not _DEVICE.fullmatch(device_id) or not name or len(name) > 120 or not name.isprintable():
        raise Refusal("bad-device", "A tablet needs an id and a name of up to 120 characters, for example: tablet 3.")
    device_jwk = keys.to_jwk(keys.from_jwk(device.get("jwk")))
    _check_proof(station, person_jwk, proof, device_id)
    with writing() as session:
        _put_device(session, device_id, name, json.dumps(device_jwk, sort_keys=True))
        return _put(session, actor, device_id, person_jwk, proof), actor.id


def ask_at_desk(actor: Actor, station: Station, person_jwk: Mapping[str, Any], proof: str) -> str:
    """A supervisor's key in a desk browser, for countersigning. The proof's device is "desk". Supervisor."""
    require(actor, "supervisor")
    _check_proof(station, person_jwk, proof, DESK)
    with writing() as session:
        return _put(session, actor, None, person_jwk, proof)


def _check_proof(station: Station, person_jwk: Mapping[str, Any], proof: str, device: str) -> None:
    claims = jws.verify(proof, keys.from_jwk(person_jwk), PROOF).payload
    if not isinstance(claims, dict) or claims.get("device") != device:
        raise Refusal("bad-signature", "The proof of the new key is for another tablet. Enrol again.")
    devices.check_nonce(station, str(claims.get("nonce", "")))


def _put_device(session: Session, device: str, name: str, jwk: str) -> None:
    row = session.get(Device, device)
    if row is None:
        session.add(Device(id=device, name=name, jwk=jwk, status="waiting", created=moment.text()))
        session.flush()
    elif row.status == "revoked":
        raise Refusal("revoked-device", "This tablet was put out of use. Clear it, then enrol it anew.")
    elif row.jwk != jwk:
        raise Refusal("bad-device", "Another tablet has this id. Clear this one's storage, then enrol it anew.")


def _put(session: Session, actor: Actor, device: str | None, person_jwk: Mapping[str, Any], proof: str) -> str:
    if not actor.may(*SIGNING):
        raise Refusal(
            "no-signing-role", f"{actor.name} is neither technician nor supervisor, so there is nothing to sign."
        )
    jwk = json.dumps(keys.to_jwk(keys.from_jwk(person_jwk)), sort_keys=True)
    same = session.scalar(
        select(Enrolment).where(
            Enrolment.person == actor.id, Enrolment.person_jwk == jwk, Enrolment.status != "refused"
        )
    )
    if same is not None:
        return same.id
    taken = session.scalar(select(Enrolment.id).where(Enrolment.person_jwk == jwk, Enrolment.person != actor.id))
    if taken is not None:
        raise Refusal("taken", "This key belongs to somebody else. Every person makes their own.")
    row = Enrolment(
        id=moment.fresh("enrolment"),
        person=actor.id,
        device=device,
        person_jwk=jwk,
        proof=proof,
        status="waiting",
        created=moment.text(),
    )
    session.add(row)
    return row.id


def status(station: Station, enrolment: str, device: str | None) -> Status:
    """What became of an enrolment of this tablet (None: of the desk). Raises Refusal not-found."""
    row = db.session.get(Enrolment, enrolment)
    if row is None or row.device != device:
        raise Refusal("not-found", "That enrolment was not asked for from here.")
    key = db.session.get(PersonKey, row.kid) if row.kid else None
    pem = station.authority_pem if key else ""
    return Status(row.status, key.certificate if key else "", pem, row.person, row.note)


def waiting() -> list[Waiting]:
    """What an administrator has to decide, oldest first."""
    query = (
        select(Enrolment, Person, Device)
        .join(Person, Person.id == Enrolment.person)
        .outerjoin(Device, Device.id == Enrolment.device)
        .where(Enrolment.status == "waiting")
        .order_by(Enrolment.created)
    )
    return [
        Waiting(
            row.id,
            person.id,
            person.name,
            tuple(json.loads(person.roles)),
            row.device,
            device.name if device else "a browser at the desk",
            row.created,
            keys.thumbprint(json.loads(row.person_jwk)),
        )
        for row, person, device in db.session.execute(query)
    ]


def issue(
    actor: Actor, held: Station, enrolment: str, passphrase: str, note: str, at: dt.datetime | None = None
) -> str:
    """Open the signing authority and issue the certificate; gives its kid. Administrator.

    `note` says how the person was known to be who they are. Issuing again gives the same certificate.
    Raises Refusal not-found, wrong-passphrase, no-reason, already-refused.
    """
    require(actor, "administrator")
    if not note.strip():
        raise Refusal("no-reason", "Say how you know that this person asked, for example: known in person.")
    opened = station.open_authority(held, passphrase)
    at = at or moment.now()
    with writing() as session:
        row = _decidable(session, enrolment)
        if row.kid:
            return row.kid
        person = people.line(session.get_one(Person, row.person))
        if not person.active:
            raise Refusal("not-found", f"{person.name} is out of use here.")
        roles = tuple(r for r in SIGNING if r in person.roles)
        if not roles:
            raise Refusal("no-signing-role", f"{person.name} is neither technician nor supervisor any more.")
        made = authority.issue_person(opened, person.name, person.id, json.loads(row.person_jwk), at, roles)
        kid = certificates.digest(made)
        session.add(
            PersonKey(
                kid=kid,
                person=person.id,
                device=row.device,
                certificate=certificates.to_pem(made),
                jwk=row.person_jwk,
                issued=moment.text(at),
            )
        )
        row.status, row.kid, row.note = "issued", kid, note.strip()
        row.decided, row.decided_by = moment.text(at), _known(session, actor)
        if row.device:
            device = session.get_one(Device, row.device)
            if device.status == "waiting":
                device.status = "admitted"
    return kid


def refuse(actor: Actor, enrolment: str, reason: str) -> None:
    """Administrator. Raises Refusal not-found, no-reason, already-issued."""
    require(actor, "administrator")
    if not reason.strip():
        raise Refusal("no-reason", "Say why; the person who asked will read it.")
    with writing() as session:
        row = _decidable(session, enrolment)
        if row.kid:
            raise Refusal("already-issued", "The certificate is issued already. Revoke the key instead.")
        row.status, row.note = "refused", reason.strip()
        row.decided, row.decided_by = moment.text(), _known(session, actor)


def revoke_key(actor: Actor, kid: str) -> None:
    """From now on the key signs nothing that counts. Administrator, or the person whose key it is."""
    with writing() as session:
        row = session.get(PersonKey, kid)
        if row is None:
            raise Refusal("not-found", "There is no such key here.")
        if row.person != actor.id:
            require(actor, "administrator")
        row.revoked = row.revoked or moment.text()


def keys_of(person: str | None = None, usable: bool = False) -> list[Key]:
    """Issued keys, of one person or of all, oldest first; with `usable` those that are not revoked."""
    query = select(PersonKey).order_by(PersonKey.issued, PersonKey.kid)
    if person is not None:
        query = query.where(PersonKey.person == person)
    if usable:
        query = query.where(PersonKey.revoked.is_(None))
    return [
        Key(row.kid, row.person, row.device, row.certificate, row.issued, row.revoked)
        for row in db.session.scalars(query)
    ]


def _decidable(session: Session, enrolment: str) -> Enrolment:
    row = session.get(Enrolment, enrolment)
    if row is None:
        raise Refusal("not-found", "There is no such enrolment.")
    if row.status == "refused":
        raise Refusal("already-refused", "That enrolment was refused. The person asks again from the tablet.")
    return row


def _known(session: Session, actor: Actor) -> str | None:
    """The actor's id where it is a person; None for the command line on the server."""
    return actor.id if session.get(Person, actor.id) else None
