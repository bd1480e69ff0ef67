/** Pages laid over the open step, beside the rails and under the head, so that MAKE SAFE stays in reach. One entry a page. */
import { makeSafePage } from "./make_safe.js";
import { pastPage } from "./past.js";
import { personPage } from "./person.js";
import { sumsPage } from "./sums.js";
import { boardPage, cardPage, endEarlyPage, pausePage, picturePage, remarkPage, thisRunPage, tripPage, voidPage } from "./beside.js";

/** name -> page */
const OVERS = { make_safe: makeSafePage, this_run: thisRunPage, remark: remarkPage, picture: picturePage, trip: tripPage, pause: pausePage, past: pastPage, person: personPage, card: cardPage, sums: sumsPage, board: boardPage, end_early: endEarlyPage, void_run: voidPage };

/** @param {any} ctx @param {string} name @param {any} args */
export function overPage(ctx, name, args) {
  const made = /** @type {any} */ (OVERS)[name](ctx, args ?? {});
  made.node.dataset.over = name;
  // A dialog that is not modal: MAKE SAFE stays in reach by touch, key and screen reader.
  made.node.setAttribute("role", "dialog");
  made.node.setAttribute("aria-label", made.node.querySelector("h1")?.textContent ?? "");
  // Escape leaves the page as its own button does; nothing is recorded by leaving.
  made.node.addEventListener("keydown", (/** @type {KeyboardEvent} */ e) => { if (e.key === "Escape") ctx.shut(); });
  return made;
}
