"""A real `fieldkit serve` in its own process, and a client that speaks to it over a socket."""

from __future__ import annotations

import http.client
import json
import os
import signal
import ssl
import subprocess
import sys
import time
from contextlib import suppress
from pathlib import Path
from typing import Any

from ports import answers, free_port

PASSWORD, PASSPHRASE = "four words make one", "correct horse battery staple"


def command(*more: str) -> list[str]:
    return [sys.executable, "-m", "fieldkit.cli.main", "serve", *more]


def environment(**more: str) -> dict[str, str]:
    secrets = {"FIELDKIT_ADMIN_PASSWORD": PASSWORD, "FIELDKIT_AUTHORITY_PASSPHRASE": PASSPHRASE}
    return {**os.environ, **secrets, **more}


class Serving:
    """`fieldkit serve` on a free port. `kill` is without warning, `stop` with."""

    def __init__(self, folder: Path, *more: str) -> None:
        self.port = free_port()
        first = ("--data", str(folder), "--host", "127.0.0.1", "--port", str(self.port))
        self.log = (folder.parent / f"{folder.name}.log").open("ab")
        self.process = subprocess.Popen(
            command(*first, *more),
            env=environment(),
            stdin=subprocess.DEVNULL,
            stdout=self.log,
            stderr=subprocess.STDOUT,
            start_new_session=True,
        )
        until = time.monotonic() + 120
        try:
            while not self.answers():
                assert self.process.poll() is None, Path(self.log.name).read_text()
                assert time.monotonic() < until, "the server does not begin to answer"
                time.sleep(0.1)
        except BaseException:
            self.kill()
            raise

    def answers(self) -> bool:
        return answers(self.port)

    def kill(self) -> None:
        """The process and its worker, at once and without warning."""
        with suppress(ProcessLookupError):
            os.killpg(self.process.pid, signal.SIGKILL)
        self._gone()

    def stop(self) -> int:
        self.process.send_signal(signal.SIGTERM)
        code = self.process.wait(120)
        self._gone()
        return code

    def _gone(self) -> None:
        self.process.wait(120)
        until = time.monotonic() + 120
        while self.answers():
            assert time.monotonic() < until, "the port still answers"
            time.sleep(0.05)
        self.log.close()


class Answer:
    def __init__(self, status: int, headers: dict[str, str], data: bytes) -> None:
        self.status_code, self.headers, self.data = status, headers, data

    def get_json(self) -> Any:
        return json.loads(self.data)


class Client:
    """As much of Flask's test client as TabletInPython asks for, over a socket; one connection a call."""

    def __init__(self, port: int, authority: Path | None = None) -> None:
        self.port, self.authority = port, authority

    def open(
        self, path: str, method: str = "GET", data: bytes = b"", headers: Any = None, content_type: str = ""
    ) -> Answer:
        if self.authority:
            context = ssl.create_default_context(cafile=str(self.authority))
            made: Any = http.client.HTTPSConnection("localhost", self.port, timeout=120, context=context)
        else:
            made = http.client.HTTPConnection("127.0.0.1", self.port, timeout=120)
        try:
            more = {"Content-Type": content_type} if content_type else {}
            made.request(method, path, data, {**(headers or {}), **more})
            got = made.getresponse()
            return Answer(got.status, dict(got.getheaders()), got.read())
        finally:
            made.close()

    def get(self, path: str) -> Answer:
        return self.open(path)

    def post(self, path: str, json: Any) -> Answer:
        return self.open(path, "POST", _dumps(json), None, "application/json")


def _dumps(value: Any) -> bytes:
    return json.dumps(value).encode()
