"""What the tablet's calls have in common: strict JSON in, the one form of an answer out, and which tablet asks."""

from __future__ import annotations

import json
from typing import Any

from flask import Response, jsonify, request

from fieldkit.errors import Refusal
from fieldkit.operations import devices
from fieldkit.operations.devices import Tablet
from fieldkit.web.app import here

SCHEME = "Fieldkit "
DEEPEST = 20


def answer(**content: Any) -> Response:
    response = jsonify(content)
    response.headers["X-Fieldkit"] = "1"
    return response


def body(limit: int) -> bytes:
    """The request's bytes, at most `limit` of them. Raises Refusal too-large, wrong-media for a packed body."""
    if request.headers.get("Content-Encoding", "identity") != "identity":
        raise Refusal("wrong-media", "Send it unpacked; packed content is not taken here.")
    request.max_content_length = limit
    return request.get_data(cache=True)


def parsed(data: bytes) -> dict[str, Any]:
    """A JSON object: no key twice, no NaN, not nested deeper than 20. Raises Refusal damaged-request."""
    try:
        found = json.loads(data.decode("utf-8", "strict"), parse_constant=_refuse, object_pairs_hook=_once)
    except (ValueError, RecursionError) as exc:
        raise Refusal("damaged-request", "That is not JSON that can be read here.") from exc
    if not isinstance(found, dict) or _depth(found) > DEEPEST:
        raise Refusal("damaged-request", "That is not a JSON object of the form that is expected here.")
    return found


def member(found: dict[str, Any], name: str, kind: type) -> Any:
    """A member that must be there and of a kind. Raises Refusal damaged-request naming it."""
    value = found.get(name)
    if not isinstance(value, kind):
        raise Refusal("damaged-request", f"The request lacks {name!r}, or it is of another kind than expected.")
    return value


def tablet(data: bytes = b"", admitted: bool = True) -> Tablet:
    """The tablet that signed this request with the body `data`. Raises Refusal as operations.devices."""
    header = request.headers.get("Authorization", "")
    if not header.startswith(SCHEME):
        raise Refusal("unknown-device", "This call is for enrolled tablets, and signed by them.")
    path = request.full_path.rstrip("?")
    found = devices.check_request(here(), header[len(SCHEME) :], request.method, path, data)
    return devices.admit(found) if admitted else found


def _refuse(name: str) -> Any:
    raise ValueError(f"{name} is not JSON")


def _once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    found = dict(pairs)
    if len(found) != len(pairs):
        raise ValueError("a key stands twice")
    return found


def _depth(value: Any) -> int:
    if isinstance(value, dict):
        return 1 + max((_depth(v) for v in value.values()), default=0)
    if isinstance(value, list):
        return 1 + max((_depth(v) for v in value), default=0)
    return 0
