"""Each rule of attention: what sets it off, what it says, and its place in the order of weight."""

from __future__ import annotations

from pathlib import Path

import played_run as play
import pytest

from fieldkit.record import attention, build
from fieldkit.record.context import Check, Context, KeptEvent, LastRun, Returned, Reviewer
from fieldkit.record.model import Attention, Record


def started(**more: object) -> play.Pen:
    return play.Pen(play.sheet(), **more)  # type: ignore[arg-type]


def record(pen: play.Pen, holds: bool = True, **more: object) -> Record:
    says = "" if holds else "its certificate was not issued here"
    seqs = [e.head.seq for e in pen.events if e.head.kind == "signed"]
    checks = tuple(Check(seq=s, holds=holds, kid="ab" * 32, says=says) for s in seqs)
    return build.build(pen.sheet, pen.events, Context(station="Skarrow Fell", checks=checks, **more))  # type: ignore[arg-type]


def codes(made: Record) -> list[str]:
    return [a.code for a in made.attention]


def the(made: Record, code: str) -> Attention:
    found = [a for a in made.attention if a.code == code]
    assert len(found) == 1, codes(made)
    return found[0]


def test_a_run_with_nothing_wrong_asks_for_no_attention() -> None:
    assert record(play.clean()).attention == ()


def test_items_are_numbered_in_the_order_of_weight() -> None:
    made = record(play.eventful())
    assert codes(made) == ["deviation", "retaken", "conditional", "correction", "clock"]
    assert [a.n for a in made.attention] == [1, 2, 3, 4, 5]


def test_a_deviation_names_who_why_and_under_what() -> None:
    item = the(record(play.eventful()), "deviation")
    assert (item.tone, item.value, item.unit) == ("dev", "5.2", "µA")
    assert item.says.startswith("Above 5.0 µA by 0.2 µA")
    assert item.by == "S. Quill 13:20: “Maker's letter allows 6.” Under: maker's letter."
    assert item.scale is not None and item.scale.high == "5.0"


def test_a_fail_taken_again_carries_its_reason() -> None:
    assert "Meter not settled." in the(record(play.eventful()), "retaken").by


def test_a_conditional_pass_is_yellow_and_stands_once_though_it_is_near_and_unusual_too() -> None:
    item = the(record(play.eventful()), "conditional")
    assert item.tone == "con"
    assert not {"near", "untypical"} & set(codes(record(play.eventful())))


def test_near_a_limit() -> None:
    made = record(started().isolate().release().warm().read("heater", "6.15").read("ion", "0.4").finish("61.5"))
    item = the(made, "near")
    assert item.tone == "" and "caution band" in item.says


def test_unusual_only_warns() -> None:
    made = record(started().isolate().release().warm().read("heater", "6.30").read("ion", "3.5").finish())
    item = the(made, "untypical")
    assert (item.tag, item.tone) == ("Unusual", "")
    assert "Usual is at most 3 µA (common practice, no source)." in item.says
    assert all(r.verdict == "pass" for r in made.readings)


def test_a_correction_shows_the_struck_value() -> None:
    item = the(record(play.eventful()), "correction")
    assert (item.struck, item.value, item.unit, item.by) == ("52", "5.2", "µA", "J. Vell 13:20.")


def test_a_changed_clock_says_by_how_much() -> None:
    assert "forward by 3 min 12 s" in the(record(play.eventful()), "clock").says


def test_a_gap_in_which_the_tablet_was_away() -> None:
    pen = started().isolate().release()
    pen.wait(600).write("resumed", {"cause": "sleep", "wall_s": "600", "mono_s": None})
    states = {"beam_supply": "off", "heater": "off", "ion_pump": "on"}
    pen.write("states-confirmed", {"states": states, "unbroken": ["ion_pump"]})
    made = record(pen.warm().read("heater", "6.30").read("ion", "0.4").finish())
    assert the(made, "gap").says == "The tablet was away for 10 min (sleep)."


def test_an_overdue_meter_is_named_once() -> None:
    old = [{**i, "calibrated_to": "2026-06-30"} if i["id"] == "HV-2" else i for i in play.INSTRUMENTS]
    pen = started(instruments=old).isolate().release().warm().read("heater", "6.30").read("ion", "0.4").finish()
    item = the(record(pen), "overdue")
    assert (item.title, item.says) == ("HV-2", "The calibration of HV-2 ran out on 30 June 2026; the verdicts stand.")


def test_a_trip_stands_with_its_indicator_and_what_was_done() -> None:
    pen = started().isolate().release()
    pen.write("trip-recorded", {"indicator": "I6 body current", "level": "26 kV", "done": "Beam off", "kind": "trip"})
    states = {"beam_supply": "off", "heater": "off", "ion_pump": "on"}
    pen.write("states-confirmed", {"states": states, "unbroken": ["ion_pump"]})
    item = the(record(pen.warm().read("heater", "6.30").read("ion", "0.4").finish()), "trip")
    assert item.title == "I6 body current at 26 kV" and "Beam off" in item.says


def test_made_safe_and_stopped() -> None:
    pen = started().isolate().release().warm()
    pen.write("safe-begun", {"why": "smoke"}).write("safe-step-done", {"item": "beam"})
    made = record(pen.end("stopped", "smoke"))
    assert the(made, "make-safe").says == "Smoke. 1 line of the list recorded."
    assert "stopped" in codes(made)


def test_a_lock_and_an_earth_left_on_name_their_holder() -> None:
    made = record(started().isolate().end("stopped", "end of the day"))
    assert "held by J. Vell" in the(made, "lock-on").says
    assert the(made, "earth-on").title == "Stick E2"


def test_who_was_not_counted_out_is_named() -> None:
    pen = started().isolate().answer("people-counted", "in", place="deck", way="in", names=["vell"])
    assert (
        the(record(pen.end("stopped", "smoke")), "people-in").says
        == "J. Vell signed in at the deck, and not counted out."
    )
    assert "people-in" not in codes(record(play.clean()))


def test_another_persons_lock_taken_off_under_the_three_checks() -> None:
    since = "2026-07-30T09:00:00+01:00"
    board = [{"point": "B2-Q1", "sources": ["beam_supply"], "lock": "17", "tag": "", "holder": "p9",
              "holder_name": "R. Thorn", "run": "0730-B2-1", "since": since}]  # fmt: skip
    pen = started(locks=board).isolate()
    pen.answer("people-counted", "in", place="deck", way="in", names=["vell"])
    pen.answer("people-counted", "out", place="deck", way="out", names=["vell"])
    pen.answer("lifted", "lift", stick="E2", point="deck bus")
    pen.answer("unlocked", "unlock", None, point="B2-Q1", lock="41", who="vell").signed("vell", "unlocked")
    checks = [{"name": n, "how": "telephone"} for n in ("not on site", "tried to reach", "told before return")]
    pen.answer("unlocked", "unlock", point="B2-Q1", lock="17", who="vell", checks=checks, second="arkle").signed(
        "vell", "unlocked"
    )
    item = the(record(pen.warm().read("heater", "6.30").read("ion", "0.4").finish()), "lock-exception")
    assert item.says.startswith("R. Thorn’s lock was taken off by J. Vell with P. Arkle.")


def test_storage_found_short() -> None:
    pen = play.clean().write("storage-found", {"lost": 2, "restored": 2, "note": "sentinel gone"})
    assert the(record(pen), "storage").says == "2 events missing, 2 restored from the tablet’s copy. Sentinel gone."


def test_a_recomputation_that_disagrees_comes_first() -> None:
    pen = started().isolate().release().warm(60).read("heater", "6.30").read("ion", "0.4").finish()
    made = record(pen)
    assert made.attention[0].code == "disagreement" and made.attention[0].tone == "dev"
    assert "before its time" in made.attention[0].says


def test_a_result_that_was_not_what_the_sheet_gives_disagrees() -> None:
    pen = started().isolate().release().warm().read("heater", "6.30").read("ion", "0.4").finish("99")
    assert the(record(pen), "disagreement").title == "Heater power"


def test_a_signature_that_does_not_hold() -> None:
    made = record(play.clean(), holds=False)
    assert codes(made) == ["signature"] * 3
    assert made.attention[0].says == "Its certificate was not issued here."


def test_events_that_were_kept_aside_and_a_broken_chain() -> None:
    kept = (KeptEvent(seq=9, code="damaged-event", says="Event 9 is damaged at body.text."),)
    made = record(play.clean(), kept=kept, alarm="The chain was continued twice.")
    assert codes(made) == ["chain", "kept"]
    assert not made.chain.whole and made.attention[1].title == "Event 9 not accepted"


def test_a_reading_that_moved_since_the_last_run() -> None:
    last = {"ion": LastRun(text="2.4", unit="uA", run="r", day="2 July 2026")}
    made = record(play.clean(), last_run=last)
    assert the(made, "moved").says.startswith("Down 2.0 µA since the last run")
    close = {"ion": LastRun(text="0.5", unit="uA", run="r", day="2 July 2026")}
    assert codes(record(play.clean(), last_run=close)) == []


def test_the_same_supervisor_for_deviation_and_countersignature_is_said() -> None:
    made = record(play.eventful(), reviewer=Reviewer(id="quill", name="S. Quill"))
    assert made.review is not None and made.review.both
    assert the(made, "both").says == "S. Quill allowed 1 deviation in this run and countersigns it as well."
    other = record(play.eventful(), reviewer=Reviewer(id="orme", name="K. Orme"))
    assert other.review is not None and not other.review.both and "both" not in codes(other)


def test_a_record_that_was_returned_before() -> None:
    returned = (Returned(by_name="K. Orme", reason="Which meter?", time="2026-08-01T08:00:00Z", seq=20),)
    item = the(record(play.clean(), returns=returned), "returned")
    assert (item.says, item.by) == ("“Which meter?”", "K. Orme, 1 August 2026.")


def test_a_meter_too_coarse_for_its_limits() -> None:
    coarse = [{**i, "resolution": "1"} if i["id"] == "DM-04" else i for i in play.INSTRUMENTS]
    pen = started(instruments=coarse).isolate().release().warm().read("heater", "6").read("ion", "0.4").finish("60")
    assert "not-judged" in codes(record(pen))


def test_a_failed_proof_that_went_on_no_further() -> None:
    pen = started().answer("acknowledged", "caution", heard=["vell", "arkle"])
    pen.answer("locked", "lock", point="B2-Q1", lock="41", tag="", holder="vell")
    points = [{"name": "deck", "text": "320"}]
    pen.answer("proved", "prove", None, instrument="HV-2", before="502", points=points, after="501")
    made = record(pen.went("prove", "stop", "Not dead.").end("stopped", "not dead"))
    assert the(made, "failed").title == "Prove the deck dead, Deck bus"


@pytest.mark.parametrize("rule", attention.RULES, ids=lambda r: r.__name__)
def test_every_rule_is_spoken_of_here(rule: object) -> None:
    """A rule without a test of its own would go unnoticed."""
    codes_that_differ = {"made_safe": "make-safe", "lock_on": "lock-on", "exception": "lock-exception",
                         "undecided": "not-judged", "people_in": "people-in"}  # fmt: skip
    name = rule.__name__  # type: ignore[attr-defined]
    code = codes_that_differ.get(name, name)
    assert f'"{code}"' in Path(__file__).read_text().partition("def test_every_rule")[0]
