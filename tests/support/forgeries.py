"""What is done to a countersigned PDF by somebody who wants it to say something else; `verify` must name each.

Pure functions of the file's bytes. Not here: what an insider does before sealing (tests/pdf/test_verify.py).
"""

from __future__ import annotations

import io
import zlib

import pikepdf
from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter


def flip(data: bytes, at: int) -> bytes:
    """One bit of one byte changed."""
    return data[:at] + bytes([data[at] ^ 1]) + data[at + 1 :]


def _flipped(data: bytes, objid: int) -> bytes:
    """A bit flipped in the middle of a packed stream's own bytes in the file: at the first place that changes what it unpacks to."""
    start = data.index(b"stream\n", data.index(b"\n%d 0 obj" % objid)) + len(b"stream\n")
    end = data.index(b"endstream", start)
    before = _unpacked(data[start:end])
    for at in range((start + end) // 2, end):
        forged = flip(data, at)
        if _unpacked(forged[start:end]) != before:
            return forged
    raise AssertionError("no bit of the stream changes what it unpacks to")


def _unpacked(packed: bytes) -> bytes | None:
    """What a reader that forgives much makes of it, the checksum at the end included in what it forgives; None if nothing."""
    try:
        return zlib.decompressobj(wbits=-15).decompress(packed[2:])
    except zlib.error:
        return None


def page(data: bytes, number: int = 1) -> bytes:
    """A byte of a page's content flipped."""
    with pikepdf.open(io.BytesIO(data)) as pdf:
        objid = pdf.pages[number].obj.Contents.objgen[0]
    return _flipped(data, objid)


def attachment(data: bytes, begins: str = "picture-") -> bytes:
    """A byte of the first attachment whose name begins so flipped."""
    with pikepdf.open(io.BytesIO(data)) as pdf:
        names = list(pdf.Root.Names.EmbeddedFiles.Names)
        spec = next(s for label, s in zip(names[::2], names[1::2], strict=True) if str(label).startswith(begins))
        objid = spec.EF.F.objgen[0]
    return _flipped(data, objid)


def _last_digit(data: bytes, field: str) -> int:
    """Where a hexadecimal digit near the end of the signature in `field` stands in the file."""
    with pikepdf.open(io.BytesIO(data)) as pdf:
        (found,) = [f for f in pdf.Root.AcroForm.Fields if str(f.T) == field]
        contents = bytes(found.V.Contents).rstrip(b"\0").hex().upper().encode()
    return data.upper().index(contents) + len(contents) - 3


def signature(data: bytes, field: str) -> bytes:
    """A digit near the end of the signature in `field` made another digit: still hexadecimal, so still a PDF."""
    at = _last_digit(data, field)
    other = b"%x" % (int(data[at : at + 1], 16) ^ 1)
    return data[:at] + other + data[at + 1 :]


def broken_signature(data: bytes, field: str) -> bytes:
    """A digit near the end of the signature in `field` made a sign that is no digit: the file is no longer sound PDF."""
    at = _last_digit(data, field)
    return data[:at] + b"@" + data[at + 1 :]


def revision(data: bytes) -> bytes:
    """A further revision that changes the document's language."""
    writer = IncrementalPdfFileWriter(io.BytesIO(data))
    writer.root["/Lang"] = generic.TextStringObject("de")
    writer.update_root()
    out = io.BytesIO()
    writer.write(out)
    return out.getvalue()


def without_countersignature(data: bytes) -> bytes:
    """The file cut back to the revision that the seal covers."""
    with pikepdf.open(io.BytesIO(data)) as pdf:
        (seal,) = [f for f in pdf.Root.AcroForm.Fields if str(f.T) == "Seal"]
        _, _, start, length = (int(n) for n in seal.V.ByteRange)
    return data[: start + length]
