"""Sealing: the station's certifying signature over the file as put together. PAdES, and only form filling after it.

Not here: the supervisor's signature (countersign.py), the seal's key (fieldkit.trust.seals).
"""

from __future__ import annotations

import asyncio
import datetime as dt
import io
from typing import Any

from asn1crypto import keys as asn1_keys
from asn1crypto import x509 as asn1_x509
from cryptography.hazmat.primitives import serialization
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.sign import fields, signers
from pyhanko.stamp import NoOpStampStyle
from pyhanko_certvalidator.registry import SimpleCertificateStore

from fieldkit.errors import Refusal
from fieldkit.pdf.assemble import SEAL
from fieldkit.trust import certificates
from fieldkit.trust.certificates import Certificate
from fieldkit.trust.seals import Seal

#: bytes kept for a signature container, in hexadecimal digits
RESERVED = 16384
REASON = "Sealed by the station as rendered."


def asn1(certificate: Certificate) -> asn1_x509.Certificate:
    """The certificate as the signing library holds one."""
    return asn1_x509.Certificate.load(certificates.to_der(certificate))


def registry(*chain: Certificate) -> SimpleCertificateStore:
    """A store of the certificates that travel inside a signature."""
    store = SimpleCertificateStore()
    store.register_multiple([asn1(c) for c in chain])
    return store


class Timed(signers.PdfSigner):
    """A signer whose clock is an argument, so that a file says the time that the caller says."""

    def __init__(self, *arguments: Any, now: dt.datetime, **named: Any) -> None:
        super().__init__(*arguments, **named)
        self._now = now.replace(microsecond=0)

    def init_signing_session(self, pdf_out: Any, existing_fields_only: bool = False) -> Any:
        session = super().init_signing_session(pdf_out, existing_fields_only=existing_fields_only)
        session.system_time = self._now
        return session


def seal(pdf: bytes, seal: Seal, now: dt.datetime) -> bytes:
    """The file certified by the station's seal at `now` (aware). Raises Refusal seal-expired."""
    if not seal.certificate.not_valid_before_utc <= now <= seal.certificate.not_valid_after_utc:
        raise Refusal("seal-expired", "The seal's certificate is not valid today. Issue the seal a new one.")
    der = seal.key.private_bytes(
        serialization.Encoding.DER, serialization.PrivateFormat.PKCS8, serialization.NoEncryption()
    )
    signer = signers.SimpleSigner(
        signing_cert=asn1(seal.certificate),
        signing_key=asn1_keys.PrivateKeyInfo.load(der),
        cert_registry=registry(seal.certificate, seal.authority),
    )
    meta = signers.PdfSignatureMetadata(
        field_name=SEAL,
        md_algorithm="sha256",
        subfilter=fields.SigSeedSubFilter.PADES,
        certify=True,
        docmdp_permissions=fields.MDPPerm.FILL_FORMS,
        reason=REASON,
        name=certificates.holder(seal.certificate).name,
    )
    out = io.BytesIO()
    writer = IncrementalPdfFileWriter(io.BytesIO(pdf))
    # The block on the page says what the seal is; the library's own stamp would draw over it, in a font not embedded.
    work = Timed(meta, signer=signer, stamp_style=NoOpStampStyle(), now=now).async_sign_pdf(
        writer, existing_fields_only=True, bytes_reserved=RESERVED, output=out
    )
    asyncio.run(work)
    return out.getvalue()
