"""TLS: an authority made at the first start, and the server's certificate by it. It signs no person and no record.

The authority is name-constrained: the names given when it was made, and private, link-local and loopback addresses.
Its key is on the server, because the server's certificate is renewed unattended; whoever trusts it on a tablet trusts
it for those names only. Not here: serving (fieldkit.cli), the page that shows how to trust it (fieldkit.web).
"""

from __future__ import annotations

import datetime as dt
import hashlib
import ipaddress
import re
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

from cryptography import x509
from cryptography.hazmat.primitives import hashes, serialization
from cryptography.x509.oid import ExtendedKeyUsageOID, NameOID

from fieldkit.errors import Refusal
from fieldkit.trust import certificates, keys
from fieldkit.trust.certificates import Certificate

AUTHORITY_KEY, AUTHORITY = "tls-authority.key", "tls-authority.pem"
SERVER_KEY, SERVER = "server.key", "server.pem"
AUTHORITY_DAYS = 3652
#: days; tablets refuse a server certificate that is valid for longer than 825
SERVER_DAYS = 397
#: renewed when fewer days are left
RENEW_DAYS = 60
#: RFC 1918, 3927, 4193, 4291 and loopback
PRIVATE = (
    "10.0.0.0/8",
    "172.16.0.0/12",
    "192.168.0.0/16",
    "169.254.0.0/16",
    "127.0.0.0/8",
    "fc00::/7",
    "fe80::/10",
    "::1/128",
)
_DNS = re.compile(r"(?!-)[a-z0-9-]{1,63}(?<!-)(\.(?!-)[a-z0-9-]{1,63}(?<!-))*")


@dataclass(frozen=True)
class Tls:
    """Where the files for the server are, and the certificate that a tablet is to trust."""

    authority: Path
    certificate: Path
    key: Path


def ensure(folder: Path, names: Iterable[str], now: dt.datetime) -> Tls:
    """The server's TLS files for `names` (host names and addresses), made or renewed in `folder` as needed.

    Raises Refusal bad-host-name, or name-not-covered when the authority made at the first start does not cover a name.
    """
    wanted = tuple(dict.fromkeys(_clean(n) for n in names)) or ("localhost",)
    folder.mkdir(parents=True, exist_ok=True)
    files = Tls(folder / AUTHORITY, folder / SERVER, folder / SERVER_KEY)
    if not files.authority.exists():
        _make_authority(folder, wanted, now)
    authority = certificates.from_pem(files.authority.read_bytes())
    _check_covered(authority, wanted)
    if not _serves(files, wanted, now):
        _make_server(folder, authority, wanted, now)
    return files


def spki_sha256(certificate: Certificate) -> bytes:
    """SHA-256 of the certificate's public key as a browser pins it."""
    form = serialization.PublicFormat.SubjectPublicKeyInfo
    return hashlib.sha256(certificate.public_key().public_bytes(serialization.Encoding.DER, form)).digest()


def fingerprint(certificate: Certificate) -> str:
    """SHA-256 of the certificate, in pairs, to be compared by eye with what a tablet shows."""
    return ":".join(f"{b:02X}" for b in certificate.fingerprint(hashes.SHA256()))


def _clean(name: str) -> str:
    text = name.strip().lower().rstrip(".")
    try:
        return str(ipaddress.ip_address(text))
    except ValueError:
        if _DNS.fullmatch(text):
            return text
    says = f"{name!r} is neither a host name nor an address. Write tablet-server.local or 192.168.1.10."
    raise Refusal("bad-host-name", says)


def _general(name: str) -> x509.GeneralName:
    try:
        return x509.IPAddress(ipaddress.ip_address(name))
    except ValueError:
        return x509.DNSName(name)


def _make_authority(folder: Path, names: tuple[str, ...], now: dt.datetime) -> None:
    key = keys.load_or_create(folder / AUTHORITY_KEY)
    subject = x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, f"fieldkit server {names[0]}"[:64])])
    builder = _builder(subject, subject, key.public_key(), now, dt.timedelta(days=AUTHORITY_DAYS))
    builder = builder.add_extension(x509.BasicConstraints(ca=True, path_length=0), critical=True)
    builder = builder.add_extension(certificates.usage(key_cert_sign=True, crl_sign=True), critical=True)
    permitted = x509.NameConstraints(permitted_subtrees=_subtrees(names), excluded_subtrees=None)
    certificate = builder.add_extension(permitted, critical=True).sign(key, hashes.SHA256())
    _write(folder / AUTHORITY, certificates.to_pem(certificate))


def _subtrees(names: tuple[str, ...]) -> list[x509.GeneralName]:
    nets = [ipaddress.ip_network(n) for n in PRIVATE]
    trees: list[x509.GeneralName] = []
    for name in dict.fromkeys((*names, "localhost")):
        try:
            address = ipaddress.ip_address(name)
        except ValueError:
            trees.append(x509.DNSName(name))
            continue
        if not any(address in net for net in nets):
            nets.append(ipaddress.ip_network(address))
    return [*trees, *(x509.IPAddress(net) for net in nets)]


def _check_covered(authority: Certificate, names: tuple[str, ...]) -> None:
    permitted = authority.extensions.get_extension_for_class(x509.NameConstraints).value.permitted_subtrees or []
    for name in names:
        if not any(_covers(p, _general(name)) for p in permitted):
            raise Refusal(
                "name-not-covered",
                f"The TLS authority was not made for {name}. Serve under a name it covers, or move {AUTHORITY} and "
                f"{AUTHORITY_KEY} away to make a new one, which every tablet must then trust again.",
            )


def _covers(tree: x509.GeneralName, name: x509.GeneralName) -> bool:
    if isinstance(tree, x509.IPAddress) and isinstance(name, x509.IPAddress):
        net, address = ipaddress.ip_network(tree.value), name.value
        return isinstance(address, ipaddress.IPv4Address | ipaddress.IPv6Address) and address in net
    if isinstance(tree, x509.DNSName) and isinstance(name, x509.DNSName):
        return name.value == tree.value or name.value.endswith("." + tree.value)
    return False


def _serves(files: Tls, names: tuple[str, ...], now: dt.datetime) -> bool:
    """Whether the server's certificate is there, has all names, is by this authority, and lasts a while yet."""
    if not files.certificate.exists() or not files.key.exists():
        return False
    certificate = certificates.from_pem(files.certificate.read_bytes())
    key = keys.load(files.key.read_bytes(), None, str(files.key))
    authority = certificates.from_pem(files.authority.read_bytes())
    held = certificate.extensions.get_extension_for_class(x509.SubjectAlternativeName).value
    return (
        certificates.public_key(certificate) == key.public_key()
        and certificate.issuer == authority.subject
        and all(_general(n) in held for n in names)
        and certificate.not_valid_before_utc <= now
        and certificate.not_valid_after_utc - now > dt.timedelta(days=RENEW_DAYS)
    )


def _make_server(folder: Path, authority: Certificate, names: tuple[str, ...], now: dt.datetime) -> None:
    issuer = keys.load_or_create(folder / AUTHORITY_KEY)
    if issuer.public_key() != certificates.public_key(authority):
        raise Refusal("damaged-key", f"{folder / AUTHORITY_KEY} does not belong to {folder / AUTHORITY}.")
    key = keys.load_or_create(folder / SERVER_KEY)
    subject = x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, names[0][:64])])
    builder = _builder(subject, authority.subject, key.public_key(), now, dt.timedelta(days=SERVER_DAYS))
    builder = builder.add_extension(x509.BasicConstraints(ca=False, path_length=None), critical=True)
    builder = builder.add_extension(certificates.usage(digital_signature=True), critical=True)
    builder = builder.add_extension(x509.ExtendedKeyUsage([ExtendedKeyUsageOID.SERVER_AUTH]), critical=False)
    builder = builder.add_extension(x509.SubjectAlternativeName([_general(n) for n in names]), critical=False)
    known = x509.AuthorityKeyIdentifier.from_issuer_public_key(issuer.public_key())
    certificate = builder.add_extension(known, critical=False).sign(issuer, hashes.SHA256())
    _write(folder / SERVER, certificates.to_pem(certificate) + certificates.to_pem(authority))


def _builder(
    subject: x509.Name, issuer: x509.Name, public: keys.PublicKey, now: dt.datetime, lasting: dt.timedelta
) -> x509.CertificateBuilder:
    # A day back, because a tablet's clock may be behind the server's.
    start = now.astimezone(dt.UTC).replace(microsecond=0) - dt.timedelta(days=1)
    builder = x509.CertificateBuilder(issuer_name=issuer, subject_name=subject, public_key=public)
    builder = builder.serial_number(x509.random_serial_number())
    builder = builder.not_valid_before(start).not_valid_after(start + lasting)
    return builder.add_extension(x509.SubjectKeyIdentifier.from_public_key(public), critical=False)


def _write(path: Path, text: str) -> None:
    """Replace `path` as a whole, so that a stopped write never leaves half a certificate."""
    fresh = path.with_suffix(".new")
    fresh.write_text(text, encoding="ascii")
    fresh.replace(path)
