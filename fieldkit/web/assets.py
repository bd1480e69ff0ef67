"""Static files under /static/<hash>/...: the hash covers all of them, so an answer may be kept for ever.

`list_of(app)` is the one list of what there is; the service worker's list (fieldkit.web.tablet) is taken from it.
"""

from __future__ import annotations

import hashlib
import mimetypes
from dataclasses import dataclass
from pathlib import Path

from flask import Blueprint, Flask, Response, abort, current_app, request

from fieldkit import files
from fieldkit.web.security import public

MEDIA = {
    ".js": "text/javascript; charset=utf-8",
    ".css": "text/css; charset=utf-8",
    ".svg": "image/svg+xml",
    ".woff2": "font/woff2",
    ".json": "application/json",
    ".webmanifest": "application/manifest+json",
    ".txt": "text/plain; charset=utf-8",
    ".png": "image/png",
}


@dataclass(frozen=True)
class Assets:
    """Every static file with its SHA-256, and the hash over all, as they were when the server started."""

    folder: Path
    #: path below static/ -> sha256
    sha256: dict[str, str]
    hash: str

    def url(self, path: str) -> str:
        """Raises KeyError for a file that is not there, so that a wrong name fails when the page is made."""
        self.sha256[path]
        return f"/static/{self.hash}/{path}"


def read(folder: Path) -> Assets:
    found = {}
    for path in sorted(folder.rglob("*")):
        if path.is_file() and path.suffix in MEDIA:
            found[path.relative_to(folder).as_posix()] = hashlib.sha256(path.read_bytes()).hexdigest()
    whole = "\n".join(f"{name} {digest}" for name, digest in found.items())
    return Assets(folder, found, hashlib.sha256(whole.encode()).hexdigest()[:16])


def of(app: Flask | None = None) -> Assets:
    held: Assets = (app or current_app).extensions["fieldkit-assets"]
    return held


blueprint = Blueprint("assets", __name__)


@blueprint.get("/static/<digest>/<path:path>")
@public
def static_file(digest: str, path: str) -> Response:
    """One static file. Only what was there at the start is served, so no path can lead elsewhere."""
    assets = of()
    if digest != assets.hash or path not in assets.sha256:
        abort(404)
    media = MEDIA.get(Path(path).suffix) or mimetypes.guess_type(path)[0] or "application/octet-stream"
    response = Response((assets.folder / path).read_bytes(), content_type=media)
    response.set_etag(assets.sha256[path])
    response.headers["Cache-Control"] = "public, max-age=31536000, immutable"
    response.make_conditional(request)
    return response


def start(app: Flask) -> None:
    app.extensions["fieldkit-assets"] = read(files.folder("static"))
    app.register_blueprint(blueprint)
    app.jinja_env.globals["asset"] = lambda path: of().url(path)
