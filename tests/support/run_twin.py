"""The tablet's run engine beside this one: one node process for all tests of a session (tests/js/run_twin.mjs)."""

from __future__ import annotations

import hashlib
import json
import shutil
import subprocess
from pathlib import Path
from typing import Any

import pytest

SCRIPT = Path(__file__).resolve().parent.parent / "js" / "run_twin.mjs"


class Twin:
    """Asks the JavaScript twin; `ask` gives its answer, a thrown error fails the test."""

    def __init__(self) -> None:
        node = shutil.which("node")
        if node is None:
            pytest.skip("node is not installed: the JavaScript twins cannot be compared")
        self.process = subprocess.Popen([node, str(SCRIPT)], stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True)
        self.kept: set[str] = set()

    def ask(self, **request: Any) -> Any:
        assert self.process.stdin and self.process.stdout
        self.process.stdin.write(json.dumps(request) + "\n")
        self.process.stdin.flush()
        reply = json.loads(self.process.stdout.readline())
        assert not (isinstance(reply, dict) and "failed" in reply), reply["failed"]
        return reply

    def call(self, name: str, *args: Any) -> Any:
        return self.ask(call=name, args=args)["value"]

    def keep(self, name: str, sheet: Any) -> None:
        if name not in self.kept:
            self.ask(sheet=name, body=sheet)
            self.kept.add(name)

    def close(self) -> None:
        assert self.process.stdin and self.process.stdout
        self.process.stdin.close()
        self.process.stdout.close()
        self.process.wait(120)


def digest(text: str) -> str:
    return hashlib.sha256(text.encode()).hexdigest()
