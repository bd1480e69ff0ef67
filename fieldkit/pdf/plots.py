"""The drawings of a printed record, as pictures in its HTML: energy over the run, limit scales, marks, the QR code.

The geometry is fieldkit.drawing's, in print ink. Each picture has words for who cannot see it. Not here: what is said.
"""

from __future__ import annotations

import base64
import io
from typing import Any

import segno
from markupsafe import Markup

from fieldkit import drawing
from fieldkit.record.lines import Reading
from fieldkit.record.model import Record

#: px of the drawing; print.css gives it its size in mm, in the same proportion
#: px of the figure: width, height, and the height where much deserves attention
_FIGURE = (232, 333, 397)
_TINY = (112, 22)
#: as many things that deserve attention are set with room around them
ROOMY = 4


def image(svg: str, alt: str, kind: str = "") -> Markup:
    """`svg` as a picture with words."""
    data = base64.b64encode(svg.encode()).decode()
    return Markup('<img class="{}" alt="{}" src="data:image/svg+xml;base64,{}">').format(kind or "plot", alt, data)


def energy(record: Record) -> Markup:
    """Energy sources over the run, with the numbers of what deserves attention."""
    lanes = [
        {
            "title": lane.title,
            "short": lane.short,
            "spans": [{"at": s.second, "state": s.state, "warming": s.warming, "decay": s.decay} for s in lane.spans],
        }
        for lane in record.lanes
    ]
    balls = [{"at": a.second, "lane": a.lane, "n": a.n} for a in record.attention]
    model = {
        "from": record.from_second,
        "to": record.to_second,
        "lanes": lanes,
        "balls": balls,
        "width": _FIGURE[0],
        "height": _FIGURE[2 if len(record.attention) > ROOMY else 1],
        "ink": "print",
    }
    return image(drawing.timeline(model), drawing.says.timeline(model))


def tiny(reading: Reading) -> Markup:
    """One reading on its limits; nothing where there are no limits to draw."""
    limits = reading.limits
    if limits is None or (limits.low is None and limits.high is None):
        return Markup("")
    model: dict[str, Any] = {
        "value": reading.value,
        "u": reading.u,
        "unit": reading.unit,
        "low": limits.low,
        "high": limits.high,
        "low_name": limits.low_name,
        "high_name": limits.high_name,
        "caution_low": limits.caution_low,
        "caution_high": limits.caution_high,
        "accept_low": limits.accept_low,
        "accept_high": limits.accept_high,
        "plate": reading.plate,
        "olds": [{"name": p.name, "value": p.value} for p in reading.pointers],
        "verdict": reading.verdict,
        "why": reading.reason,
        "says": reading.words,
        "width": _TINY[0],
        "height": _TINY[1],
        "ink": "print",
    }
    return image(drawing.tiny(model), drawing.says.scale(model))


def mark(verdict: str) -> Markup:
    """The mark of a verdict, beside its word."""
    return image(drawing.mark(verdict, "print"), verdict, "w")


def qr(text: str) -> Markup:
    """A QR code with `text`, black on white."""
    out = io.BytesIO()
    code = segno.make(text, error="m", boost_error=False)
    code.save(out, kind="svg", xmldecl=False, svgclass=None, lineclass=None, omitsize=True, border=2)
    return image(out.getvalue().decode(), f"QR code: {text}")
