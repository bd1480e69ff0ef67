"""Every page of the tablet in the states that matter, for sweeps: what the host holds, where the address points, what is done.

`PLACES` is the list. To add one: a line in the part that it belongs to. Not here: what is looked at (test_axe.py), the
made-up host (look_server.py), how a run is brought to a step (look_play.py).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from look_play import Play
from look_server import scene

HV = "hv-bring-up"
Scene = dict[str, Any]
Act = Callable[[Any], None]

# ---- scenes ----------------------------------------------------------------------------------------------------------

_PLAYS: dict[str, Play] = {}


def at(step: str, procedure: str = "warm-up", **more: Any) -> Scene:
    """The run standing at a step; goes on from the last one that was asked for, where that lies before it."""
    play = _PLAYS.get(procedure)
    if play is None or step in play.state["done"]:
        play = _PLAYS[procedure] = Play(procedure)
    return scene(play.to(step, picks={"next": "look"}), **more)


def other_records() -> Scene:
    """At the unlocking, with somebody else recording than the lock's holder."""
    play = Play(HV).to("unlock_q1")
    play.do({"do": "person-changed", "to": "arkle"})
    play.sign("vell", "handed over")
    return scene(play)


def begun(procedure: str = "warm-up") -> Scene:
    return scene(Play(procedure))


def over_limit() -> Scene:
    """A derived value outside its limits, which a supervisor may let stand."""
    texts = {"heater_amps_10": "9.25", "heater_amps_warm": "9.25", "heater_warm": "6.45"}
    return scene(Play("warm-up").to("heater_hot", texts=texts))


def after(step: str, *commands: dict[str, Any], **more: Any) -> Scene:
    """A run of its own, at a step, with something done to it."""
    play = Play("warm-up").to(step)
    for command in commands:
        play.do(command)
    return scene(play, **more)


def ranged(name: str, low: str, high: str, resolution: str, percent: str = "0.3") -> dict[str, str]:
    """A range in V, as a register has it."""
    return {"name": name, "unit": "V", "low": low, "high": high, "resolution": resolution, "percent": percent, "digits": "1", "percent_of_range": "0"}  # fmt: skip


#: a heater meter with ranges that the limits of 6.10 to 6.50 V lie beyond, on, and too finely for
RANGES = [ranged("2 V", "-2", "2", "0.001"), ranged("20 V", "-20", "20", "0.01"), ranged("200 V", "-200", "200", "0.1"), ranged("1000 V", "-1000", "1000", "1")]  # fmt: skip
OUT = {"calibrated_on": "2025-06-30", "interval_months": 12, "calibrated_to": "2026-06-30"}
#: a step that takes no overdue meter, read with a hand instrument of which there is another one
STRICT = {"meter": {"role": "", "instrument": "RM-1", "hand_at": "", "overdue": "refuse", "correlated": False}, "unit": {"symbol": "mW/cm2", "factor": "10", "offset": "0"}, "limits": None, "plate": None, "typical": None}  # fmt: skip


def metered(step: str = "heater_left", procedure: str = "warm-up", *, strict: bool = False, **meter: Any) -> Scene:
    """A run at a reading whose meter is another than the register's, or is refused where it is overdue."""
    controls = {step: STRICT} if strict else {}
    return scene(Play(procedure, instruments={"DM-04": meter}, controls=controls).to(step, picks={"next": "look"}))


def unknown_accuracy() -> Scene:
    """A result of a reading whose meter states no accuracy, against guarded limits."""
    sheet = Play("warm-up").sheet
    asked = next(step["control"]["limits"] for step in sheet["steps"] if step["id"] == "heater_hot")
    bare = [ranged("20 V", "0", "20", "0.01", "") | {"digits": ""}]
    play = Play("warm-up", instruments={"DM-04": {"ranges": bare}}, controls={"heater_hot": {"limits": asked | {"guarded": True}}})  # fmt: skip
    return scene(play.to("heater_hot", picks={"next": "look"}))


def safe_item() -> str:
    return str(Play("warm-up").sheet["make_safe"][0]["id"])


def signed(*commands: dict[str, Any], **more: Any) -> Scene:
    play = Play("warm-up").to("@end")
    play.do({"do": "ended", "outcome": "done"})
    play.sign("vell", "performed")
    for command in commands:
        play.do(command)
    return scene(play, **more)


LOST = {"runs": [], "health": {"storage": "lost", "says": ["Run 0731-B2-2 had reached event 212."]}}
BARE = {
    "enrolled": False, "device": None, "kit": None, "runs": [],
    "health": {"offline_ready": False, "installed": False, "persisted": False, "says": ["Nothing is stored on this tablet."]},
}  # fmt: skip
BACK = [
    {
        "run": "0731-B2-2",
        "reason": "Which meters does the picture show?",
        "by": "quill",
        "by_name": "S. Quill",
        "time": "2026-08-01T09:10:00+01:00",
        "seq": 9999,
    }
]
REFUSED = {"code": "wrong-password", "says": "That sign-in or its password is wrong."}
ALONE = {"code": "alone", "says": "This procedure needs 2 people, and 1 is named. Alone you may warm up the tube."}
PAUSED = {"do": "paused", "reason": "called to the other cabinet"}

# ---- acts ------------------------------------------------------------------------------------------------------------


def on_range(name: str, *then: Act) -> Act:
    """Another range than the proposed one is chosen."""

    def act(page: Any) -> None:
        page.get_by_role("radio", name=name).check()
        for one in then:
            one(page)

    return act


def over(name: str, *clicks: str) -> Act:
    def act(page: Any) -> None:
        page.click("[data-this-run]")
        page.click(f"[data-to={name}]")
        page.wait_for_selector(f"[data-over={name}]")
        for one in clicks:
            page.click(one)

    return act


def typing(text: str, *clicks: str) -> Act:
    def act(page: Any) -> None:
        page.locator("[data-typed]").first.fill(text)
        for one in clicks:
            page.click(one)

    return act


def clicking(*clicks: str) -> Act:
    def act(page: Any) -> None:
        for one in clicks:
            page.locator(one).first.click()

    return act


def correcting(page: Any) -> None:
    page.locator("[data-past] button.row", has_text="Bias voltage").last.click()
    page.click("[data-correct]")
    page.click("[data-record-correction]")


def enrolling(page: Any) -> None:
    page.get_by_label("Name of this tablet").fill("tablet 3")
    page.get_by_label("Your sign-in at the station").fill("vell")
    page.click("[data-enrol-send]")
    page.wait_for_selector("[data-enrol-says] *")


def kit_taken(page: Any) -> None:
    page.click("[data-kit-take]")
    page.get_by_text("The kit is aboard").wait_for()


def choosing(page: Any) -> None:
    page.get_by_label("Beam supply to working voltage").check()
    page.get_by_label("Cabinet B2").first.check()
    page.locator("fieldset", has_text="Who is here").get_by_label("J. Vell").check()
    page.click("[data-start]")
    page.wait_for_selector("[data-code=alone]")


def differing(page: Any) -> None:
    for one in page.locator("[data-source] input[value=unbroken]").all():
        one.check()
    page.locator("[data-source=heater] input[value=otherwise]").check()


def away(page: Any) -> None:
    page.get_by_label("Holder is away").check()


def wrong_passphrase(page: Any) -> None:
    page.fill("[data-passphrase]", "wrong")
    page.click("[data-sign]")
    page.wait_for_selector("[data-refused]:not(:empty)")


def waiting(one: str) -> Act:
    return lambda page: page.wait_for_selector(one)


def sum_typed(page: Any) -> None:
    page.wait_for_selector("[data-one-sum]")
    page.click("[data-fill]")
    page.locator("[data-one-sum] input").first.focus()


def sum_refused(page: Any) -> None:
    sum_typed(page)
    page.fill("[data-typed=inlet]", "120")


def sum_uncertain(page: Any) -> None:
    sum_typed(page)
    page.click("[data-uncertain]")
    page.select_option("[data-margin=flow] .sum-with select", "FM-2/80 L/min")
    page.fill("[data-width=outlet]", "0.4")
    page.fill("[data-width=inlet]", "-0.4")


def sums_found(page: Any) -> None:
    page.click("[data-subject=coolant]")
    page.click("[data-sum=coolant_heat_water]")
    page.click("[data-all-sums]")
    page.fill("[data-find]", "flow")


def sum_over(page: Any) -> None:
    over("sums", "[data-subject='high voltage']", "[data-sum=discharge_voltage]")(page)
    sum_typed(page)


# ---- places ----------------------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Place:
    """A page in one state: what the host holds, where the address points, what is done before looking, what it shows."""

    name: str
    shows: str
    make: Callable[[], Scene]
    act: Act | None = None
    hash: str = ""


def _outside() -> list[Place]:
    return [
        Place("home", "screen home", begun, hash="#home"),
        Place("home, not enrolled", "screen home", lambda: scene(held_more=BARE), hash="#home"),
        Place("home, storage lost", "screen home", lambda: scene(held_more=LOST), hash="#home"),
        Place("enrol", "screen enrol", lambda: scene(held_more=BARE), hash="#enrol"),
        Place("enrol, asked", "screen enrol", scene, enrolling, "#enrol"),
        Place("enrol, refused", "screen enrol", lambda: scene(enrolSays=REFUSED), enrolling, "#enrol"),
        Place("kit", "screen kit", lambda: scene(held_more=BARE), hash="#kit"),
        Place("kit, taken", "screen kit", scene, kit_taken, "#kit"),
        Place("start", "screen start", scene, hash="#start"),
        Place("start, refused", "screen start", lambda: scene(startSays=ALONE), choosing, "#start"),
        Place("site card", "screen card", scene, hash="#card"),
        Place("sums", "screen sums", scene, waiting("[data-find]"), "#sums"),
        Place("sums, found", "screen sums", scene, sums_found, "#sums"),
        Place("sums, a run open", "screen sums", begun, clicking("[data-subject=coolant]"), "#sums"),
        Place("sums, an older kit", "screen sums", lambda: scene(sums=None), waiting("[data-no-sums]"), "#sums"),
        Place("a sum", "screen sums", scene, sum_typed, "#sums?name=coolant_heat_water"),
        Place("a sum, out of range", "screen sums", scene, sum_refused, "#sums?name=coolant_heat_water"),
        Place("a sum with uncertainty", "screen sums", scene, sum_uncertain, "#sums?name=coolant_heat_water"),
        Place("a sum of two results", "screen sums", scene, sum_typed, "#sums?name=directivity_bounds"),
        Place("a sum in any unit", "screen sums", scene, sum_typed, "#sums?name=conformance_probability"),
        Place("a page that cannot be shown", "screen run", begun, hash="#run?run=no-such-run"),
    ]


def _steps() -> list[Place]:
    again = clicking("[data-first]", "[data-way=again]", "[data-confirm-again]")
    deviation = clicking("[data-first]", "[data-way=deviation]", "[data-confirm-deviation]")
    return [
        Place("states as found", "phase declare", begun),
        Place("states as found, a lock named", "phase declare", begun, clicking("[data-name-lock]")),
        Place("danger", "control caution", lambda: at("danger_deck")),
        Place("warning", "control caution", lambda: at("warning_magnets")),
        Place("caution", "control caution", lambda: at("caution_hot")),
        Place("notice", "control caution", lambda: at("notice_tube")),
        Place("choice", "control choice", lambda: at("history")),
        Place("confirm", "control confirm", lambda: at("air_on")),
        Place("confirm, held", "control confirm", lambda: at("heater_on")),
        Place("number", "control number", lambda: at("heater_left")),
        Place("number, conditional", "control number", lambda: at("heater_left"), typing("6.48")),
        Place("number, fail", "control number", lambda: at("heater_left"), typing("6.62")),
        Place("number, refused", "control number", lambda: at("heater_left"), typing("1e5", "[data-first]")),
        Place("number, ranges", "control number", lambda: metered(ranges=RANGES), typing("6.48")),
        Place("number, too coarse", "control number", lambda: metered(ranges=RANGES), on_range("1000 V")),
        Place("number, not judged", "control number", lambda: metered(ranges=RANGES), on_range("1000 V", typing("6"))),
        Place("number, wrong range", "control number", lambda: metered(ranges=RANGES), on_range("2 V", typing("1.9"))),
        Place("number, overdue", "control number", lambda: metered(**OUT), typing("6.30")),
        Place("number, refused meter", "control number", lambda: metered(strict=True)),
        Place(
            "number, another meter",
            "control number",
            lambda: metered(strict=True),
            lambda p: (clicking("[data-meter-id=RM-2]")(p), typing("0.3")(p)),
        ),
        Place("ways on", "phase pending", lambda: at("heater_left"), typing("6.62", "[data-first]")),
        Place("taken again", "phase pending", lambda: at("heater_left"), lambda p: (typing("6.62")(p), again(p))),
        Place("deviation", "phase pending", over_limit, deviation),
        Place("wait", "control wait", lambda: at("warm")),
        Place("result", "control result", lambda: at("heater_hot")),
        Place("result, not judged", "control result", unknown_accuracy),
        Place("picture", "control picture", lambda: at("picture_meters")),
        Place("remark", "control remark", lambda: at("what_waits")),
        Place("hold", "control hold", lambda: at("walk_round", HV)),
        Place("unlock", "control unlock", lambda: at("unlock_q1", HV)),
        Place("unlock, holder away", "control unlock", other_records, away),
        Place("a rung of the ladder", "control number", lambda: at("climb_kv", HV)),
        Place("lock", "control lock", lambda: at("lock_q1", HV)),
        Place("prove", "control prove", lambda: at("prove_beam", HV)),
        Place("prove, a line", "control prove", lambda: at("prove_beam", HV), typing("502", "[data-first]")),
        Place("prove, range too high", "control prove", lambda: at("prove_beam", HV), on_range("40 kV", typing("502"))),
        Place("earth", "control earth", lambda: at("earth_e1", HV)),
        Place("people in", "control people", lambda: at("hands_in", HV)),
        Place("people out", "control people", lambda: at("hands_out", HV)),
        Place("lift", "control lift", lambda: at("lift_e3", HV)),
        Place("refused", "control confirm", lambda: at("air_on", commandSays=REFUSED), clicking("[data-first]")),
    ]


def _beside() -> list[Place]:
    done = clicking("[data-make-safe]", "[data-done]")
    changing = over("person", "[data-over=person] .pick input")
    return [
        Place("make safe", "over make_safe", lambda: at("warm"), clicking("[data-make-safe]")),
        Place("make safe, a step recorded", "over make_safe", lambda: at("warm"), done),
        Place("make safe, the site card", "over card", lambda: at("warm"), clicking("[data-make-safe]", "[data-card]")),
        Place("this run", "over this_run", lambda: at("warm"), clicking("[data-this-run]")),
        Place("trip", "over trip", lambda: at("warm"), over("trip", "[data-record-trip]")),
        Place("sums over a run", "over sums", lambda: at("warm"), over("sums", "[data-subject=coolant]")),
        Place("a sum over a run", "over sums", lambda: at("warm"), sum_over),
        Place("locks and earths", "over board", lambda: at("warm"), over("board")),
        Place("pause", "over pause", lambda: at("warm"), over("pause")),
        Place("another person", "over person", lambda: at("warm"), changing),
        Place("remark beside", "over remark", lambda: at("warm"), over("remark", "[data-record-remark]")),
        Place("picture beside", "over picture", lambda: at("warm"), over("picture")),
        Place("end early", "over end_early", lambda: at("warm"), over("end_early", "[data-end-early]")),
        Place("void", "over void_run", lambda: at("danger_deck"), over("void_run", "[data-void-run]")),
        Place("correction", "over past", lambda: at("warm"), correcting),
    ]


def _ends() -> list[Place]:
    reopened = {"do": "reopened", "reason": BACK[0]["reason"], "returned_by": "quill"}
    return [
        Place("after a gap", "phase confirm", lambda: after("heater_left", PAUSED)),
        Place("after a gap, otherwise", "phase confirm", lambda: after("heater_left", PAUSED), differing),
        Place("stopped", "phase stopped", lambda: after("air_on", {"do": "safe-step-done", "item": safe_item()})),
        Place("end", "phase going", lambda: at("@end")),
        Place("signature", "phase ended", lambda: after("@end", {"do": "ended", "outcome": "done"})),
        Place(
            "signature, wrong",
            "phase ended",
            lambda: after("@end", {"do": "ended", "outcome": "done"}),
            wrong_passphrase,
        ),
        Place("ended and signed", "phase ended", signed),
        Place("returned", "phase ended", lambda: signed(inbox=BACK)),
        Place("taken up again", "phase ended", lambda: signed(reopened)),
        Place("voided", "phase voided", lambda: after("danger_deck", {"do": "voided", "reason": "begun by mistake"})),
    ]


PLACES = [*_outside(), *_steps(), *_beside(), *_ends()]
