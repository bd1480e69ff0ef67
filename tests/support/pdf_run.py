"""A whole played run with real signatures, as a record, as a sealed and as a countersigned PDF."""

from __future__ import annotations

import hashlib
import io
from dataclasses import dataclass, field
from typing import Any

import played_run as play
from pdf_station import NOW, Station
from PIL import Image

from fieldkit.pdf import assemble, render, seal, typeset
from fieldkit.pdf.render import Files
from fieldkit.record import build
from fieldkit.record.context import Check, Context
from fieldkit.record.model import Record
from fieldkit.run import events
from fieldkit.sheet import model as sheets
from fieldkit.trust import certificates, jws

PROCEDURE = b"procedure: played\nedition: 3\n"


def picture() -> bytes:
    """A small JPEG of nothing."""
    out = io.BytesIO()
    Image.new("RGB", (64, 48), (90, 120, 110)).save(out, "JPEG")
    return out.getvalue()


PICTURE = picture()


class Pen(play.Pen):
    """Signs with the station's keys, over the pictures taken so far."""

    def __init__(self, station: Station, **started: Any) -> None:
        self.station = station
        sheet = play.sheet(source_sha256=hashlib.sha256(PROCEDURE).hexdigest())
        super().__init__(sheet, sign=self._sign, **started)

    def _sign(self, person: str, claims: dict[str, Any]) -> str:
        taken = [e.body.sha256 for e in self.events if e.head.kind == "pictured"]
        chain = [self.station.certificates[person], self.station.authority.certificate]
        return jws.sign({**claims, "pictures": taken}, self.station.keys[person], "fieldkit-signature", x5c=chain)

    def played(self) -> Pen:
        """A run with a retake, a correction, a deviation, a changed clock and a picture, to its end."""
        self.isolate().release().warm()
        self.read("heater", "6.62", None).went("heater", "again", "Meter not settled.").read("heater", "6.48")
        self.write("clock-changed", {"wall_s": "212.000", "mono_s": "20.000"})
        self.read("ion", "52", None)
        seq = self.state["seq"]
        self.write("corrected", {"seq": seq, "field": "text", "text": "5.2", "reason": "point in the wrong place"})
        self.went("ion", "deviate", "Maker's letter allows 6.", authority="quill", under="maker's letter")
        self.signed("quill", "allowed")
        return self.finish(power="64.8", picture=hashlib.sha256(PICTURE).hexdigest())


@dataclass
class Run:
    """What a server holds of one finished run."""

    station: Station
    sheet: bytes
    texts: list[bytes]
    pictures: dict[str, bytes]
    _made: dict[str, render.Rendered] = field(default_factory=dict)

    @property
    def events(self) -> list[events.Event]:
        return [events.parse(t) for t in self.texts]

    def context(self, **named: Any) -> Context:
        checks = tuple(
            Check(seq=e.head.seq, holds=True, kid=certificates.digest(jws.certificate_of(e.body.jws)))
            for e in self.events
            if e.head.kind == "signed"
        )
        return Context(**{"station": "Skarrow Fell", "checks": checks, "app": "0.1.0", **named})

    def record(self, **named: Any) -> Record:
        return build.build(sheets.from_bytes(self.sheet), self.events, self.context(**named))

    @property
    def files(self) -> Files:
        return Files(self.sheet, self.texts, PROCEDURE, self.station.pem, self.pictures)

    def render(self, paper: str = "A4", record: Record | None = None) -> render.Rendered:
        """The pages; those of the run's own record are made once a paper."""
        if record is not None:
            return render.render(record, self.files, paper)
        if paper not in self._made:
            self._made[paper] = render.render(self.record(), self.files, paper)
        return self._made[paper]

    def bare(self) -> bytes:
        """An unsigned page with the run's files, for questions that are not about pages and signatures."""
        pages = typeset.pages("<html lang='en'><title>x</title><p>x</p></html>", "", identifier=b"bare")
        data = render.model.to_bytes(self.record())
        return assemble.assemble(pages, render._attachments(data, b"{}", self.files), [], NOW)

    def sealed(self, pdf: bytes | None = None) -> bytes:
        return seal.seal(pdf or self.render().pdf, self.station.seal, NOW)

    def countersigned(self, pdf: bytes | None = None) -> bytes:
        return self.station.countersign(self.sealed(pdf))


def run(station: Station, pen: play.Pen | None = None) -> Run:
    pen = pen or Pen(station).played()
    pictures = {hashlib.sha256(PICTURE).hexdigest(): PICTURE}
    taken = {e.body.sha256 for e in pen.events if e.head.kind == "pictured"}
    return Run(
        station,
        sheets.to_bytes(pen.sheet),
        [e.raw for e in pen.events],
        {k: v for k, v in pictures.items() if k in taken},
    )
