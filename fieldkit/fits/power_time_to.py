"""When a falling current reaches a limit, if it falls as a power of the time since pumping began: I = A t**b.

The line of ln I against ln t, solved for the limit. Outgassing falls about as 1/t (b = -1). Time counts from the start
of pumping: with another zero the law is another.

Checked against scipy.stats.linregress and the uncertainties package. Twin: static/core/fits/power_time_to.js.
"""

from __future__ import annotations

from typing import Any

from fieldkit.fits import words
from fieldkit.fits.answer import Answer
from fieldkit.fits.reach import FALLS, reach


def power_time_to(times: Any, currents: Any, limit: Any, u: Any = None, show: words.Show = words.plain) -> Answer:
    """When `currents` reach `limit`, with `times` above zero; fields and refusals as reach.reach says."""
    return reach(FALLS["power"], times, currents, limit, u, show)
