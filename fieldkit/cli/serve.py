"""`fieldkit serve`: the real thing. The first start sets the station up; every start brings the database up to date.

Asks for what it needs on a terminal. Without one, passwords come from the environment (FIELDKIT_ADMIN_PASSWORD,
FIELDKIT_AUTHORITY_PASSPHRASE) or from standard input, one a line in that order. Not here: the demonstration (demo.py).
"""

from __future__ import annotations

import argparse
import datetime as dt
import getpass
import ipaddress
import json
import os
import socket
import ssl
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from fieldkit import files
from fieldkit.errors import Problems, Refusal
from fieldkit.operations import people, procedures, registers, station
from fieldkit.operations.actor import HOUSE
from fieldkit.trust import certificates, tls
from fieldkit.web.app import create_app

PORT = 8443
THREADS = 8
#: a countersignature renders and seals a PDF, which takes seconds on a small machine
TIMEOUT = 120
EVERYWHERE = ("0.0.0.0", "::")  # noqa: S104 - compared with, never bound by default
LOOPBACK = ("127.0.0.1", "localhost", "::1")


@dataclass(frozen=True)
class Place:
    """Where to listen, and the names under which tablets and desks reach it."""

    host: str
    port: int
    names: tuple[str, ...]
    plain: bool

    @property
    def url(self) -> str:
        return f"{'http' if self.plain else 'https'}://{_bracketed(self.names[0])}:{self.port}/"


def arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "--data", metavar="DIR", help="data folder (else $FIELDKIT_DATA, else the platform's place for it)"
    )
    parser.add_argument(
        "--database",
        metavar="URL",
        help="PostgreSQL instead of SQLite (else $FIELDKIT_DATABASE); keys stay in the folder",
    )
    parser.add_argument("--host", default="0.0.0.0", help="address to listen on (default: every address)")  # noqa: S104
    parser.add_argument("--port", type=int, default=PORT, help=f"port to listen on (default {PORT})")
    parser.add_argument(
        "--name",
        action="append",
        default=[],
        metavar="HOST",
        help="a host name or address it is reached by; repeat for more",
    )
    parser.add_argument("--plain-http", action="store_true", help="no TLS; only on this machine's own address")
    parser.add_argument("--station", metavar="NAME", help="the station's name, at the first start")
    parser.add_argument("--admin", metavar="LOGIN", help="sign-in name of the first administrator, at the first start")
    parser.add_argument("--admin-name", metavar="NAME", help="the first administrator's name as it stands on records")
    parser.add_argument("--registers", metavar="FILE", help="JSON of sites, cabinets, tubes, instruments to load first")
    parser.add_argument(
        "--release", nargs="+", default=[], metavar="YAML", help="procedures to check and put in use first"
    )
    parser.add_argument("--set-up-only", action="store_true", help="set up, load and release, then stop")


def run(args: argparse.Namespace) -> int:
    """Exit code 0 when it was stopped, 1 when it could not start, 2 for misuse."""
    # the database holds people's hashes and all that was received: only its owner reads what is made from here on
    os.umask(0o077)
    try:
        place = _place(args)
        folder = station.data_folder(args.data)
        with _alone(folder):
            database = args.database or os.environ.get("FIELDKIT_DATABASE")
            _prepare(args, folder, place, database)
            if not args.set_up_only:
                _serve(folder, place, database)
    except Refusal as bad:
        print(f"fieldkit serve: {bad.sentence} [{bad.code}]", file=sys.stderr)
        return 2 if bad.code in ("plain-http", "bad-host-name") else 1
    except Problems as bad:
        for problem in bad.problems:
            where = f"{problem.file}:{problem.place.line}:{problem.place.column}"
            print(f"{where}: {problem.message} [{problem.code}]", file=sys.stderr)
        return 1
    return 0


def _place(args: argparse.Namespace) -> Place:
    if args.plain_http and args.host == "0.0.0.0":  # noqa: S104
        args.host = "127.0.0.1"
    if args.plain_http and args.host not in LOOPBACK:
        raise Refusal(
            "plain-http",
            "Without TLS it serves this machine only, because a tablet's app works offline only over TLS. "
            "Leave --plain-http out, or give --host 127.0.0.1.",
        )
    names = tuple(args.name) or own_names(args.host)
    return Place(args.host, args.port, names, args.plain_http)


def own_names(host: str) -> tuple[str, ...]:
    """The names and addresses that this machine is likely reached by, best first."""
    if host in LOOPBACK:
        return ("localhost", "127.0.0.1")
    found = [host] if host not in EVERYWHERE else [_outward_address(), socket.gethostname().lower()]
    if "." not in found[-1] and found[-1]:
        found.append(f"{found[-1]}.local")
    return tuple(dict.fromkeys(name for name in found if name and "_" not in name)) or ("localhost",)


def _outward_address() -> str:
    """The address that leads out of this machine; "" without a network. Nothing is sent."""
    with socket.socket(socket.AF_INET, socket.SOCK_DGRAM) as probe:
        try:
            probe.connect(("192.0.2.1", 9))
            return str(probe.getsockname()[0])
        except OSError:
            return ""


def _bracketed(name: str) -> str:
    try:
        return f"[{name}]" if ipaddress.ip_address(name).version == 6 else name
    except ValueError:
        return name


@contextmanager
def _alone(folder: Path) -> Iterator[None]:
    """One server a data folder: two would be two writing processes. Raises Refusal already-served."""
    folder.mkdir(mode=0o700, parents=True, exist_ok=True)
    with (folder / "lock").open("w") as held:
        if os.name == "posix":
            import fcntl

            try:
                fcntl.flock(held, fcntl.LOCK_EX | fcntl.LOCK_NB)
            except OSError as exc:
                raise Refusal(
                    "already-served", f"{folder} is served by another fieldkit. Stop that one first."
                ) from exc
        yield


def _prepare(args: argparse.Namespace, folder: Path, place: Place, database: str | None) -> None:
    """Set up at the first start, load what was asked for, and say where it is."""
    app = create_app(folder, plain_http=place.plain, hosts=_trusted(place), database_url=database)
    held: station.Station = app.extensions["fieldkit"]
    if not place.plain:
        _tls(held.tls, place)
    with app.app_context():
        first = not station.is_set_up()
        if first:
            _first_start(args, held)
        if args.registers:
            registers.load(HOUSE, _json(Path(args.registers)))
        _release([Path(p) for p in args.release] or (_shipped() if first else []))
        _say(folder, place, held)
        from fieldkit.store.db import db

        db.session.remove()
        # the server's process is another one; a connection is never carried across
        db.engine.dispose()


def _first_start(args: argparse.Namespace, held: station.Station) -> None:
    print("This data folder is new: the station is set up now.")
    name = args.station or _ask("Name of the station, as it stands on records: ")
    login = args.admin or _ask("Sign-in name of the first administrator: ")
    shown = args.admin_name or (_ask("Their name, as it stands on records: ") if sys.stdin.isatty() else login)
    password = _secret("FIELDKIT_ADMIN_PASSWORD", f"Password of {login}, at least {people.SHORTEST} characters: ")
    print(
        "The signing authority vouches for people's signatures and the station's seal. Its key is kept under a\n"
        "passphrase that this server does not keep: write it down and lock it away; nobody can recover it."
    )
    passphrase = _secret(
        "FIELDKIT_AUTHORITY_PASSPHRASE", "Passphrase of the signing authority, at least 12 characters: "
    )
    if login not in {p.login for p in people.everyone()}:
        people.add(HOUSE, login, shown, ("administrator",), password)
    station.set_up(HOUSE, held, name, passphrase)


def _ask(prompt: str) -> str:
    if not sys.stdin.isatty():
        option = "--station" if "station" in prompt else "--admin"
        raise Refusal("not-set-up", f"The first start needs {option}, because there is no terminal to ask on.")
    return input(prompt).strip()


def _secret(variable: str, prompt: str) -> str:
    given = os.environ.get(variable)
    if given:
        return given
    if not sys.stdin.isatty():
        line = sys.stdin.readline().rstrip("\n")
        if not line:
            raise Refusal("not-set-up", f"The first start needs ${variable}, or that line on standard input.")
        return line
    while True:
        word = getpass.getpass(prompt)
        if word == getpass.getpass("Once more: "):
            return word
        print("The two differ. Type it again.")


def _shipped() -> list[Path]:
    return sorted(files.folder("procedures").glob("*.yaml"))


def _release(paths: list[Path]) -> None:
    """Puts procedures in use, with the formulas that `fieldkit check` gives them. Raises Problems."""
    if not paths:
        return
    from fieldkit.cli import check

    for path in paths:
        formulas = check.formulas_for(path)
        if formulas.problems:
            raise Problems(list(formulas.problems))
        digest = procedures.release_file(HOUSE, path, formulas)
        print(f"In use: {path.name}, sheet {digest[:16]} (checked, not proved)")


def _json(path: Path) -> dict[str, Any]:
    try:
        found = json.loads(path.read_text(encoding="utf-8"))
    except (OSError, ValueError) as exc:
        raise Refusal("bad-register", f"{path} cannot be read: {exc}") from exc
    if not isinstance(found, dict):
        raise Refusal("bad-register", f"{path} does not hold registers; DEVELOPERS.md says their form.")
    return found


def _tls(folder: Path, place: Place) -> tls.Tls:
    names = tuple(dict.fromkeys((*place.names, "localhost", "127.0.0.1")))
    return tls.ensure(folder, names, dt.datetime.now(dt.UTC))


def _trusted(place: Place) -> tuple[str, ...]:
    return tuple(dict.fromkeys((*(_bracketed(n) for n in place.names), *(_bracketed(n) for n in LOOPBACK))))


def _say(folder: Path, place: Place, held: station.Station) -> None:
    print(f"\nfieldkit serves at {place.url}\n  data folder  {folder}")
    if not place.plain:
        authority = certificates.from_pem((held.tls / tls.AUTHORITY).read_bytes())
        print(f"  tablets      open {place.url}trust on each one first; the server's fingerprint (SHA-256) is\n")
        print(f"               {tls.fingerprint(authority)}\n")
    print(
        "  next         sign in, add people, enrol them on a tablet, issue their certificates\n  stop         Ctrl-C",
        flush=True,
    )


def start(folder: Path, place: Place) -> None:
    """Serve a folder that is set up, alone, until stopped. Raises Refusal already-served."""
    with _alone(folder):
        _serve(folder, place)


def _serve(folder: Path, place: Place, database: str | None = None) -> None:
    """Serve a station that is set up, until stopped: one process that writes, several threads."""
    from gunicorn.app.base import BaseApplication

    class Server(BaseApplication):  # type: ignore[misc, unused-ignore]
        def load_config(self) -> None:
            for name, value in _options(folder, place).items():
                self.cfg.set(name, value)

        def load(self) -> Any:
            return create_app(folder, plain_http=place.plain, hosts=_trusted(place), database_url=database)

    Server().run()


def _options(folder: Path, place: Place) -> dict[str, Any]:
    made: dict[str, Any] = {
        "bind": f"{_bracketed(place.host)}:{place.port}",
        "workers": 1,
        "worker_class": "gthread",
        "threads": THREADS,
        "timeout": TIMEOUT,
        "graceful_timeout": 10,
        "loglevel": "warning",
        # nothing steers this server from outside its own process
        "control_socket_disable": True,
        "proc_name": "fieldkit",
        # no proxy is expected in front, so nobody may say that he is somebody else
        "forwarded_allow_ips": "",
    }
    if not place.plain:
        held = _tls(folder / "tls", place)
        made.update(certfile=str(held.certificate), keyfile=str(held.key), ssl_context=_modern)
    return made


def _modern(_config: Any, default: Any) -> ssl.SSLContext:
    context: ssl.SSLContext = default()
    context.minimum_version = ssl.TLSVersion.TLSv1_2
    return context
