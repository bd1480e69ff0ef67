"""The lines of a record's lists: readings, locks, waits, signatures and the rest, one model each.

Every number is a decimal string in the unit beside it; `at` is a time as the tablet wrote it (local, with its offset),
`time` the same as printed (14:29:31), `number` a step's number. Not here: the record that holds them (model.py).
"""

from __future__ import annotations

from typing import Literal

from fieldkit.record.context import Piece


class SourceLine(Piece):
    source: str
    title: str
    state: str
    says: str


class Span(Piece):
    """From when a source was in a state; `second` counts from midnight of the run's first day."""

    second: int
    state: str
    warming: bool = False
    decay: bool = False
    seq: int


class Lane(Piece):
    source: str
    title: str
    short: str
    spans: tuple[Span, ...]


class Limits(Piece):
    """As shown and applied: rounded inward. `says` is the limits in words."""

    low: str | None = None
    high: str | None = None
    low_name: str = ""
    high_name: str = ""
    caution_low: str | None = None
    caution_high: str | None = None
    accept_low: str | None = None
    accept_high: str | None = None
    guarded: bool = False
    says: str = ""


class OldValue(Piece):
    """A value that a correction replaced; it stays visible, struck through."""

    text: str
    seq: int
    reason: str
    by_name: str
    time: str


class Pointer(Piece):
    """A hollow pointer on the scale: as found, last run, an earlier try."""

    name: str
    value: str


class Reading(Piece):
    seq: int
    at: str
    time: str
    by_name: str
    step: str
    number: str
    title: str
    level: str
    #: which value of a proof: "tester before", a point's title, "tester after"; "" for a plain reading
    part: str = ""
    #: as typed, and as a plain decimal
    text: str
    value: str
    unit: str
    u: str | None
    limits: Limits | None
    plate: str | None
    pointers: tuple[Pointer, ...] = ()
    old: tuple[OldValue, ...] = ()
    #: distance to the nearest limit, negative outside
    margin: str | None
    #: the same in units of U, one decimal; None without U
    margin_u: str | None
    verdict: str
    reason: str
    near: bool
    untypical: bool
    overdue: bool
    protects: bool
    instrument: str | None
    words: str
    #: number of the deviation that accepted it
    deviation: int | None = None
    #: it failed and was taken again
    retaken: bool = False
    #: how many tries came before this one
    tries_before: int = 0
    #: an instrument reading, or a result worked out
    kind: Literal["reading", "result", "proof"] = "reading"
    formulas: tuple[str, ...] = ()
    #: the range of the instrument that was used; "" where it has no name
    range: str = ""
    #: a result with its U, without the unit: "41.54 ± 0.83"; "" where U is not worked out
    shown: str = ""


class FormulaLine(Piece):
    """A library formula used: what it means, and its published source."""

    name: str
    meaning: str
    reference: str


class Deviation(Piece):
    n: int
    seq: int
    at: str
    time: str
    step: str
    number: str
    title: str
    value: str
    unit: str
    limits: str
    says: str
    reason: str
    under: str
    authority: str
    authority_name: str


class Retake(Piece):
    """Why a step was gone through again."""

    seq: int
    time: str
    number: str
    title: str
    reason: str
    by_name: str


class Correction(Piece):
    seq: int
    of_seq: int
    at: str
    time: str
    step: str
    number: str
    title: str
    #: which value of the event: "" for its text
    part: str
    old: str
    new: str
    unit: str
    reason: str
    by_name: str
    #: whole seconds between the entry and its correction
    after_s: int


class LockLine(Piece):
    point: str
    sources: tuple[str, ...]
    lock: str
    tag: str
    holder_name: str
    #: "" for a lock that was on before this run; its own run is in `from_run`
    on_seq: int | None
    on_time: str
    from_run: str
    off_seq: int | None
    off_time: str
    off_by: str
    #: the checks of taking off another person's lock
    checks: tuple[str, ...] = ()
    second: str = ""
    left_on: bool


class EarthLine(Piece):
    stick: str
    point: str
    source: str
    on_seq: int | None
    on_time: str
    from_run: str
    off_seq: int | None
    off_time: str
    left_on: bool


class Proof(Piece):
    seq: int
    at: str
    time: str
    by_name: str
    number: str
    title: str
    instrument: str
    known_source: str
    verdict: str
    #: one line a value, in order: tester before, points, tester after
    values: tuple[str, ...]
    #: the range of the tester that was used; "" where it has no name
    range: str = ""


class Wait(Piece):
    seq: int
    time: str
    number: str
    title: str
    #: seconds, decimal strings: asked for, counted by the lesser clock, by the greater
    least: str
    counted: str
    greatest: str
    says: str
    flag: str


class Hold(Piece):
    seq: int
    time: str
    number: str
    title: str
    statement: str
    who: str
    name: str


class Note(Piece):
    """A remark, a trip, a pause, a choice, an act, people in or out, a caution: one line with who and when."""

    seq: int
    at: str
    time: str
    by_name: str
    number: str
    title: str
    says: str


class Picture(Piece):
    seq: int
    at: str
    time: str
    by_name: str
    number: str
    title: str
    note: str
    sha256: str
    width: int
    height: int


class Signature(Piece):
    seq: int
    person: str
    name: str
    role: str
    meaning: str
    statement: str
    #: as the person signed it
    time: str
    kid: str
    #: last event that it covers
    covers: int
    holds: bool
    says: str


class InstrumentLine(Piece):
    id: str
    reads: str
    unit: str
    range: str
    resolution: str
    accuracy: str
    calibrated_to: str
    certificate: str
    #: it took a reading of this run
    used: bool
    overdue: bool
    #: where and how long its accuracy holds, in words
    holds: str = ""


class GivenLine(Piece):
    name: str
    meaning: str
    value: str
    unit: str
    source: str


class Disagreement(Piece):
    """Where the server's recomputation differs from what the tablet recorded."""

    seq: int
    code: str
    says: str


class Chain(Piece):
    chains: tuple[str, ...]
    count: int
    head: str
    #: every event follows the one before it
    whole: bool
    disagree: tuple[Disagreement, ...]


class LogLine(Piece):
    """One event as one line, in order: the whole run."""

    seq: int
    at: str
    time: str
    by_name: str
    kind: str
    number: str
    title: str
    says: str
    sha256: str
