/**
 * The foot of an open step: remark, picture, and the one solid button that names what it records. Where the step may not
 * open yet the button is dashed and says when, with every reason listed above it.
 */
import { h, put } from "./dom.js";
import { icon } from "./icons.js";
import { holdButton } from "./holding.js";
import { alertUser } from "./announce.js";
import { opensWords } from "./opens.js";
import { countdown } from "./words.js";

/** @typedef {import("./opens.js").Reason} Reason */

/** Characters of a label that stand in the button's least height, in two lines at most, on the narrowest screen. */
const FITS = 20;

/** The reasons in their place; the list stays while they are the same. @param {HTMLElement} node @param {Reason[]} reasons */
export function showReasons(node, reasons) {
  const key = JSON.stringify(reasons);
  if (node.dataset.reasonsShown === key) return;
  node.dataset.reasonsShown = key;
  put(node, reasons.length ? reasonList(reasons) : null);
}

/** The list of reasons, with the time that each still takes. @param {Reason[]} reasons */
export function reasonList(reasons) {
  return h("ul", { class: "reasons", "data-reason-list": true }, reasons.map((r) => h("li", {}, h("span", {}, r.says),
    h("span", { class: "num" }, r.left !== null && r.left !== undefined && Number(r.left) > 0 ? countdown(r.left) : ""))));
}

/**
 * @param {any} ctx
 * @param {{held?: boolean, side?: boolean, run: () => void}} spec
 * @returns {{node: HTMLElement, show: (say: {label: any, ready?: boolean, small?: string, reasons?: Reason[]}) => void}}
 */
export function acting(ctx, spec) {
  const side = (/** @type {string} */ name, /** @type {string} */ symbol, /** @type {string} */ word) =>
    h("button", { type: "button", class: "act side", "data-side": name, "aria-label": word, on: { click: () => ctx.over(name) } }, icon(symbol), word);
  const sides = spec.side === false ? [] : [side("remark", "pen", "Remark"), side("picture", "camera", "Picture")];
  let shut = /** @type {Reason[]} */ ([]);
  const press = () => {
    if (shut.length) alertUser(shut.map((r) => r.says).join(" "));
    else spec.run();
  };
  const held = spec.held ? holdButton({ label: h("span", { "data-held-label": true }), run: press }) : null;
  const first = held?.node ?? h("button", { type: "button", class: "act first", "data-first": true, on: { click: press } });
  if (held) first.setAttribute("data-first", "");
  const node = held ? h("div", { class: "apart" }, first) : h("div", { class: `acts ${sides.length ? "" : "one"}` }, sides, h("div", { class: "first-at" }, first));

  /** what the button says now: labels that did not change are not set again */
  let standing = /** @type {any} */ (null);
  const show = (/** @type {{label: any, ready?: boolean, small?: string, reasons?: Reason[]}} */ say) => {
    shut = say.reasons ?? [];
    const waits = shut.length > 0;
    if (held) {
      const label = /** @type {Element} */ (first.querySelector("[data-held-label]"));
      put(label, waits ? opensWords(shut) : say.label);
      held.enable(!waits && say.ready !== false, waits ? "Not open yet" : say.small ?? "Press and hold for one second");
      return;
    }
    const label = waits ? opensWords(shut) : say.label, off = !waits && say.ready === false;
    if (first.classList.contains("wait") !== waits) first.classList.toggle("wait", waits);
    if (first.getAttribute("aria-disabled") !== String(waits)) first.setAttribute("aria-disabled", String(waits));
    if (/** @type {HTMLButtonElement} */ (first).disabled !== off) /** @type {HTMLButtonElement} */ (first).disabled = off;
    if (standing !== label) put(first, label);
    standing = label;
    // A short label fits whatever the width: the button is laid out by itself while one types.
    const fits = (first.textContent ?? "").length <= FITS;
    if (first.classList.contains("fits") !== fits) first.classList.toggle("fits", fits);
  };
  return { node, show };
}
