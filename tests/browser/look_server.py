"""Serves the tablet's page with a fake host (fake_host.js) and one scene, under the product's own strict policy.

A scene is what the host holds: people, kit, runs with their events. `scene(plays)` makes one from look_play.
Not here: storage, keys, sync; the other browser tests drive those in the real app.
"""

from __future__ import annotations

import json
import threading
from functools import cache
from http.server import BaseHTTPRequestHandler, ThreadingHTTPServer
from pathlib import Path
from typing import Any

from jinja2 import Environment, FileSystemLoader, StrictUndefined
from look_play import STATION, Play, sheet_of

from fieldkit.files import folder
from fieldkit.formula import library, sums
from fieldkit.web import step_form
from fieldkit.web.assets import MEDIA
from fieldkit.web.security import POLICY

HERE = Path(__file__).resolve().parent
ROOT = HERE.parents[1]


def held(plays: list[Play], **more: Any) -> dict[str, Any]:
    """What `host.open` says on a tablet that is ready for work."""
    people = [
        {
            "id": k,
            "name": p["name"],
            "roles": p["roles"],
            "enrolledHere": k != "orme",
            "enrolment": "issued" if k != "orme" else "none",
        }
        for k, p in STATION["people"].items()
    ]
    procedures = []
    for name in ("warm-up", "hv-bring-up"):
        sheet, sha = sheet_of(name)
        procedures.append(
            {
                "procedure": name,
                "edition": sheet["edition"],
                "title": sheet["title"],
                "sha256": sha,
                "sheet": {"crew": sheet["crew"], "alone": sheet["alone"]},
            }
        )
    runs = [{"run": p.state["run"], "procedure": p.sheet["procedure"], "title": p.sheet["title"], "cabinet": "B2", "tube": "T-0417", "phase": p.state["phase"],
             "updated": p.now()["wall"], "seq": p.state["seq"], "acked": -1, "synced": False} for p in plays]  # fmt: skip
    made = {
        "device": {"device": "d1", "epoch": "e1", "name": "tablet 3"}, "enrolled": True, "people": people,
        "kit": {"procedures": procedures, "registers": STATION, "controls": step_form.controls_html(), "made": "2026-07-31T08:12:00.000Z"},
        "runs": runs,
        "health": {"persisted": True, "probe": "8 MB written and read back in 0.2 s", "installed": True, "storage": "ok", "offline_ready": True, "says": []},
    }  # fmt: skip
    for key, value in more.items():
        made[key] = {**made[key], **value} if isinstance(value, dict) and isinstance(made[key], dict) else value
    return made


def scene(*plays: Play, held_more: dict[str, Any] | None = None, **more: Any) -> dict[str, Any]:
    sheets = {p.sha256: p.sheet for p in plays}
    runs = [{"run": p.state["run"], "chain": p.state["chain"], "sheet": p.sha256, "events": p.texts} for p in plays]
    return {"held": held(list(plays), **(held_more or {})), "sheets": sheets, "runs": runs, **more}


@cache
def sums_json() -> bytes:
    """The shipped formulas, as the kit holds them."""
    return json.dumps(sums.sums(library.load(folder("procedures") / "formulas"))).encode()


class LookServer:
    """The page at `url`; `show(scene)` sets what its host holds."""

    def __init__(self) -> None:
        self.scene: dict[str, Any] = scene()
        self.swaps: dict[str, Path] = {"tablet/host.js": HERE / "fake_host.js"}
        environment = Environment(
            loader=FileSystemLoader(ROOT / "templates"), autoescape=True, undefined=StrictUndefined
        )
        self.page = (
            environment.get_template("tablet/shell.html")
            .render(static="/static/look", app="0.1.0", build="look")
            .encode()
        )
        server = self

        class Handler(BaseHTTPRequestHandler):
            def do_GET(self) -> None:
                path = self.path.split("?")[0]
                if path == "/app/":
                    self._send(server.page, "text/html; charset=utf-8")
                elif path == "/scene.json":
                    self._send(json.dumps(server.scene).encode(), "application/json")
                elif path == "/sums.json":
                    self._send(sums_json(), "application/json")
                elif path == "/manifest.webmanifest":
                    self._send(b"{}", "application/manifest+json")
                elif path.startswith("/static/look/"):
                    name = path.removeprefix("/static/look/")
                    file = server.swaps.get(name) or ROOT / "static" / name
                    if file.is_file():
                        self._send(file.read_bytes(), MEDIA.get(file.suffix, "application/octet-stream"))
                    else:
                        self.send_error(404)
                else:
                    self.send_error(404)

            def _send(self, data: bytes, media: str) -> None:
                self.send_response(200)
                self.send_header("Content-Type", media)
                self.send_header("Content-Security-Policy", POLICY)
                self.send_header("Cache-Control", "no-store")
                self.send_header("Content-Length", str(len(data)))
                self.end_headers()
                self.wfile.write(data)

            def log_message(self, *args: Any) -> None:
                return

        self.server = ThreadingHTTPServer(("127.0.0.1", 0), Handler)
        self.url = f"http://127.0.0.1:{self.server.server_address[1]}"
        threading.Thread(target=self.server.serve_forever, daemon=True).start()

    def show(self, made: dict[str, Any]) -> None:
        self.scene = made

    def stop(self) -> None:
        self.server.shutdown()
        self.server.server_close()
