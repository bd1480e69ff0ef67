"""Meters and ranges on the tablet: what is proposed, what else may be chosen, what is said before anyone reads.

Over the made-up host of look_server.py with the real run engine. The whole way to the record: test_three_meters.py.
Outside checks: limits and U by hand from the ranges below, a = percent * |x| + digits * resolution, U = 2 a / root(3)
(GUM 4.3.7 and 6.2); guarded acceptance of ILAC-G8:09/2019 4.2.2, w = U (from memory).
"""

from __future__ import annotations

import math
import random
from collections.abc import Callable, Iterator
from typing import Any

import pytest
from driving import ARGS, CHROMIUM, PATIENCE_S
from look_places import HV, OUT, RANGES, at, metered
from look_play import Play
from look_server import LookServer, scene

pytestmark = pytest.mark.browser


@pytest.fixture(scope="module")
def server() -> Iterator[LookServer]:
    made = LookServer()
    yield made
    made.stop()


@pytest.fixture(scope="module")
def browser(playwright_here: Any) -> Iterator[Any]:
    made = playwright_here.chromium.launch(executable_path=CHROMIUM, args=ARGS)
    yield made
    made.close()


@pytest.fixture
def show(browser: Any, server: LookServer) -> Iterator[Callable[[dict[str, Any]], Any]]:
    """A page at the open step of a scene."""
    context = browser.new_context(viewport={"width": 820, "height": 1180})
    context.set_default_timeout(PATIENCE_S * 1000)
    page = context.new_page()
    faults: list[str] = []
    page.on("pageerror", lambda e: faults.append(str(e)))
    page.on("console", lambda m: faults.append(m.text) if "Content Security Policy" in m.text else None)

    def opened(made: dict[str, Any]) -> Any:
        server.show(made)
        page.goto("about:blank")
        page.goto(f"{server.url}/app/#run?run={made['runs'][0]['run']}")
        page.wait_for_selector("[data-typed]")
        return page

    yield opened
    context.close()
    assert faults == []


def commands(page: Any) -> list[dict[str, Any]]:
    found: list[dict[str, Any]] = page.evaluate("() => globalThis.commands")
    return found


def choose(page: Any, name: str) -> None:
    page.locator("[data-ranges] label", has_text=name).click()


def limits(page: Any) -> str:
    return page.get_attribute("[data-scale] svg", "aria-label") or ""


def u(reading: float, resolution: float, percent: float = 0.3, digits: int = 1) -> float:
    """U (k = 2) of a meter of the ranges below: half-width a, rectangular."""
    return 2 * (percent / 100 * abs(reading) + digits * resolution) / math.sqrt(3)


def test_the_smallest_range_that_holds_the_limits_is_proposed_and_each_says_what_it_is_worth(show: Any) -> None:
    page = show(metered(ranges=RANGES))
    assert page.locator("[data-ranges] input:checked").get_attribute("value") == "20 V"
    page.wait_for_function("() => document.querySelector('[data-ranges] small').textContent.trim()")
    said = [" ".join(one.split()) for one in page.locator("[data-ranges] label").all_inner_texts()]
    # U at the nameplate's 6.30 V, to two digits and no finer than the steps
    assert said == ["2 V too low", f"20 V ±{u(6.3, 0.01):.2f}", f"200 V ±{u(6.3, 0.1):.1f}", "1000 V not judged"]
    assert page.locator("[data-ranges] .unfit").count() == 2


def test_another_range_changes_limits_and_guard_before_anything_is_typed_and_records_nothing(show: Any) -> None:
    page = show(metered(ranges=RANGES))
    assert "limits 6.10 to 6.50 V" in limits(page)
    # 6.10 + U and 6.50 - U, rounded inward to 0.01 V
    low, high = math.ceil((6.10 + u(6.10, 0.01)) * 100) / 100, math.floor((6.50 - u(6.50, 0.01)) * 100) / 100
    assert f"{low:.2f} to {high:.2f} V passes;" in page.inner_text("[data-sentence]")
    choose(page, "200 V")
    assert "limits 6.1 to 6.5 V" in limits(page)
    page.locator("[data-sentence]", has_text="6.3 to 6.3 V passes;").or_(
        page.locator("[data-sentence]", has_text="Exactly 6.3 V passes;")
    ).wait_for()
    page.fill("[data-typed]", "6.2")
    assert page.get_attribute("[data-verdict-box]", "data-verdict") == "conditional pass"
    choose(page, "20 V")
    assert page.input_value("[data-typed]") == "6.2"
    assert page.get_attribute("[data-verdict-box]", "data-verdict") == "pass"
    assert commands(page) == []


def test_what_was_chosen_is_recorded_and_proposed_for_the_next_reading_of_that_meter(show: Any) -> None:
    page = show(at("xray_1m_first", HV))
    assert page.locator("[data-ranges] input:checked").get_attribute("value") == "5 uSv/h"
    choose(page, "50 µSv/h")
    page.fill("[data-typed]", "0.4")
    page.click("[data-first]")
    page.get_by_role("heading", name="X-rays at 5 cm, first level").wait_for()
    sent = commands(page)[0]
    assert (sent["do"], sent["instrument"], sent["range"], sent["text"]) == ("read", "XR-1", "50 uSv/h", "0.4")
    assert page.locator("[data-ranges] input:checked").get_attribute("value") == "50 uSv/h"
    page.locator("[data-past] button.row", has_text="X-rays at 1 m, first level").click()
    assert "XR-1, 50 µSv/h range" in page.inner_text("[data-over=past]")


def test_a_chosen_range_outlasts_a_look_at_another_page(show: Any) -> None:
    page = show(metered(ranges=RANGES))
    choose(page, "200 V")
    page.fill("[data-typed]", "6.4")
    page.click("[data-this-run]")
    page.click("[data-close]")
    page.wait_for_selector("[data-typed]")
    assert page.input_value("[data-typed]") == "6.4"
    assert page.locator("[data-ranges] input:checked").get_attribute("value") == "200 V"
    assert "6.1 to 6.5 V" in limits(page)


@pytest.mark.parametrize(("name", "note"), [
    ("1000 V", "A reading cannot be judged: no reading of this meter lies between the limits: use the 20 V range."),
    ("2 V", "No reading on this range can pass: this range ends at 2 V, below the limit of 6.100 V: use the 20 V range."),
])  # fmt: skip
def test_a_range_that_does_not_serve_is_said_so_before_anyone_reads(show: Any, name: str, note: str) -> None:
    page = show(metered(ranges=RANGES))
    assert page.locator("[data-note]").count() == 0
    choose(page, name)
    assert page.inner_text("[data-beforehand]") == note
    page.locator("[data-say]", has_text=note).wait_for(state="attached")
    # not by colour: its frame is broken, and the mark is the one of a reading that is not judged
    assert page.locator("[data-note] svg path[stroke-dasharray]").count() == 1
    assert page.evaluate("() => getComputedStyle(document.querySelector('[data-note]')).borderStyle") == "dashed"
    choose(page, "20 V")
    assert page.locator("[data-note]").count() == 0


def test_a_reading_that_is_not_judged_says_so_in_a_broken_frame_and_is_taken(show: Any) -> None:
    page = show(metered(ranges=RANGES))
    choose(page, "1000 V")
    assert page.inner_text("[data-verdict-box]") == "not judged"
    page.fill("[data-typed]", "6")
    assert page.get_attribute("[data-verdict-box]", "data-verdict") == "not judged"
    page.locator(
        "[data-sentence]",
        has_text="6 V: not judged, no reading of this meter lies between the limits: use the 20 V range",
    ).wait_for()
    page.click("[data-first]")
    page.wait_for_function("() => globalThis.commands.length === 1")
    assert commands(page)[0]["range"] == "1000 V"


def test_an_overdue_meter_is_said_when_the_step_opens_and_its_reading_is_taken(show: Any) -> None:
    page = show(metered(**OUT))
    assert (
        page.inner_text("[data-note=overdue]")
        == "The calibration of DM-04 ran out on 30 Jun 2026. The record will say so."
    )
    assert "calibration ran out on 30 Jun 2026" in page.inner_text("[data-meter]")
    page.fill("[data-typed]", "6.30")
    page.locator("[data-sentence]", has_text="The calibration of DM-04 ran out on 30 Jun 2026.").wait_for()
    page.click("[data-first]")
    page.wait_for_function("() => globalThis.commands.length === 1")


def test_where_an_overdue_meter_is_refused_nothing_records_until_another_one_is_chosen(show: Any) -> None:
    page = show(metered(strict=True))
    note = page.inner_text("[data-note=refused]")
    assert note.startswith("No reading of RM-1 is taken here. The calibration of RM-1 ran out on 30 Jun 2026")
    assert "Use another one." in note and "end the run" not in note
    page.fill("[data-typed]", "0.30")
    assert page.inner_text("[data-first]") == "Opens with another meter"
    page.click("[data-first]", force=True)
    page.locator("[data-alert]", has_text="Opens with another meter.").wait_for(state="attached")
    assert commands(page) == []
    # the others stand open, with how long each holds
    other = page.locator("[data-meter-id=RM-2]")
    assert "calibrated to 31 Jan 2027" in other.inner_text()
    other.click()
    assert page.locator("[data-note]").count() == 0
    assert "RM-2 instead of RM-1" in page.inner_text("[data-meter]")
    assert page.input_value("[data-typed]") == "0.30"
    assert page.evaluate("() => document.activeElement.hasAttribute('data-another-meter')")
    page.click("[data-first]")
    page.wait_for_function("() => globalThis.commands.length === 1")
    assert (commands(page)[0]["instrument"], commands(page)[0]["text"]) == ("RM-2", "0.30")


def test_without_another_meter_the_person_is_told_the_way_out(show: Any) -> None:
    strict = {
        "meter": {"role": "heater_volts", "instrument": "", "hand_at": "", "overdue": "refuse", "correlated": False}
    }
    page = show(
        scene(
            Play("warm-up", instruments={"DM-04": OUT}, controls={"heater_left": strict}).to(
                "heater_left", picks={"next": "look"}
            )
        )
    )
    note = page.inner_text("[data-note=refused]")
    assert "end the run, have another meter entered at the desk, take the kit and begin again" in note
    assert page.get_attribute("[data-first]", "aria-disabled") == "true"


def test_a_proof_is_made_with_one_tester_on_the_range_that_serves(show: Any) -> None:
    page = show(at("prove_beam", HV))
    assert page.locator("[data-ranges] input:checked").get_attribute("value") == "999 V"
    assert page.locator("[data-another-meter]").count() == 0
    choose(page, "40 kV")
    note = page.inner_text("[data-beforehand]")
    assert "cannot be judged" in note and "use the 999 V range" in note
    assert "This step guards people: what is not judged counts as failed." in note
    choose(page, "999 V")
    for text in ("502", "3", "2", "1", "501"):
        page.locator(".proof li.open [data-typed]").fill(text)
        page.click("[data-first]")
    page.wait_for_function("() => globalThis.commands.length === 1")
    assert (commands(page)[0]["instrument"], commands(page)[0]["range"]) == ("HV-2", "999 V")


def test_a_range_is_chosen_by_keyboard(show: Any) -> None:
    page = show(metered(ranges=RANGES))
    page.locator("[data-ranges] input:checked").focus()
    page.keyboard.press("ArrowRight")
    assert page.locator("[data-ranges] input:checked").get_attribute("value") == "200 V"
    assert page.evaluate("() => document.activeElement.value") == "200 V"
    assert "limits 6.1 to 6.5 V" in limits(page)


# ---- drawn with every key --------------------------------------------------------------------------------------------


def test_a_result_shows_its_uncertainty_in_figures_and_on_its_scale(show: Any, server: LookServer) -> None:
    made = at("heater_hot")
    page = show_result(show, server, made)
    figure, own = page.inner_text("[data-value]"), page.inner_text("[data-own-u]")
    assert figure == "0.643" and own == "± 0.006 Ω (k = 2)"
    assert "uncertainty ±0.006 Ω" in limits(page)
    # the bar with its ends, and the pointer on it
    assert page.locator("[data-scale] svg path.s-ink[stroke-width='3']").count() == 1


def show_result(show: Any, server: LookServer, made: dict[str, Any]) -> Any:
    page = show(at("heater_left"))
    server.show(made)
    page.goto("about:blank")
    page.goto(f"{server.url}/app/#run?run={made['runs'][0]['run']}")
    page.wait_for_selector("[data-value]")
    return page


HEARD = """() => {
  globalThis.heard = [];
  const region = document.querySelector("[data-say]");
  new MutationObserver(() => heard.push(region.textContent)).observe(region, { childList: true, characterData: true, subtree: true });
}"""


def test_a_verdict_is_announced_once_typing_pauses_and_not_for_half_a_number(show: Any) -> None:
    page = show(at("heater_left"))
    page.evaluate(HEARD)
    page.focus("[data-typed]")
    page.clock.install()
    for key in "6.48":
        page.keyboard.press(key)
        page.clock.run_for(300)
    assert page.evaluate("() => heard") == []
    page.clock.run_for(800)
    assert page.evaluate("() => heard") == ["6.48 V, conditional pass"]


def test_no_key_of_the_keypad_moves_while_one_types(show: Any) -> None:
    page = show(at("heater_left"))
    where = "() => JSON.stringify([...document.querySelectorAll('.key, [data-first]')].map((n) => { const b = n.getBoundingClientRect(); return [b.x, b.y, b.width, b.height]; }))"
    seen = set()
    for text in ("", "6", "6.", "6.3", "6.30", "6.48", "6.62", "660", "1.2.3"):
        page.fill("[data-typed]", text)
        page.wait_for_timeout(30)
        seen.add(page.evaluate(where))
    assert len(seen) == 1


REDRAWN = """async (models) => {
  const base = document.querySelector("script[type=module]").src.replace("tablet/main.js", "");
  const { scale, tiny } = await import(`${base}core/drawing.js`), { redraw } = await import(`${base}tablet/redraw.js`);
  const fresh = (text) => { const t = document.createElement("template"); t.innerHTML = text; return t.innerHTML; };
  const holder = document.createElement("div"), wrong = [];
  let kept = 0, node = null;
  for (const model of models) {
    const text = model ? (model.small ? tiny : scale)(model) : "";
    redraw(holder, text);
    // attributes may stand in another order
    const sorted = (html) => html.replace(/<(\\w+)((?: [\\w:-]+="[^"]*")*)/g, (_, kind, all) => `<${kind}${(all.match(/ [\\w:-]+="[^"]*"/g) ?? []).sort().join("")}`);
    if (sorted(holder.innerHTML) !== sorted(fresh(text))) wrong.push([model, holder.innerHTML, text]);
    if (node && node === holder.firstElementChild) kept += 1;
    node = holder.firstElementChild;
  }
  return { wrong: wrong.slice(0, 2), kept };
}"""


def test_a_scale_that_is_changed_shape_by_shape_is_the_one_drawn_afresh(show: Any) -> None:
    page = show(at("heater_left"))
    r = random.Random(4)

    def model() -> dict[str, Any] | None:
        if r.random() < 0.05:
            return None
        made: dict[str, Any] = {
            "unit": r.choice(["V", "µA", "a<b"]),
            "low": "6.10",
            "small": r.random() < 0.1,
            "u": "0.03",
        }
        for name, value, chance in (
            ("high", "6.50", 0.8),
            ("accept_low", "6.13", 0.5),
            ("caution_high", "6.4", 0.5),
            ("plate", "6.3", 0.5),
        ):
            if r.random() < chance:
                made[name] = value
        if r.random() < 0.9:
            made |= {"value": f"{r.choice([6.3, 6.48, 6.62, 660, 6.1, 0.2]):.{r.randint(0, 3)}f}"}
        if r.random() < 0.3:
            made["olds"] = [{"name": 'last & "first" try', "value": "6.2"}]
        return made | {"verdict": r.choice(["pass", "fail", "not judged"])}

    told = page.evaluate(REDRAWN, [model() for _ in range(400)])
    assert told["wrong"] == []
    assert told["kept"] > 300
