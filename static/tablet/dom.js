/**
 * Small ways of making and finding elements; nothing about the job is here.
 * Markup never carries inline style or script (strict policy); what must be measured is set through element.style.
 */

/** @typedef {Node | string | number | null | undefined | false | Kid[]} Kid */

/**
 * An element with attributes and children. `on` holds listeners, `class` the class, a false or null attribute is left out.
 * @param {string} name @param {Record<string, any>} [attributes] @param {...Kid} kids @returns {HTMLElement}
 */
export function h(name, attributes = {}, ...kids) {
  const node = document.createElement(name);
  for (const [key, value] of Object.entries(attributes)) {
    if (value === null || value === undefined || value === false) continue;
    if (key === "on") for (const [event, listener] of Object.entries(value)) node.addEventListener(event, listener);
    else if (key === "value" && "value" in node) /** @type {any} */ (node).value = value;
    else node.setAttribute(key, value === true ? "" : String(value));
  }
  add(node, kids);
  return node;
}

/** Append children, leaving out what is empty. @param {Element} node @param {Kid} kids @returns {Element} */
export function add(node, kids) {
  for (const kid of Array.isArray(kids) ? kids : [kids]) {
    if (Array.isArray(kid)) add(node, kid);
    else if (kid instanceof Node) node.append(kid);
    else if (kid !== null && kid !== undefined && kid !== false) node.append(String(kid));
  }
  return node;
}

/** Replace what an element holds. @param {Element} node @param {...Kid} kids @returns {Element} */
export function put(node, ...kids) {
  node.replaceChildren();
  return add(node, kids);
}

/** The element that carries `data-<name>`; a missing one is a fault of the template. @param {ParentNode} root @param {string} name @returns {any} */
export function part(root, name) {
  const found = root.querySelector(`[data-${name}]`);
  if (!found) throw new Error(`the template has no data-${name}`);
  return found;
}

/** SVG text as an element. @param {string} text @returns {Element} */
export function drawn(text) {
  const holder = document.createElement("template");
  holder.innerHTML = text.trim();
  return /** @type {Element} */ (holder.content.firstElementChild);
}

let count = 0;
/** A fresh id for a label and its field. @param {string} [stem] */
export function fresh(stem = "f") {
  count += 1;
  return `${stem}-${count}`;
}

/**
 * A labelled field with its own place for what is wrong with it.
 * @param {{label: Kid, help?: Kid, kind?: string, rows?: boolean, value?: string, code?: boolean, attributes?: Record<string, any>}} spec
 * @returns {{node: HTMLElement, input: HTMLInputElement & HTMLTextAreaElement, wrong: (says: string) => void}}
 */
export function field(spec) {
  const id = fresh();
  const input = /** @type {any} */ (h(spec.rows ? "textarea" : "input", {
    id, type: spec.rows ? null : spec.kind ?? "text", class: spec.code ? "code" : null, autocomplete: "off", autocapitalize: "off",
    spellcheck: "false", "aria-describedby": `${id}-help ${id}-wrong`, ...spec.attributes,
  }));
  if (spec.value) input.value = spec.value;
  const wrong = h("p", { class: "wrong", id: `${id}-wrong` });
  const node = h("div", { class: "field" }, h("label", { for: id }, spec.label), input,
    h("p", { class: "help", id: `${id}-help`, hidden: !spec.help }, spec.help), wrong);
  return { node, input, wrong: (says) => { wrong.textContent = says; input.setAttribute("aria-invalid", says ? "true" : "false"); if (says) input.focus(); } };
}

/**
 * A group of touch-sized picks: one of (radio) or any of (checkbox).
 * @param {{legend: Kid, options: {value: string, label: Kid, small?: Kid}[], many?: boolean, chosen?: string[], quiet?: boolean, onchange?: () => void}} spec
 * @returns {{node: HTMLElement, values: () => string[]}}
 */
export function picks(spec) {
  const name = fresh("pick");
  const inputs = spec.options.map((option) => {
    const input = /** @type {HTMLInputElement} */ (h("input", { type: spec.many ? "checkbox" : "radio", name, value: option.value, on: { change: () => spec.onchange?.() } }));
    input.checked = spec.chosen?.includes(option.value) ?? false;
    return { input, node: h("label", { class: "pick" }, input, h("span", {}, option.label, option.small ? h("small", {}, option.small) : null)) };
  });
  const node = h("fieldset", {}, h("legend", { class: spec.quiet ? "seen-by-reader" : null }, spec.legend), h("div", { class: "picks" }, inputs.map((i) => i.node)));
  return { node, values: () => inputs.filter((i) => i.input.checked).map((i) => i.input.value) };
}

/** A plain button. @param {Kid} label @param {() => void} run @param {Record<string, any>} [attributes] */
export function button(label, run, attributes = {}) {
  return /** @type {HTMLButtonElement} */ (h("button", { type: "button", class: "act", ...attributes, on: { click: run } }, label));
}
