"""Sealing and countersigning: two requests, the supervisor's own key, and what the file looks like afterwards.

Outside check: pdfsig of poppler-utils finds both signatures valid and trusted against the authority's certificate.
"""

from __future__ import annotations

import datetime as dt
import io
import shutil
import subprocess

import pikepdf
import pytest
from pdf_station import NOW
from pyhanko.pdf_utils.reader import PdfFileReader

from fieldkit.errors import Refusal
from fieldkit.pdf import appearance, assemble, countersign, seal, signed, text
from fieldkit.trust import certificates


def _code(function, *arguments):
    with pytest.raises(Refusal) as caught:
        function(*arguments)
    return caught.value.code


def _signatures(data, station):
    return signed.signatures(PdfFileReader(io.BytesIO(data)), station.authority.certificate)


def test_the_seal_certifies_and_leaves_only_the_supervisors_field_free(sealed, station):
    assert signed.names(PdfFileReader(io.BytesIO(sealed))) == {assemble.SEAL: True, assemble.SUPERVISOR: False}
    found = _signatures(sealed, station)[assemble.SEAL]
    assert (found.problem, found.genuine, found.certifies, found.whole_file, found.locks) == (
        "",
        True,
        True,
        True,
        False,
    )
    assert found.time == NOW


def test_the_countersigned_file_begins_with_the_sealed_one_and_is_closed(sealed, station):
    done = station.countersign(sealed)
    assert done.startswith(sealed)
    first, second = (_signatures(done, station)[n] for n in (assemble.SEAL, assemble.SUPERVISOR))
    assert first.genuine and first.whole_revision and not first.whole_file and first.permitted and first.followed
    assert second.genuine and second.whole_file and second.locks and second.permitted and not second.followed
    assert second.time == NOW and second.reason == appearance.REVIEWED
    assert certificates.holder(second.certificate).name == "P. Ardin"


def test_the_supervisors_block_says_who_what_when_and_with_which_key(sealed, station):
    pdf = pikepdf.open(io.BytesIO(station.countersign(sealed)))
    (field,) = [f for f in pdf.Root.AcroForm.Fields if f.T == assemble.SUPERVISOR]
    key = appearance.grouped(certificates.digest(station.certificates["p.ardin"]))
    words = f"P. Ardin “{appearance.REVIEWED}” 2026-08-01 09:12:55 +01:00 key {key}"
    assert text.squeeze(text.form(field.AP.N)) == text.squeeze(words)
    assert "/Lock" in field and field.Lock.P == 1 and field.Lock.Action == "/All"


def test_what_is_signed_commits_to_the_file_that_is_shown(sealed, station):
    import hashlib

    prepared = countersign.prepare(sealed, station.certificates["p.ardin"], station.authority.certificate, NOW)
    assert prepared.pdf[: prepared.length] == sealed and prepared.sealed == hashlib.sha256(sealed).hexdigest()
    rest = prepared.pdf[: prepared.start] + prepared.pdf[prepared.end :]
    assert hashlib.sha256(rest).digest() == prepared.digest
    assert prepared.digest in prepared.to_sign and len(prepared.to_sign) < 400


def test_a_signature_that_is_not_this_persons_over_this_file_is_refused(sealed, station):
    prepared = countersign.prepare(sealed, station.certificates["p.ardin"], station.authority.certificate, NOW)
    assert _code(countersign.finish, prepared, station.sign("quill", prepared.to_sign)) == "bad-signature"
    assert _code(countersign.finish, prepared, station.sign("p.ardin", b"something else")) == "bad-signature"
    assert _code(countersign.finish, prepared, b"short") == "bad-signature"


def test_who_is_no_supervisor_or_not_enrolled_now_cannot_prepare(sealed, station):
    ca = station.authority.certificate
    assert _code(countersign.prepare, sealed, station.certificates["vell"], ca, NOW) == "not-a-supervisor"
    late = NOW + dt.timedelta(days=6 * 366)
    assert _code(countersign.prepare, sealed, station.certificates["p.ardin"], ca, late) == "expired"


def test_only_a_sealed_and_not_yet_countersigned_file_can_be_countersigned(plain, sealed, station):
    arguments = (station.certificates["p.ardin"], station.authority.certificate, NOW)
    assert _code(countersign.prepare, plain, *arguments) == "not-sealed"
    assert _code(countersign.prepare, station.countersign(sealed), *arguments) == "already-countersigned"
    for junk in (b"", b"not a pdf", sealed[:2000]):
        assert _code(countersign.prepare, junk, *arguments) == "damaged-pdf"


def test_a_damaged_preparation_is_refused(sealed, station):
    kept = countersign.prepare(sealed, station.certificates["p.ardin"], station.authority.certificate, NOW).to_bytes()
    for bad in (b"", b"{}\n", kept[:-1], kept.replace(b"prepared/1", b"prepared/2")):
        assert _code(countersign.Prepared.from_bytes, bad) == "damaged-preparation"


def test_a_seal_whose_certificate_ran_out_seals_nothing(plain, station):
    assert _code(seal.seal, plain, station.seal, NOW + dt.timedelta(days=11 * 366)) == "seal-expired"


def test_putting_together_gives_the_same_bytes_every_time(plain, station):
    from fieldkit.pdf import typeset

    html = "<html lang='en'><head><title>Plain</title></head><body><h1 id='seal'>Plain page</h1></body></html>"

    def make():
        pages = typeset.pages(html, '@page{size:A4} body{font:400 10pt "Plex Sans"}', identifier=b"plain")
        field = assemble.Field(assemble.SEAL, "Seal", pages.boxes["seal"], locks=False)
        files = [assemble.Attached(n, n.encode(), "text/plain", "Data", n) for n in ("b", "a")]
        return assemble.assemble(pages, files, [field], NOW)

    assert make() == make()
    with pikepdf.open(io.BytesIO(make())) as pdf:
        assert [str(n) for n in pdf.Root.Names.EmbeddedFiles.Names[::2]] == ["a", "b"]
        assert len(pdf.Root.AF) == 2 and pdf.Root.AF[0].AFRelationship == "/Data"


@pytest.mark.skipif(
    not (shutil.which("pdfsig") and shutil.which("certutil")), reason="pdfsig or certutil is not installed"
)
@pytest.mark.parametrize("what", ["a plain page", "a whole record"])
def test_pdfsig_finds_both_signatures_valid_and_trusted(what, request, sealed, station, tmp_path):
    whole = what == "a whole record"
    done = request.getfixturevalue("countersigned") if whole else station.countersign(sealed)
    (tmp_path / "ca.pem").write_text(station.pem)
    (tmp_path / "record.pdf").write_bytes(done)
    store = f"sql:{tmp_path}"
    subprocess.run(["certutil", "-N", "-d", store, "--empty-password"], check=True)
    add = ["certutil", "-A", "-d", store, "-n", "ca", "-t", "CT,C,C", "-i", str(tmp_path / "ca.pem")]
    subprocess.run(add, check=True)
    command = ["pdfsig", "-nssdir", str(tmp_path), str(tmp_path / "record.pdf")]
    said = subprocess.run(command, capture_output=True, text=True).stdout
    assert said.count("Signature Validation: Signature is Valid.") == 2
    assert said.count("Certificate Validation: Certificate is Trusted.") == 2
    assert said.count("Total document signed") == 1 and said.count("Not total document signed") == 1
