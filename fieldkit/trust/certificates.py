"""X.509 certificates of the signing authority: made, read, and a chain judged at a claimed time.

A person's or seal's certificate has key usage digitalSignature and nonRepudiation, critical, and no extended key
usage (documentSigning alone makes other programs distrust it). The subject says who: CN name, serialNumber the
id, title the roles, comma-separated, O the station. Not here: who may ask for one (authority.py), TLS (tls.py).
"""

from __future__ import annotations

import datetime as dt
import hashlib
from dataclasses import dataclass

from cryptography import x509
from cryptography.exceptions import InvalidSignature
from cryptography.hazmat.primitives import hashes, serialization
from cryptography.hazmat.primitives.asymmetric import ec
from cryptography.x509.oid import NameOID

from fieldkit.errors import Refusal
from fieldkit.trust.keys import PrivateKey, PublicKey

#: the role of the station's seal; no person may bear it
SEAL = "seal"
AUTHORITY_YEARS = 30
PERSON_YEARS = 5
SEAL_YEARS = 10
#: certificates begin this much before they are made, because a tablet's clock may be behind the server's
BEHIND = dt.timedelta(days=1)

Certificate = x509.Certificate


@dataclass(frozen=True)
class Holder:
    """What a certificate says of its holder."""

    name: str
    id: str
    roles: tuple[str, ...]
    station: str


def years(now: dt.datetime, count: int) -> dt.datetime:
    """`now` and `count` years later, to the second, in UTC."""
    return now.astimezone(dt.UTC).replace(microsecond=0) + dt.timedelta(days=365 * count + count // 4)


def make_authority(key: PrivateKey, name: str, station: str, now: dt.datetime) -> Certificate:
    """A self-signed authority with path length 0: it issues people and seals, never another authority."""
    subject = x509.Name([_name(NameOID.ORGANIZATION_NAME, station), _name(NameOID.COMMON_NAME, name)])
    bits = usage(key_cert_sign=True, crl_sign=True)
    builder = _builder(subject, subject, key.public_key(), now, AUTHORITY_YEARS)
    builder = builder.add_extension(x509.BasicConstraints(ca=True, path_length=0), critical=True)
    builder = builder.add_extension(bits, critical=True)
    return builder.sign(key, hashes.SHA256())


def make_leaf(
    key: PrivateKey, authority: Certificate, public: PublicKey, holder: Holder, now: dt.datetime, count: int
) -> Certificate:
    """A certificate for a person or the seal, valid `count` years from `now` but never longer than its authority."""
    subject = x509.Name(
        [
            _name(NameOID.ORGANIZATION_NAME, holder.station),
            _name(NameOID.COMMON_NAME, holder.name),
            _name(NameOID.SERIAL_NUMBER, holder.id),
            _name(NameOID.TITLE, ", ".join(holder.roles)),
        ]
    )
    builder = _builder(subject, authority.subject, public, now, count, authority.not_valid_after_utc)
    issuer = x509.AuthorityKeyIdentifier.from_issuer_public_key(key.public_key())
    bits = usage(digital_signature=True, content_commitment=True)
    builder = builder.add_extension(x509.BasicConstraints(ca=False, path_length=None), critical=True)
    builder = builder.add_extension(bits, critical=True).add_extension(issuer, critical=False)
    return builder.sign(key, hashes.SHA256())


def _builder(
    subject: x509.Name,
    issuer: x509.Name,
    public: PublicKey,
    now: dt.datetime,
    count: int,
    latest: dt.datetime | None = None,
) -> x509.CertificateBuilder:
    start = years(now, 0) - BEHIND
    end = years(now, count) if latest is None else min(latest, years(now, count))
    identifier = x509.SubjectKeyIdentifier.from_public_key(public)
    builder = x509.CertificateBuilder(issuer_name=issuer, subject_name=subject, public_key=public)
    builder = builder.serial_number(x509.random_serial_number()).not_valid_before(start).not_valid_after(end)
    return builder.add_extension(identifier, critical=False)


def _name(oid: x509.ObjectIdentifier, text: str) -> x509.NameAttribute:
    if not text.strip() or len(text.encode()) > 64:
        raise Refusal("bad-name", f"{text!r} cannot stand in a certificate: write 1 to 64 characters.")
    return x509.NameAttribute(oid, text)


def usage(**bits: bool) -> x509.KeyUsage:
    """The key usage extension with the named bits set and all others clear."""
    names = (
        "digital_signature", "content_commitment", "key_encipherment", "data_encipherment", "key_agreement",
        "key_cert_sign", "crl_sign", "encipher_only", "decipher_only",
    )  # fmt: skip
    return x509.KeyUsage(**{name: bits.get(name, False) for name in names})


def holder(certificate: Certificate) -> Holder:
    """Who the certificate says its holder is; what is absent is empty."""

    def text(oid: x509.ObjectIdentifier) -> str:
        found = certificate.subject.get_attributes_for_oid(oid)
        return str(found[0].value) if found else ""

    roles = tuple(r.strip() for r in text(NameOID.TITLE).split(",") if r.strip())
    return Holder(text(NameOID.COMMON_NAME), text(NameOID.SERIAL_NUMBER), roles, text(NameOID.ORGANIZATION_NAME))


def to_pem(certificate: Certificate) -> str:
    return certificate.public_bytes(serialization.Encoding.PEM).decode()


def to_der(certificate: Certificate) -> bytes:
    return certificate.public_bytes(serialization.Encoding.DER)


def from_pem(pem: str | bytes) -> Certificate:
    """The first certificate in `pem`. Raises Refusal bad-certificate."""
    data = pem.encode() if isinstance(pem, str) else pem
    try:
        return x509.load_pem_x509_certificate(data)
    except ValueError as exc:
        raise Refusal("bad-certificate", "This is not a certificate in PEM form (-----BEGIN ...).") from exc


def from_der(der: bytes) -> Certificate:
    """The certificate in `der`. Raises Refusal bad-certificate."""
    try:
        return x509.load_der_x509_certificate(der)
    except ValueError as exc:
        raise Refusal("bad-certificate", "This is not a certificate.") from exc


def digest(certificate: Certificate) -> str:
    """SHA-256 of the certificate's DER, lower-case hex: the `kid` of a person's JWS."""
    return hashlib.sha256(to_der(certificate)).hexdigest()


def public_key(certificate: Certificate) -> PublicKey:
    """The certificate's P-256 key. Raises Refusal bad-certificate for any other."""
    key = certificate.public_key()
    if not isinstance(key, ec.EllipticCurvePublicKey) or not isinstance(key.curve, ec.SECP256R1):
        raise Refusal("bad-certificate", "The certificate's key is not P-256.")
    return key


def check_chain(certificate: Certificate, authority: Certificate, at: dt.datetime) -> None:
    """Nothing, when `authority` issued `certificate` for signing and both were valid at `at`.

    Raises Refusal: not-an-authority, other-authority, forged-certificate, wrong-usage, not-yet-valid or expired.
    """
    _check_authority(authority)
    if certificate.issuer != authority.subject:
        raise Refusal("other-authority", "The certificate was issued by another authority than the one given.")
    try:
        certificate.verify_directly_issued_by(authority)
    except (InvalidSignature, TypeError, ValueError) as exc:
        raise Refusal("forged-certificate", "The authority did not sign this certificate.") from exc
    _check_leaf(certificate)
    for one in (certificate, authority):
        if at < one.not_valid_before_utc:
            start = f"{one.not_valid_before_utc:%Y-%m-%d %H:%M} UTC"
            raise Refusal("not-yet-valid", f"The certificate is valid from {start} on only.")
        if at > one.not_valid_after_utc:
            raise Refusal("expired", f"The certificate was valid until {one.not_valid_after_utc:%Y-%m-%d %H:%M} UTC.")


def _check_authority(authority: Certificate) -> None:
    try:
        basic = authority.extensions.get_extension_for_class(x509.BasicConstraints).value
        usage = authority.extensions.get_extension_for_class(x509.KeyUsage).value
        fits = basic.ca and usage.key_cert_sign
    except (x509.ExtensionNotFound, ValueError):
        fits = False
    if not fits:
        raise Refusal("not-an-authority", "The certificate given is not a signing authority's certificate.")


def _check_leaf(certificate: Certificate) -> None:
    try:
        basic = certificate.extensions.get_extension_for_class(x509.BasicConstraints).value
        usage = certificate.extensions.get_extension_for_class(x509.KeyUsage).value
        fits = not basic.ca and usage.digital_signature and usage.content_commitment
    except (x509.ExtensionNotFound, ValueError):
        fits = False
    public_key(certificate)
    if not fits:
        raise Refusal("wrong-usage", "The certificate is not one for signing records.")
