/**
 * The open step: its head (number, title, text, meter), the control cloned from the kit's templates, and what comes of an
 * answer. Which control does what is in controls/; what may be done is decided by the run engine, never here.
 */
import { h, fresh } from "./dom.js";
import { CONTROL_WORDS, together } from "./words.js";

/** Ids of a clone are made fresh, so that two of one kind never share a label. @param {ParentNode} root */
export function freshen(root) {
  const names = new Map();
  for (const node of root.querySelectorAll("[id]")) { names.set(node.id, fresh(node.id)); node.id = names.get(node.id); }
  for (const attribute of ["for", "aria-describedby", "aria-labelledby"]) {
    for (const node of root.querySelectorAll(`[${attribute}]`)) {
      node.setAttribute(attribute, (node.getAttribute(attribute) ?? "").split(" ").map((id) => names.get(id) ?? id).join(" "));
    }
  }
}

/** The two parts of a control's template. @param {Document | DocumentFragment} templates @param {string} control */
export function cloneControl(templates, control) {
  const template = /** @type {HTMLTemplateElement | null} */ (templates.querySelector(`template[data-control="${control}"]`));
  if (!template) throw new Error(`The kit on this tablet has no template for "${control}". Take the kit again.`);
  const copy = /** @type {DocumentFragment} */ (template.content.cloneNode(true));
  freshen(copy);
  const side = (/** @type {string} */ name) => /** @type {HTMLElement} */ (copy.querySelector(`[data-part="${name}"]`));
  return { l: side("l"), r: side("r") };
}

/** How many steps the procedure has, as printed. @param {any} sheet */
const steps = (sheet) => new Set(sheet.steps.map((/** @type {any} */ s) => s.number)).size;

/**
 * Head of the open step.
 * @param {any} sheet @param {any} step @param {{level?: string, note?: string}} extra
 */
export function stepHead(sheet, step, extra = {}) {
  const isCaution = step.control.control === "caution", levelled = (/** @type {string} */ text) => text.replaceAll("{level}", extra.level ?? "");
  return [
    h("div", { class: "what" }, h("span", {}, "Step ", h("b", {}, step.number), ` of ${steps(sheet)}, `, h("b", {}, kindWord(step))), h("span", { "data-step-note": true }, extra.level || extra.note || step.section || "")),
    h("h1", { class: isCaution ? "seen-by-reader" : null, tabindex: "-1", "data-step-title": true }, isCaution ? `${step.control.signal}: ${step.title}` : together(levelled(step.title))),
    step.text ? h("p", { class: "say" }, levelled(step.text)) : null,
    step.why ? h("p", { class: "why" }, step.why) : null,
    step.who === "second person" ? h("p", { class: "with" }, "The second person takes this one.") : null,
  ];
}

/** The writer's kind word, shown beside the step's number. @param {any} step */
const kindWord = (step) => (step.kind ? step.kind.replaceAll("_", " ") : /** @type {any} */ (CONTROL_WORDS)[step.control.control]);

/** The work area with its two parts, side by side where there is room. @param {any[]} l @param {any[]} r */
export function work(l, r) {
  const left = h("div", { class: "l" }, l), right = h("div", { class: "r" }, r);
  return { node: h("div", { class: "work two" }, left, right), left, right };
}
