"""Pictures: kept as received under their SHA-256, and re-encoded here for anybody to look at.

What came from outside is never shown or put in a PDF; the copy made here is pixels only: no metadata, no place, nothing
hidden behind the image. Not here: the event that names a picture (sync.py).
"""

from __future__ import annotations

import hashlib
import io
import warnings
from dataclasses import dataclass

from PIL import Image, ImageOps
from sqlalchemy.orm import Session

from fieldkit.errors import Refusal
from fieldkit.operations import moment
from fieldkit.store.db import db, writing
from fieldkit.store.tables import Picture

LARGEST = 8 * 1024 * 1024
PIXELS = 40_000_000
#: longest side of the copy, in pixels
LONGEST_SIDE = 2400
QUALITY = 88
FORMATS = ("JPEG", "PNG", "WEBP")


@dataclass(frozen=True)
class Made:
    """A picture as it can be shown: JPEG bytes and size in pixels."""

    data: bytes
    width: int
    height: int


def reencode(data: bytes) -> Made:
    """A clean JPEG of `data`, upright. Raises Refusal not-a-picture or too-large."""
    if len(data) > LARGEST:
        raise Refusal("too-large", "A picture may have 8 MB at most.")
    try:
        with warnings.catch_warnings():
            # a picture of very many pixels only warns at first; here it is refused before a pixel is decoded
            warnings.simplefilter("error", Image.DecompressionBombWarning)
            with Image.open(io.BytesIO(data), formats=FORMATS) as found:
                if found.width * found.height > PIXELS:
                    raise Refusal(
                        "too-large", f"That picture has {found.width} x {found.height} pixels; 40 million is the most."
                    )
                upright = ImageOps.exif_transpose(found).convert("RGB")
    except Refusal:
        raise
    except Image.DecompressionBombError as exc:
        raise Refusal("too-large", "That picture has too many pixels; 40 million is the most.") from exc
    except Exception as exc:
        # decoders fail in many ways on hostile bytes; all of them mean the same here
        raise Refusal("not-a-picture", "That is not a JPEG, PNG or WebP picture that can be read.") from exc
    upright.thumbnail((LONGEST_SIDE, LONGEST_SIDE))
    clean = Image.new("RGB", upright.size)
    clean.paste(upright)
    out = io.BytesIO()
    clean.save(out, "JPEG", quality=QUALITY)
    return Made(out.getvalue(), clean.width, clean.height)


@dataclass(frozen=True)
class Prepared:
    """A picture as received and as made here, ready to be stored."""

    sha256: str
    original: bytes
    made: Made


def prepare(data: bytes, expected: str | None = None) -> Prepared:
    """Check and re-encode, outside any transaction.

    Raises Refusal wrong-digest when the bytes are not those of `expected`, not-a-picture, too-large.
    """
    digest = hashlib.sha256(data).hexdigest()
    if expected is not None and digest != expected:
        says = f"What arrived is {digest[:12]}, not {expected[:12]}: it was damaged on the way. Send it again."
        raise Refusal("wrong-digest", says)
    return Prepared(digest, data, reencode(data))


def add(session: Session, one: Prepared, source: str) -> None:
    """Within the caller's transaction; a picture that is here already stays as it is."""
    if session.get(Picture, one.sha256) is not None:
        return
    session.add(
        Picture(
            sha256=one.sha256,
            original=one.original,
            data=one.made.data,
            data_sha256=hashlib.sha256(one.made.data).hexdigest(),
            media="image/jpeg",
            width=one.made.width,
            height=one.made.height,
            source=source,
            received=moment.text(),
        )
    )


def put(data: bytes, source: str) -> str:
    """Store a picture that came from `source` (a person's id); gives its SHA-256. Storing it again is fine."""
    one = prepare(data)
    with writing() as session:
        add(session, one, source)
    return one.sha256


def shown(sha256: str) -> bytes:
    """The clean JPEG of a picture. Raises Refusal not-found."""
    row = db.session.get(Picture, sha256)
    if row is None:
        raise Refusal("not-found", "That picture has not arrived.")
    return row.data
