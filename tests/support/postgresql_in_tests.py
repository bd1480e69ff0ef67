"""A real PostgreSQL that the tests start themselves and stop again.

It runs as its own user in a folder of its own, on a Unix socket, fsync off. Where it is not installed, or there is no
user to run it as, what needs it is skipped and says so.
"""

from __future__ import annotations

import itertools
import os
import pwd
import shutil
import subprocess
import tempfile
from collections.abc import Iterator
from pathlib import Path

import pytest


def _binaries() -> Path | None:
    found = sorted(Path("/usr/lib/postgresql").glob("*/bin/initdb"))
    return found[-1].parent if found else None


def _as_postgres() -> list[str]:
    """How to run a command as a user that is not root, which PostgreSQL insists on."""
    if os.geteuid() != 0:
        return []
    try:
        pwd.getpwnam("postgres")
    except KeyError:
        pytest.skip("PostgreSQL does not run as root, and there is no user postgres")
    if shutil.which("setpriv") is None:
        pytest.skip("setpriv is not installed, so PostgreSQL cannot be started as another user")
    return ["setpriv", "--reuid=postgres", "--regid=postgres", "--init-groups"]


@pytest.fixture(scope="session")
def postgresql() -> Iterator[str]:
    """A server; gives the folder of its socket."""
    binaries = _binaries()
    if binaries is None:
        pytest.skip("PostgreSQL is not installed")
    become = _as_postgres()
    folder = Path(tempfile.mkdtemp(prefix="fieldkit-pg-"))
    if become:
        shutil.chown(folder, "postgres", "postgres")
    data = folder / "data"

    def run(*command: str) -> None:
        subprocess.run([*become, *command], check=True, cwd=folder, capture_output=True)

    run(str(binaries / "initdb"), "-D", str(data), "-U", "fieldkit", "-A", "trust", "--no-sync", "-E", "UTF8")
    options = f"-c listen_addresses='' -c unix_socket_directories={folder} -c fsync=off"
    run(str(binaries / "pg_ctl"), "-D", str(data), "-o", options, "-l", str(folder / "log"), "-w", "start")
    try:
        yield str(folder)
    finally:
        run(str(binaries / "pg_ctl"), "-D", str(data), "-m", "immediate", "stop")
        shutil.rmtree(folder, ignore_errors=True)


_numbers = itertools.count(1)


def fresh_database(socket: str) -> str:
    """The URL of a new, empty database."""
    import psycopg

    name = f"fieldkit_{next(_numbers)}"
    with psycopg.connect(f"host={socket} user=fieldkit dbname=postgres", autocommit=True) as connection:
        connection.execute(f"CREATE DATABASE {name}")
    return f"postgresql+psycopg://fieldkit@/{name}?host={socket}"
