"""Verify: a good record holds, and for each tampering the answer that fails is named; a foreign file is no traceback."""

from __future__ import annotations

import datetime as dt
import io
import json

import forgeries
import pdf_run
import pikepdf
import pytest
from pdf_run import Pen, Run
from pdf_station import ISSUED, NOW, WORD
from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter

from fieldkit.errors import Refusal
from fieldkit.pdf import assemble, inside, render, text, typeset, verify
from fieldkit.trust import authority

#: every question, in the order asked; the codes are an API
CODES = [
    "file", "fields", "seal", "countersignature", "untouched", "trust", "time", "attachments", "chain", "people",
    "verdicts", "record", "pages", "real",
]  # fmt: skip


@pytest.fixture
def ask(station):
    return lambda data, now=NOW, pem=station.pem: verify.verify(data, pem, now)


def _one(data: bytes, station, code: str):
    """The answer to one question, where the others would only take time."""
    from fieldkit.pdf.subject import Subject

    (check,) = [c for c in verify.CHECKS if c.code == code]
    return verify._ask(check, Subject(data, station.authority.certificate, NOW))


def _failing(report) -> set[str]:
    return {a.code for a in report.answers if a.state == "fails"}


def _says(report, code: str) -> str:
    return " ".join(report.answer(code).says)


def _rewritten(pdf: bytes, change) -> bytes:
    """The unsealed file with `change` made to it, as an insider with the seal's key could have it."""
    with pikepdf.open(io.BytesIO(pdf)) as opened:
        change(opened)
        out = io.BytesIO()
        opened.save(out, object_stream_mode=pikepdf.ObjectStreamMode.generate, deterministic_id=True)
    return out.getvalue()


def _replace_file(pdf: pikepdf.Pdf, name: str, data: bytes) -> None:
    names = list(pdf.Root.Names.EmbeddedFiles.Names)
    (spec,) = [s for label, s in zip(names[::2], names[1::2], strict=True) if str(label) == name]
    spec.EF.F.write(data)
    spec.EF.UF.write(data)


# ---- what holds ------------------------------------------------------------------------------------------------------


def test_a_good_record_holds_and_every_question_is_answered(countersigned, ask):
    report = ask(countersigned)
    assert [a.code for a in report.answers] == CODES
    assert {a.code: a.state for a in report.answers} == {**dict.fromkeys(CODES, "holds"), "time": "note"}
    assert report.holds and report.bottom_line == "This record holds."
    assert "made again here, and drawn the same" in _says(report, "pages")
    assert report.about.startswith("Run 0731-B2-2, Played procedure")


def test_letter_paper_holds_too(run, station, ask):
    assert ask(run.countersigned(run.render("Letter").pdf)).holds


def test_without_the_authoritys_certificate_trust_is_not_checked_and_the_file_does_not_hold(countersigned):
    report = verify.verify(countersigned, None, NOW)
    assert not report.holds and _failing(report) == set()
    assert report.answer("trust").state == "not checked" and _says(report, "trust").startswith("trust: not checked")


def test_the_report_is_the_same_as_json(countersigned, ask):
    report = ask(countersigned)
    again = json.loads(json.dumps(report.to_json()))
    assert again["holds"] is True and [a["code"] for a in again["answers"]] == CODES
    assert again["sha256"] == report.sha256 and "time not proved" in report.to_text()


def test_ten_years_later_certificates_are_judged_at_the_time_claimed(countersigned, ask):
    assert ask(countersigned, NOW + dt.timedelta(days=3650)).holds


# ---- the file was changed after it was signed ------------------------------------------------------------------------


def test_a_flipped_byte_in_a_page_is_named(countersigned, ask):
    report = ask(forgeries.page(countersigned))
    assert {"seal", "countersignature", "pages"} <= _failing(report)


def test_a_flipped_byte_in_an_attachment_is_named(countersigned, ask):
    report = ask(forgeries.attachment(countersigned))
    assert {"seal", "countersignature", "attachments"} <= _failing(report)


@pytest.mark.parametrize(("field", "code"), [("Seal", "seal"), ("Supervisor", "countersignature")])
def test_a_flipped_byte_in_a_signature_is_named(countersigned, ask, field, code):
    report = ask(forgeries.signature(countersigned, field))
    assert code in _failing(report)
    if field == "Supervisor":
        assert "seal" not in _failing(report)


@pytest.mark.parametrize(("field", "code"), [("Seal", "seal"), ("Supervisor", "countersignature")])
def test_a_sign_that_is_no_digit_in_a_signature_is_named(countersigned, ask, field, code):
    assert code in _failing(ask(forgeries.broken_signature(countersigned, field)))


def test_an_appended_revision_is_named(countersigned, ask):
    report = ask(forgeries.revision(countersigned))
    assert "untouched" in _failing(report) and not {"seal", "countersignature"} & _failing(report)


def test_a_note_laid_over_a_page_in_a_revision_is_named(countersigned, ask):
    writer = IncrementalPdfFileWriter(io.BytesIO(countersigned))
    note = generic.DictionaryObject()
    for key, value in (("/Type", "/Annot"), ("/Subtype", "/Square")):
        note[generic.pdf_name(key)] = generic.pdf_name(value)
    note[generic.pdf_name("/Rect")] = generic.ArrayObject(generic.NumberObject(n) for n in (100, 100, 300, 300))
    writer.register_annotation(writer.find_page_for_modification(1)[0], writer.add_object(note))
    out = io.BytesIO()
    writer.write(out)
    report = ask(out.getvalue())
    assert {"untouched", "pages"} <= _failing(report)
    assert "laid over page 2: Square" in _says(report, "pages")


def test_a_dropped_countersignature_is_named(run, ask):
    report = ask(run.sealed())
    assert _failing(report) == {"fields", "countersignature", "trust"}
    assert "The supervisor's signature is missing." in _says(report, "fields")


@pytest.mark.parametrize("junk", [b"\n", b"% a comment\n", b"\0" * 64, b"%%EOF\n"])
def test_trailing_junk_is_named(countersigned, ask, junk):
    report = ask(countersigned + junk)
    assert "untouched" in _failing(report) and _failing(report) <= {"untouched", "file"}


def test_the_sealed_file_with_another_ones_countersignature_is_named(run, countersigned, ask):
    """The second revision of one file after the first of another."""
    other = run.sealed(run.render("Letter").pdf)
    first = countersigned[: countersigned.index(b"%%EOF\n", len(run.render().pdf)) + 6]
    report = ask(other + countersigned[len(first) :])
    assert not report.holds and _failing(report) & {"file", "countersignature", "untouched"}


# ---- an insider changed it and sealed it again -----------------------------------------------------------------------


def test_a_record_edited_and_sealed_again_is_named(run, station, ask):
    data = json.loads(render.model.to_bytes(run.record()))
    data["readings"][3]["verdict"] = "pass"
    edited = json.dumps(data, ensure_ascii=False, sort_keys=True, separators=(",", ":")).encode()
    pdf = _rewritten(run.render().pdf, lambda p: _replace_file(p, inside.RECORD, edited))
    report = ask(run.countersigned(pdf))
    assert _failing(report) == {"verdicts", "record", "pages"}
    assert "comes out as fail; the record says pass" in _says(report, "verdicts")
    assert "readings[3].verdict" in _says(report, "record")


def test_an_edited_record_with_pages_to_match_is_named(run, station, ask):
    record = run.record()
    forged = record.readings[3].model_copy(update={"verdict": "pass", "text": "6.26", "value": "6.26"})
    record = record.model_copy(update={"readings": (*record.readings[:3], forged, *record.readings[4:])})
    report = ask(run.countersigned(run.render(record=record).pdf))
    assert _failing(report) == {"verdicts", "record"}


def test_a_reading_edited_in_the_events_breaks_chain_and_signatures(run, station, ask):
    texts = [t.replace(b'"6.62"', b'"6.26"') for t in run.texts]
    assert texts != run.texts
    answer = _one(Run(station, run.sheet, texts, run.pictures).bare(), station, "chain")
    assert answer.state == "fails" and "does not follow" in " ".join(answer.says)


def test_events_chained_anew_by_an_insider_are_named_by_the_peoples_signatures(run, station, ask):
    import hashlib

    texts, before = [], None
    for one in run.texts:
        event = json.loads(one)
        if before is not None:
            event["prev"] = hashlib.sha256(before).hexdigest()
        before = json.dumps(event, ensure_ascii=False, separators=(",", ":")).replace('"6.62"', '"6.26"').encode()
        texts.append(before)
    forged = Run(station, run.sheet, texts, run.pictures).bare()
    assert _one(forged, station, "chain").state == "holds"
    answer = _one(forged, station, "people")
    assert answer.state == "fails" and "covers another head" in " ".join(answer.says)


def test_visible_text_edited_and_sealed_again_is_named(run, ask):
    pdf = run.render().pdf
    whole = _first_page_text(pdf)

    def forge(opened):
        """The failed reading 6.62 is made to show 6.26 by swapping glyphs in the page's text."""
        page = opened.pages[1].obj
        ops = pikepdf.parse_content_stream(page)
        swapped = _swap(ops, page.Resources, "6.62", "6.26")
        page.Contents.write(pikepdf.unparse_content_stream(swapped))

    report = ask(run.countersigned(_rewritten(pdf, forge)))
    assert whole and _failing(report) == {"pages"}
    assert "6.26" in _says(report, "pages") and "6.62" in _says(report, "pages")


def _first_page_text(pdf: bytes) -> str:
    with pikepdf.open(io.BytesIO(pdf)) as opened:
        return text.said(opened).body


def _swap(ops, resources, old: str, new: str):
    """The content stream with the first `old` drawn as `new`; both use the same glyphs."""
    from fieldkit.pdf.text import to_unicode

    font, out, done = {}, [], False
    for operands, operator in ops:
        if str(operator) == "Tf":
            font = to_unicode(resources.Font[str(operands[0])])
        if str(operator) == "TJ" and not done:
            codes = {v: k for k, v in font.items()}
            strings = [o for o in operands[0] if isinstance(o, pikepdf.String)]
            shown = "".join(
                font.get(int.from_bytes(bytes(s)[i : i + 2], "big"), "")
                for s in strings
                for i in range(0, len(bytes(s)), 2)
            )
            if shown == old:
                drawn = b"".join(codes[c].to_bytes(2, "big") for c in new)
                operands, done = [pikepdf.Array([pikepdf.String(drawn)])], True
        out.append((operands, operator))
    assert done, "the text to forge is not on the page"
    return out


def test_a_rectangle_over_a_reading_is_named_by_drawing_the_page_again(run, ask):
    def cover(opened):
        page = opened.pages[1].obj
        page.Contents.write(page.Contents.read_bytes() + b"\nq 1 1 1 rg 50 50 400 300 re f Q\n")

    report = ask(run.countersigned(_rewritten(run.render().pdf, cover)))
    assert _failing(report) == {"pages"} and "drawn otherwise" in _says(report, "pages")


def test_text_not_to_be_seen_and_fonts_that_lie_are_named_where_pages_cannot_be_made_again(run, ask, monkeypatch):
    def away(_paper):
        raise Refusal("typesetting-missing", "no pango here")

    def lie(opened):
        from fieldkit.pdf import fonts

        for font in fonts.embedded(opened).values():
            cmap = font.ToUnicode.read_bytes()
            font.ToUnicode.write(cmap.replace(b"<0036>", b"<0033>"))

    pdf = run.countersigned(run.render().pdf)
    forged = run.countersigned(_rewritten(run.render().pdf, lie))
    monkeypatch.setattr(render, "how", away)
    good = ask(pdf)
    assert good.holds and "text and glyphs compared" in _says(good, "pages")
    report = ask(forged)
    assert _failing(report) == {"pages"} and "as it claims to" in _says(report, "pages")


def test_a_file_of_another_version_of_the_templates_is_compared_reading_by_reading(run, ask, monkeypatch):
    pdf = run.countersigned()
    monkeypatch.setattr(render, "look", lambda: "another")
    report = ask(pdf)
    assert report.holds and "were found on them" in _says(report, "pages")


def test_under_other_templates_a_changed_name_and_a_changed_reading_are_named(run, ask, monkeypatch):
    def forge(opened):
        for number, old, new in ((1, "6.62", "6.26"), (1, "S. Quill", "P. Arkle")):
            page = opened.pages[number].obj
            ops = pikepdf.parse_content_stream(page)
            page.Contents.write(pikepdf.unparse_content_stream(_swap(ops, page.Resources, old, new)))

    forged = run.countersigned(_rewritten(run.render().pdf, forge))
    monkeypatch.setattr(render, "look", lambda: "another")
    report = ask(forged)
    assert _failing(report) == {"pages"} and "do not show “6.62”" in _says(report, "pages")


def test_a_record_of_another_version_holds_by_its_facts_and_its_other_words_are_noted(run, ask, monkeypatch):
    pdf = run.countersigned()
    monkeypatch.setattr("fieldkit.__version__", "99.0")
    monkeypatch.setattr("fieldkit.record.build.code", lambda: "later")
    monkeypatch.setattr("fieldkit.record.build.VERIFY", ("other words",))
    report = ask(pdf)
    assert report.holds and report.answer("record").state == "note"
    assert "this is another state of it (99.0)" in _says(report, "record") and "verify[0]" in _says(report, "record")


def test_the_same_code_owes_the_same_bytes(run, ask, monkeypatch):
    pdf = run.countersigned()
    monkeypatch.setattr("fieldkit.record.build.VERIFY", ("other words",))
    assert _failing(ask(pdf)) == {"record"}


def _by_another(run: Run, change) -> bytes:
    """A file whose record was changed, and which says that another fieldkit built it; sealed and countersigned."""

    def forge(pdf: pikepdf.Pdf) -> None:
        files = inside.attachments(pdf)
        record, made = json.loads(files[inside.RECORD]), json.loads(files[inside.RENDERING])
        change(record)
        form = {"ensure_ascii": False, "sort_keys": True, "separators": (",", ":")}
        _replace_file(pdf, inside.RECORD, json.dumps(record, **form).encode())
        _replace_file(pdf, inside.RENDERING, json.dumps({**made, "code": "later", "fieldkit": "9"}).encode())

    return run.countersigned(_rewritten(run.render().pdf, forge))


def test_a_key_that_only_a_later_version_knows_is_passed_over_and_noted(run, ask):
    def add(record):
        record["weather"] = "fine"
        record["readings"][0]["colour"] = "blue"
        record["context"]["moon"] = "full"

    report = ask(_by_another(run, add))
    assert report.holds and report.answer("record").state == "note"
    says = _says(report, "record")
    assert "built by fieldkit 9" in says and "weather" in says and "colour" in says


@pytest.mark.parametrize(
    ("section", "place", "field", "value"),
    [
        ("readings", 0, "margin", "9.9"),
        ("readings", 1, "verdict", "pass "),
        ("log", 3, "at", "2026-07-31T12:00:00+01:00"),
        ("locks", 0, "left_on", "no"),
        ("givens", 0, "value", "6.31"),
        ("signatures", 0, "person", "orme"),
        ("readings", 0, "range", "2 V"),
    ],
)
def test_claiming_another_version_excuses_no_changed_fact(run, station, section, place, field, value):
    def change(record):
        record[section][place][field] = value

    answer = _one(_by_another(run, change), station, "record")
    assert answer.state == "fails" and f"{section}[{place}].{field}" in " ".join(answer.says), answer.says


def test_a_record_from_before_there_were_ranges_holds(run, ask):
    def earlier(record):
        for reading in record["readings"]:
            del reading["range"], reading["shown"]

    assert ask(_by_another(run, earlier)).holds


def test_a_fact_left_out_or_a_reading_dropped_is_no_difference_of_words(run, station):
    dropped = _one(_by_another(run, lambda record: record["readings"].pop()), station, "record")
    assert dropped.state == "fails" and "readings has" in " ".join(dropped.says)
    sentence = _one(_by_another(run, lambda record: record.update(summary="All is well.")), station, "record")
    assert sentence.state == "note"
    assert sentence.says[1].startswith('summary reads "All is well.", not "On 31 July 2026')


def test_a_record_of_another_form_is_not_checked(run, station):
    answer = _one(_by_another(run, lambda record: record.update(fieldkit="record/2")), station, "record")
    assert answer.state == "not checked" and "record/2" in " ".join(answer.says)


def test_a_file_that_acts_is_named(run, ask):
    def act(opened):
        opened.Root.OpenAction = pikepdf.Dictionary(S=pikepdf.Name.JavaScript, JS=pikepdf.String("1"))

    report = ask(run.countersigned(_rewritten(run.render().pdf, act)))
    assert "pages" in _failing(report) and "OpenAction" in _says(report, "pages")


def test_files_too_many_or_too_few_are_named(run, ask):
    pages = run.render().pdf

    def drop(opened):
        names = opened.Root.Names.EmbeddedFiles.Names
        kept = [n for label, s in zip(list(names)[::2], list(names)[1::2], strict=True) for n in (label, s)
                if not str(label).startswith("picture-")]  # fmt: skip
        opened.Root.Names.EmbeddedFiles.Names = pikepdf.Array(kept)

    report = ask(run.countersigned(_rewritten(pages, drop)))
    assert "attachments" in _failing(report) and "was taken in the run but is not attached" in _says(
        report, "attachments"
    )


# ---- the wrong people ------------------------------------------------------------------------------------------------


def test_another_authority_is_named(countersigned, ask, tmp_path):
    from fieldkit.trust import certificates

    other = authority.create(tmp_path, WORD, "Skarrow Fell", ISSUED)
    report = ask(countersigned, pem=certificates.to_pem(other.certificate))
    assert {"trust", "people"} <= _failing(report) and "seal" not in _failing(report)


def test_a_recorder_who_countersigns_is_named(run, station, ask):
    """A supervisor who recorded the run themselves."""
    pen = Pen(station)
    pen.by = "quill"
    pen.isolate()
    pen.write("ended", {"outcome": "stopped", "reason": "x", "states": {}, "locks": [], "earths": []}).signed(
        "quill", "performed"
    )
    made = pdf_run.run(station, pen)
    report = ask(station.countersign(made.sealed(), "quill"))
    assert "countersignature" in _failing(report) and "takes another person" in _says(report, "countersignature")


def test_another_supervisor_than_the_record_was_made_ready_for_is_named(run, station, ask):
    from fieldkit.record.context import Reviewer

    record = run.record(reviewer=Reviewer(id="orme", name="K. Orme"))
    sealed = run.sealed(run.render(record=record).pdf)
    assert ask(station.countersign(sealed, "orme")).holds
    report = ask(station.countersign(sealed, "p.ardin"))
    assert _failing(report) == {"countersignature"} and "made ready for K. Orme" in _says(report, "countersignature")


def test_a_technician_in_the_supervisors_field_is_named(run, station, ask, monkeypatch):
    from fieldkit.pdf import countersign

    monkeypatch.setattr(countersign, "_check_certificate", lambda *_: None)
    report = ask(station.countersign(run.sealed(), "arkle"))
    assert _failing(report) == {"fields"} and "certificate for technician" in _says(report, "fields")


def test_a_further_signature_field_is_named(run, station, ask):
    made = run.render()

    def add(opened):
        boxes = typeset.Box(0, 10, 10, 50, 50)
        fields = opened.Root.AcroForm.Fields
        assemble._add_fields(opened, [assemble.Field("Third", "Third", boxes, locks=False)])
        for one in fields:
            opened.Root.AcroForm.Fields.append(one)

    report = ask(run.countersigned(_rewritten(made.pdf, add)))
    assert "fields" in _failing(report) and "Third" in _says(report, "fields")


@pytest.mark.parametrize(
    ("spoil", "says"),
    [
        (lambda pen: pen.events.pop(), "Nobody signed the end"),
        (lambda pen: pen.remark_after_end(), "did not sign for event"),
    ],
)
def test_work_that_nobody_signed_for_is_named(station, ask, spoil, says):
    class Late(Pen):
        def remark_after_end(self):
            self.write("remarked", {"step": "remark", "text": "later", "move": None})

    pen = Late(station).played()
    spoil(pen)
    answer = _one(pdf_run.run(station, pen).bare(), station, "people")
    assert answer.state == "fails" and says in " ".join(answer.says)


def test_a_deviation_allowed_by_somebody_who_is_no_supervisor_is_named(station, ask):
    class Loose(Pen):
        def went(self, step, move, reason, **more):
            if "authority" in more:
                more["authority"] = "arkle"
            return super().went(step, move, reason, **more)

        def signed(self, person, meaning):
            return super().signed("arkle" if meaning == "allowed" else person, meaning)

    answer = _one(pdf_run.run(station, Loose(station).played()).bare(), station, "people")
    assert answer.state == "fails" and "no supervisor" in " ".join(answer.says)


def test_a_rehearsal_is_refused_as_real_work_and_says_so_on_every_page(station, ask):
    made = pdf_run.run(station, Pen(station, rehearsal=True).played())
    report = ask(made.countersigned())
    assert _failing(report) == {"real"} and "no record of real work" in _says(report, "real")
    with pikepdf.open(io.BytesIO(made.render().pdf)) as pdf:
        said = text.said(pdf)
        assert all("Rehearsal" in furniture for furniture in said.furniture)
        assert "norecordofrealwork" in text.squeeze(said.body)


def test_times_that_have_not_come_yet_are_refused(countersigned, ask):
    report = ask(countersigned, NOW - dt.timedelta(days=3))
    assert {"trust", "people"} <= _failing(report)


# ---- what is no record -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("data", [b"", b"hello", b"%PDF-1.7\n", b"%PDF-1.7\n%%EOF\n", bytes(2000)])
def test_what_is_no_pdf_is_said_to_be_none(data, ask):
    report = ask(data)
    assert not report.holds and "file" in _failing(report)
    assert all(not s.startswith("This could not be examined") for a in report.answers for s in a.says)


def test_a_foreign_pdf_is_no_record(ask):
    with pikepdf.new() as pdf:
        pdf.add_blank_page()
        out = io.BytesIO()
        pdf.save(out)
    report = ask(out.getvalue())
    assert "file" not in _failing(report) and {"fields", "seal", "countersignature", "attachments"} <= _failing(report)
    assert not report.holds


def test_a_file_cut_anywhere_never_breaks_the_verifier(countersigned, ask):
    for at in range(0, len(countersigned), len(countersigned) // 12):
        report = ask(countersigned[:at])
        assert not report.holds
