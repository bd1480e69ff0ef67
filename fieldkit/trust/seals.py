"""The station's seal: a key on the server with a certificate by the signing authority. It seals PDFs unattended.

Not here: sealing a PDF (fieldkit.pdf.seal).
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field
from pathlib import Path

from fieldkit.errors import Refusal
from fieldkit.trust import authority as authorities
from fieldkit.trust import certificates, keys
from fieldkit.trust.authority import Authority
from fieldkit.trust.certificates import Certificate
from fieldkit.trust.keys import PrivateKey

KEY, CERTIFICATE = "seal.key", "seal.pem"


@dataclass(frozen=True)
class Seal:
    """What seals a PDF: the key, its certificate, and the certificate of the authority that issued it."""

    certificate: Certificate
    authority: Certificate
    key: PrivateKey = field(repr=False)


def create(folder: Path, authority: Authority, now: dt.datetime) -> Seal:
    """Make the seal in `folder`, or issue it a fresh certificate when its key is there already."""
    key = keys.load_or_create(folder / KEY)
    certificate = authorities.issue_seal(authority, key.public_key(), now)
    (folder / CERTIFICATE).write_text(certificates.to_pem(certificate), encoding="ascii")
    return Seal(certificate, authority.certificate, key)


def load(folder: Path) -> Seal:
    """The seal in `folder`. Raises Refusal no-seal, no-authority or damaged-key."""
    if not (folder / KEY).exists() or not (folder / CERTIFICATE).exists():
        raise Refusal("no-seal", f"{folder} holds no seal yet. Set the station up first.")
    certificate = certificates.from_pem((folder / CERTIFICATE).read_bytes())
    key = keys.load((folder / KEY).read_bytes(), None, str(folder / KEY))
    if key.public_key() != certificates.public_key(certificate):
        raise Refusal("damaged-key", f"{folder / KEY} does not belong to the certificate beside it.")
    return Seal(certificate, authorities.certificate(folder), key)
