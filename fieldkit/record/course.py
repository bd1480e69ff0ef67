"""How the run went besides its readings: waits, hold points, people, cautions, remarks, trips, gaps, pictures, the log.

Every event of the run is one line of `log`; what a list here tells more fully is told there too.
"""

from __future__ import annotations

from typing import Any

from fieldkit.record import words
from fieldkit.record.frame import Frame, titled
from fieldkit.record.lines import Correction, Hold, LogLine, Note, Picture, Wait

Plain = dict[str, Any]


def waits(frame: Frame) -> tuple[Wait, ...]:
    found = []
    for event in frame.of("waited"):
        row, elapsed = frame.row(event), frame.row(event)["elapsed"] or {}
        least, counted = elapsed.get("needed", ""), elapsed.get("least", "")
        state = frame.before(event)
        step = frame.step(event)
        clock = step["control"]["clock"] if step else ""
        source = state["sources"].get(clock.removeprefix("age:"), {})
        says = f"{words.spoken(words.whole(counted))} of at least {words.spoken(words.whole(least))}" if counted else ""
        found.append(
            Wait(
                seq=event["seq"],
                time=frame.time(event),
                number=row["number"],
                title=titled(row["title"], row["level"]),
                least=least,
                counted=counted,
                greatest=elapsed.get("greatest", ""),
                says=says,
                flag=_FLAGS.get(source.get("flag", ""), ""),
            )
        )
    return tuple(found)


_FLAGS = {
    "gap": "counted across a gap, by the wall clock",
    "restarted": "begun anew after a gap",
    "declared": "counted from what was stated at the start",
    "found": "begun anew: found so after a gap",
}


def holds(frame: Frame) -> tuple[Hold, ...]:
    return tuple(
        Hold(
            seq=e["seq"],
            time=frame.time(e),
            number=frame.row(e)["number"],
            title=frame.row(e)["title"],
            statement=e["body"]["statement"],
            who=e["body"]["who"],
            name=frame.name(e["body"]["who"]),
        )
        for e in frame.of("released")
    )


def people(frame: Frame) -> tuple[Note, ...]:
    """Who recorded, hands in and out by name."""
    found = []
    for e in frame.of("people-counted", "person-changed"):
        if e["kind"] == "person-changed":
            found.append(frame.note(e, f"{frame.name(e['body']['to'])} records from here on."))
            continue
        names = words.listed([frame.name(n) for n in e["body"]["names"]]) or "Nobody"
        way = "in at" if e["body"]["way"] == "in" else "out of"
        found.append(frame.note(e, f"{names} {way} the {e['body']['place'].replace('-', ' ')}."))
    return tuple(found)


def cautions(frame: Frame) -> tuple[Note, ...]:
    found = []
    for e in frame.of("acknowledged"):
        step = frame.step(e)
        heard = words.listed([frame.name(n) for n in e["body"]["heard"]])
        if step is not None and step["control"]["control"] == "caution":
            control = step["control"]
            title = frame.row(e)["title"]
            hazard = control["hazard"].removesuffix(".")
            hazard = "" if hazard == title.removesuffix(".") else f": {hazard}"
            found.append(frame.note(e, f"{control['signal']}{hazard}, read to {heard or 'nobody'}."))
    return tuple(found)


def remarks(frame: Frame) -> tuple[Note, ...]:
    return tuple(frame.note(e, frame.row(e)["text"] or e["body"]["text"]) for e in frame.of("remarked"))


def choices(frame: Frame) -> tuple[Note, ...]:
    return tuple(frame.note(e, words.sentence(frame.row(e)["note"] or e["body"]["value"])) for e in frame.of("chosen"))


def trips(frame: Frame) -> tuple[Note, ...]:
    found = []
    for e in frame.of("trip-recorded"):
        body = e["body"]
        level = f" at {body['level']}" if body["level"] else ""
        title = "Trip" if body["kind"] == "trip" else "Something odd"
        found.append(frame.note(e, words.sentence(f"{body['indicator']}{level}. Done: {body['done']}"), title))
    return tuple(found)


def safe(frame: Frame) -> tuple[Note, ...]:
    """Making safe: begun, each line, ended."""
    items = {one["id"]: one["text"] for one in frame.index.sheet["make_safe"]}
    found = []
    for e in frame.of("safe-begun", "safe-step-done", "safe-ended"):
        body = e["body"]
        if e["kind"] == "safe-begun":
            found.append(frame.note(e, words.sentence(body["why"]) or "No reason was given.", "Make safe begun"))
        elif e["kind"] == "safe-ended":
            found.append(frame.note(e, words.sentence(body["remark"]), "Make safe ended"))
        else:
            was = "Done." if body["done"] else "It was so already."
            found.append(frame.note(e, was, items.get(body["item"], body["item"])))
    return tuple(found)


def gaps(frame: Frame) -> tuple[Note, ...]:
    """Pauses, resumptions with what passed, changed clocks, storage found short, a run taken up again."""
    found = []
    for e in frame.of("paused", "resumed", "states-confirmed", "clock-changed", "storage-found", "reopened"):
        title, says = _gap(frame, e)
        found.append(frame.note(e, says, title))
    return tuple(found)


def _gap(frame: Frame, e: Plain) -> tuple[str, str]:
    body = e["body"]
    match e["kind"]:
        case "paused":
            return "Paused", words.sentence(body["reason"])
        case "resumed":
            mono = f", {words.spoken(words.whole(body['mono_s']))} by the running timer" if body["mono_s"] else ""
            return "Resumed", f"After {body['cause']}: {_passed(body['wall_s'])} by the clock{mono}."
        case "states-confirmed":
            held = words.listed([frame.title(n) for n in body["unbroken"]])
            return (
                "Energy states confirmed",
                f"Unbroken through the gap: {held}." if held else "None held through the gap.",
            )
        case "clock-changed":
            return "Clock changed", clock_says(body)
        case "storage-found":
            return "Storage found short", (
                f"{words.count(body['lost'], 'event')} missing, {body['restored']} restored from the tablet’s copy. "
                + words.sentence(body["note"])
            ).strip()
        case _:
            return "Taken up again", words.sentence(f"Returned by {frame.name(body['returned_by'])}: {body['reason']}")


def _passed(seconds: str) -> str:
    whole = words.whole(seconds)
    return f"set back by {words.spoken(-whole)}" if whole < 0 else words.spoken(whole)


def clock_says(body: Plain) -> str:
    """By how much the wall clock moved against the running timer."""
    moved = words.whole(body["wall_s"]) - words.whole(body["mono_s"])
    way = "forward" if moved >= 0 else "back"
    return f"The tablet’s clock was set {way} by {words.spoken(abs(moved))}. The running timer counts."


def corrections(frame: Frame) -> tuple[Correction, ...]:
    found = []
    by_seq = {e["seq"]: e for e in frame.events}
    for e in frame.of("corrected"):
        body, of = e["body"], by_seq.get(e["body"]["seq"])
        row = frame.rows.get(body["seq"])
        if of is None or row is None:
            continue
        old = next((o["text"] for o in row["old"] if o["seq"] == e["seq"]), "")
        found.append(
            Correction(
                seq=e["seq"],
                of_seq=of["seq"],
                at=e["at"]["wall"],
                time=frame.time(e),
                step=row["step"],
                number=row["number"],
                title=row["title"],
                part="" if body["field"] == "text" else body["field"].removeprefix("points."),
                old=old,
                new=body["text"],
                unit=frame.unit(row["unit"]),
                reason=body["reason"],
                by_name=frame.name(e["by"]),
                after_s=max(0, words.between(of["at"]["wall"], e["at"]["wall"])),
            )
        )
    return tuple(found)


def pictures(frame: Frame) -> tuple[Picture, ...]:
    found = []
    for e in frame.of("pictured"):
        row, body, step = frame.row(e), e["body"], frame.step(e)
        of = step["control"].get("of", "") if step else ""
        found.append(
            Picture(
                seq=e["seq"],
                at=e["at"]["wall"],
                time=frame.time(e),
                by_name=frame.name(e["by"]),
                number=row["number"],
                title=row["title"] or of,
                note="" if body["note"] == row["title"] else body["note"],
                sha256=body["sha256"],
                width=body["width"],
                height=body["height"],
            )
        )
    return tuple(found)


def log(frame: Frame) -> tuple[LogLine, ...]:
    return tuple(
        LogLine(
            seq=e["seq"],
            at=e["at"]["wall"],
            time=frame.time(e),
            by_name=frame.name(e["by"]),
            kind=e["kind"],
            number=frame.row(e)["number"],
            title=titled(frame.row(e)["title"], frame.row(e)["level"]),
            says=_line(frame, e),
            sha256=e["sha256"],
        )
        for e in frame.events
    )


def _line(frame: Frame, e: Plain) -> str:
    """What one event says, in a few words."""
    body, row = e["body"], frame.row(e)
    match e["kind"]:
        case "run-started":
            return f"Run started by {frame.name(e['by'])} on {body['tablet']['name']}."
        case "states-declared":
            return "Energy states declared, lock board seen." if body["board_seen"] else "Energy states declared."
        case "acknowledged":
            return f"Read to {words.listed([frame.name(n) for n in body['heard']])}."
        case "confirmed":
            return "Done."
        case "read" | "worked-out":
            old = "".join(f"(was {words.minus(o['text'])}) " for o in row["old"])
            value = f"{words.minus(row['text'])} {frame.unit(row['unit'])}".strip()
            return f"{old}{value}, {row['verdict']}"
        case "proved":
            points = words.count(len(body["points"]), "point")
            return f"{words.first_up(row['verdict'] or 'not judged')}: tester before, {points}, tester after."
        case "locked":
            return f"Lock {row['text']} on {body['point']}, held by {frame.name(body['holder'])}."
        case "unlocked":
            return f"Lock {body['lock']} off {body['point']} by {frame.name(body['who'])}."
        case "earthed":
            return f"Stick {body['stick']} on {body['point']}."
        case "lifted":
            return f"Stick {body['stick']} off {body['point']}."
        case "chosen":
            return row["note"] or body["value"]
        case "released":
            return f"Released by {frame.name(body['who'])}: {body['statement']}"
        case "pictured":
            return words.sentence(f"Picture {body['sha256'][:12]}. {body['note']}")
        case "waited":
            elapsed = row["elapsed"]
            return f"{words.spoken(words.whole(elapsed['least']))} counted." if elapsed else "Wait over."
        case "people-counted":
            names = words.listed([frame.name(n) for n in body["names"]]) or "nobody"
            return words.sentence(f"{names} {body['way']}, {body['place']}")
        case "went-on":
            return _went(frame, e)
        case "corrected":
            return f"Event {body['seq']} corrected to {words.minus(body['text'])}: {body['reason']}"
        case "ended":
            return words.sentence(f"Run ended: {body['outcome']}. {body['reason']}".strip())
        case "voided":
            return words.sentence(f"Run voided: {body['reason']}")
        case "signed":
            return f"Signed by {frame.name(body['person'])}: {body['meaning']}."
        case "person-changed":
            return f"{frame.name(body['to'])} records from here on."
        case "remarked":
            return row["text"] or body["text"]
        case "trip-recorded":
            return words.sentence(f"{body['kind']}: {body['indicator']} {body['level']}. {body['done']}")
        case "safe-begun":
            return words.sentence(f"Make safe begun. {body['why']}")
        case "safe-step-done":
            return row["title"] or body["item"]
        case "safe-ended":
            return words.sentence(f"Make safe ended. {body['remark']}")
        case _:
            return ". ".join(p for p in _gap(frame, e) if p) if e["kind"] in _GAPS else e["kind"]


_GAPS = ("paused", "resumed", "states-confirmed", "clock-changed", "storage-found", "reopened")


def _went(frame: Frame, e: Plain) -> str:
    body = e["body"]
    move = frame.index.moves.get(body["move"])
    manner = move["manner"] if move else ""
    label = str(move["label"] or "").replace("{level}", frame.row(e)["level"]) if move else ""
    told = {"again": "Taken again", "deviation": "Accepted as a deviation", "stop": "Stopped"}
    what = told.get(manner, label or "Went on")
    by = f" under {frame.name(body['authority'])}" if body["authority"] else ""
    return words.sentence(f"{what}{by}: {body['reason']}" if body["reason"] else f"{what}{by}")
