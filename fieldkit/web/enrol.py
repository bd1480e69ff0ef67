"""The tablet's calls around enrolment: a challenge, asking for a certificate, and what became of it."""

from __future__ import annotations

from flask import Blueprint, Response, request

from fieldkit.operations import devices, enrol, moment, settings
from fieldkit.web import wire
from fieldkit.web.app import here
from fieldkit.web.security import device, public

blueprint = Blueprint("enrol", __name__)
TABLET_CALLS = True
LIMIT = 32 * 1024


@blueprint.get("/api/challenge")
@public
def challenge() -> Response:
    return wire.answer(nonce=devices.challenge(here()), store=settings.store_id(), time=moment.text())


@blueprint.post("/api/enrol")
@public
def ask() -> Response:
    """A person's password admits the question; the certificate needs an administrator."""
    found = wire.parsed(wire.body(LIMIT))
    made, person = enrol.ask(
        here(),
        wire.member(found, "name", str),
        wire.member(found, "password", str),
        request.remote_addr or "",
        wire.member(found, "device", dict),
        wire.member(found, "person_jwk", dict),
        wire.member(found, "proof", str),
    )
    return wire.answer(enrolment=made, person=person, status=enrol.status(here(), made, found["device"]["id"]).status)


@blueprint.get("/api/enrolment/<enrolment>")
@device
def status(enrolment: str) -> Response:
    found = enrol.status(here(), enrolment, wire.tablet(admitted=False).id)
    return wire.answer(
        status=found.status,
        certificate=found.certificate,
        authority=found.authority,
        person=found.person,
        note=found.note,
    )
