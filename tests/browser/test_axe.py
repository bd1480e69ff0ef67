"""A sweep over every page of the tablet: axe, sizes and gaps of targets, MAKE SAFE in reach, the strict policy kept.

Each page is met at three widths, and in light and dark, over a host that is made up (look_server.py) and the real run
engine. A page that no place below shows is named by the first test. To add one: a line in PLACES.

Outside checks: axe-core's rules (WCAG 2.2, A and AA, and its best practices). Sizes: 48 px for everything that can be
touched, 56 px for keys, 64 px for what records or stops, 8 px round such; 64 and 76 px with gloves: above WCAG 2.2's
44 px (2.5.5); common practice for gloved hands, no source. What the pages do when they are used: test_tablet_look.py.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest
from axe_playwright_python.sync_playwright import Axe
from driving import ARGS, CHROMIUM
from look_play import Play
from look_server import LookServer, scene

pytestmark = pytest.mark.browser

STATIC = Path(__file__).resolve().parents[2] / "static" / "tablet"
HV = "hv-bring-up"
WIDTHS = {"phone": (390, 844), "portrait": (820, 1180), "landscape": (1280, 800)}
RULES = {
    "runOnly": ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa", "best-practice"],
    "resultTypes": ["violations"],
}
Scene = dict[str, Any]
Act = Callable[[Any], None]

# ---- scenes ----------------------------------------------------------------------------------------------------------

_PLAYS: dict[str, Play] = {}


def at(step: str, procedure: str = "warm-up", **more: Any) -> Scene:
    """The run standing at a step; goes on from the last one that was asked for, where that lies before it."""
    play = _PLAYS.get(procedure)
    if play is None or step in play.state["done"]:
        play = _PLAYS[procedure] = Play(procedure)
    return scene(play.to(step, picks={"next": "look"}), **more)


def begun(procedure: str = "warm-up") -> Scene:
    return scene(Play(procedure))


def over_limit() -> Scene:
    """A derived value outside its limits, which a supervisor may let stand."""
    texts = {"heater_amps_10": "9.25", "heater_amps_warm": "9.25", "heater_warm": "6.45"}
    return scene(Play("warm-up").to("heater_hot", texts=texts))


def after(step: str, *commands: dict[str, Any], **more: Any) -> Scene:
    """A run of its own, at a step, with something done to it."""
    play = Play("warm-up").to(step)
    for command in commands:
        play.do(command)
    return scene(play, **more)


def safe_item() -> str:
    return str(Play("warm-up").sheet["make_safe"][0]["id"])


def signed(*commands: dict[str, Any], **more: Any) -> Scene:
    play = Play("warm-up").to("@end")
    play.do({"do": "ended", "outcome": "done"})
    play.sign("vell", "performed")
    for command in commands:
        play.do(command)
    return scene(play, **more)


LOST = {"runs": [], "health": {"storage": "lost", "says": ["Run 0731-B2-2 had reached event 212."]}}
BARE = {
    "enrolled": False, "device": None, "kit": None, "runs": [],
    "health": {"offline_ready": False, "installed": False, "persisted": False, "says": ["Nothing is stored on this tablet."]},
}  # fmt: skip
BACK = [{"run": "0731-B2-2", "reason": "Which meters does the picture show?", "by": "quill", "by_name": "S. Quill", "time": "2026-08-01T09:10:00+01:00", "seq": 9999}]
REFUSED = {"code": "wrong-password", "says": "That sign-in or its password is wrong."}
ALONE = {"code": "alone", "says": "This procedure needs 2 people, and 1 is named. Alone you may warm up the tube."}
PAUSED = {"do": "paused", "reason": "called to the other cabinet"}

# ---- acts ------------------------------------------------------------------------------------------------------------


def over(name: str, *clicks: str) -> Act:
    def act(page: Any) -> None:
        page.click("[data-this-run]")
        page.click(f"[data-to={name}]")
        page.wait_for_selector(f"[data-over={name}]")
        for one in clicks:
            page.click(one)

    return act


def typing(text: str, *clicks: str) -> Act:
    def act(page: Any) -> None:
        page.locator("[data-typed]").first.fill(text)
        for one in clicks:
            page.click(one)

    return act


def clicking(*clicks: str) -> Act:
    def act(page: Any) -> None:
        for one in clicks:
            page.locator(one).first.click()

    return act


def correcting(page: Any) -> None:
    page.locator("[data-past] button.row", has_text="Bias voltage").last.click()
    page.click("[data-correct]")
    page.click("[data-record-correction]")


def enrolling(page: Any) -> None:
    page.get_by_label("Name of this tablet").fill("tablet 3")
    page.get_by_label("Your sign-in at the station").fill("vell")
    page.click("[data-enrol-send]")
    page.wait_for_selector("[data-enrol-says] *")


def kit_taken(page: Any) -> None:
    page.click("[data-kit-take]")
    page.get_by_text("The kit is aboard").wait_for()


def choosing(page: Any) -> None:
    page.get_by_label("Beam supply to working voltage").check()
    page.get_by_label("Cabinet B2").first.check()
    page.locator("fieldset", has_text="Who is here").get_by_label("J. Vell").check()
    page.click("[data-start]")
    page.wait_for_selector("[data-code=alone]")


def differing(page: Any) -> None:
    for one in page.locator("[data-source] input[value=unbroken]").all():
        one.check()
    page.locator("[data-source=heater] input[value=otherwise]").check()


def away(page: Any) -> None:
    page.get_by_label("Holder is away").check()


def wrong_passphrase(page: Any) -> None:
    page.fill("[data-passphrase]", "wrong")
    page.click("[data-sign]")
    page.wait_for_selector("[data-refused]:not(:empty)")


# ---- places ----------------------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Place:
    """A page in one state: what the host holds, where the address points, what is done before looking, what it shows."""

    name: str
    shows: str
    make: Callable[[], Scene]
    act: Act | None = None
    hash: str = ""


def _outside() -> list[Place]:
    return [
        Place("home", "screen home", begun, hash="#home"),
        Place("home, not enrolled", "screen home", lambda: scene(held_more=BARE), hash="#home"),
        Place("home, storage lost", "screen home", lambda: scene(held_more=LOST), hash="#home"),
        Place("enrol", "screen enrol", lambda: scene(held_more=BARE), hash="#enrol"),
        Place("enrol, asked", "screen enrol", scene, enrolling, "#enrol"),
        Place("enrol, refused", "screen enrol", lambda: scene(enrolSays=REFUSED), enrolling, "#enrol"),
        Place("kit", "screen kit", lambda: scene(held_more=BARE), hash="#kit"),
        Place("kit, taken", "screen kit", scene, kit_taken, "#kit"),
        Place("start", "screen start", scene, hash="#start"),
        Place("start, refused", "screen start", lambda: scene(startSays=ALONE), choosing, "#start"),
        Place("site card", "screen card", scene, hash="#card"),
        Place("a page that cannot be shown", "screen run", begun, hash="#run?run=no-such-run"),
    ]


def _steps() -> list[Place]:
    again = clicking("[data-first]", "[data-way=again]", "[data-confirm-again]")
    deviation = clicking("[data-first]", "[data-way=deviation]", "[data-confirm-deviation]")
    return [
        Place("states as found", "phase declare", begun),
        Place("states as found, a lock named", "phase declare", begun, clicking("[data-name-lock]")),
        Place("danger", "control caution", lambda: at("danger_deck")),
        Place("warning", "control caution", lambda: at("warning_magnets")),
        Place("caution", "control caution", lambda: at("caution_hot")),
        Place("notice", "control caution", lambda: at("notice_tube")),
        Place("choice", "control choice", lambda: at("history")),
        Place("confirm", "control confirm", lambda: at("air_on")),
        Place("confirm, held", "control confirm", lambda: at("heater_on")),
        Place("number", "control number", lambda: at("heater_left")),
        Place("number, conditional", "control number", lambda: at("heater_left"), typing("6.48")),
        Place("number, fail", "control number", lambda: at("heater_left"), typing("6.62")),
        Place("number, refused", "control number", lambda: at("heater_left"), typing("1e5", "[data-first]")),
        Place("ways on", "phase pending", lambda: at("heater_left"), typing("6.62", "[data-first]")),
        Place("taken again", "phase pending", lambda: at("heater_left"), lambda p: (typing("6.62")(p), again(p))),
        Place("deviation", "phase pending", over_limit, deviation),
        Place("wait", "control wait", lambda: at("warm")),
        Place("result", "control result", lambda: at("heater_hot")),
        Place("picture", "control picture", lambda: at("picture_meters")),
        Place("remark", "control remark", lambda: at("what_waits")),
        Place("hold", "control hold", lambda: at("walk_round", HV)),
        Place("unlock", "control unlock", lambda: at("unlock_q1", HV)),
        Place("unlock, holder away", "control unlock", lambda: at("unlock_q1", HV), away),
        Place("a rung of the ladder", "control number", lambda: at("climb_kv", HV)),
        Place("lock", "control lock", lambda: at("lock_q1", HV)),
        Place("prove", "control prove", lambda: at("prove_beam", HV)),
        Place("prove, a line", "control prove", lambda: at("prove_beam", HV), typing("502", "[data-first]")),
        Place("earth", "control earth", lambda: at("earth_e1", HV)),
        Place("people in", "control people", lambda: at("hands_in", HV)),
        Place("people out", "control people", lambda: at("hands_out", HV)),
        Place("lift", "control lift", lambda: at("lift_e3", HV)),
        Place("refused", "control confirm", lambda: at("air_on", commandSays=REFUSED), clicking("[data-first]")),
    ]


def _beside() -> list[Place]:
    done = clicking("[data-make-safe]", "[data-done]")
    changing = over("person", "[data-over=person] .pick input")
    return [
        Place("make safe", "over make_safe", lambda: at("warm"), clicking("[data-make-safe]")),
        Place("make safe, a step recorded", "over make_safe", lambda: at("warm"), done),
        Place("make safe, the site card", "over card", lambda: at("warm"), clicking("[data-make-safe]", "[data-card]")),
        Place("this run", "over this_run", lambda: at("warm"), clicking("[data-this-run]")),
        Place("trip", "over trip", lambda: at("warm"), over("trip", "[data-record-trip]")),
        Place("locks and earths", "over board", lambda: at("warm"), over("board")),
        Place("pause", "over pause", lambda: at("warm"), over("pause")),
        Place("another person", "over person", lambda: at("warm"), changing),
        Place("remark beside", "over remark", lambda: at("warm"), over("remark", "[data-record-remark]")),
        Place("picture beside", "over picture", lambda: at("warm"), over("picture")),
        Place("end early", "over end_early", lambda: at("warm"), over("end_early", "[data-end-early]")),
        Place("void", "over void_run", lambda: at("danger_deck"), over("void_run", "[data-void-run]")),
        Place("correction", "over past", lambda: at("warm"), correcting),
    ]


def _ends() -> list[Place]:
    reopened = {"do": "reopened", "reason": BACK[0]["reason"], "returned_by": "quill"}
    return [
        Place("after a gap", "phase confirm", lambda: after("heater_left", PAUSED)),
        Place("after a gap, otherwise", "phase confirm", lambda: after("heater_left", PAUSED), differing),
        Place("stopped", "phase stopped", lambda: after("air_on", {"do": "safe-step-done", "item": safe_item()})),
        Place("end", "phase going", lambda: at("@end")),
        Place("signature", "phase ended", lambda: after("@end", {"do": "ended", "outcome": "done"})),
        Place("signature, wrong", "phase ended", lambda: after("@end", {"do": "ended", "outcome": "done"}), wrong_passphrase),
        Place("ended and signed", "phase ended", signed),
        Place("returned", "phase ended", lambda: signed(inbox=BACK)),
        Place("taken up again", "phase ended", lambda: signed(reopened)),
        Place("voided", "phase voided", lambda: after("danger_deck", {"do": "voided", "reason": "begun by mistake"})),
    ]


PLACES = [*_outside(), *_steps(), *_beside(), *_ends()]


def registered(file: str, name: str) -> set[str]:
    """The keys of one of the tablet's registries, read from its file."""
    found = re.search(rf"const {name} = \{{ ([^}}]+) \}}", (STATIC / file).read_text(encoding="utf-8"))
    assert found, f"{file} has no {name}"
    return {entry.split(":")[0].strip() for entry in found[1].split(",") if entry.strip()}


def test_every_screen_control_page_over_and_phase_has_a_place() -> None:
    wanted = {f"screen {one}" for one in registered("main.js", "SCREENS")}
    wanted |= {f"over {one}" for one in registered("screens/overs.js", "OVERS")}
    wanted |= {f"control {one}" for one in registered("controls/all.js", "CONTROLS")}
    wanted |= {f"phase {one}" for one in ("declare", "going", "pending", "confirm", "stopped", "ended", "voided")}
    assert {place.shows for place in PLACES} == wanted


# ---- looking ---------------------------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def server() -> Iterator[LookServer]:
    made = LookServer()
    yield made
    made.stop()


@pytest.fixture(scope="module")
def complaints() -> list[str]:
    """What the browser's console said of the policy, and faults of the page; looked at after every place."""
    return []


@pytest.fixture(scope="module")
def page(playwright_here: Any, complaints: list[str]) -> Iterator[Any]:
    browser = playwright_here.chromium.launch(executable_path=CHROMIUM, args=ARGS)
    made = browser.new_page(viewport={"width": 820, "height": 1180})
    made.set_default_timeout(10_000)
    made.on("console", lambda m: complaints.append(m.text) if "Content Security Policy" in m.text else None)
    made.on("pageerror", lambda e: complaints.append(str(e)))
    yield made
    browser.close()


def opened(page: Any, server: LookServer, place: Place) -> Scene:
    made = place.make()
    server.show(made)
    page.set_viewport_size({"width": 820, "height": 1180})
    page.goto("about:blank")
    page.goto(f"{server.url}/app/{place.hash or '#run?run=' + made['runs'][0]['run']}")
    page.wait_for_selector("[data-frame], .page-body")
    if place.act:
        place.act(page)
    page.evaluate(FEWER_ROWS)
    page.evaluate(Axe().axe_script)
    return made


#: rows further off are of the same kinds as the nearest dozen, and would take most of axe's time
FEWER_ROWS = """() => {
  for (const row of document.querySelectorAll("[data-past] > :nth-last-child(n+13), [data-coming] > :nth-child(n+13)")) row.remove();
}"""

SHOWN = """async (inRun) => {
  const [screen, query] = location.hash.slice(1).split("?");
  if (!inRun) return `screen ${screen}`;
  const over = document.querySelector("[data-over]");
  if (over) return `over ${over.dataset.over}`;
  const host = await import(document.querySelector("script[type=module]").src.replace("main.js", "host.js"));
  const run = await host.openRun(new URLSearchParams(query).get("run")), { phase, pending, node } = run.state;
  if (phase !== "going" || node === "@end") return `phase ${phase}`;
  return pending ? "phase pending" : `control ${run.progress().step.control.control}`;
}"""

#: what can be touched, with its box; a label over its own input counts as that input
TARGETS = """() => {
  const main = "[data-first], .act.first, [data-hold], .way, [data-make-safe], [data-done], [data-was-so]";
  return [...document.querySelectorAll("button, a[href], input, textarea, select")]
    .filter((n) => n.checkVisibility() && !n.disabled && n.getClientRects().length)
    .map((n) => {
      const box = n.getBoundingClientRect(), within = n.closest(".strip, .page-body")?.className ?? "";
      return { what: n.outerHTML.slice(0, 140), within, x: box.x, y: box.y, w: box.width, h: box.height, kind: n.matches(main) ? "main" : n.matches(".key") ? "key" : "other", apart: n.matches(`${main}, .key, .act`) };
    });
}"""
AXE = """async (rules) => {
  const { violations } = await axe.run(document, rules);
  return violations.flatMap((v) => v.nodes.map((n) => `${v.id}: ${n.html.slice(0, 140)} ${n.failureSummary}`));
}"""
TOO_WIDE = """() => [...document.querySelectorAll("html, .strip, .page-body")].filter((n) => n.scrollWidth > n.clientWidth + 1).map((n) => n.className || n.tagName)"""
#: middle and near the corners, wherever the page is scrolled to
MAKE_SAFE = """() => {
  const node = document.querySelector("[data-make-safe]"), strip = document.querySelector("[data-strip]"), box = node.getBoundingClientRect(), was = strip.scrollTop;
  const bare = () => [[0.5, 0.5], [0.05, 0.1], [0.95, 0.1], [0.05, 0.9], [0.95, 0.9]].every(([x, y]) => {
    const top = document.elementFromPoint(box.x + box.width * x, box.y + box.height * y);
    return top && node.contains(top);
  });
  const found = [0, strip.scrollHeight].map((y) => { strip.scrollTop = y; return bare(); });
  strip.scrollTop = was;
  return found.every(Boolean);
}"""


#: least of the smaller side in px: what records or stops, the keypad, everything else
SIZES = {"main": 64, "key": 56, "other": 48}
GLOVED_SIZES = {"main": 76, "key": 76, "other": 64}


def small(targets: list[dict[str, Any]], sizes: dict[str, int]) -> list[str]:
    """Targets whose smaller side is too small."""
    found = [one for one in targets if min(one["w"], one["h"]) + 0.5 < sizes[one["kind"]]]
    return [f"small, {one['w']:.0f} x {one['h']:.0f}: {one['what']}" for one in found]


def close(targets: list[dict[str, Any]], gap: float = 8) -> list[str]:
    """Pairs that overlap, or of which one records or stops and the other is nearer than the dead strip.

    What scrolls is held against what scrolls with it: the rest is cut off at the edge.
    """
    found = []
    for n, a in enumerate(targets):
        for b in targets[n + 1 :]:
            across = max(a["x"], b["x"]) - min(a["x"] + a["w"], b["x"] + b["w"])
            down = max(a["y"], b["y"]) - min(a["y"] + a["h"], b["y"] + b["h"])
            least = gap if a["apart"] or b["apart"] else 0
            if a["within"] == b["within"] and max(across, down) + 0.5 < least:
                found.append(f"close, {across:.0f} across, {down:.0f} down: {a['what']} and {b['what']}")
    return found


def wrong_here(page: Any, in_run: bool, sizes: dict[str, int] = SIZES) -> list[str]:
    """Everything that is wrong with the page as it stands, in words."""
    wrong = [f"axe {one}" for one in page.evaluate(AXE, RULES)]
    targets = page.evaluate(TARGETS)
    assert targets, "nothing can be touched"
    wrong += small(targets, sizes) + close(targets)
    wrong += [f"wider than the screen: {one}" for one in page.evaluate(TOO_WIDE)]
    if in_run and not page.evaluate(MAKE_SAFE):
        wrong.append("MAKE SAFE is covered or out of reach")
    return wrong


@pytest.mark.parametrize("place", PLACES, ids=[place.name for place in PLACES])
def test_axe_sizes_and_make_safe(page: Any, server: LookServer, complaints: list[str], place: Place) -> None:
    complaints.clear()
    opened(page, server, place)
    in_run = page.locator("[data-frame]").count() == 1
    assert page.evaluate(SHOWN, in_run) == place.shows
    wrong, first = [], PLACES.index(place) % 2
    for n, (width, (w, h)) in enumerate(WIDTHS.items()):
        theme = ("light", "dark")[(n + first) % 2]
        page.set_viewport_size({"width": w, "height": h})
        page.evaluate("(t) => { document.documentElement.dataset.theme = t; }", theme)
        page.evaluate("() => new Promise((go) => requestAnimationFrame(() => requestAnimationFrame(go)))")
        wrong += [f"{width}, {theme}: {one}" for one in wrong_here(page, in_run)]
    assert wrong == [], "\n".join(["", *wrong])
    assert complaints == []


GLOVED = ("number", "prove", "ways on", "make safe", "states as found", "signature")


@pytest.mark.parametrize("place", [place for place in PLACES if place.name in GLOVED], ids=lambda place: place.name)
def test_with_gloves_everything_is_larger(page: Any, server: LookServer, place: Place) -> None:
    opened(page, server, place)
    page.evaluate("() => { document.documentElement.dataset.gloves = 'on'; }")
    wrong = []
    for width, (w, h) in WIDTHS.items():
        page.set_viewport_size({"width": w, "height": h})
        page.evaluate("() => new Promise((go) => requestAnimationFrame(() => requestAnimationFrame(go)))")
        wrong += [f"{width}: {one}" for one in wrong_here(page, True, GLOVED_SIZES)]
    assert wrong == [], "\n".join(["", *wrong])


BROKEN = """() => {
  const add = (where, text) => { const holder = document.createElement("template"); holder.innerHTML = text; document.querySelector(where).append(holder.content); };
  add(".work .r", "<button type='button' class='act first' data-bad='nameless'></button><button type='button' class='bad'>x</button><p class='pale'>pale words</p><p class='wide'>wide</p>");
  const set = (one, styles) => Object.assign(document.querySelector(one).style, styles);
  set(".bad", { width: "30px", height: "30px", marginTop: "-6px" });
  set(".pale", { color: "#bbb", background: "#fff" });
  set(".wide", { width: "2000px" });
  add("body", "<div class='cover'></div>");
  set(".cover", { position: "fixed", zIndex: 9, left: 0, top: 0, width: "400px", height: "60px" });
}"""


def test_the_sweep_would_tell_of_every_kind_of_wrong(page: Any, server: LookServer) -> None:
    opened(page, server, next(place for place in PLACES if place.name == "number"))
    page.set_viewport_size({"width": 820, "height": 1180})
    assert wrong_here(page, True) == []
    page.evaluate(BROKEN)
    told = "\n".join(wrong_here(page, True))
    for word in ("axe button-name", "axe color-contrast", "small, 30 x 30", "close,", "wider than the screen", "MAKE SAFE is covered"):
        assert word in told, (word, told)
