"""Every table, on one page. Times are UTC text (ISO 8601, "Z"); JSON is text; bytes are bytes, kept as received.

Fenced tables (fieldkit.store.fences) take rows and never give one up or change one. What is derived from events
(runs, chains, records' states) may change; what was received may not. To add a table: a class here, a migration.
"""

from __future__ import annotations

from sqlalchemy import ForeignKey, Index, LargeBinary, String, Text, UniqueConstraint
from sqlalchemy.orm import Mapped, mapped_column

from fieldkit.store.db import Model


def _sha() -> Mapped[str]:
    return mapped_column(String(64), primary_key=True)


class Setting(Model):
    """One value that belongs to the whole server: "store" (id, new after a restore), "station", "min_app", "hosts"."""

    __tablename__ = "settings"
    name: Mapped[str] = mapped_column(String(64), primary_key=True)
    value: Mapped[str] = mapped_column(Text)


class Person(Model):
    """Somebody, for ever: an id is never given to another person, a row is never removed."""

    __tablename__ = "people"
    id: Mapped[str] = mapped_column(String(32), primary_key=True)
    login: Mapped[str] = mapped_column(String(64), unique=True)
    name: Mapped[str] = mapped_column(String(120))
    #: JSON list out of fieldkit.operations.actor.ROLES
    roles: Mapped[str] = mapped_column(Text)
    password: Mapped[str] = mapped_column(Text)
    active: Mapped[bool] = mapped_column(default=True)
    created: Mapped[str] = mapped_column(String(32))


class SignedIn(Model):
    """A session at the desk: found by the SHA-256 of the cookie's random id, gone at sign-out."""

    __tablename__ = "sessions"
    id: Mapped[str] = _sha()
    person: Mapped[str] = mapped_column(ForeignKey("people.id"), index=True)
    created: Mapped[str] = mapped_column(String(32))
    seen: Mapped[str] = mapped_column(String(32))


class Miss(Model):
    """Wrong passwords counted, by who was tried from where; only ever slows down."""

    __tablename__ = "misses"
    key: Mapped[str] = mapped_column(String(200), primary_key=True)
    count: Mapped[int]
    last: Mapped[str] = mapped_column(String(32))


class Device(Model):
    """A tablet: its public key checks every request it makes."""

    __tablename__ = "devices"
    id: Mapped[str] = mapped_column(String(64), primary_key=True)
    name: Mapped[str] = mapped_column(String(120))
    jwk: Mapped[str] = mapped_column(Text)
    #: waiting until an enrolment on it is issued; then admitted; or revoked
    status: Mapped[str] = mapped_column(String(16))
    created: Mapped[str] = mapped_column(String(32))
    revoked: Mapped[str | None] = mapped_column(String(32))
    revoked_why: Mapped[str] = mapped_column(Text, default="")


class Enrolment(Model):
    """A person's new key on a tablet, waiting for the signing authority to be opened."""

    __tablename__ = "enrolments"
    id: Mapped[str] = mapped_column(String(40), primary_key=True)
    person: Mapped[str] = mapped_column(ForeignKey("people.id"))
    #: None for a key that a supervisor holds in a desk browser
    device: Mapped[str | None] = mapped_column(ForeignKey("devices.id"))
    person_jwk: Mapped[str] = mapped_column(Text)
    proof: Mapped[str] = mapped_column(Text)
    #: waiting, issued, refused
    status: Mapped[str] = mapped_column(String(16), index=True)
    created: Mapped[str] = mapped_column(String(32))
    decided: Mapped[str | None] = mapped_column(String(32))
    decided_by: Mapped[str | None] = mapped_column(ForeignKey("people.id"))
    note: Mapped[str] = mapped_column(Text, default="")
    kid: Mapped[str | None] = mapped_column(String(64))


class PersonKey(Model):
    """An issued certificate: `kid` is the SHA-256 of its DER. Kept when revoked, to judge what it signed before."""

    __tablename__ = "person_keys"
    kid: Mapped[str] = _sha()
    person: Mapped[str] = mapped_column(ForeignKey("people.id"), index=True)
    #: None for a key that a supervisor holds in a desk browser
    device: Mapped[str | None] = mapped_column(ForeignKey("devices.id"))
    certificate: Mapped[str] = mapped_column(Text)
    jwk: Mapped[str] = mapped_column(Text)
    issued: Mapped[str] = mapped_column(String(32))
    revoked: Mapped[str | None] = mapped_column(String(32))


class Site(Model):
    __tablename__ = "sites"
    id: Mapped[str] = mapped_column(String(64), primary_key=True)
    data: Mapped[str] = mapped_column(Text)


class Cabinet(Model):
    __tablename__ = "cabinets"
    id: Mapped[str] = mapped_column(String(64), primary_key=True)
    site: Mapped[str] = mapped_column(ForeignKey("sites.id"))
    data: Mapped[str] = mapped_column(Text)


class Tube(Model):
    __tablename__ = "tubes"
    id: Mapped[str] = mapped_column(String(64), primary_key=True)
    cabinet: Mapped[str | None] = mapped_column(ForeignKey("cabinets.id"))
    data: Mapped[str] = mapped_column(Text)


class Nameplate(Model):
    """An entry of a tube's nameplate. It counts when a second person entered the same and its photograph is here."""

    __tablename__ = "nameplates"
    id: Mapped[int] = mapped_column(primary_key=True, autoincrement=True)
    tube: Mapped[str] = mapped_column(ForeignKey("tubes.id"), index=True)
    #: JSON: name -> {"texts": [...], "unit": ...}
    values: Mapped[str] = mapped_column(Text)
    photograph: Mapped[str | None] = mapped_column(ForeignKey("pictures.sha256"))
    entered_by: Mapped[str] = mapped_column(ForeignKey("people.id"))
    entered: Mapped[str] = mapped_column(String(32))
    second_by: Mapped[str | None] = mapped_column(ForeignKey("people.id"))
    second: Mapped[str | None] = mapped_column(String(32))
    #: entered, counts, differs, replaced
    state: Mapped[str] = mapped_column(String(16))
    note: Mapped[str] = mapped_column(Text, default="")


class Instrument(Model):
    __tablename__ = "instruments"
    id: Mapped[str] = mapped_column(String(64), primary_key=True)
    data: Mapped[str] = mapped_column(Text)


class Source(Model):
    """A procedure's YAML, as it was when it was compiled. Fenced."""

    __tablename__ = "sources"
    sha256: Mapped[str] = _sha()
    procedure: Mapped[str] = mapped_column(String(120))
    data: Mapped[bytes] = mapped_column(LargeBinary)
    added: Mapped[str] = mapped_column(String(32))


class SheetRow(Model):
    """A sheet's bytes. Fenced; which one is in use stands in `releases`."""

    __tablename__ = "sheets"
    sha256: Mapped[str] = _sha()
    procedure: Mapped[str] = mapped_column(String(120), index=True)
    edition: Mapped[int]
    source: Mapped[str] = mapped_column(ForeignKey("sources.sha256"))
    data: Mapped[bytes] = mapped_column(LargeBinary)
    added: Mapped[str] = mapped_column(String(32))


class Release(Model):
    """Which sheet of a procedure goes into the kit. `proved` is False until the safety proof of an edition exists."""

    __tablename__ = "releases"
    procedure: Mapped[str] = mapped_column(String(120), primary_key=True)
    sheet: Mapped[str] = mapped_column(ForeignKey("sheets.sha256"))
    proved: Mapped[bool] = mapped_column(default=False)
    released: Mapped[str] = mapped_column(String(32))
    released_by: Mapped[str] = mapped_column(String(32))


class Blob(Model):
    """Bytes that a kit names: registers, control templates. Fenced."""

    __tablename__ = "blobs"
    sha256: Mapped[str] = _sha()
    media: Mapped[str] = mapped_column(String(80))
    data: Mapped[bytes] = mapped_column(LargeBinary)


class Run(Model):
    """What is known of a run from its first and last events; all of it can be made again from `events`."""

    __tablename__ = "runs"
    id: Mapped[str] = mapped_column(String(80), primary_key=True)
    chain: Mapped[str] = mapped_column(String(160))
    device: Mapped[str] = mapped_column(ForeignKey("devices.id"))
    sheet: Mapped[str] = mapped_column(String(64))
    procedure: Mapped[str] = mapped_column(String(120), index=True)
    edition: Mapped[int]
    site: Mapped[str] = mapped_column(String(64))
    cabinet: Mapped[str] = mapped_column(String(64), index=True)
    tube: Mapped[str] = mapped_column(String(64), index=True)
    recorder: Mapped[str] = mapped_column(String(32))
    started: Mapped[str] = mapped_column(String(40))
    rehearsal: Mapped[bool]
    #: open, done, stopped, voided
    phase: Mapped[str] = mapped_column(String(16), default="open")
    ended: Mapped[str | None] = mapped_column(String(40))
    ended_seq: Mapped[int | None]
    #: seq of the recorder's signature that covers the end, when it is there
    signed_seq: Mapped[int | None]


class Chain(Model):
    """How far one tablet's chain of a run has been accepted, and whether something is wrong with it."""

    __tablename__ = "chains"
    run: Mapped[str] = mapped_column(String(80), primary_key=True)
    id: Mapped[str] = mapped_column(String(160), primary_key=True)
    device: Mapped[str] = mapped_column(ForeignKey("devices.id"))
    seq: Mapped[int]
    head: Mapped[str] = mapped_column(String(64))
    alarm: Mapped[str] = mapped_column(Text, default="")


class EventRow(Model):
    """An accepted event, the bytes as the tablet made them. Fenced."""

    __tablename__ = "events"
    run: Mapped[str] = mapped_column(String(80), primary_key=True)
    chain: Mapped[str] = mapped_column(String(160), primary_key=True)
    seq: Mapped[int] = mapped_column(primary_key=True)
    sha256: Mapped[str] = mapped_column(String(64), unique=True)
    kind: Mapped[str] = mapped_column(String(32))
    by: Mapped[str] = mapped_column(String(32))
    data: Mapped[bytes] = mapped_column(LargeBinary)
    received: Mapped[str] = mapped_column(String(32))


class PendingEvent(Model):
    """An event whose predecessor has not come yet; moved on when the gap closes."""

    __tablename__ = "pending"
    run: Mapped[str] = mapped_column(String(80), primary_key=True)
    chain: Mapped[str] = mapped_column(String(160), primary_key=True)
    seq: Mapped[int] = mapped_column(primary_key=True)
    sha256: Mapped[str] = mapped_column(String(64))
    data: Mapped[bytes] = mapped_column(LargeBinary)
    received: Mapped[str] = mapped_column(String(32))


class KeptEvent(Model):
    """An event that cannot be accepted: kept as it came and shown, never dropped."""

    __tablename__ = "kept"
    id: Mapped[int] = mapped_column(primary_key=True, autoincrement=True)
    run: Mapped[str] = mapped_column(String(80), index=True)
    chain: Mapped[str] = mapped_column(String(160))
    #: None where the bytes do not even say which
    seq: Mapped[int | None]
    sha256: Mapped[str] = mapped_column(String(64))
    code: Mapped[str] = mapped_column(String(40))
    says: Mapped[str] = mapped_column(Text)
    data: Mapped[bytes] = mapped_column(LargeBinary)
    device: Mapped[str] = mapped_column(String(64))
    received: Mapped[str] = mapped_column(String(32))
    #: set when the same bytes were accepted later, by a newer fieldkit
    settled: Mapped[str | None] = mapped_column(String(32))
    __table_args__ = (UniqueConstraint("run", "chain", "sha256", "code"),)


class Picture(Model):
    """A picture: `original` as received, under its SHA-256; `data` re-encoded here, the one that is shown. Fenced."""

    __tablename__ = "pictures"
    sha256: Mapped[str] = _sha()
    original: Mapped[bytes] = mapped_column(LargeBinary)
    data: Mapped[bytes] = mapped_column(LargeBinary)
    data_sha256: Mapped[str] = mapped_column(String(64))
    media: Mapped[str] = mapped_column(String(40))
    width: Mapped[int]
    height: Mapped[int]
    source: Mapped[str] = mapped_column(String(64))
    received: Mapped[str] = mapped_column(String(32))


class RunPicture(Model):
    """Which pictures a run's events name; the run is complete when all are in `pictures`."""

    __tablename__ = "run_pictures"
    run: Mapped[str] = mapped_column(String(80), primary_key=True)
    sha256: Mapped[str] = mapped_column(String(64), primary_key=True)
    seq: Mapped[int]
    __table_args__ = (Index("ix_run_pictures_sha256", "sha256"),)


class Receipt(Model):
    """What a tablet was told is here. Made after the commit that it speaks of. Fenced."""

    __tablename__ = "receipts"
    run: Mapped[str] = mapped_column(String(80), primary_key=True)
    chain: Mapped[str] = mapped_column(String(160), primary_key=True)
    seq: Mapped[int] = mapped_column(primary_key=True)
    #: a restored database has another store id, and gives its own receipts
    store: Mapped[str] = mapped_column(String(64), primary_key=True)
    head: Mapped[str] = mapped_column(String(64))
    jws: Mapped[str] = mapped_column(Text)
    time: Mapped[str] = mapped_column(String(32))


class SignatureRow(Model):
    """A person's signature found in a `signed` event, and whether it holds. Fenced."""

    __tablename__ = "signatures"
    run: Mapped[str] = mapped_column(String(80), primary_key=True)
    chain: Mapped[str] = mapped_column(String(160), primary_key=True)
    seq: Mapped[int] = mapped_column(primary_key=True)
    person: Mapped[str] = mapped_column(String(32))
    meaning: Mapped[str] = mapped_column(String(32))
    kid: Mapped[str] = mapped_column(String(64))
    holds: Mapped[bool]
    says: Mapped[str] = mapped_column(Text, default="")


class RecordRow(Model):
    """The record of a finished run. `waiting` for a supervisor, `returned` to the recorder, `countersigned`."""

    __tablename__ = "records"
    run: Mapped[str] = mapped_column(ForeignKey("runs.id"), primary_key=True)
    state: Mapped[str] = mapped_column(String(16), index=True)
    since: Mapped[str] = mapped_column(String(32))
    record: Mapped[bytes | None] = mapped_column(LargeBinary)
    pdf: Mapped[bytes | None] = mapped_column(LargeBinary)
    pdf_sha256: Mapped[str | None] = mapped_column(String(64))
    countersigned_by: Mapped[str | None] = mapped_column(ForeignKey("people.id"))
    countersigned: Mapped[str | None] = mapped_column(String(32))


class Preparation(Model):
    """A PDF that waits for the supervisor's key: what was prepared for whom, thrown away when used or old."""

    __tablename__ = "preparations"
    id: Mapped[str] = mapped_column(String(40), primary_key=True)
    run: Mapped[str] = mapped_column(ForeignKey("runs.id"))
    person: Mapped[str] = mapped_column(ForeignKey("people.id"))
    kid: Mapped[str] = mapped_column(String(64))
    #: the run's head when it was prepared; another head by now means prepare again
    head: Mapped[str] = mapped_column(String(64))
    record: Mapped[bytes] = mapped_column(LargeBinary)
    pdf: Mapped[bytes] = mapped_column(LargeBinary)
    #: whatever fieldkit.pdf.seal needs to finish
    state: Mapped[bytes] = mapped_column(LargeBinary)
    created: Mapped[str] = mapped_column(String(32))


class Return(Model):
    """A record was returned to its recorder, with the reason. Fenced."""

    __tablename__ = "returns"
    id: Mapped[int] = mapped_column(primary_key=True, autoincrement=True)
    run: Mapped[str] = mapped_column(ForeignKey("runs.id"), index=True)
    by: Mapped[str] = mapped_column(ForeignKey("people.id"))
    reason: Mapped[str] = mapped_column(Text)
    #: the run's last seq when it was returned
    seq: Mapped[int]
    time: Mapped[str] = mapped_column(String(32))


class Notice(Model):
    """Something an administrator should see: an alarm of sync, a sign-in that was tried too often. Fenced."""

    __tablename__ = "notices"
    id: Mapped[int] = mapped_column(primary_key=True, autoincrement=True)
    code: Mapped[str] = mapped_column(String(40))
    says: Mapped[str] = mapped_column(Text)
    about: Mapped[str] = mapped_column(String(200))
    time: Mapped[str] = mapped_column(String(32))
