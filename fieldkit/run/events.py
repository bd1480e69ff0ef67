"""Events: the closed set of things that can happen in a run, and their exact wire form.

An event is a UTF-8 JSON object made on the tablet; its bytes are stored and hashed as made, never re-serialised:

    {"v": 1, "run": "0731-B2-2", "chain": "<device>.<epoch>", "seq": 0, "prev": "<sha256 of the bytes before>",
     "kind": "read", "by": "<person id>", "at": {"wall": "2026-07-31T14:31:07.123+01:00", "mono": "81234.5",
     "boot": "<id>"}, "app": "0.1.0", "body": {...}}

`prev` of seq 0 is the sheet's SHA-256. `mono` is milliseconds of the monotonic clock since `boot`. Numbers
that a person typed are strings as typed. An old version is lifted by UPCASTS when it is read; the stored bytes stay
as they are. A key that came later has a default, and an instrument from before there were ranges is read as having one.
To add an event: fieldkit.run.bodies says how. Twin: static/core/events.js.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Callable
from typing import Any

from pydantic import ValidationError

from fieldkit.errors import Refusal
from fieldkit.run.bodies import EVENTS, Body, Earlier, GivenValue
from fieldkit.run.instruments import Instrument, with_ranges

__all__ = ["EVENTS", "UPCASTS", "VERSION", "Body", "Earlier", "Envelope", "Event", "GivenValue", "Instrument"]
__all__ += ["digest", "next_event", "parse", "plain", "read_body", "to_text", "with_ranges"]

VERSION = 1


#: (kind, version) -> body of the next version; stored bytes are never touched
UPCASTS: dict[tuple[str, int], Callable[[dict[str, Any]], dict[str, Any]]] = {}


class At(Body):
    wall: str
    mono: str
    boot: str


class Envelope(Body):
    v: int
    run: str
    chain: str
    seq: int
    prev: str
    kind: str
    by: str
    at: At
    app: str
    body: dict[str, Any]


class Event(Body):
    """A parsed event beside the bytes it came from."""

    head: Envelope
    body: Any
    sha256: str
    raw: bytes


def plain(event: Event) -> dict[str, Any]:
    """The event as plain JSON values, defaults written out: what the fold reads, here and on the tablet."""
    head = event.head
    return {
        "seq": head.seq,
        "kind": head.kind,
        "by": head.by,
        "at": {"wall": head.at.wall, "mono": head.at.mono, "boot": head.at.boot},
        "run": head.run,
        "chain": head.chain,
        "prev": head.prev,
        "sha256": event.sha256,
        "body": event.body.model_dump(mode="json"),
    }


def next_event(
    state: dict[str, Any], kind: str, body: dict[str, Any], by: str, at: dict[str, str], app: str
) -> dict[str, Any]:
    """The envelope of the event that follows `state`, ready for `to_text`; the caller hashes and stores that text."""
    return {
        "v": VERSION,
        "run": state["run"],
        "chain": state["chain"],
        "seq": state["seq"] + 1,
        "prev": state["head"],
        "kind": kind,
        "by": by,
        "at": {"wall": at["wall"], "mono": at["mono"], "boot": at["boot"]},
        "app": app,
        "body": body,
    }


def to_text(envelope: dict[str, Any]) -> str:
    """One event as compact JSON in the order of its keys. Made once, by whoever makes the event; never remade."""
    return json.dumps(envelope, ensure_ascii=False, separators=(",", ":"), allow_nan=False)


def digest(raw: bytes) -> str:
    """SHA-256 of an event's bytes: its name, and the next one's `prev`."""
    return hashlib.sha256(raw).hexdigest()


def read_body(kind: str, body: dict[str, Any]) -> Body:
    """A body as its model has it. Strict: "1" is no number and 1 no flag, as on the tablet. Raises ValidationError."""
    found = body.get("instruments") if kind == "run-started" else None
    if isinstance(found, list | tuple):
        body = {**body, "instruments": [with_ranges(one) for one in found]}
    return EVENTS[kind].model_validate_json(json.dumps(body), strict=True)


def _no_constant(name: str) -> Any:
    raise ValueError(f"{name} is not JSON")


def _no_duplicates(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    found = dict(pairs)
    if len(found) != len(pairs):
        raise ValueError("a key stands twice")
    return found


def parse(raw: bytes) -> Event:
    """The event in `raw`. Raises Refusal damaged-event or unknown-version; the caller keeps the bytes either way."""
    try:
        data = json.loads(raw.decode("utf-8", "strict"), parse_constant=_no_constant, object_pairs_hook=_no_duplicates)
        head = Envelope.model_validate_json(json.dumps(data), strict=True)
    except (ValueError, RecursionError) as exc:
        raise Refusal("damaged-event", f"This is not an event: {str(exc).splitlines()[0]}.") from exc
    body, v = head.body, head.v
    while v < VERSION and (head.kind, v) in UPCASTS:
        body, v = UPCASTS[head.kind, v](body), v + 1
    if v != VERSION or head.kind not in EVENTS:
        raise Refusal(
            "unknown-version",
            f"Event {head.seq} is {head.kind!r} version {head.v}, which is not known here. Update fieldkit.",
        )
    try:
        return Event(head=head, body=read_body(head.kind, body), sha256=digest(raw), raw=raw)
    except ValidationError as exc:
        first = exc.errors()[0]
        where = ".".join(str(p) for p in first["loc"])
        raise Refusal(
            "damaged-event", f"Event {head.seq} ({head.kind}) is damaged at {where}: {first['msg']}."
        ) from exc
