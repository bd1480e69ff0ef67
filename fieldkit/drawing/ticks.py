"""Tick marks of an axis: steps of 1, 2 or 5, in whole numbers. Twin: static/core/drawing/ticks.js."""

from __future__ import annotations

from typing import NamedTuple


class Ticks(NamedTuple):
    """`major` and `minor` steps times 10**places; `keep` is the decimals that the major step needs."""

    major: int
    minor: int
    keep: int


def ticks(a: int, b: int, places: int, most: int) -> Ticks:
    """The finest steps that put at most `most` major ticks on the axis from a to b."""
    power = 0
    while True:
        for step, divide in ((1, 5), (2, 4), (5, 5)):
            major = step * 10**power
            if (b - a) // major < most and major >= divide:
                return Ticks(major, major // divide, max(0, places - power))
        power += 1
