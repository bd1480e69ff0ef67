"""Now, and fresh ids: the only place where the server reads its clock or rolls dice for names."""

from __future__ import annotations

import datetime as dt
import secrets


def now() -> dt.datetime:
    return dt.datetime.now(dt.UTC)


def text(at: dt.datetime | None = None) -> str:
    """UTC, ISO 8601 with milliseconds and "Z": sorts as text, and is how every time of the server is stored."""
    return (at or now()).astimezone(dt.UTC).isoformat(timespec="milliseconds").replace("+00:00", "Z")


def read(value: str) -> dt.datetime:
    """The moment in a text made by `text`, or in any ISO 8601 text with an offset. Raises ValueError without one."""
    made = dt.datetime.fromisoformat(value)
    if made.tzinfo is None:
        raise ValueError(f"{value!r} does not say which time zone")
    return made.astimezone(dt.UTC)


def order(value: str) -> dt.datetime:
    """What to sort by where times of several tablets stand side by side; text that is no time comes first."""
    try:
        return read(value)
    except ValueError:
        return dt.datetime.min.replace(tzinfo=dt.UTC)


def shown(value: str) -> str:
    """A stored time as a person reads it: "31 Jul 2026, 12:00 UTC". Text that is no time stays as it is."""
    try:
        return f"{read(value):%-d %b %Y, %H:%M} UTC"
    except ValueError:
        return value


def fresh(prefix: str) -> str:
    """A name that nothing else has: the prefix and 16 random characters."""
    return f"{prefix}-{secrets.token_hex(8)}"
