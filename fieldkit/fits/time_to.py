"""When a falling current reaches a limit, by both laws of falling: both shown, and the one that the readings follow.

The law with the smaller residuals is chosen where it is clearly better: n ln(s1**2 / s2**2) of 4 and more (a difference
of 4 in Akaike's criterion; both laws have two coefficients. K. P. Burnham, D. R. Anderson 2002, from memory). Where it
is not, the later of the two times is given, for too long a wait does no harm; and if either law refuses, both do.
Twin: static/core/fits/time_to.js.
"""

from __future__ import annotations

from typing import Any

from fieldkit.fits import columns, words
from fieldkit.fits.answer import Answer, answer
from fieldkit.fits.columns import Refused
from fieldkit.fits.exponential_time_to import exponential_time_to
from fieldkit.fits.logs import ln
from fieldkit.fits.power_time_to import power_time_to

#: how much better a law must be
CLEARLY = 4.0
#: scatter of ln I that is rounding
ROUNDING = 1e-13


def time_to(times: Any, currents: Any, limit: Any, u: Any = None, show: words.Show = words.plain) -> Answer:
    """`exponential` and `power` are the two fits whole; `chosen` names one; `value` and `u` are its.

    `clear` tells whether the residuals decide; `better` is n ln of the ratio of the residual variances.
    Refuses: what the chosen fit refuses; what either refuses of the input; cannot-tell.
    """
    show = words.guarded(show)
    both = {
        "exponential": exponential_time_to(times, currents, limit, u, show),
        "power": power_time_to(times, currents, limit, u, show),
    }
    numbers: Answer = {"n": columns.count(currents), "value": None, "u": None, "chosen": None, "clear": None}
    numbers |= {"better": None} | both
    for one in both.values():
        if one["s"] is None:
            return answer("time-to", numbers, _again(one), str)
    better = _better(both["exponential"]["s"], both["power"]["s"], numbers["n"])
    closer, other = ("power", "exponential") if better < 0.0 else ("exponential", "power")
    better = -better if better < 0.0 else better
    clear = better >= CLEARLY
    numbers |= {"clear": clear, "better": better}
    if clear:
        chosen, refused = closer, _again(both[closer])
    else:
        chosen, refused = _later(both, closer, other)
    numbers |= {"chosen": chosen, "value": both[chosen]["value"], "u": both[chosen]["u"]}
    return answer("time-to", numbers, refused, lambda: _says(both, chosen, clear, show))


def _again(one: Answer) -> Refused | None:
    """The refusal that a fit already gave."""
    return None if one["refused"] is None else Refused(**one["refused"])


def _better(exponential: float, power: float, n: int) -> float:
    """How much better the exponential is: n ln(power's variance / its variance); below zero where the power is."""
    one = exponential if exponential > ROUNDING else ROUNDING
    other = power if power > ROUNDING else ROUNDING
    return 2.0 * n * ln(other / one)


def _later(both: dict[str, Answer], closer: str, other: str) -> tuple[str, Refused | None]:
    """Of two laws that fit alike the one that takes longer."""
    first, second = _again(both[closer]), _again(both[other])
    if first is not None and second is not None and first.code == second.code:
        return closer, first
    for refused in (first, second):
        if refused is not None:
            return closer, Refused(
                "cannot-tell",
                "Both laws of falling fit these readings alike, and one of them gives no time to trust. Read on. "
                f"It says: {refused.says}",
            )
    return (other if both[other]["value"] > both[closer]["value"] else closer), None


def _says(both: dict[str, Answer], chosen: str, clear: bool, show: words.Show) -> str:
    other = both["power" if chosen == "exponential" else "exponential"]
    law = "a power of time" if chosen == "exponential" else "an exponential"
    beside = "gives none" if other["value"] is None else f"would give {show('x', other['value'], None)}"
    why = (
        "fits these readings clearly worse"
        if clear
        else "fits them about as well; the later time is given, to be on the safe side"
    )
    return f"{both[chosen]['says']} The other law, {law}, {beside}; it {why}."
