"""Every value that was judged, as the record shows it: readings, values of a proof, results; deviations and retakes.

The judgement is the fold's (fieldkit.run.judge); here it is laid beside its limits, nameplate value and earlier values.
"""

from __future__ import annotations

from decimal import ROUND_HALF_UP, Decimal, InvalidOperation
from typing import Any

from fieldkit import values
from fieldkit.record import words
from fieldkit.record.frame import Frame, titled
from fieldkit.record.lines import Deviation, FormulaLine, Limits, OldValue, Pointer, Reading, Retake
from fieldkit.run import judge, names

Plain = dict[str, Any]
_LIMIT_KEYS = (
    "low", "high", "low_name", "high_name", "caution_low", "caution_high", "accept_low", "accept_high", "guarded",
)  # fmt: skip


def readings(frame: Frame) -> tuple[Reading, ...]:
    """All judged values in the order taken; a proof gives one for each of its values."""
    found: list[Reading] = []
    numbered = {d.seq: d.n for d in deviations(frame)}
    for event in frame.of("read", "proved", "worked-out"):
        row = frame.row(event)
        if not row["step"]:
            continue
        if event["kind"] == "proved":
            found += _proof(frame, event, row)
        else:
            found.append(_reading(frame, event, row, found, numbered.get(event["seq"])))
    return tuple(found)


def by_margin(all_readings: tuple[Reading, ...]) -> list[Reading]:
    """Failures first, then least margin in units of U, then those without U by margin, not judged last."""

    def key(r: Reading) -> tuple[int, Decimal, int]:
        rank = 0 if r.verdict in ("fail", "conditional fail") else 3 if r.margin is None else 1 if r.margin_u else 2
        return rank, Decimal(r.margin_u or r.margin or "0"), r.seq

    return sorted(all_readings, key=key)


def _common(frame: Frame, event: Plain, row: Plain) -> Plain:
    control = frame.index.steps[row["step"]]["control"]
    return {
        "seq": event["seq"],
        "at": event["at"]["wall"],
        "time": frame.time(event),
        "by_name": frame.name(event["by"]),
        "step": row["step"],
        "number": row["number"],
        "title": row["title"],
        "level": row["level"],
        "unit": frame.unit(row["unit"]),
        "instrument": row["instrument"],
        "range": frame.range(row["range"]),
        "overdue": row["overdue"],
        "protects": bool(control.get("protects")) or event["kind"] == "proved",
    }


def _reading(frame: Frame, event: Plain, row: Plain, before: list[Reading], deviation: int | None) -> Reading:
    result = event["kind"] == "worked-out"
    tries = [r for r in before if r.step == row["step"] and r.level == row["level"] and r.retaken]
    unit = frame.unit(row["unit"])
    control = frame.index.steps[row["step"]]["control"]
    return Reading(
        **_common(frame, event, row),
        **_judged(row, row["unit"], unit),
        text=row["text"] or event["body"].get("value", ""),
        value=words.number(row["text"]),
        limits=_limits(row["limits"], unit),
        plate=_plate(frame, event, control),
        pointers=_pointers(frame, row, unit, tries),
        old=tuple(_old(frame, o) for o in row["old"]),
        near=row["near"],
        untypical=row["untypical"],
        deviation=deviation,
        retaken=row["manner"] == "again",
        tries_before=len(tries),
        kind="result" if result else "reading",
        formulas=tuple(control.get("formulas") or ()) if result else (),
        shown=words.minus(row["shown"]),
    )


def _proof(frame: Frame, event: Plain, row: Plain) -> list[Reading]:
    """One reading for every value of a proof: the tester before, each point, the tester after."""
    unit, found = frame.unit(row["unit"]), []
    for point in row["points"]:
        field = point["field"]
        old = tuple(_old(frame, o) for o in row["old"] if o["field"] == field)
        part = {"before": "tester before", "after": "tester after"}.get(field, point["title"])
        found.append(
            Reading(
                **_common(frame, event, row),
                **_judged(point, row["unit"], unit),
                part=part,
                text=point["text"],
                value=words.number(point["text"]),
                limits=_limits(point["limits"], unit),
                plate=None,
                old=old,
                near=False,
                untypical=False,
                kind="proof",
                retaken=row["manner"] == "again",
            )
        )
    return found


def _judged(row: Plain, symbol: str, unit: str) -> Plain:
    margin, u = row.get("margin"), row.get("u")
    return {
        "u": _short(u, row.get("limits"), row["text"]) if not row.get("shown") else row["shown"].rpartition(" ")[2],
        "margin": margin,
        "margin_u": _in_units(margin, u),
        "verdict": row["verdict"] or "not judged",
        "reason": _why(row.get("limits")) if row["verdict"] == "not judged" else "",
        "words": words.printed(row.get("words", ""), symbol, unit),
    }


def _why(limits: Plain | None) -> str:
    if limits is None or (limits["low"] is None and limits["high"] is None and not limits["fault"]):
        return "no limit is set"
    return str(limits["fault"] or limits["coarse"] or judge.AT_ITS_END)


def _in_units(margin: str | None, u: str | None) -> str | None:
    """margin / U with one decimal."""
    try:
        if margin is None or u is None or Decimal(u) == 0:
            return None
        return f"{(Decimal(margin) / Decimal(u)).quantize(Decimal('0.1'), ROUND_HALF_UP):f}"
    except InvalidOperation:
        return None


def _short(u: str | None, limits: Plain | None, text: str) -> str | None:
    """U as printed: with the decimals of the meter's steps, never as zero; anybody recomputes the full one."""
    if u is None:
        return None
    like = (limits or {}).get("resolution") or words.number(text)
    places = values.decimals(like)
    shown = values.fixed(values.to_float(values.dec(u)), places)
    return values.to_text(values.Dec(1, places)) if values.dec(shown).digits == 0 else shown


def _limits(row: Plain | None, unit: str) -> Limits | None:
    if row is None or (row["low"] is None and row["high"] is None):
        return None
    low, high = row["low"], row["high"]
    if low and high:
        said = f"exactly {low}" if low == high else f"{low} to {high}"
    else:
        said = f"at least {low}" if low else f"at most {high}"
    return Limits(**{k: row[k] for k in _LIMIT_KEYS}, says=words.minus(f"{said} {unit}".strip()))


def _plate(frame: Frame, event: Plain, control: Plain) -> str | None:
    """The nameplate value in the reading's unit, 12 digits at most."""
    tree = control.get("plate")
    if tree is None:
        return None
    found = names.value(frame.index, names.scope(frame.index, frame.before(event)), tree)
    if isinstance(found, bool) or not isinstance(found, float):
        return None
    return judge.to_shown(found, control["unit"])


def _pointers(frame: Frame, row: Plain, unit: str, tries: list[Reading]) -> tuple[Pointer, ...]:
    """What stands hollow on the scale: the tube's last run, and earlier tries."""
    found = [Pointer(name="earlier try", value=r.value) for r in tries]
    last = frame.context.last_run.get(row["step"])
    if last is not None and not row["level"] and frame.unit(last.unit) == unit:
        found.append(Pointer(name="last run", value=words.number(last.text)))
    return tuple(found)


def _old(frame: Frame, old: Plain) -> OldValue:
    by = next((e for e in frame.events if e["seq"] == old["seq"]), None)
    return OldValue(
        text=old["text"],
        seq=old["seq"],
        reason=old["reason"],
        by_name=frame.name(by["by"]) if by else "",
        time=frame.time(by) if by else "",
    )


def deviations(frame: Frame) -> tuple[Deviation, ...]:
    """Every fail that was accepted, numbered in order; `seq` is that of the reading."""
    found: list[Deviation] = []
    for event in frame.of("went-on"):
        move = frame.index.moves.get(event["body"]["move"])
        if move is None or move["manner"] != "deviation":
            continue
        row = _judged_before(frame, event)
        if row is None:
            continue
        body, unit = event["body"], frame.unit(row["unit"])
        limits = _limits(row["limits"], unit)
        found.append(
            Deviation(
                n=len(found) + 1,
                seq=row["seq"],
                at=event["at"]["wall"],
                time=frame.time(event),
                step=row["step"],
                number=row["number"],
                title=titled(row["title"], row["level"]),
                value=row["text"],
                unit=unit,
                limits=limits.says if limits else "",
                says=words.printed(row["words"], row["unit"], unit),
                reason=body["reason"],
                under=body["under"],
                authority=body["authority"] or "",
                authority_name=frame.name(body["authority"]),
            )
        )
    return tuple(found)


def _judged_before(frame: Frame, event: Plain) -> Plain | None:
    """The row of the reading that a move followed."""
    judged = [
        r for seq, r in frame.rows.items() if seq < event["seq"] and r["step"] == event["body"]["step"] and r["verdict"]
    ]
    return judged[-1] if judged else None


def retakes(frame: Frame) -> tuple[Retake, ...]:
    """Why steps were gone through again."""
    found = []
    for event in frame.of("went-on"):
        move = frame.index.moves.get(event["body"]["move"])
        row = _judged_before(frame, event)
        if move is None or move["manner"] != "again" or row is None:
            continue
        found.append(
            Retake(
                seq=event["seq"],
                time=frame.time(event),
                number=row["number"],
                title=titled(row["title"], row["level"]),
                reason=event["body"]["reason"],
                by_name=frame.name(event["by"]),
            )
        )
    return tuple(found)


def formulas(frame: Frame) -> tuple[FormulaLine, ...]:
    """The library formulas aboard the sheet, by name."""
    return tuple(
        FormulaLine(name=f.name, meaning=f.meaning, reference=f.reference)
        for _, f in sorted(frame.sheet.formulas.items())
    )
