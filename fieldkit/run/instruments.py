"""An instrument as the register, the kit and a run's first event have it: its ranges, their accuracy, its calibration.

Twin: INSTRUMENT in static/core/events.js. Not here: which range is used, when it is due (fieldkit.run.readings).
"""

from __future__ import annotations

from typing import Any

from pydantic import BaseModel, ConfigDict


class Piece(BaseModel):
    model_config = ConfigDict(extra="forbid", frozen=True)


class Range(Piece):
    """One range of an instrument. Half-width of its error: percent of reading + digits of the resolution + percent of
    full scale, which is the larger of |low| and |high|. All numbers but `percent` and `digits` are in `unit`."""

    name: str
    unit: str
    low: str | None = None
    high: str | None = None
    resolution: str
    percent: str = "0"
    digits: str = "0"
    percent_of_range: str = "0"


class Temperature(Piece):
    """Where the stated accuracy holds, in degC."""

    low: str
    high: str


class Instrument(Piece):
    """What an instrument was at the time. Dates are YYYY-MM-DD; a calibration is valid to the end of its last day.

    `calibrated_to` is `calibrated_on` and the interval, where both are known (fieldkit.run.readings works it out).
    One that was written with a unit, resolution and accuracy of its own is read by `with_ranges`.
    """

    id: str
    reads: str
    certificate: str = ""
    calibrated_on: str | None = None
    interval_months: int | None = None
    calibrated_to: str | None = None
    temperature: Temperature | None = None
    ranges: tuple[Range, ...]


#: what an instrument had itself before it had ranges, and what its one unnamed range has of it now
_FLAT = ("unit", "low", "high", "resolution", "percent", "digits")


def with_ranges(instrument: Any) -> Any:
    """An instrument's plain data, read with a single unnamed range where it was written before there were any."""
    if not isinstance(instrument, dict) or "ranges" in instrument or "unit" not in instrument:
        return instrument
    rest = {key: value for key, value in instrument.items() if key not in _FLAT}
    return {**rest, "ranges": [{"name": "", **{key: instrument[key] for key in _FLAT if key in instrument}}]}
