"""The judgement of a reading: rounded limits, the meter's uncertainty, the verdict and its sentence.

    bounds(...)   limits of a step as they are shown and applied: trees -> SI -> unit -> 12 digits -> inward
    judge(...)    a reading as typed against them: verdict, outcome, margin, U, and the sentence under the scale

Readings are compared as typed, in decimal. U is that of the meter's range (fieldkit.run.worth). Guarded limits are
pulled in by the U that the meter has at the limit itself, so that what is shown is what is applied; a result's by its
own U. The four verdicts are those of ILAC-G8. Neither the caution band nor an overdue calibration ever changes a
verdict. "Meter" is the flat view of the range in use (fieldkit.run.readings); for a result {"unit", "u"}. What a range
ends at is asked only of ranges with a name: older registers have one without. Twin: static/core/judge.js.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from fieldkit import values
from fieldkit.errors import Refusal
from fieldkit.run import clock, worth
from fieldkit.values import Dec, Fault

Value = Callable[[dict[str, Any]], object]

#: the verdicts, from best to worst
VERDICTS = ("pass", "conditional pass", "not judged", "conditional fail", "fail")
#: why a reading is not judged that stands at the end of its range, short of a limit
AT_ITS_END = "the meter stands at the end of this range, and the limit lies beyond it"


def bounds(
    limits: dict[str, Any] | None,
    typical: dict[str, Any] | None,
    unit: dict[str, Any],
    resolution: str | None,
    instrument: dict[str, Any] | None,
    value: Value,
) -> dict[str, Any] | None:
    """The limits in the unit, as decimal texts; None where nothing bounds the reading.

    `value` gives a tree's SI number or a Fault. `fault` says why a limit has no value; `coarse` why this meter
    cannot decide; `reach` why nothing that it can show on this range keeps the limits.
    """
    if limits is None and typical is None:
        return None
    given = limits or {}
    out: dict[str, Any] = {
        "low": None,
        "high": None,
        "caution_low": None,
        "caution_high": None,
        "accept_low": None,
        "accept_high": None,
        "guard_low": None,
        "guard_high": None,
        "typical_low": None,
        "typical_high": None,
        "typical_note": (typical or {}).get("note", ""),
        "low_name": given.get("low_name", ""),
        "high_name": given.get("high_name", ""),
        "resolution": resolution,
        "guarded": given.get("guarded", False),
        "fault": "",
        "coarse": "",
        "reach": "",
    }
    for key in ("low", "high", "caution_low", "caution_high"):
        text, fault = _shown(given.get(key), unit, value)
        if text is not None:
            out[key] = values.inward(text, resolution, "low" if key.endswith("low") else "high")
        if fault and key in ("low", "high"):
            out["fault"] = f"the {_NAMES[key]} limit has no value ({fault})"
        if text is not None and key in ("low", "high") and _lost(text, out[key], key):
            out["coarse"] = f"{_whose(instrument)} steps of {resolution} {unit['symbol']} are too coarse for this limit"
    if typical is not None:
        out["typical_low"] = _shown(typical.get("low"), unit, value)[0]
        out["typical_high"] = _shown(typical.get("high"), unit, value)[0]
    if out["low"] is not None and out["high"] is not None and _less(out["high"], out["low"]):
        out["coarse"] = "no reading of this meter lies between the limits"
    out["reach"] = _beyond_range(out, unit, instrument)
    if out["guarded"] and not out["fault"] and not out["coarse"]:
        _guard(out, unit, instrument)
    return out


def _whose(meter: dict[str, Any] | None) -> str:
    return "its" if meter is not None and "u" in meter else "the meter's"


def _beyond_range(out: dict[str, Any], unit: dict[str, Any], meter: dict[str, Any] | None) -> str:
    """Why no reading on this range can keep the limits; empty where one can."""
    if meter is None or not meter.get("range") or meter["unit"] != unit["symbol"]:
        return ""
    low, high, tail = out["low"], out["high"], f" {unit['symbol']}".rstrip()
    if low is not None and meter["high"] is not None and _less(meter["high"], low):
        return f"this range ends at {meter['high']}{tail}, below the limit of {low}{tail}"
    if high is not None and meter["low"] is not None and _less(high, meter["low"]):
        return f"this range begins at {meter['low']}{tail}, above the limit of {high}{tail}"
    return ""


_NAMES = {"low": "lower", "high": "upper"}


def _shown(tree: dict[str, Any] | None, unit: dict[str, Any], value: Value) -> tuple[str | None, str]:
    """A tree's value in the unit, and the fault's sentence where it has none."""
    if tree is None:
        return None, ""
    si = value(tree)
    if isinstance(si, Fault):
        return None, si.says
    if isinstance(si, bool) or not isinstance(si, float):
        return None, "It is no number."
    return values.to_shown(si, _Unit(unit)), ""


class _Unit:
    """A unit of the sheet's JSON, as fieldkit.values wants it."""

    def __init__(self, unit: dict[str, Any]) -> None:
        self.factor: str = unit["factor"]
        self.offset: str = unit["offset"]


def to_si(text: str, unit: dict[str, Any]) -> float:
    """A plain decimal text in the unit as SI."""
    return values.to_si(text, _Unit(unit))


def to_shown(si: float, unit: dict[str, Any]) -> str:
    """An SI value in the unit, 12 digits."""
    return values.to_shown(si, _Unit(unit))


def _less(a: str, b: str) -> bool:
    return values.compare(values.dec(a), values.dec(b)) < 0


def _lost(text: str, rounded: str, side: str) -> bool:
    """Rounding took the limit to zero or through it: the meter cannot show a reading that keeps it."""
    zero = values.dec("0")
    before = values.compare(values.dec(text), zero)
    after = values.compare(values.dec(rounded), zero)
    return (before > 0 and after <= 0) if side == "high" else (before < 0 and after >= 0)


def _guard(out: dict[str, Any], unit: dict[str, Any], instrument: dict[str, Any] | None) -> None:
    """Pull the limits in by the meter's U at each of them, or by a result's own."""
    zero, whose = values.dec("0"), _whose(instrument)
    for side in ("low", "high"):
        if out[side] is None:
            continue
        u = worth.expanded(out[side], instrument, unit["symbol"])
        if u is None:
            what = "the meter's accuracy" if whose != "its" else "its uncertainty"
            out["coarse"] = f"{what} is not known, and the limits are guarded"
            return
        limit, guard = values.dec(out[side]), values.dec(u)
        pulled = values.add(limit, guard) if side == "low" else values.sub(limit, guard)
        out["guard_" + side] = u
        out["accept_" + side] = values.inward(values.to_text(pulled), out["resolution"], side)
        accept = values.dec(out["accept_" + side])
        was, now = values.compare(limit, zero), values.compare(accept, zero)
        if (was > 0 and now <= 0) if side == "high" else (was < 0 and now >= 0):
            out["coarse"] = f"{whose} uncertainty is as large as the limit"
    low, high = out["accept_low"], out["accept_high"]
    if low is not None and high is not None and _less(high, low):
        out["coarse"] = f"{whose} uncertainty is wider than the limits"


def judge(
    text: str,
    unit: str,
    limits: dict[str, Any] | None,
    resolution: str | None,
    instrument: dict[str, Any] | None,
    protects: bool,
    day: str = "",
) -> dict[str, Any]:
    """The judgement of a reading as typed; `{"refused": {...}}` where the text is no number.

    `limits` come from `bounds`, `day` is the local date of the reading. `margin` is the distance to the nearest
    limit, negative outside; `u` is U at the reading, None without a known accuracy.
    """
    typed = values.typed(text)
    if isinstance(typed, Refusal):
        return {"refused": {"code": typed.code, "says": typed.sentence}}
    plain = values.to_text(typed)
    verdict, reason = _verdict(typed, limits, instrument)
    side, margin = _margin(typed, limits)
    u = worth.expanded(plain, instrument, unit)
    bounded = limits or {}
    inside = verdict in ("pass", "conditional pass")
    out = {
        "verdict": verdict,
        "outcome": outcome(verdict, protects, bool(bounded.get("fault")) or reason == AT_ITS_END),
        "reason": reason,
        "margin": None if margin is None else values.to_text(margin),
        "nearest": side,
        "u": u,
        "near": inside and _beyond(typed, bounded.get("caution_low"), bounded.get("caution_high")),
        "untypical": _beyond(typed, bounded.get("typical_low"), bounded.get("typical_high")),
        "overdue": overdue(instrument, day),
        "words": "",
    }
    out["words"] = _words(plain, unit, out, bounded, resolution, instrument)
    return out


def outcome(verdict: str, protects: bool, fault: bool = False) -> str:
    """What the move graph sees of a verdict: pass, or fail."""
    if verdict == "pass":
        return "pass"
    if verdict in ("conditional pass", "not judged") and not protects and not fault:
        return "pass"
    return "fail"


def overdue(instrument: dict[str, Any] | None, day: str) -> bool:
    """The calibration had run out; it is valid until the end of its last day."""
    due = None if instrument is None else instrument["calibrated_to"]
    return bool(due) and clock.day(day) > str(due)


def _verdict(x: Dec, limits: dict[str, Any] | None, meter: dict[str, Any] | None) -> tuple[str, str]:
    if limits is None or (limits["low"] is None and limits["high"] is None and not limits["fault"]):
        return "not judged", "no limit is set"
    if limits["fault"]:
        return "not judged", limits["fault"]
    if limits["coarse"]:
        return "not judged", limits["coarse"]
    if _at_its_end(x, limits, meter):
        return "not judged", AT_ITS_END
    for side, sign in (("low", 1), ("high", -1)):
        if limits[side] is None:
            continue
        limit = values.dec(limits[side])
        if values.compare(x, limit) * sign < 0:
            guard = limits["guard_" + side]
            over = values.magnitude(values.sub(x, limit))
            close = guard is not None and values.compare(over, values.dec(guard)) <= 0
            return ("conditional fail" if close else "fail"), ""
    if limits["guarded"] and _beyond(x, limits["accept_low"], limits["accept_high"]):
        return "conditional pass", ""
    return "pass", ""


def _at_its_end(x: Dec, limits: dict[str, Any], meter: dict[str, Any] | None) -> bool:
    """The range ends before a limit, and the meter stands there: what it would show beyond, nobody knows."""
    if meter is None or not meter.get("range"):
        return False
    for side, sign in (("low", -1), ("high", 1)):
        if limits[side] is None or meter[side] is None:
            continue
        end = values.dec(meter[side])
        short = values.compare(values.dec(limits[side]), end) * sign > 0
        if short and end.digits and values.compare(x, end) * sign >= 0:
            return True
    return False


def _beyond(x: Dec, low: str | None, high: str | None) -> bool:
    if low is not None and values.compare(x, values.dec(low)) < 0:
        return True
    return high is not None and values.compare(x, values.dec(high)) > 0


def _margin(x: Dec, limits: dict[str, Any] | None) -> tuple[str | None, Dec | None]:
    """The nearest limit and the distance to it, negative outside."""
    side, least = None, None
    for name in ("low", "high"):
        limit = None if limits is None else limits[name]
        if limit is None:
            continue
        far = values.sub(x, values.dec(limit)) if name == "low" else values.sub(values.dec(limit), x)
        if least is None or values.compare(far, least) < 0:
            side, least = name, far
    return side, least


def _words(
    plain: str,
    unit: str,
    out: dict[str, Any],
    limits: dict[str, Any],
    resolution: str | None,
    instrument: dict[str, Any] | None,
) -> str:
    """The sentence under the scale."""
    tail = f" {unit}" if unit else ""
    head = f"{plain}{tail}: "
    own = instrument is not None and "u" in instrument
    u = _own(out["u"], resolution, tail) if own else _meter(out["u"], resolution or plain, tail)
    said = f", {'uncertainty' if own else 'meter'} {u}" if u else ""
    within = f"its uncertainty of {u}" if own else f"the meter's {u}"
    verdict, side = out["verdict"], out["nearest"]
    if verdict == "not judged":
        body = f"not judged, {out['reason']}{said}"
    else:
        limit = limits[side]
        size = values.to_text(values.magnitude(values.dec(out["margin"])))
        where = "above" if side == "high" else "below"
        if verdict == "pass":
            body = f"{_inside(limits, tail)}, margin {size}{tail}{said}"
        elif verdict == "conditional pass":
            body = f"{_inside(limits, tail)}, but within {within} of {limit}{tail}"
        elif verdict == "conditional fail":
            body = f"{where} {limit}{tail} by {size}{tail}, within {within}"
        else:
            body = f"{where} {limit}{tail} by {size}{tail}{said}"
    return head + body.removesuffix(".") + "." + _remarks(out, limits, tail, instrument)


def _inside(limits: dict[str, Any], tail: str) -> str:
    low, high = limits["low"], limits["high"]
    if low is None:
        return f"at most {high}{tail} is allowed"
    if high is None:
        return f"at least {low}{tail} is needed"
    return f"exactly {low}{tail}" if low == high else f"inside {low} to {high}{tail}"


def _meter(u: str | None, like: str, tail: str) -> str:
    """±U with the decimals of the meter, never shown as zero."""
    if u is None:
        return ""
    places = values.decimals(like)
    shown = values.fixed(values.to_float(values.dec(u)), places)
    if values.dec(shown).digits == 0 and values.dec(u).digits != 0:
        shown = values.to_text(Dec(1, places))
    return f"±{shown}{tail}"


def _own(u: str | None, resolution: str | None, tail: str) -> str:
    """±U of a result, with two digits at most."""
    return "" if u is None else f"±{worth.rounded(u, resolution)}{tail}"


def _remarks(out: dict[str, Any], limits: dict[str, Any], tail: str, instrument: dict[str, Any] | None) -> str:
    said = ""
    if limits.get("reach"):
        said += f" {limits['reach'][0].upper()}{limits['reach'][1:]}."
    if out["near"]:
        said += " It lies in the caution band."
    if out["untypical"]:
        low, high = limits["typical_low"], limits["typical_high"]
        span = f"at least {low}" if high is None else f"at most {high}" if low is None else f"{low} to {high}"
        said += f" Usual is {span}{tail} ({limits['typical_note']})."
    if out["overdue"] and instrument is not None:
        said += f" The calibration of {instrument['id']} ran out on {instrument['calibrated_to']}."
    return said
