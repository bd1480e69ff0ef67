"""A tablet written in Python, for tests: device key, people's keys, chains of events, signed requests.

It does what static/tablet does on the wire and nothing of what it does on the screen. `RunOnTablet.add` makes events
as bytes, chained; nothing here judges whether a run is sensible.
"""

from __future__ import annotations

import datetime as dt
import hashlib
import json
from typing import Any

from flask.testing import FlaskClient

from fieldkit.trust import jws, keys

AT = dt.datetime(2026, 7, 31, 12, 0, tzinfo=dt.UTC)
SHA_EMPTY = hashlib.sha256(b"").hexdigest()


class TabletInPython:
    """`client` is a Flask test client, or anything with its `open`."""

    def __init__(self, client: FlaskClient, device: str = "TABLET01", name: str = "Tablet 1") -> None:
        self.client, self.device, self.name = client, device, name
        self.key = keys.new()
        self.people: dict[str, Any] = {}
        self.certificates: dict[str, list[Any]] = {}
        self.enrolments: dict[str, str] = {}

    def nonce(self) -> str:
        return self.client.get("/api/challenge").get_json()["nonce"]

    def enrol(self, login: str, password: str) -> Any:
        key = self.people.setdefault(login, keys.new())
        proof = jws.sign({"device": self.device, "nonce": self.nonce()}, key, "fieldkit-enrol")
        body = {
            "name": login,
            "password": password,
            "device": {"id": self.device, "name": self.name, "jwk": keys.to_jwk(self.key.public_key())},
            "person_jwk": keys.to_jwk(key.public_key()),
            "proof": proof,
        }
        answer = self.client.post("/api/enrol", json=body)
        if answer.status_code == 200:
            self.enrolments[login] = answer.get_json()["enrolment"]
        return answer

    def take_certificate(self, login: str) -> dict[str, Any]:
        from fieldkit.trust import certificates

        answer = self.get(f"/api/enrolment/{self.enrolments[login]}").get_json()
        if answer["status"] == "issued":
            pair = [certificates.from_pem(answer[name].encode()) for name in ("certificate", "authority")]
            self.certificates[login] = pair
        return answer

    def token(self, method: str, path: str, body: bytes = b"", changed: dict[str, Any] | None = None) -> str:
        """The signed request; `changed` says what it claims otherwise."""
        digest = hashlib.sha256(body).hexdigest()
        payload = {"method": method, "path": path, "body": digest, "nonce": self.nonce(), **(changed or {})}
        return jws.sign(payload, self.key, "fieldkit-request", kid=self.device)

    def call(self, method: str, path: str, body: bytes = b"", media: str = "application/json") -> Any:
        headers = {"Authorization": "Fieldkit " + self.token(method, path, body)}
        return self.client.open(path, method=method, data=body, headers=headers, content_type=media)

    def get(self, path: str) -> Any:
        return self.call("GET", path)

    def send(self, run: RunOnTablet, texts: list[str]) -> Any:
        body = json.dumps({"chain": run.chain, "events": texts}).encode()
        return self.call("POST", f"/api/runs/{run.run}/events", body)

    def send_picture(self, data: bytes) -> Any:
        sha256 = hashlib.sha256(data).hexdigest()
        return self.call("PUT", f"/api/pictures/{sha256}", data, "image/jpeg")


class RunOnTablet:
    """One chain of events, as bytes."""

    def __init__(self, tablet: TabletInPython, run: str, sheet: str, by: str = "vell", epoch: str = "EPOCH001") -> None:
        self.tablet, self.run, self.sheet, self.by = tablet, run, sheet, by
        self.chain = f"{tablet.device}.{epoch}"
        self.texts: list[str] = []

    @property
    def head(self) -> str:
        return hashlib.sha256(self.texts[-1].encode()).hexdigest() if self.texts else self.sheet

    def make(self, kind: str, body: dict[str, Any], **changed: Any) -> str:
        """The text of the next event; not yet in the chain."""
        seq = len(self.texts)
        made = {
            "v": 1,
            "run": self.run,
            "chain": self.chain,
            "seq": seq,
            "prev": self.head,
            "kind": kind,
            "by": self.by,
            "at": {"wall": (AT + dt.timedelta(seconds=seq)).isoformat(), "mono": f"{seq}000.5", "boot": "b1"},
            "app": "0.1.0",
            "body": body,
            **changed,
        }
        return json.dumps(made, ensure_ascii=False)

    def add(self, kind: str, body: dict[str, Any], **changed: Any) -> str:
        text = self.make(kind, body, **changed)
        self.texts.append(text)
        return text

    def start(self, **changed: Any) -> str:
        body: dict[str, Any] = {
            "sheet": self.sheet,
            "procedure": "test-check",
            "edition": 1,
            "site": "skarrow-fell",
            "site_name": "Skarrow Fell",
            "cabinet": "B2",
            "tube": "T-0417",
            "givens": {},
            "meters": {},
            "instruments": [],
            "places": {},
            "people": [{"id": "vell", "name": "J. Vell", "roles": ["technician"]}],
            "present": ["vell"],
            "tablet": {
                "device": self.tablet.device,
                "name": "Tablet 1",
                "installed": True,
                "persisted": True,
                "probe": "ok",
            },
            "kit": "0" * 64,
        }
        return self.add("run-started", {**body, **changed})

    def remark(self, text: str = "quiet") -> str:
        return self.add("remarked", {"step": "note", "text": text, "move": None})

    def pictured(self, sha256: str) -> str:
        body = {"step": "note", "sha256": sha256, "media": "image/jpeg", "width": 8, "height": 6, "size": 1}
        return self.add("pictured", {**body, "move": None})

    def end(self, outcome: str = "done", locks: tuple[Any, ...] = (), earths: tuple[Any, ...] = ()) -> str:
        body = {"outcome": outcome, "reason": "", "states": {}, "locks": list(locks), "earths": list(earths)}
        return self.add("ended", body)

    def sign(self, login: str, meaning: str = "performed", claims: dict[str, Any] | None = None) -> str:
        payload = {
            "run": self.run,
            "chain": self.chain,
            "seq": len(self.texts) - 1,
            "head": self.head,
            "sheet": self.sheet,
            "meaning": meaning,
            "person": login,
            "name": login,
            "time": dt.datetime.now(dt.UTC).isoformat(),
            "statement": "I did this.",
            "pictures": [],
            **(claims or {}),
        }
        x5c = self.tablet.certificates.get(login, [])
        token = jws.sign(payload, self.tablet.people[login], "fieldkit-signature", x5c=x5c)
        return self.add("signed", {"person": login, "meaning": meaning, "jws": token})
