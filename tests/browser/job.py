"""Driving the screens as a person does: fields, buttons, press and hold; no call into the page's modules but to look.

`Screens` works the tablet's pages on a `Tablet` of driving.py, `Desk` the supervisor's pages in another browser.
"""

from __future__ import annotations

import time
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from driving import PATIENCE_S, Tablet

#: what the page knows of its run, read from the same host module that the screens use
LOOK = """async (run) => {
  const host = await import(document.querySelector("script[type=module]").src.replace("main.js", "host.js"));
  const open = await host.openRun(run);
  return JSON.parse(JSON.stringify({ state: open.state, progress: open.progress() }));
}"""


#: until the page has drawn a frame so many ms later, so that what it does in its frames has been done by then
HELD = """(ms) => new Promise((go) => {
  const from = performance.now();
  const look = () => requestAnimationFrame(() => (performance.now() - from < ms ? look() : requestAnimationFrame(go)));
  look();
})"""


class Screens:
    def __init__(self, tablet: Tablet, answers: Mapping[str, str | list[str]]) -> None:
        self.tablet, self.answers = tablet, answers
        self.visits: dict[str, int] = {}
        self.run = ""

    @property
    def page(self) -> Any:
        return self.tablet.page

    def look(self) -> dict[str, Any]:
        return self.page.evaluate(LOOK, self.run)

    def button(self, name: str) -> Any:
        return self.page.get_by_role("button", name=name, exact=True)

    # ---- before a run ----------------------------------------------------------------------------------------------

    def enrol(self, login: str, password: str, passphrase: str) -> None:
        page = self.page
        page.locator("[data-next=enrol], [data-enrol]").first.click()
        page.get_by_label("Name of this tablet").fill("tablet 3")
        page.get_by_label("Your sign-in at the station").fill(login)
        page.get_by_label("Password of that sign-in").fill(password)
        page.get_by_label("A new passphrase for signing on this tablet").fill(passphrase)
        page.get_by_label("The passphrase once more").fill(passphrase)
        page.locator("[data-enrol-send]").click()
        page.get_by_text("waiting for the signing authority").first.wait_for()

    def take_kit(self) -> None:
        self.tablet.open()
        page = self.page
        page.locator("[data-next=kit], [data-take-kit]").first.click()
        page.locator("[data-kit-take]").click()
        page.get_by_text("The kit is aboard").first.wait_for()

    def start(self, procedure: str, cabinet: str, present: list[str]) -> None:
        """From the start page to the declared energy states."""
        page = self.page
        self.tablet.open()
        page.locator("[data-next=start]").first.click()
        page.get_by_label(procedure).check()
        page.get_by_label(f"Cabinet {cabinet}").first.check()
        for name in present:
            page.locator("fieldset", has_text="Who is here").get_by_label(name).check()
        recorder = page.locator("fieldset", has_text="Who records").get_by_label(present[0])
        if not recorder.is_checked():
            recorder.check()
        page.locator("[data-start]").click()
        page.get_by_role("heading", name="Energy states as found").wait_for()
        self.run = self.page.evaluate(
            """async () => {
          const host = await import(document.querySelector("script[type=module]").src.replace("main.js", "host.js"));
          return (await host.open()).runs.at(-1).run;
        }"""
        )

    def declare(self, states: Mapping[str, str], minutes: Mapping[str, str], locks: list[tuple[str, str]]) -> None:
        page = self.page
        for source, value in states.items():
            page.locator(f"[data-source={source}] input[value='{value}']").check()
        for source, text in minutes.items():
            page.locator(f"[data-source={source}]").get_by_role("textbox").fill(text)
        for point, number in locks:
            page.locator("[data-name-lock]").click()
            row = page.locator("[data-found-lock]").last
            row.get_by_label("Isolating point").select_option(point)
            row.get_by_label("Number on the lock").fill(number)
        page.get_by_label("I have looked at the board").check()
        page.get_by_role("button", name="Record the states as found").click()
        page.get_by_role("heading", name="Energy states as found").wait_for(state="detached")

    # ---- a run -----------------------------------------------------------------------------------------------------

    def hold(self) -> None:
        """Press the held button for a little over a second of the page's own time."""
        target = self.page.locator("[data-hold]").last
        target.scroll_into_view_if_needed()
        box = target.bounding_box()
        self.page.mouse.move(box["x"] + box["width"] / 2, box["y"] + box["height"] / 2)
        self.page.mouse.down()
        self.page.evaluate(HELD, 1050)
        self.page.mouse.up()

    def first(self) -> None:
        self.page.locator("[data-first]").last.click()

    def value(self, step: str, otherwise: str = "14") -> str:
        said = self.answers.get(step, otherwise)
        self.visits[step] = self.visits.get(step, 0) + 1
        return said if isinstance(said, str) else said[min(self.visits[step], len(said)) - 1]

    def go(self, until: str, picture: Path | None = None, most: int = 90) -> None:
        """Answer step after step on the screen until the run stands at `until`."""
        for _ in range(most):
            seen = self.look()
            node = seen["state"]["node"]
            if node == until:
                return
            left = [reason["left"] for reason in seen["progress"]["reasons"]]
            if left and not seen["state"]["pending"]:
                assert all(one is not None for one in left), seen["progress"]["reasons"]
                self.wait(max(float(one) for one in left) + 1.5)
                continue
            self.answer(seen, picture)
            self.moved_on(seen["state"]["seq"])
        raise AssertionError(f"{until} was not reached; the run stands at {self.look()['state']['node']}")

    def wait(self, seconds: float) -> None:
        """Time passes with the tablet awake: never more at once than it would take for sleep."""
        while seconds > 0:
            self.page.clock.fast_forward(int(min(seconds, 60) * 1000))
            seconds -= 60

    def moved_on(self, seq: int) -> None:
        """Until something was recorded after event `seq`."""
        until = time.monotonic() + PATIENCE_S
        while self.look()["state"]["seq"] <= seq:
            assert time.monotonic() < until, (
                f"nothing was recorded after event {seq}: {self.page.inner_text('body')[:600]}"
            )
            self.page.wait_for_timeout(50)

    def answer(self, seen: dict[str, Any], picture: Path | None) -> None:
        page, step = self.page, seen["progress"]["step"]
        page.locator("[data-step-title]", has_text=step["title"].split("{")[0]).first.wait_for(state="attached")
        if seen["state"]["pending"]:
            page.locator("[data-way=again]").click()
            page.locator("[data-reason]").fill("The meter had not settled.")
            page.locator("[data-confirm-again]").click()
            return
        match step["control"]["control"]:
            case "caution":
                self.hold()
            case "confirm":
                self.hold() if step["control"]["held"] else self.first()
            case "number":
                page.locator("[data-typed]").fill(self.value(step["id"], seen["progress"]["plate"] or "14"))
                self.first()
            case "choice":
                page.locator(f"[data-option={self.value(step['id'])}]").click()
            case "picture":
                page.locator("[data-field=picture] input").set_input_files(str(picture))
                page.get_by_role("button", name="Record the picture").click()
            case "remark":
                page.locator("[data-field=text] textarea").fill(self.value(step["id"], "As it should be."))
                self.first()
            case "result" | "wait":
                self.first()
            case other:
                raise AssertionError(f"this walk does not know how to answer {other}")

    def correct(self, title: str, text: str, reason: str) -> None:
        """Touch the past row, say what is right and why."""
        page = self.page
        page.get_by_role("button", name=title).last.click()
        page.locator("[data-correct]").click()
        page.locator("[data-right]").fill(text)
        page.locator("[data-correction] [data-reason]").fill(reason)
        page.locator("[data-record-correction]").click()
        page.locator("[data-record-correction]").wait_for(state="detached")

    def confirm_after_gap(self) -> None:
        """Everything held through the gap."""
        page = self.page
        page.get_by_role("heading", name="Is everything as it was?").wait_for()
        for one in page.locator("[data-source] input[value=unbroken]").all():
            one.check()
        page.get_by_role("button", name="Record the states and go on").click()
        page.get_by_role("heading", name="Is everything as it was?").wait_for(state="detached")

    def end(self) -> None:
        self.page.locator("[data-end=done]").click()

    def sign(self, passphrase: str) -> None:
        page = self.page
        page.locator("[data-passphrase]").fill(passphrase)
        page.locator("[data-sign]").click()
        page.locator("[data-sign]").wait_for(state="detached")

    def make_safe_is_on_top(self) -> None:
        """What lies at the middle of MAKE SAFE is MAKE SAFE."""
        hit = self.page.evaluate(
            """() => {
          const node = document.querySelector("[data-make-safe]");
          const box = node.getBoundingClientRect();
          const top = document.elementFromPoint(box.x + box.width / 2, box.y + box.height / 2);
          return Boolean(top && node.contains(top));
        }"""
        )
        assert hit, "MAKE SAFE is covered"
