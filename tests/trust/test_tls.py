"""TLS: the server's certificate works for its names, its authority for no others, and both renew by themselves.

Outside check: the ssl module of Python (OpenSSL) makes a handshake against the certificate.
"""

from __future__ import annotations

import datetime as dt
import ssl
import stat

import pytest
from cryptography import x509
from cryptography.hazmat.primitives import hashes

from fieldkit.errors import Refusal
from fieldkit.trust import certificates, keys, tls

NOW = dt.datetime.now(dt.UTC)
NAMES = ("bench.local", "192.168.7.20", "localhost", "127.0.0.1")


def _handshake(files: tls.Tls, name: str, chain=None) -> None:
    """A handshake in memory between a client that trusts the authority and a server with the certificate."""
    server = ssl.SSLContext(ssl.PROTOCOL_TLS_SERVER)
    server.load_cert_chain(chain or files.certificate, files.key)
    client = ssl.create_default_context(cafile=str(files.authority))
    ends = [(ssl.MemoryBIO(), ssl.MemoryBIO())]
    (up, down) = ends[0]
    a = client.wrap_bio(down, up, server_hostname=name)
    b = server.wrap_bio(up, down, server_side=True)
    done: set[str] = set()
    for _ in range(10):
        for label, side in (("a", a), ("b", b)):
            try:
                side.do_handshake()
                done.add(label)
            except ssl.SSLWantReadError:
                pass
    assert done == {"a", "b"}


@pytest.fixture
def files(tmp_path):
    return tls.ensure(tmp_path, NAMES, NOW)


@pytest.mark.parametrize("name", NAMES)
def test_a_client_that_trusts_the_authority_connects(files, name):
    _handshake(files, name)


def test_the_keys_are_for_their_owner_only(files, tmp_path):
    for name in (tls.AUTHORITY_KEY, tls.SERVER_KEY):
        assert stat.S_IMODE((tmp_path / name).stat().st_mode) == 0o600


def test_the_authority_cannot_vouch_for_another_name(files, tmp_path):
    authority = certificates.from_pem(files.authority.read_bytes())
    issuer = keys.load((tmp_path / tls.AUTHORITY_KEY).read_bytes(), None, "")
    server = certificates.from_pem(files.certificate.read_bytes())
    builder = x509.CertificateBuilder().subject_name(server.subject).issuer_name(authority.subject)
    builder = builder.public_key(server.public_key()).serial_number(7)
    builder = builder.not_valid_before(server.not_valid_before_utc).not_valid_after(server.not_valid_after_utc)
    builder = builder.add_extension(x509.SubjectAlternativeName([x509.DNSName("bank.example")]), critical=False)
    path = tmp_path / "forged.pem"
    path.write_text(certificates.to_pem(builder.sign(issuer, hashes.SHA256())))
    with pytest.raises(ssl.SSLCertVerificationError, match="permitted subtree"):
        _handshake(files, "bank.example", path)


def test_nothing_is_made_twice_and_a_certificate_near_its_end_is_renewed(files, tmp_path):
    before = files.certificate.read_bytes()
    assert tls.ensure(tmp_path, NAMES, NOW).certificate.read_bytes() == before
    authority = files.authority.read_bytes()
    tls.ensure(tmp_path, NAMES, NOW + dt.timedelta(days=tls.SERVER_DAYS - tls.RENEW_DAYS))
    assert files.certificate.read_bytes() != before
    assert files.authority.read_bytes() == authority


def test_a_new_private_address_is_served_and_a_new_name_is_refused_with_the_way_out(files, tmp_path):
    tls.ensure(tmp_path, ("bench.local", "10.1.2.3"), NOW)
    _handshake(files, "10.1.2.3")
    for name in ("other.example", "8.8.8.8"):
        with pytest.raises(Refusal) as caught:
            tls.ensure(tmp_path, (name,), NOW)
        assert caught.value.code == "name-not-covered"
    for name in ("two words", "http://x", "*.local", "-a.b", ""):
        with pytest.raises(Refusal) as caught:
            tls.ensure(tmp_path, (name,), NOW)
        assert caught.value.code == "bad-host-name"
