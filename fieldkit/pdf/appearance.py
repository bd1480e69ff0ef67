"""The supervisor's block: what is seen in the signature field once it is signed.

Typeset like the rest of the page, then placed as the field's appearance. The verifier makes it again from the
certificate and the signature's own words and compares. Not here: the empty block on the page (templates/record).
"""

from __future__ import annotations

import datetime as dt
import hashlib
from dataclasses import dataclass
from html import escape

from fieldkit.pdf import typeset


@dataclass(frozen=True)
class Block:
    """What the supervisor's block says: who, meaning what, when, with which key (SHA-256 of the certificate)."""

    name: str
    meaning: str
    time: dt.datetime
    key: str


#: what the supervisor states by signing; the field's Reason
REVIEWED = "I have reviewed this record."

_CSS = """
@page{size:%(width)spt %(height)spt;margin:0}
*{margin:0;padding:0}
html,body{font:400 7.8pt/1.42 "Plex Sans";color:#0D171C}
b{font-weight:600;font-size:11pt}
.m{font-family:"Plex Mono";font-weight:500;font-size:6.4pt;white-space:nowrap}
"""


def grouped(digest: str, groups: int = 3) -> str:
    """The first groups of four of a hash, as printed: "81e6 2b70 f3d4"."""
    return " ".join(digest[i : i + 4] for i in range(0, 4 * groups, 4))


def stamp(time: dt.datetime) -> str:
    """A time as printed under a name: "2026-08-01 09:12:55 +01:00"."""
    text = time.isoformat(sep=" ", timespec="seconds")
    return f"{text[:19]} {text[19:]}"


def words(block: Block) -> str:
    """The block's text as drawn, line by line."""
    return f"{block.name}\n“{block.meaning}”\n{stamp(block.time)}\nkey {grouped(block.key)}"


def pdf(block: Block, width: float, height: float) -> bytes:
    """One untagged page of `width` by `height` points that says what the block says."""
    lines = (
        f"<div><b>{escape(block.name)}</b><br>“{escape(block.meaning)}”<br>",
        f'<span class="m">{stamp(block.time)}</span><br>key <span class="m">{grouped(block.key)}</span></div>',
    )
    html = f'<html lang="en"><head><title>Countersignature</title></head><body>{"".join(lines)}</body></html>'
    identifier = hashlib.sha256(html.encode()).digest()[:16]
    size = {"width": f"{width:.3f}", "height": f"{height:.3f}"}
    return typeset.pages(html, _CSS % size, identifier=identifier, variant=None).pdf
