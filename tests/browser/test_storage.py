"""What happens to what a run recorded when the browser, its storage or a second window misbehave; in Chromium, for real."""

from __future__ import annotations

import json
import os
import random
from pathlib import Path

import pytest

pytestmark = pytest.mark.browser

#: runs before the page's own scripts: every writing transaction and everything that is stored is looked at
SPY = """
window.spied = { durability: [], blobs: 0 };
const transaction = IDBDatabase.prototype.transaction;
IDBDatabase.prototype.transaction = function (stores, mode, how) {
  if (mode === "readwrite") window.spied.durability.push(how && how.durability);
  return transaction.call(this, stores, mode, how);
};
const isBlob = (value, depth = 0) => value instanceof Blob || (value !== null && typeof value === "object" && depth < 6
  && !(value instanceof ArrayBuffer) && Object.values(value).some((v) => isBlob(v, depth + 1)));
for (const name of ["put", "add"]) {
  const real = IDBObjectStore.prototype[name];
  IDBObjectStore.prototype[name] = function (value, ...more) {
    if (isBlob(value)) window.spied.blobs += 1;
    return real.call(this, value, ...more);
  };
}
"""


def texts(tablet, run):
    """The run's events as the tablet has them: (seq, kind, sha256)."""
    return [(e["seq"], e["kind"], e["sha256"]) for e in tablet.run(run, "events")]


#: whether the second copy has so many events of the one run; it follows the database, which does not wait for it
MIRRORED = """async (count) => {
  try {
    const root = await (await navigator.storage.getDirectory()).getDirectoryHandle("fieldkit");
    for await (const [, file] of await root.getDirectoryHandle("heads")) return JSON.parse(await (await file.getFile()).text()).seq + 1 >= count;
  } catch { /* not there yet, or just being written */ }
  return false;
}"""


def take_picture(tablet, run, width=2400, height=1200):
    return tablet.page.evaluate(
        """async ([run, width, height]) => {
          const host = await import(document.querySelector("script[type=module]").src.replace("main.js", "host.js"));
          const canvas = new OffscreenCanvas(width, height);
          const pen = canvas.getContext("2d");
          for (let i = 0; i < 4000; i += 1) { pen.fillStyle = `hsl(${i * 7} 80% 50%)`; pen.fillRect((i * 37) % width, (i * 91) % height, 40, 40); }
          const open = await host.openRun(run);
          const made = await open.picture(await canvas.convertToBlob({ type: "image/png" }));
          const back = await open.pictureBytes(made.sha256);
          const name = [...new Uint8Array(await crypto.subtle.digest("SHA-256", back))].map((b) => b.toString(16).padStart(2, "0")).join("");
          return { ...made, same: name === made.sha256 };
        }""",
        [run, width, height],
    )


def test_fifty_readings_survive_a_killed_browser_and_every_write_was_strict(tablet):
    tablet.close()
    tablet.launch(SPY)
    tablet.open()
    tablet.enrol()
    run = tablet.begin()
    tablet.command(run, do="confirmed", step="look")
    for n in range(50):
        tablet.command(run, do="remarked", step="volts", text=f"remark {n}")
    before = texts(tablet, run)
    spied = tablet.page.evaluate("() => window.spied")
    assert set(spied["durability"]) == {"strict"} and len(spied["durability"]) > 50
    assert spied["blobs"] == 0
    tablet.kill()
    tablet.reopen()
    after = texts(tablet, run)
    assert after[: len(before)] == before
    assert len([1 for _, kind, _ in after if kind == "remarked"]) == 50
    assert [kind for _, kind, _ in after[len(before) :]] == ["resumed"]


def test_a_draft_and_a_picture_survive_a_killed_browser(tablet):
    tablet.enrol()
    run = tablet.begin()
    tablet.run(run, "saveDraft", "volts", {"text": "6.3"})
    picture = take_picture(tablet, run)
    assert (
        picture["same"] and picture["width"] == 1600 and picture["height"] == 800 and picture["media"] == "image/jpeg"
    )
    tablet.kill()
    tablet.reopen()
    assert tablet.run(run, "draft", "volts") == {"text": "6.3"}
    tablet.run(run, "saveDraft", "volts", None)
    assert tablet.run(run, "draft", "volts") is None
    back = tablet.page.evaluate(
        """async ([run, sha]) => {
          const host = await import(document.querySelector("script[type=module]").src.replace("main.js", "host.js"));
          return (await (await host.openRun(run)).pictureBytes(sha)).length;
        }""",
        [run, picture["sha256"]],
    )
    assert back == picture["size"]


def with_little_room(tablet, server, room):
    """A fresh browser on the same profile with `room` bytes left. Chromium asks for the quota once in a while only,
    so it has to be set before the first write. The app files are aboard by then, or they would take of the room."""
    tablet.close()
    tablet.launch()
    cdp = tablet.context.new_cdp_session(tablet.page)
    usage = cdp.send("Storage.getUsageAndQuota", {"origin": server.url})["usage"]
    cdp.send("Storage.overrideQuotaForOrigin", {"origin": server.url, "quotaSize": int(usage) + room})
    tablet.open()
    return cdp


def test_a_full_tablet_says_not_saved_and_keeps_the_chain(tablet, server):
    tablet.ready()
    tablet.enrol()
    run = tablet.begin()
    cdp = with_little_room(tablet, server, 1_000_000)
    before = texts(tablet, run)
    refused = tablet.refused(run, do="remarked", step="look", text=os.urandom(1_000_000).hex())
    assert refused["code"] == "storage-full" and refused["says"].startswith("NOT SAVED")
    assert texts(tablet, run) == before
    tablet.command(run, do="remarked", step="look", text="a short one still fits")
    cdp.detach()
    tablet.reopen_page()
    assert texts(tablet, run)[: len(before)] == before
    assert tablet.run(run, "readonly") is False


def test_the_start_of_a_run_asks_to_keep_storage_and_measures_that_bytes_stay(tablet, server):
    tablet.enrol()
    cdp = tablet.context.new_cdp_session(tablet.page)
    cdp.send("Browser.grantPermissions", {"permissions": ["durableStorage"], "origin": server.url})
    health = tablet.run(tablet.begin("B2", "T-02"), "state")["started"]["tablet"]
    assert health["persisted"] is True and "8 MB written and read back" in health["probe"]


def test_the_start_of_a_run_finds_that_storage_is_nearly_full(tablet, server):
    tablet.ready()
    tablet.enrol()
    with_little_room(tablet, server, 3_000_000)
    health = tablet.run(tablet.begin("B1", "T-01"), "state")["started"]["tablet"]
    assert health["persisted"] is False
    assert health["probe"] == "failed: storage-full"


def test_an_emptied_database_is_noticed_and_restored_from_the_second_copy(tablet, server):
    tablet.enrol()
    run = tablet.begin()
    tablet.command(run, do="confirmed", step="look")
    for n in range(18):
        tablet.command(run, do="remarked", step="volts", text=f"remark {n}")
    before = texts(tablet, run)
    tablet.until(MIRRORED, len(before))
    tablet.close()
    server.stop()
    folders = [p for p in (tablet.profile / "Default" / "IndexedDB").rglob("*.leveldb") if p.is_dir()]
    assert folders
    for file in [f for folder in folders for f in folder.iterdir() if f.is_file()]:
        # by its name, so that every run of this test finds the same damage
        file.write_bytes(random.Random(file.name).randbytes(max(64, file.stat().st_size)))
    tablet.launch()
    tablet.open()
    opened = tablet.host("open")
    assert opened["health"]["storage"] == "damaged"
    assert "emptied by the browser or damaged" in opened["health"]["says"][0]
    assert opened["enrolled"] is False
    assert [r["run"] for r in opened["runs"]] == [run]
    assert opened["kit"]["procedures"][0]["procedure"] == "short-look"
    after = texts(tablet, run)
    assert after[: len(before)] == before
    assert [kind for _, kind, _ in after[len(before) :]] == ["resumed", "storage-found"]
    found = tablet.run(run, "events")[-1]["body"]
    assert found["lost"] == 0 and found["restored"] == len(before)
    # work can go on; nobody can sign until enrolled again
    tablet.command(run, do="remarked", step="volts", text="goes on")
    server.start()
    tablet.enrol()
    tablet.reopen_page()
    opened = tablet.host("open")
    assert opened["health"]["storage"] == "ok" and opened["enrolled"] is True
    assert len(texts(tablet, run)) == len(before) + 4


def test_a_second_copy_that_is_short_too_is_said_and_the_run_is_closed_to_writing(tablet, server):
    tablet.enrol()
    run = tablet.begin()
    for n in range(5):
        tablet.command(run, do="remarked", step="look", text=f"remark {n}")
    tablet.until(MIRRORED, len(texts(tablet, run)))
    spoil = """async (run) => {
      const root = await (await navigator.storage.getDirectory()).getDirectoryHandle("fieldkit");
      const runs = await root.getDirectoryHandle("runs");
      for await (const [name, file] of runs) {
        const lines = (await (await file.getFile()).text()).split("\\n");
        const out = await file.createWritable();
        await out.write(lines.slice(0, 4).join("\\n") + "\\n");
        await out.close();
      }
    }"""
    tablet.page.evaluate(spoil, run)
    drop = """async () => {
      const db = await new Promise((go) => { const r = indexedDB.open("fieldkit"); r.onsuccess = () => go(r.result); });
      const tx = db.transaction(["events", "runs", "meta"], "readwrite");
      for (const name of ["events", "runs", "meta"]) tx.objectStore(name).clear();
      await new Promise((go) => { tx.oncomplete = go; });
      db.close();
    }"""
    tablet.page.goto(server.url + "/version.json")
    tablet.page.evaluate(drop)
    tablet.open()
    opened = tablet.host("open")
    assert opened["health"]["storage"] == "lost"
    assert any("the last 3 event(s) are lost on this tablet" in says for says in opened["health"]["says"])
    assert tablet.run(run, "readonly") is True
    refused = tablet.refused(run, do="remarked", step="look", text="no")
    assert refused["code"] == "read-only" and "Begin a new run" in refused["says"]
    assert len(texts(tablet, run)) == 4


def test_a_cleared_origin_never_looks_like_no_runs(tablet, server):
    tablet.enrol()
    tablet.begin()
    tablet.page.goto(server.url + "/version.json")
    cdp = tablet.context.new_cdp_session(tablet.page)
    cdp.send("Storage.clearDataForOrigin", {"origin": server.url, "storageTypes": "all"})
    tablet.open()
    opened = tablet.host("open")
    assert opened["enrolled"] is False and opened["runs"] == []
    assert any("the browser has removed everything" in says for says in opened["health"]["says"])
    assert tablet.page.evaluate("() => document.cookie") == ""


def test_a_browser_without_a_second_copy_says_so_and_records_all_the_same(tablet):
    tablet.close()
    tablet.launch(
        "Object.defineProperty(StorageManager.prototype, 'getDirectory', { value: () => Promise.reject(new Error('none')) });"
    )
    tablet.open()
    # the worker that makes the copy is a page of its own; there it is the file system that is missing
    tablet.context.route(
        "**/tablet/opfsworker.js",
        lambda route: route.fulfill(status=200, content_type="text/javascript", body="throw new Error('none')"),
    )
    tablet.page.reload()
    health = tablet.host("open")["health"]
    assert any("keeps no second copy" in says for says in health["says"])
    tablet.enrol()
    run = tablet.begin()
    tablet.command(run, do="remarked", step="look", text="kept")
    assert len(texts(tablet, run)) == 3


def test_the_second_copy_needs_no_createwritable(tablet):
    tablet.close()
    tablet.launch("delete FileSystemFileHandle.prototype.createWritable;")
    tablet.open()
    tablet.enrol()
    run = tablet.begin()
    tablet.until(MIRRORED, 2)
    lines = tablet.page.evaluate(
        """async () => {
          const root = await (await navigator.storage.getDirectory()).getDirectoryHandle("fieldkit");
          const out = [];
          for await (const [, file] of await root.getDirectoryHandle("runs")) out.push(await (await file.getFile()).text());
          return out;
        }"""
    )
    assert [json.loads(line)["kind"] for line in lines[0].splitlines()] == ["run-started", "states-declared"]
    assert json.loads(lines[0].splitlines()[0])["run"] == run


def test_a_second_window_reads_along_and_takes_over(tablet):
    tablet.enrol()
    run = tablet.begin()
    other = tablet.tab()
    assert other.run(run, "readonly") is True
    assert "another window" in other.run(run, "says")
    assert other.refused(run, do="remarked", step="look", text="no")["code"] == "read-only"
    tablet.command(run, do="remarked", step="look", text="from the first")
    tablet.run(run, "close")
    other.until(
        """async (run) => {
          const host = await import(document.querySelector("script[type=module]").src.replace("main.js", "host.js"));
          return !(await host.openRun(run)).readonly;
        }""",
        run,
    )
    other.command(run, do="remarked", step="look", text="from the second")
    kinds = [kind for _, kind, _ in texts(other, run)]
    assert kinds == ["run-started", "states-declared", "remarked", "resumed", "remarked"]


def test_a_run_that_is_left_and_opened_again_at_once_is_still_this_windows(tablet):
    tablet.enrol()
    run = tablet.begin()
    answer = tablet.page.evaluate(
        """async (run) => {
          const host = await import(document.querySelector("script[type=module]").src.replace("main.js", "host.js"));
          const [a, b] = await Promise.all([host.openRun(run), host.openRun(run)]);
          const same = a === b;
          a.close();
          const again = await host.openRun(run);
          const made = await again.command({ do: "remarked", step: "look", text: "back" });
          return [same, again === a, again.readonly, made.ok];
        }""",
        run,
    )
    assert answer == [True, False, False, True]
    assert [kind for _, kind, _ in texts(tablet, run)] == ["run-started", "states-declared", "remarked"]


def test_of_two_windows_only_the_one_that_holds_the_run_writes(tablet):
    tablet.enrol()
    run = tablet.begin()
    other = tablet.tab()
    write = """async ([run, who]) => {
      const host = await import(document.querySelector("script[type=module]").src.replace("main.js", "host.js"));
      const open = await host.openRun(run);
      let saved = 0;
      for (let n = 0; n < 30; n += 1) if ((await open.command({ do: "remarked", step: "look", text: `${who} ${n}` })).ok) saved += 1;
      window.saved = saved;
    }"""
    for who in (tablet, other):
        who.page.evaluate("() => { window.saved = null; }")
    tablet.page.evaluate(write, [run, "first"])
    other.page.evaluate(write, [run, "second"])
    assert tablet.page.evaluate("() => window.saved") == 30
    assert other.page.evaluate("() => window.saved") == 0
    assert len(texts(tablet, run)) == 32


def test_a_database_that_will_not_open_leads_to_words_and_is_never_deleted(tablet):
    tablet.enrol()
    tablet.begin()
    tablet.kill()
    tablet.launch(
        """window.deleted = 0;
        IDBFactory.prototype.deleteDatabase = function () { window.deleted += 1; };
        const open = IDBFactory.prototype.open;
        window.broken = true;
        IDBFactory.prototype.open = function (...how) {
          if (!window.broken) return open.apply(this, how);
          const request = { error: new DOMException("Internal error opening backing store", "UnknownError") };
          setTimeout(() => request.onerror && request.onerror(), 0);
          return request;
        };"""
    )
    tablet.open()
    opened = tablet.host("open")
    assert opened["health"]["storage"] == "damaged"
    assert "Close the browser fully" in opened["health"]["says"][0]
    assert tablet.page.evaluate("() => window.deleted") == 0
    tablet.page.evaluate("() => { window.broken = false; }")
    assert len(tablet.host("open")["runs"]) == 1


def test_a_lost_database_connection_is_reopened_once_and_the_event_is_there_once(tablet):
    tablet.enrol()
    run = tablet.begin()
    tablet.page.evaluate(
        """() => {
          const real = IDBDatabase.prototype.transaction;
          let left = 1;
          IDBDatabase.prototype.transaction = function (stores, mode, how) {
            if (mode === "readwrite" && left-- > 0) throw new DOMException("connection lost", "InvalidStateError");
            return real.call(this, stores, mode, how);
          };
        }"""
    )
    tablet.command(run, do="remarked", step="look", text="once")
    assert len([1 for e in tablet.run(run, "events") if e["kind"] == "remarked"]) == 1


@pytest.mark.parametrize("folder", ["Local Storage", "Session Storage"])
def test_nothing_depends_on_storage_that_a_kill_loses(tablet, folder):
    tablet.enrol()
    run = tablet.begin()
    tablet.kill()
    for path in (tablet.profile / "Default" / folder).rglob("*"):
        if path.is_file():
            path.unlink()
    for name in ("Cookies", "Cookies-journal"):
        Path(tablet.profile / "Default" / name).unlink(missing_ok=True)
    tablet.reopen()
    assert tablet.host("open")["enrolled"] is True
    assert len(texts(tablet, run)) == 3
