"""Drawings: energy rails, limit scales and marks as SVG text, pure functions of plain data.

    scale     one reading on its limits, with figures        tiny      the same without figures, for table rows
    wait      elapsed time against a least time              rails     the lanes of one row of the run strip
    timeline  energy over a run, with numbered balloons      mark      a verdict's small scale
    symbol    lock, proved, earth, make safe, alert ...      says      the sentence of each drawing

Every function takes one dict (numbers are decimal strings in the unit shown) and gives one string. A model's
`ink` is "screen" (colours by class, static/css/drawing.css) or "print" (colours as attributes, readable in black).
Twin: static/core/drawing.js, equal character for character, held by tests/vectors/drawing/. All arithmetic is in
integers (tenths of a pixel), so both languages print alike. Not here: data, time, HTML around a drawing.
To add a drawing: a module here and its twin, a line in DRAWINGS of both, a vector file.
"""

from __future__ import annotations

from fieldkit.drawing import says
from fieldkit.drawing.marks import mark, symbol
from fieldkit.drawing.rails import rails
from fieldkit.drawing.scale import scale
from fieldkit.drawing.timeline import timeline
from fieldkit.drawing.tiny import tiny
from fieldkit.drawing.wait import wait

#: what a vector file may name
DRAWINGS = {
    "scale": scale,
    "tiny": tiny,
    "wait": wait,
    "rails": rails,
    "timeline": timeline,
    "mark": mark,
    "symbol": symbol,
}

__all__ = ["DRAWINGS", "mark", "rails", "says", "scale", "symbol", "timeline", "tiny", "wait"]
