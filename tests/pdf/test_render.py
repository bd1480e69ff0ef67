"""The pages of a record: every section, the frame on every page, both papers, marks that must not be missed."""

from __future__ import annotations

import io

import pdf_records
import pikepdf
import pytest
from pdf_run import Pen, Run

from fieldkit import files
from fieldkit.pdf import expected, inside, render, text, typeset
from fieldkit.record import sections


@pytest.fixture(scope="module")
def full(run) -> dict[str, render.Rendered]:
    """A record with something in nearly every section, on both papers."""
    record = pdf_records.record(2, pictures=run.record().pictures)
    return {paper: run.render(paper, record) for paper in render.PAPERS}


def _said(pdf: bytes) -> text.Said:
    with pikepdf.open(io.BytesIO(pdf)) as opened:
        return text.said(opened)


def test_every_section_has_a_template_and_every_template_a_section():
    folder = files.folder("templates") / "record"
    found = {p.stem for p in folder.glob("*.html") if not p.name.startswith("_")}
    assert found == {s.name for s in sections.SECTIONS} | {"record"}


@pytest.mark.parametrize("paper", render.PAPERS)
def test_the_title_block_stands_on_every_page_and_counts_them(full, paper):
    said, meant = _said(full[paper].pdf), expected.expected(full[paper].html)
    assert full[paper].count == len(said.furniture) > 4
    for number, furniture in enumerate(said.furniture, 1):
        assert text.squeeze(furniture) == text.squeeze(meant.furniture_of(number, full[paper].count))
        assert f"{number}of{full[paper].count}" in text.squeeze(furniture) and "SkarrowFell" in text.squeeze(furniture)


@pytest.mark.parametrize(("paper", "size"), [("A4", (595, 842)), ("Letter", (612, 792))])
def test_the_paper_is_the_one_asked_for_and_the_signatures_fit_on_the_first_page(full, paper, size):
    with pikepdf.open(io.BytesIO(full[paper].pdf)) as pdf:
        assert all(tuple(round(float(n)) for n in p.MediaBox[2:]) == size for p in pdf.pages)
        fields = {str(f.T): f for f in pdf.Root.AcroForm.Fields}
        assert set(fields) == {"Seal", "Supervisor"}
        assert all(f.P.objgen == pdf.pages[0].obj.objgen for f in fields.values())
        x0, y0, x1, y1 = (float(n) for n in fields["Supervisor"].Rect)
        assert x1 - x0 > 100 and y1 - y0 > 55 and y0 > 100


def test_the_pages_say_every_value_limit_name_and_reason_of_the_record(full):
    said = text.squeeze(_said(full["A4"].pdf).body)
    for words in (
        "46 mA", "conditional pass", "deviation 1", "−125.0 to −115.0", "−11.96", "−119.6", "point in the wrong place",
        "Maker’s letter allows 50 mA for 10 h.", "S. Quill", "L-07", "left on", "tester before 502 V, pass", "E1",
        "15 min 20 s counted", "Hands out, covers on, doors shut.", "DANGER, high voltage", "Flow meter window is dirty.",
        "0.5 % of reading + 3 digits", "2027-02-01", "6.30", "I did this work and these are my readings.",
        "2026-07-31 16:51:08 +01:00", "The heater is on.", "Run fieldkit verify FILE --ca CERTIFICATE.",
        "End of the record of run 0731-B2-2.", "is not proved",
    ):  # fmt: skip
        assert text.squeeze(words) in said, words


def test_what_nothing_happened_of_has_no_section():
    record = pdf_records.record(trips=(), gaps=(), safe=(), deviations=(), pictures=())
    html = render.html(record)
    for title in ("Deviations", "Trips, making safe", "Pictures"):
        assert f"<h2>{title}" not in html
    assert "<h2>Readings" in html


def test_a_proved_edition_is_not_marked_and_a_rehearsal_is_everywhere():
    proved = render.html(pdf_records.record(proved=True))
    assert "is not proved" not in proved and "edition 4, not proved" not in proved
    rehearsal = render.html(pdf_records.record(rehearsal=True))
    assert "Record of a rehearsal" in rehearsal and "no record of real work" in rehearsal
    assert '<span class="mark">Rehearsal</span>' in rehearsal


def test_what_people_wrote_is_text_and_nothing_else():
    note = (
        pdf_records.record().remarks[0].model_copy(update={"says": "<img src=file:///etc/passwd> {{ 7 * 7 }} <b>&amp;"})
    )
    html = render.html(pdf_records.record(remarks=(note,)))
    assert "&lt;img src=file:///etc/passwd&gt; {{ 7 * 7 }} &lt;b&gt;&amp;amp;" in html


def test_the_same_record_gives_the_same_bytes_and_another_does_not(run):
    record = pdf_records.record()
    first, again = run.render(record=record).pdf, run.render(record=record).pdf
    assert first == again
    assert run.render(record=pdf_records.record(next_person="Something else.")).pdf != first


def test_the_files_inside_are_the_exact_bytes(run):
    with pikepdf.open(io.BytesIO(run.render().pdf)) as pdf:
        found = inside.attachments(pdf)
        kinds = {str(s.UF): str(s.AFRelationship) for s in pdf.Root.AF}
    assert found[inside.SHEET] == run.sheet and found[inside.EVENTS] == b"".join(t + b"\n" for t in run.texts)
    assert found[inside.AUTHORITY].decode() == run.station.pem
    assert inside.pictures(found) == run.pictures
    assert kinds[inside.RECORD] == "/Data" and kinds[inside.EVENTS] == "/Source" and set(kinds) == set(found)


def test_many_signers_and_much_that_deserves_attention_still_leave_room_for_both_fields(run):
    base = pdf_records.record()
    one = base.signatures[0]
    signers = tuple(one.model_copy(update={"person": f"p{n}", "name": f"Person {n}"}) for n in range(6))
    many = tuple(base.attention[0].model_copy(update={"n": n + 1}) for n in range(14))
    made = run.render(record=pdf_records.record(signatures=signers, attention=many))
    said = text.squeeze(_said(made.pdf).body)
    assert all(f"Person{n}" in said for n in range(6)) and said.count("Deviation.Bodycurrent") == 14
    with pikepdf.open(io.BytesIO(made.pdf)) as pdf:
        assert {str(f.T) for f in pdf.Root.AcroForm.Fields} == {"Seal", "Supervisor"}


def test_an_open_run_without_any_signature_still_renders(run, station):

    pen = Pen(station).isolate()
    made = Run(station, run.sheet, [e.raw for e in pen.events], {})
    assert made.render().count >= 1


def test_a_record_that_names_a_picture_that_is_not_there_is_an_error_not_a_gap(run):
    record = pdf_records.record(pictures=run.record().pictures)
    bare = render.Files(run.sheet, run.texts, b"", run.station.pem, {})
    with pytest.raises(typeset.TypesetError, match="not part of the record"):
        render.render(record, bare)
