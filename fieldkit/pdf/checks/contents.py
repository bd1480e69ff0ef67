"""Checks on what is attached: the files and their hashes, the chain of events, the people's signatures in it."""

from __future__ import annotations

import datetime as dt
import hashlib
from typing import Any

from fieldkit.errors import Refusal
from fieldkit.pdf import inside
from fieldkit.pdf.report import Unknown, Wrong
from fieldkit.pdf.subject import Subject
from fieldkit.run.events import Event
from fieldkit.trust import certificates, jws

SIGNATURE = "fieldkit-signature"
#: meanings that only a supervisor's certificate may carry
_SUPERVISORS = {"allowed"}


def attached(subject: Subject) -> str:
    """Every file that a record needs is attached, no other is, and each has the hash that the run names."""
    try:
        files = subject.files
        _ = subject.sheet if inside.SHEET in files else None
    except Unknown as exc:
        raise Wrong(str(exc)) from exc
    wrong = [f"{name} is not attached." for name in inside.REQUIRED if name not in files]
    pictures = inside.pictures(files)
    known = {*inside.REQUIRED, *(inside.picture(p) for p in pictures)}
    wrong += [f"{name} is attached but is no part of a record." for name in files if name not in known]
    wrong += [
        f"{inside.picture(p)} is not the picture that its name says." for p, d in pictures.items() if _sha(d) != p
    ]
    if not wrong:
        wrong += _named(subject, set(pictures))
    if wrong:
        raise Wrong(*wrong)
    return f"{len(files)} files, {len(pictures)} of them pictures."


def _named(subject: Subject, pictures: set[str]) -> list[str]:
    wrong = []
    if _sha(subject.file(inside.PROCEDURE)) != subject.sheet.source_sha256:
        wrong.append(f"{inside.PROCEDURE} is not the text that the sheet was compiled from.")
    started = _started(subject.events)
    if _sha(subject.file(inside.SHEET)) != started.body.sheet:
        wrong.append(f"{inside.SHEET} is not the sheet that the run was worked from.")
    taken = {e.body.sha256 for e in subject.events if e.head.kind == "pictured"}
    wrong += [f"{inside.picture(p)} was taken in the run but is not attached." for p in sorted(taken - pictures)]
    wrong += [f"{inside.picture(p)} is attached but was not taken in the run." for p in sorted(pictures - taken)]
    return wrong


def chain(subject: Subject) -> str:
    """The events are one unbroken chain from the sheet on."""
    subject.file(inside.EVENTS)
    try:
        events = subject.events
    except Unknown as exc:
        raise Wrong(str(exc)) from exc
    started = _started(events)
    wrong = []
    before = _sha(subject.file(inside.SHEET))
    for number, event in enumerate(events):
        if event.head.prev != before or event.head.seq != number:
            wrong.append(f"Event {event.head.seq} does not follow the one before it.")
            break
        if (event.head.run, event.head.chain) != (started.head.run, started.head.chain):
            wrong.append(f"Event {number} belongs to another run or chain.")
            break
        before = event.sha256
    if wrong:
        raise Wrong(*wrong)
    return f"{len(events)} events, head {before[:16]}."


def people(subject: Subject) -> str:
    """Everyone who recorded or allowed something signed for it, with their own key and the right meaning."""
    events = subject.events
    wrong: list[str] = []
    signed: dict[str, list[tuple[int, str]]] = {}
    for number, event in enumerate(events):
        if event.head.kind == "signed":
            try:
                _check_signed(subject, number, event)
                signed.setdefault(event.body.person, []).append((number, event.body.meaning))
            except Refusal as exc:
                wrong.append(f"Event {event.head.seq}, {event.body.person}: {exc.sentence}")
    wrong += _unsigned(events, signed) + _unallowed(events)
    if wrong:
        raise Wrong(*wrong)
    return f"{sum(len(s) for s in signed.values())} signatures by {', '.join(sorted(signed))}."


def _check_signed(subject: Subject, number: int, event: Event) -> None:
    """Nothing, when this signature is its person's over the head before it. Raises Refusal."""
    token = event.body.jws
    certificate = jws.certificate_of(token)
    if certificate is None:
        raise Refusal("no-certificate", "The signature brings no certificate of its signer.")
    payload = jws.verify(token, certificates.public_key(certificate), SIGNATURE).payload
    if not isinstance(payload, dict):
        raise Refusal("bad-payload", "The signature does not say what it covers.")
    before, started = subject.events[number - 1], _started(subject.events)
    expected: dict[str, Any] = {
        "run": event.head.run,
        "chain": event.head.chain,
        "seq": before.head.seq,
        "head": before.sha256,
        "sheet": started.body.sheet,
        "meaning": event.body.meaning,
        "person": event.body.person,
    }
    for key, value in expected.items():
        if payload.get(key) != value:
            raise Refusal("bad-payload", f"The signature covers another {key} than the event before it.")
    _check_signer(subject, certificate, payload)
    _check_pictures(subject.events[:number], payload)


def _check_signer(subject: Subject, certificate: certificates.Certificate, payload: dict[str, Any]) -> None:
    holder = certificates.holder(certificate)
    if holder.id != payload["person"] or holder.name != payload.get("name"):
        raise Refusal("other-person", f"The key is {holder.name or 'nobody'}'s.")
    if payload["meaning"] in _SUPERVISORS and "supervisor" not in holder.roles:
        raise Refusal("wrong-role", f"{holder.name} is no supervisor and cannot allow a deviation.")
    try:
        time = dt.datetime.fromisoformat(str(payload.get("time")))
    except ValueError as exc:
        raise Refusal("bad-time", "The signature claims no time.") from exc
    if time.tzinfo is None or subject.to_come(time):
        raise Refusal("bad-time", f"The signature claims a time that has not come yet: {payload['time']}.")
    if subject.authority is not None:
        certificates.check_chain(certificate, subject.authority, time)


def _check_pictures(before: list[Event], payload: dict[str, Any]) -> None:
    taken = {e.body.sha256 for e in before if e.head.kind == "pictured"}
    if set(payload.get("pictures") or ()) != taken:
        raise Refusal("other-pictures", "The signature covers other pictures than were taken by then.")


def _unsigned(events: list[Event], signed: dict[str, list[tuple[int, str]]]) -> list[str]:
    """Whoever recorded events must have signed after the last of them; the end must be signed as performed."""
    last: dict[str, int] = {}
    for number, event in enumerate(events):
        if event.head.kind != "signed":
            last[event.head.by] = number
    wrong = []
    for person, number in last.items():
        if not any(at > number for at, _ in signed.get(person, ())):
            wrong.append(f"{person} did not sign for event {events[number].head.seq}, the last that they recorded.")
    ends = [n for n, e in enumerate(events) if e.head.kind in ("ended", "voided")]
    if not ends:
        wrong.append("The run was not ended.")
    elif not any(m == "performed" and at > ends[-1] for s in signed.values() for at, m in s):
        wrong.append("Nobody signed the end of the run as performed.")
    return wrong


def _unallowed(events: list[Event]) -> list[str]:
    """Who released, allowed or unlocked signs at once; a release and a deviation take another than the recorder."""
    wrong = []
    for number, event in enumerate(events):
        who, meaning = _second(event)
        if not who:
            continue
        following = events[number + 1] if number + 1 < len(events) else None
        fits = (
            following is not None
            and following.head.kind == "signed"
            and (following.body.person, following.body.meaning) == (who, meaning)
        )
        if not fits:
            wrong.append(f"Event {event.head.seq} names {who}, whose signature does not follow it.")
        elif who == event.head.by and meaning != "unlocked":
            wrong.append(f"Event {event.head.seq} was {meaning} by {who}, who recorded it.")
    return wrong


def _second(event: Event) -> tuple[str, str]:
    if event.head.kind == "released":
        return event.body.who, "released"
    if event.head.kind == "went-on" and event.body.authority:
        return event.body.authority, "allowed"
    if event.head.kind == "unlocked":
        return event.body.who, "unlocked"
    return "", ""


def _started(events: list[Event]) -> Event:
    if not events or events[0].head.kind != "run-started":
        raise Unknown("The events do not begin with the start of a run.")
    return events[0]


def _sha(data: bytes) -> str:
    return hashlib.sha256(data).hexdigest()
