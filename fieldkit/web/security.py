"""Who may have a view, and what every answer carries: access marks, headers, cross-site refusal.

A view is marked with exactly one of `public`, `device` (a tablet's signed request), `signed_in` or `allowed(role...)`.
An unmarked view is refused. Operations check roles again themselves.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar

from flask import Flask, Response, current_app, g, request

from fieldkit.errors import Refusal
from fieldkit.operations.actor import ROLES, Actor, require

View = TypeVar("View", bound=Callable[..., Any])

#: no inline script, no inline style, nothing from elsewhere; pictures may be made in the page (data:, blob:)
POLICY = (
    "default-src 'self'; script-src 'self'; style-src 'self'; img-src 'self' data: blob:; font-src 'self'; "
    "connect-src 'self'; worker-src 'self'; manifest-src 'self'; object-src 'none'; base-uri 'none'; "
    "form-action 'self'; frame-ancestors 'none'"
)
HEADERS = {
    "Content-Security-Policy": POLICY,
    "X-Content-Type-Options": "nosniff",
    # Flask-WTF compares the Referer over TLS, so it must be sent to ourselves
    "Referrer-Policy": "same-origin",
    "Cross-Origin-Opener-Policy": "same-origin",
    "Cross-Origin-Resource-Policy": "same-origin",
    "X-Frame-Options": "DENY",
    "Permissions-Policy": "geolocation=(), microphone=(), payment=(), usb=()",
}
#: for bytes that somebody sent here: whatever they are, they may do nothing
SANDBOX = "default-src 'none'; sandbox; frame-ancestors 'none'"
SAFE_METHODS = {"GET", "HEAD", "OPTIONS"}


def _mark(view: View, access: tuple[str, ...]) -> View:
    if hasattr(view, "access"):
        raise TypeError(f"{view.__name__} says twice who may have it")
    view.access = access  # type: ignore[attr-defined]
    return view


def public(view: View) -> View:
    """Anybody may have it, without signing in."""
    return _mark(view, ("public",))


def device(view: View) -> View:
    """Only a tablet, by its signature; the view calls fieldkit.web.sync.tablet() for which one."""
    return _mark(view, ("device",))


def signed_in(view: View) -> View:
    """Anybody who is signed in."""
    return _mark(view, ROLES)


def allowed(*roles: str) -> Callable[[View], View]:
    """Only people with one of these roles."""
    unknown = set(roles) - set(ROLES)
    if unknown or not roles:
        raise TypeError(f"not roles: {unknown}")
    return lambda view: _mark(view, roles)


def access_of(app: Flask, endpoint: str) -> tuple[str, ...]:
    """What a view says of who may have it; () where it says nothing."""
    return getattr(app.view_functions[endpoint], "access", ())


def actor() -> Actor:
    """Who is signed in. Raises Refusal not-signed-in."""
    found: Actor | None = g.get("actor")
    if found is None:
        raise Refusal("not-signed-in", "Sign in first.")
    return found


def check_access() -> None:
    """Before every view: cross-site requests, sign-in, role. Raises Refusal."""
    if request.endpoint is None:
        return
    site = request.headers.get("Sec-Fetch-Site")
    if request.method not in SAFE_METHODS and site not in (None, "same-origin", "none"):
        raise Refusal("cross-site", "This request came from another site and was not carried out.")
    access = access_of(current_app, request.endpoint)
    if access in (("public",), ("device",)):
        return
    if not access:
        raise Refusal("not-allowed", "Nobody may have this page: it does not say who may.")
    require(actor(), *access)


def add_headers(response: Response) -> Response:
    """After every view; a header that the view set itself stays."""
    for name, value in HEADERS.items():
        response.headers.setdefault(name, value)
    if request.is_secure:
        response.headers.setdefault("Strict-Transport-Security", "max-age=31536000")
    # what a signed-in person sees is not kept by anything in between
    response.headers.setdefault("Cache-Control", "no-store")
    return response


def start(app: Flask) -> None:
    app.before_request(check_access)
    app.after_request(add_headers)
