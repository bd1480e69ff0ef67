"""A station with its authority, seal and people, made once; a plain page to seal where no record is needed; a run."""

from __future__ import annotations

import pdf_run
import pdf_station
import pytest
from pdf_station import NOW, Station

from fieldkit.pdf import assemble, seal, typeset


@pytest.fixture(scope="session")
def station(tmp_path_factory) -> Station:
    return pdf_station.make(tmp_path_factory.mktemp("station"))


_HTML = """<html lang="en"><head><title>Plain</title></head><body><h1 id="seal">Plain page</h1>
<div id="supervisor" style="width:45mm;height:26mm">Supervisor</div></body></html>"""
_CSS = '@page{size:A4;margin:20mm} body{font:400 10pt "Plex Sans"}'


@pytest.fixture(scope="session")
def plain() -> bytes:
    """A page with both fields and one attachment, unsealed."""
    pages = typeset.pages(_HTML, _CSS, identifier=b"plain")
    fields = [
        assemble.Field(assemble.SEAL, "Seal of the station", pages.boxes["seal"], locks=False),
        assemble.Field(assemble.SUPERVISOR, "Supervisor", pages.boxes["supervisor"], locks=True),
    ]
    note = assemble.Attached("note.txt", b"a note\n", "text/plain", "Supplement", "A note")
    return assemble.assemble(pages, [note], fields, NOW)


@pytest.fixture(scope="session")
def sealed(plain, station) -> bytes:
    return seal.seal(plain, station.seal, NOW)


@pytest.fixture(scope="session")
def run(station) -> pdf_run.Run:
    """A finished run of every kind of event, with real signatures."""
    return pdf_run.run(station)


@pytest.fixture(scope="session")
def countersigned(run) -> bytes:
    return run.countersigned()
