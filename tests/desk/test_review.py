"""Who may return and countersign, what the lists say, what a countersignature stores: a real database, real PDFs."""

from __future__ import annotations

import datetime as dt
import hashlib

import played_run as play
import pytest
from desk_in_tests import ORME, QUILL, SHA, VELL, Chain, Desk, raw
from station_in_tests import held

from fieldkit.errors import Refusal
from fieldkit.operations import enrol, moment, records, review
from fieldkit.operations.actor import Actor
from fieldkit.operations.dossier import dossier
from fieldkit.operations.review import Ready
from fieldkit.pdf import verify
from fieldkit.record import model
from fieldkit.store.db import db
from fieldkit.store.tables import Preparation, RecordRow

RUN = "260731-B2-1AAAA"


def code(work) -> str:
    with pytest.raises(Refusal) as bad:
        work()
    return bad.value.code


def ready(desk: Desk, actor: Actor = ORME, run: str = RUN) -> tuple[Ready, bytes]:
    """A file made ready for the actor's key, and the actor's signature over it."""
    key, kid = desk.key(actor)
    made = review.prepare(actor, held(desk.app), run, kid)
    return made, raw(key, made.to_sign)


def test_a_finished_run_waits_and_an_open_one_is_under_way(desk, inside):
    desk.waiting()
    desk.arrive(desk.pen("260731-B2-2BBBB").isolate(), picture=None)
    # oldest first: that one was begun an hour ago, this one came to wait just now
    assert [(line.run, line.state) for line in review.lines()] == [("260731-B2-2BBBB", "open"), (RUN, "waiting")]


def test_a_run_whose_picture_has_not_arrived_does_not_wait_yet(desk, inside):
    desk.arrive(play.clean(desk.pen(RUN), SHA), picture=None)
    assert [line.state for line in review.lines()] == ["arriving"]
    assert dossier(RUN).missing == (SHA,)


def test_the_dossier_knows_whose_signatures_hold_and_the_recomputation_agrees(desk, inside):
    desk.waiting(eventful=True)
    found = dossier(RUN)
    assert {s.name for s in found.record.signatures} == {"J. Vell", "P. Arkle", "S. Quill"}
    assert all(s.holds and len(s.kid) == 64 for s in found.record.signatures)
    assert found.record.chain.whole and found.record.chain.disagree == ()
    assert found.recorders == {"vell"}
    assert found.record.head.tube_says.startswith("inductive output tube")


def test_the_tubes_last_run_stands_on_the_scales_of_the_next(desk, inside):
    desk.waiting("260731-B2-0ZZZZ", hours=3)
    desk.waiting()
    reading = next(r for r in dossier(RUN).record.readings if r.step == "heater")
    assert [(p.name, p.value) for p in reading.pointers] == [("last run", "6.30")]
    assert all(not r.pointers for r in dossier("260731-B2-0ZZZZ").record.readings)


@pytest.mark.parametrize(("hours", "offset", "last"), [(3, 5, True), (1, -9, False)])
def test_the_last_run_is_the_one_before_in_time_whatever_the_tablets_offset(desk, inside, hours, offset, last):
    """Three hours earlier at an offset of five hours more its text sorts later; and the other way round."""
    pen = desk.pen("260731-B2-0ZZZZ", hours, zone=dt.timezone(dt.timedelta(hours=offset)))
    desk.arrive(play.clean(pen, SHA))
    desk.arrive(play.clean(desk.pen(RUN, 2), SHA))
    reading = next(r for r in dossier(RUN).record.readings if r.step == "heater")
    assert [p.value for p in reading.pointers] == (["6.30"] if last else [])


@pytest.mark.parametrize(
    ("actor", "why"),
    [
        (VELL, "not-allowed"),
        (Actor("vell", "J. Vell", ("technician", "supervisor")), "recorded-it"),
        (ORME, None),
        (QUILL, None),
    ],
)
def test_who_may_review(desk, inside, actor, why):
    """The recorder never does, whatever their roles; a supervisor who allowed a deviation does, and it is said."""
    desk.waiting(eventful=True)
    bad = review.refusal(actor, dossier(RUN))
    assert (bad.code if bad else None) == why
    if why is not None:
        assert code(lambda: review.return_run(actor, RUN, "Which meter?")) == why


def test_a_supervisor_who_recorded_under_a_change_of_person_does_not_review(desk, inside):
    pen = desk.pen(RUN).isolate().release().signed("vell", "handed over")
    pen.write("person-changed", {"to": "quill"}, by="quill")
    pen.by = "quill"
    pen.warm().read("heater", "6.30").read("ion", "0.4")
    pen.answer("worked-out", "power", value="63").answer("released", "hold", who="arkle", statement="Doors are shut.")
    pen.signed("arkle", "released")
    shot = {"sha256": SHA, "media": "image/jpeg", "width": 320, "height": 200, "size": 9000}
    pen.answer("pictured", "picture", **shot).answer("remarked", "remark", text="Nothing odd.")
    pen.write("ended", {"outcome": "done", "reason": "", "states": {}, "locks": [], "earths": []})
    desk.arrive(pen.signed("quill", "performed"))
    assert dossier(RUN).recorders == {"vell", "quill"}
    assert review.refusal(QUILL, dossier(RUN)).code == "recorded-it"


def test_returning_needs_a_reason_and_tells_the_tablet(desk, inside):
    desk.waiting()
    assert code(lambda: review.return_run(ORME, RUN, "  ")) == "no-reason"
    review.return_run(ORME, RUN, "Which meter read the ion pump?")
    told = records.inbox(desk.tablet.device).returned
    assert [(r.run, r.reason, r.by_name) for r in told] == [(RUN, "Which meter read the ion pump?", "K. Orme")]
    assert code(lambda: review.return_run(ORME, RUN, "again")) == "not-waiting"
    assert review.lines()[0].reason == "Which meter read the ion pump?"


def test_a_returned_run_that_is_signed_again_waits_again_and_says_that_it_was_returned(desk, inside):
    pen = desk.waiting()
    review.return_run(ORME, RUN, "Say which meter.")
    sent = len(pen.texts)
    pen.write("reopened", {"reason": "Say which meter.", "returned_by": "orme"})
    pen.write("remarked", {"step": "remark", "text": "Ion pump read on IP-2.", "move": None}).signed(
        "vell", "performed"
    )
    desk.arrive(pen, picture=None, texts=pen.texts[sent:])
    found = dossier(RUN)
    assert found.state == "waiting"
    assert [a.says for a in found.record.attention if a.code == "returned"] == ["“Say which meter.”"]
    assert found.record.remarks[-1].says == "Ion pump read on IP-2."


def test_countersigning_in_two_requests_stores_a_file_that_verifies(desk, inside):
    desk.waiting(eventful=True)
    made, signature = ready(desk)
    waiting = review.prepared_pdf(ORME, made.id)
    assert hashlib.sha256(waiting).hexdigest() == made.pdf_sha256
    assert hashlib.sha256(waiting[: made.length]).hexdigest() == made.sealed
    assert review.finish(ORME, made.id, signature) == RUN
    pdf = review.countersigned_pdf(VELL, RUN)
    report = verify.verify(pdf, held(desk.app).authority_pem, moment.now())
    failing = [(a.code, a.says) for a in report.answers if a.state == "fails"]
    assert failing == []
    row = db.session.get(RecordRow, RUN)
    assert row.state == "countersigned" and row.countersigned_by == "orme"
    assert row.pdf_sha256 == hashlib.sha256(pdf).hexdigest()
    assert model.from_bytes(row.record).review.name == "K. Orme"
    assert records.inbox(desk.tablet.device).countersigned[0].by_name == "K. Orme"
    assert db.session.query(Preparation).count() == 0


def test_the_supervisor_who_allowed_the_deviation_may_countersign_and_the_record_says_so(desk, inside):
    desk.waiting(eventful=True)
    made, signature = ready(desk, QUILL)
    review.finish(QUILL, made.id, signature)
    stored = model.from_bytes(db.session.get(RecordRow, RUN).record)
    assert stored.review.both and "both" in [a.code for a in stored.attention]


def test_a_countersigned_record_is_shown_as_signed_and_what_comes_later_is_counted(desk, inside):
    pen = desk.waiting(eventful=True)
    made, signature = ready(desk, QUILL)
    review.finish(QUILL, made.id, signature)
    before = dossier(RUN)
    assert before.later == 0 and before.record.review.name == "S. Quill"
    sent = len(pen.texts)
    pen.write("remarked", {"step": "remark", "text": "Late.", "move": None})
    desk.arrive(pen, picture=None, texts=pen.texts[sent:])
    after = dossier(RUN)
    assert after.later == 1 and after.record == before.record and after.state == "countersigned"
    assert dossier(RUN, as_received=True).record.remarks[-1].says == "Late."


def test_a_signature_by_another_key_is_refused_and_nothing_changes(desk, inside):
    desk.waiting()
    made, _ = ready(desk)
    other, _ = desk.key(QUILL)
    assert code(lambda: review.finish(ORME, made.id, raw(other, made.to_sign))) == "bad-signature"
    assert code(lambda: review.finish(ORME, made.id, b"short")) == "bad-signature"
    assert dossier(RUN).state == "waiting"


def test_what_was_prepared_for_one_supervisor_is_not_another_ones(desk, inside):
    desk.waiting()
    made, signature = ready(desk)
    assert code(lambda: review.prepared_pdf(QUILL, made.id)) == "not-found"
    assert code(lambda: review.finish(QUILL, made.id, signature)) == "not-found"


def test_a_key_of_somebody_else_or_a_revoked_one_prepares_nothing(desk, inside):
    desk.waiting()
    _, theirs = desk.key(QUILL)
    assert code(lambda: review.prepare(ORME, held(desk.app), RUN, theirs)) == "unknown-key"
    _, mine = desk.key(ORME)
    enrol.revoke_key(ORME, mine)
    assert code(lambda: review.prepare(ORME, held(desk.app), RUN, mine)) == "unknown-key"


def test_an_event_that_arrives_between_means_looking_again(desk, inside):
    pen = desk.waiting()
    made, signature = ready(desk)
    sent = len(pen.texts)
    pen.write("remarked", {"step": "remark", "text": "Late.", "move": None})
    desk.arrive(pen, picture=None, texts=pen.texts[sent:])
    assert code(lambda: review.finish(ORME, made.id, signature)) == "changed-meanwhile"


def test_a_returned_record_cannot_be_finished_with_what_was_prepared_before(desk, inside):
    desk.waiting()
    made, signature = ready(desk)
    review.return_run(QUILL, RUN, "Wait.")
    assert code(lambda: review.finish(ORME, made.id, signature)) == "not-found"


def test_a_forked_chain_can_be_returned_and_not_countersigned(desk, inside):
    pen = desk.waiting()
    forked = pen.texts[5].replace("0.1.0", "0.1.1")
    assert desk.tablet.send(Chain(RUN, pen.state["chain"]), [forked]).status_code == 409
    found = dossier(RUN)
    assert [a.code for a in found.record.attention][:2] == ["chain", "kept"]
    _, kid = desk.key(ORME)
    assert code(lambda: review.prepare(ORME, held(desk.app), RUN, kid)) == "broken-chain"
    review.return_run(ORME, RUN, "The chain was continued twice.")
