"""The tablet's shell: one page, its service worker with the list of every file, its manifest, its version.

None of it needs a cookie or holds anything of a person, and none of it is ever a redirect: it is what a tablet keeps.
Not here: the tablet's calls (sync.py, enrol.py) and its modules (static/tablet/).
"""

from __future__ import annotations

import hashlib
import json
import os
from dataclasses import dataclass
from typing import Any

from flask import Blueprint, Flask, Response, current_app, request

from fieldkit import __version__
from fieldkit.operations import settings
from fieldkit.web import assets
from fieldkit.web.security import public

blueprint = Blueprint("tablet", __name__)

PAGE = "/app/"
#: static files that only the desk uses
DESK = ("desk/", "css/desk", "css/admin", "css/review", "css/print")
#: what a tablet's page may be read as, but never loads
NOT_LOADED = (".txt",)
#: a worker that goes away and takes its caches with it; what a person recorded (IndexedDB, OPFS) stays
KILLED = """self.addEventListener('install', () => self.skipWaiting());
self.addEventListener('activate', (event) => event.waitUntil(
  caches.keys()
    .then((names) => Promise.all(names.map((name) => caches.delete(name))))
    .then(() => self.registration.unregister())
));
"""


@dataclass(frozen=True)
class Shell:
    """The page, the manifest, and the list of all that the page can load, each with its SHA-256."""

    build: str
    page: bytes
    manifest: bytes
    files: tuple[dict[str, str], ...]


def _manifest(held: assets.Assets) -> bytes:
    icons: list[dict[str, str]] = []
    for path in held.sha256:
        name = path.removeprefix("icons/")
        if path == name:
            continue
        if name.endswith(".svg"):
            icons.append({"src": held.url(path), "sizes": "any", "type": "image/svg+xml"})
        elif name.endswith(".png") and name[:-4].rpartition("-")[2].isdigit():
            size = name[:-4].rpartition("-")[2]
            icons.append({"src": held.url(path), "sizes": f"{size}x{size}", "type": "image/png"})
    made: dict[str, Any] = {
        "id": PAGE,
        "name": "fieldkit",
        "short_name": "fieldkit",
        "start_url": PAGE,
        "scope": PAGE,
        "display": "standalone",
        "background_color": "#DFE4E3",
        "theme_color": "#DFE4E3",
        "icons": icons,
    }
    return json.dumps(made, indent=1).encode()


def make(app: Flask) -> Shell:
    """The shell of the static files as they are; the same bytes until one of them changes."""
    held = assets.of(app)
    manifest = _manifest(held)
    listed = [{"url": "/manifest.webmanifest", "sha256": hashlib.sha256(manifest).hexdigest()}]
    for path, digest in held.sha256.items():
        if not path.startswith(DESK) and not path.endswith(NOT_LOADED):
            listed.append({"url": held.url(path), "sha256": digest})
    template = app.jinja_env.get_template("tablet/shell.html")
    context = {"app": __version__, "static": f"/static/{held.hash}"}
    # the page names the build, so the build covers the page with that name left open
    blank = template.render(**context, build="")
    build = hashlib.sha256(json.dumps([listed, blank], sort_keys=True).encode()).hexdigest()
    page = template.render(**context, build=build).encode()
    files = ({"url": PAGE, "sha256": hashlib.sha256(page).hexdigest()}, *listed)
    return Shell(build, page, manifest, files)


def shell() -> Shell:
    kept: Shell | None = current_app.extensions.get("fieldkit-shell")
    if kept is None:
        kept = current_app.extensions["fieldkit-shell"] = make(current_app)
    return kept


def _send(data: bytes | str, media: str) -> Response:
    response = Response(data, content_type=media)
    response.headers["Cache-Control"] = "no-cache"
    response.add_etag()
    response.make_conditional(request)
    return response


@blueprint.get(PAGE)
@blueprint.get(f"{PAGE}<path:below>")
@public
def page(below: str = "") -> Response:
    """The shell, whatever is below /app/: the page itself knows what is meant."""
    return _send(shell().page, "text/html; charset=utf-8")


@blueprint.get("/sw.js")
@public
def worker() -> Response:
    if os.environ.get("SW_KILL"):
        return _send(KILLED, "text/javascript; charset=utf-8")
    made = shell()
    first = json.dumps({"build": made.build, "page": PAGE, "files": made.files}, separators=(",", ":"))
    held = assets.of()
    text = (held.folder / "tablet" / "sw.js").read_text(encoding="utf-8")
    return _send(f"const SHELL = {first};\n{text}", "text/javascript; charset=utf-8")


@blueprint.get("/manifest.webmanifest")
@public
def manifest() -> Response:
    return _send(shell().manifest, "application/manifest+json")


@blueprint.get("/version.json")
@public
def version() -> Response:
    """What is served now, and the least app version that may begin a run; an older one may still upload."""
    made = {"app": __version__, "build": shell().build, "min_app": settings.get("min_app", "0.1.0")}
    return _send(json.dumps(made), "application/json")
