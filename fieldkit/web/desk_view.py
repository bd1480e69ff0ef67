"""What the desk's pages show, laid out from a record: drawings, rows, the block of signatures. Logic of templates.

Drawings are SVG text made by fieldkit.drawing, which escapes every word in them, so they stand in a page as they are.
"""

from __future__ import annotations

from dataclasses import dataclass

from markupsafe import Markup

from fieldkit import drawing
from fieldkit.operations import review
from fieldkit.operations.actor import Actor
from fieldkit.operations.dossier import Dossier, dossier
from fieldkit.operations.review import Line
from fieldkit.operations.runs import KeptLine
from fieldkit.record import words
from fieldkit.record.attention import scale
from fieldkit.record.frame import titled
from fieldkit.record.lines import Reading
from fieldkit.record.model import Attention, Record
from fieldkit.record.readings import by_margin

#: as many things that deserve attention stand in a list
FEW = 3


@dataclass(frozen=True)
class Listed:
    """A waiting record in the list: its sentence, and the weightiest things in it."""

    line: Line
    says: str
    few: tuple[Attention, ...]
    more: int


@dataclass(frozen=True)
class Point:
    """One thing that deserves attention, with its scale drawn."""

    item: Attention
    scale: Markup


@dataclass(frozen=True)
class Row:
    """One reading in the table: its scale and its mark drawn, the margin in the table's unit."""

    reading: Reading
    title: str
    scale: Markup
    mark: Markup
    margin: str


@dataclass(frozen=True)
class Signer:
    """One person in the block: what they signed, in words."""

    role: str
    name: str
    did: str
    holds: bool


@dataclass(frozen=True)
class Page:
    run: str
    state: str
    where: str
    when: str
    energy: Markup
    points: tuple[Point, ...]
    rows: tuple[Row, ...]
    signers: tuple[Signer, ...]
    chain_says: str
    verdicts_say: str
    sound: bool
    #: why this person may not return or countersign; "" where they may
    may_not: str
    unsound: str
    missing: tuple[str, ...]
    kept: tuple[KeptLine, ...]
    countersigned_by: str
    countersigned: str
    pdf_sha256: str
    returned: str
    #: what arrived after the countersignature, in words; "" when nothing did
    later: str


def day(at: str) -> str:
    return words.day(at)


def listed(line: Line) -> Listed:
    found = dossier(line.run).record
    return Listed(line, found.short, found.attention[:FEW], max(0, len(found.attention) - FEW))


def page(actor: Actor, found: Dossier, kept: list[KeptLine]) -> Page:
    r = found.record
    bad, unsound = review.refusal(actor, found), review.unsound(found)
    disagree = len(r.chain.disagree)
    return Page(
        run=found.run,
        state=found.state,
        where=f"{r.head.site_name}, cabinet {r.head.cabinet}",
        when=_when(r),
        energy=energy(r),
        points=tuple(_point(item) for item in r.attention),
        rows=tuple(_row(reading) for reading in by_margin(r.readings)),
        signers=_signers(r),
        chain_says=_chain(r),
        verdicts_say=f"{words.count(disagree, 'place')} disagree" if disagree else "Every verdict recomputed the same",
        sound=r.chain.whole and not disagree,
        may_not=bad.sentence if bad else "",
        unsound=unsound.sentence if unsound else "",
        missing=found.missing,
        kept=tuple(k for k in kept if k.settled is None),
        countersigned_by=found.countersigned_by,
        countersigned=found.countersigned,
        pdf_sha256=found.pdf_sha256,
        later=f"{words.count(found.later, 'event')} arrived after this record was countersigned."
        if found.later
        else "",
        returned=r.context.returns[-1].reason if r.context.returns else "",
    )


def _when(r: Record) -> str:
    span = f"{r.head.from_time[:5]} to {r.head.to_time[:5]}" if r.head.ended else f"from {r.head.from_time[:5]}"
    return f"{r.head.day}, {span}"


def _chain(r: Record) -> str:
    events = words.count(r.chain.count, "event")
    return f"Chain whole, {events}" if r.chain.whole else f"Chain not whole, {events}"


def energy(r: Record, width: int = 218, height: int = 534) -> Markup:
    """Energy over the run, with a balloon for everything that deserves attention."""
    lanes = [
        {
            "short": lane.short,
            "title": lane.title,
            "spans": [{"at": s.second, "state": s.state, "warming": s.warming, "decay": s.decay} for s in lane.spans],
        }
        for lane in r.lanes
    ]
    balls = [{"at": a.second, "lane": a.lane, "n": a.n} for a in r.attention if a.seq]
    if len(lanes) > 7:
        width += 12 * (len(lanes) - 7)
    model = {"from": r.from_second, "to": r.to_second, "lanes": lanes, "balls": balls, "width": width, "height": height}
    return Markup(drawing.timeline(model)) if lanes else Markup("")  # noqa: S704 - drawings escape their words


def _tiny(reading: Reading, width: int, height: int) -> Markup:
    model = {**scale(reading).model_dump(), "width": width, "height": height}
    return Markup(drawing.tiny(model))  # noqa: S704 - drawings escape their words


def _point(item: Attention) -> Point:
    if item.scale is None or (item.scale.low is None and item.scale.high is None):
        return Point(item, Markup(""))
    drawn = drawing.tiny({**item.scale.model_dump(), "width": 176, "height": 26})
    return Point(item, Markup(drawn))  # noqa: S704 - drawings escape their words


def _row(reading: Reading) -> Row:
    named = titled(reading.title, reading.level)
    if reading.level:
        named = named.replace(reading.level, reading.level.replace(" ", "\N{NO-BREAK SPACE}"))
    title = ", ".join(p for p in (named, reading.part) if p)
    if reading.margin_u is not None:
        margin = words.minus(reading.margin_u)
    else:
        margin = f"{words.minus(reading.margin)} {reading.unit}" if reading.margin is not None else ""
    mark = drawing.mark(reading.verdict, "screen", reading.verdict)
    return Row(reading, title, _tiny(reading, 120, 25), Markup(mark), margin)  # noqa: S704 - no words of others in it


def _signers(r: Record) -> tuple[Signer, ...]:
    """One cell a person, in the order in which they first signed; the technician who recorded first."""
    people: dict[str, list[int]] = {}
    for k, s in enumerate(r.signatures):
        people.setdefault(s.person, []).append(k)
    cells = []
    for person, indexes in people.items():
        mine = [r.signatures[k] for k in indexes]
        counted = {m: sum(s.meaning == m for s in mine) for m in dict.fromkeys(s.meaning for s in mine)}
        did = words.listed([_DID[m](n) for m, n in counted.items()])
        last = mine[-1]
        when = f", signed {words.day(last.time)} {words.minute(last.time)}" if "performed" in counted else ""
        role = "Technician" if person == r.head.recorder else mine[0].role
        cells.append(Signer(role, last.name, words.first_up(did) + when, all(s.holds for s in mine)))
    return tuple(sorted(cells, key=lambda c: _ORDER.index(c.role) if c.role in _ORDER else len(_ORDER)))


_ORDER = ("Technician", "Second person", "Supervisor")


_DID = {
    "performed": lambda n: "did this work",
    "witnessed": lambda n: "was present",
    "released": lambda n: words.count(n, "hold point"),
    "allowed": lambda n: words.count(n, "deviation"),
    "unlocked": lambda n: f"took off {words.count(n, 'lock')}",
    "handed over": lambda n: "handed over",
}
