"""Driving a tablet: a real server in a process of its own, and Chromium on a profile that survives being killed.

`Tablet.host(...)` and `.run(...)` talk to the page's own host.js, the same module that the screens use.
"""

from __future__ import annotations

import multiprocessing
import os
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

from ports import answers, free_port

CHROMIUM = "/usr/bin/chromium"
HERE = Path(__file__).resolve().parent
ROOT = HERE.parents[1]
ARGS = [
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]
PASS = {"vell": "seven herons at dusk", "arkle": "three stones in the beck", "quill": "the long way to the mast"}

#: how long anything is waited for: long, for a machine that has much else to do; what comes in time costs nothing
PATIENCE_S = 90


def refuses(port: int) -> bool:
    return not answers(port)


#: a process that has everything imported, from which the servers are forked: a fresh one takes seconds to import it all
_READY = multiprocessing.get_context("forkserver")
_READY.set_forkserver_preload(["fieldkit.web.app", "fieldkit.web.tablet", "werkzeug.serving", "PIL.Image"])


def _serve(folder: Path, port: int, environment: dict[str, str]) -> None:
    """What a forked server does, from beginning to end."""
    import small_station

    with (folder / "server.log").open("ab") as log:
        for stream in (1, 2):
            os.dup2(log.fileno(), stream)
    os.environ.update(environment)
    small_station.serve(folder, port)


class Fresh:
    """A command in a process of its own, asked the same as a forked one."""

    def __init__(self, command: list[str], log: Path, environment: dict[str, str]) -> None:
        with log.open("ab") as out:
            self.made = subprocess.Popen(command, env={**os.environ, **environment}, stdout=out, stderr=out)
        self.terminate, self.kill = self.made.terminate, self.made.kill

    def is_alive(self) -> bool:
        return self.made.poll() is None

    def join(self, seconds: float | None = None) -> None:
        self.made.wait(seconds)

    def close(self) -> None:
        return


class Server:
    """The station's server as a process; its port stays the same through stop and start."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self.port = free_port()
        self.url = f"http://localhost:{self.port}"
        self.process: Any = None

    def launch(self, environment: dict[str, str]) -> Any:
        """The process; a fresh one where other code is to be served."""
        if "PYTHONPATH" in environment:
            command = [sys.executable, str(HERE / "small_station.py"), "serve", str(self.folder), str(self.port)]
            return Fresh(command, self.folder / "server.log", environment)
        made = _READY.Process(target=_serve, args=(self.folder, self.port, environment), daemon=True)
        made.start()
        return made

    def start(self, **environment: str) -> None:
        self.process = self.launch(environment)
        until = time.monotonic() + PATIENCE_S
        try:
            while refuses(self.port):
                assert self.process.is_alive(), (self.folder / "server.log").read_text()[-3000:]
                assert time.monotonic() < until, "the server did not start"
                time.sleep(0.02)
        except BaseException:
            self.process.kill()
            self.process.join()
            raise

    def stop(self) -> None:
        """Really stopped: the process is gone and the port refuses."""
        if self.process:
            self.process.terminate()
            self.process.join(PATIENCE_S)
            assert not self.process.is_alive(), "the server does not stop"
            self.process.close()
            self.process = None
        assert refuses(self.port)

    def inside(self) -> Any:
        """An app context over the same data folder, for what happens at the desk."""
        from fieldkit.web.app import create_app

        return create_app(self.folder, plain_http=True).app_context()

    def issue(self) -> None:
        """The administrator opens the signing authority and issues every certificate that was asked for."""
        import small_station

        from fieldkit.operations import enrol
        from fieldkit.operations.actor import HOUSE
        from fieldkit.web.app import here

        with self.inside():
            for one in enrol.waiting():
                enrol.issue(HOUSE, here(), one.id, small_station.PASSPHRASE, "known in person")

    def events(self, run: str) -> list[bytes]:
        from sqlalchemy import select

        from fieldkit.store.db import db
        from fieldkit.store.tables import EventRow

        with self.inside():
            return list(db.session.scalars(select(EventRow.data).where(EventRow.run == run).order_by(EventRow.seq)))


#: what a page does with the host that it has already loaded
CALL = """async ([name, args]) => {
  const host = await import(document.querySelector("script[type=module]").src.replace("main.js", "host.js"));
  try {
    return { is: await host[name](...args) };
  } catch (bad) {
    return { bad: { code: bad.code ?? bad.name, says: bad.says ?? String(bad), wait_s: bad.wait_s ?? null } };
  }
}"""

RUN = """async ([run, name, args]) => {
  const host = await import(document.querySelector("script[type=module]").src.replace("main.js", "host.js"));
  try {
    const open = await host.openRun(run);
    const value = open[name];
    const is = typeof value === "function" ? await value(...args) : value;
    return { is: is === undefined ? null : JSON.parse(JSON.stringify(is)) };
  } catch (bad) {
    return { bad: { code: bad.code ?? bad.name, says: bad.says ?? String(bad), wait_s: bad.wait_s ?? null } };
  }
}"""


class Refused(Exception):
    def __init__(self, bad: dict[str, Any]) -> None:
        super().__init__(f"{bad['code']}: {bad['says']}")
        self.code, self.says, self.wait_s = bad["code"], bad["says"], bad["wait_s"]


class Tablet:
    """Chromium on a profile folder, as a tablet: pages come and go, what was stored stays."""

    def __init__(self, playwright: Any, profile: Path, server: Server, **how: Any) -> None:
        self.playwright, self.profile, self.server, self.how = playwright, profile, server, how
        self.context: Any = None
        self.page: Any = None
        self.violations: list[str] = []

    def launch(self, *scripts: str) -> None:
        options = {"viewport": {"width": 800, "height": 1280}, **self.how}
        self.context = self.playwright.chromium.launch_persistent_context(
            str(self.profile), executable_path=CHROMIUM, args=ARGS, headless=True, **options
        )
        self.context.set_default_timeout(PATIENCE_S * 1000)
        for script in scripts:
            self.context.add_init_script(script)
        self.page = self.context.pages[0]
        self._listen(self.page)

    def _listen(self, page: Any) -> None:
        page.on("console", lambda m: self.violations.append(m.text) if "Content Security Policy" in m.text else None)

    def open(self, path: str = "/app/") -> None:
        self.page.goto(self.server.url + path)
        if path == "/app/":
            self.host("open")

    def tab(self) -> Tablet:
        """Another window of the same tablet."""
        other = Tablet(self.playwright, self.profile, self.server)
        other.context, other.page = self.context, self.context.new_page()
        other.open()
        return other

    def ready(self) -> None:
        """Until every file is aboard and the page is the worker's."""
        self.page.evaluate("async () => { await navigator.serviceWorker.ready; }")
        if not self.page.evaluate("() => Boolean(navigator.serviceWorker.controller)"):
            self.page.reload()
        until = time.monotonic() + PATIENCE_S
        while not self.host("open")["health"]["offline_ready"]:
            assert time.monotonic() < until, "the app files did not come aboard"
            self.page.wait_for_timeout(100)

    def until(self, script: str, arg: Any = None) -> None:
        """Until an async script gives something true. (wait_for_function takes a promise for true.)"""
        until = time.monotonic() + PATIENCE_S
        while not self.page.evaluate(script, arg):
            assert time.monotonic() < until, f"never came true: {script}"
            self.page.wait_for_timeout(100)

    def host(self, name: str, *args: Any) -> Any:
        return self._told(self.page.evaluate(CALL, [name, list(args)]))

    def sync(self) -> Any:
        """A pass that began after this was asked for: one that is under way may have looked before the last event."""
        self.host("sync")
        return self.host("sync")

    def run(self, run: str, name: str, *args: Any) -> Any:
        return self._told(self.page.evaluate(RUN, [run, name, list(args)]))

    def command(self, run: str, **command: Any) -> Any:
        """A command that must be accepted; gives the state."""
        answer = self.run(run, "command", command)
        assert answer.get("ok"), answer
        return answer["state"]

    def refused(self, run: str, **command: Any) -> dict[str, Any]:
        answer = self.run(run, "command", command)
        assert "refused" in answer, answer
        return answer["refused"]

    @staticmethod
    def _told(answer: dict[str, Any]) -> Any:
        if "bad" in answer:
            raise Refused(answer["bad"])
        return answer.get("is")

    def pids(self) -> list[int]:
        """Browser processes on this profile, and no others."""
        found = []
        for entry in Path("/proc").iterdir():
            if entry.name.isdigit():
                try:
                    line = (entry / "cmdline").read_bytes().decode(errors="ignore")
                except OSError:
                    continue
                if f"--user-data-dir={self.profile}" in line:
                    found.append(int(entry.name))
        return found

    def kill(self) -> None:
        """SIGKILL: no unload, no flush."""
        pids = self.pids()
        assert pids, "no browser to kill"
        for pid in pids:
            with_suppressed(lambda pid=pid: os.kill(pid, signal.SIGKILL))
        until = time.monotonic() + PATIENCE_S
        while self.pids():
            assert time.monotonic() < until, "the browser cannot be killed"
            time.sleep(0.05)
        with_suppressed(self.context.close)
        for lock in ("SingletonLock", "SingletonSocket", "SingletonCookie"):
            (self.profile / lock).unlink(missing_ok=True)
        self.context = self.page = None

    def close(self) -> None:
        if self.context:
            self.context.close()
        self.context = self.page = None

    def reopen_page(self) -> None:
        self.page.reload()
        self.host("open")

    def reopen(self, *scripts: str) -> None:
        self.launch(*scripts)
        self.open()

    def enrol(self, *logins: str) -> None:
        """People enrolled with certificates, and the kit aboard."""
        import small_station

        for login in logins or ("vell", "arkle"):
            made = {
                "login": login,
                "password": small_station.PASSWORD,
                "tabletName": "tablet 3",
                "passphrase": PASS[login],
            }
            self.host("enrol", made)
        self.server.issue()
        assert {one["status"] for one in self.host("enrolStatus")} == {"issued"}
        self.host("fetchKit")

    def begin(self, cabinet: str = "B2", tube: str = "T-02") -> str:
        """A run that has declared its states and goes."""
        asked = {
            "procedure": "short-look",
            "cabinet": cabinet,
            "tube": tube,
            "present": ["vell", "arkle"],
            "recorder": "vell",
        }
        run: str = self.host("startRun", asked)["run"]
        self.command(run, do="states-declared", states={"heater": "on", "beam_supply": "off"}, ages={}, board_seen=True)
        return run


def with_suppressed(work: Any) -> None:
    try:
        work()
    except Exception:
        return
