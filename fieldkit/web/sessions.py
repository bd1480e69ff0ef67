"""The desk's session cookie: a random id and nothing else; the session itself is a row (operations.signin).

Flask's own signed cookie holds only the CSRF token and passing messages. Both are HttpOnly, SameSite=Lax, and over TLS
Secure with the `__Host-` prefix, so that no other host or plain page can set them.
"""

from __future__ import annotations

from flask import Flask, Response, current_app, g, request, session

from fieldkit.operations import signin
from fieldkit.operations.actor import Actor


def cookie_name() -> str:
    return str(current_app.config["FIELDKIT_COOKIE"])


def start(app: Flask, secure: bool) -> None:
    prefix = "__Host-" if secure else ""
    app.config.update(
        FIELDKIT_COOKIE=f"{prefix}fieldkit-desk",
        SESSION_COOKIE_NAME=f"{prefix}fieldkit-form",
        SESSION_COOKIE_SECURE=secure,
        SESSION_COOKIE_HTTPONLY=True,
        SESSION_COOKIE_SAMESITE="Lax",
        SESSION_COOKIE_PATH="/",
    )
    app.before_request(find)


def find() -> None:
    """Before every view: who the cookie says. Pages of the tablet and static files never look."""
    g.actor = None
    if request.path.startswith(("/static/", "/app/", "/sw.js", "/api/")):
        return
    token = request.cookies.get(cookie_name(), "")
    g.actor = signin.who(token) if token else None


def begin(response: Response, login: str, password: str) -> Actor:
    """Sign in and put a fresh id in the cookie; the one before is gone. Raises Refusal as operations.signin."""
    actor, token = signin.sign_in(login, password, request.remote_addr or "")
    old = request.cookies.get(cookie_name())
    if old:
        signin.sign_out(old)
    session.clear()
    secure = bool(current_app.config["SESSION_COOKIE_SECURE"])
    response.set_cookie(cookie_name(), token, httponly=True, samesite="Lax", secure=secure, path="/")
    return actor


def end(response: Response) -> None:
    token = request.cookies.get(cookie_name())
    if token:
        signin.sign_out(token)
    session.clear()
    secure = bool(current_app.config["SESSION_COOKIE_SECURE"])
    response.delete_cookie(cookie_name(), path="/", httponly=True, samesite="Lax", secure=secure)
