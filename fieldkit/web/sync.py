"""The tablet's calls for its kit, its events and its pictures: signed by its key, no cookie, no token, no redirect.

An answer that is not JSON with `X-Fieldkit: 1` is no answer of this server, whatever its status says.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import asdict

from flask import Blueprint, Response, request

from fieldkit.errors import Refusal
from fieldkit.operations import kit, pictures, records, sync
from fieldkit.web import step_form, wire
from fieldkit.web.app import here
from fieldkit.web.security import SANDBOX, device

blueprint = Blueprint("sync", __name__)
TABLET_CALLS = True

#: bytes of one batch of events
BATCH = 512 * 1024
NAME = re.compile(r"[A-Za-z0-9][A-Za-z0-9._-]{0,79}")
CHAIN = re.compile(r"[A-Za-z0-9_-]{4,64}\.[A-Za-z0-9_-]{1,64}")
SHA256 = re.compile(r"[0-9a-f]{64}")


def _named(value: str, form: re.Pattern[str], what: str) -> str:
    if not form.fullmatch(value):
        raise Refusal("damaged-request", f"{value[:80]!r} is not {what}.")
    return value


@blueprint.get("/api/kit")
@device
def manifest() -> Response:
    """The manifest as a JWS, in a JSON answer like all others."""
    wire.tablet()
    return wire.answer(manifest=kit.make(here(), step_form.controls_html()))


@blueprint.get("/api/blob/<sha256>")
@device
def blob(sha256: str) -> Response:
    wire.tablet()
    data, media = kit.blob(_named(sha256, SHA256, "a SHA-256"))
    response = Response(data, content_type=media)
    response.headers["X-Fieldkit"] = "1"
    # whatever it is, it is data: opened by itself it may do nothing
    response.headers["Content-Security-Policy"] = SANDBOX
    response.headers["Content-Disposition"] = "attachment"
    return response


@blueprint.get("/api/runs/<run>/head")
@device
def head(run: str) -> Response:
    wire.tablet()
    chain = _named(request.args.get("chain", ""), CHAIN, "a chain")
    seq, digest = sync.head(_named(run, NAME, "a run"), chain)
    return wire.answer(seq=seq, head=digest)


@blueprint.post("/api/runs/<run>/events")
@device
def events(run: str) -> Response:
    """Take a batch. The receipt is made after the commit; without one nothing counts as received."""
    data = wire.body(BATCH)
    tablet = wire.tablet(data, admitted=False)
    found = wire.parsed(data)
    chain = _named(wire.member(found, "chain", str), CHAIN, "a chain")
    texts = wire.member(found, "events", list)
    if not all(isinstance(text, str) for text in texts):
        raise Refusal("damaged-request", "Events travel as the texts that the tablet made.")
    if tablet.status == "waiting":
        raise Refusal("waiting-device", "This tablet waits for an administrator to issue its first certificate.")
    done = sync.accept(here(), tablet, _named(run, NAME, "a run"), chain, texts)
    receipt = sync.receipt(here(), run, chain)
    content = {"receipt": receipt, "have": done.have, "kept": [asdict(one) for one in done.kept]}
    if tablet.status == "revoked":
        return _refused(
            403, "revoked-device", "This tablet was put out of use. What it sent is kept and shown.", content
        )
    if done.forked:
        says = next(one.says for one in done.kept if one.code == "forked-chain")
        return _refused(409, "forked-chain", says, content)
    return wire.answer(**content)


def _refused(status: int, code: str, says: str, content: Mapping[str, object]) -> Response:
    response = wire.answer(refused={"code": code, "says": says}, **content)
    response.status_code = status
    return response


@blueprint.put("/api/pictures/<sha256>")
@device
def picture(sha256: str) -> Response:
    data = wire.body(pictures.LARGEST)
    tablet = wire.tablet(data)
    receipt = sync.picture(here(), tablet, _named(sha256, SHA256, "a SHA-256"), data)
    return wire.answer(sha256=sha256, size=len(data), receipt=receipt)


@blueprint.get("/api/inbox")
@device
def inbox() -> Response:
    return wire.answer(**asdict(records.inbox(wire.tablet().id)))
