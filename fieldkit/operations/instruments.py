"""The register of instruments: what an entry must be, when it is due, and its lines on the registers' page.

Not here: loading and storing (registers.py), what a range is worth (fieldkit.run.worth).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from fieldkit import units, values
from fieldkit.record import meters
from fieldkit.run import clock
from fieldkit.run.events import Instrument
from fieldkit.values import Dec

Plain = dict[str, Any]


def due(instrument: Instrument) -> Instrument:
    """The instrument with the day to whose end its calibration is valid, where that can be told."""
    if instrument.calibrated_to is not None:
        return instrument
    date = clock.months_later(instrument.calibrated_on, instrument.interval_months)
    return instrument.model_copy(update={"calibrated_to": date})


def wrong_with(name: str, instrument: Instrument) -> str:
    """The first thing that is wrong with an entry of the register; "" where nothing is."""
    if instrument.id != name:
        return f"its id says {instrument.id!r}"
    if not instrument.ranges:
        return "it has no range"
    names = [found.name for found in instrument.ranges]
    if len(names) > 1 and ("" in names or len(set(names)) < len(names)):
        return "every one of its ranges needs a name of its own"
    found = (_range(one.model_dump()) for one in instrument.ranges)
    return next((wrong for wrong in found if wrong), "") or _dates(instrument) or _temperature(instrument)


def _range(found: Plain) -> str:
    which = f"range {found['name']}: " if found["name"] else ""
    if found["unit"] and units.unit(found["unit"]) is None:
        return f"{which}{found['unit']!r} is no unit that is known here"
    numbers: dict[str, Dec] = {}
    for key in ("low", "high", "resolution", "percent", "digits", "percent_of_range"):
        text = found[key]
        if text is None:
            continue
        if not isinstance(values.number(text), float):
            return f"{which}{key} is {text!r}, which is no plain number"
        numbers[key] = values.dec(text)
        if key not in ("low", "high") and numbers[key].digits < 0:
            return f"{which}{key} is below zero"
    if numbers["resolution"].digits == 0:
        return f"{which}its resolution is zero"
    if "low" in numbers and "high" in numbers and values.compare(numbers["low"], numbers["high"]) >= 0:
        return f"{which}it ends where it begins, or before"
    if numbers["percent_of_range"].digits and "low" not in numbers and "high" not in numbers:
        return f"{which}its accuracy is a part of a range that has no end"
    return ""


def _dates(instrument: Instrument) -> str:
    months = instrument.interval_months
    for date in (instrument.calibrated_on, instrument.calibrated_to):
        if date is not None and clock.months_later(date, 0) is None:
            return f"{date!r} is no date; write it as 2026-11-30"
    if months is not None and months < 1:
        return "its interval is less than a month"
    worked_out = clock.months_later(instrument.calibrated_on, months)
    if worked_out and instrument.calibrated_to not in (None, worked_out):
        return f"it is said to be calibrated to {instrument.calibrated_to}, and its interval ends on {worked_out}"
    return ""


def _temperature(instrument: Instrument) -> str:
    span = instrument.temperature
    if span is None:
        return ""
    if not all(isinstance(values.number(text), float) for text in (span.low, span.high)):
        return "its temperatures are no plain numbers"
    return (
        "its temperatures are the wrong way round"
        if values.compare(*map(values.dec, (span.low, span.high))) > 0
        else ""
    )


@dataclass(frozen=True)
class RangeLine:
    name: str
    span: str
    resolution: str
    accuracy: str


@dataclass(frozen=True)
class Line:
    """An instrument as the desk shows it; `state` is "overdue", "due today" or nothing."""

    id: str
    reads: str
    certificate: str
    calibrated_to: str
    holds: str
    state: str
    ranges: tuple[RangeLine, ...]


def lines(register: dict[str, Instrument], today: str) -> list[Line]:
    """The register for the page, by id; `today` is a date."""
    return [_line(due(one), today) for _, one in sorted(register.items())]


def _line(one: Instrument, today: str) -> Line:
    plain = one.model_dump(mode="json")
    until = one.calibrated_to or ""
    state = "overdue" if until and today > until else "due today" if today == until else ""
    ranges = tuple(
        RangeLine(
            meters.name(r, unit), meters.span(r, unit), f"{r['resolution']} {unit}".strip(), meters.accuracy(r, unit)
        )
        for r in plain["ranges"]
        for unit in (units.shown(r["unit"]),)
    )
    return Line(one.id, one.reads, one.certificate, until, meters.holds(plain), state, ranges)
