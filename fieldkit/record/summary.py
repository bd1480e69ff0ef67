"""The first sentence of a record: how the run went, in one breath; and what it counts."""

from __future__ import annotations

from fieldkit.record import words
from fieldkit.record.frame import Frame
from fieldkit.record.lines import Reading
from fieldkit.record.model import Counts, Head


def counts(frame: Frame, readings: tuple[Reading, ...]) -> Counts:
    """Steps are counted by their printed number; a result is no reading."""
    steps = {s.number for s in frame.sheet.steps}
    done = {frame.index.steps[s]["number"] for s in frame.final["done"] if s in frame.index.steps}
    taken = [r for r in readings if r.kind != "result"]
    failed = [r for r in taken if r.verdict in ("fail", "conditional fail")]
    return Counts(
        steps_done=len(done),
        steps=len(steps),
        readings=len(taken),
        passed=sum(r.verdict == "pass" for r in taken),
        conditional=sum(r.verdict == "conditional pass" for r in taken),
        deviations=sum(r.deviation is not None for r in failed),
        retaken=sum(r.retaken and r.deviation is None for r in failed),
        met=sum(met(frame, r) for r in failed),
        failed=sum(not r.retaken and r.deviation is None and not met(frame, r) for r in failed),
        not_judged=sum(r.verdict == "not judged" for r in taken),
        events=len(frame.events),
    )


def met(frame: Frame, r: Reading) -> bool:
    """Whether a fail led to the way that the procedure itself lays down for it: a fall-back, another arm."""
    move = frame.index.moves.get(frame.rows[r.seq]["move"] or "")
    return bool(move and move["on"] == "fail" and move["manner"] == "plain") and r.deviation is None


def steps_say(head: Head, n: Counts, stop: str) -> str:
    """What became of the steps: "all 31 steps were done"."""
    some = f"{n.steps_done} of {n.steps} steps were done"
    if head.outcome == "done":
        return (
            f"all {n.steps} steps were done"
            if n.steps_done == n.steps
            else f"all {n.steps_done} steps on the way taken were done"
        )
    if head.outcome == "stopped":
        return f"the run was stopped after {n.steps_done} of {words.count(n.steps, 'step')}" + (
            f": {stop}" if stop else ""
        )
    if head.outcome == "voided":
        return f"the run was voided: {head.outcome_reason}"
    return f"the run is not over: {some}"


def readings_say(n: Counts) -> str:
    """Of 46 readings 44 pass, 1 passes conditionally and 1 failed and was accepted as a deviation."""
    if n.readings == 0:
        return "No reading was taken."
    said = []
    if n.passed:
        said.append(f"{n.passed} {'passes' if n.passed == 1 else 'pass'}")
    if n.conditional:
        said.append(f"{n.conditional} {'passes' if n.conditional == 1 else 'pass'} conditionally")
    if n.not_judged:
        said.append(f"{n.not_judged} {'is' if n.not_judged == 1 else 'are'} not judged")
    for many, one, more in (
        (n.retaken, "failed and was taken again", "failed and were taken again"),
        (n.deviations, "failed and was accepted as a deviation", "failed and were accepted as deviations"),
        (n.met, "failed and was met as the procedure lays down", "failed and were met as the procedure lays down"),
        (n.failed, "failed", "failed"),
    ):
        if many:
            said.append(f"{many} {one if many == 1 else more}")
    if n.readings == n.passed:
        return "The one reading passes." if n.readings == 1 else f"All {n.readings} readings pass."
    of = f"Of {n.readings} readings" if n.readings > 1 else "Of 1 reading"
    return f"{of} {words.listed(said)}."


def short(head: Head, n: Counts, stop: str) -> str:
    """The sentence without the date, for a page that says it elsewhere."""
    return f"{words.sentence(steps_say(head, n, stop))} {readings_say(n)}"


def full(head: Head, n: Counts, stop: str) -> str:
    """The sentence with the date and the times."""
    span = f"from {head.from_time[:5]} to {head.to_time[:5]}" if head.ended else f"from {head.from_time[:5]}"
    said = words.sentence(steps_say(head, n, stop))
    return f"On {head.day}, {span}, {said[:1].lower() + said[1:]} {readings_say(n)}"
