"""EC P-256 keys: made, kept in files only their owner may read, written as JWK, held under a passphrase.

Not here: certificates (certificates.py), and the keys that people hold on their tablets, which never come here.
"""

from __future__ import annotations

import base64
import hashlib
import json
import os
import secrets
from pathlib import Path
from typing import Any

from asn1crypto import algos
from asn1crypto import keys as asn1_keys
from cryptography.hazmat.primitives import padding, serialization
from cryptography.hazmat.primitives.asymmetric import ec
from cryptography.hazmat.primitives.ciphers import Cipher
from cryptography.hazmat.primitives.ciphers.algorithms import AES256
from cryptography.hazmat.primitives.ciphers.modes import CBC

from fieldkit.errors import Refusal

#: PBKDF2-HMAC-SHA256; OWASP Password Storage Cheat Sheet, 2026, asks for 600 000.
ROUNDS = 600_000
#: shortest passphrase that may hold the signing authority's key
SHORTEST = 12

PrivateKey = ec.EllipticCurvePrivateKey
PublicKey = ec.EllipticCurvePublicKey


def new() -> PrivateKey:
    """A fresh P-256 key from the machine's own randomness."""
    return ec.generate_private_key(ec.SECP256R1())


def write_private(path: Path, data: bytes) -> None:
    """Put `data` in a new file that only its owner may read (0600). Raises FileExistsError: keys stay as they are."""
    handle = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600)
    with os.fdopen(handle, "wb") as file:
        file.write(data)
        file.flush()
        os.fsync(file.fileno())


def load_or_create(path: Path) -> PrivateKey:
    """The key in the PEM file `path`, made there (0600) at the first call. Raises Refusal damaged-key."""
    if not path.exists():
        path.parent.mkdir(parents=True, exist_ok=True)
        key = new()
        write_private(path, plain_pem(key))
        return key
    return load(path.read_bytes(), None, str(path))


def plain_pem(key: PrivateKey) -> bytes:
    """PKCS#8 PEM without a passphrase, for keys that the server must use unattended."""
    return key.private_bytes(
        serialization.Encoding.PEM, serialization.PrivateFormat.PKCS8, serialization.NoEncryption()
    )


def load(pem: bytes, passphrase: str | None, where: str) -> PrivateKey:
    """The P-256 key in `pem`. Raises Refusal wrong-passphrase or damaged-key, naming `where` it was read."""
    word = passphrase.encode() if passphrase is not None else None
    try:
        key = serialization.load_pem_private_key(pem, word)
    except (ValueError, TypeError) as exc:
        if passphrase is not None and b"ENCRYPTED" in pem:
            raise Refusal("wrong-passphrase", "That passphrase does not open the key. Try again.") from exc
        raise Refusal("damaged-key", f"{where} holds no key that can be read. Restore it from the backup.") from exc
    if not isinstance(key, ec.EllipticCurvePrivateKey) or not isinstance(key.curve, ec.SECP256R1):
        raise Refusal("damaged-key", f"{where} holds a key that is not P-256. Restore it from the backup.")
    return key


def held_pem(key: PrivateKey, passphrase: str) -> bytes:
    """PKCS#8 PEM under `passphrase`: PBES2 (RFC 8018), PBKDF2-HMAC-SHA256 600 000 rounds, AES-256-CBC.

    Written by hand because the library's own encoder stops at 2048 rounds. Raises Refusal short-passphrase.
    """
    if len(passphrase) < SHORTEST:
        raise Refusal("short-passphrase", f"A passphrase has at least {SHORTEST} characters. Use four words or more.")
    plain = key.private_bytes(
        serialization.Encoding.DER, serialization.PrivateFormat.PKCS8, serialization.NoEncryption()
    )
    salt, start = secrets.token_bytes(16), secrets.token_bytes(16)
    wrapping = hashlib.pbkdf2_hmac("sha256", passphrase.encode(), salt, ROUNDS, 32)
    pad = padding.PKCS7(128).padder()
    padded = pad.update(plain) + pad.finalize()
    lock = Cipher(AES256(wrapping), CBC(start)).encryptor()
    box = asn1_keys.EncryptedPrivateKeyInfo(
        {"encryption_algorithm": _pbes2(salt, start), "encrypted_data": lock.update(padded) + lock.finalize()}
    )
    text = base64.encodebytes(box.dump()).decode().replace("\n", "")
    lines = [text[i : i + 64] for i in range(0, len(text), 64)]
    kind = "ENCRYPTED PRIVATE KEY"
    return "\n".join([f"-----BEGIN {kind}-----", *lines, f"-----END {kind}-----", ""]).encode()


def _pbes2(salt: bytes, start: bytes) -> algos.EncryptionAlgorithm:
    derivation = {
        "algorithm": "pbkdf2",
        "parameters": {
            "salt": algos.Pbkdf2Salt(name="specified", value=salt),
            "iteration_count": ROUNDS,
            "prf": {"algorithm": "sha256"},
        },
    }
    scheme = {"algorithm": "aes256_cbc", "parameters": start}
    parameters = {"key_derivation_func": derivation, "encryption_scheme": scheme}
    return algos.EncryptionAlgorithm({"algorithm": "pbes2", "parameters": parameters})


def b64(data: bytes) -> str:
    """base64url without padding (RFC 7515)."""
    return base64.urlsafe_b64encode(data).rstrip(b"=").decode()


def unb64(text: str) -> bytes:
    """The bytes of unpadded base64url. Raises ValueError on any other character, or on padding."""
    if not text.isascii() or not all(c.isalnum() or c in "-_" for c in text):
        raise ValueError("not base64url")
    data = base64.urlsafe_b64decode(text + "=" * (-len(text) % 4))
    if b64(data) != text:
        raise ValueError("not base64url in its one form")
    return data


def to_jwk(key: PublicKey) -> dict[str, str]:
    """The public key as a JWK (RFC 7517): kty, crv, x, y and nothing else."""
    point = key.public_numbers()
    return {"kty": "EC", "crv": "P-256", "x": b64(point.x.to_bytes(32, "big")), "y": b64(point.y.to_bytes(32, "big"))}


def from_jwk(jwk: Any) -> PublicKey:
    """The P-256 public key of a JWK. Raises Refusal bad-key; a JWK with a private part is refused too."""
    try:
        if jwk["kty"] != "EC" or jwk["crv"] != "P-256" or "d" in jwk:
            raise ValueError("not a public P-256 key")
        x, y = unb64(jwk["x"]), unb64(jwk["y"])
        if len(x) != 32 or len(y) != 32:
            raise ValueError("coordinates are not 32 bytes")
        numbers = ec.EllipticCurvePublicNumbers(int.from_bytes(x, "big"), int.from_bytes(y, "big"), ec.SECP256R1())
        return numbers.public_key()
    except (KeyError, TypeError, AttributeError, ValueError) as exc:
        raise Refusal("bad-key", "That is not a public P-256 key. Enrol again from the tablet.") from exc


def thumbprint(jwk: dict[str, str]) -> str:
    """RFC 7638 thumbprint of a JWK, SHA-256, lower-case hex: a key's name where it has no certificate."""
    members = {name: jwk[name] for name in ("crv", "kty", "x", "y")}
    return hashlib.sha256(json.dumps(members, separators=(",", ":"), sort_keys=True).encode()).hexdigest()
