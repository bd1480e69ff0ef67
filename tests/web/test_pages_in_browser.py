"""The desk's own pages in Chromium: axe finds nothing, nothing breaks the content policy, nothing runs over the side.

axe-core through axe-playwright-python; widths of a phone, a tablet and a desk, light and dark.
"""

import threading
from pathlib import Path

import pytest
from station_in_tests import PASSWORD, issue, whole_run
from tablet_in_python import TabletInPython
from werkzeug.serving import make_server

CHROMIUM = Path("/usr/bin/chromium")
PAGES = ("/admin", "/registers", "/registers/tubes/T-0417", "/trust", "/password", "/none")
pytestmark = pytest.mark.browser


@pytest.fixture
def address(app, tablet, sheet_sha):
    """A server with something on every list: enrolments that wait, a tablet, a fork that was kept, a finished run."""
    tablet.enrol("quill", PASSWORD)
    other = TabletInPython(app.test_client(), "TABLET07", "Tablet 7")
    other.enrol("arkle", PASSWORD)
    issue(app, other, "arkle")
    run = whole_run(tablet, sheet_sha)
    tablet.send(run, run.texts)
    tablet.send(run, [run.texts[3].replace("odd", "bad")])
    server = make_server("127.0.0.1", 0, app, threaded=True)
    thread = threading.Thread(target=server.serve_forever)
    thread.start()
    yield f"http://127.0.0.1:{server.server_port}"
    server.shutdown()
    thread.join()
    server.server_close()


@pytest.fixture(scope="module")
def chromium():
    if not CHROMIUM.exists():
        pytest.skip("there is no /usr/bin/chromium on this machine")
    from playwright.sync_api import sync_playwright

    with sync_playwright() as playwright:
        browser = playwright.chromium.launch(executable_path=str(CHROMIUM), args=["--no-sandbox", "--disable-gpu"])
        yield browser
        browser.close()


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("width", [390, 820, 1280])
def test_every_page_is_accessible_within_its_policy_and_its_width(address, chromium, width, scheme):
    from axe_playwright_python.sync_playwright import Axe

    context = chromium.new_context(viewport={"width": width, "height": 900}, color_scheme=scheme)
    context.set_default_timeout(90_000)
    page = context.new_page()
    page.add_init_script(
        "document.addEventListener('securitypolicyviolation', (e) => console.error('policy ' + e.blockedURI))"
    )
    said, seen = [], 0
    page.on("console", lambda message: said.append(message.text) if "policy" in message.text.lower() else None)

    def look(name):
        page.evaluate("() => document.querySelectorAll('details').forEach((d) => { d.open = true; })")
        found = Axe().run(page).response
        assert found["passes"], "axe looked at nothing"
        broken = [(v["id"], [node["target"] for node in v["nodes"]][:3]) for v in found["violations"]]
        assert broken == [], name
        assert page.evaluate("() => document.documentElement.scrollWidth - window.innerWidth") <= 0, name

    page.goto(f"{address}/signin")
    look("sign in")
    page.fill("#login", "orme")
    page.fill("#password", PASSWORD)
    with page.expect_navigation(url=lambda url: "/signin" not in url):
        page.click("main button")
    for path in PAGES:
        page.goto(address + path)
        look(path)
        seen += 1
    assert seen == len(PAGES)
    assert [text for text in said if "policy" in text] == []
    context.close()
