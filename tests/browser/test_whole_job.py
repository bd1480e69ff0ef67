"""The entire job in Chromium, as the people do it: enrol, take the kit, lose the server, warm up a tube, come back, sign off.

The server is `fieldkit serve` in a process of its own; it is stopped, and its port refuses, for all of the work.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any

import forgeries
import pytest
from driving import ARGS, CHROMIUM, PATIENCE_S, ROOT, Fresh, Server, Tablet, refuses
from job import Screens

from fieldkit.demo import build, readings
from fieldkit.demo.play import drawing
from fieldkit.pdf.verify import verify

pytestmark = pytest.mark.browser

SIGNS = build.SignIns(tuple(p[1] for p in build.PEOPLE), "a password of the test", "the authority of the test")
PHRASE = {"vell": "seven herons at dusk", "orme": "a lamp above the harbour"}
STATES = {
    "beam_supply": "locked", "rf_drive": "locked", "heater": "off", "bias": "off", "magnets": "off", "ion_pump": "on",
    "coolant": "off", "air": "off",
}  # fmt: skip
ANSWERS = {**readings.WARM_UP, "history": "cold", "coolant_flow": ["38.0", "48.2"], "bias_voltage": "-118.6"}


class Real(Server):
    """`fieldkit serve` over the test's data folder."""

    def launch(self, environment: dict[str, str]) -> Any:
        command = [sys.executable, "-m", "fieldkit.cli.main", "serve", "--plain-http", "--data", str(self.folder)]
        more = {"PYTHONPATH": str(ROOT), **environment}
        return Fresh([*command, "--port", str(self.port)], self.folder / "server.log", more)


@pytest.fixture
def server(tmp_path: Path) -> Any:
    folder = tmp_path / "station"
    with build.opened(folder):
        build.prepare(folder, datetime.now(UTC), SIGNS, lambda said: None)
    made = Real(folder)
    made.start()
    yield made
    made.stop()


@pytest.fixture
def desk(playwright_here: Any, server: Real) -> Any:
    """The supervisor's browser, another machine than the tablet."""
    browser = playwright_here.chromium.launch(executable_path=CHROMIUM, args=ARGS)
    page = browser.new_context(viewport={"width": 1280, "height": 800}, accept_downloads=True).new_page()
    page.set_default_timeout(PATIENCE_S * 1000)
    page.seen = []
    page.on("console", lambda m: page.seen.append(m.text) if "Content Security Policy" in m.text else None)
    yield page
    assert page.seen == []
    browser.close()


def sign_in(desk: Any, server: Real, login: str) -> None:
    desk.goto(server.url + "/signin")
    desk.locator("input[name=login]").fill(login)
    desk.locator("input[name=password]").fill(SIGNS.password)
    desk.keyboard.press("Enter")
    desk.wait_for_url("**/desk/**")


def issue_all(desk: Any, server: Real) -> None:
    """The administrator opens the signing authority for everyone who asked."""
    desk.goto(server.url + "/admin")
    while desk.get_by_role("button", name="Open the authority").count():
        form = desk.locator("form", has=desk.get_by_role("button", name="Open the authority")).first
        form.locator("input[type=password]").fill(SIGNS.authority)
        form.locator("input[name=note]").fill("known in person")
        with desk.expect_navigation():
            form.get_by_role("button", name="Open the authority").click()


def wall(tablet: Tablet) -> datetime:
    return datetime.fromisoformat(tablet.page.evaluate("() => new Date().toISOString()").replace("Z", "+00:00"))


def test_the_whole_job(playwright_here: Any, server: Real, desk: Any, tmp_path: Path) -> None:
    picture = tmp_path / "meters.jpg"
    picture.write_bytes(drawing("Deck meters"))
    tablet = Tablet(playwright_here, tmp_path / "profile", server, viewport={"width": 820, "height": 1180})
    tablet.launch()
    tablet.context.clock.install()
    screens = Screens(tablet, ANSWERS)

    # enrol while the server is there; the certificate is issued at the desk
    tablet.open()
    screens.enrol("vell", SIGNS.password, PHRASE["vell"])
    sign_in(desk, server, "orme")
    issue_all(desk, server)
    tablet.host("enrolStatus")
    screens.take_kit()
    tablet.ready()

    # the server is gone for all of the work
    server.stop()
    assert refuses(server.port)
    tablet.page.reload()

    screens.start("Heater warm-up", "B2", ["J. Vell"])
    screens.declare(STATES, {"ion_pump": "600"}, [("Q1", "41"), ("S4", "42")])
    screens.make_safe_is_on_top()
    screens.go("grid_current")
    screens.correct("Bias voltage", "-119.6", "The first figure was misread.")
    screens.go("heater_amps_10")

    # the browser dies in the middle of the warm-up
    later = wall(tablet) + timedelta(minutes=4)
    seq = screens.look()["state"]["seq"]
    tablet.kill()
    tablet.launch()
    tablet.context.clock.install(time=later)
    tablet.open()
    tablet.page.locator(f"[data-run='{screens.run}']").click()
    screens.confirm_after_gap()
    assert screens.look()["state"]["seq"] > seq
    screens.go("@end", picture)
    screens.end()
    screens.sign(PHRASE["vell"])
    signed = screens.look()["state"]
    assert signed["disagree"] == [] and signed["signatures"][-1]["meaning"] == "performed"

    # the network comes back
    server.start()
    assert tablet.sync()["state"] == "received"
    sign_in(desk, server, "orme")
    desk.goto(f"{server.url}/desk/records/{screens.run}")
    desk.get_by_role("link", name="Return with a reason").click()
    desk.locator("textarea").fill("Say which meters the picture shows.")
    with desk.expect_navigation():
        desk.get_by_role("button", name="Return the record").click()

    # taken up again on the tablet, put right, signed again
    tablet.sync()
    tablet.open()
    tablet.page.locator(f"[data-run='{screens.run}']").click()
    tablet.page.locator("[data-reopen]").click()
    tablet.page.get_by_role("button", name="Remark").first.click()
    tablet.page.get_by_role("dialog").get_by_role("textbox").fill("The picture shows DM-04, DM-05 and DM-06.")
    tablet.page.get_by_role("dialog").get_by_role("button", name="Record").click()
    screens.sign(PHRASE["vell"])
    assert tablet.sync()["state"] == "received"

    pdf = countersign(desk, server, screens.run, tmp_path)
    assert tablet.violations == []
    tablet.close()
    judge(pdf, server, tmp_path)


def countersign(desk: Any, server: Real, run: str, place: Path) -> Path:
    """The supervisor makes a key in this browser, has it certified, reads the file, signs, downloads."""
    desk.goto(f"{server.url}/desk/key")
    desk.locator("#passphrase").fill(PHRASE["orme"])
    desk.locator("#again").fill(PHRASE["orme"])
    desk.get_by_role("button", name="Make the key and ask for its certificate").click()
    desk.get_by_role("button", name="Look again").wait_for()
    issue_all(desk, server)
    desk.goto(f"{server.url}/desk/records/{run}")
    desk.get_by_role("link", name="Countersign").click()
    desk.get_by_role("button", name="Make the file ready").click()
    desk.locator("#passphrase").fill(PHRASE["orme"])
    desk.get_by_role("button", name="Countersign", exact=True).click()
    with desk.expect_download() as kept:
        desk.get_by_role("link", name="Download the PDF").click()
    pdf = place / "record.pdf"
    kept.value.save_as(pdf)
    return pdf


def judge(pdf: Path, server: Real, place: Path) -> None:
    """`fieldkit verify` in another process with nothing but the file and the certificate, and poppler's pdfsig."""
    certificate = place / "authority.pem"
    with server.inside():
        from fieldkit.web.app import here

        certificate.write_text(here().authority_pem)
    command = [sys.executable, "-m", "fieldkit.cli.main", "verify", str(pdf), "--ca", str(certificate), "--json"]
    told = subprocess.run(
        command, cwd=place, env={"PYTHONPATH": str(ROOT), "PATH": os.environ["PATH"]}, capture_output=True, text=True
    )
    assert told.returncode == 0, told.stdout + told.stderr
    assert json.loads(told.stdout)
    store = place / "nss"
    store.mkdir()
    subprocess.run(["certutil", "-d", f"sql:{store}", "-N", "--empty-password"], check=True)
    subprocess.run(["certutil", "-d", f"sql:{store}", "-A", "-t", "C,C,C", "-n", "ca", "-i", certificate], check=True)
    seen = subprocess.run(["pdfsig", "-nssdir", f"sql:{store}", pdf], capture_output=True, text=True).stdout
    assert seen.count("Signature is Valid") == 2, seen
    assert seen.count("Certificate is Trusted") == 2, seen
    for name, (forged, code) in spoiled(pdf.read_bytes()).items():
        # in a thread of its own: the browser's driver keeps an event loop in this one
        with ThreadPoolExecutor(1) as apart:
            report = apart.submit(verify, forged, certificate.read_text(), datetime.now(UTC) + timedelta(hours=1)).result()
        assert code in {answer.code for answer in report.answers if answer.state == "fails"}, name


def spoiled(data: bytes) -> dict[str, tuple[bytes, str]]:
    """Forgeries of the very file that was just countersigned, and the answer that must fail for each."""
    return {
        "a byte of a page": (forgeries.page(data), "pages"),
        "a byte of an attachment": (forgeries.attachment(data), "attachments"),
        "a byte of the seal": (forgeries.signature(data, "Seal"), "seal"),
        "a byte of the supervisor's signature": (forgeries.signature(data, "Supervisor"), "countersignature"),
        "a revision appended": (forgeries.revision(data), "untouched"),
        "the countersignature dropped": (forgeries.without_countersignature(data), "fields"),
    }
