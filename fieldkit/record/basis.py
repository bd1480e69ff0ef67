"""What a run stood on and who stands for it: nameplate values, instruments, signatures, the chain of events."""

from __future__ import annotations

import base64
import json
from typing import Any

from fieldkit.record import meters, words
from fieldkit.record.frame import Frame
from fieldkit.record.lines import Chain, Disagreement, GivenLine, InstrumentLine, Signature
from fieldkit.run import readings

Plain = dict[str, Any]

#: what a signature says where its own statement cannot be read
STATEMENTS = {
    "performed": "I did this work and these are my readings.",
    "witnessed": "I was present and saw this done.",
    "released": "I released this hold point.",
    "allowed": "I allowed this deviation.",
    "unlocked": "I took off this lock.",
    "handed over": "I handed this run over.",
}
ROLES = {
    "performed": "Technician",
    "witnessed": "Second person",
    "released": "Second person",
    "allowed": "Supervisor",
    "unlocked": "Holder of the lock",
    "handed over": "Technician",
}


def signatures(frame: Frame) -> tuple[Signature, ...]:
    """Every signature in the run with what came of checking it; unchecked ones do not hold."""
    checks = {c.seq: c for c in frame.context.checks}
    found = []
    for e in frame.of("signed"):
        body, claims, check = e["body"], _claims(e["body"]["jws"]), checks.get(e["seq"])
        found.append(
            Signature(
                seq=e["seq"],
                person=body["person"],
                name=frame.name(body["person"]),
                role=ROLES.get(body["meaning"], ""),
                meaning=body["meaning"],
                statement=str(claims.get("statement") or STATEMENTS[body["meaning"]]),
                time=str(claims.get("time") or e["at"]["wall"]),
                kid=check.kid if check else "",
                covers=e["seq"] - 1,
                holds=bool(check and check.holds),
                says=check.says if check else "It was not checked.",
            )
        )
    return tuple(found)


def _claims(jws: str) -> Plain:
    """The payload of a compact JWS, read and not checked; {} where it cannot be read."""
    try:
        payload = jws.split(".")[1]
        found = json.loads(base64.urlsafe_b64decode(payload + "=" * (-len(payload) % 4)))
    except (ValueError, IndexError):
        return {}
    return found if isinstance(found, dict) else {}


def instruments(frame: Frame) -> tuple[InstrumentLine, ...]:
    """Instruments that took a reading first, each range that was used with what it was at the time."""
    used = {(row["instrument"], row["range"]) for row in frame.rows.values() if row["instrument"]}
    found: list[InstrumentLine] = []
    for one in frame.started["instruments"]:
        found += _lines(frame, one, {range_ for name, range_ in used if name == one["id"]})
    return tuple(sorted(found, key=lambda i: (not i.used, i.id)))


def _lines(frame: Frame, one: Plain, used: set[str]) -> list[InstrumentLine]:
    """One line for each range that was used; for an instrument that was not, one for all of its ranges."""
    ranges = one["ranges"]
    if len(ranges) > 1:
        ranges = [found for found in ranges if found["name"] in used]
    if not ranges:
        named = ", ".join(meters.name(found, frame.unit(found["unit"])) for found in one["ranges"])
        return [_line(frame, one, {"unit": "", "range": named, "resolution": "", "accuracy": ""}, False)]
    lines = []
    for found in ranges:
        unit = frame.unit(found["unit"])
        name, span = meters.name(found, unit), meters.span(found, unit)
        words_ = f"{name}: {span}" if name and span and len(one["ranges"]) > 1 else span or name
        said = {
            "unit": unit,
            "range": words_,
            "resolution": found["resolution"],
            "accuracy": meters.accuracy(found, unit),
        }
        lines.append(_line(frame, one, said, bool(used)))
    return lines


def _line(frame: Frame, one: Plain, said: Plain, used: bool) -> InstrumentLine:
    due = readings.flat(one, None)["calibrated_to"]
    return InstrumentLine(
        id=one["id"],
        reads=one["reads"],
        **said,
        calibrated_to=due or "",
        certificate=one["certificate"],
        used=used,
        overdue=bool(due) and frame.first[:10] > due,
        holds=meters.holds(one),
    )


def givens(frame: Frame) -> tuple[GivenLine, ...]:
    meanings = {g.name: g.meaning for g in frame.sheet.givens}
    return tuple(
        GivenLine(
            name=name,
            meaning=meanings.get(name, ""),
            value=words.minus(", ".join(given["texts"])),
            unit=frame.unit(given["unit"]),
            source=given["source"],
        )
        for name, given in frame.started["givens"].items()
    )


def chain(frame: Frame) -> Chain:
    links = zip(frame.events[1:], frame.events, strict=False)
    whole = all(e["prev"] == before["sha256"] and e["seq"] == before["seq"] + 1 for e, before in links)
    first = frame.events[0]
    whole = whole and first["seq"] == 0 and first["prev"] == frame.started["sheet"] and not frame.context.alarm
    seen: list[str] = []
    for e in frame.events:
        if e["chain"] not in seen:
            seen.append(e["chain"])
    return Chain(
        chains=tuple(seen),
        count=len(frame.events),
        head=frame.events[-1]["sha256"],
        whole=whole,
        disagree=tuple(Disagreement(**d) for d in frame.final["disagree"]),
    )
