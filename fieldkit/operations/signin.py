"""Signing in at the desk, and out again. Wrong passwords slow the next try down and lock nobody out.

A session is a row, found by the SHA-256 of a random id that only the cookie holds; it is new at every sign-in and gone
at sign-out. Not here: the cookie (fieldkit.web.sessions).
"""

from __future__ import annotations

import datetime as dt
import hashlib
import json
import secrets

from sqlalchemy import delete, select

from fieldkit.errors import Refusal
from fieldkit.operations import moment, notices, people
from fieldkit.operations.actor import Actor
from fieldkit.store.db import db, writing
from fieldkit.store.tables import Miss, Person, SignedIn

#: a session ends this long after it was last used, and this long after it began
IDLE = dt.timedelta(hours=2)
LONGEST = dt.timedelta(hours=12)
#: `seen` is written at most this often, so that reading a page is not a write
FRESH = dt.timedelta(minutes=5)
#: wrong tries before the first wait; the wait doubles from one second up to the cap
FREE = 4
#: a miss is forgotten after this
FORGOTTEN = dt.timedelta(minutes=15)
#: seconds; the same account from the same address, and one account from anywhere (kept short: nobody is locked out)
CAP_HERE, CAP_ACCOUNT, FREE_ACCOUNT = 60.0, 5.0, 20

#: an administrator is told of an account when its wrong tries reach one of these
ALARMING = (10, 100, 1000)

#: compared with when there is no such person, so that the answer takes as long
_NOBODY = people.HASHER.hash(secrets.token_hex(16))


def check_password(login: str, password: str, where: str, at: dt.datetime | None = None) -> Actor:
    """The person, when name and password fit. Raises Refusal wrong-password, or slow-down with `seconds` to wait.

    `where` is the address that the try comes from.
    """
    at = at or moment.now()
    login = login.strip().lower()[:64]
    keys = ((f"{login}|{where}", FREE, CAP_HERE), (f"{login}|", FREE_ACCOUNT, CAP_ACCOUNT))
    wait = max(_wait(key, free, cap, at) for key, free, cap in keys)
    if wait > 0:
        seconds = int(wait) + 1
        raise Refusal("slow-down", f"Too many wrong tries. Wait {seconds} s, then try again.", seconds=seconds)
    row = db.session.scalar(select(Person).where(Person.login == login))
    fits = people.fits(row.password if row else _NOBODY, password[: people.LONGEST])
    if row is None or not fits or not row.active:
        _missed(login, where, [key for key, _, _ in keys], at)
        raise Refusal("wrong-password", "That name and password do not fit together. Nothing is locked; try again.")
    actor = Actor(row.id, row.name, tuple(json.loads(row.roles)))
    hashed = people.hash_password(password) if people.HASHER.check_needs_rehash(row.password) else None
    with writing() as session:
        session.execute(delete(Miss).where(Miss.key == keys[0][0]))
        if hashed:
            session.get_one(Person, actor.id).password = hashed
    return actor


def sign_in(login: str, password: str, where: str, at: dt.datetime | None = None) -> tuple[Actor, str]:
    """The person and a fresh session's random id, for the cookie. Raises as `check_password`."""
    at = at or moment.now()
    actor = check_password(login, password, where, at)
    token = secrets.token_urlsafe(32)
    with writing() as session:
        session.execute(delete(SignedIn).where(SignedIn.created < moment.text(at - LONGEST)))
        session.add(SignedIn(id=_digest(token), person=actor.id, created=moment.text(at), seen=moment.text(at)))
    return actor, token


def who(token: str, at: dt.datetime | None = None) -> Actor | None:
    """The person signed in under the cookie's id, or None: unknown, too old, or the person is out of use."""
    at = at or moment.now()
    row = db.session.get(SignedIn, _digest(token))
    if row is None or moment.read(row.seen) < at - IDLE or moment.read(row.created) < at - LONGEST:
        return None
    person = db.session.get_one(Person, row.person)
    if not person.active:
        return None
    actor = Actor(person.id, person.name, tuple(json.loads(person.roles)))
    if moment.read(row.seen) < at - FRESH:
        with writing() as session:
            found = session.get(SignedIn, _digest(token))
            if found is not None:
                found.seen = moment.text(at)
    return actor


def sign_out(token: str) -> None:
    with writing() as session:
        session.execute(delete(SignedIn).where(SignedIn.id == _digest(token)))


def _digest(token: str) -> str:
    return hashlib.sha256(token.encode()).hexdigest()


def _wait(key: str, free: int, cap: float, at: dt.datetime) -> float:
    """Seconds until the next try under `key` is looked at."""
    row = db.session.get(Miss, key)
    if row is None or row.count < free or moment.read(row.last) < at - FORGOTTEN:
        return 0.0
    pause = min(2.0 ** min(row.count - free, 10), cap)
    return pause - (at - moment.read(row.last)).total_seconds()


def _missed(login: str, where: str, keys: list[str], at: dt.datetime) -> None:
    with writing() as session:
        session.execute(delete(Miss).where(Miss.last < moment.text(at - FORGOTTEN)))
        for key in keys:
            row = session.get(Miss, key)
            if row is None:
                session.add(Miss(key=key, count=1, last=moment.text(at)))
            else:
                row.count, row.last = row.count + 1, moment.text(at)
                if key == keys[-1] and row.count in ALARMING:
                    says = f"{row.count} wrong passwords in a row, the last from {where or 'nowhere known'}."
                    notices.add(session, "sign-in", says, f"{login} {moment.text(at)}")
