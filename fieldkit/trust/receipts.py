"""Receipts: what the server signs when it has stored events, and the tablet verifies before it says "received".

One P-256 key per server, made at the first start, pinned in the kit. It signs receipts, kit manifests and picture
receipts, and nothing about people. Not here: when to give one (fieldkit.operations).
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

from fieldkit.errors import Refusal
from fieldkit.trust import jws, keys
from fieldkit.trust.keys import PrivateKey, PublicKey

TYPE = "fieldkit-receipt"
_FIELDS = {"store", "run", "chain", "seq", "head", "time"}


def key(folder: Path) -> PrivateKey:
    """The server's receipt key, made in `folder` (0600) at the first call."""
    return keys.load_or_create(folder / "receipt.key")


def make(signer: PrivateKey, *, store: str, run: str, chain: str, seq: int, head: str, time: str) -> str:
    """A receipt: everything of `chain` up to `seq`, whose event has the hash `head`, is stored. `time` is ISO 8601."""
    payload = {"store": store, "run": run, "chain": chain, "seq": seq, "head": head, "time": time}
    return jws.sign(payload, signer, TYPE, kid=keys.thumbprint(keys.to_jwk(signer.public_key())))


def verify(token: str, pinned: PublicKey) -> dict[str, Any]:
    """The receipt's payload, when the pinned key signed it. Raises Refusal, among them bad-receipt."""
    payload = jws.verify(token, pinned, TYPE).payload
    if not isinstance(payload, dict) or set(payload) != _FIELDS or type(payload["seq"]) is not int:
        raise Refusal("bad-receipt", "The receipt does not say what was received.")
    return payload
