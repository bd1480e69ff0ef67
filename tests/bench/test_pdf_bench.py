"""Time to a sealed PDF against bare typesetting of the same HTML, and the rest of a record's way, printed as ratios.

pytest tests/bench/test_pdf_bench.py
"""

from __future__ import annotations

import time

import pdf_records
import pdf_run
import pdf_station
import pytest
import weasyprint
from bench import Ratios

from fieldkit import files
from fieldkit.pdf import countersign, render, seal, typeset, verify
from fieldkit.record import model

pytestmark = pytest.mark.bench
TIMES = 2


def _best(work) -> float:
    """Least processor time of a few goes, in seconds: what others do on the machine meanwhile does not count."""
    took = []
    for _ in range(TIMES):
        start = time.process_time()
        work()
        took.append(time.process_time() - start)
    return min(took)


def _bare(html: str) -> bytes:
    """The same HTML, style and fonts through the library alone: plain PDF, no tags, nothing attached."""
    css = (files.folder("static") / "css" / "print.css").read_text("utf-8")
    folder = (files.folder("static") / "fonts").as_uri()
    faces = typeset._faces().replace("fieldkit:font/", f"{folder}/")
    return weasyprint.HTML(string=html).write_pdf(stylesheets=[weasyprint.CSS(string=faces + "@page{size:A4}" + css)])


def test_time_to_a_sealed_pdf_against_bare_typesetting(tmp_path, show):
    station = pdf_station.make(tmp_path)
    run = pdf_run.run(station)
    record = pdf_records.record(3)
    files_ = render.Files(run.sheet, run.texts, pdf_run.PROCEDURE, station.pem)
    html = render.html(record)

    def whole():
        return seal.seal(render.render(record, files_).pdf, station.seal, pdf_station.NOW)

    bare, sealed = _best(lambda: _bare(html)), _best(whole)
    pages = _best(lambda: render.typeset_pages(html, model.to_bytes(record), {}, "A4"))
    made = run.sealed()
    person, ca = station.certificates["p.ardin"], station.authority.certificate
    prepared = countersign.prepare(made, person, ca, pdf_station.NOW)
    raw = station.sign("p.ardin", prepared.to_sign)
    done = countersign.finish(prepared, raw)
    rows = [
        ("tagged PDF/A pages", pages),
        ("sealed PDF", sealed),
        ("prepare a countersignature", _best(lambda: countersign.prepare(made, person, ca, pdf_station.NOW))),
        ("finish a countersignature", _best(lambda: countersign.finish(prepared, raw))),
        ("verify", _best(lambda: verify.verify(done, station.pem, pdf_station.NOW))),
    ]
    show(
        Ratios(
            "A record's way to paper and back, in processor time",
            "bare typesetting of the same HTML, untagged",
            bare,
            rows,
        )
    )
    assert verify.verify(done, station.pem, pdf_station.NOW).holds
    assert sealed < 2.5 * bare, "a sealed PDF took 1.2 times bare typesetting when this was written"
