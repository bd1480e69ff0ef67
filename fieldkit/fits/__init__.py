"""Fits and advice: what columns of readings say, how sure it is, and why nothing is said where it is not sure enough.

    line                   a straight line                              parabola_vertex   where a sweep has its minimum
    exponential_time_to    when a falling current reaches a limit,      power_time_to     the same by I = A t**b
                           by I = A exp(b t)                            time_to           both, and which to trust
    knee_crossing          the setting at a stated fall from a plateau  bursts            jumps above a slow trend
    bounded_secant         the next setting toward a target             curve             a formula's parameters

Every function takes columns of numbers in SI and gives one plain dict: the keys are listed in DEVELOPERS.md, "Fits".
`refused` is null or {"code", "says", "at"}; a refused fit still gives what could be computed, so that a plot can draw
it. Total: never an exception, never NaN or infinity, whatever is put in.

Arithmetic is + - * / and sqrt of IEEE doubles, sums from left to right, exp and log of formula.elementary, so the twin,
static/core/fits.js, gives the same bits and the same sentences; tests/vectors/fits/ and a seeded differential test hold
it. Not here: units (a sentence's numbers come through `show`, which the caller may give), drawing, the knob: a person
turns it.

To add a fit: a module here and its twin, a line in FITS of both, a vector file, an outside check in tests/fits.
"""

from __future__ import annotations

from fieldkit.fits.bounded_secant import bounded_secant
from fieldkit.fits.bursts import bursts
from fieldkit.fits.curve import curve
from fieldkit.fits.exponential_time_to import exponential_time_to
from fieldkit.fits.knee_crossing import knee_crossing
from fieldkit.fits.line import line
from fieldkit.fits.parabola_vertex import parabola_vertex
from fieldkit.fits.power_time_to import power_time_to
from fieldkit.fits.time_to import time_to

#: what a vector file may name
FITS = {
    "line": line,
    "parabola_vertex": parabola_vertex,
    "exponential_time_to": exponential_time_to,
    "power_time_to": power_time_to,
    "time_to": time_to,
    "knee_crossing": knee_crossing,
    "bursts": bursts,
    "bounded_secant": bounded_secant,
    "curve": curve,
}

__all__ = [
    "FITS",
    "bounded_secant",
    "bursts",
    "curve",
    "exponential_time_to",
    "knee_crossing",
    "line",
    "parabola_vertex",
    "power_time_to",
    "time_to",
]
