/** The list of sums: found by words, or by subject. Touching one opens it; nothing is computed here. */
import { say } from "../announce.js";
import { field, h, put } from "../dom.js";
import { found, sumOf, titleOf } from "./book.js";
import * as kept from "./kept.js";

/** How long a person must have stopped typing before the number of finds is spoken, in ms. */
const QUIET_MS = 900;
/** Sums used last that are put in front. */
const RECENT = 4;

/** @param {number} n */
const count = (n) => `${n} sum${n === 1 ? "" : "s"}`;

/**
 * @param {import("./book.js").Book} book @param {(name: string) => void} open
 * @returns {{node: HTMLElement, stop: () => void}}
 */
export function listView(book, open) {
  const search = field({ label: "Find by name, meaning or subject", value: kept.list.asked, attributes: { "data-find": true, enterkeyhint: "search" } });
  const found_ = h("div", { "data-found": true });
  let timer = 0;

  /** @param {string} name */
  function row(name) {
    const sum = sumOf(book, name);
    return sum && h("li", {}, h("button", { type: "button", class: "sum-pick", "data-sum": name, on: { click: () => { kept.list.last = name; open(name); } } }, h("b", {}, sum.title), h("span", {}, sum.meaning)));
  }
  /** @param {string[]} names */
  const rows = (names) => h("ul", { class: "sum-rows" }, names.map(row));

  /** A subject that opens and shuts. @param {{name: string, formulas: string[]}} subject */
  function shelf(subject) {
    const isOpen = kept.list.open === subject.name;
    const turn = () => {
      kept.list.open = isOpen ? "" : subject.name;
      paint();
      const head = /** @type {HTMLElement | null} */ (found_.querySelector(`[data-subject="${CSS.escape(subject.name)}"]`)), section = head?.closest("section");
      head?.focus({ preventScroll: true });
      if (!isOpen && section && section.getBoundingClientRect().bottom > innerHeight) section.scrollIntoView({ block: "start" });
    };
    return h("section", {}, h("h2", { class: "sum-shelf" }, h("button", { type: "button", "aria-expanded": String(isOpen), "data-subject": subject.name, on: { click: turn } },
      h("b", {}, titleOf(subject.name)), h("span", {}, count(subject.formulas.length)), h("span", { class: "go" }, isOpen ? "Hide" : "Show"))), isOpen ? rows(subject.formulas) : null);
  }
  function paint() {
    const asked = kept.list.asked.trim(), subjects = found(book, asked), all = subjects.reduce((n, s) => n + s.formulas.length, 0);
    if (asked) {
      put(found_, h("p", { class: "note", "data-count": true }, all ? `${count(all)} found` : "No sum has all these words. Try fewer, or another: a quantity, a unit, a subject."),
        subjects.map((s) => h("section", {}, h("h2", { class: "sum-head" }, titleOf(s.name)), rows(s.formulas))));
      return all ? `${count(all)} found` : "No sum found";
    }
    const recent = kept.recent(RECENT).filter((name) => sumOf(book, name));
    put(found_, recent.length ? h("section", { "data-recent": true }, h("h2", { class: "sum-head" }, "Opened last"), h("div", { class: "sum-recent" }, recent.map((name) => h("button", { type: "button", class: "act", "data-sum": name, on: { click: () => open(name) } }, titleOf(name))))) : null,
      subjects.map(shelf));
    return "";
  }
  search.input.addEventListener("input", () => {
    kept.list.asked = search.input.value;
    const says = paint();
    clearTimeout(timer);
    timer = window.setTimeout(() => { if (says) say(says); }, QUIET_MS);
  });
  paint();
  const node = h("div", { class: "sum-list" }, search.node, found_);
  // Back from a sum: the list stands where it was left.
  const back = kept.list.last;
  if (back) requestAnimationFrame(() => found_.querySelector(`.sum-pick[data-sum="${CSS.escape(back)}"]`)?.scrollIntoView({ block: "center" }));
  kept.list.last = "";
  return { node, stop: () => clearTimeout(timer) };
}
