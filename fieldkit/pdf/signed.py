"""The signatures in a PDF as the signing library reads them, and the plain facts about each.

Not here: which signatures a record must have and what they must be like (checks/signatures.py).
"""

from __future__ import annotations

import asyncio
import datetime as dt
import logging
from dataclasses import dataclass
from typing import Any

from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.reader import PdfFileReader
from pyhanko.sign.diff_analysis import ModificationLevel
from pyhanko.sign.fields import MDPPerm, enumerate_sig_fields
from pyhanko.sign.validation import EmbeddedPdfSignature
from pyhanko.sign.validation.pdf_embedded import async_validate_pdf_signature
from pyhanko.sign.validation.settings import KeyUsageConstraints
from pyhanko.sign.validation.status import SignatureCoverageLevel
from pyhanko_certvalidator import ValidationContext

from fieldkit.pdf.seal import asn1
from fieldkit.trust import certificates
from fieldkit.trust.certificates import Certificate

_USAGE = KeyUsageConstraints(key_usage={"digital_signature", "non_repudiation"}, match_all_key_usages=True)


@dataclass(frozen=True)
class Signature:
    """One filled signature field. `problem` says why it could not be judged; the rest is then empty."""

    field: str
    problem: str = ""
    certificate: Certificate | None = None
    #: the signature belongs to the key, and the signed bytes are unchanged
    genuine: bool = False
    certifies: bool = False
    #: covers the whole file, or the whole of the revision that it closed
    whole_file: bool = False
    whole_revision: bool = False
    #: what came after is permitted, and whether anything came after
    permitted: bool = False
    followed: bool = True
    #: the signature forbids any later change
    locks: bool = False
    time: dt.datetime | None = None
    reason: str = ""


def names(reader: PdfFileReader) -> dict[str, bool]:
    """Every signature field and whether it is filled."""
    return {name: value is not None for name, value, _ in enumerate_sig_fields(reader)}


def signatures(reader: PdfFileReader, authority: Certificate | None) -> dict[str, Signature]:
    """The filled signature fields by name. Trust in the certificate is judged elsewhere."""
    found: dict[str, Signature] = {}
    for name, value, reference in enumerate_sig_fields(reader, filled_status=True):
        if value is not None:
            found[name] = _judge(reader, reference.get_object(), name, authority)
    return found


def _judge(
    reader: PdfFileReader, field: generic.DictionaryObject, name: str, authority: Certificate | None
) -> Signature:
    # A hostile file can make the library fail in any way; whatever it is, the signature is then not a good one.
    try:
        embedded = EmbeddedPdfSignature(reader, field, name)
        certificate = certificates.from_der(embedded.signer_cert.dump())
        status = asyncio.run(_validate(embedded, authority or certificate))
        return _facts(embedded, status, certificate)
    except Exception as exc:
        return Signature(name, problem=f"{exc or type(exc).__name__}")


async def _validate(embedded: EmbeddedPdfSignature, root: Certificate) -> Any:
    moment = embedded.self_reported_timestamp
    context = ValidationContext(
        trust_roots=[asn1(root)], allow_fetching=False, revocation_mode="soft-fail", moment=moment
    )
    logger = logging.getLogger("pyhanko")
    before, logger.disabled = logger.disabled, True
    try:
        return await async_validate_pdf_signature(embedded, context, key_usage_settings=_USAGE)
    finally:
        logger.disabled = before


def _facts(embedded: EmbeddedPdfSignature, status: Any, certificate: Certificate) -> Signature:
    level = status.modification_level
    reason = embedded.sig_object.get("/Reason", "")
    return Signature(
        field=embedded.field_name,
        certificate=certificate,
        genuine=bool(status.intact and status.valid),
        certifies=_certifies(embedded),
        whole_file=status.coverage == SignatureCoverageLevel.ENTIRE_FILE,
        whole_revision=status.coverage in (SignatureCoverageLevel.ENTIRE_FILE, SignatureCoverageLevel.ENTIRE_REVISION),
        permitted=bool(status.docmdp_ok) and level is not None and level <= ModificationLevel.FORM_FILLING,
        followed=level is not ModificationLevel.NONE,
        locks=embedded.docmdp_level == MDPPerm.NO_CHANGES and embedded.fieldmdp is not None,
        time=embedded.self_reported_timestamp,
        reason=str(reason),
    )


def _certifies(embedded: EmbeddedPdfSignature) -> bool:
    """Whether this is the file's certifying signature, with form filling as the most that it permits."""
    permissions = embedded.reader.root.get("/Perms", generic.DictionaryObject())
    try:
        certified = permissions.raw_get("/DocMDP")
        own = embedded.sig_field.raw_get("/V")
    except KeyError:
        return False
    same = getattr(certified, "reference", None) == getattr(own, "reference", 0)
    level = embedded.docmdp_level
    return same and level is not None and level <= MDPPerm.FILL_FORMS
