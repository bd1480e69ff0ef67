"""Checks on what a reader sees: the pages say what the record says, and nothing lies over or under them.

Always: the text drawn, in reading order, against the record's; every glyph against the project's fonts; no drawing
beside the pages. Where this machine makes pages in the same way as the one that made the file: the drawing itself.
"""

from __future__ import annotations

import io
from typing import Any

import pikepdf

from fieldkit.errors import Refusal
from fieldkit.pdf import appearance, fonts, inside, render, typeset
from fieldkit.pdf import text as texts
from fieldkit.pdf.appearance import Block
from fieldkit.pdf.assemble import SEAL, SUPERVISOR
from fieldkit.pdf.checks.recompute import made_with
from fieldkit.pdf.expected import Expected, expected
from fieldkit.pdf.report import Unknown, Wrong
from fieldkit.pdf.same import difference
from fieldkit.pdf.subject import Subject
from fieldkit.pdf.text import Said, squeeze
from fieldkit.record import model, words
from fieldkit.trust import certificates

#: what a record's catalogue and name tree may hold: nothing that acts, plays or hides
_CATALOGUE = {
    "/Type", "/Pages", "/Names", "/Lang", "/Metadata", "/OutputIntents", "/StructTreeRoot", "/MarkInfo", "/Outlines",
    "/ViewerPreferences", "/AF", "/AcroForm", "/Perms", "/Extensions", "/Version",
}  # fmt: skip
#: what a record shows under any layout, beside its readings: field of the record -> fields of its lines
_PRINTED: dict[str, tuple[str, ...]] = {
    "summary": (),
    "before_says": (),
    "after_says": (),
    "next_person": (),
    "attention": ("title", "value", "unit", "says"),
    "deviations": ("title", "value", "unit", "reason", "under", "authority_name"),
    "corrections": ("title", "old", "new", "unit", "reason", "by_name"),
    "retakes": ("title", "reason", "by_name"),
    "locks": ("point", "lock", "holder_name", "on_time", "off_time", "off_by"),
    "earths": ("stick", "point", "on_time", "off_time"),
    "proofs": ("title", "instrument", "known_source", "verdict"),
    "waits": ("title", "says", "flag"),
    "holds": ("title", "statement", "name"),
    "cautions": ("says",),
    "people": ("says",),
    "trips": ("says",),
    "gaps": ("says",),
    "safe": ("says",),
    "remarks": ("says",),
    "choices": ("says",),
    "signatures": ("name", "role", "meaning", "statement"),
    "instruments": ("id", "range", "accuracy", "calibrated_to", "certificate"),
    "givens": ("name", "value", "unit", "source"),
    "log": ("time", "says", "by_name"),
}
_NAMES = {"/Dests", "/EmbeddedFiles"}
#: characters shown around the first difference
_AROUND = 30
#: characters within which the parts of one reading follow each other, a corrected value and its reason included
_AWAY = 600


def pages(subject: Subject) -> str:
    """What the pages show is what the record says."""
    try:
        record = model.from_bytes(subject.file(inside.RECORD), lenient=True)
    except Refusal as exc:
        raise Unknown(exc.sentence) from exc
    html = render.html(record)
    made = made_with(subject)
    try:
        wrong = _beside(subject) + _block(subject) + _glyphs(subject)
        if made.get("look") == render.look():
            wrong += _text(texts.said(subject.pdf), expected(html))
            how = "text and glyphs compared"
        else:
            wrong += _values(texts.said(subject.pdf), record)
            how = "made with other templates: the record's words and its readings in order were found on them"
        if not wrong and _alike(made, _here(str(made.get("paper")))):
            wrong += _drawing(subject, record, html, str(made["paper"]))
            how = "made again here, and drawn the same"
    except (pikepdf.PdfError, ValueError, KeyError, AttributeError, TypeError, IndexError) as exc:
        raise Wrong(f"The pages cannot be read: {exc}.") from exc
    if wrong:
        raise Wrong(*wrong)
    return f"{len(subject.pdf.pages)} pages, {how}."


def _alike(made: dict[str, Any], here: dict[str, str]) -> bool:
    """Whether pages are made alike there and here; how the record came about is not asked: it is attached."""
    return bool(here) and {**made, "code": ""} == {**here, "code": ""}


def _here(paper: str) -> dict[str, str]:
    """How this machine would make the pages; empty where it cannot."""
    try:
        return render.how(paper) if paper in render.PAPERS else {}
    except Refusal:
        return {}


def _beside(subject: Subject) -> list[str]:
    """Whatever could draw over the pages, act, or be switched."""
    root = subject.pdf.Root
    found = [key for key in root if key not in _CATALOGUE] + [
        key for key in root.get("/Names", {}) if key not in _NAMES
    ]
    wrong = [f"The file has something that a record has not: {key[1:]}." for key in found]
    fields = {str(f.T): f.objgen for f in root.get("/AcroForm", {}).get("/Fields", ())}
    for number, page in enumerate(subject.pdf.pages, 1):
        for note in page.obj.get("/Annots", ()):
            if note.objgen not in fields.values():
                wrong.append(f"Something was laid over page {number}: {str(note.get('/Subtype'))[1:]}.")
        if "/AA" in page.obj:
            wrong.append(f"Page {number} acts by itself.")
    return wrong


def _block(subject: Subject) -> list[str]:
    """The supervisor's block says what the certificate and the signature say; the seal's field draws nothing."""
    wrong = []
    signature = subject.signatures.get(SUPERVISOR)
    for field in subject.pdf.Root.AcroForm.Fields:
        drawn = texts.form(field.AP.N)
        if str(field.T) == SEAL and field.AP.N.read_bytes().strip():
            wrong.append("Something is drawn in the field of the seal.")
        if str(field.T) != SUPERVISOR or signature is None or signature.certificate is None or signature.time is None:
            continue
        name = certificates.holder(signature.certificate).name
        block = Block(name, signature.reason, signature.time, certificates.digest(signature.certificate))
        if squeeze(drawn) != squeeze(appearance.words(block)):
            wrong.append(f"The supervisor’s block shows “{drawn}”, which is not what was signed.")
    return wrong


def _glyphs(subject: Subject) -> list[str]:
    wrong = []
    for name, font in fonts.embedded(subject.pdf).items():
        odd = fonts.disagreements(font)
        if odd:
            wrong.append(f"The font {name.split()[0][1:]} does not draw {' '.join(odd[:8])} as it claims to.")
    return wrong


def _text(said: Said, meant: Expected) -> list[str]:
    wrong = []
    if said.hidden:
        wrong.append(f"There is text that is not to be seen: “{said.hidden[:_AROUND]}”.")
    shown, written = squeeze(said.body), squeeze(meant.body)
    if shown != written:
        wrong.append(_parting(shown, written))
    if {squeeze(h) for h in _cells(said.heads)} != {squeeze(h) for h in _cells(meant.heads)}:
        wrong.append("The heads of the tables are not the record’s.")
    for number, furniture in enumerate(said.furniture, 1):
        if squeeze(furniture) != squeeze(meant.furniture_of(number, len(said.furniture))):
            wrong.append(f"The title block of page {number} shows “{furniture}”.")
    return wrong


def _cells(heads: list[str]) -> list[str]:
    """Words of table heads: a head cell may break into lines on one page and not on another."""
    return [word for head in heads for word in head.split()]


def _parting(shown: str, written: str) -> str:
    at = next(
        (i for i, (a, b) in enumerate(zip(shown, written, strict=False)) if a != b), min(len(shown), len(written))
    )
    start = max(0, at - _AROUND)
    return f"The pages show “{shown[start : at + _AROUND]}” where the record says “{written[start : at + _AROUND]}”."


def _values(said: Said, record: model.Record) -> list[str]:
    """What every layout must show: the readings in order, and each of the printed words somewhere."""
    body, at, wrong = squeeze(said.body), 0, []
    for reading in record.readings:
        limits = reading.limits.says if reading.limits else ""
        found = body.find(squeeze(reading.title), at)
        for part in (reading.text, reading.unit, limits, reading.verdict):
            near = found + _AWAY
            found = max((body.find(form, found, near) for form in _forms(part)), default=-1) if found >= 0 else -1
            if found < 0:
                wrong.append(f"Event {reading.seq}: the pages do not show “{part}” of {reading.title} in its place.")
                break
        at = max(at, found)
    for name, fields in _PRINTED.items():
        rows = getattr(record, name)
        for row in rows if isinstance(rows, tuple) else (rows,):
            for word in (row,) if isinstance(row, str) else (str(getattr(row, f)) for f in fields):
                if not any(form in body for form in _forms(word)):
                    wrong.append(f"The pages do not show “{word}”, which the record has under {name}.")
    return wrong


def _forms(word: str) -> set[str]:
    """A word as it may be printed: with hyphens, with minus signs, or with those before numbers."""
    return {squeeze(word), squeeze(word.replace("-", "−")), squeeze(words.minus(word))}


def _drawing(subject: Subject, record: model.Record, html: str, paper: str) -> list[str]:
    """The pages made again are the same drawing."""
    data, pictures = subject.file(inside.RECORD), inside.pictures(subject.files)
    try:
        again = render.typeset_pages(html, data, pictures, paper)
    except typeset.TypesetError as exc:
        return [f"The pages cannot be made again: {exc}."]
    with pikepdf.open(io.BytesIO(again.pdf)) as fresh:
        if len(fresh.pages) != len(subject.pdf.pages):
            return [f"The file has {len(subject.pdf.pages)} pages; the record gives {len(fresh.pages)}."]
        wrong: list[str] = []
        for number, (one, other) in enumerate(zip(subject.pdf.pages, fresh.pages, strict=True), 1):
            found = _page_difference(one.obj, other.obj)
            if found:
                wrong.append(f"Page {number} is drawn otherwise than the record gives: {found}.")
    return wrong


def _page_difference(one: Any, other: Any) -> str:
    for key in ("/MediaBox", "/CropBox", "/Rotate", "/UserUnit", "/Contents", "/Resources"):
        found = difference(one.get(key), other.get(key))
        if found:
            return f"{key[1:]}{found}"
    return ""
