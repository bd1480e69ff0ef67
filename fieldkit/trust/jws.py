"""Compact JWS, ES256 only (RFC 7515, RFC 7518 3.4), with the type pinned by the caller.

The algorithm is never taken from the token: a header that says anything but ES256, or another `typ` than asked for,
or a header member that is not known, is refused. Not here: what the payloads mean.
"""

from __future__ import annotations

import base64
import datetime as dt
import json
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from cryptography.exceptions import InvalidSignature
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec
from cryptography.hazmat.primitives.asymmetric.utils import decode_dss_signature, encode_dss_signature

from fieldkit.errors import Refusal
from fieldkit.trust import certificates
from fieldkit.trust.certificates import Certificate
from fieldkit.trust.keys import PrivateKey, PublicKey, b64, unb64

#: bytes of a raw ES256 signature, r and s of 32 bytes each
RAW = 64
#: longest token that is looked at, in characters
LONGEST = 100_000
_HEADER = {"alg", "typ", "kid", "x5c"}


@dataclass(frozen=True)
class Verified:
    """A token whose signature held: its payload, its protected header, and the certificate that it brought (x5c)."""

    payload: Any
    header: dict[str, Any]
    certificate: Certificate | None


def to_raw(der: bytes) -> bytes:
    """A DER ECDSA signature as 64 bytes r and s."""
    r, s = decode_dss_signature(der)
    return r.to_bytes(32, "big") + s.to_bytes(32, "big")


def to_der(raw: bytes) -> bytes:
    """64 bytes r and s as DER. Raises Refusal bad-signature on any other length: the form is never guessed."""
    if len(raw) != RAW:
        raise Refusal("bad-signature", f"A signature has {RAW} bytes; this one has {len(raw)}.")
    return encode_dss_signature(int.from_bytes(raw[:32], "big"), int.from_bytes(raw[32:], "big"))


def check_raw(public: PublicKey, raw: bytes, data: bytes) -> None:
    """Nothing, when `raw` is the key's ES256 signature over `data`. Raises Refusal bad-signature."""
    try:
        public.verify(to_der(raw), data, ec.ECDSA(hashes.SHA256()))
    except (InvalidSignature, ValueError) as exc:
        raise Refusal("bad-signature", "The signature does not belong to this key and this text.") from exc


def sign(payload: Any, key: PrivateKey, typ: str, *, kid: str = "", x5c: Sequence[Certificate] = ()) -> str:
    """A compact JWS over `payload` (bytes as they are; anything else as JSON).

    With `x5c` (leaf first) the certificates travel inside and `kid` defaults to the leaf's SHA-256.
    """
    header: dict[str, Any] = {"alg": "ES256", "typ": typ}
    if kid or x5c:
        header["kid"] = kid or certificates.digest(x5c[0])
    if x5c:
        header["x5c"] = [base64.b64encode(certificates.to_der(c)).decode() for c in x5c]
    body = payload if isinstance(payload, bytes) else _json(payload)
    text = f"{b64(_json(header))}.{b64(body)}"
    raw = to_raw(key.sign(text.encode("ascii"), ec.ECDSA(hashes.SHA256())))
    return f"{text}.{b64(raw)}"


def verify(token: str, trust: PublicKey | Certificate, typ: str, at: dt.datetime | None = None) -> Verified:
    """The token's payload, when its signature holds.

    `trust` is the signer's public key, or the signing authority's certificate: then the token must bring its x5c,
    and the chain is judged at `at` (required). Raises Refusal: bad-token, wrong-type, bad-signature, no-certificate,
    or a code of certificates.check_chain.
    """
    header, body, text, raw = read(token)
    if header["typ"] != typ:
        raise Refusal("wrong-type", f"This is a {header['typ']!r}, not a {typ!r}.")
    certificate = _brought(header)
    if isinstance(trust, Certificate):
        if certificate is None:
            raise Refusal("no-certificate", "The signature brings no certificate of its signer.")
        if at is None:
            raise ValueError("a chain is judged at a time; give `at`")
        certificates.check_chain(certificate, trust, at)
        public = certificates.public_key(certificate)
    else:
        public = trust
        if certificate is not None and certificates.public_key(certificate) != public:
            raise Refusal("bad-signature", "The certificate in the signature belongs to another key.")
    check_raw(public, raw, text)
    return Verified(_parse(body), header, certificate)


def claimed(token: str) -> Any:
    """The payload of a token whose signature has *not* been checked: only to learn which key to check it with."""
    return _parse(read(token)[1])


def certificate_of(token: str) -> Certificate | None:
    """The signer's certificate that the token brings, unchecked; None without x5c. Raises Refusal bad-token."""
    return _brought(read(token)[0])


def read(token: str) -> tuple[dict[str, Any], bytes, bytes, bytes]:
    """Header, payload bytes, signed text and raw signature of a compact JWS. Raises Refusal bad-token."""
    try:
        if len(token) > LONGEST:
            raise ValueError("too long")
        first, second, third = token.split(".")
        header = _parse(unb64(first))
        if not isinstance(header, dict) or header.get("alg") != "ES256" or not isinstance(header.get("typ"), str):
            raise ValueError("not an ES256 header")
        if set(header) - _HEADER:
            raise ValueError("unknown header member")
        return header, unb64(second), f"{first}.{second}".encode("ascii"), unb64(third)
    except (ValueError, AttributeError, TypeError) as exc:
        raise Refusal("bad-token", f"This is not a signature that can be read: {exc}.") from exc


def _brought(header: dict[str, Any]) -> Certificate | None:
    chain = header.get("x5c")
    if chain is None:
        return None
    try:
        certificate = certificates.from_der(base64.b64decode(chain[0], validate=True))
    except (IndexError, KeyError, TypeError, ValueError) as exc:
        raise Refusal("bad-token", "The certificates in the signature cannot be read.") from exc
    if header.get("kid") != certificates.digest(certificate):
        raise Refusal("bad-token", "The signature names another certificate than the one it brings.")
    return certificate


def _json(value: Any) -> bytes:
    return json.dumps(value, ensure_ascii=False, sort_keys=True, separators=(",", ":"), allow_nan=False).encode()


def _parse(data: bytes) -> Any:
    try:
        return json.loads(data.decode("utf-8", "strict"))
    except (ValueError, RecursionError) as exc:
        raise Refusal("bad-token", "The signed text is not JSON.") from exc
