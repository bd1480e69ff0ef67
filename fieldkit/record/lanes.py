"""Energy over the run: when each source was in which state, for the drawing and for the words before and after.

A source that warms up, or whose stored charge goes, is marked until the wait for it was over. Only isolable sources
have a lane: the others follow from them.
"""

from __future__ import annotations

from typing import Any

from fieldkit.record import words
from fieldkit.record.frame import Frame
from fieldkit.record.lines import Lane, SourceLine, Span
from fieldkit.run.names import LIVE

Plain = dict[str, Any]

#: role of a meter, up to its first underscore -> the source that it watches
METERS = {
    "beam": "beam_supply",
    "body": "beam_supply",
    "grid": "bias",
    "bias": "bias",
    "heater": "heater",
    "focus": "magnets",
    "trim": "magnets",
    "ion": "ion_pump",
    "coolant": "coolant",
    "air": "air",
    "drive": "rf_drive",
    "forward": "rf_drive",
    "reflected": "rf_drive",
}

#: sources that take their time after they are switched on; others are there at once, and only settle
WARMS = ("heater",)


def lanes(frame: Frame) -> tuple[Lane, ...]:
    waited = _waited(frame)
    found = []
    for source in frame.sheet.sources:
        if not source.isolable:
            continue
        spans = _spans(frame, source.name)
        for at, seq in waited.get(source.name, ()):
            spans = _mark(source.name, spans, at, seq)
        short = words.first_up(source.title)
        found.append(Lane(source=source.name, title=source.title, short=short, spans=tuple(spans)))
    return tuple(found)


def _spans(frame: Frame, source: str) -> list[Span]:
    spans: list[Span] = []
    for event, state in zip(frame.events, frame.states, strict=True):
        now = state["sources"].get(source)
        if now is None or (spans and spans[-1].state == now["state"]):
            continue
        if event["kind"] == "run-started":
            continue
        second = frame.second(event) if spans else frame.second(frame.events[0])
        spans.append(Span(second=second, state=now["state"], seq=event["seq"]))
    return spans or [Span(second=frame.second(frame.events[0]), state="unknown", seq=0)]


def _waited(frame: Frame) -> dict[str, list[tuple[int, int]]]:
    """source -> (when a wait for it was over, seq); only where something warms or discharges meanwhile."""
    found: dict[str, list[tuple[int, int]]] = {}
    for event in frame.of("waited"):
        step = frame.step(event)
        if step is None or step["control"]["control"] != "wait":
            continue
        clock, depends = step["control"]["clock"], step["control"]["depends"]
        source = clock.removeprefix("age:") if clock.startswith("age:") else depends
        if source == "stored_charge":
            source = "beam_supply"
        if source:
            found.setdefault(source, []).append((frame.second(event), event["seq"]))
    return found


def _mark(source: str, spans: list[Span], at: int, seq: int) -> list[Span]:
    """Split the span that a wait lay in: before its end the source was warming, or its charge going."""
    out: list[Span] = []
    for k, span in enumerate(spans):
        ends = spans[k + 1].seq if k + 1 < len(spans) else seq + 1
        if not span.seq < seq < ends or span.warming or span.decay or span.second >= at:
            out.append(span)
            continue
        live = span.state in LIVE
        if live and source not in WARMS:
            out.append(span)
            continue
        out.append(span.model_copy(update={"warming": live, "decay": span.state == "off"}))
        out.append(span.model_copy(update={"second": at, "seq": seq}))
    return out


def lane_of(frame: Frame, step: str, seq: int, title: str = "") -> int:
    """Which lane a thing belongs to: that of the title, else by its meter, the sources it names, what changed last."""
    order = [s.name for s in frame.sheet.sources if s.isolable]
    titled = [s.name for s in frame.sheet.sources if title and s.title == title]
    for name in (*titled, *_named(frame.index.steps.get(step)), *_changed(frame, seq)):
        if name in order:
            return order.index(name)
    return 0


def _named(step: Plain | None) -> list[str]:
    if step is None:
        return []
    control = step["control"]
    meter = control.get("meter") or control.get("tester") or {}
    found = [METERS.get((meter.get("role") or "").partition("_")[0], "")]
    found += [*(control.get("sources") or ()), control.get("source") or "", control.get("depends") or ""]
    clock = control.get("clock") or ""
    return [*found, clock.removeprefix("age:")]


def _changed(frame: Frame, seq: int) -> list[str]:
    """Sources by when they last changed before an event, latest first."""
    state = next((s for e, s in zip(frame.events, frame.states, strict=True) if e["seq"] == seq), frame.final)
    return sorted(state["sources"], key=lambda name: -int(state["sources"][name]["seq"]))


def before(frame: Frame) -> tuple[SourceLine, ...]:
    """The states as declared at the start."""
    for event, state in zip(frame.events, frame.states, strict=True):
        if event["kind"] == "states-declared":
            return _lines(frame, state["sources"])
    return ()


def after(frame: Frame) -> tuple[SourceLine, ...]:
    """The states at the end as the run has them; where it has not ended, now."""
    return _lines(frame, frame.final["sources"])


def _lines(frame: Frame, sources: Plain) -> tuple[SourceLine, ...]:
    return tuple(
        SourceLine(
            source=s.name,
            title=s.title,
            state=sources[s.name]["state"],
            says=words.STATES[sources[s.name]["state"]],
        )
        for s in frame.sheet.sources
        if s.isolable and s.name in sources
    )


def says(lines: tuple[SourceLine, ...]) -> str:
    """Sources that are alike said together: heater and coolant on; beam supply off."""
    groups: dict[str, list[str]] = {}
    for line in lines:
        groups.setdefault(line.says, []).append(line.title)
    return "; ".join(f"{words.listed(titles)} {state}" for state, titles in groups.items())
