"""JWS: only ES256, only the type asked for, only 64-byte signatures; another library reads ours and we read its.

Outside check: joserfc (an independent JOSE library) verifies what is made here and makes what is verified here.
"""

from __future__ import annotations

import base64
import datetime as dt
import json
from pathlib import Path

import pytest
from joserfc import jws as other
from joserfc.jwk import ECKey

from fieldkit.errors import Refusal
from fieldkit.trust import authority, certificates, jws, keys, receipts

NOW = dt.datetime(2026, 7, 31, 12, 0, tzinfo=dt.UTC)
TYP = "fieldkit-signature"


def _code(function, *arguments, **named):
    with pytest.raises(Refusal) as caught:
        function(*arguments, **named)
    return caught.value.code


def _head(**members):
    return keys.b64(json.dumps(members).encode())


def test_what_is_signed_verifies_and_another_library_agrees():
    key = keys.new()
    token = jws.sign({"run": "r", "name": "Łucja Ω"}, key, TYP, kid="k")
    assert jws.verify(token, key.public_key(), TYP).payload == {"run": "r", "name": "Łucja Ω"}
    found = other.deserialize_compact(token, ECKey.import_key(keys.to_jwk(key.public_key())), algorithms=["ES256"])
    assert json.loads(found.payload) == {"run": "r", "name": "Łucja Ω"}


def test_what_another_library_signed_verifies():
    key = keys.new()
    token = other.serialize_compact({"alg": "ES256", "typ": TYP}, b'{"a":1}', ECKey.import_key(keys.plain_pem(key)))
    assert jws.verify(token, key.public_key(), TYP).payload == {"a": 1}


def test_a_hundred_signatures_have_64_bytes_whatever_their_leading_zeros():
    key = keys.new()
    raws = [jws.read(jws.sign({"n": n}, key, TYP))[3] for n in range(100)]
    assert {len(r) for r in raws} == {64}
    zeros = (1).to_bytes(32, "big") * 2
    assert jws.to_raw(jws.to_der(zeros)) == zeros


@pytest.mark.parametrize("length", [0, 63, 65, 70, 72])
def test_a_signature_of_another_length_is_refused_not_guessed(length):
    assert _code(jws.to_der, bytes(length)) == "bad-signature"


def test_another_type_another_key_and_a_changed_payload_are_refused():
    key = keys.new()
    token = jws.sign({"a": 1}, key, TYP)
    head, _, sig = token.split(".")
    assert _code(jws.verify, token, key.public_key(), "fieldkit-receipt") == "wrong-type"
    assert _code(jws.verify, token, keys.new().public_key(), TYP) == "bad-signature"
    forged = f"{head}.{keys.b64(b'{}')}.{sig}"
    assert _code(jws.verify, forged, key.public_key(), TYP) == "bad-signature"


@pytest.mark.parametrize(
    "header",
    [
        {"alg": "none", "typ": TYP},
        {"alg": "HS256", "typ": TYP},
        {"alg": "ES384", "typ": TYP},
        {"alg": "ES256"},
        {"alg": "ES256", "typ": TYP, "crit": ["b64"], "b64": False},
        {"alg": "ES256", "typ": TYP, "jku": "https://elsewhere"},
        {"alg": "ES256", "typ": TYP, "jwk": {}},
    ],
)
def test_no_header_but_a_plain_es256_one_is_read(header):
    token = f"{_head(**header)}.{keys.b64(b'{}')}.{keys.b64(bytes(64))}"
    assert _code(jws.verify, token, keys.new().public_key(), TYP) == "bad-token"


@pytest.mark.parametrize("token", ["", "a.b", "a.b.c.d", "é.b.c", "a=.b.c", "e30.e30.", "\n.\n.\n", "x" * 200_000])
def test_what_is_no_token_is_refused(token):
    assert _code(jws.verify, token, keys.new().public_key(), TYP) == "bad-token"


@pytest.fixture(scope="module")
def station(tmp_path_factory):
    return authority.create(tmp_path_factory.mktemp("authority"), "four words or more", "Skarrow Fell", NOW)


def test_a_persons_token_verifies_against_the_authority_alone(station):
    key = keys.new()
    cert = authority.issue_person(station, "J. Vell", "j.vell", keys.to_jwk(key.public_key()), NOW)
    token = jws.sign({"a": 1}, key, TYP, x5c=[cert, station.certificate])
    found = jws.verify(token, station.certificate, TYP, at=NOW)
    assert found.header["kid"] == certificates.digest(cert)
    assert certificates.holder(found.certificate).id == "j.vell"
    assert [base64.b64decode(c) for c in found.header["x5c"]][1] == certificates.to_der(station.certificate)


def test_a_token_without_its_certificate_or_with_another_is_refused(station):
    key, thief = keys.new(), keys.new()
    cert = authority.issue_person(station, "J. Vell", "j.vell", keys.to_jwk(key.public_key()), NOW)
    bare = jws.sign({}, key, TYP, kid="x")
    assert _code(jws.verify, bare, station.certificate, TYP, at=NOW) == "no-certificate"
    stolen = jws.sign({}, thief, TYP, x5c=[cert])
    assert _code(jws.verify, stolen, station.certificate, TYP, at=NOW) == "bad-signature"
    wrong = jws.sign({}, key, TYP, kid="0" * 64, x5c=[cert])
    assert _code(jws.verify, wrong, station.certificate, TYP, at=NOW) == "bad-token"


def test_a_receipt_says_what_was_stored_and_only_the_pinned_key_makes_one(tmp_path: Path):
    key = receipts.key(tmp_path)
    assert receipts.key(tmp_path).public_key() == key.public_key()
    token = receipts.make(key, store="s", run="r", chain="c", seq=3, head="h", time="2026-07-31T12:00:00Z")
    assert receipts.verify(token, key.public_key())["seq"] == 3
    assert _code(receipts.verify, token, keys.new().public_key()) == "bad-signature"
    short = jws.sign({"store": "s"}, key, receipts.TYPE)
    assert _code(receipts.verify, short, key.public_key()) == "bad-receipt"
