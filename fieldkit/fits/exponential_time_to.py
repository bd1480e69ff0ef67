"""When a falling current reaches a limit, if it falls by the same part in equal times: I = A exp(b t).

The line of ln I against t, solved for the limit; the uncertainty by the gradient on the covariance. It says nothing
about the model: currents that fall as 1/t from 80 at 5 to 60 reach 1 at 400, and this fit promises 101. So use time_to,
which fits the power law beside it.

Checked against scipy.stats.linregress and the uncertainties package. Twin: static/core/fits/exponential_time_to.js.
"""

from __future__ import annotations

from typing import Any

from fieldkit.fits import words
from fieldkit.fits.answer import Answer
from fieldkit.fits.reach import FALLS, reach


def exponential_time_to(times: Any, currents: Any, limit: Any, u: Any = None, show: words.Show = words.plain) -> Answer:
    """When `currents` reach `limit`, on the clock of `times`; fields and refusals as reach.reach says."""
    return reach(FALLS["exponential"], times, currents, limit, u, show)
