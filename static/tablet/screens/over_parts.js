/** What every page over the open step shares: a head with the way back, and one column of work. */
import { h } from "../dom.js";

/** Head of such a page, with the way back. @param {any} ctx @param {string} title @param {string} [kind] @param {string} [label] */
export function overHead(ctx, title, kind = "", label = "Back to the step") {
  return [h("div", { class: "panel-head" }, h("div", {}, kind ? h("p", { class: "with" }, kind) : null, h("h1", { tabindex: "-1" }, title)), h("button", { type: "button", class: "close", "data-close": true, on: { click: () => ctx.shut() } }, label))];
}

/** The work area of such a page. @param {any[]} l @param {any[]} [r] */
export const overWork = (l, r = []) => h("div", { class: "work" }, h("div", { class: "l" }, l), h("div", { class: "r" }, r));
