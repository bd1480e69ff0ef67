"""Step latency on the tablet at a sixth of the processor: a key to its drawn verdict, Record to the next step drawn.

The real app with the real kit, on readings of the warm-up. The floor is a page that takes the same keys and the same
click in the same browser, at the same throttle, and computes and stores nothing. Both are timed alike: from the time
stamp of the event to the first task after the frame that shows what came of it.
"""

from __future__ import annotations

import statistics
from collections.abc import Callable, Iterator
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

import pytest
from bench import Ratios
from driving import CHROMIUM, Server, Tablet

from fieldkit.demo import build, readings
from fieldkit.operations import enrol
from fieldkit.operations.actor import HOUSE
from fieldkit.web.app import here

pytestmark = [pytest.mark.bench, pytest.mark.browser]
THROTTLE = 6
FIRST, LAST = "air_pressure", "heater_on"
STATES = {
    "beam_supply": "locked", "rf_drive": "locked", "heater": "off", "bias": "off", "magnets": "off", "ion_pump": "on",
    "coolant": "off", "air": "off",
}  # fmt: skip
LOCKS = [
    {"point": point, "sources": list(sources), "lock": number, "tag": tag, "holder": "vell"}
    for point, sources, number, tag in build.LOCKS
]

#: a field and a button that do what a browser does by itself, and the smallest change that can be seen
FLOOR = """<!doctype html><title>floor</title><main data-strip><h1 data-step-title>0</h1><input data-typed>
<p data-verdict-box data-verdict="none"></p><button data-first>Record</button></main>"""
FLOOR_WORK = """() => {
  const title = document.querySelector("[data-step-title]"), field = document.querySelector("[data-typed]");
  document.querySelector("[data-first]").addEventListener("click", () => { title.textContent = String(Number(title.textContent) + 1); field.value = ""; });
}"""
#: from an event to the first task after the frame that follows what it changed
PROBE = """() => {
  globalThis.took = { key: [], record: [], verdicts: [] };
  const drawn = (then) => requestAnimationFrame(() => {
    const channel = new MessageChannel();
    channel.port1.onmessage = () => then(performance.now());
    channel.port2.postMessage(0);
  });
  let pressed = 0;
  addEventListener("keydown", (e) => { pressed = e.timeStamp; }, true);
  addEventListener("input", () => {
    const from = pressed;
    drawn((at) => { took.key.push(at - from); took.verdicts.push(document.querySelector("[data-verdict-box]").dataset.verdict); });
  });
  const title = () => document.querySelector("[data-step-title]")?.textContent;
  addEventListener("click", (e) => {
    if (!e.target.closest?.("[data-first]")) return;
    const from = e.timeStamp, was = title();
    const watch = new MutationObserver(() => {
      if (title() === was) return;
      watch.disconnect();
      drawn((at) => took.record.push(at - from));
    });
    watch.observe(document.querySelector("[data-strip]"), { subtree: true, childList: true, characterData: true });
  }, true);
}"""


@pytest.fixture
def tablet(playwright_here: Any, tmp_path: Path) -> Iterator[Tablet]:
    """Enrolled by J. Vell, the demonstration's kit aboard."""
    signs, folder = build.signs(), tmp_path / "station"
    with build.opened(folder):
        build.prepare(folder, datetime.now(UTC), signs, lambda said: None)
    server = Server(folder)
    server.start()
    made = Tablet(playwright_here, tmp_path / "profile", server, viewport={"width": 820, "height": 1180})
    made.launch()
    made.open()
    made.host(
        "enrol", {"login": "vell", "password": signs.password, "tabletName": "tablet 3", "passphrase": "seven herons"}
    )
    with server.inside():
        for one in enrol.waiting():
            enrol.issue(HOUSE, here(), one.id, signs.authority, "known in person")
    made.host("enrolStatus")
    made.host("fetchKit")
    yield made
    made.close()
    server.stop()


@pytest.fixture
def playwright_here() -> Iterator[Any]:
    """Let go after the test: the driver holds this thread's event loop, which other tests need."""
    if not Path(CHROMIUM).exists():
        pytest.skip(f"no browser at {CHROMIUM}: apt-get install chromium")
    from playwright.sync_api import sync_playwright

    with sync_playwright() as made:
        yield made


def answer(step: dict[str, Any], plate: str | None) -> dict[str, Any]:
    """The command that answers a step before the readings that are timed."""
    control = step["control"]["control"]
    return {
        "caution": {"do": "acknowledged", "heard": ["vell"]},
        "choice": {"do": "chosen", "value": "cold"},
        "number": {"do": "read", "text": readings.WARM_UP.get(step["id"]) or plate},
        "result": {"do": "worked-out"},
        "confirm": {"do": "confirmed"},
    }[control]


def begin(tablet: Tablet) -> str:
    """A warm-up that stands at its first row of readings."""
    asked = {"procedure": "warm-up", "cabinet": "B2", "tube": "T-0417", "present": ["vell"], "recorder": "vell"}
    run: str = tablet.host("startRun", asked)["run"]
    ages = {"ion_pump": "36000"}
    state = tablet.command(run, do="states-declared", states=STATES, ages=ages, locks=LOCKS, board_seen=True)
    while state["node"] != FIRST:
        told = tablet.run(run, "progress")
        state = tablet.command(run, step=state["node"], **answer(told["step"], told["plate"]))
    return run


def type_and_record(page: Any, text: str) -> None:
    """Every key by itself, each drawn before the next; then Record, until the next step stands there."""
    page.locator("[data-typed]").focus()
    for key in text:
        seen = page.evaluate("() => took.key.length")
        page.keyboard.press(key)
        page.wait_for_function("(n) => took.key.length > n", arg=seen)
    seen = page.evaluate("() => took.record.length")
    page.locator("[data-first]").click()
    page.wait_for_function("(n) => took.record.length > n", arg=seen)


def on_the_app(tablet: Tablet, run: str) -> tuple[dict[str, list[Any]], list[str]]:
    """Through the row of readings on the screen; what was timed, and what was typed."""
    page, typed = tablet.page, []
    page.goto("about:blank")  # a page that was opened before the kit came would not have it
    page.goto(f"{tablet.server.url}/app/#run?run={run}")
    page.locator("[data-typed]").wait_for()
    page.evaluate(PROBE)
    while True:
        told = tablet.run(run, "progress")
        step = told["step"]
        page.locator("[data-step-title]", has_text=step["title"]).wait_for()
        if step["id"] == LAST:
            return page.evaluate("() => took"), typed
        if step["control"]["control"] == "number":
            text = readings.WARM_UP.get(step["id"]) or told["plate"]
            type_and_record(page, text)
            typed.append(text)
        else:
            tablet.command(run, step=step["id"], **answer(step, told["plate"]))


def on_the_floor(page: Any, typed: list[str]) -> dict[str, list[Any]]:
    page.set_content(FLOOR)
    page.evaluate(FLOOR_WORK)
    page.evaluate(PROBE)
    for text in typed:
        type_and_record(page, text)
    took: dict[str, list[Any]] = page.evaluate("() => took")
    return took


def test_step_latency_at_a_sixth_of_the_processor(tablet: Tablet, show: Callable[[Ratios], None]) -> None:
    run = begin(tablet)
    throttle = tablet.context.new_cdp_session(tablet.page)
    throttle.send("Emulation.setCPUThrottlingRate", {"rate": THROTTLE})
    app, typed = on_the_app(tablet, run)
    tablet.page.goto("about:blank")
    floor = on_the_floor(tablet.page, typed)
    throttle.send("Emulation.setCPUThrottlingRate", {"rate": 1})

    keys, records = sum(len(text) for text in typed), len(typed)
    assert records >= 5
    for took in (app, floor):
        assert (len(took["key"]), len(took["record"])) == (keys, records)
        assert min(took["key"] + took["record"]) > 0
    # the verdict of the whole number stood there when its last key counted as drawn
    ends = [sum(len(text) for text in typed[: n + 1]) - 1 for n in range(records)]
    assert {app["verdicts"][n] for n in ends} == {"pass", "not judged"}, app["verdicts"]
    assert tablet.violations == []

    what = {"key": "a key to its verdict, drawn", "record": "Record to the next step, stored and drawn"}
    for name, said in what.items():
        table = Ratios(
            f"Tablet at {THROTTLE} x throttle, {len(app[name])} goes",
            "floor page: same event, nothing computed, median",
            statistics.median(floor[name]) / 1000,
        )
        table.add("floor page, worst", max(floor[name]) / 1000)
        table.add(f"{said}, median", statistics.median(app[name]) / 1000)
        table.add(f"{said}, worst", max(app[name]) / 1000)
        show(table)
