"""Sheets and the YAML they came from: stored under their SHA-256, and which one is in use.

Compiling is fieldkit.procedure's. An edition that is released is never changed: the same number with other content is
refused.
"""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from sqlalchemy import select

from fieldkit.errors import Problems, Refusal
from fieldkit.operations import moment
from fieldkit.operations.actor import Actor, require
from fieldkit.sheet import model
from fieldkit.sheet.model import Sheet
from fieldkit.store.db import db, writing
from fieldkit.store.tables import Release, SheetRow, Source

if TYPE_CHECKING:
    from fieldkit.formula.library import Library


@dataclass(frozen=True)
class Released:
    """A procedure that goes into the kit."""

    procedure: str
    edition: int
    sheet: str
    source: str
    size: int
    source_size: int
    proved: bool


def release_file(actor: Actor, path: Path, library: Library) -> str:
    """Compile one YAML file and release it; gives the sheet's SHA-256. Writer or administrator.

    Raises Problems with everything that is wrong with it, or Refusal as `release`.
    """
    # the compiler brings a parser and a table of units along, which a server that only receives runs never needs
    from fieldkit.procedure import compile as compiling

    made, problems = compiling.compile_file(path, library)
    stopping = [p for p in problems if p.weight == "problem"]
    if made is None or stopping:
        raise Problems(problems)
    return release(actor, made, path.read_bytes())


def release(actor: Actor, sheet: Sheet, source: bytes) -> str:
    """Store a compiled edition with its YAML and put it in use; gives the sheet's SHA-256. Writer or administrator.

    Raises Refusal wrong-source, edition-taken.
    """
    require(actor, "writer", "administrator")
    data = model.to_bytes(sheet)
    digest, source_digest = model.digest(data), hashlib.sha256(source).hexdigest()
    if sheet.source_sha256 != source_digest:
        raise Refusal("wrong-source", "The sheet was not compiled from this YAML. Compile it again.")
    at = moment.text()
    with writing() as session:
        same = select(SheetRow).where(SheetRow.procedure == sheet.procedure, SheetRow.edition == sheet.edition)
        for row in session.scalars(same):
            if row.source != source_digest:
                raise Refusal(
                    "edition-taken",
                    f"Edition {sheet.edition} of {sheet.procedure} exists already with other content. "
                    f"An edition is never changed: write edition {sheet.edition + 1}.",
                )
        if session.get(Source, source_digest) is None:
            session.add(Source(sha256=source_digest, procedure=sheet.procedure, data=source, added=at))
            session.flush()
        if session.get(SheetRow, digest) is None:
            session.add(
                SheetRow(
                    sha256=digest,
                    procedure=sheet.procedure,
                    edition=sheet.edition,
                    source=source_digest,
                    data=data,
                    added=at,
                )
            )
            session.flush()
        used = session.get(Release, sheet.procedure)
        if used is None:
            session.add(
                Release(procedure=sheet.procedure, sheet=digest, released=at, released_by=actor.id, proved=False)
            )
        elif used.sheet != digest:
            used.sheet, used.released, used.released_by, used.proved = digest, at, actor.id, False
    return digest


def released() -> list[Released]:
    """What is in use, by name."""
    query = (
        select(SheetRow, Release.proved, Source)
        .join(Release, Release.sheet == SheetRow.sha256)
        .join(Source, Source.sha256 == SheetRow.source)
        .order_by(SheetRow.procedure)
    )
    return [
        Released(row.procedure, row.edition, row.sha256, row.source, len(row.data), len(source.data), proved)
        for row, proved, source in db.session.execute(query)
    ]


def sheet(sha256: str) -> tuple[Sheet, bytes, bytes]:
    """A stored sheet, its bytes, and its YAML. Raises Refusal not-found, damaged-sheet, unknown-version."""
    row = db.session.get(SheetRow, sha256)
    if row is None:
        raise Refusal("not-found", f"The sheet {sha256[:12]} is not here.")
    return model.from_bytes(row.data), row.data, db.session.get_one(Source, row.source).data
