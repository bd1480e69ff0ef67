"""The page of sums in Chromium: offline, through the keypad, over a run and back, and what it says where it has no result.

Outside check of the numbers: the same formulas evaluated by the Python engine, shown by `fieldkit calc`'s own rule; what
the formulas themselves are worth is tests/published. Axe, sizes of targets, the three widths, light and dark: test_axe.py
by the places "sums" and "a sum" of look_places.py. Digits, units, search and the picture's geometry: tests/js/ui/sums.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Any

import pytest
from driving import ARGS, CHROMIUM, Tablet
from look_places import at, begun
from look_server import LookServer, scene

from fieldkit import units, values
from fieldkit.files import folder
from fieldkit.formula import display, library
from fieldkit.formula.answer import answer
from fieldkit.formula.entry import Formula
from fieldkit.formula.evaluate import evaluate

pytestmark = pytest.mark.browser
WIDTHS = {"phone": (390, 844), "portrait": (820, 1180), "landscape": (1280, 800)}
LIBRARY = library.load(folder("procedures") / "formulas")

#: a dozen formulas with what is typed, as keys of the keypad; among them a minus, a point, a comma, whole numbers
TYPED: dict[str, dict[str, str]] = {
    "coolant_heat_water": {"flow": "52.5", "inlet": "31,5", "outlet": "44"},
    "coolant_heat_ethylene_glycol": {"flow": "48", "inlet": "35", "outlet": "45.5", "mass_fraction": "40"},
    "discharge_time": {"initial": "35", "safe": "50", "resistance": "2", "capacitance": "4"},
    "watts_from_dbm": {"level": "76"},
    "beam_efficiency": {"rf_power": "28", "voltage": "34", "current": "2.2"},
    "perveance": {"current": "2.2", "voltage": "34"},
    "triode_current": {"conductance": "0.004", "grid_voltage": "-100", "beam_voltage": "34", "amplification": "272"},
    "vswr": {"forward": "50", "reflected": "200"},
    "pilot_frequency": {"channel": "30"},
    "tungsten_temperature": {"ratio": "6.5"},
    "combiner_output": {"power_1": "30", "power_2": "27", "phase_error": "-15"},
    "conductivity_at_25": {"conductivity": "0.8", "temperature": "38"},
}


def expected(name: str) -> str:
    """What Python gives for what is typed, as `fieldkit calc` would write it in the formula's own unit."""
    formula = LIBRARY.formulas[name]
    si = [values.to_float(_si(TYPED[name][a.name], a.unit)) for a in formula.arguments]
    tree = {"call": name, "of": [{"name": a.name} for a in formula.arguments]}
    names = {a.name: value for a, value in zip(formula.arguments, si, strict=True)}
    got = evaluate(tree, names, formulas=LIBRARY.used([name]))
    assert isinstance(got, float), got
    return display.plain(got, formula.unit, display.digits(formula))


def _si(text: str, unit: units.Unit) -> values.Dec:
    written = values.typed(text)
    assert isinstance(written, values.Dec)
    return values.add(values.mul(written, values.dec(unit.factor)), values.dec(unit.offset))


def press(page: Any, argument: str, text: str) -> None:
    """Types by the page's own keys, a minus by its ± key last, as it is done with gloves."""
    page.click(f"[data-typed={argument}]")
    for key in text.removeprefix("-"):
        page.click(f"[data-keypad] [data-key='{key}']")
    if text.startswith("-"):
        page.click("[data-keypad] [data-key='±']")


def result(page: Any, k: int = 0) -> str:
    return str(page.locator("[data-result]").nth(k).inner_text()).replace("−", "-")


# ---- the real tablet, the server's process gone ----------------------------------------------------------------------


def test_with_the_server_stopped_a_dozen_sums_typed_through_the_keypad_equal_pythons(tablet: Tablet) -> None:
    assert LIBRARY.problems == ()
    tablet.enrol("vell")
    tablet.ready()
    tablet.server.stop()
    tablet.page.goto(tablet.server.url + "/app/")
    tablet.page.click("[data-sums]")
    tablet.page.fill("[data-find]", "coolant water heat")
    tablet.page.click("[data-sum=coolant_heat_water]")
    for name, typed in TYPED.items():
        tablet.page.evaluate("(name) => { location.hash = `#sums?name=${name}`; }", name)
        tablet.page.wait_for_selector(f"[data-one-sum={name}]")
        for argument, text in typed.items():
            press(tablet.page, argument, text)
        assert result(tablet.page) == expected(name), name
    blobs = tablet.page.evaluate(
        """async () => {
          const db = await new Promise((go) => { const r = indexedDB.open("fieldkit"); r.onsuccess = () => go(r.result); });
          const kit = await new Promise((go) => { const r = db.transaction("meta").objectStore("meta").get("kit"); r.onsuccess = () => go(r.result); });
          db.close();
          return (kit.value ?? kit).blobs.map((b) => b.name);
        }"""
    )
    assert "sums" in blobs
    assert tablet.violations == []


# ---- a host that is made up, the real screens ------------------------------------------------------------------------


@pytest.fixture(scope="module")
def look() -> Iterator[LookServer]:
    made = LookServer()
    yield made
    made.stop()


@pytest.fixture(scope="module")
def shared(playwright_here: Any) -> Iterator[tuple[Any, list[str]]]:
    browser = playwright_here.chromium.launch(executable_path=CHROMIUM, args=ARGS)
    made, wrong = browser.new_page(viewport={"width": 820, "height": 1180}), list[str]()
    made.set_default_timeout(8_000)
    made.on("console", lambda m: wrong.append(m.text) if "Content Security Policy" in m.text else None)
    made.on("pageerror", lambda e: wrong.append(str(e)))
    yield made, wrong
    browser.close()


@pytest.fixture
def page(shared: tuple[Any, list[str]]) -> Iterator[Any]:
    made, wrong = shared
    wrong.clear()
    made.set_viewport_size({"width": 820, "height": 1180})
    yield made
    assert wrong == []


def show(page: Any, look: LookServer, where: str = "#sums", made: dict[str, Any] | None = None) -> None:
    look.show(made or scene())
    page.goto("about:blank")
    page.goto(f"{look.url}/app/{where}")
    page.wait_for_selector("[data-frame], .page-body:not([aria-busy])")


def opened(page: Any, look: LookServer, name: str, example: bool = True) -> None:
    show(page, look, f"#sums?name={name}")
    page.wait_for_selector(f"[data-one-sum={name}]")
    if example:
        page.click("[data-fill]")


def test_the_list_is_by_subject_and_found_by_name_meaning_or_subject(page: Any, look: LookServer) -> None:
    show(page, look)
    assert "not recorded" in page.inner_text("header")
    subjects = page.locator("[data-subject]").count()
    assert subjects == len({f.subject for f in LIBRARY.formulas.values()})
    page.click("[data-subject=coolant]")
    assert page.get_attribute("[data-subject=coolant]", "aria-expanded") == "true"
    assert "Heat that pure water carries off" in page.inner_text("[data-sum=coolant_heat_water]")
    for asked, name in {
        "pilot": "pilot_frequency",
        "carries off heat": "coolant_heat_water",
        "beam efficiency": "beam_efficiency",
    }.items():
        page.fill("[data-find]", asked)
        assert page.locator(f"[data-sum={name}]").count() == 1, asked
    page.fill("[data-find]", "zebra")
    assert "No sum has all these words" in page.inner_text("[data-found]")
    page.wait_for_function("() => document.querySelector('[data-say]').textContent === 'No sum found'")


def test_from_the_open_step_to_a_sum_and_back_nothing_is_lost_or_recorded(page: Any, look: LookServer) -> None:
    made = at("heater_left")
    show(page, look, f"#run?run={made['runs'][0]['run']}", made)
    title = page.inner_text("[data-step-title]")
    page.fill("[data-typed]", "6.4")
    page.click("[data-this-run]")
    page.click("[data-to=sums]")
    page.click("[data-subject='high voltage']")
    page.click("[data-sum=discharge_voltage]")
    page.click("[data-fill]")
    assert page.inner_text("[data-over=sums] h1") == "Discharge voltage"
    assert page.get_attribute("[data-over=sums]", "aria-label") == "Discharge voltage"
    assert page.locator("[data-result]").inner_text().startswith("50.0")
    assert "heater" in page.inner_text("[data-live]") and "records" in page.inner_text("[data-recorder]")
    page.click("[data-all-sums]")
    page.wait_for_selector("[data-recent] [data-sum=discharge_voltage]")
    page.click("[data-close]")
    assert page.inner_text("[data-step-title]") == title
    assert page.input_value("[data-typed]") == "6.4"
    assert page.evaluate("() => globalThis.commands") == []
    page.click("[data-this-run]")
    page.click("[data-to=sums]")
    page.click("[data-make-safe]")
    page.wait_for_selector("[data-over=make_safe]")


def test_a_wait_that_ends_meanwhile_is_said_and_spoken_over_the_sums(page: Any, look: LookServer) -> None:
    made = at("warm")
    show(page, look, f"#run?run={made['runs'][0]['run']}&over=sums", made)
    page.wait_for_selector("[data-find]")
    assert ": opens in 4:" in page.inner_text("[data-step-waits]")
    page.evaluate("() => globalThis.skip(400)")
    page.wait_for_function("() => document.querySelector('[data-alert]').textContent.includes('the wait is over')")
    assert "the wait is over" in page.inner_text("[data-step-waits]")


def test_from_home_make_safe_stays_one_touch_away_while_a_run_is_open(page: Any, look: LookServer) -> None:
    show(page, look, "#home", begun())
    page.click("[data-sums]")
    page.click("[data-subject=coolant]")
    page.click("[data-sum=coolant_heat_water]")
    page.click("[data-make-safe]")
    page.wait_for_selector("[data-over=make_safe]")
    assert page.evaluate("() => globalThis.commands") == []


def test_what_is_missing_out_of_range_or_against_a_condition_is_said_and_what_was_typed_stays(
    page: Any, look: LookServer
) -> None:
    opened(page, look, "coolant_heat_water", example=False)
    assert (
        page.inner_text("[data-sum-says]")
        == "Still to type: flow at the inlet, temperature at the inlet and temperature at the outlet."
    )
    page.click("[data-fill]")
    page.fill("[data-typed=inlet]", "120")
    says = "Temperature at the inlet is 120 °C; the formula holds for 0 to 100 °C."
    assert page.inner_text("[data-argument=inlet] .wrong") == says == page.inner_text("[data-sum-says]")
    assert page.get_attribute("[data-typed=inlet]", "aria-invalid") == "true"
    assert not page.locator("[data-result]").is_visible() and not page.locator("[data-plot]").is_visible()
    assert page.input_value("[data-typed=inlet]") == "120"
    page.select_option("[data-argument=inlet] select", "K")
    assert "the formula holds for 273.15 to 373.15 K" in page.inner_text("[data-sum-says]")
    opened(page, look, "vswr")
    page.fill("[data-typed=reflected]", "50000")
    # the condition between two arguments, in the words of the formula file
    formula = LIBRARY.formulas["vswr"]
    refused = evaluate(
        {"call": "vswr", "of": [{"number": "50000"}, {"number": "50000"}]}, formulas=LIBRARY.used([formula.name])
    )
    assert isinstance(refused, values.Fault)
    assert page.inner_text("[data-sum-says]").lower() == refused.says.removeprefix("vswr: ").lower()


def test_units_of_values_and_of_the_result_can_be_chosen(page: Any, look: LookServer) -> None:
    opened(page, look, "coolant_heat_water")
    assert page.inner_text("[data-sum-example]") == "The worked example gives 41.54 kW."
    kilowatts = float(result(page))
    page.select_option("[data-out] select", "W")
    assert float(result(page)) == pytest.approx(kilowatts * 1000, rel=2e-4)
    page.select_option("[data-argument=flow] select", "gal/min")
    # 60 US gallons a minute are 3.785411784 times 60 litres a minute (NIST SP 811)
    assert float(result(page)) == pytest.approx(kilowatts * 1000 * 3.785411784, rel=2e-4)
    assert page.inner_text("[data-argument=flow] .help") == "0 to 264.172 gal/min"
    page.click("[data-fill]")
    assert float(result(page)) == kilowatts


def test_values_in_any_unit_share_it_and_two_results_of_a_pair_stand_together(page: Any, look: LookServer) -> None:
    opened(page, look, "guarded_limit")
    assert (result(page), page.inner_text("[data-out] .sum-unit-of")[:2]) == ("68.5", "°C")
    assert page.inner_text("[data-argument=uncertainty] .sum-unit-of") == "K"
    page.get_by_label("Unit of every value").select_option("kV")
    assert page.inner_text("[data-argument=uncertainty] .sum-unit-of") == "kV"
    assert page.locator("[data-out] select").evaluate("(n) => [...n.options].map((o) => o.textContent)") == [
        "kV",
        "V",
        "mV",
    ]
    opened(page, look, "directivity_bounds")
    # 26 dB seen through a directivity of 30 dB: 10 ** -1.3 plus and minus 10 ** -1.5
    bounds = [-20 * math.log10(10**-1.3 + 10**-1.5), -20 * math.log10(10**-1.3 - 10**-1.5)]
    assert [float(result(page, k)) for k in (0, 1)] == pytest.approx(bounds, abs=0.005)


def test_a_constant_shows_at_once_with_its_source(page: Any, look: LookServer) -> None:
    opened(page, look, "elementary_charge", example=False)
    # CODATA 2022: exact by the definition of the ampere
    assert result(page) == "1.60218 × 10⁻¹⁹"
    assert "CODATA" in page.inner_text("[data-one-sum]") and page.locator("[data-keypad]").count() == 0


def test_cautions_source_and_what_it_decides_are_in_sight(page: Any, look: LookServer) -> None:
    opened(page, look, "watts_from_dbm", example=False)
    formula, said = LIBRARY.formulas["watts_from_dbm"], page.inner_text("[data-one-sum]")
    assert formula.reference in said and "from memory" in said and formula.decides in said
    assert all(one in said for one in formula.cautions)
    assert "Nothing here is recorded" in said


def test_the_picture_follows_what_is_typed_marks_it_and_has_its_sentence(page: Any, look: LookServer) -> None:
    opened(page, look, "coolant_heat_water")
    svg = page.locator("[data-plot] svg")
    assert svg.get_attribute("role") == "img"
    first = svg.get_attribute("aria-label")
    assert "from 0 to 120\u00a0L/min" in first and "at 60\u00a0L/min it is 41.54" in first and "rises" in first
    assert page.locator("[data-plot] circle").count() == 1
    page.fill("[data-typed=flow]", "700")
    assert "from 0 to 1000\u00a0L/min" in svg.get_attribute("aria-label")
    assert "The formula ends at 1000\u00a0L/min" in page.inner_text("[data-plot] figcaption")
    texts = page.locator("[data-plot] text").all_text_contents()
    assert "kW" in texts and any(t.endswith(", L/min") for t in texts) and "700" in texts
    opened(page, look, "discharge_voltage")
    assert "steps of ten" in " ".join(page.locator("[data-plot] text").all_text_contents())


def test_what_was_typed_is_kept_while_one_looks_at_the_list(page: Any, look: LookServer) -> None:
    opened(page, look, "beam_power", example=False)
    press(page, "voltage", "34")
    page.click("[data-all-sums]")
    page.click("[data-recent] [data-sum=beam_power]")
    assert page.input_value("[data-typed=voltage]") == "34"
    page.click("[data-clear]")
    assert page.input_value("[data-typed=voltage]") == ""


def test_a_result_is_spoken_when_the_typing_rests_and_not_at_each_key(page: Any, look: LookServer) -> None:
    opened(page, look, "beam_power")
    page.wait_for_function("() => document.querySelector('[data-say]').textContent === '74.8 kW'")
    page.evaluate("""() => {
      globalThis.heard = [];
      new MutationObserver(() => globalThis.heard.push(document.querySelector("[data-say]").textContent)).observe(document.querySelector("[data-say]"), { childList: true, characterData: true, subtree: true });
    }""")
    page.click("[data-typed=current]")
    # all keys in one go, so that a slow machine rests between none of them
    page.evaluate("""() => {
      const field = document.querySelector("[data-typed=current]");
      field.value = "";
      field.dispatchEvent(new Event("input", { bubbles: true }));
      for (const key of "1.05") document.querySelector(`[data-keypad] [data-key='${key}']`).click();
    }""")
    page.wait_for_function("() => globalThis.heard.at(-1) === '35.7 kW'")
    assert page.evaluate("() => globalThis.heard.length") == 1


def test_by_keyboard_enter_goes_to_the_next_field_and_escape_back_to_the_step(page: Any, look: LookServer) -> None:
    made = at("heater_left")
    show(page, look, f"#run?run={made['runs'][0]['run']}&over=sums", made)
    page.fill("[data-find]", "beam power")
    page.locator("[data-sum=beam_power]").focus()
    page.keyboard.press("Enter")
    page.wait_for_selector("[data-one-sum=beam_power]")
    page.focus("[data-typed=voltage]")
    page.keyboard.type("34")
    page.keyboard.press("Enter")
    page.keyboard.type("2.2")
    assert result(page) == "74.8"
    page.keyboard.press("Escape")
    page.wait_for_selector("[data-step-title]")


CLEAR = """() => {
  const seen = (node) => {
    const box = node.getBoundingClientRect(), top = document.elementFromPoint(box.x + box.width / 2, box.y + box.height / 2);
    return box.top >= 0 && box.bottom <= innerHeight && Boolean(top) && (node.contains(top) || top.contains(node));
  };
  return { field: seen(document.activeElement), result: seen(document.querySelector("[data-result]")), key: seen(document.querySelector("[data-key='0']")), wide: [...document.querySelectorAll("html, .strip, .page-body")].every((n) => n.scrollWidth <= n.clientWidth + 1) };
}"""


@pytest.mark.parametrize("gloves", ["off", "on"])
@pytest.mark.parametrize("where", ["alone", "over a run"])
def test_field_keys_and_result_are_in_sight_together_at_every_width(
    page: Any, look: LookServer, where: str, gloves: str
) -> None:
    made = at("heater_left")
    show(
        page,
        look,
        "#sums?name=discharge_time" if where == "alone" else f"#run?run={made['runs'][0]['run']}&over=sums",
        made,
    )
    if where != "alone":
        page.fill("[data-find]", "discharge time")
        page.click("[data-sum=discharge_time]")
    page.evaluate("(g) => { document.documentElement.dataset.gloves = g; }", gloves)
    page.click("[data-fill]")
    for name, (w, h) in {**WIDTHS, "narrow": (320, 740)}.items():
        page.set_viewport_size({"width": w, "height": h})
        if (name, gloves) == ("narrow", "on"):
            continue  # a window as narrow as that leaves no room for keys of 80 px and a field
        for argument in ("initial", "capacitance"):
            page.evaluate("() => document.activeElement?.blur()")
            page.focus(f"[data-typed={argument}]")
            page.evaluate("() => new Promise((go) => requestAnimationFrame(() => requestAnimationFrame(go)))")
            assert page.evaluate(CLEAR) == {"field": True, "result": True, "key": True, "wide": True}, (name, argument)


# ---- uncertainty -----------------------------------------------------------------------------------------------------


def margins(page: Any, **typed: str) -> None:
    page.click("[data-uncertain]")
    for name, text in typed.items():
        page.fill(f"[data-width={name}]", text)


def test_uncertainty_is_hidden_until_wanted_and_then_shown_as_calc_shows_it(page: Any, look: LookServer) -> None:
    opened(page, look, "coolant_heat_water")
    assert not page.locator("[data-width]").first.is_visible() and not page.locator("[data-worth]").is_visible()
    margins(page, inlet="0.4", outlet="0.4")
    page.select_option("[data-margin=flow] .sum-unit-of select", "%")
    page.click("[data-width=flow]")
    page.click("[data-keypad] [data-key='4']")
    calc = answer("coolant_heat_water(flow=60 L/min ± 4 %, inlet=35 degC ± 0.4 K, outlet=45 degC ± 0.4 K)", LIBRARY)
    assert calc.shown() == "41.5 kW ± 2.9 kW"
    assert page.text_content("[data-result]") == "41.5 ± 2.9"
    assert "temperature at the inlet (33 %)" in page.inner_text("[data-most]")
    worth = page.inner_text("[data-worth]")
    assert "k = 2" in worth and page.locator("[data-worth] li").count() == 3
    page.wait_for_function("() => document.querySelector('[data-say]').textContent === '41.5 ± 2.9 kW'")
    page.fill("[data-width=inlet]", "-1")
    assert page.text_content("[data-result]") == "41.54" and "no sign" in page.inner_text("[data-most]")
    assert page.get_attribute("[data-width=inlet]", "aria-invalid") == "true"
    page.click("[data-uncertain]")
    assert page.text_content("[data-result]") == "41.54" and not page.locator("[data-width=flow]").is_visible()


def test_a_meter_of_the_run_gives_the_uncertainty_of_what_it_reads(page: Any, look: LookServer) -> None:
    made = at("heater_left")
    show(page, look, f"#run?run={made['runs'][0]['run']}&over=sums", made)
    page.fill("[data-find]", "heater resistance")
    page.click("[data-sum=heater_resistance]")
    page.fill("[data-typed=voltage]", "6.3")
    page.fill("[data-typed=current]", "9.1")
    page.click("[data-uncertain]")
    offered = page.locator("[data-margin=voltage] .sum-with option").all_text_contents()
    # what reads a heater's voltage first, and nothing that reads something else
    assert offered[0] == "± as typed here" and offered[1] == "DM-04 heater voltage, 20 V"
    assert any("bias voltage" in one for one in offered) and not any("current" in one for one in offered)
    page.select_option("[data-margin=voltage] .sum-with select", "DM-04/20 V")
    # 0.3 % of 6.3 V and one digit of 0.01 V; U = 2 a / root(3)
    half = 0.003 * 6.3 + 0.01
    assert page.inner_text("[data-width-from=voltage]") == f"± {2 * half / math.sqrt(3):.3f}"
    assert f"accuracy ±{half:.3f} V" in page.inner_text("[data-margin=voltage]")
    assert page.text_content("[data-result]").endswith(f"± {2 * half / math.sqrt(3) / 9.1:.4f}")
    meaning = LIBRARY.formulas["heater_resistance"].arguments[0].meaning
    assert page.inner_text("[data-most]") == f"All of it comes from {meaning}."
    page.fill("[data-typed=voltage]", "25")
    assert "DM-04 cannot show 25 V: its range is 0 to 20 V." in page.inner_text("[data-margin=voltage]")
    assert "±" not in page.text_content("[data-result]")
    page.select_option("[data-margin=voltage] .sum-with select", "")
    assert page.locator("[data-width=voltage]").is_visible()


def test_one_meter_for_two_values_is_said_and_so_is_an_overdue_one(page: Any, look: LookServer) -> None:
    opened(page, look, "winding_rise")
    page.click("[data-uncertain]")
    for name in ("cold_temperature", "ambient"):
        page.select_option(f"[data-margin={name}] .sum-with select", "TI-2/100 degC")
    assert "TI-2 gave more than one value. They are counted as independent" in page.inner_text("[data-worth]")
    page.evaluate("() => { Date.now = () => Date.parse('2026-12-01T12:00:00Z'); }")
    page.fill("[data-typed=ambient]", "24")
    assert "Its calibration ran out on 30 Nov 2026." in page.inner_text("[data-margin=ambient]")


def test_with_uncertainty_field_keys_and_result_are_in_sight_at_every_width(page: Any, look: LookServer) -> None:
    opened(page, look, "directivity_bounds")
    margins(page, return_loss="0.5", directivity="1")
    for name, (w, h) in WIDTHS.items():
        page.set_viewport_size({"width": w, "height": h})
        for field in ("[data-width=return_loss]", "[data-width=directivity]"):
            page.evaluate("() => document.activeElement?.blur()")
            page.focus(field)
            page.evaluate("() => new Promise((go) => requestAnimationFrame(() => requestAnimationFrame(go)))")
            assert page.evaluate(CLEAR) == {"field": True, "result": True, "key": True, "wide": True}, (name, field)


def uncertain(formula: Formula) -> tuple[str, dict[str, float], dict[str, float]] | None:
    """The first worked example as text for calc, ± 1 % or 1 K or 1 dB after what may have it; values and U in SI."""
    example = next((e for e in formula.examples if not e.fault), None)
    if example is None or any(a.unit in (units.ANY, units.ANY_DIFFERENCE) for a in formula.arguments):
        return None
    parts, at_, wide = [], dict[str, float](), dict[str, float]()
    for a, written in zip(formula.arguments, example.written, strict=True):
        si = answer(written, LIBRARY).values[0].si
        own, text = a.unit.symbol, ""
        if own in ("degC", "dB", "dBm"):
            text, wide[a.name] = f" ± 1 {'K' if own == 'degC' else 'dB'}", 1.0
        elif si and not a.whole and "%" not in written:
            text, wide[a.name] = " ± 1 %", abs(si) * 0.01
        parts.append(f"{a.name}={written}{text}")
        at_[a.name] = si
    return (f"{formula.name}({', '.join(parts)})", at_, wide) if wide else None


def test_every_formula_has_the_uncertainty_that_calc_gives_it(page: Any, look: LookServer) -> None:
    show(page, look)
    asked = {f.name: case for f in LIBRARY.formulas.values() if (case := uncertain(f)) is not None}
    got = page.evaluate(
        """async (asked) => {
      const near = (name) => document.querySelector("script[type=module]").src.replace("main.js", name), book = await (await fetch("/sums.json")).json();
      const { sumOf, resultUnits } = await import(near("sums/book.js")), { prepared } = await import(near("sums/reckon.js")), { withMargin } = await import(near("sums/digits.js")), { carrier } = await import(near("sums/carry.js"));
      return Object.fromEntries(Object.entries(asked).map(([name, [, values, widths]]) => {
        const sum = sumOf(book, name), ready = prepared(sum, book.formulas), results = ready.all(values), { results: [of], says } = carrier(sum, book.formulas, ready)(values, widths, results);
        return [name, { shown: of && of.u ? withMargin(results[0], of.u, resultUnits(book, sum.results[0], "V")[0], sum.results[0].digits) : null, shares: of?.shares.map((s) => [s.argument.name, s.percent]), minds: says.length }];
      }));
    }""",
        {name: list(case) for name, case in asked.items()},
    )
    assert len(got) > 60
    for name, (text, _, _) in asked.items():
        found = answer(text, LIBRARY)
        value = found.values[0]
        assert len(found.warnings) == got[name]["minds"], name
        if value.carried is None or not value.carried.u:
            assert got[name]["shown"] is None, name
            continue
        said = [
            part.removesuffix(f" {unit.shown}").partition("e")[0]
            for part, unit in zip(value.shown().split(" ± "), (value.unit, display.difference(value.unit)), strict=True)
        ]
        assert [got[name]["shown"]["value"].replace("−", "-"), got[name]["shown"]["margin"]] == said, name
        shares = {s.name: s.percent for s in value.carried.shares}
        assert dict(got[name]["shares"]) == pytest.approx(shares, rel=1e-9, abs=1e-9), name


def test_an_older_kit_without_sums_says_what_to_do(page: Any, look: LookServer) -> None:
    show(page, look, "#sums", scene(sums=None))
    assert "Take the kit again to have them" in page.inner_text("[data-no-sums]")
    page.get_by_role("button", name="To the kit").click()
    page.wait_for_selector("[data-kit-take]")


def test_every_formula_of_the_library_opens_and_its_example_gives_a_result(page: Any, look: LookServer) -> None:
    """By the screens' own modules in the page, all in one turn: what the list offers, the page can answer; and the ends
    of a range that it shows, in every unit, are taken, but where they have more digits than a reading may."""
    show(page, look)
    failed = page.evaluate("""async () => {
      const near = (name) => document.querySelector("script[type=module]").src.replace("main.js", name), book = await (await fetch("/sums.json")).json();
      const { sumOf, quantity, sameKind, firstAny, unitsFor, resultUnits } = await import(near("sums/book.js")), { prepared, read, reckon } = await import(near("sums/reckon.js")), { end } = await import(near("sums/digits.js"));
      const failed = [];
      for (const name of book.subjects.flatMap((s) => s.formulas)) {
        const sum = sumOf(book, name), any = firstAny(book, sum), texts = {}, units = {};
        for (const a of sum.arguments) {
          const { text, symbol } = quantity(book, sum.example?.with[a.name] ?? "");
          texts[a.name] = text;
          units[a.name] = (a.any === "any" ? unitsFor(book, a, any).filter((u) => u.symbol === any) : unitsFor(book, a, any)).find((u) => u.symbol === symbol || a.any) ?? null;
          if (!units[a.name]) failed.push(`${name}: ${a.name} is not asked in ${symbol}`);
        }
        const got = reckon(sum, prepared(sum, book.formulas), texts, units);
        if (!got.results) failed.push(`${name}: ${got.says}`);
        for (const a of sum.arguments) {
          for (const u of unitsFor(book, a, any)) {
            for (const side of ["low", "high"]) {
              const text = end(a[side], u, side), got = text === null ? null : read(a, text, u);
              if (got && got.state !== "good" && text.length <= 15) failed.push(`${name}: ${a.name} is refused at its own end, ${text} ${u.symbol}: ${got.says}`);
            }
          }
        }
        if (!sum.results.every((r) => resultUnits(book, r, any).length)) failed.push(`${name}: no unit for its result`);
      }
      return failed;
    }""")
    assert failed == []


def test_the_kit_holds_the_sums_that_the_library_gives() -> None:
    """The bytes of the kit's blob, read back."""
    import json

    from fieldkit.formula import sums
    from fieldkit.operations import sums as kept

    data = kept.data()
    assert data is not None and json.loads(data) == json.loads(json.dumps(sums.sums(LIBRARY)))
    assert kept.data() is data
