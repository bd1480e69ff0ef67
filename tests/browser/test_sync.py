"""Sync in Chromium against the real server: lost replies, strangers on the network, restored servers, clocks that jump."""

from __future__ import annotations

import json
import shutil
from functools import partial

import pytest

pytestmark = pytest.mark.browser


def local(tablet, run):
    return [(e["seq"], e["sha256"]) for e in tablet.run(run, "events")]


def there(server, run):
    from fieldkit.run import events

    return [(seq, events.digest(raw)) for seq, raw in enumerate(server.events(run))]


def row(tablet, run):
    return next(r for r in tablet.host("open")["runs"] if r["run"] == run)


def begun(tablet, remarks=3):
    tablet.enrol()
    run = tablet.begin()
    for n in range(remarks):
        tablet.command(run, do="remarked", step="look", text=f"remark {n}")
    return run


SYNCED = """async (run) => {
  const host = await import(document.querySelector("script[type=module]").src.replace("main.js", "host.js"));
  return (await host.open()).runs.find((r) => r.run === run).synced;
}"""


def quiet(tablet):
    """All that was recorded so far is there."""
    assert tablet.sync()["state"] == "received"


def test_received_is_said_only_after_a_receipt_for_the_very_same_bytes(tablet, server):
    run = begun(tablet)
    said = tablet.sync()
    assert said["state"] == "received" and said["oldestUnsynced"] is None
    assert there(server, run) == local(tablet, run)
    assert row(tablet, run)["synced"] is True
    # nothing was deleted by it
    assert len(local(tablet, run)) == 5


def test_a_lost_reply_makes_no_duplicate_and_no_false_received(tablet, server):
    run = begun(tablet)
    quiet(tablet)
    lost = []

    def commit_and_drop(route):
        lost.append(route.fetch().status)
        route.abort("connectionreset")

    tablet.context.route("**/api/runs/*/events", commit_and_drop)
    tablet.command(run, do="remarked", step="look", text="the reply to this is lost")
    said = tablet.sync()
    assert lost and lost[0] == 200
    assert said["state"] == "unreachable"
    assert row(tablet, run)["synced"] is False
    assert there(server, run) == local(tablet, run)
    tablet.context.unroute_all()
    assert tablet.sync()["state"] == "received"
    assert there(server, run) == local(tablet, run)
    assert row(tablet, run)["synced"] is True


STRANGERS = {
    "a sign-in page with status 200": {
        "status": 200,
        "content_type": "text/html",
        "body": "<h1>Welcome, please sign in</h1>",
    },
    "a redirect": {"status": 302, "headers": {"Location": "/signin"}},
    "JSON without our mark": {
        "status": 200,
        "content_type": "application/json",
        "body": '{"receipt": "x", "have": 99}',
    },
    "a proxy that wants to be paid": {"status": 407, "content_type": "text/html", "body": "pay"},
    "a network that wants a sign-in": {"status": 511, "content_type": "text/html", "body": "sign in"},
    "our JSON cut off": {
        "status": 200,
        "headers": {"X-Fieldkit": "1", "Content-Type": "application/json"},
        "body": '{"nonce": "',
    },
    "trouble of the server": {"status": 502, "content_type": "text/html", "body": "bad gateway"},
}


@pytest.mark.parametrize("what", STRANGERS)
def test_on_the_line_is_not_success(tablet, server, what):
    run = begun(tablet, remarks=1)
    quiet(tablet)
    before = row(tablet, run)["acked"]
    # the stranger is there before the event: the loop sends by itself soon after one
    tablet.context.route("**/api/**", lambda route: route.fulfill(**STRANGERS[what]))
    tablet.command(run, do="remarked", step="look", text="not there yet")
    said = tablet.sync()
    assert tablet.page.evaluate("() => navigator.onLine") is True
    assert said["state"] == "unreachable", said
    assert said["oldestUnsynced"] is not None
    assert row(tablet, run)["acked"] == before
    tablet.context.unroute_all()
    assert tablet.sync()["state"] == "received"
    assert there(server, run) == local(tablet, run)


def fulfil(how, route, request):
    route.fulfill(**how)


def test_a_receipt_by_another_key_or_for_other_bytes_moves_nothing(tablet, server):
    from cryptography.hazmat.primitives.asymmetric import ec

    from fieldkit.trust import receipts

    run = begun(tablet)
    quiet(tablet)
    acked = row(tablet, run)["acked"]
    answer = {}
    # what answers is there before the event: the loop sends by itself soon after one
    tablet.context.route(
        "**/api/runs/*/events", lambda route: route.fulfill(**answer) if answer else route.abort("connectionreset")
    )
    tablet.command(run, do="remarked", step="look", text="one more")
    chain = tablet.run(run, "state")["chain"]
    mine = local(tablet, run)
    with server.inside():
        from fieldkit.operations import settings
        from fieldkit.web.app import here

        store, right = settings.store_id(), here().receipt
    stranger = ec.generate_private_key(ec.SECP256R1())
    seq, head = mine[-1]
    good = {"store": store, "run": run, "chain": chain, "seq": seq, "head": head, "time": "2026-07-31T14:00:00Z"}
    bad = [
        (stranger, good),
        (right, {**good, "run": "another"}),
        (right, {**good, "chain": "another.chain"}),
        (right, {**good, "store": "another"}),
        (right, {**good, "head": "0" * 64}),
        (right, {**good, "seq": seq + 1}),
        (right, {**good, "seq": 0}),
    ]
    for key, claims in bad:
        forged = {"receipt": receipts.make(key, **claims), "have": seq, "kept": []}
        answer.update(
            status=200,
            headers={"X-Fieldkit": "1", "Content-Type": "application/json"},
            body=json.dumps(forged),
        )
        said = tablet.sync()
        assert said["state"] == "refused", claims
        assert row(tablet, run)["acked"] == acked, claims
    tablet.context.unroute_all()
    assert tablet.sync()["state"] == "received"


def test_batches_are_halved_until_they_pass_and_the_chain_arrives_whole(tablet, server):
    run = begun(tablet, remarks=20)
    sizes = []

    def narrow(route):
        size = len(route.request.post_data_buffer or b"")
        sizes.append(size)
        if size > 3_000:
            route.fulfill(status=413, content_type="text/html", body="too large")
        else:
            route.continue_()

    tablet.context.route("**/api/runs/*/events", narrow)
    for n in range(20):
        tablet.command(run, do="remarked", step="look", text=f"remark {n} " + "x" * 300)
    said = tablet.sync()
    assert said["state"] == "received"
    assert max(sizes) > 3_000 and min(sizes) <= 3_000
    assert there(server, run) == local(tablet, run)


def test_a_server_restored_from_an_older_copy_gets_the_rest_again(tablet, server, tmp_path):
    run = begun(tablet)
    quiet(tablet)
    server.stop()
    shutil.copytree(server.folder, tmp_path / "copy")
    server.start()
    tablet.command(run, do="remarked", step="look", text="after the copy")
    assert tablet.sync()["state"] == "received"
    whole = there(server, run)
    server.stop()
    shutil.rmtree(server.folder)
    shutil.copytree(tmp_path / "copy", server.folder)
    server.start()
    assert len(there(server, run)) == len(whole) - 1
    tablet.command(run, do="remarked", step="look", text="after the restore")
    assert tablet.sync()["state"] == "received"
    assert there(server, run) == local(tablet, run)


def test_what_the_server_keeps_but_cannot_accept_is_shown_and_stays(tablet, server):
    run = begun(tablet, remarks=1)
    quiet(tablet)

    def spoil(route):
        sent = json.loads(route.request.post_data)
        sent["events"] = [text.replace("two hands", "two hAnds") for text in sent["events"]]
        # the tablet signed what it made; a stranger in between cannot change it unseen
        route.continue_(post_data=json.dumps(sent))

    tablet.context.route("**/api/runs/*/events", spoil)
    tablet.command(run, do="remarked", step="look", text="with two hands")
    said = tablet.sync()
    assert said["state"] == "refused" and row(tablet, run)["synced"] is False
    assert row(tablet, run)["trouble"]["says"]
    tablet.context.unroute_all()
    assert tablet.sync()["state"] == "received"
    assert row(tablet, run)["trouble"] is None


def test_a_revoked_tablet_keeps_everything_and_says_why(tablet, server):
    run = begun(tablet, remarks=1)
    quiet(tablet)
    with server.inside():
        from fieldkit.operations import devices
        from fieldkit.operations.actor import HOUSE

        devices.revoke(HOUSE, tablet.host("open")["device"]["device"], "left on a train")
    tablet.command(run, do="remarked", step="look", text="recorded all the same")
    said = tablet.sync()
    assert said["state"] == "refused" and "put out of use" in said["says"]
    assert len(local(tablet, run)) == 4 and row(tablet, run)["synced"] is False


def test_pictures_travel_by_hash_and_count_when_their_receipt_holds(tablet, server):
    from test_storage import take_picture

    run = begun(tablet, remarks=0)
    tablet.command(run, do="confirmed", step="look")
    tablet.command(run, do="read", step="volts", text="6.30", unit="V")
    picture = take_picture(tablet, run)
    names = ("sha256", "media", "width", "height", "size")
    tablet.command(run, do="pictured", step="photo", **{name: picture[name] for name in names}, note="")
    said = tablet.sync()
    assert said["state"] == "received", said
    with server.inside():
        from fieldkit.store.db import db
        from fieldkit.store.tables import Picture

        kept = db.session.get(Picture, picture["sha256"])
        assert kept is not None and len(kept.original) == picture["size"]


def test_sync_goes_on_by_itself_when_the_server_is_back(tablet, server):
    run = begun(tablet, remarks=1)
    server.stop()
    tablet.command(run, do="remarked", step="look", text="alone")
    tablet.page.wait_for_timeout(3000)
    assert row(tablet, run)["synced"] is False
    server.start()
    tablet.page.evaluate("() => window.dispatchEvent(new Event('online'))")
    tablet.until(SYNCED, run)
    assert there(server, run) == local(tablet, run)


def test_a_wrong_server_is_not_taken_for_ours(tablet, server, station_folder, tmp_path):
    run = begun(tablet, remarks=1)
    quiet(tablet)
    server.stop()
    import subprocess
    import sys

    from driving import HERE, ROOT

    shutil.rmtree(server.folder)
    server.folder.mkdir()
    env = {"PYTHONPATH": str(ROOT)}
    subprocess.run([sys.executable, str(HERE / "small_station.py"), "build", str(server.folder)], check=True, env=env)
    server.start()
    tablet.command(run, do="remarked", step="look", text="for the first server only")
    said = tablet.sync()
    assert said["state"] == "refused" and row(tablet, run)["synced"] is False
    assert server.events(run) == []


def test_what_the_desk_returned_stays_readable_without_the_server(tablet, server):
    run = begun(tablet, remarks=1)
    quiet(tablet)
    returned = {
        "run": run,
        "reason": "Reading 2 is not in the log.",
        "by": "quill",
        "by_name": "S. Quill",
        "time": "2026-07-31T15:00:00Z",
    }
    answer = {"returned": [returned], "received": [], "countersigned": []}
    headers = {"X-Fieldkit": "1", "Content-Type": "application/json"}
    tablet.context.route(
        "**/api/inbox", partial(fulfil, {"status": 200, "headers": headers, "body": json.dumps(answer)})
    )
    tablet.sync()
    tablet.context.unroute_all()
    server.stop()
    tablet.reopen_page()
    assert [(r["run"], r["reason"], r["by_name"]) for r in tablet.host("inbox")] == [
        (run, returned["reason"], "S. Quill")
    ]


def test_a_page_that_is_too_old_sends_but_begins_nothing(tablet, server):
    from driving import Refused

    run = begun(tablet, remarks=1)
    with server.inside():
        from fieldkit.operations import settings
        from fieldkit.store.db import writing

        with writing() as session:
            settings.put(session, "min_app", "99.0")
    tablet.host("fetchKit")
    with pytest.raises(Refused, match="app-too-old"):
        tablet.begin("B1", "T-01")
    tablet.command(run, do="remarked", step="look", text="goes on")
    assert tablet.sync()["state"] == "received"
    assert there(server, run) == local(tablet, run)


def test_a_run_begins_only_in_the_installed_app_where_a_tab_forgets(tablet, server):
    from driving import Refused

    tablet.close()
    tablet.launch("Object.defineProperty(Navigator.prototype, 'standalone', { get: () => false });")
    tablet.open()
    tablet.enrol()
    with pytest.raises(Refused, match="not-installed"):
        tablet.begin()


def test_a_cabinet_with_an_open_run_gets_no_second_one(tablet, server):
    from driving import Refused

    first = begun(tablet, remarks=0)
    with pytest.raises(Refused, match="cabinet-has-run"):
        tablet.begin()
    tablet.begin("B1", "T-01")
    states = {"heater": "on", "beam_supply": "off"}
    tablet.command(first, do="ended", outcome="stopped", reason="enough", states=states, locks=[], earths=[])
    assert tablet.begin() != first


# ---- people and clocks ----------------------------------------------------------------------------------------------


def test_an_enrolment_waits_for_its_certificate_and_nobody_signs_before(tablet, server):
    import small_station
    from driving import PASS, Refused

    made = {"login": "vell", "password": small_station.PASSWORD, "tabletName": "tablet 3", "passphrase": PASS["vell"]}
    with pytest.raises(Refused, match="weak-passphrase"):
        tablet.host("enrol", {**made, "passphrase": "123456"})
    with pytest.raises(Refused, match="wrong-password"):
        tablet.host("enrol", {**made, "password": "not it at all"})
    assert tablet.host("enrol", made)["status"] == "waiting"
    assert [one["status"] for one in tablet.host("enrolStatus")] == ["waiting"]
    with pytest.raises(Refused, match="waiting-device"):
        tablet.host("fetchKit")
    server.issue()
    assert [one["status"] for one in tablet.host("enrolStatus")] == ["issued"]
    tablet.host("fetchKit")
    assert [p["id"] for p in tablet.host("open")["people"] if p["enrolledHere"]] == ["vell"]


def test_a_wrong_passphrase_says_so_slows_down_and_locks_nobody_out(tablet, server):
    from driving import PASS, Refused

    tablet.enrol("vell")
    tablet.page.clock.install()
    tablet.reopen_page()
    tablet.page.clock.pause_at(tablet.page.evaluate("() => Date.now() / 1000") + 1)
    with pytest.raises(Refused) as first:
        tablet.host("unlockPerson", "vell", "not this one at all")
    assert first.value.code == "wrong-passphrase" and first.value.wait_s == 1
    with pytest.raises(Refused) as second:
        tablet.host("unlockPerson", "vell", PASS["vell"])
    assert second.value.code == "too-soon" and second.value.wait_s == 1
    tablet.page.clock.run_for(1100)
    assert tablet.host("unlockPerson", "vell", PASS["vell"]) is True


def test_the_server_finds_every_signature_of_the_run_good(tablet, server):
    from driving import PASS

    run = begun(tablet, remarks=0)
    tablet.command(run, do="confirmed", step="look")
    tablet.command(run, do="read", step="volts", text="6.30", unit="V")
    signed = tablet.run(
        run, "sign", {"person": "vell", "passphrase": PASS["vell"], "meaning": "performed", "statement": "So far."}
    )
    assert signed["state"]["signatures"][-1]["person"] == "vell"
    assert tablet.sync()["state"] == "received"
    with server.inside():
        from sqlalchemy import select

        from fieldkit.store.db import db
        from fieldkit.store.tables import SignatureRow

        rows = list(db.session.scalars(select(SignatureRow).where(SignatureRow.run == run)))
        assert [(r.person, r.meaning, r.holds) for r in rows] == [("vell", "performed", True)], [r.says for r in rows]


#: more than so many events are stored
RECORDED = """async ([run, before]) => {
  const host = await import(document.querySelector("script[type=module]").src.replace("main.js", "host.js"));
  return (await host.openRun(run)).events.length > before;
}"""


@pytest.mark.parametrize(
    ("lever", "kinds"),
    [
        (lambda clock: clock.fast_forward("10:00"), ["resumed"]),
        (lambda clock: clock.fast_forward("01:00"), []),
    ],
)
def test_sleep_is_told_from_a_short_absence(tablet, server, lever, kinds):
    tablet.enrol()
    tablet.page.clock.install()
    tablet.reopen_page()
    run = tablet.begin()
    before = len(local(tablet, run))
    lever(tablet.page.clock)
    tablet.page.clock.run_for(11_000)
    if kinds:
        tablet.until(RECORDED, [run, before])
    else:
        tablet.page.wait_for_timeout(500)
    assert [e["kind"] for e in tablet.run(run, "events")][before:] == kinds


@pytest.mark.parametrize("hours", [-1, 1])
def test_a_clock_that_somebody_sets_is_an_event_and_order_stays_by_number(tablet, server, hours):
    tablet.enrol()
    tablet.page.clock.install()
    tablet.reopen_page()
    run = tablet.begin()
    before = len(local(tablet, run))
    now = tablet.page.evaluate("() => Date.now() / 1000")
    tablet.page.clock.set_system_time(now + hours * 3600)
    tablet.page.clock.run_for(11_000)
    tablet.until(RECORDED, [run, before])
    happened = tablet.run(run, "events")[before:]
    assert [e["kind"] for e in happened] == ["clock-changed"]
    parted = float(happened[0]["body"]["wall_s"]) - float(happened[0]["body"]["mono_s"])
    assert abs(parted - hours * 3600) < 30
    tablet.command(run, do="remarked", step="look", text="afterwards")
    assert [seq for seq, _ in local(tablet, run)] == list(range(before + 2))
