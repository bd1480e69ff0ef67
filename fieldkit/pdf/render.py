"""A record's pages: its HTML from templates/record, the PDF that is sealed, and the files that travel inside it.

The same record, files and paper give the same bytes. To add a section: templates/record/<section>.html and a line in
fieldkit.record.sections. Not here: what the record says (fieldkit.record), how pages are made (typeset.py).
"""

from __future__ import annotations

import datetime as dt
import functools
import hashlib
import json
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal

import jinja2

import fieldkit
from fieldkit import files
from fieldkit.pdf import inside, plots, typeset
from fieldkit.pdf.appearance import grouped, stamp
from fieldkit.pdf.assemble import SEAL, SUPERVISOR, Attached, Field, assemble
from fieldkit.record import build, model, sections, words
from fieldkit.record.lines import Signature
from fieldkit.record.model import Record

Paper = Literal["A4", "Letter"]
#: paper -> size for CSS, and the width of the title block between the margins of print.css
PAPERS: dict[str, tuple[str, str]] = {"A4": ("210mm 297mm", "184mm"), "Letter": ("8.5in 11in", "189.9mm")}
#: Letter is 18 mm shorter, so its figure is smaller, in the same proportion
#: where the signatures do not fit on the first page, the readings follow them instead of leaving a page half empty
_SPILL = "section.readings.fresh{break-before:auto}section.readings.fresh h2{margin-top:7mm}"
_SHORT = ".fig{width:45mm}.fig img{width:45mm;height:64.6mm}.fig.tall img{height:76.9mm}"
#: as many things that deserve attention stand on the first page
FIRST = 7
_JPEG = "image/jpeg"


@dataclass(frozen=True)
class Files:
    """What travels inside the PDF beside the record: exact bytes, as hashed and signed."""

    sheet: bytes
    events: Sequence[bytes]
    procedure: bytes
    #: PEM of the signing authority's certificate
    authority: str
    #: JPEG by SHA-256
    pictures: Mapping[str, bytes] = field(default_factory=dict)


@dataclass(frozen=True)
class Rendered:
    """The HTML of the pages, and the PDF ready to be sealed."""

    html: str
    pdf: bytes
    count: int


@dataclass(frozen=True)
class Block:
    """One person's block on the first page: what they signed for, once a meaning, the last time they did.

    The statements that speak for one step each stand in full in the table of signatures; here their steps are named.
    """

    role: str
    name: str
    says: tuple[str, ...]
    time: str
    key: str
    holds: bool


def render(record: Record, attached: Files, paper: Paper = "A4") -> Rendered:
    """The pages of `record` with everything attached, unsealed. Raises typeset.TypesetError and Refusal."""
    data = model.to_bytes(record)
    text = html(record)
    pages = typeset_pages(text, data, attached.pictures, paper)
    rendering = json.dumps(how(paper), sort_keys=True).encode()
    pdf = assemble(pages, _attachments(data, rendering, attached), _fields(pages), _made(record))
    return Rendered(text, pdf, pages.count)


def how(paper: str) -> dict[str, str]:
    """What decides how the record is built and how its pages look: with the same, the same bytes and drawing."""
    made = {"code": build.code(), "fieldkit": fieldkit.__version__, "look": look()}
    return made | {"paper": paper, "renderer": typeset.version()}


@functools.cache
def look() -> str:
    """SHA-256 over the templates, the style sheet, the fonts, and the modules that draw."""
    digest = hashlib.sha256()
    static = files.folder("static")
    fonts = [static / "fonts" / name for _, _, _, name in typeset.FONTS]
    templates = sorted((files.folder("templates") / "record").glob("*.html"))
    here = Path(__file__).parent
    drawing = [*sorted((here.parent / "drawing").glob("*.py")), here / "plots.py", here / "render.py"]
    for path in [*templates, static / "css" / "print.css", *fonts, *drawing]:
        digest.update(path.name.encode() + b"\0" + path.read_bytes())
    return digest.hexdigest()


def html(record: Record) -> str:
    """The record's HTML, the same on every paper. Needs no typesetting library."""
    blocks = _blocks(record)
    return (
        _templates()
        .get_template("record/record.html")
        .render(
            r=record,
            sections=sections.printed(record),
            blocks=blocks,
            columns=max([len(row) for row in blocks] + [len(blocks[-1]) + 2]),
            titles=_titles(record),
            first=FIRST,
            roomy=plots.ROOMY,
            code=code(record),
        )
    )


def _titles(record: Record) -> dict[str, str]:
    """Energy source -> its title, as far as the record names them."""
    lanes = {lane.source: lane.title for lane in record.lanes}
    return lanes | {line.source: line.title for line in (*record.before, *record.after)}


def code(record: Record) -> str:
    """What the QR code says: enough to find the record and to see whether it is this one."""
    return f"run {record.head.run} events {record.chain.count} head {record.chain.head}"


@functools.cache
def _templates() -> jinja2.Environment:
    loader = jinja2.FileSystemLoader(files.folder("templates"))
    made = jinja2.Environment(
        loader=loader, autoescape=True, undefined=jinja2.StrictUndefined, trim_blocks=True, lstrip_blocks=True
    )
    made.globals.update(energy=plots.energy, tiny=plots.tiny, mark=plots.mark, qr=plots.qr)
    made.filters.update(grouped=grouped, minus=_minus, stamp=_stamp)
    return made


def _minus(text: str | None) -> str:
    """Text as it is printed: a true minus sign before numbers, hyphens in words and names."""
    return words.minus(text or "")


def _stamp(text: str) -> str:
    """An ISO time as printed: "2026-08-01 09:12:55 +01:00"; what is no time is printed as it is."""
    try:
        return stamp(dt.datetime.fromisoformat(text))
    except ValueError:
        return text


def typeset_pages(text: str, data: bytes, pictures: Mapping[str, bytes], paper: str) -> typeset.Pages:
    """The typeset pages of a record's HTML; `data` is record.json, whose hash becomes the file's identifier."""
    size, width = PAPERS[paper]
    css = (files.folder("static") / "css" / "print.css").read_text("utf-8")
    css = f"@page{{size:{size}}}\n{css}\n.tb{{width:{width}}}\n{_SHORT if paper == 'Letter' else ''}"
    resources = {f"picture/{sha}": (_JPEG, jpeg) for sha, jpeg in pictures.items()}
    identifier = hashlib.sha256(data).digest()[:16]
    return typeset.pages(text, css, identifier=identifier, resources=resources, otherwise=("supervisor", _SPILL))


def _attachments(data: bytes, rendering: bytes, attached: Files) -> list[Attached]:
    lines = b"".join(event + b"\n" for event in attached.events)
    found = [
        Attached(inside.RECORD, data, "application/json", "Data", "The record, as data"),
        Attached(inside.SHEET, attached.sheet, "application/json", "Source", "The sheet that the run was worked from"),
        Attached(inside.EVENTS, lines, "application/x-ndjson", "Source", "The events of the run, one a line, as made"),
        Attached(inside.PROCEDURE, attached.procedure, "text/yaml", "Source", "The procedure as written"),
        Attached(
            inside.AUTHORITY, attached.authority.encode(), "application/x-pem-file", "Supplement",
            "Certificate of the signing authority, for comparison; trust the one that you were given",
        ),
        Attached(inside.RENDERING, rendering, "application/json", "Supplement", "With what the pages were made"),
    ]  # fmt: skip
    pictures = [
        Attached(inside.picture(sha), jpeg, _JPEG, "Source", "A picture taken during the run")
        for sha, jpeg in sorted(attached.pictures.items())
    ]
    return found + pictures


def _fields(made: typeset.Pages) -> list[Field]:
    return [
        Field(SEAL, "Seal of the station", made.boxes["seal"], locks=False),
        Field(SUPERVISOR, "Signature of the supervisor", made.boxes["supervisor"], locks=True),
    ]


def _made(record: Record) -> dt.datetime:
    """The date of the attachments: when the run ended, or began."""
    return dt.datetime.fromisoformat(record.head.ended_utc or record.head.started_utc)


def _blocks(record: Record) -> list[list[Block]]:
    """People's blocks in rows of four, the recorder first; the last row leaves two places, for supervisor and seal."""
    people: dict[str, list[Signature]] = {}
    for one in sorted(record.signatures, key=lambda s: s.person != record.head.recorder):
        people.setdefault(one.person, []).append(one)
    numbers = {line.seq: line.number for line in record.log}
    blocks = [_block(found, numbers) for found in people.values()]
    rows = [blocks[i : i + 4] for i in range(0, len(blocks), 4)]
    return rows if rows and len(rows[-1]) <= 2 else [*rows, []]


#: meaning of a signature that speaks for one step -> what was done, before the steps' numbers
_DID = {"released": "Released", "unlocked": "Took off the lock of", "allowed": "Allowed the deviation of"}


def _block(found: list[Signature], numbers: Mapping[int, str]) -> Block:
    last, says = found[-1], []
    for meaning in dict.fromkeys(s.meaning for s in found):
        mine = [s for s in found if s.meaning == meaning]
        steps = list(dict.fromkeys(n for s in mine if (n := numbers.get(s.covers, ""))))
        if meaning in _DID and steps:
            says.append(f"{_DID[meaning]} {'step' if len(steps) == 1 else 'steps'} {words.listed(steps)}.")
        else:
            says += dict.fromkeys(f"“{s.statement}”" for s in mine)
    return Block(last.role, last.name, tuple(says), last.time, last.kid, all(s.holds for s in found))
