"""A sweep over every page of the tablet: axe, sizes and gaps of targets, MAKE SAFE in reach, the strict policy kept.

Each page is met at three widths, and in light and dark, over a host that is made up (look_server.py) and the real run
engine. The states are in look_places.py; a page that none of them shows is named by the first test.

Outside checks: axe-core's rules (WCAG 2.2, A and AA, and its best practices). Sizes: 48 px for everything that can be
touched, 56 px for keys, 64 px for what records or stops, 8 px round such; 64 and 76 px with gloves: above WCAG 2.2's
44 px (2.5.5); common practice for gloved hands, no source. What the pages do when they are used: test_tablet_look.py.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from axe_playwright_python.sync_playwright import Axe
from driving import ARGS, CHROMIUM, PATIENCE_S
from look_places import PLACES, Place
from look_server import LookServer

pytestmark = pytest.mark.browser

STATIC = Path(__file__).resolve().parents[2] / "static" / "tablet"
WIDTHS = {"phone": (390, 844), "portrait": (820, 1180), "landscape": (1280, 800)}
RULES = {
    "runOnly": ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa", "best-practice"],
    "resultTypes": ["violations"],
}

# ---- places ----------------------------------------------------------------------------------------------------------


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
    made.set_default_timeout(PATIENCE_S * 1000)
    made.on("console", lambda m: complaints.append(m.text) if "Content Security Policy" in m.text else None)
    made.on("pageerror", lambda e: complaints.append(str(e)))
    yield made
    browser.close()


def opened(page: Any, server: LookServer, place: Place) -> None:
    made = place.make()
    server.show(made)
    page.set_viewport_size({"width": 820, "height": 1180})
    page.goto("about:blank")
    page.goto(f"{server.url}/app/{place.hash or '#run?run=' + made['runs'][0]['run']}")
    page.wait_for_selector(".page-body" if place.hash else "[data-frame]")
    if place.act:
        place.act(page)
    page.evaluate(FEWER_ROWS)
    page.evaluate(Axe().axe_script)


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
      const box = n.getBoundingClientRect(), within = n.closest(".dock, .strip, .page-body")?.className ?? "";
      return { what: n.outerHTML.slice(0, 140), within, x: box.x, y: box.y, w: box.width, h: box.height, kind: n.matches(main) ? "main" : n.matches(".key") ? "key" : "other", apart: n.matches(`${main}, .key, .act`) };
    });
}"""
#: what scrolls behind a dock comes out again by scrolling; axe would take it for covered, so the dock lies below it meanwhile
AXE = """async (rules) => {
  const docks = [...document.querySelectorAll(".dock")];
  for (const dock of docks) dock.style.position = "static";
  const { violations } = await axe.run(document, rules);
  for (const dock of docks) dock.style.position = "";
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

    What scrolls is held against what scrolls with it: the rest is cut off at the edge, or lies behind what stays there.
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
    assert page.evaluate(SHOWN, in_run) == place.shows, page.inner_text("body")
    wrong, first = [], PLACES.index(place) % 2
    for n, (width, (w, h)) in enumerate(WIDTHS.items()):
        theme = ("light", "dark")[(n + first) % 2]
        page.set_viewport_size({"width": w, "height": h})
        page.evaluate("(t) => { document.documentElement.dataset.theme = t; }", theme)
        page.evaluate("() => new Promise((go) => requestAnimationFrame(() => requestAnimationFrame(go)))")
        wrong += [f"{width}, {theme}: {one}" for one in wrong_here(page, in_run)]
    assert wrong == [], "\n".join(["", *wrong])
    assert complaints == []


GLOVED = ("number", "prove", "ways on", "make safe", "states as found", "signature", "a sum over a run")


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
  add(".work .r", "<button type='button' class='act first' data-bad='nameless'></button><button type='button' class='bad'>x</button><p class='wide'>wide</p>");
  // at the top, in sight: of what lies under a dock axe says that it cannot tell
  document.querySelector(".work .r").prepend(Object.assign(document.createElement("p"), { className: "pale", textContent: "pale words" }));
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
    for word in (
        "axe button-name",
        "axe color-contrast",
        "small, 30 x 30",
        "close,",
        "wider than the screen",
        "MAKE SAFE is covered",
    ):
        assert word in told, (word, told)
