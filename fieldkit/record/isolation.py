"""Locks, earths and proofs as the record lists them: when on, when off, whose, and what was left on."""

from __future__ import annotations

from typing import Any

from fieldkit.record import words
from fieldkit.record.frame import Frame
from fieldkit.record.lines import EarthLine, LockLine, Proof

Plain = dict[str, Any]


def locks(frame: Frame) -> tuple[LockLine, ...]:
    """Locks found on the board first, then those put on, each with its removal."""
    open_: list[Plain] = []
    for lock in frame.started["locks"]:
        open_.append({"lock": lock, "on": None, "off": None})
    for event in frame.of("locked", "unlocked"):
        body, step = event["body"], frame.step(event)
        if event["kind"] == "locked":
            sources = step["control"]["sources"] if step else ()
            row = frame.row(event)
            lock = {
                **body,
                "lock": row["text"] or body["lock"],
                "sources": sources,
                "holder_name": frame.name(body["holder"]),
            }
            open_.append({"lock": {**lock, "run": frame.events[0]["run"]}, "on": event, "off": None})
            continue
        there = [one for one in open_ if one["lock"]["point"] == body["point"] and one["off"] is None]
        exact = [one for one in there if one["lock"]["lock"] == body["lock"]]
        for one in (exact or there)[:1]:
            one["off"] = event
    return tuple(_lock(frame, one) for one in open_)


def _lock(frame: Frame, one: Plain) -> LockLine:
    lock, on, off = one["lock"], one["on"], one["off"]
    return LockLine(
        point=lock["point"],
        sources=tuple(frame.title(s) for s in lock["sources"]),
        lock=lock["lock"],
        tag=lock["tag"],
        holder_name=lock["holder_name"] or frame.name(lock["holder"]),
        on_seq=on["seq"] if on else None,
        on_time=frame.time(on) if on else words.day(lock["since"]) + " " + words.minute(lock["since"]),
        from_run="" if on else lock["run"],
        off_seq=off["seq"] if off else None,
        off_time=frame.time(off) if off else "",
        off_by=frame.name(off["body"]["who"]) if off else "",
        checks=tuple(f"{c['name']}: {c['how']}" for c in off["body"]["checks"]) if off else (),
        second=frame.name(off["body"]["second"]) if off else "",
        left_on=off is None,
    )


def earths(frame: Frame) -> tuple[EarthLine, ...]:
    open_: list[Plain] = [{"earth": e, "on": None, "off": None} for e in frame.started["earths"]]
    for event in frame.of("earthed", "lifted"):
        body, step = event["body"], frame.step(event)
        if event["kind"] == "earthed":
            source = step["control"]["source"] if step else ""
            open_.append({"earth": {**body, "source": source, "run": ""}, "on": event, "off": None})
            continue
        there = [one for one in open_ if one["earth"]["stick"] == body["stick"] and one["off"] is None]
        for one in there[:1]:
            one["off"] = event
    return tuple(_earth(frame, one) for one in open_)


def _earth(frame: Frame, one: Plain) -> EarthLine:
    earth, on, off = one["earth"], one["on"], one["off"]
    return EarthLine(
        stick=earth["stick"],
        point=earth["point"],
        source=frame.title(earth["source"]),
        on_seq=on["seq"] if on else None,
        on_time=frame.time(on) if on else words.day(earth["since"]) + " " + words.minute(earth["since"]),
        from_run="" if on else earth["run"],
        off_seq=off["seq"] if off else None,
        off_time=frame.time(off) if off else "",
        left_on=off is None,
    )


def proofs(frame: Frame) -> tuple[Proof, ...]:
    found = []
    for event in frame.of("proved"):
        row, step = frame.row(event), frame.step(event)
        if not row["points"] or step is None:
            continue
        unit = frame.unit(row["unit"])
        values = tuple(
            f"{_part(p)} {words.minus(p['text'])} {unit}, {p['verdict']}".replace("  ", " ") for p in row["points"]
        )
        found.append(
            Proof(
                seq=event["seq"],
                at=event["at"]["wall"],
                time=frame.time(event),
                by_name=frame.name(event["by"]),
                number=row["number"],
                title=row["title"],
                instrument=event["body"]["instrument"],
                range=frame.range(row["range"]),
                known_source=step["control"]["known_source"],
                verdict=row["verdict"] or "not judged",
                values=values,
            )
        )
    return tuple(found)


def _part(point: Plain) -> str:
    return {"before": "tester before:", "after": "tester after:"}.get(point["field"], f"{point['title']}:")
