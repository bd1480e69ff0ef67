"""The signing authority: its key is held, its certificates say who, and a chain is judged at the claimed time.

Outside check: OpenSSL opens the held key with the passphrase and verifies the chain (skipped where it is absent).
"""

from __future__ import annotations

import datetime as dt
import shutil
import subprocess

import pytest
from cryptography import x509

from fieldkit.errors import Refusal
from fieldkit.trust import authority, certificates, keys, seals
from fieldkit.trust.certificates import Holder

NOW = dt.datetime(2026, 7, 31, 12, 0, tzinfo=dt.UTC)
WORD = "four words or more"


def _code(function, *arguments, **named):
    with pytest.raises(Refusal) as caught:
        function(*arguments, **named)
    return caught.value.code


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    return tmp_path_factory.mktemp("authority")


@pytest.fixture(scope="module")
def station(folder):
    return authority.create(folder, WORD, "Skarrow Fell", NOW)


def _person(station, roles=("technician",), now=NOW):
    return authority.issue_person(station, "J. Vell", "j.vell", keys.to_jwk(keys.new().public_key()), now, roles)


def test_the_key_is_on_disk_only_under_the_passphrase_and_only_for_its_owner(folder, station):
    path = folder / authority.KEY
    assert path.stat().st_mode & 0o777 == 0o600
    assert b"ENCRYPTED PRIVATE KEY" in path.read_bytes()
    assert authority.open(folder, WORD).key.private_numbers() == station.key.private_numbers()
    assert _code(authority.open, folder, "four words or less") == "wrong-passphrase"


def test_an_authority_is_never_replaced_and_a_short_passphrase_leaves_nothing(folder, station, tmp_path):
    assert _code(authority.create, folder, WORD, "Other", NOW) == "authority-exists"
    assert _code(authority.create, tmp_path / "a", "short", "Other", NOW) == "short-passphrase"
    assert list((tmp_path / "a").iterdir()) == []


def test_a_persons_certificate_says_who_and_is_for_signing_only(station):
    cert = _person(station, ("supervisor", "technician"))
    assert certificates.holder(cert) == Holder("J. Vell", "j.vell", ("supervisor", "technician"), "Skarrow Fell")
    usage = cert.extensions.get_extension_for_class(x509.KeyUsage)
    assert usage.critical and usage.value.digital_signature and usage.value.content_commitment
    assert not usage.value.key_cert_sign
    with pytest.raises(x509.ExtensionNotFound):
        cert.extensions.get_extension_for_class(x509.ExtendedKeyUsage)
    basic = station.certificate.extensions.get_extension_for_class(x509.BasicConstraints)
    assert basic.critical and basic.value.ca and basic.value.path_length == 0


@pytest.mark.parametrize("roles", [(), ("seal",), ("a, supervisor",), (" ",)])
def test_no_person_gets_the_seals_role_or_none(station, roles):
    assert _code(_person, station, roles) == "bad-role"


def test_a_chain_holds_at_its_time_and_not_outside(station):
    cert = _person(station)
    certificates.check_chain(cert, station.certificate, NOW)
    assert _code(certificates.check_chain, cert, station.certificate, NOW - dt.timedelta(hours=25)) == "not-yet-valid"
    certificates.check_chain(cert, station.certificate, NOW - dt.timedelta(hours=23))
    late = NOW + dt.timedelta(days=6 * 366)
    assert _code(certificates.check_chain, cert, station.certificate, late) == "expired"


def test_another_authority_with_the_same_name_is_no_authority(station, tmp_path):
    cert = _person(station)
    key = keys.new()
    name = certificates.holder(station.certificate).name
    twin = certificates.make_authority(key, name, "Skarrow Fell", NOW)
    other = authority.create(tmp_path, WORD, "Skarrow Fell", NOW)
    assert _code(certificates.check_chain, cert, twin, NOW) == "forged-certificate"
    assert _code(certificates.check_chain, cert, other.certificate, NOW) == "other-authority"
    assert _code(certificates.check_chain, cert, cert, NOW) == "not-an-authority"


def test_a_person_cannot_issue_a_person(station):
    key = keys.new()
    cert = authority.issue_person(station, "J. Vell", "j.vell", keys.to_jwk(key.public_key()), NOW)
    fake = certificates.make_leaf(key, cert, keys.new().public_key(), Holder("X", "x", ("supervisor",), "S"), NOW, 1)
    assert _code(certificates.check_chain, fake, cert, NOW) == "not-an-authority"
    assert _code(certificates.check_chain, fake, station.certificate, NOW) == "other-authority"


def test_the_seal_is_made_once_and_loaded_again(folder, station):
    made = seals.create(folder, station, NOW)
    assert (folder / seals.KEY).stat().st_mode & 0o777 == 0o600
    loaded = seals.load(folder)
    assert loaded.certificate == made.certificate and loaded.authority == station.certificate
    certificates.check_chain(loaded.certificate, loaded.authority, NOW)
    assert certificates.holder(loaded.certificate).roles == ("seal",)


def test_no_seal_no_authority_and_a_foreign_key_are_said_plainly(tmp_path):
    assert _code(seals.load, tmp_path) == "no-seal"
    assert _code(authority.open, tmp_path, WORD) == "no-authority"
    (tmp_path / authority.CERTIFICATE).write_text("nothing")
    assert _code(authority.open, tmp_path, WORD) == "bad-certificate"


def test_a_jwk_that_is_not_a_public_p256_key_is_refused():
    good = keys.to_jwk(keys.new().public_key())
    assert keys.to_jwk(keys.from_jwk({**good, "ext": True})) == good
    for bad in ({}, None, {**good, "crv": "P-384"}, {**good, "d": "AA"}, {**good, "x": good["y"]}, {**good, "x": "AA"}):
        assert _code(keys.from_jwk, bad) == "bad-key"


@pytest.mark.skipif(shutil.which("openssl") is None, reason="openssl is not installed")
def test_openssl_opens_the_held_key_and_verifies_the_chain(folder, station, tmp_path):
    path = tmp_path / "person.pem"
    path.write_text(certificates.to_pem(_person(station)))
    held = subprocess.run(
        ["openssl", "pkey", "-in", str(folder / authority.KEY), "-passin", f"pass:{WORD}", "-noout", "-text_pub"],
        capture_output=True,
    )
    assert held.returncode == 0 and b"prime256v1" in held.stdout
    seconds = str(int(NOW.timestamp()) + 60)
    args = ["openssl", "verify", "-x509_strict", "-attime", seconds, "-CAfile", str(folder / authority.CERTIFICATE)]
    chain = subprocess.run([*args, str(path)], capture_output=True)
    assert chain.returncode == 0, chain.stderr
