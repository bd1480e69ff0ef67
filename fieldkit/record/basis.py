"""What a run stood on and who stands for it: nameplate values, instruments, signatures, the chain of events."""

from __future__ import annotations

import base64
import json
from typing import Any

from fieldkit.record import words
from fieldkit.record.frame import Frame
from fieldkit.record.lines import Chain, Disagreement, GivenLine, InstrumentLine, Signature

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
    """Instruments that took a reading first, each with what it was at the time."""
    used = {row["instrument"] for row in frame.rows.values() if row["instrument"]}
    day = frame.first[:10]
    found = []
    for one in frame.started["instruments"]:
        unit = frame.unit(one["unit"])
        span = f"{one['low'] or ''} to {one['high'] or ''} {unit}" if one["low"] or one["high"] else ""
        percent = f"{one['percent']} % of reading" if _some(one["percent"]) else ""
        digits = f"{one['digits']} × {one['resolution']} {unit}".strip() if _some(one["digits"]) else ""
        found.append(
            InstrumentLine(
                id=one["id"],
                reads=one["reads"],
                unit=unit,
                range=words.minus(span.strip()),
                resolution=one["resolution"],
                accuracy="±(" + " + ".join(p for p in (percent, digits) if p) + ")" if percent or digits else "",
                calibrated_to=one["calibrated_to"] or "",
                certificate=one["certificate"],
                used=one["id"] in used,
                overdue=bool(one["calibrated_to"]) and day > one["calibrated_to"],
            )
        )
    return tuple(sorted(found, key=lambda i: (not i.used, i.id)))


def _some(number: str) -> bool:
    return number.strip("0.") != ""


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
