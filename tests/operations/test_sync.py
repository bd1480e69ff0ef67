"""Receiving events: nothing twice, nothing lost, nothing dropped, a receipt only for what is committed."""

import json
import random
import threading

import pytest
from sqlalchemy import select, text
from station_in_tests import PASSWORD, held, issue, jpeg, patient, sheet, whole_run
from tablet_in_python import RunOnTablet, TabletInPython

from fieldkit.operations import devices, notices, records, runs
from fieldkit.operations.actor import HOUSE
from fieldkit.run import events
from fieldkit.store.db import db
from fieldkit.store.tables import EventRow, KeptEvent, PendingEvent, Receipt, RecordRow, SignatureRow
from fieldkit.trust import receipts

#: tables that sync writes, and the columns that hold the server's own time
TABLES = ("runs", "chains", "events", "pending", "kept", "run_pictures", "signatures", "records", "notices", "receipts")
TIMES = {"received", "time", "since", "jws"}


def tables(app, without=()):
    """Every row of what sync writes, the server's own times (and the receipts' signatures over them) left out."""
    with app.app_context():
        made = {}
        for name in TABLES:
            if name in without:
                continue
            rows = db.session.execute(text(f"SELECT * FROM {name}")).mappings()
            made[name] = sorted(sorted((k, str(v)) for k, v in row.items() if k not in TIMES) for row in rows)
        db.session.remove()
        return made


def batches(texts, size=3):
    return [texts[i : i + size] for i in range(0, len(texts), size)]


@pytest.fixture
def run(tablet, sheet_sha):
    return whole_run(tablet, sheet_sha)


def test_a_clean_upload_is_received_with_a_receipt_for_its_head(app, tablet, run):
    answer = tablet.send(run, run.texts).get_json()
    assert answer["have"] == len(run.texts) - 1 and answer["kept"] == []
    found = receipts.verify(answer["receipt"], held(app).receipt.public_key())
    assert (found["seq"], found["head"], found["run"]) == (len(run.texts) - 1, run.head, run.run)


def test_the_bytes_are_kept_as_the_tablet_made_them(app, tablet, sheet_sha):
    run = RunOnTablet(tablet, "260731-B2-2SPACE", sheet_sha)
    run.start()
    # key order, blanks, an escaped and a plain letter: none of it may be written anew
    odd = run.make("remarked", {"text": "\u00b5A \U0001f50c caf\u00e9", "step": "note"}).replace(": ", " :  ", 3)
    run.texts.append(odd)
    run.remark()
    assert tablet.send(run, run.texts).get_json()["have"] == 2
    with app.app_context():
        assert [raw.decode() for raw in runs.raw_events(run.run)] == run.texts


def test_a_lost_reply_is_no_duplicate_and_replayed_batches_change_nothing(app, tmp_path, tablet, run):
    """The server commits, the reply is lost, every batch is sent again three times in any order."""
    for part in batches(run.texts):
        tablet.send(run, part)  # the reply is not looked at: it was lost
    clean = tables(app)
    assert len(clean["events"]) == len(run.texts) and len(clean["receipts"]) == len(batches(run.texts))
    again = batches(run.texts) * 3
    random.Random(7).shuffle(again)
    for part in again:
        answer = tablet.send(run, part)
        assert answer.status_code == 200 and answer.get_json()["have"] == len(run.texts) - 1
    assert tables(app) == clean


@pytest.mark.parametrize("seed", range(6))
def test_batches_that_first_arrive_in_any_order_end_in_the_same_tables(app, tablet, run, seed):
    """Receipts apart: one is given for each head that was reached, so their number depends on the order."""
    tablet.send(run, run.texts)
    with app.app_context():
        last = db.session.scalar(select(Receipt.head).order_by(Receipt.seq.desc()))
        db.session.remove()
    clean = tables(app, without=("receipts",))
    other = TabletInPython(app.test_client(), device=tablet.device)
    other.key, other.people, other.certificates = tablet.key, tablet.people, tablet.certificates
    # the same run once more under another name, so that both can be compared in one database
    twin = whole_run(other, run.sheet, "260731-B2-1WXYZ")
    parts = batches(twin.texts, 2) * 2
    random.Random(seed).shuffle(parts)
    for part in parts:
        assert tablet.send(twin, part).status_code == 200
    both = tables(app, without=("receipts",))
    for name, rows in clean.items():
        assert len(both[name]) == 2 * len(rows), name
    assert both["pending"] == []
    with app.app_context():
        got = list(db.session.scalars(select(EventRow.sha256).where(EventRow.run == twin.run).order_by(EventRow.seq)))
        assert got == [events.digest(t.encode()) for t in twin.texts]
        receipt = db.session.scalar(select(Receipt).where(Receipt.run == twin.run).order_by(Receipt.seq.desc()))
        assert receipt.head == twin.head and last == run.head
        assert db.session.get(RecordRow, twin.run).state == "waiting"


def test_no_receipt_speaks_of_what_was_not_committed(app, tablet, run, monkeypatch):
    """The commit fails: no receipt is made, nothing is there, and the same batch is taken afterwards."""
    from fieldkit.operations import records as module

    def fail(_session, _run):
        raise RuntimeError("the disk is full")

    monkeypatch.setattr(module, "settle", fail)
    with pytest.raises(RuntimeError):
        tablet.send(run, run.texts)
    monkeypatch.undo()
    assert tables(app)["events"] == [] and tables(app)["receipts"] == []
    assert tablet.send(run, run.texts).get_json()["have"] == len(run.texts) - 1


def test_a_gap_waits_and_is_closed(app, tablet, run):
    answer = tablet.send(run, run.texts[4:]).get_json()
    assert answer["have"] == -1 and answer["receipt"] is None and answer["kept"] == []
    assert len(tables(app)["pending"]) == len(run.texts) - 4
    assert tablet.send(run, run.texts[:4]).get_json()["have"] == len(run.texts) - 1
    assert tables(app)["pending"] == []


def test_the_same_place_with_other_content_is_kept_and_told_and_the_first_stays(app, tablet, run):
    tablet.send(run, run.texts)
    forged = run.texts[3].replace("nothing odd", "something odd")
    answer = tablet.send(run, [forged])
    assert answer.status_code == 409
    assert answer.get_json()["refused"]["code"] == "forked-chain" and answer.get_json()["have"] == len(run.texts) - 1
    tablet.send(run, [forged])  # again: kept once
    with app.app_context():
        kept = list(db.session.scalars(select(KeptEvent)))
        assert [k.data.decode() for k in kept] == [forged]
        assert [n.code for n in notices.latest()] == ["forked-chain"]
        assert runs.raw_events(run.run)[3].decode() == run.texts[3]
        assert runs.load(run.run).alarm == "forked-chain"


def test_two_contents_for_one_place_that_waits_are_both_kept(app, tablet, run):
    tablet.send(run, [run.texts[5]])
    forged = run.texts[5].replace("nothing odd", "something odd")
    assert tablet.send(run, [forged]).status_code == 409
    assert tablet.send(run, run.texts).get_json()["have"] == len(run.texts) - 1
    with app.app_context():
        assert [k.data.decode() for k in db.session.scalars(select(KeptEvent))] == [forged]


def test_a_changed_event_breaks_the_chain_after_it_and_is_shown(app, tablet, run):
    """Changed on the tablet's disk: its own bytes hash to another name than the next one's `prev`."""
    changed = list(run.texts)
    changed[2] = changed[2].replace("nothing odd", "something odd")
    answer = tablet.send(run, changed).get_json()
    assert answer["have"] == 2 and [(k["seq"], k["code"]) for k in answer["kept"]] == [(3, "broken-chain")]
    with app.app_context():
        assert [n.code for n in notices.latest()] == ["broken-chain"]
        assert db.session.get(RecordRow, run.run) is None
        # what comes after it is not lost either
        assert len(list(db.session.scalars(select(PendingEvent)))) == len(changed) - 4


def test_an_unknown_version_is_kept_shown_and_accepted_by_a_newer_server(app, tablet, sheet_sha, monkeypatch):
    run = RunOnTablet(tablet, "260731-B2-3NEWER", sheet_sha)
    run.start()
    run.add("sniffed", {"what": "ozone"}, v=2)
    run.remark()
    answer = tablet.send(run, run.texts).get_json()
    assert answer["have"] == 0 and answer["receipt"]
    assert [(k["seq"], k["code"]) for k in answer["kept"]] == [(1, "unknown-version")]
    with app.app_context():
        assert "ozone" in runs.kept(run.run)[0].text
        db.session.remove()

    class Sniffed(events.Body):
        what: str

    monkeypatch.setitem(events.EVENTS, "sniffed", Sniffed)
    monkeypatch.setattr(events, "VERSION", 2)
    monkeypatch.setattr(events, "UPCASTS", {(kind, 1): dict for kind in events.EVENTS})
    assert tablet.send(run, run.texts).get_json()["have"] == 2
    with app.app_context():
        assert all(k.settled for k in runs.kept(run.run))


@pytest.mark.parametrize("bad", ["not json", '{"v": 1}', "\ud800", '{"seq": 1, "seq": 2}', "[" * 3000])
def test_what_cannot_be_read_is_kept_once_whatever_it_is(app, tablet, sheet_sha, bad):
    run = RunOnTablet(tablet, "260731-B2-4BAD", sheet_sha)
    run.start()
    body = json.dumps({"chain": run.chain, "events": [*run.texts, bad]}).encode()
    for _ in range(2):
        answer = tablet.call("POST", f"/api/runs/{run.run}/events", body).get_json()
        assert answer["have"] == 0 and [k["code"] for k in answer["kept"]] == ["damaged-event"]
    with app.app_context():
        assert len(runs.kept(run.run)) == 1


def test_an_event_of_another_run_or_tablet_is_kept_and_not_accepted(app, tablet, run, sheet_sha):
    stray = RunOnTablet(tablet, "260731-B2-5OTHER", sheet_sha)
    stray.start()
    answer = tablet.send(run, [run.texts[0], stray.texts[0]]).get_json()
    assert [k["code"] for k in answer["kept"]] == ["wrong-run"] and answer["have"] == 0
    thief = TabletInPython(app.test_client(), device="TABLET02")
    thief.enrol("vell", PASSWORD)
    issue(app, thief, "vell")
    answer = thief.send(run, run.texts).get_json()
    assert {k["code"] for k in answer["kept"]} == {"wrong-device"} and answer["have"] == 0
    with app.app_context():
        assert "wrong-device" in {n.code for n in notices.latest()}
        # another tablet cannot put an alarm on this one's chain
        assert runs.load(run.run).alarm == ""


def test_a_second_chain_of_the_same_run_is_kept_and_shown(app, tablet, run, sheet_sha):
    tablet.send(run, run.texts)
    again = RunOnTablet(tablet, run.run, sheet_sha, epoch="EPOCH002")
    again.start()
    answer = tablet.send(again, again.texts).get_json()
    assert answer["have"] == -1 and [k["code"] for k in answer["kept"]] == ["another-chain"]


def test_a_chain_that_does_not_stand_on_its_sheet_is_kept(tablet, sheet_sha):
    run = RunOnTablet(tablet, "260731-B2-6SHEET", sheet_sha)
    run.start(sheet="f" * 64)
    answer = tablet.send(run, run.texts).get_json()
    assert answer["have"] == -1 and [k["code"] for k in answer["kept"]] == ["broken-chain"]


def test_eight_threads_sending_the_same_and_other_runs_lose_and_double_nothing(app, tablet, sheet_sha, monkeypatch):
    """Four runs, each sent by two threads at once, batch by batch."""
    patient(app, monkeypatch)
    made = [whole_run(tablet, sheet_sha, f"260731-B2-7RUN{n}", remarks=20) for n in range(4)]
    failed = []

    def work(run):
        mine = TabletInPython(app.test_client(), device=tablet.device)
        mine.key = tablet.key
        try:
            for part in batches(run.texts, 2):
                answer = mine.send(run, part)
                if answer.status_code != 200:
                    failed.append(answer.get_json())
        except Exception as bad:
            failed.append(bad)

    threads = [threading.Thread(target=work, args=(run,)) for run in made * 2]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert failed == []
    found = tables(app)
    assert len(found["events"]) == sum(len(run.texts) for run in made)
    assert found["pending"] == [] and found["kept"] == [] and len(found["records"]) == 4


def test_a_run_waits_for_a_supervisor_once_end_signature_and_pictures_are_here(app, tablet, sheet_sha):
    picture = jpeg()
    run = RunOnTablet(tablet, "260731-B2-8PICT", sheet_sha)
    run.start()
    import hashlib

    run.pictured(hashlib.sha256(picture).hexdigest())
    run.end()
    tablet.send(run, run.texts)
    run.sign("vell")
    tablet.send(run, run.texts)
    with app.app_context():
        assert db.session.get(RecordRow, run.run) is None
        assert len(runs.load(run.run).missing) == 1
        db.session.remove()
    assert tablet.send_picture(picture).status_code == 200
    with app.app_context():
        assert db.session.get(RecordRow, run.run).state == "waiting"
        assert records.inbox(tablet.device).received[0].run == run.run


def _signature(app, run):
    with app.app_context():
        return db.session.scalar(select(SignatureRow).where(SignatureRow.run == run.run))


def test_a_signature_by_an_issued_key_holds(app, tablet, run):
    tablet.send(run, run.texts)
    found = _signature(app, run)
    assert found.holds and found.person == "vell" and found.meaning == "performed" and len(found.kid) == 64


@pytest.mark.parametrize(
    ("claims", "says"),
    [
        ({"run": "260731-B2-9OTHR"}, "signs run"),
        ({"head": "0" * 64}, "signs head"),
        ({"seq": 2}, "signs seq"),
        ({"sheet": "0" * 64}, "signs sheet"),
        ({"meaning": "witnessed"}, "signs meaning"),
        ({"person": "arkle"}, "signs person"),
        ({"time": "yesterday"}, "does not say when"),
        ({"time": "2019-01-01T00:00:00Z"}, ""),
    ],
)
def test_a_signature_over_something_else_is_recorded_with_what_disagrees(app, tablet, sheet_sha, claims, says):
    run = RunOnTablet(tablet, "260731-B2-9SIGN", sheet_sha)
    run.start()
    run.end()
    run.sign("vell", claims=claims)
    assert tablet.send(run, run.texts).get_json()["have"] == 2
    found = _signature(app, run)
    assert not found.holds and found.says and says in found.says
    with app.app_context():
        assert [n.code for n in notices.latest()] == ["signature"]


def test_a_signature_of_a_key_that_nobody_issued_does_not_hold(app, tablet, sheet_sha):
    from fieldkit.trust import keys

    run = RunOnTablet(tablet, "260731-B2-9FAKE", sheet_sha)
    run.start()
    run.end()
    tablet.people["vell"] = keys.new()
    tablet.certificates["vell"] = []
    run.sign("vell")
    tablet.send(run, run.texts)
    found = _signature(app, run)
    assert not found.holds and "no certificate" in found.says


def test_a_signature_copied_onto_another_run_does_not_hold(app, tablet, sheet_sha):
    first = whole_run(tablet, sheet_sha, "260731-B2-AONE", remarks=0)
    token = json.loads(first.texts[-1])["body"]["jws"]
    second = RunOnTablet(tablet, "260731-B2-ATWO", sheet_sha)
    second.start()
    second.end()
    second.add("signed", {"person": "vell", "meaning": "performed", "jws": token})
    tablet.send(second, second.texts)
    assert "signs run" in _signature(app, second).says


def test_a_revoked_tablets_events_are_kept_and_none_is_accepted(app, tablet, run):
    tablet.send(run, run.texts[:4])
    with app.app_context():
        devices.revoke(HOUSE, tablet.device, "left on a train")
        db.session.remove()
    answer = tablet.send(run, run.texts)
    assert answer.status_code == 403 and answer.get_json()["refused"]["code"] == "revoked-device"
    assert answer.get_json()["have"] == 3
    with app.app_context():
        kept = runs.kept(run.run)
        assert [k.seq for k in kept] == list(range(4, len(run.texts))) and {k.code for k in kept} == {"revoked-device"}
    for path in ("/api/kit", "/api/inbox", f"/api/runs/{run.run}/head?chain={run.chain}"):
        assert tablet.get(path).status_code == 403


def test_a_signature_that_arrives_after_its_key_was_revoked_is_flagged(app, tablet, run):
    from fieldkit.operations import enrol

    with app.app_context():
        enrol.revoke_key(HOUSE, enrol.keys_of("vell")[0].kid)
        db.session.remove()
    tablet.send(run, run.texts)
    found = _signature(app, run)
    assert not found.holds and "revoked" in found.says


def test_a_returned_record_waits_again_only_after_a_new_signature(app, tablet, run):
    from fieldkit.operations import moment
    from fieldkit.store.db import writing
    from fieldkit.store.tables import Return

    tablet.send(run, run.texts)
    with app.app_context(), writing() as session:
        session.get_one(RecordRow, run.run).state = "returned"
        session.add(Return(run=run.run, by="orme", reason="say more", seq=len(run.texts) - 1, time=moment.text()))
    inbox = tablet.get("/api/inbox").get_json()
    assert [(r["run"], r["reason"], r["by_name"]) for r in inbox["returned"]] == [(run.run, "say more", "K. Orme")]
    run.add("reopened", {"reason": "say more", "returned_by": "orme"})
    run.remark("a bearing of the blower is loud")
    tablet.send(run, run.texts)
    with app.app_context():
        assert db.session.get(RecordRow, run.run).state == "returned"
        db.session.remove()
    run.sign("vell")
    tablet.send(run, run.texts)
    with app.app_context():
        assert db.session.get(RecordRow, run.run).state == "waiting"


def test_a_restored_database_gives_receipts_of_its_own(app, tablet, run):
    from fieldkit.operations import settings
    from fieldkit.store.db import writing

    first = tablet.send(run, run.texts).get_json()["receipt"]
    assert tablet.send(run, run.texts[-1:]).get_json()["receipt"] == first
    with app.app_context():
        with writing() as session:
            settings.put(session, "store", "store-after-restore")
        db.session.remove()
    again = tablet.send(run, run.texts[-1:]).get_json()["receipt"]
    found = receipts.verify(again, held(app).receipt.public_key())
    assert found["store"] == "store-after-restore" and found["head"] == run.head


def test_the_state_of_a_received_run_is_its_fold(app, tablet, run):
    tablet.send(run, run.texts)
    with app.app_context():
        loaded = runs.load(run.run)
        assert loaded.state["head"] == run.head and loaded.state["run"] == run.run
        assert loaded.sheet == sheet() and len(loaded.events) == len(run.texts)
