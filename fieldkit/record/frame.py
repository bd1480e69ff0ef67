"""The run laid out for the record: every event beside its row, its step, and the state before and after it.

The final fold gives the rows (a correction changes what an earlier row says); the states along the way show what was
so at each moment. Made once by `frame`, read by every other module here.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

from fieldkit.record import words
from fieldkit.record.context import Context
from fieldkit.record.lines import Note
from fieldkit.run import events as run_events
from fieldkit.run import state as run_state
from fieldkit.run.names import Context as Indexes
from fieldkit.run.names import context as indexes
from fieldkit.sheet.model import Sheet

Plain = dict[str, Any]


@dataclass(frozen=True)
class Frame:
    sheet: Sheet
    index: Indexes
    context: Context
    events: tuple[Plain, ...]
    #: states[k] is after events[k]
    states: tuple[Plain, ...]
    #: rows of the final fold, by seq
    rows: dict[int, Plain]
    names: dict[str, str]
    units: dict[str, str]

    @property
    def started(self) -> Plain:
        return self.events[0]["body"]

    @property
    def final(self) -> Plain:
        return self.states[-1]

    @property
    def first(self) -> str:
        """The wall clock of the first event."""
        return str(self.events[0]["at"]["wall"])

    @property
    def last(self) -> str:
        """When the work ended: the wall clock of `ended`, else of the last event."""
        ended = next((e for e in self.events if e["kind"] in ("ended", "voided")), self.events[-1])
        return str(ended["at"]["wall"])

    def of(self, *kinds: str) -> list[Plain]:
        """Events of these kinds, in order."""
        return [e for e in self.events if e["kind"] in kinds]

    def row(self, event: Plain) -> Plain:
        return self.rows[event["seq"]]

    def before(self, event: Plain) -> Plain:
        """The state before an event."""
        k = self.events.index(event)
        return self.states[k - 1] if k else run_state.new(self.index)

    def after(self, event: Plain) -> Plain:
        return self.states[self.events.index(event)]

    def step(self, event: Plain) -> Plain | None:
        return self.index.steps.get(event["body"].get("step") or "")

    def name(self, person: str | None) -> str:
        return self.names.get(person or "", person or "")

    def unit(self, symbol: str) -> str:
        """A unit as people read it: uA is µA."""
        return self.units.get(symbol, symbol)

    def range(self, name: str) -> str:
        """The name of a range as people read it: "5 uSv/h" is "5 µSv/h"."""
        number, _, symbol = name.rpartition(" ")
        return f"{number} {self.unit(symbol)}" if number else name

    def title(self, source: str) -> str:
        found = self.index.sources.get(source)
        return str(found["title"]) if found else source.replace("_", " ")

    def time(self, event: Plain) -> str:
        return words.time(event["at"]["wall"])

    def second(self, event: Plain) -> int:
        return words.second(event["at"]["wall"], self.first)

    def note(self, event: Plain, says: str, title: str = "") -> Note:
        """One line about an event, with who and when."""
        row = self.rows.get(event["seq"], {})
        return Note(
            seq=event["seq"],
            at=event["at"]["wall"],
            time=self.time(event),
            by_name=self.name(event["by"]),
            number=row.get("number", ""),
            title=title or row.get("title", ""),
            says=says,
        )


def titled(title: str, level: str) -> str:
    """A step's title, with the rung that it was at where the title does not say it."""
    return title if not level or level in title else f"{title}, {level}"


def frame(sheet: Sheet, happened: Iterable[run_events.Event], context: Context) -> Frame:
    """The run laid out. Raises ValueError where there is no event, or the first one starts no run."""
    events = tuple(run_events.plain(e) for e in happened)
    if not events or events[0]["kind"] != "run-started":
        raise ValueError("a record needs the event that started its run")
    index, run, states = indexes(sheet), run_state.begin(sheet), []
    for event in events:
        run = run_state.apply(run, event)
        states.append(run.state)
    body = events[0]["body"]
    names = {**context.names, **{p["id"]: p["name"] for p in body["people"]}}
    rows = {row["seq"]: row for row in run.state["log"]}
    return Frame(sheet, index, context, events, tuple(states), rows, names, _units(index.sheet))


def _units(part: Any) -> dict[str, str]:
    """symbol -> as shown, for every unit of the sheet."""
    found: dict[str, str] = {}
    if isinstance(part, dict):
        if isinstance(part.get("symbol"), str) and isinstance(part.get("factor"), str):
            found[part["symbol"]] = part.get("shown") or part["symbol"]
        for one in part.values():
            found |= _units(one)
    elif isinstance(part, list):
        for one in part:
            found |= _units(one)
    return found
