"""The sheet itself: what a tablet works from, stored under the SHA-256 of its bytes.

`to_bytes` makes the one canonical form that is hashed and stored; nobody re-serialises a sheet afterwards.
Reading an unknown version is a Refusal, never a guess. Not here: compiling (fieldkit.procedure.compile).
"""

from __future__ import annotations

import hashlib
import json
from typing import Any, Literal

from pydantic import Field, ValidationError

from fieldkit.errors import Refusal
from fieldkit.sheet.controls import Control
from fieldkit.sheet.moves import END, SAFE, Move
from fieldkit.sheet.parts import Condition, Effects, Given, Part, Source, SourceState, Tree, Unit

VERSION = "sheet/1"


class Level(Part):
    """The rung that a ladder step is at: SI value by a tree over counters and givens, shown in `unit`."""

    value: Tree
    unit: Unit


class Step(Part):
    id: str
    #: as printed: "17"; a rung of a ladder shares its step's number
    number: str
    #: the writer's kind word, for the record only; nothing after compile branches on it
    kind: str
    section: str = ""
    title: str
    text: str = ""
    #: why the step is there, shown small
    why: str = ""
    level: Level | None = None
    control: Control
    #: "recorder", or "second person" when the reading is taken by the other one
    who: Literal["recorder", "second person"] = "recorder"
    #: line of the procedure's YAML, for the checker and the proof
    line: int = 0


class SafeStep(Part):
    """One line of the make-safe list: never gated, works whatever is already off."""

    id: str
    text: str
    sets: dict[str, SourceState] = Field(default_factory=dict)
    note: str = ""


class Declared(Part):
    """The state a source is expected in at the start; `least` seconds for "heater: on for 15 min"."""

    state: SourceState
    least: Tree | None = None
    #: other states that are also in order at the start
    accepts: tuple[SourceState, ...] = ()


class After(Part):
    """A finished earlier run on the same tube; `within` seconds, or None for any time."""

    procedure: str
    within: str | None = None
    says: str


class Rule(Part):
    """A rule of the plant that holds for as long as `source` is in `state`; for the proof and the reader."""

    source: str
    state: SourceState
    needs: tuple[Condition, ...]
    says: str


class Argument(Part):
    """One argument of a library formula, SI range inclusive, decimal strings; None is unbounded.

    `factor` and `offset` are those of `unit`, so that a refusal outside the range can be told in it.
    """

    name: str
    unit: str
    factor: str = "1"
    offset: str = "0"
    low: str | None = None
    high: str | None = None
    #: whole numbers only, as a channel is
    whole: bool = False


class FormulaUsed(Part):
    """A library formula aboard a sheet, so that the sheet can be recomputed in ten years."""

    name: str
    meaning: str
    arguments: tuple[Argument, ...]
    result_unit: str
    tree: Tree
    reference: str


class Sheet(Part):
    fieldkit: Literal["sheet/1"] = "sheet/1"
    procedure: str
    edition: int
    title: str
    purpose: str
    changes: str = ""
    #: SHA-256 of the YAML bytes it was compiled from
    source_sha256: str
    tubes: tuple[str, ...]
    crew: int
    #: what one person may do alone, said when a run that needs two is refused to one
    alone: str = ""
    after: tuple[After, ...] = ()
    givens: tuple[Given, ...]
    sources: tuple[Source, ...]
    start: dict[str, Declared]
    ends: dict[str, tuple[SourceState, ...]]
    rules: tuple[Rule, ...] = ()
    #: name -> where it starts (it never goes below), and the most it can reach
    counters: dict[str, tuple[int, int]] = Field(default_factory=dict)
    first: str
    steps: tuple[Step, ...]
    moves: tuple[Move, ...]
    make_safe: tuple[SafeStep, ...]
    formulas: dict[str, FormulaUsed] = Field(default_factory=dict)
    #: what the next person must know, shown at the end
    next_person: str = ""


def to_bytes(sheet: Sheet) -> bytes:
    """The bytes that are stored and hashed: UTF-8 JSON, keys sorted, no spaces, defaults written out."""
    data = sheet.model_dump(mode="json")
    return json.dumps(data, ensure_ascii=False, sort_keys=True, separators=(",", ":")).encode()


def digest(data: bytes) -> str:
    """SHA-256 of a sheet's bytes, lower-case hex: its name everywhere."""
    return hashlib.sha256(data).hexdigest()


def from_bytes(data: bytes) -> Sheet:
    """The sheet in `data`. Raises Refusal unknown-version or damaged-sheet, naming what is wrong."""
    try:
        raw: Any = json.loads(data)
    except ValueError as exc:
        raise Refusal("damaged-sheet", f"This is not a sheet: {exc}. Fetch the kit again.") from exc
    found = raw.get("fieldkit") if isinstance(raw, dict) else None
    if found != VERSION:
        raise Refusal("unknown-version", f"Sheet version {found!r} is not known here ({VERSION} is). Update fieldkit.")
    try:
        return Sheet.model_validate(raw)
    except ValidationError as exc:
        first = exc.errors()[0]
        where = ".".join(str(p) for p in first["loc"])
        raise Refusal("damaged-sheet", f"The sheet is damaged at {where}: {first['msg']}.") from exc


__all__ = ["END", "SAFE", "Condition", "Effects", "Move", "Sheet", "Step", "digest", "from_bytes", "to_bytes"]
