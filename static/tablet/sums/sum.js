/**
 * One sum: its fields with the tablet's keypad, its result while it is typed, a picture, and what to know about it.
 * Nothing here is recorded, and nothing from here enters a run. What is computed: reckon.js; what is drawn: plot.js.
 */
import { say } from "../announce.js";
import { drawn, fresh, h, put } from "../dom.js";
import { keypad } from "../keypad.js";
import { lower, pretty, sentence } from "../words.js";
import { called, everyUnit, firstAny, quantity, resultUnits, titleOf, unitsFor } from "./book.js";
import { carrier } from "./carry.js";
import { alone, end, inLine, rangeWords, shown, withMargin, withUnit } from "./digits.js";
import * as kept from "./kept.js";
import { marginRow, mostOf, sharesOf, twiceWords } from "./margin.js";
import { says, span, stops, svg } from "./plot.js";
import { prepared, reckon } from "./reckon.js";
import { widthOf } from "./widths.js";

/** @typedef {import("./book.js").Argument} Argument */
/** @typedef {import("./book.js").Unit} Unit */

/** How long a person must have stopped typing before a result is spoken, in ms. */
const QUIET_MS = 1000;

/** A choice of units; plain words where there is only one. @param {string} name for readers @param {Unit[]} units @param {string} chosen @param {(symbol: string) => void} choose */
function unitChoice(name, units, chosen, choose) {
  const words = (/** @type {Unit} */ u) => (u.shown === "" ? "as a number" : u.shown);
  if (units.length === 1) return h("span", { class: "sum-unit" }, units[0].shown === "" ? "" : units[0].shown);
  const select = /** @type {HTMLSelectElement} */ (h("select", { class: "sum-unit", "aria-label": name, on: { change: () => choose(select.value) } },
    units.map((u) => h("option", { value: u.symbol }, words(u)))));
  select.value = chosen;
  select.dataset.long = units.some((u) => u.shown.length > 8) ? "1" : "0";
  return select;
}

/**
 * @param {import("./book.js").Book} book @param {import("./book.js").Sum} sum @param {(name: string) => void} open another sum
 * @param {{meters: import("./meters.js").Meter[], today: () => string}} kit what values may have been measured with
 * @returns {{node: HTMLElement, stop: () => void, focus: HTMLElement | null}}
 */
export function sumView(book, sum, open, kit) {
  const typed = kept.of(sum.name), ready = prepared(sum, book.formulas), takesAny = sum.arguments.some((a) => a.any);
  typed.any ||= takesAny ? firstAny(book, sum) : "";
  let last = /** @type {HTMLInputElement | null} */ (null), timer = 0, example = false, carry = /** @type {ReturnType<typeof carrier> | null} */ (null);

  const choices = (/** @type {Argument} */ a) => unitsFor(book, a, typed.any);
  /** The unit of an argument as it stands. @param {Argument} a @returns {Unit} */
  const unitOf = (a) => (a.any === "any" ? choices(a).find((u) => u.symbol === typed.any) : choices(a).find((u) => u.symbol === typed.units[a.name])) ?? choices(a)[0];
  const unitOfResult = (/** @type {number} */ k) => { const all = resultUnits(book, sum.results[k], typed.any); return all.find((u) => u.symbol === typed.shown[sum.results[k].name]) ?? all[0]; };

  const fields = sum.arguments.map(fieldOf);
  const outs = sum.results.map(outOf);
  const says_ = h("p", { class: "sum-says", "data-sum-says": true }), check = h("p", { class: "sum-check", "data-sum-example": true });
  const most = h("p", { class: "sum-most", "data-most": true }), picture = h("figure", { class: "sum-plot", "data-plot": true, hidden: true });
  const anyUnit = h("div", { class: "sum-field field" });

  /** @param {Argument} a */
  function fieldOf(a) {
    const id = fresh("sum"), unit = h("div", { class: "sum-unit-of" }), help = h("p", { class: "help", id: `${id}-help` }), wrong = h("p", { class: "wrong", id: `${id}-wrong` });
    const input = /** @type {HTMLInputElement} */ (h("input", { id, type: "text", class: "code", inputmode: "none", autocomplete: "off", autocapitalize: "off", spellcheck: "false", enterkeyhint: "next", "data-typed": a.name, "aria-describedby": `${id}-help ${id}-wrong` }));
    input.value = typed.texts[a.name] ?? "";
    input.addEventListener("focus", () => focused(input));
    input.addEventListener("input", () => { typed.texts[a.name] = input.value; example = false; show(); });
    input.addEventListener("keydown", (e) => { if (e.key === "Enter") { e.preventDefault(); next(input); } });
    const margin = a.whole ? null : marginRow(book, a, typed, { meters: kit.meters, about: `${sum.name} ${sum.subject}`, unitOf: () => unitOf(a), changed: () => { example = false; show(); }, focused, next });
    const node = h("div", { class: "sum-field field", "data-argument": a.name }, h("label", { for: id }, sentence(called(a))), help, input, unit, wrong, margin?.node);
    return { a, input, unit, help, wrong, node, margin };
  }
  /** Above the keys, which come up with the focus where there is little room. @param {HTMLInputElement} input */
  function focused(input) {
    last = input;
    requestAnimationFrame(() => input.scrollIntoView({ block: "nearest" }));
  }
  /** @param {HTMLInputElement} input */
  function next(input) {
    const all = fields.flatMap((f) => [f.input, ...(typed.uncertain && f.margin && !f.margin.input.hidden ? [f.margin.input] : [])]);
    all[(all.indexOf(input) + 1) % all.length].focus();
  }
  /** @param {import("./book.js").Result} result @param {number} k */
  function outOf(result, k) {
    const figure = h("span", { class: "sum-figure", "data-result": result.name }), unit = h("div", { class: "sum-unit-of" });
    return { k, figure, unit, node: h("div", { class: "sum-result" }, h("span", { class: "sum-of" }, sum.results.length > 1 ? result.title : "Result"), figure, unit) };
  }
  /** Units anew: where one was chosen, and where all hang on one. */
  function paintUnits() {
    if (takesAny) {
      put(anyUnit, h("p", { class: "label" }, "Unit of every value"), h("p", { class: "help" }, "A difference of temperatures is in K."), unitChoice("Unit of every value", everyUnit(book), typed.any, (symbol) => { typed.any = symbol; typed.shown = {}; paintUnits(); show(); }));
    }
    for (const f of fields) {
      const unit = unitOf(f.a), choose = (/** @type {string} */ symbol) => { typed.units[f.a.name] = symbol; example = false; range(f, unitOf(f.a)); f.margin?.paint(); show(); };
      put(f.unit, unitChoice(`Unit of ${called(f.a)}`, f.a.any ? [unit] : choices(f.a), unit.symbol, choose));
      range(f, unit);
      f.margin?.paint();
    }
    for (const o of outs) {
      const name = sum.results[o.k].name, unit = unitOfResult(o.k);
      put(o.unit, unitChoice(sum.results.length > 1 ? `Unit of ${sum.results[o.k].title}` : "Unit of the result", resultUnits(book, sum.results[o.k], typed.any), unit.symbol, (symbol) => { typed.shown[name] = symbol; show(); }));
    }
  }
  /** @param {ReturnType<typeof fieldOf>} f @param {Unit} unit */
  const range = (f, unit) => put(f.help, sentence(rangeWords(f.a, unit)));

  function show() {
    const units = Object.fromEntries(sum.arguments.map((a) => [a.name, unitOf(a)])), got = reckon(sum, ready, typed.texts, units);
    for (const f of fields) {
      const { state, says: why } = got.fields[f.a.name];
      if (f.wrong.textContent !== (state === "wrong" ? why : "")) put(f.wrong, state === "wrong" ? why : "");
      f.input.setAttribute("aria-invalid", String(state === "wrong"));
    }
    const figures = sum.results.map((r, k) => (got.results ? shown(got.results[k], unitOfResult(k), r.digits) : "")), margins = typed.uncertain ? uncertain(got, units) : [];
    for (const o of outs) {
      const of = margins[o.k], text = of ? inLine(of) : figures[o.k];
      put(o.figure, of ? [of.tail ? "(" : "", `${of.value} `, h("span", { class: "sum-margin" }, `± ${of.margin}`), of.tail ? `)${of.tail}` : ""] : text);
      o.figure.dataset.long = of ? `m${lengthOf(text)}` : lengthOf(text);
      o.node.hidden = !got.results;
    }
    put(says_, got.says);
    says_.hidden = !got.says;
    put(check, example && sum.example ? `The worked example gives ${sum.example.gives.map(pretty).join(" and ")}.` : "");
    paintPlot(got, units, figures);
    // Spoken once the person has stopped typing, not at each key.
    clearTimeout(timer);
    timer = window.setTimeout(() => say(got.results ? sum.results.map((r, k) => `${sum.results.length > 1 ? `${r.title}: ` : ""}${withUnit(margins[k] ? inLine(margins[k]) : figures[k], unitOfResult(k))}`).join(", ") : got.says), QUIET_MS);
  }
  /** The ± of every result as it is shown, null where it has none; and what is said of them. @param {ReturnType<typeof reckon>} got @param {Record<string, Unit>} units */
  function uncertain(got, units) {
    const widths = /** @type {Record<string, number>} */ ({}), minds = /** @type {string[]} */ ([]), today = kit.today();
    for (const { a, margin } of fields) {
      if (!margin) continue;
      const unit = units[a.name], width = widthOf(book, a, got.fields[a.name], unit, margin.given(), today);
      margin.show(width, width.state === "good" && margin.meter() ? alone(width.u, unit) : "");
      if (width.state === "good" && width.u) widths[a.name] = width.u;
      if (width.state === "wrong") minds.push(width.says);
    }
    carry ??= carrier(sum, book.formulas, ready);
    const told = got.results && !minds.length && Object.keys(widths).length ? carry(got.values, widths, got.results) : null;
    const carried = told?.results ?? sum.results.map(() => null);
    put(most, !got.results ? "" : minds.length ? `No ±: ${lower(minds[0])}` : mostOf(sum.results, carried));
    put(worth, sharesOf(sum.results, carried, [...minds, ...(told?.says ?? []), ...twiceWords(fields.flatMap((f) => (f.margin && widths[f.a.name] ? [f.margin.given()] : [])))]));
    return sum.results.map((r, k) => { const of = told?.results[k]; return of && of.u && got.results ? withMargin(got.results[k], of.u, unitOfResult(k), r.digits) : null; });
  }
  /** @param {string} text */
  const lengthOf = (text) => (text.includes("×") ? "power" : text.length > 12 ? "2" : text.length > 8 ? "1" : "0");

  /** @param {ReturnType<typeof reckon>} got @param {Record<string, Unit>} units @param {string[]} figures */
  function paintPlot(got, units, figures) {
    const a = sum.arguments.find((one) => one.name === sum.along);
    const made = a && got.results ? pictureOf(a, got.values, units[a.name], figures) : null;
    picture.hidden = !made;
    put(picture, made ? [drawn(svg(made)), h("figcaption", { "aria-hidden": "true" }, says(made))] : null);
  }
  /** @param {Argument} a @param {Record<string, number>} values @param {Unit} unit @param {string[]} figures @returns {import("./plot.js").Picture | null} */
  function pictureOf(a, values, unit, figures) {
    const factor = Number(unit.factor), offset = Number(unit.offset), low = end(a.low, unit, "low"), high = end(a.high, unit, "high"), results = sum.results.map((_, k) => unitOfResult(k));
    if (new Set(results.map((u) => u.symbol)).size > 1) return null;
    const at = (values[a.name] - offset) / factor, over = span(at, low === null ? null : Number(low), high === null ? null : Number(high)), [least, most] = [a.low, a.high].map((si) => (si === null ? null : Number(si)));
    const si = (/** @type {number} */ x) => Math.min(most ?? Infinity, Math.max(least ?? -Infinity, x * factor + offset));
    const y = (/** @type {number} */ k, /** @type {number} */ x) => { const r = ready.value(k, { ...values, [a.name]: x === at ? values[a.name] : si(x) }); return typeof r === "number" ? (r - Number(results[k].offset)) / Number(results[k].factor) : null; };
    const lines = sum.results.map((r, k) => ({ title: sum.results.length > 1 ? r.title : sum.title, points: stops(over, at).map((x) => /** @type {[number, number | null]} */ ([x, y(k, x)])), at: y(k, at) ?? 0, shown: figures[k] }));
    const width = Math.max(260, Math.min(picture.parentElement?.clientWidth || 560, 640));
    return { width, along: { title: called(a), unit: unit.shown, at, shown: shown(values[a.name], unit), ...over }, result: { unit: results[0].shown }, lines };
  }

  function fill() {
    for (const f of fields) {
      const { text, symbol } = quantity(book, sum.example?.with[f.a.name] ?? "");
      f.input.value = typed.texts[f.a.name] = text;
      if (symbol && !f.a.any) typed.units[f.a.name] = symbol;
    }
    if (takesAny) typed.any = firstAny(book, sum);
    typed.shown = {};
    example = true;
    paintUnits();
    show();
  }
  function clear() {
    for (const f of fields) { f.input.value = typed.texts[f.a.name] = ""; f.margin?.clear(); }
    example = false;
    show();
    fields[0].input.focus();
  }

  const act = (/** @type {string} */ text, /** @type {() => void} */ run, /** @type {string} */ name) => h("button", { type: "button", class: "act", [`data-${name}`]: true, on: { click: run } }, text);
  const worth = h("div", { class: "sum-worth", "data-worth": true }), toggle = act("", () => { typed.uncertain = !typed.uncertain; paintUncertain(); show(); }, "uncertain");
  function paintUncertain() {
    node.toggleAttribute("data-with", typed.uncertain);
    put(toggle, typed.uncertain ? "Without uncertainty" : "With uncertainty");
    worth.hidden = most.hidden = !typed.uncertain;
  }
  const more = h("div", { class: "sum-more" }, worth, picture,
    sum.cautions.length ? h("div", { class: "heed", "data-cautions": true }, h("h2", {}, "Take care"), h("ul", {}, sum.cautions.map((c) => h("li", {}, pretty(c))))) : null,
    h("dl", { class: "facts" }, [["Decides", sum.decides], ["Source", sum.reference], ["Worked out as", sum.written && h("span", { class: "sum-written" }, sum.written)]].filter(([, v]) => v).map(([k, v]) => h("div", {}, h("dt", {}, k), h("dd", {}, typeof v === "string" ? pretty(v) : v))),
      sum.uses.length ? h("div", {}, h("dt", {}, "Uses"), h("dd", { class: "sum-uses" }, sum.uses.map((name) => h("button", { type: "button", class: "close", "data-sum": name, on: { click: () => open(name) } }, titleOf(name))))) : null),
    h("p", { class: "note" }, "A result shows six digits at most and is no better than what was typed. Nothing here is recorded, and nothing from here enters a run by itself. The maker’s instructions come first."));
  const node = h("div", { class: "sum", "data-one-sum": sum.name },
    h("p", { class: "say" }, pretty(sum.meaning)), h("div", { class: "sum-l" }, h("div", { class: "sum-in" }, takesAny ? anyUnit : null, fields.map((f) => f.node),
      fields.length ? h("div", { class: "buttons" }, sum.example ? act("Fill in the worked example", fill, "fill") : null, act("Clear all", clear, "clear"), fields.some((f) => f.margin) ? toggle : null) : null),
      fields.length ? h("div", { class: "sum-keys dock" }, keypad(() => last ?? fields[0].input)) : null),
    h("div", { class: "sum-r" }, h("div", { class: "sum-out dock", role: "group", "aria-label": "Result", "data-out": true }, outs.map((o) => o.node), says_, most, check), more));

  paintUncertain();
  paintUnits();
  show();
  clearTimeout(timer);
  let wide = 0;
  const watch = new ResizeObserver(() => { if (more.clientWidth !== wide) { wide = more.clientWidth; show(); clearTimeout(timer); } });
  watch.observe(more);
  return { node, stop: () => { clearTimeout(timer); watch.disconnect(); }, focus: fields[0]?.input ?? null };
}
