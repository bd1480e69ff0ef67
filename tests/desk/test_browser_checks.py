"""The browser's own check before it signs: run in node on a file that the server prepared, and on tampered ones.

Form checked: RFC 5652, 5.3 and 5.4 (signed attributes, message digest), RFC 5035 (signing certificate v2).
"""

from __future__ import annotations

import base64
import hashlib
import json
import shutil
import subprocess
from pathlib import Path
from typing import Any

import pytest
from asn1crypto import cms
from desk_in_tests import ORME, QUILL
from station_in_tests import held

from fieldkit.operations import review

RUN = "260731-B2-1AAAA"
SCRIPT = Path(__file__).parents[1] / "js" / "core" / "checks.mjs"


@pytest.fixture
def prepared(desk, inside) -> tuple[dict[str, Any], bytes, str]:
    if shutil.which("node") is None:
        pytest.skip("node is not installed, so the browser's check cannot be run here")
    desk.waiting()
    _, kid = desk.key(ORME)
    made = review.prepare(ORME, held(desk.app), RUN, kid)
    ready = {
        "to_sign": base64.b64encode(made.to_sign).decode(),
        "start": made.start,
        "end": made.end,
        "sealed": made.sealed,
        "length": made.length,
        "pdf_sha256": made.pdf_sha256,
        "kid": made.kid,
    }
    return ready, review.prepared_pdf(ORME, made.id), kid


def ask(ready: dict[str, Any], pdf: bytes, kid: str) -> dict[str, Any]:
    question = json.dumps({"ready": ready, "pdf": base64.b64encode(pdf).decode(), "kid": kid})
    done = subprocess.run(
        ["node", "--no-warnings", str(SCRIPT)], input=question, capture_output=True, text=True, check=True
    )
    return json.loads(done.stdout)


def rehashed(ready: dict[str, Any], pdf: bytes) -> dict[str, Any]:
    """What a server that lies about the file would say of it."""
    return {**ready, "pdf_sha256": hashlib.sha256(pdf).hexdigest()}


def test_what_the_server_prepared_is_content_and_everything_else_is_named(prepared, desk, inside) -> None:
    ready, pdf, kid = prepared
    assert len(ask(ready, pdf, kid)["checked"]) == 2

    # the library's own reading of the attributes agrees with what the script looks for
    attributes = {a["type"].native: a for a in cms.CMSAttributes.load(base64.b64decode(ready["to_sign"]))}
    covered = pdf[: ready["start"]] + pdf[ready["end"] :]
    assert attributes["message_digest"]["values"][0].native == hashlib.sha256(covered).digest()

    other = pdf[:-1] + b"\n\n"
    assert ask(ready, other, kid) == {"refused": "other-file"}
    assert ask(rehashed(ready, other), other, kid) == {"refused": "other-digest"}

    flipped = bytearray(pdf)
    flipped[2000] ^= 1
    assert ask(rehashed(ready, bytes(flipped)), bytes(flipped), kid) == {"refused": "other-file"}

    filled = bytearray(pdf)
    filled[ready["start"] + 10] = ord("A")
    assert ask(rehashed(ready, bytes(filled)), bytes(filled), kid) == {"refused": "odd-gap"}
    assert ask({**ready, "start": 10}, pdf, kid) == {"refused": "odd-gap"}

    _, theirs = desk.key(QUILL)
    assert ask(ready, pdf, theirs) == {"refused": "other-key"}
    assert ask({**ready, "kid": theirs}, pdf, theirs) == {"refused": "other-key"}

    cut = base64.b64encode(base64.b64decode(ready["to_sign"])[:-3]).decode()
    assert ask({**ready, "to_sign": cut}, pdf, kid) == {"refused": "odd-attributes"}
    plain = base64.b64encode(b"I agree to everything").decode()
    assert ask({**ready, "to_sign": plain}, pdf, kid) == {"refused": "odd-attributes"}
