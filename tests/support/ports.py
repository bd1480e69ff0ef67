"""Ports for servers that the tests start in processes of their own, and whether anything listens on one."""

from __future__ import annotations

import itertools
import os
import socket

#: below the ports that Linux gives to outgoing connections (32768 on): nobody else takes one between the moment it is
#: found free and the moment its server listens, nor while that server is stopped; and no connection meets itself there
FIRST, COUNT = 20_000, 10_000
#: each process of the tests begins elsewhere
_numbers = itertools.count(os.getpid() * 61)


def free_port() -> int:
    """A port on which nothing listens, given once in this process; Chromium opens every one of this range."""
    for number in itertools.islice(_numbers, COUNT):
        port = FIRST + number % COUNT
        with socket.socket() as probe:
            try:
                probe.bind(("127.0.0.1", port))
            except OSError:
                continue
        return port
    raise AssertionError(f"no port is free from {FIRST} on")


def answers(port: int) -> bool:
    """Whether something listens there."""
    with socket.socket() as probe:
        return probe.connect_ex(("127.0.0.1", port)) == 0
