"""How anything bad is answered: a page for the desk, JSON for the tablet's calls, never a redirect for the latter.

A Refusal's code decides the status; a code that is not listed is 422: understood, and not possible as asked.
"""

from __future__ import annotations

from typing import Any

from flask import Flask, Response, current_app, flash, jsonify, redirect, render_template, request, url_for
from flask.typing import ResponseReturnValue
from flask_wtf.csrf import CSRFError
from werkzeug.exceptions import HTTPException

from fieldkit.errors import Refusal

STATUS = {
    "not-signed-in": 401,
    "unknown-device": 401,
    "bad-signature": 401,
    "bad-token": 401,
    "wrong-type": 401,
    "old-nonce": 401,
    "wrong-password": 401,
    "not-allowed": 403,
    "cross-site": 403,
    "form-too-old": 400,
    "revoked-device": 403,
    "waiting-device": 403,
    "wrong-passphrase": 403,
    "not-found": 404,
    "forked-chain": 409,
    "taken": 409,
    "changed-meanwhile": 409,
    "too-large": 413,
    "not-a-picture": 415,
    "wrong-media": 415,
    "slow-down": 429,
}

SAYS = {
    400: ("bad-request", "The request cannot be read."),
    404: ("not-found", "There is nothing here under that address."),
    405: ("wrong-method", "That cannot be done with this address."),
    413: ("too-large", "That is larger than what is taken here at once."),
    415: ("wrong-media", "That kind of content is not taken here."),
}


def is_api() -> bool:
    return request.path.startswith("/api/")


def refused(code: str, says: str, status: int, **more: Any) -> Response:
    """The one form of an error on the wire; `more` stands beside code and sentence."""
    response = jsonify({"refused": {"code": code, "says": says, **more}})
    response.status_code = status
    response.headers["X-Fieldkit"] = "1"
    return response


def _page(code: str, says: str, status: int) -> ResponseReturnValue:
    return render_template("errors/refused.html", code=code, says=says, status=status), status


def _answer(code: str, says: str, status: int, **more: Any) -> ResponseReturnValue:
    return refused(code, says, status, **more) if is_api() else _page(code, says, status)


def on_refusal(bad: Refusal) -> ResponseReturnValue:
    status = STATUS.get(bad.code, 422)
    if bad.code == "not-signed-in" and not is_api() and request.method == "GET":
        return redirect(url_for("signin.page", then=request.full_path.rstrip("?")))
    wait = {"wait_s": bad.detail["seconds"]} if "seconds" in bad.detail else {}
    answer = current_app.make_response(_answer(bad.code, bad.sentence, status, **wait))
    if wait:
        answer.headers["Retry-After"] = str(wait["wait_s"])
    return answer


def on_csrf(_bad: CSRFError) -> ResponseReturnValue:
    says = (
        "This form was open for too long, or did not come from this site. Load the page again, and send it once more."
    )
    return _answer("form-too-old", says, 400)


def on_http(bad: HTTPException) -> ResponseReturnValue:
    status = bad.code or 500
    code, says = SAYS.get(status, ("not-possible", bad.description or "That is not possible."))
    return _answer(code, says, status) if status >= 400 else bad


def on_fault(bad: Exception) -> ResponseReturnValue:
    """A fault of this program: written to the log, and said plainly."""
    current_app.logger.error("fault at %s %s", request.method, request.path, exc_info=bad)
    return _answer(
        "fault", "Something is wrong in fieldkit itself. What was stored is untouched; the log says more.", 500
    )


def tell(bad: Refusal) -> None:
    """Show a refusal on the page that follows, where a form is to be filled in again."""
    flash(bad.sentence, "refused")


def start(app: Flask) -> None:
    app.register_error_handler(Refusal, on_refusal)
    app.register_error_handler(CSRFError, on_csrf)
    app.register_error_handler(HTTPException, on_http)
    if not app.testing:
        app.register_error_handler(Exception, on_fault)
