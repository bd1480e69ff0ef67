"""An overdue, a too coarse and a wrongly ranged meter, each met on the tablet: what the person sees, what the record and the PDF say.

The real app against a real server: the run is worked through on the screen, sent, looked at at the desk, and rendered.
The choice itself, by pointer and keys: test_meters.py. What the record makes of ranges: tests/record/test_ranges.py.
Outside check: the words of the PDF are read from its pages by poppler's pdftotext. Verdicts by hand from the limits and
the ranges below.
"""

from __future__ import annotations

import copy
import re
import shutil
import subprocess
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from typing import Any

import pytest
import small_station
from driving import ARGS, CHROMIUM, PASS, PATIENCE_S, Server, Tablet

from fieldkit.files import folder as shipped
from fieldkit.formula import library
from fieldkit.operations import dossier, procedures, registers, runs
from fieldkit.operations.actor import HOUSE
from fieldkit.pdf import render

pytestmark = pytest.mark.browser

PROCEDURE = """\
procedure: three-meters
edition: 1
title: Readings with three meters
purpose: For the tests of what a meter is worth; no real work.
for: [inductive-output-tube]
crew: 1
energy:
  heater: on
ends:
  heater: on or off
steps:
  - read: Heater voltage
    id: volts
    unit: V
    meter: heater_volts
    limits: 6.10 V to 6.50 V
    guarded: yes
    on_fail: [again 2]
  - read: Ripple on the heater
    id: ripple
    unit: V
    meter: HM-3
    limits: at most 0.005 V
    on_fail: [again 2]
  - read: Bias voltage
    id: bias
    unit: V
    meter: HM-3
    limits: -125 V to -115 V
    on_fail: [again 2]
  - read: RF leakage at the window
    id: leak
    unit: mW/cm2
    meter: {name: RM-1, overdue: refuse}
    limits: at most 1 mW/cm2
    protects: yes
    on_fail: [again 2, make safe]
make_safe:
  - act: Heater off.
    sets: {heater: off}
"""


def ranged(name: str, unit: str, low: str, high: str, resolution: str, percent: str, digits: str) -> dict[str, str]:
    return {"name": name, "unit": unit, "low": low, "high": high, "resolution": resolution, "percent": percent, "digits": digits, "percent_of_range": "0"}  # fmt: skip


def instrument(name: str, reads: str, due: str, *ranges: dict[str, str]) -> dict[str, Any]:
    return {"id": name, "reads": reads, "certificate": f"C-{name}", "calibrated_to": due, "ranges": list(ranges)}


LEAK = ranged("20 mW/cm2", "mW/cm2", "0.01", "20", "0.01", "40", "0")
INSTRUMENTS = {
    "DM-04": instrument("DM-04", "heater voltage", "2020-01-31", ranged("20 V", "V", "0", "20", "0.01", "0.3", "1")),
    "HM-3": instrument("HM-3", "hand multimeter", "2099-12-31", *(
        ranged("2 V", "V", "-2", "2", "0.001", "0.1", "2"), ranged("20 V", "V", "-20", "20", "0.01", "0.1", "2"),
        ranged("200 V", "V", "-200", "200", "0.1", "0.1", "2"))),
    "RM-1": instrument("RM-1", "leakage", "2020-01-31", LEAK),
    "RM-2": instrument("RM-2", "leakage", "2099-12-31", LEAK),
}  # fmt: skip


@pytest.fixture
def server(station_folder: Path, tmp_path: Path) -> Iterator[Server]:
    """The small station with these meters and this procedure."""
    place = tmp_path / "station"
    shutil.copytree(station_folder, place)
    made = Server(place)
    source = tmp_path / "three-meters.yaml"
    source.write_text(PROCEDURE)
    with made.inside():
        seed = copy.deepcopy(small_station.SEED)
        registers.load(HOUSE, seed | {"instruments": INSTRUMENTS})
        procedures.release_file(HOUSE, source, library.load(shipped("procedures") / "formulas"))
    made.start()
    yield made
    made.stop()


def begun(tablet: Tablet) -> str:
    """A run of the procedure, on the screen at its first reading."""
    tablet.enrol("vell")
    asked = {"procedure": "three-meters", "cabinet": "B2", "tube": "T-02", "present": ["vell"], "recorder": "vell"}
    run: str = tablet.host("startRun", asked)["run"]
    tablet.command(run, do="states-declared", states={"heater": "on"}, ages={}, board_seen=True)
    tablet.page.goto("about:blank")
    tablet.page.goto(f"{tablet.server.url}/app/#run?run={run}")
    return run


def at_step(page: Any, title: str) -> None:
    page.get_by_role("heading", name=title, exact=True).wait_for()
    page.locator("[data-typed]").wait_for()


def choose(page: Any, name: str) -> None:
    page.locator("[data-ranges] label", has_text=name).click()


def read(page: Any, text: str, verdict: str) -> None:
    page.locator("[data-typed]").fill(text)
    assert page.get_attribute("[data-verdict-box]", "data-verdict") == verdict
    page.click("[data-first]")


def worked_through(page: Any) -> None:
    """The four readings, each as it is met."""
    # overdue, and taken all the same: said before, and again beside the verdict
    at_step(page, "Heater voltage")
    assert (
        page.inner_text("[data-note=overdue]")
        == "The calibration of DM-04 ran out on 31 Jan 2020. The record will say so."
    )
    read(page, "6.30", "pass")

    # too coarse: steps of 0.01 V for a limit of 0.005 V
    at_step(page, "Ripple on the heater")
    assert page.locator("[data-ranges] input:checked").get_attribute("value") == "2 V"
    choose(page, "20 V")
    note = page.inner_text("[data-beforehand]")
    assert (
        note
        == "A reading cannot be judged: the meter's steps of 0.01 V are too coarse for this limit: use the 2 V range."
    )
    assert page.inner_text("[data-verdict-box]") == "not judged"
    read(page, "0.00", "not judged")

    # wrongly ranged: the meter is still on 20 V, where it was last read, and the limits lie beyond
    at_step(page, "Bias voltage")
    assert page.locator("[data-ranges] input:checked").get_attribute("value") == "20 V"
    note = page.inner_text("[data-beforehand]")
    assert note.startswith(
        "No reading on this range can pass: this range begins at -20 V, above the limit of -115.00 V"
    )
    assert note.endswith("use the 200 V range.")
    read(page, "-19.99", "fail")
    page.locator("[data-way=again]").click()
    page.fill("[data-reason]", "The meter was on the wrong range.")
    page.click("[data-confirm-again]")
    at_step(page, "Bias voltage")
    choose(page, "200 V")
    assert page.locator("[data-note]").count() == 0
    read(page, "-119.6", "pass")

    # overdue, and not taken here: another one is
    at_step(page, "RF leakage at the window")
    assert page.inner_text("[data-note=refused]").startswith("No reading of RM-1 is taken here.")
    page.locator("[data-typed]").fill("0.30")
    assert page.get_attribute("[data-first]", "aria-disabled") == "true"
    page.click("[data-meter-id=RM-2]")
    read(page, "0.30", "pass")
    page.locator("[data-end=done]").click()
    page.locator("[data-passphrase]").fill(PASS["vell"])
    page.locator("[data-sign]").click()
    page.locator("[data-sign]").wait_for(state="detached")


def of_the_desk(playwright: Any, server: Server, run: str) -> str:
    """The record's page, as a supervisor reads it."""
    browser = playwright.chromium.launch(executable_path=CHROMIUM, args=ARGS)
    page = browser.new_page(viewport={"width": 1280, "height": 800})
    page.set_default_timeout(PATIENCE_S * 1000)
    page.goto(f"{server.url}/signin")
    page.locator("input[name=login]").fill("quill")
    page.locator("input[name=password]").fill(small_station.PASSWORD)
    page.keyboard.press("Enter")
    page.wait_for_url("**/desk/**")
    page.goto(f"{server.url}/desk/records/{run}")
    words = " ".join(str(page.inner_text("main")).split())
    browser.close()
    return words


def of_the_pdf(server: Server, run: str, place: Path) -> str:
    """The words on the file's pages."""

    def made() -> bytes:
        with server.inside():
            from fieldkit.web.app import here

            found = dossier.dossier(run)
            files = render.Files(sheet=found.sheet_bytes, events=runs.raw_events(run), procedure=found.source, authority=here().authority_pem, pictures={})  # fmt: skip
            return render.render(found.record, files).pdf

    # in a thread of its own: the browser's driver keeps an event loop in this one
    with ThreadPoolExecutor(1) as apart:
        (place / "record.pdf").write_bytes(apart.submit(made).result())
    read_by = subprocess.run(["pdftotext", str(place / "record.pdf"), "-"], capture_output=True, text=True, check=True)
    return re.sub(r"\s+", " ", read_by.stdout)


def test_an_overdue_a_too_coarse_and_a_wrongly_ranged_meter_from_the_tablet_to_the_pdf(
    playwright_here: Any, server: Server, tmp_path: Path
) -> None:
    if not shutil.which("pdftotext"):
        pytest.skip("pdftotext is not installed (poppler-utils)")
    tablet = Tablet(playwright_here, tmp_path / "profile", server)
    tablet.launch()
    tablet.open()
    run = begun(tablet)
    worked_through(tablet.page)
    state = tablet.run(run, "state")
    assert state["disagree"] == []
    rows = [(r["instrument"], r["range"], r["verdict"], r["overdue"]) for r in state["log"] if r["kind"] == "read"]
    assert rows == [
        ("DM-04", "20 V", "pass", True),
        ("HM-3", "20 V", "not judged", False),
        ("HM-3", "20 V", "fail", False),
        ("HM-3", "200 V", "pass", False),
        ("RM-2", "20 mW/cm2", "pass", False),
    ]
    assert tablet.host("sync")["state"] == "received"
    assert tablet.violations == []
    tablet.close()

    desk, pdf = of_the_desk(playwright_here, server, run), of_the_pdf(server, run, tmp_path)
    for words in (desk, pdf):
        assert "Meter overdue" in words and "The calibration of DM-04 ran out on 31 January 2020" in words
        assert "Not judged" in words and "steps of 0.01 V are too coarse for this limit: use the 2 V range" in words
        assert "The meter was on the wrong range." in words
        assert "This range begins at −20 V, above the limit of −115.00 V: use the 200 V range." in words
    assert "calibration overdue" in pdf and "20 V range" in pdf and "200 V range" in pdf
    # the one that was refused stands in the run's instruments, unused
    assert "RM-1" in pdf
