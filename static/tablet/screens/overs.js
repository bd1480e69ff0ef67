/** Pages laid over the open step, beside the rails and under the head, so that MAKE SAFE stays in reach. One entry a page. */
import { h } from "../dom.js";
import { makeSafePage } from "./make_safe.js";
import { pastPage } from "./past.js";
import { personPage } from "./person.js";
import { boardPage, cardPage, endEarlyPage, pausePage, picturePage, remarkPage, thisRunPage, tripPage } from "./beside.js";

/** name -> page */
const OVERS = { make_safe: makeSafePage, this_run: thisRunPage, remark: remarkPage, picture: picturePage, trip: tripPage, pause: pausePage, past: pastPage, person: personPage, card: cardPage, board: boardPage, end_early: endEarlyPage };

/** @param {any} ctx @param {string} name @param {any} args */
export function overPage(ctx, name, args) {
  const made = /** @type {any} */ (OVERS)[name](ctx, args ?? {});
  made.node.dataset.over = name;
  // Escape leaves the page as its own button does; nothing is recorded by leaving.
  made.node.addEventListener("keydown", (/** @type {KeyboardEvent} */ e) => { if (e.key === "Escape") ctx.shut(); });
  return made;
}

/** Head of such a page, with the way back. @param {any} ctx @param {string} title @param {string} [kind] @param {string} [label] */
export function overHead(ctx, title, kind = "", label = "Back to the step") {
  return [h("div", { class: "panel-head" }, h("div", {}, kind ? h("p", { class: "with" }, kind) : null, h("h1", { tabindex: "-1" }, title)), h("button", { type: "button", class: "close", "data-close": true, on: { click: () => ctx.shut() } }, label))];
}

/** The work area of such a page. @param {any[]} l @param {any[]} [r] */
export const overWork = (l, r = []) => h("div", { class: "work" }, h("div", { class: "l" }, l), h("div", { class: "r" }, r));
