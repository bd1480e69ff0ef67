"""Countersigning: the supervisor signs with a key that the server never sees, so it takes two requests.

`prepare` makes the file with a gap and the bytes that the supervisor's browser signs; `finish` puts the signature in.
Between the two, `Prepared` travels as bytes. The sealed file is a prefix of the prepared one, unchanged, so that the
browser can check that what it signs is the file it shows. Not here: whether this person may (fieldkit.operations).
"""

from __future__ import annotations

import asyncio
import datetime as dt
import hashlib
import io
import json
from dataclasses import dataclass
from typing import Any

from asn1crypto import algos, cms
from pyhanko.pdf_utils.content import PdfContent
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.pdf_utils.layout import AxisAlignment, BoxConstraints, Margins, SimpleBoxLayoutRule
from pyhanko.pdf_utils.misc import PdfError
from pyhanko.pdf_utils.reader import PdfFileReader
from pyhanko.sign import fields, signers
from pyhanko.sign.general import SigningError
from pyhanko.sign.signers.pdf_byterange import PreparedByteRangeDigest
from pyhanko.sign.signers.pdf_signer import PdfTBSDocument
from pyhanko.stamp import StaticStampStyle

from fieldkit.errors import Refusal
from fieldkit.pdf import appearance
from fieldkit.pdf.appearance import REVIEWED, Block
from fieldkit.pdf.assemble import SEAL, SUPERVISOR
from fieldkit.pdf.seal import RESERVED, Timed, asn1, registry
from fieldkit.trust import certificates, jws
from fieldkit.trust.certificates import Certificate

_MECHANISM = algos.SignedDigestAlgorithm({"algorithm": "sha256_ecdsa"})
#: room that a DER signature of two 32-byte numbers never exceeds
_DER_ROOM = 72


@dataclass(frozen=True)
class Prepared:
    """A file that waits for one signature: where the gap is, the digest of the rest, and what is to be signed."""

    pdf: bytes
    digest: bytes
    start: int
    end: int
    to_sign: bytes
    #: PEM of the supervisor's certificate and of the authority that issued it
    certificate: str
    authority: str
    #: SHA-256 and length of the sealed file that the prepared one begins with
    sealed: str
    length: int

    def to_bytes(self) -> bytes:
        """One line of JSON, then the file: enough to finish in another request or another process."""
        head = {
            "fieldkit": "prepared/1",
            "digest": self.digest.hex(),
            "start": self.start,
            "end": self.end,
            "to_sign": self.to_sign.hex(),
            "certificate": self.certificate,
            "authority": self.authority,
            "sealed": self.sealed,
            "length": self.length,
            "pdf": hashlib.sha256(self.pdf).hexdigest(),
        }
        return json.dumps(head, sort_keys=True).encode() + b"\n" + self.pdf

    @classmethod
    def from_bytes(cls, data: bytes) -> Prepared:
        """What `to_bytes` made. Raises Refusal damaged-preparation."""
        try:
            line, _, pdf = data.partition(b"\n")
            head = json.loads(line)
            if head.pop("fieldkit") != "prepared/1" or head.pop("pdf") != hashlib.sha256(pdf).hexdigest():
                raise ValueError("not what was prepared")
            digest, to_sign = bytes.fromhex(head.pop("digest")), bytes.fromhex(head.pop("to_sign"))
            return cls(pdf=pdf, digest=digest, to_sign=to_sign, **head)
        except (ValueError, KeyError, TypeError, AttributeError) as exc:
            says = "The prepared file is damaged. Open the record again and countersign it anew."
            raise Refusal("damaged-preparation", says) from exc


class _Typeset(PdfContent):
    """A typeset page in memory, drawn into an appearance."""

    def __init__(self, pdf: bytes) -> None:
        super().__init__()
        self._pdf = pdf

    def render(self) -> bytes:
        drawn = self._ensure_writer.import_page_as_xobject(PdfFileReader(io.BytesIO(self._pdf)))
        self.resources.xobject["/Block"] = drawn
        x0, y0, x1, y1 = (float(n) for n in drawn.get_object()["/BBox"])
        self.box = BoxConstraints(width=x1 - x0, height=y1 - y0)
        return b"/Block Do"


def _style(pdf: bytes) -> StaticStampStyle:
    exact = SimpleBoxLayoutRule(AxisAlignment.ALIGN_MIN, AxisAlignment.ALIGN_MIN, margins=Margins.uniform(0))
    return StaticStampStyle(border_width=0, background=_Typeset(pdf), background_opacity=1.0, background_layout=exact)


def _check_certificate(certificate: Certificate, authority: Certificate, now: dt.datetime) -> None:
    certificates.check_chain(certificate, authority, now)
    if "supervisor" not in certificates.holder(certificate).roles:
        raise Refusal("not-a-supervisor", "Only a person enrolled as a supervisor countersigns a record.")


def _field_size(pdf: PdfFileReader) -> tuple[float, float]:
    """Width and height of the free supervisor's field. Raises Refusal not-sealed or already-countersigned."""
    found = {name: (value, ref) for name, value, ref in fields.enumerate_sig_fields(pdf)}
    if SEAL not in found or SUPERVISOR not in found or found[SEAL][0] is None:
        raise Refusal("not-sealed", "This file is not a record sealed by the station, so it cannot be countersigned.")
    value, reference = found[SUPERVISOR]
    if value is not None:
        raise Refusal("already-countersigned", "This record is countersigned already.")
    x0, y0, x1, y1 = (float(n) for n in reference.get_object()["/Rect"])
    return x1 - x0, y1 - y0


def prepare(
    pdf: bytes, certificate: Certificate, authority: Certificate, now: dt.datetime, meaning: str = REVIEWED
) -> Prepared:
    """The sealed `pdf` with the supervisor's block drawn and a gap for their signature, and the bytes to sign.

    `to_sign` is signed as it is with ECDSA P-256 and SHA-256, as WebCrypto does. Raises Refusal: not-a-supervisor,
    not-sealed, already-countersigned, damaged-pdf, or a code of certificates.check_chain.
    """
    now = now.replace(microsecond=0)
    _check_certificate(certificate, authority, now)
    try:
        return asyncio.run(_prepare(pdf, certificate, authority, now, meaning))
    except (PdfError, SigningError) as exc:
        raise Refusal("damaged-pdf", f"The record's file cannot be signed: {exc}. Render it again.") from exc


async def _prepare(
    pdf: bytes, certificate: Certificate, authority: Certificate, now: dt.datetime, meaning: str
) -> Prepared:
    writer = IncrementalPdfFileWriter(io.BytesIO(pdf))
    name = certificates.holder(certificate).name
    block = Block(name, meaning, now, certificates.digest(certificate))
    style = _style(appearance.pdf(block, *_field_size(writer.prev)))
    signer = _signer(certificate, authority, bytes(_DER_ROOM))
    meta = signers.PdfSignatureMetadata(
        field_name=SUPERVISOR,
        md_algorithm="sha256",
        subfilter=fields.SigSeedSubFilter.PADES,
        docmdp_permissions=fields.MDPPerm.NO_CHANGES,
        reason=meaning,
        name=name,
    )
    timed = Timed(meta, signer=signer, stamp_style=style, now=now)
    out: Any
    digest, _, out = await timed.async_digest_doc_for_signing(
        writer, existing_fields_only=True, bytes_reserved=RESERVED
    )
    attributes = await signer.signed_attrs(digest.document_digest, "sha256", use_pades=True)
    return Prepared(
        pdf=out.getvalue(),
        digest=digest.document_digest,
        start=digest.reserved_region_start,
        end=digest.reserved_region_end,
        to_sign=attributes.dump(),
        certificate=certificates.to_pem(certificate),
        authority=certificates.to_pem(authority),
        sealed=hashlib.sha256(pdf).hexdigest(),
        length=len(pdf),
    )


def _signer(certificate: Certificate, authority: Certificate, value: bytes) -> signers.ExternalSigner:
    return signers.ExternalSigner(
        signing_cert=asn1(certificate),
        cert_registry=registry(certificate, authority),
        signature_value=value,
        signature_mechanism=_MECHANISM,
    )


def finish(prepared: Prepared, raw: bytes) -> bytes:
    """The countersigned file: `raw` is the 64-byte signature over `prepared.to_sign`. Raises Refusal bad-signature."""
    certificate = certificates.from_pem(prepared.certificate)
    jws.check_raw(certificates.public_key(certificate), raw, prepared.to_sign)
    signer = _signer(certificate, certificates.from_pem(prepared.authority), jws.to_der(raw))
    out = io.BytesIO(prepared.pdf)
    asyncio.run(_finish(prepared, signer, out))
    return out.getvalue()


async def _finish(prepared: Prepared, signer: signers.ExternalSigner, out: io.BytesIO) -> None:
    attributes = cms.CMSAttributes.load(prepared.to_sign)
    container = await signer.async_sign_prescribed_attributes("sha256", signed_attrs=attributes)
    gap = PreparedByteRangeDigest(prepared.digest, prepared.start, prepared.end)
    await PdfTBSDocument.async_finish_signing(out, gap, container)
