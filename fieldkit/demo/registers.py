"""The invented station's registers, with their dates moved to the day on which the demonstration is made.

`station.json` is written for 31 July 2026. Calibrations would run out while it lies in a drawer, so every date in
it moves by the same number of days; RM-1 stays overdue, on purpose.
"""

from __future__ import annotations

import datetime as dt
import json
from importlib import resources
from typing import Any

from fieldkit.run import clock

WRITTEN_FOR = dt.date(2026, 7, 31)


def seed(today: dt.date) -> dict[str, Any]:
    """Everything in `station.json`, with its dates as they would be on `today`."""
    data: dict[str, Any] = json.loads(resources.files("fieldkit.demo").joinpath("station.json").read_text("utf-8"))
    moved = today - WRITTEN_FOR
    for instrument in data["instruments"].values():
        on = (dt.date.fromisoformat(instrument["calibrated_on"]) + moved).isoformat()
        due = clock.months_later(on, instrument["interval_months"])
        instrument.update(calibrated_on=on, calibrated_to=due)
    return data
