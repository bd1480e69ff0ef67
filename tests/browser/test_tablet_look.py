"""The tablet's screens, driven in Chromium over a host that is made up (look_server.py) and the real run engine.

Looked at on every page: axe, MAKE SAFE in reach, sizes of targets, nothing wider than the screen, the strict policy kept.
Outside checks: axe-core's rules (WCAG 2.2 A and AA); target sizes from WCAG 2.2 success criteria 2.5.5 and 2.5.8; the
hold and the words of a refusal are this project's own rules. Storage and keys: the other browser tests.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from driving import PATIENCE_S
from job import HELD
from look_play import Play
from look_server import LookServer, scene

pytestmark = pytest.mark.browser
CHROMIUM = "/usr/bin/chromium"
WIDTHS = {"phone": (390, 844), "portrait": (820, 1180), "landscape": (1280, 800)}
Act = Callable[[Any], None]


@pytest.fixture(scope="module")
def server() -> Any:
    made = LookServer()
    yield made
    made.stop()


@pytest.fixture(scope="module")
def browser(playwright_here: Any) -> Any:
    made = playwright_here.chromium.launch(executable_path=CHROMIUM, args=["--no-sandbox", "--disable-gpu"])
    yield made
    made.close()


@pytest.fixture
def page(browser: Any) -> Any:
    context = browser.new_context(viewport={"width": 820, "height": 1180})
    made = context.new_page()
    made.set_default_timeout(PATIENCE_S * 1000)
    wrong: list[str] = []
    made.on("console", lambda m: wrong.append(m.text) if "Content Security Policy" in m.text else None)
    made.on("pageerror", lambda e: wrong.append(str(e)))
    yield made
    context.close()
    assert wrong == []


def show(page: Any, server: LookServer, made: dict[str, Any], hash_: str = "") -> None:
    server.show(made)
    where = hash_ or f"#run?run={made['runs'][0]['run']}"
    page.goto("about:blank")
    page.goto(f"{server.url}/app/{where}")
    page.wait_for_selector("[data-frame], .page-body:not([aria-busy])")


def at(step: str, procedure: str = "warm-up", **more: Any) -> dict[str, Any]:
    return scene(Play(procedure).to(step, picks={"next": "look"}), **more)


def commands(page: Any) -> list[dict[str, Any]]:
    return [c for c in page.evaluate("() => globalThis.commands") if c["do"] != "start"]


def on_hold(page: Any) -> dict[str, float]:
    """The pointer on the button that is held; its box."""
    box: dict[str, float] = page.locator("[data-hold]").last.bounding_box()
    page.mouse.move(box["x"] + 30, box["y"] + box["height"] / 2)
    return box


def hold(page: Any) -> None:
    """Held long enough by the page's own time."""
    on_hold(page)
    page.mouse.down()
    page.evaluate(HELD, 1050)
    page.mouse.up()


def stop_clock(page: Any) -> None:
    """From now on the page's time goes on only by `page.clock.run_for`; the clock was installed before the page was opened."""
    page.clock.pause_at(page.evaluate("() => Date.now() / 1000") + 1)


def held_for(page: Any, ms: int, slide: bool = False) -> None:
    """Held for exactly so long by a stopped clock, sliding off after 300 ms if said."""
    box = on_hold(page)
    page.mouse.down()
    if slide:
        page.clock.run_for(300)
        page.mouse.move(box["x"] + 30, box["y"] - 60)
    page.clock.run_for(ms)
    page.mouse.up()


def fail(page: Any) -> None:
    page.fill("[data-typed]", "6.62")
    page.click("[data-first]")
    page.wait_for_selector("[data-ways]")


def over(name: str) -> Act:
    def act(page: Any) -> None:
        page.click("[data-this-run]")
        page.click(f"[data-to={name}]")
        page.wait_for_selector(f"[data-over={name}]")

    return act


def correct(page: Any) -> None:
    page.locator("[data-past] button.row", has_text="Bias voltage").last.click()
    page.click("[data-correct]")


def paused() -> dict[str, Any]:
    play = Play("warm-up").to("heater_left")
    play.do({"do": "paused", "reason": "called to the other cabinet"})
    return scene(play)


def ended(signed: bool = False, **more: Any) -> dict[str, Any]:
    play = Play("warm-up").to("@end")
    play.do({"do": "ended", "outcome": "done"})
    if signed:
        play.sign("vell", "performed")
    return scene(play, **more)


def stopped() -> dict[str, Any]:
    play = Play("warm-up").to("heater_left")
    play.do({"do": "safe-step-done", "item": play.sheet["make_safe"][0]["id"]})
    return scene(play)


LOST = {"runs": [], "health": {"storage": "lost", "says": ["Run 0731-B2-2 had reached event 212."]}}
BARE = {"enrolled": False, "device": None, "kit": None, "runs": [], "health": {"offline_ready": False, "says": ["Nothing is stored on this tablet."]}}
RETURNED = [{"run": "0731-B2-2", "reason": "Which meters does the picture show?", "by": "quill", "by_name": "S. Quill", "time": "2026-08-01T09:10:00+01:00", "seq": 9999}]
HV = "hv-bring-up"
#: name -> (scene, hash, what is done before looking)
PAGES: dict[str, tuple[Callable[[], dict[str, Any]], str, Act | None]] = {
    "home": (lambda: scene(Play("warm-up")), "#home", None),
    "home, not enrolled": (lambda: scene(held_more=BARE), "#home", None),
    "home, storage lost": (lambda: scene(held_more=LOST), "#home", None),
    "enrol": (scene, "#enrol", None),
    "kit": (scene, "#kit", None),
    "start": (scene, "#start", None),
    "site card": (scene, "#card", None),
    "states as found": (lambda: scene(Play("warm-up")), "", None),
    "caution": (lambda: at("danger_deck"), "", None),
    "notice": (lambda: at("notice_tube"), "", None),
    "confirm": (lambda: at("heater_on"), "", None),
    "number": (lambda: at("heater_left"), "", lambda p: p.fill("[data-typed]", "6.48")),
    "ways on": (lambda: at("heater_left"), "", fail),
    "wait": (lambda: at("warm"), "", None),
    "choice": (lambda: at("history"), "", None),
    "result": (lambda: at("heater_hot"), "", None),
    "picture": (lambda: at("picture_meters"), "", None),
    "remark": (lambda: at("what_waits"), "", None),
    "lock": (lambda: at("lock_q1", HV), "", None),
    "unlock": (lambda: at("unlock_q1", HV), "", None),
    "prove": (lambda: at("prove_beam", HV), "", lambda p: p.locator("[data-typed]").first.fill("502")),
    "earth": (lambda: at("earth_e2", HV), "", None),
    "lift": (lambda: at("lift_e3", HV), "", None),
    "hold": (lambda: at("release", HV), "", None),
    "people": (lambda: at("hands_in", HV), "", None),
    "make safe": (lambda: at("warm"), "", lambda p: p.click("[data-make-safe]")),
    "this run": (lambda: at("warm"), "", lambda p: p.click("[data-this-run]")),
    "trip": (lambda: at("warm"), "", over("trip")),
    "person": (lambda: at("warm"), "", over("person")),
    "remark beside": (lambda: at("warm"), "", over("remark")),
    "correction": (lambda: at("warm"), "", correct),
    "after a gap": (paused, "", None),
    "stopped": (stopped, "", None),
    "end": (lambda: at("@end"), "", None),
    "signature": (ended, "", None),
    "returned": (lambda: ended(True, inbox=RETURNED), "", None),
}  # fmt: skip


def opened(page: Any, server: LookServer, name: str) -> None:
    make, hash_, act = PAGES[name]
    show(page, server, make(), hash_)
    if act:
        act(page)
    page.evaluate(SETTLED)


#: until the fonts are there and two frames are drawn with them
SETTLED = "() => document.fonts.ready.then(() => new Promise((go) => requestAnimationFrame(() => requestAnimationFrame(go))))"
SIZES = """() => [...document.querySelectorAll("button, a, input, textarea, select")].filter((n) => n.checkVisibility() && !n.disabled && n.getClientRects().length).map((n) => {
  const box = n.getBoundingClientRect();
  return { what: n.outerHTML.slice(0, 120), high: Math.round(box.height), wide: Math.round(box.width), main: n.matches("[data-first], .key, .way, [data-hold], .makesafe") };
})"""
TOO_WIDE = """() => [...document.querySelectorAll("html, .strip, .page-body")].filter((n) => n.scrollWidth > n.clientWidth + 1).map((n) => n.className || n.tagName)"""


@pytest.mark.parametrize("name", PAGES)
def test_in_a_very_narrow_window_nothing_is_wider_than_the_screen(page: Any, server: LookServer, name: str) -> None:
    """Axe, target sizes and the three widths of the studies are swept in test_axe.py."""
    opened(page, server, name)
    page.set_viewport_size({"width": 320, "height": 640})
    page.evaluate(SETTLED)
    for one in page.evaluate(SIZES):
        assert one["high"] >= (54 if one["main"] else 48) and one["wide"] >= 44, (name, one)
    assert page.evaluate(TOO_WIDE) == [], name


HIT = """() => {
  const node = document.querySelector("[data-make-safe]"), box = node.getBoundingClientRect();
  return [[0.5, 0.5], [0.1, 0.15], [0.9, 0.85]].every(([x, y]) => {
    const top = document.elementFromPoint(box.x + box.width * x, box.y + box.height * y);
    return top && node.contains(top);
  }) && box.top >= 0 && box.left >= 0;
}"""


@pytest.mark.parametrize("name", [n for n, (_, hash_, _a) in PAGES.items() if not hash_])
def test_make_safe_is_in_reach_on_every_page_of_a_run_and_opening_it_records_nothing(page: Any, server: LookServer, name: str) -> None:
    opened(page, server, name)
    for w, h in (*WIDTHS.values(), (320, 640), (1024, 500)):
        page.set_viewport_size({"width": w, "height": h})
        page.evaluate(SETTLED)
        assert page.evaluate(HIT), (name, w)
        page.evaluate("() => document.querySelector('[data-strip]').scrollTo(0, 99999)")
        assert page.evaluate(HIT), (name, w, "scrolled")
    before = len(commands(page))
    page.click("[data-make-safe]")
    page.wait_for_selector("[data-safe-list]")
    if name != "stopped":
        assert "Nothing has been changed yet" in page.inner_text("[data-nothing]")
    assert "EO-1 hall door" in page.inner_text("[data-eo]")
    assert len(commands(page)) == before


def test_only_the_lists_own_steps_record_and_it_turns_red(page: Any, server: LookServer) -> None:
    show(page, server, at("warm"))
    page.click("[data-make-safe]")
    page.locator("[data-done]").first.click()
    page.wait_for_selector("[data-item].done")
    page.locator("[data-was-so]").first.click()
    page.wait_for_function("() => document.querySelectorAll('[data-item].done').length === 2")
    assert [(c["do"], c["done"]) for c in commands(page)] == [("safe-step-done", True), ("safe-step-done", False)]
    assert page.locator("[data-make-safe][data-called]").count() == 1
    page.click("[data-close]")
    assert "This run is stopped" in page.inner_text("h1")


# ---- a reading -------------------------------------------------------------------------------------------------------


def test_a_reading_is_judged_while_it_is_typed_and_said_in_words(page: Any, server: LookServer) -> None:
    show(page, server, at("heater_left"))
    for text, verdict in (("6.30", "pass"), ("6.48", "conditional pass"), ("6.51", "conditional fail"), ("6.62", "fail")):
        page.fill("[data-typed]", text)
        assert page.get_attribute("[data-verdict-box]", "data-verdict") == verdict
        page.locator("[data-say]", has_text=f"{text} V, {verdict}").wait_for(state="attached")
    page.fill("[data-typed]", "6.30")
    page.locator("[data-spoken]", has_text="six point three zero").wait_for()
    assert page.inner_text("[data-first]").split() == ["Record", "6.30", "V"]
    assert page.locator("[data-scale] svg").get_attribute("aria-label")


def test_the_keypad_types_digits_point_comma_and_sign_into_a_text_field(page: Any, server: LookServer) -> None:
    show(page, server, at("bias_voltage"))
    for key in ("1", "1", "8", ",", "6", "±"):
        page.locator(f"[data-key='{key}']").click()
    assert page.input_value("[data-typed]") == "-118,6"
    assert page.get_attribute("[data-typed]", "type") == "text"
    assert page.get_attribute("[data-verdict-box]", "data-verdict") == "pass"
    page.locator("[data-key=back]").click()
    assert page.input_value("[data-typed]") == "-118,"
    page.locator("[data-key=Clear]").click()
    assert page.input_value("[data-typed]") == ""


@pytest.mark.parametrize("text", ["12.5.1", "1e5", "1 000", "five", "1.234,5"])
def test_what_was_typed_stays_on_a_refusal_with_the_words_beside_it(page: Any, server: LookServer, text: str) -> None:
    show(page, server, at("heater_left"))
    page.fill("[data-typed]", text)
    page.click("[data-first]")
    page.wait_for_selector("[data-wrong]:not(:empty)")
    assert page.input_value("[data-typed]") == text
    assert page.get_attribute("[data-typed]", "aria-invalid") == "true"
    assert page.locator("[data-ways]").count() == 0


def test_enter_arrows_and_wheel_change_and_record_nothing(page: Any, server: LookServer) -> None:
    show(page, server, at("heater_left"))
    page.fill("[data-typed]", "6.30")
    page.focus("[data-typed]")
    for key in ("Enter", "ArrowUp", "ArrowDown"):
        page.keyboard.press(key)
    page.mouse.wheel(0, 200)
    assert page.input_value("[data-typed]") == "6.30"
    assert commands(page) == []


def test_saved_is_said_only_once_it_is_so_and_received_only_on_a_receipt(page: Any, server: LookServer) -> None:
    page.clock.install()
    show(page, server, at("heater_left", slow=700))
    assert page.inner_text("[data-saved]").startswith("Saved on this tablet")
    page.fill("[data-typed]", "6.30")
    stop_clock(page)
    page.click("[data-first]")
    page.clock.run_for(690)
    assert page.locator("[data-saved]").text_content() == "Saving"
    assert commands(page)[-1]["do"] == "read"
    page.clock.resume()
    page.wait_for_function("() => document.querySelector('[data-saved]').textContent.startsWith('Saved on this tablet')")
    page.evaluate("() => globalThis.synced('received')")
    page.wait_for_function("() => document.querySelector('[data-saved]').textContent.startsWith('Received by the server')")


def test_a_failing_reading_offers_what_its_moves_allow_and_again_needs_a_reason(page: Any, server: LookServer) -> None:
    show(page, server, at("heater_left"))
    fail(page)
    assert [w.get_attribute("data-way") for w in page.locator("[data-way]").all()] == ["stop", "again"]
    assert "2 tries are left" in page.inner_text("[data-way=again]")
    page.click("[data-way=again]")
    page.click("[data-confirm-again]")
    assert "Give the reason" in page.inner_text("[data-way-form]")
    assert len(commands(page)) == 1
    page.fill("[data-reason]", "meter not steady")
    page.click("[data-confirm-again]")
    page.wait_for_selector("[data-typed]")
    fail(page)
    assert "1 try is left" in page.inner_text("[data-way=again]")
    assert page.locator("[data-past] button.row", has_text="6.62").count() == 2


def test_a_deviation_needs_the_supervisors_own_passphrase(page: Any, server: LookServer) -> None:
    play = Play("warm-up").to("heater_hot", texts={"heater_amps_10": "9.25", "heater_amps_warm": "9.25", "heater_warm": "6.45"})
    show(page, server, scene(play))
    page.click("[data-first]")
    page.click("[data-way=deviation]")
    page.fill("[data-reason]", "Leads are longer than on the test sheet.")
    page.fill("[data-under]", "maker's letter")
    assert "S. Quill" in page.inner_text("[data-way-form]") and "K. Orme" in page.inner_text("[data-way-form]")
    page.fill("[data-passphrase]", "wrong")
    page.click("[data-confirm-deviation]")
    page.wait_for_selector(".field .wrong:not(:empty)")
    assert "Try again in 2 s" in page.inner_text("[data-way-form]")
    page.fill("[data-passphrase]", "right")
    page.click("[data-confirm-deviation]")
    page.wait_for_selector("[data-field=picture]")
    assert commands(page)[-1]["authority"] == "quill"


def test_a_correction_stands_in_the_row_it_corrects_the_old_value_struck_through(page: Any, server: LookServer) -> None:
    show(page, server, at("grid_current"))
    correct(page)
    page.fill("[data-right]", "-119.6")
    page.click("[data-record-correction]")
    assert "Give the reason" in page.inner_text("[data-correction]")
    page.fill("[data-correction] [data-reason]", "first figure misread")
    page.click("[data-record-correction]")
    page.wait_for_selector("[data-past] s")
    row = page.locator("[data-past] button.row", has_text="Bias voltage")
    assert row.locator("s").inner_text() == "−120.0" and "−119.6" in row.inner_text()


# ---- holding, waiting, reach -----------------------------------------------------------------------------------------


def test_press_and_hold_takes_a_whole_second_and_sliding_off_or_letting_go_does_nothing(page: Any, server: LookServer) -> None:
    page.clock.install()
    show(page, server, at("danger_deck"))
    stop_clock(page)
    held_for(page, 600)
    held_for(page, 980)
    held_for(page, 1200, slide=True)
    page.clock.run_for(2000)
    assert commands(page) == []
    held_for(page, 1040)
    page.clock.resume()
    page.wait_for_function("() => globalThis.commands.length === 1")
    assert commands(page)[0]["heard"] == ["vell", "arkle"]


def test_press_and_hold_works_by_keyboard_and_by_a_screen_readers_two_clicks(page: Any, server: LookServer) -> None:
    page.clock.install()
    show(page, server, at("danger_deck"))
    stop_clock(page)
    page.focus("[data-hold]")
    page.keyboard.down("Space")
    page.clock.run_for(400)
    page.keyboard.up("Space")
    page.clock.run_for(900)
    assert commands(page) == []
    page.keyboard.down("Space")
    page.clock.run_for(1040)
    page.keyboard.up("Space")
    page.clock.resume()
    page.get_by_role("heading", name="WARNING: Ion pump at 3.7 kV, and strong magnets").wait_for(state="attached")
    stop_clock(page)
    page.evaluate("() => document.querySelector('[data-hold]').click()")
    page.clock.run_for(100)
    assert "once more" in page.locator("[data-alert]").text_content()
    assert len(commands(page)) == 1
    page.evaluate("() => document.querySelector('[data-hold]').click()")
    page.clock.resume()
    page.wait_for_function("() => globalThis.commands.length === 2")


def test_a_wait_counts_down_dashed_and_opens_when_it_is_over(page: Any, server: LookServer) -> None:
    show(page, server, at("warm"))
    assert "wait" in (page.get_attribute("[data-first]", "class") or "")
    assert page.inner_text("[data-first]").startswith("Opens in 4:")
    page.click("[data-first]", force=True)
    assert commands(page) == []
    page.evaluate("() => globalThis.skip(400)")
    page.wait_for_function("() => document.querySelector('[data-alert]').textContent.includes('the wait is over')")
    page.get_by_role("button", name="The wait is over: go on").click()
    page.wait_for_function("() => globalThis.commands.at(-1)?.do === 'waited'")


def test_a_step_that_may_not_open_says_exactly_why(page: Any, server: LookServer) -> None:
    show(page, server, at("ion_warming"))
    assert "1 min have passed since “Heater on at rated volts, soft start”" in page.inner_text("[data-reason-list]")
    assert page.get_attribute("[data-first]", "aria-disabled") == "true"


def test_glove_mode_makes_keys_80_px_and_dark_is_a_button(page: Any, server: LookServer) -> None:
    show(page, server, at("heater_left"))
    page.click("[data-this-run]")
    page.click("[data-gloves-button]")
    page.click("[data-theme-button]")
    assert page.evaluate("() => document.documentElement.dataset.theme") == "dark"
    page.click("[data-close]")
    for one in page.evaluate(SIZES):
        assert one["high"] >= (68 if "makesafe" in one["what"] else 80 if one["main"] else 64), one


FOCUS = """() => {
  const node = document.activeElement;
  if (!node || node === document.body) return null;
  const box = node.getBoundingClientRect();
  const top = document.elementFromPoint(box.x + box.width / 2, box.y + box.height / 2);
  const ring = getComputedStyle(node.matches(".pick input") ? node.nextElementSibling : node.matches("[data-field=picture] input") ? node.parentElement.querySelector("label") : node.closest(".well") ?? node);
  return { what: node.outerHTML.slice(0, 100), clear: Boolean(top && (node.contains(top) || top.contains(node))), ring: ring.outlineStyle };
}"""


@pytest.mark.parametrize("width", ["phone", "portrait", "landscape"])
@pytest.mark.parametrize("name", ["number", "prove", "make safe", "states as found"])
def test_focus_is_visible_and_never_hidden_under_anything(page: Any, server: LookServer, name: str, width: str) -> None:
    w, h = WIDTHS[width]
    page.set_viewport_size({"width": w, "height": h})
    opened(page, server, name)
    seen = set()
    page.evaluate("() => document.querySelector('[data-make-safe]').focus()")
    page.keyboard.press("Shift+Tab")
    for _ in range(60):
        page.keyboard.press("Tab")
        found = page.evaluate(FOCUS)
        if found is None:
            break
        seen.add(found["what"])
        assert found["clear"] and found["ring"] == "solid", (name, width, found)
    assert len(seen) > 5
    assert any("makesafe" in one for one in seen)


# ---- before, between and after ---------------------------------------------------------------------------------------


def test_storage_that_is_gone_is_said_plainly_and_no_run_is_put_forward(page: Any, server: LookServer) -> None:
    show(page, server, scene(held_more=LOST), "#home")
    said = page.inner_text("main")
    assert "What this tablet held is gone" in said and "this is a loss, not an empty list" in said
    assert page.locator("[data-next]").count() == 0


def test_a_tablet_that_is_not_enrolled_says_so(page: Any, server: LookServer) -> None:
    show(page, server, scene(held_more=BARE), "#home")
    assert "This tablet is not enrolled" in page.inner_text("main")
    assert page.locator("[data-next=enrol]").count() == 1


def test_a_run_that_needs_two_is_refused_to_one_saying_what_may_be_done_alone(page: Any, server: LookServer) -> None:
    alone = {"code": "alone", "says": "This procedure needs 2 people, and 1 is named. Alone you may warm up the tube."}
    show(page, server, scene(startSays=alone), "#start")
    page.get_by_label("Beam supply to working voltage").check()
    page.get_by_label("Cabinet B2").first.check()
    page.locator("fieldset", has_text="Who is here").get_by_label("J. Vell").check()
    assert "You work alone" in page.inner_text("main")
    page.click("[data-start]")
    page.wait_for_selector("[data-code=alone]")
    assert "Alone you may warm up the tube" in page.inner_text("[data-code=alone]")
    assert page.locator("[data-start]:not([disabled])").count() == 1


def test_the_states_as_found_are_recorded_with_a_lock_that_the_board_did_not_show(page: Any, server: LookServer) -> None:
    show(page, server, scene(Play("warm-up")))
    assert "Lock 41 on Q1" in page.inner_text("main")
    for source, state in {"beam_supply": "locked", "rf_drive": "locked", "heater": "off", "bias": "off", "magnets": "off", "ion_pump": "on", "coolant": "off", "air": "off"}.items():
        page.locator(f"[data-source={source}] input[value='{state}']").first.check()
    page.locator("[data-source=ion_pump]").get_by_role("textbox").fill("60")
    page.click("[data-name-lock]")
    row = page.locator("[data-found-lock]").last
    row.get_by_label("Isolating point").select_option("Q8")
    row.get_by_label("Number on the lock").fill("77")
    row.get_by_label("Its holder").select_option("")
    row.get_by_label("Name of the holder").fill("A visitor")
    page.get_by_label("I have looked at the board").check()
    page.get_by_role("button", name="Record the states as found").click()
    page.wait_for_function("() => globalThis.commands.length === 1")
    sent = commands(page)[0]
    assert sent["ages"] == {"ion_pump": "3600"} and sent["board_seen"] is True
    assert sent["locks"] == [{"point": "Q8", "sources": ["air"], "lock": "77", "tag": "", "holder": "", "holder_name": "A visitor"}]


def test_after_a_gap_each_source_is_said_and_a_difference_says_that_it_stops_the_run(page: Any, server: LookServer) -> None:
    show(page, server, paused())
    for one in page.locator("[data-source] input[value=unbroken]").all():
        one.check()
    page.locator("[data-source=heater] input[value=otherwise]").check()
    page.locator("[data-source=heater] .more input[value=off]").check()
    assert "Recording this stops the run" in page.inner_text("[data-differs]")
    page.get_by_role("button", name="Record it: this stops the run").click()
    page.get_by_role("heading", name="This run is stopped").wait_for()
    sent = commands(page)[0]
    assert sent["states"]["heater"] == "off" and "heater" not in sent["unbroken"] and "ion_pump" in sent["unbroken"]


def test_a_hold_point_is_released_only_by_another_person_with_their_passphrase(page: Any, server: LookServer) -> None:
    show(page, server, at("release", HV))
    assert page.locator("[data-hold]").is_disabled()
    page.fill("[data-passphrase]", "wrong")
    hold(page)
    page.wait_for_selector(".wrong:not(:empty)")
    assert commands(page) == []
    page.fill("[data-passphrase]", "right")
    hold(page)
    page.wait_for_function("() => globalThis.commands.length === 1")
    assert commands(page)[0]["who"] == "arkle"


def test_what_is_signed_is_shown_and_a_wrong_passphrase_signs_nothing(page: Any, server: LookServer) -> None:
    show(page, server, ended())
    shown = page.inner_text(".signed-over")
    assert "0731-B2-2" in shown and "I did this work and these are my readings" in shown
    page.fill("[data-passphrase]", "wrong")
    page.click("[data-sign]")
    page.wait_for_selector("[data-refused]:not(:empty)")
    page.fill("[data-passphrase]", "right")
    page.click("[data-sign]")
    page.get_by_role("heading", name="Ended and signed").wait_for()


def test_a_returned_run_is_taken_up_again_with_its_reason_and_signed_again(page: Any, server: LookServer) -> None:
    show(page, server, ended(True, inbox=RETURNED))
    page.wait_for_selector("[data-returned]")
    assert "Which meters does the picture show?" in page.inner_text("[data-returned]")
    page.click("[data-reopen]")
    page.wait_for_selector("[data-sign]")
    page.get_by_role("button", name="Remark").first.click()
    page.get_by_role("dialog").get_by_role("textbox").fill("DM-04, DM-05 and DM-06.")
    page.get_by_role("dialog").get_by_role("button", name="Record").click()
    page.wait_for_selector("[data-sign]")
    page.fill("[data-passphrase]", "right")
    page.click("[data-sign]")
    page.wait_for_function("() => globalThis.commands.at(-1).do === 'sign'")
    assert [c["do"] for c in commands(page)] == ["reopened", "remarked", "sign"]


def test_a_picture_is_kept_before_it_is_recorded_and_a_file_that_is_none_is_refused_in_words(page: Any, server: LookServer, tmp_path: Path) -> None:
    show(page, server, at("picture_meters"))
    text = tmp_path / "no.txt"
    text.write_text("not a picture")
    page.set_input_files("[data-field=picture] input", str(text))
    page.wait_for_selector("[data-wrong]:not(:empty)")
    picture = Path(__file__).resolve().parents[2] / "static/icons/fieldkit-180.png"
    page.set_input_files("[data-field=picture] input", str(picture))
    page.wait_for_selector("[data-preview] img")
    page.get_by_role("button", name="Record the picture").click()
    page.wait_for_function("() => globalThis.commands.at(-1)?.do === 'pictured'")
    assert commands(page)[-1]["sha256"] == "1" * 64


def test_a_proof_is_entered_line_by_line_and_recorded_as_one_answer(page: Any, server: LookServer) -> None:
    show(page, server, at("prove_beam", HV))
    for text in ("502", "3", "2", "1", "501"):
        page.locator(".proof li.open [data-typed]").fill(text)
        assert commands(page) == []
        page.click("[data-first]")
    page.wait_for_function("() => globalThis.commands.length === 1")
    sent = commands(page)[0]
    assert (sent["before"], [p["text"] for p in sent["points"]], sent["after"]) == ("502", ["3", "2", "1"], "501")


def test_a_refusal_is_said_where_the_control_has_no_field_for_it(page: Any, server: LookServer) -> None:
    show(page, server, at("danger_deck", commandSays={"code": "read-only", "says": "This run is open in another window."}))
    hold(page)
    page.wait_for_selector("[data-refused]:not(:empty)")
    assert "open in another window" in page.inner_text("[data-refused]")
