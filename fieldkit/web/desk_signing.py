"""Countersigning in a browser: this browser's key, the prepared file, the signature. Called by static/desk/*.js.

    GET  /desk/key                            this browser's key, made here under a passphrase
    POST /desk/key                            {"person_jwk", "proof"} -> {"enrolment"}
    GET  /desk/key/<enrolment>                {"status", "certificate", "authority", "person", "note"}
    GET  /desk/records/<run>/countersign      the page
    POST /desk/records/<run>/prepare          {"kid", "paper"} -> what is to be signed
    GET  /desk/prepared/<preparation>         the file that it belongs to
    POST /desk/prepared/<preparation>/finish  {"signature"} -> {"run"}

The JSON calls carry the session's cookie, so they need the page's CSRF token (X-CSRFToken).
"""

from __future__ import annotations

import base64
import binascii
from collections.abc import Callable
from functools import wraps
from typing import Any

from flask import Blueprint, Response, jsonify, render_template, request, url_for
from flask.typing import ResponseReturnValue

from fieldkit.errors import Refusal
from fieldkit.operations import devices, enrol, review
from fieldkit.operations.dossier import dossier
from fieldkit.web import errors
from fieldkit.web.app import here
from fieldkit.web.security import actor, allowed

PAPERS = ("A4", "Letter")
#: a JSON body here holds a key or a signature, nothing larger
LIMIT = 32 * 1024
SUPERVISOR = allowed("supervisor")
View = Callable[..., ResponseReturnValue]


def join(blueprint: Blueprint) -> None:
    """Add these views to the desk's."""
    blueprint.add_url_rule("/key", "key", key)
    blueprint.add_url_rule("/key", "ask_for_key", ask_for_key, methods=["POST"])
    blueprint.add_url_rule("/key/<enrolment>", "key_status", key_status)
    blueprint.add_url_rule("/records/<run>/countersign", "countersign", countersign)
    blueprint.add_url_rule("/records/<run>/prepare", "prepare", prepare, methods=["POST"])
    blueprint.add_url_rule("/prepared/<preparation>", "prepared", prepared)
    blueprint.add_url_rule("/prepared/<preparation>/finish", "finish", finish, methods=["POST"])


def _json(view: View) -> View:
    """A refusal is answered as JSON: these calls come from a script, not from a form."""

    @wraps(view)
    def answer(*args: Any, **named: Any) -> ResponseReturnValue:
        try:
            return view(*args, **named)
        except Refusal as bad:
            return errors.refused(bad.code, bad.sentence, errors.STATUS.get(bad.code, 422))

    return answer


def _text(name: str) -> str:
    found = _body().get(name)
    if not isinstance(found, str):
        raise Refusal("bad-request", f"The request lacks {name}.")
    return found


def _body() -> dict[str, Any]:
    if (request.content_length or 0) > LIMIT:
        raise Refusal("too-large", "That is larger than what is taken here at once.")
    found = request.get_json(silent=True)
    if not isinstance(found, dict):
        raise Refusal("bad-request", "The request is not a JSON object.")
    return found


@SUPERVISOR
def key() -> ResponseReturnValue:
    return render_template(
        "desk/key.html", person=actor().id, nonce=devices.challenge(here()), keys=enrol.keys_of(actor().id, usable=True)
    )


@SUPERVISOR
@_json
def ask_for_key() -> ResponseReturnValue:
    jwk = _body().get("person_jwk")
    if not isinstance(jwk, dict):
        raise Refusal("bad-request", "The request lacks person_jwk.")
    return jsonify(enrolment=enrol.ask_at_desk(actor(), here(), jwk, _text("proof")))


@SUPERVISOR
@_json
def key_status(enrolment: str) -> ResponseReturnValue:
    found = enrol.status(here(), enrolment, None)
    if found.person != actor().id:
        raise Refusal("not-found", "That enrolment was not asked for from here.")
    return jsonify(
        status=found.status,
        certificate=found.certificate,
        authority=found.authority,
        person=found.person,
        note=found.note,
    )


@SUPERVISOR
def countersign(run: str) -> ResponseReturnValue:
    found = dossier(run, review.Reviewer(id=actor().id, name=actor().name))
    for bad in (review.refusal(actor(), found), review.unsound(found)):
        if bad is not None:
            raise bad
    return render_template("desk/countersign.html", r=found.record, person=actor().id)


@SUPERVISOR
@_json
def prepare(run: str) -> ResponseReturnValue:
    paper = _text("paper")
    if paper not in PAPERS:
        raise Refusal("bad-request", "The paper is A4 or Letter.")
    made = review.prepare(actor(), here(), run, _text("kid"), "Letter" if paper == "Letter" else "A4")
    return jsonify(
        id=made.id,
        to_sign=base64.b64encode(made.to_sign).decode(),
        start=made.start,
        end=made.end,
        sealed=made.sealed,
        length=made.length,
        pdf_sha256=made.pdf_sha256,
        kid=made.kid,
        file=url_for("desk.prepared", preparation=made.id),
        finish=url_for("desk.finish", preparation=made.id),
    )


@SUPERVISOR
def prepared(preparation: str) -> Response:
    response = Response(review.prepared_pdf(actor(), preparation), content_type="application/pdf")
    response.headers["Content-Disposition"] = f'inline; filename="to-sign-{preparation}.pdf"'
    return response


@SUPERVISOR
@_json
def finish(preparation: str) -> ResponseReturnValue:
    try:
        signature = base64.b64decode(_text("signature"), validate=True)
    except binascii.Error as exc:
        raise Refusal("bad-signature", "The signature is not base64.") from exc
    run = review.finish(actor(), preparation, signature)
    return jsonify(run=run, record=url_for("desk.record", run=run), file=url_for("desk.countersigned_file", run=run))
