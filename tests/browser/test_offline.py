"""The offline shell in Chromium: all files or none, the server really gone, updates that wait, nothing else touched."""

from __future__ import annotations

import re
import shutil
from pathlib import Path

import pytest

pytestmark = pytest.mark.browser

#: whether the worker's one try to take the files is over, and nothing came of it
GIVEN_UP = "async () => { const made = await navigator.serviceWorker.getRegistration(); return !made || !(made.installing || made.waiting || made.active); }"
CACHES = "async () => (await caches.keys()).filter((name) => name.startsWith('fieldkit-shell-'))"
IDB_ROWS = """async () => {
  const db = await new Promise((go) => { const r = indexedDB.open("fieldkit"); r.onsuccess = () => go(r.result); });
  const count = await new Promise((go) => { const r = db.transaction("meta").objectStore("meta").count(); r.onsuccess = () => go(r.result); });
  db.close();
  return count;
}"""


def controlled(page) -> bool:
    return page.evaluate("() => Boolean(navigator.serviceWorker.controller)")


def test_the_page_opens_with_the_server_stopped_and_the_browser_killed(tablet, server):
    tablet.ready()
    server.stop()
    tablet.kill()
    tablet.reopen()
    assert controlled(tablet.page)
    health = tablet.host("open")["health"]
    assert health["offline_ready"] is True
    assert tablet.page.evaluate("() => document.documentElement.dataset.version")


def test_every_file_is_aboard_under_its_hash_and_the_page_breaks_no_policy(tablet, server):
    tablet.ready()
    listed = tablet.page.evaluate("async () => (await (await fetch('/sw.js')).text()).split('\\n')[0]")
    assert len(re.findall(r'"url"', listed)) > 30
    answer = tablet.page.evaluate(
        """async () => {
          const shell = await import(document.querySelector("script[type=module]").src.replace("main.js", "shell.js"));
          return shell.ready();
        }"""
    )
    assert answer["ready"] is True and answer["missing"] == []
    assert answer["build"] == tablet.page.evaluate("() => document.documentElement.dataset.build")
    assert tablet.violations == []


@pytest.mark.parametrize(
    ("what", "spoil"),
    [
        ("is missing", {"status": 404, "body": "gone"}),
        ("is another than the list says", {"status": 200, "content_type": "text/javascript", "body": "alert(1)"}),
        ("is a sign-in page", {"status": 302, "headers": {"Location": "/signin"}}),
    ],
)
def test_nothing_is_kept_when_one_file(tablet, server, what, spoil):
    spoiled = []

    def route(request):
        spoiled.append(request.request.url)
        request.fulfill(**spoil)

    tablet.close()
    tablet.launch()
    tablet.context.route("**/css/pages.css", route)
    tablet.open()
    while not spoiled:
        tablet.page.wait_for_timeout(100)
    tablet.until(GIVEN_UP)
    assert tablet.host("open")["health"]["offline_ready"] is False
    assert not controlled(tablet.page)
    assert tablet.page.evaluate(CACHES) == []
    tablet.context.unroute("**/css/pages.css")
    tablet.page.reload()
    tablet.ready()


def test_a_file_that_the_browser_dropped_gives_words_instead_of_a_blank_page_and_mends_itself(tablet, server):
    tablet.ready()
    drop = """async () => {
      const cache = await caches.open((await caches.keys()).find((name) => name.startsWith('fieldkit-shell-')));
      const gone = (await cache.keys()).find((request) => request.url.endsWith('/tablet/host.js'));
      return cache.delete(gone);
    }"""
    assert tablet.page.evaluate(drop) is True
    assert tablet.host("open")["health"]["offline_ready"] is False
    server.stop()
    tablet.page.goto(server.url + "/app/")
    text = tablet.page.inner_text("body")
    assert "App files are missing on this tablet" in text and "1 of" in text
    server.start()
    tablet.page.reload()
    tablet.ready()


def test_the_worker_leaves_the_desk_the_calls_and_ranges_alone(tablet, server):
    tablet.ready()
    seen = tablet.page.evaluate(
        """async () => {
          const out = {};
          for (const path of ["/api/challenge", "/signin", "/version.json"]) {
            out[path] = (await fetch(path)).headers.get("Cache-Control");
          }
          const file = document.querySelector("script[type=module]").src;
          out.range = (await fetch(file, { headers: { Range: "bytes=0-9" } })).status;
          out.whole = (await fetch(file)).status;
          return out;
        }"""
    )
    assert seen["range"] == 206 and seen["whole"] == 200
    server.stop()
    for path in ("/api/challenge", "/signin", "/", "/registers", "/records/x.pdf"):
        failed = tablet.page.evaluate(
            "async (path) => { try { await fetch(path); return false; } catch { return true; } }", path
        )
        assert failed, path
    with pytest.raises(Exception, match="ERR_CONNECTION_REFUSED"):
        tablet.page.goto(server.url + "/signin")


def test_a_dead_link_does_not_keep_the_page_from_opening(tablet, server):
    tablet.ready()
    tablet.context.route("**/*", lambda route: None)  # never answered
    # less than the worker waits for a network where a file is missing: it may not have asked at all
    tablet.page.goto(server.url + "/app/", wait_until="commit", timeout=7000)
    assert tablet.page.evaluate("() => document.documentElement.dataset.build")
    tablet.context.unroute_all(behavior="ignoreErrors")


def publish_changed(server, folder: Path) -> None:
    """A second version of the app: the same server with one style sheet changed."""
    root = Path(__file__).resolve().parents[2]
    changed = folder / "next"
    changed.mkdir()
    for part in ("fieldkit", "templates", "static", "procedures"):
        shutil.copytree(root / part, changed / part)
    sheet = changed / "static" / "css" / "pages.css"
    sheet.write_text(sheet.read_text() + "\n/* next */\n")
    server.stop()
    server.start(PYTHONPATH=str(changed))


def test_a_new_version_waits_while_a_run_is_open_in_any_window(tablet, server, tmp_path):
    tablet.enrol()
    tablet.ready()
    run = tablet.begin()
    build = tablet.page.evaluate("() => document.documentElement.dataset.build")
    publish_changed(server, tmp_path)
    tablet.page.evaluate("async () => { await (await navigator.serviceWorker.ready).update(); }")
    tablet.until("async () => Boolean((await navigator.serviceWorker.ready).waiting)")
    other = tablet.tab()
    assert other.page.evaluate("() => document.documentElement.dataset.build") == build
    with pytest.raises(Exception, match="run-open"):
        other.host("update")
    tablet.run(run, "close")
    other.page.evaluate("() => { window.marked = true; }")
    take = """() => {
      const host = document.querySelector("script[type=module]").src.replace("main.js", "host.js");
      void import(host).then((made) => made.update());
    }"""
    with other.page.expect_navigation(timeout=60_000):
        other.page.evaluate(take)
    other.host("open")
    assert other.page.evaluate("() => document.documentElement.dataset.build") != build
    assert other.host("open")["runs"][0]["run"] == run


def test_the_kill_switch_takes_the_worker_and_its_files_and_leaves_what_was_recorded(tablet, server):
    tablet.enrol("vell")
    tablet.ready()
    before = tablet.page.evaluate(IDB_ROWS)
    assert before > 0
    server.stop()
    server.start(SW_KILL="1")
    tablet.page.evaluate("async () => { await (await navigator.serviceWorker.ready).update(); }")
    for _ in range(60):  # the browser lets go of the old worker when it has nothing to do
        tablet.page.goto(server.url + "/version.json")
        if not controlled(tablet.page) and tablet.page.evaluate(CACHES) == []:
            break
        tablet.page.wait_for_timeout(500)
    assert not controlled(tablet.page)
    assert tablet.page.evaluate(CACHES) == []
    assert tablet.page.evaluate(IDB_ROWS) >= before
