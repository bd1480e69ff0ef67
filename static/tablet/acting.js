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
  const node = held ? h("div", { class: "apart" }, first) : h("div", { class: `acts ${sides.length ? "" : "one"}` }, sides, first);

  const show = (/** @type {{label: any, ready?: boolean, small?: string, reasons?: Reason[]}} */ say) => {
    shut = say.reasons ?? [];
    const waits = shut.length > 0;
    if (held) {
      const label = /** @type {Element} */ (first.querySelector("[data-held-label]"));
      put(label, waits ? opensWords(shut) : say.label);
      held.enable(!waits && say.ready !== false, waits ? "Not open yet" : say.small ?? "Press and hold for one second");
      return;
    }
    first.classList.toggle("wait", waits);
    first.setAttribute("aria-disabled", String(waits));
    /** @type {HTMLButtonElement} */ (first).disabled = !waits && say.ready === false;
    put(first, waits ? opensWords(shut) : say.label);
  };
  return { node, show };
}
