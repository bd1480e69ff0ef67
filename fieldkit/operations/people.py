"""People: added, given roles, put out of use. An id is never given again and a row never removed.

Not here: signing in (signin.py), keys and certificates (enrol.py).
"""

from __future__ import annotations

import json
import re
from dataclasses import dataclass

from argon2 import PasswordHasher
from argon2.exceptions import InvalidHashError, VerificationError
from sqlalchemy import delete, select
from sqlalchemy.orm import Session

from fieldkit.errors import Refusal
from fieldkit.operations import moment
from fieldkit.operations.actor import ROLES, Actor, require
from fieldkit.store.db import db, writing
from fieldkit.store.tables import Person, SignedIn

#: argon2id; the OWASP Password Storage Cheat Sheet, 2026, asks for at least 19 MiB, 2 passes, 1 lane
HASHER = PasswordHasher(time_cost=2, memory_cost=19 * 1024, parallelism=1)
SHORTEST, LONGEST = 10, 200
_LOGIN = re.compile(r"[a-z][a-z0-9._-]{1,31}")


@dataclass(frozen=True)
class PersonLine:
    """One person as a list shows them."""

    id: str
    login: str
    name: str
    roles: tuple[str, ...]
    active: bool


def line(row: Person) -> PersonLine:
    return PersonLine(row.id, row.login, row.name, tuple(json.loads(row.roles)), row.active)


def everyone() -> list[PersonLine]:
    return [line(row) for row in db.session.scalars(select(Person).order_by(Person.name))]


def get(person: str) -> PersonLine:
    """Raises Refusal not-found."""
    row = db.session.get(Person, person)
    if row is None:
        raise Refusal("not-found", f"There is no person {person!r} here.")
    return line(row)


def add(actor: Actor, login: str, name: str, roles: tuple[str, ...], password: str, id: str | None = None) -> str:
    """A new person; gives their id (the login, unless `id` says another). Administrator.

    Raises Refusal bad-login, taken, bad-name, bad-role, short-password.
    """
    require(actor, "administrator")
    login, name = login.strip().lower(), name.strip()
    if not _LOGIN.fullmatch(login):
        raise Refusal(
            "bad-login", "A sign-in name has 2 to 32 small letters, digits, dots or dashes, and starts with a letter."
        )
    if not name or len(name) > 120 or not name.isprintable():
        raise Refusal("bad-name", "Give the name as it is to stand on records, up to 120 characters.")
    roles = _roles(roles)
    hashed = hash_password(password)
    with writing() as session:
        person = id or login
        taken = session.scalar(select(Person).where((Person.login == login) | (Person.id == person)))
        if taken is not None:
            raise Refusal(
                "taken", f"{login!r} is, or was, somebody else here. Names are never given again; choose another."
            )
        row = Person(id=person, login=login, name=name, roles=json.dumps(roles), password=hashed, created=moment.text())
        session.add(row)
    return person


def set_roles(actor: Actor, person: str, roles: tuple[str, ...]) -> None:
    """Administrator. Nobody takes the role of administrator from themselves: somebody must hold it."""
    require(actor, "administrator")
    roles = _roles(roles)
    if person == actor.id and "administrator" not in roles:
        raise Refusal("last-administrator", "Ask another administrator to take this role from you.")
    with writing() as session:
        _get(session, person).roles = json.dumps(roles)


def set_active(actor: Actor, person: str, active: bool) -> None:
    """Put a person out of use, or back; their sessions end at once. Administrator."""
    require(actor, "administrator")
    if person == actor.id and not active:
        raise Refusal("last-administrator", "Ask another administrator to put you out of use.")
    with writing() as session:
        _get(session, person).active = active
        if not active:
            end_sessions(session, person)


def set_password(actor: Actor, person: str, password: str) -> None:
    """The person themselves, or an administrator; every session of that person ends.

    It is the password of the desk. The passphrase that holds a person's signing key is theirs alone and never here.
    """
    if actor.id != person:
        require(actor, "administrator")
    hashed = hash_password(password)
    with writing() as session:
        _get(session, person).password = hashed
        end_sessions(session, person)


def end_sessions(session: Session, person: str) -> None:
    session.execute(delete(SignedIn).where(SignedIn.person == person))


def hash_password(password: str) -> str:
    """Raises Refusal short-password."""
    if not SHORTEST <= len(password) <= LONGEST:
        raise Refusal("short-password", f"A password has {SHORTEST} to {LONGEST} characters. Four words do well.")
    return HASHER.hash(password)


def fits(hashed: str, password: str) -> bool:
    try:
        return HASHER.verify(hashed, password)
    except (VerificationError, InvalidHashError):
        return False


def _get(session: Session, person: str) -> Person:
    row = session.get(Person, person)
    if row is None:
        raise Refusal("not-found", f"There is no person {person!r} here.")
    return row


def _roles(roles: tuple[str, ...]) -> tuple[str, ...]:
    unknown = [r for r in roles if r not in ROLES]
    if unknown or not roles:
        raise Refusal("bad-role", f"Give at least one role out of {', '.join(ROLES)}.")
    return tuple(r for r in ROLES if r in roles)
