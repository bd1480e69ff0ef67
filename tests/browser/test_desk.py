"""The desk in Chromium: a supervisor makes a key in the browser, countersigns a record with it, and downloads the file.

The server runs inside this process on a port of its own; the run on it was recorded by a tablet in Python. axe-core
looks at three widths, light and dark; a violation of the content security policy fails every test here.
"""

from __future__ import annotations

import hashlib
import shutil
import subprocess
import threading
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from typing import Any

import pytest
from axe_playwright_python.sync_playwright import Axe
from desk_in_tests import Desk
from driving import CHROMIUM, PATIENCE_S
from station_in_tests import PASSPHRASE, PASSWORD, app, bare, cheap_passwords, held
from werkzeug.serving import make_server

from fieldkit.operations import enrol, moment
from fieldkit.operations.actor import HOUSE
from fieldkit.pdf import verify

pytestmark = pytest.mark.browser

__all__ = ["app", "bare", "cheap_passwords"]
RUN = "260731-B2-1AAAA"
SIGNING = "quiet river stone lamp"
ARGUMENTS = ["--no-sandbox", "--disable-gpu", "--no-first-run", "--disable-background-networking", "--disable-sync"]
SIZES = ((1280, 800), (820, 1180), (390, 844))


@pytest.fixture
def database_url() -> None:
    return None


class At:
    """A browser page on the desk, signed in; `complaints` are what its console said."""

    def __init__(self, page: Any, base: str) -> None:
        self.page, self.base = page, base
        self.complaints: list[str] = []
        page.on("console", lambda m: self.complaints.append(m.text) if m.type in ("error", "warning") else None)
        page.on("pageerror", lambda bad: self.complaints.append(str(bad)))

    def go(self, path: str) -> None:
        self.page.goto(self.base + path)

    def sign_in(self, login: str = "orme") -> None:
        self.go("/signin")
        self.page.fill("#login", login)
        self.page.fill("#password", PASSWORD)
        self.page.click("main button")
        self.page.wait_for_url("**/desk/records")


@pytest.fixture
def served(app: Any) -> Iterator[tuple[Desk, str]]:
    desk = Desk(app)
    server = make_server("127.0.0.1", 0, app, threaded=True)
    thread = threading.Thread(target=server.serve_forever, daemon=True)
    thread.start()
    yield desk, f"http://127.0.0.1:{server.port}"
    server.shutdown()
    thread.join()
    server.server_close()


@pytest.fixture(params=["light"])
def at(request: Any, playwright_here: Any, served: tuple[Desk, str]) -> Iterator[At]:
    browser = playwright_here.chromium.launch(executable_path=CHROMIUM, args=ARGUMENTS)
    context = browser.new_context(color_scheme=request.param, viewport={"width": 1280, "height": 800})
    context.set_default_timeout(PATIENCE_S * 1000)
    made = At(context.new_page(), served[1])
    yield made
    complaints = list(made.complaints)
    browser.close()
    assert complaints == []


def says(at: At, part: str, words: str) -> None:
    """Wait until the status line of a part says so; fails with what it says instead."""
    line = at.page.locator(f'[data-part="{part}"] [data-says]')
    try:
        line.filter(has_text=words).wait_for()
    except Exception as late:
        raise AssertionError(f"{part} says: {line.text_content()!r}") from late


def make_key(at: At, desk: Desk) -> None:
    """Through the page: make the key; an administrator issues its certificate meanwhile; look again."""
    page = at.page
    page.locator('form[data-part="make"]').wait_for()
    page.fill("#passphrase", SIGNING)
    page.fill("#again", SIGNING)
    page.click('form[data-part="make"] button')
    page.get_by_text("waits for an administrator").wait_for()
    with desk.app.app_context():
        (waiting,) = enrol.waiting()
        assert waiting.device_name == "a browser at the desk"
        enrol.issue(HOUSE, held(desk.app), waiting.id, PASSPHRASE, "known in person")
    page.click('[data-do="look"]')
    page.get_by_text("This browser holds your key").wait_for()


def test_a_supervisor_makes_a_key_countersigns_and_downloads_a_file_that_verifies(
    at: At, served: tuple[Desk, str], tmp_path: Path
) -> None:
    desk, page = served[0], at.page
    desk.waiting(eventful=True)
    at.sign_in()
    page.get_by_role("link", name="All 17 steps were done").click()
    page.get_by_role("link", name="Countersign").click()
    page.get_by_role("link", name="Make this browser’s key").click()
    make_key(at, desk)

    at.go(f"/desk/records/{RUN}/countersign")
    page.click('[data-do="prepare"]')
    says(at, "prepare", "The file is ready.")
    shown = page.locator("[data-file-hash]").text_content()
    assert "names your key" in page.locator("[data-checked]").text_content()
    assert shown is not None and len(shown) == 64

    page.fill("#passphrase", "not my passphrase")
    page.click('[data-form="sign"] button')
    says(at, "sign", "The passphrase is wrong. The key is not blocked: try again in 1 s.")
    page.wait_for_timeout(1100)
    page.fill("#passphrase", SIGNING)
    page.click('[data-form="sign"] button')
    page.get_by_role("heading", name="Countersigned").wait_for()
    with page.expect_download() as download:
        page.click("[data-download]")
    file = tmp_path / "record.pdf"
    download.value.save_as(file)

    data = file.read_bytes()
    # in a thread of its own: the browser's driver runs an event loop in this one, and the signature library wants none
    with ThreadPoolExecutor(1) as thread:
        report = thread.submit(verify.verify, data, held(desk.app).authority_pem, moment.now()).result()
    assert [(a.code, a.says) for a in report.answers if a.state == "fails"] == []
    page.click("[data-record]")
    assert hashlib.sha256(data).hexdigest() in page.locator(".details").text_content()
    assert "K. Orme" in page.locator(".block .do").text_content()


def test_the_file_satisfies_pdfsig(at: At, served: tuple[Desk, str], tmp_path: Path) -> None:
    """Outside check: Debian's pdfsig (poppler) finds both signatures valid, given the signing authority's certificate."""
    if not shutil.which("pdfsig") or not shutil.which("certutil"):
        pytest.skip("pdfsig or certutil is not installed (poppler-utils, libnss3-tools)")
    desk, page = served[0], at.page
    desk.waiting()
    at.sign_in()
    at.go("/desk/key")
    make_key(at, desk)
    at.go(f"/desk/records/{RUN}/countersign")
    page.click('[data-do="prepare"]')
    says(at, "prepare", "The file is ready.")
    page.fill("#passphrase", SIGNING)
    page.click('[data-form="sign"] button')
    page.get_by_role("heading", name="Countersigned").wait_for()
    with page.expect_download() as download:
        page.click("[data-download]")
    file, nss, pem = tmp_path / "record.pdf", tmp_path / "nss", tmp_path / "ca.pem"
    download.value.save_as(file)
    nss.mkdir()
    pem.write_text(held(desk.app).authority_pem)
    subprocess.run(["certutil", "-N", "-d", f"sql:{nss}", "--empty-password"], check=True)
    subprocess.run(
        ["certutil", "-A", "-d", f"sql:{nss}", "-t", "CT,C,C", "-n", "authority", "-i", str(pem)], check=True
    )
    found = subprocess.run(["pdfsig", "-nssdir", f"sql:{nss}", str(file)], capture_output=True, text=True).stdout
    assert found.count("Signature is Valid.") == 2
    assert found.count("Certificate is Trusted.") == 2


def test_the_browser_refuses_to_sign_what_is_not_the_file(at: At, served: tuple[Desk, str]) -> None:
    """A server that swaps the file is noticed here, before any signature exists."""
    desk, page = served[0], at.page
    desk.waiting()
    at.sign_in()
    at.go("/desk/key")
    make_key(at, desk)

    def swap(route: Any) -> None:
        answer = route.fetch()
        body = bytearray(answer.body())
        body[1500] ^= 1
        route.fulfill(response=answer, body=bytes(body))

    page.route("**/desk/prepared/*", swap)
    at.go(f"/desk/records/{RUN}/countersign")
    page.click('[data-do="prepare"]')
    says(at, "prepare", "The file that arrived is not the one that was prepared.")
    assert page.locator('[data-part="sign"]').is_hidden()


def test_the_key_survives_a_reload_and_a_wrong_passphrase_is_not_told_to_the_server(
    at: At, served: tuple[Desk, str]
) -> None:
    desk, page = served[0], at.page
    desk.waiting()
    at.sign_in()
    at.go("/desk/key")
    make_key(at, desk)
    page.reload()
    page.get_by_text("This browser holds your key").wait_for()
    sent: list[str] = []
    page.on("request", lambda r: sent.append(r.post_data or "") if r.method == "POST" else None)
    at.go(f"/desk/records/{RUN}/countersign")
    page.click('[data-do="prepare"]')
    says(at, "prepare", "The file is ready.")
    page.fill("#passphrase", "not my passphrase")
    page.click('[data-form="sign"] button')
    says(at, "sign", "The passphrase is wrong.")
    assert sent and not any("passphrase" in body for body in sent)


PATHS = (
    "/desk/records",
    f"/desk/records/{RUN}",
    f"/desk/records/{RUN}/events",
    f"/desk/records/{RUN}/return",
    f"/desk/records/{RUN}/countersign",
    "/desk/key",
    "/desk/records/260731-B2-3CCCC",
)


@pytest.mark.parametrize("at", ["light", "dark"], indirect=True)
def test_axe_finds_nothing_and_nothing_runs_off_the_page(at: At, served: tuple[Desk, str]) -> None:
    desk = served[0]
    desk.waiting(eventful=True)
    desk.waiting("260731-B2-2BBBB")
    desk.arrive(desk.pen("260731-B2-3CCCC").isolate(), picture=None)
    at.sign_in()
    found = []
    for width, height in SIZES:
        at.page.set_viewport_size({"width": width, "height": height})
        for path in PATHS:
            at.go(path)
            at.page.wait_for_load_state("networkidle")
            for violation in Axe().run(at.page).response["violations"]:
                targets = [node["target"] for node in violation["nodes"]][:4]
                found.append((path, width, violation["id"], targets))
            over = at.page.evaluate("() => document.documentElement.scrollWidth - innerWidth")
            if over > 0:
                found.append((path, width, "runs off the page", over))
    assert found == []


def test_the_theme_is_chosen_by_a_button_and_kept_in_this_browser(at: At, served: tuple[Desk, str]) -> None:
    at.sign_in()
    assert at.page.evaluate("() => document.documentElement.dataset.theme") == "light"
    at.page.click("[data-theme-switch]")
    at.go("/desk/key")
    assert at.page.evaluate("() => document.documentElement.dataset.theme") == "dark"
