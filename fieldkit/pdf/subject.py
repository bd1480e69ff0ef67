"""The file under examination: everything the checks look at, read once, each piece with its own way to fail.

A piece that cannot be had raises Unknown with the reason, so that the check that needs it is *not checked* and the
one that answers for the piece *fails*. Not here: any judgement.
"""

from __future__ import annotations

import datetime as dt
import io
import json
from functools import cached_property
from typing import Any

import pikepdf
from pyhanko.pdf_utils.reader import PdfFileReader

from fieldkit.errors import Refusal
from fieldkit.pdf import inside, signed
from fieldkit.pdf.report import Unknown
from fieldkit.pdf.signed import Signature
from fieldkit.run import events
from fieldkit.run.events import Event
from fieldkit.sheet import model as sheets
from fieldkit.trust.certificates import Certificate

#: a record with a hundred pictures stays far below; what is larger is refused unread
LARGEST = 400_000_000
#: a time claimed by a tablet may be ahead of this machine's clock by so much
AHEAD = dt.timedelta(days=1)


class Subject:
    """One file, the signing authority's certificate if one was given, and the time of asking (aware)."""

    def __init__(self, data: bytes, authority: Certificate | None, now: dt.datetime) -> None:
        self.data = data
        self.authority = authority
        self.now = now

    def to_come(self, time: dt.datetime) -> bool:
        """Whether a claimed time lies in the future, clocks being what they are."""
        return time > self.now + AHEAD

    @cached_property
    def pdf(self) -> pikepdf.Pdf:
        if len(self.data) > LARGEST:
            raise Unknown(f"The file is larger than {LARGEST // 1_000_000} MB and was not read.")
        if not self.data.startswith(b"%PDF-"):
            raise Unknown("The file does not begin as a PDF does.")
        try:
            return pikepdf.open(io.BytesIO(self.data), suppress_warnings=True, attempt_recovery=False)
        except (pikepdf.PdfError, pikepdf.PasswordError, ValueError) as exc:
            raise Unknown(f"The file cannot be read as a PDF: {exc}.") from exc

    @cached_property
    def reader(self) -> PdfFileReader:
        # The library fails on damaged files in many ways; each of them means that it cannot read this one.
        try:
            return PdfFileReader(io.BytesIO(self.data))
        except Exception as exc:
            raise Unknown(f"The signatures cannot be looked for: {exc}.") from exc

    @cached_property
    def signatures(self) -> dict[str, Signature]:
        return signed.signatures(self.reader, self.authority)

    @cached_property
    def files(self) -> dict[str, bytes]:
        try:
            return inside.attachments(self.pdf)
        except (pikepdf.PdfError, ValueError, AttributeError, KeyError, TypeError) as exc:
            raise Unknown(f"The attached files cannot be read: {exc}.") from exc

    def file(self, name: str) -> bytes:
        """An attached file's bytes. Raises Unknown when it is not there."""
        if name not in self.files:
            raise Unknown(f"{name} is not attached.")
        return self.files[name]

    @cached_property
    def sheet(self) -> sheets.Sheet:
        try:
            return sheets.from_bytes(self.file(inside.SHEET))
        except Refusal as exc:
            raise Unknown(exc.sentence) from exc

    @cached_property
    def events(self) -> list[Event]:
        """The events in the file's order. Raises Unknown at the first that is none."""
        lines = self.file(inside.EVENTS).split(b"\n")
        if lines[-1] != b"" or len(lines) < 2:
            raise Unknown(f"{inside.EVENTS} does not hold one event a line.")
        try:
            return [events.parse(line) for line in lines[:-1]]
        except Refusal as exc:
            raise Unknown(exc.sentence) from exc

    @cached_property
    def record(self) -> dict[str, Any]:
        try:
            found = json.loads(self.file(inside.RECORD))
        except (ValueError, RecursionError) as exc:
            raise Unknown(f"{inside.RECORD} is not JSON.") from exc
        if not isinstance(found, dict):
            raise Unknown(f"{inside.RECORD} is not a record.")
        return found
