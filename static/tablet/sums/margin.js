/**
 * The row of one ± under its value, and what the ± of a result comes from. Elements only: read in widths.js, carried in
 * carry.js.
 */
import { h, fresh, put } from "../dom.js";
import { sentence } from "../words.js";
import { called, differenceOf } from "./book.js";
import { mostWords, percentWords } from "./carry.js";
import { keyOf, metersFor, nameOf } from "./meters.js";
import { scaled } from "./widths.js";

/** @typedef {import("./book.js").Argument} Argument */
/** @typedef {import("./book.js").Unit} Unit */
/** @typedef {import("./meters.js").Meter} Meter */

/** What a ± is, said wherever one is. */
export const MEANS = "± is the expanded uncertainty, k = 2, typed or worked out. What has none counts as exact. A formula’s own error is not in it.";

/** @param {import("./book.js").Book} book @param {Unit} unit of the value @returns {{value: string, words: string}[]} */
function unitsOf(book, unit) {
  const own = Object.hasOwn(book.units, unit.symbol) ? differenceOf(book, unit.symbol) : unit;
  const words = unit.symbol === "%" ? "points" : own.shown || "as a number";
  return [{ value: "", words }, ...(scaled(unit) ? [{ value: "%", words: "% of it" }] : [])];
}

/**
 * @param {import("./book.js").Book} book @param {Argument} a @param {import("./kept.js").Typed} typed
 * @param {{meters: Meter[], about: string, unitOf: () => Unit, changed: () => void, focused: (input: HTMLInputElement) => void, next: (input: HTMLInputElement) => void}} by
 */
export function marginRow(book, a, typed, { meters, about, unitOf, changed, focused, next }) {
  const id = fresh("pm"), name = called(a);
  const input = /** @type {HTMLInputElement} */ (h("input", { id, type: "text", class: "code", inputmode: "none", autocomplete: "off", spellcheck: "false", enterkeyhint: "next", "data-width": a.name, "aria-describedby": `${id}-note` }));
  const from = h("span", { class: "sum-pm-from", "data-width-from": a.name }), unit = h("div", { class: "sum-unit-of" }), with_ = h("div", { class: "sum-with" }), note = h("p", { class: "help", id: `${id}-note` });
  input.value = typed.widths[a.name] ?? "";
  input.addEventListener("focus", () => focused(input));
  input.addEventListener("input", () => { typed.widths[a.name] = input.value; changed(); });
  input.addEventListener("keydown", (e) => { if (e.key === "Enter") { e.preventDefault(); next(input); } });
  const label = h("label", { for: id, class: "sum-sign" }, h("span", { "aria-hidden": "true" }, "±"), h("span", { class: "seen-by-reader" }, `± of ${name}`));
  const node = h("div", { class: "sum-pm", "data-margin": a.name }, with_, label, input, from, unit, note);
  let choices = /** @type {Meter[]} */ ([]);

  const meter = () => choices.find((one) => keyOf(one) === typed.meters[a.name]) ?? null;
  /** Anew, since the unit of the value may be another. */
  function paint() {
    const options = unitsOf(book, unitOf());
    choices = metersFor(book, a, { any: typed.any, about }, meters);
    if (!options.some((one) => one.value === typed.widthUnits[a.name])) typed.widthUnits[a.name] = "";
    put(with_, choices.length ? withChoice() : h("span", { class: "help" }, "Uncertainty"));
    put(unit, options.length === 1 || meter() ? h("span", { class: "sum-unit" }, options[0].words) : choice(`Unit of ± of ${name}`, options, typed.widthUnits[a.name], (value) => { typed.widthUnits[a.name] = value; changed(); }));
    input.hidden = label.hidden = meter() !== null;
    from.hidden = meter() === null;
  }
  function withChoice() {
    const options = [{ value: "", words: "± as typed here" }, ...choices.map((one) => ({ value: keyOf(one), words: nameOf(one) }))];
    return choice(`What ${name} was measured with`, options, meter() ? typed.meters[a.name] : "", (value) => { typed.meters[a.name] = value; paint(); changed(); });
  }
  return {
    input, node, paint, meter,
    given: () => ({ text: typed.widths[a.name] ?? "", percent: typed.widthUnits[a.name] === "%", meter: meter() }),
    /** @param {import("./widths.js").Width} width @param {string} shown U in the unit of the value */
    show: (width, shown) => {
      const wrong = width.state === "wrong";
      put(from, !meter() ? "" : shown ? `± ${shown}` : wrong ? "no ±" : "±");
      const words = width.says || width.note;
      if (note.textContent !== [words, width.late].filter(Boolean).join(" ")) put(note, words, width.late ? [" ", h("b", {}, width.late)] : null);
      note.classList.toggle("wrong", wrong);
      note.hidden = !words;
      input.setAttribute("aria-invalid", String(wrong));
    },
    clear: () => { input.value = typed.widths[a.name] = ""; typed.meters[a.name] = ""; paint(); },
  };
}

/** @param {string} name @param {{value: string, words: string}[]} options @param {string} chosen @param {(value: string) => void} choose */
function choice(name, options, chosen, choose) {
  const select = /** @type {HTMLSelectElement} */ (h("select", { class: "sum-unit", "aria-label": name, on: { change: () => choose(select.value) } }, options.map((o) => h("option", { value: o.value }, o.words))));
  select.value = chosen;
  select.dataset.long = options.some((o) => o.words.length > 8) ? "1" : "0";
  return select;
}

/** Which value to measure better, of each result that differs in that. @param {import("./book.js").Result[]} results @param {(import("./carry.js").Carried | null)[]} carried */
export function mostOf(results, carried) {
  const words = carried.map((of) => (of ? mostWords(of) : ""));
  return words.every((one) => one === words[0]) ? words[0] : results.map((r, k) => words[k] && `${r.title}: ${words[k]}`).filter(Boolean).join(" ");
}

/**
 * What is to be known of the ± of the results: the share of every value, and what to mind.
 * @param {import("./book.js").Result[]} results @param {(import("./carry.js").Carried | null)[]} carried @param {string[]} minds @returns {(HTMLElement | null)[]}
 */
export function sharesOf(results, carried, minds) {
  const lists = carried.map((of, k) => of && of.u > 0 && of.shares.length > 1 && h("div", { "data-shares": results[k].name }, results.length > 1 ? h("h3", {}, results[k].title) : null,
    h("ul", { class: "sum-shares" }, of.shares.map((s) => h("li", {}, h("span", {}, sentence(called(s.argument))), h("span", { class: "num" }, percentWords(s.percent))))))).filter((one) => one instanceof HTMLElement);
  return [
    h("h2", {}, lists.length ? "Where the ± comes from" : "About the ±"),
    lists.length ? h("p", { class: "help" }, "Shares of the variance. Measure the first one better, and the ± shrinks most.") : null,
    ...lists,
    minds.length ? h("ul", { class: "sum-minds" }, minds.map((one) => h("li", {}, one))) : null,
    h("p", { class: "help" }, MEANS),
  ];
}

/** Said where one meter gave more than one value: they may err together. @param {{meter: Meter | null}[]} givens @returns {string[]} */
export function twiceWords(givens) {
  const ids = givens.flatMap((g) => (g.meter ? [g.meter.id] : []));
  return [...new Set(ids.filter((id, n) => ids.indexOf(id) !== n))].map((id) => `${id} gave more than one value. They are counted as independent; if it reads all of them too high, or all too low, the ± can be larger or smaller than this.`);
}
